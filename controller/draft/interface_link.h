/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * interface_link: one link as rtnetlink's message tells it.
 *
 * rtnetlink(7), linux/if_link.h, linux/if_tunnel.h.  The library's own link
 * objects leave out what costs octets (a tunnel inside UDP, VXLAN-GPE, far ends
 * by packet), hence its attributes and not its objects.  Pure.
 */
#ifndef PLAFOND_INTERFACE_LINK_H
#define PLAFOND_INTERFACE_LINK_H

#include <stdbool.h>

#include "draft/interface.h"

struct nlmsghdr;

struct interface_link {
	struct interface_device device;	/* what the message says of it */
	bool named;			/* it has the name that is sought */
	int index;
	int lower_index;		/* 0: none is told */
	int master_index;		/* 0: is no port of another */
	bool lower_elsewhere;		/* in another network namespace */
	unsigned remote_version;	/* 4, 6, 0: none is told */
	unsigned char remote[16];	/* far end of the tunnel */
};

/* RTM_NEWLINK; `sought` may be an alternative name of the link.  -1: it is
 * malformed, or no such message. */
int interface_link_parse(struct nlmsghdr *message, const char *sought,
    struct interface_link *out);

#endif
