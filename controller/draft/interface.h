/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * interface: what the kernel knows of a network interface and of those below
 * it, down to the lowest.
 *
 * Asks rtnetlink (links, addresses, the route to the far end of a tunnel),
 * ethtool (rate and duplex) and sysfs (the type of a device).  Only reads, and
 * needs no privilege.  What the kernel does not know is said to be unknown.
 */
#ifndef PLAFOND_INTERFACE_H
#define PLAFOND_INTERFACE_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

struct error;

#define INTERFACE_NAME_SIZE 16		/* IFNAMSIZ of linux/if.h */
#define INTERFACE_DEPTH_MAX 8		/* devices in one chain */
#define INTERFACE_PORTS_MAX 8		/* kept of a bridge or a bond */
#define INTERFACE_UNKNOWN UINT64_MAX

enum interface_kind {
	INTERFACE_PORT,		/* frames leave here; a driver of hardware */
	INTERFACE_LOOPBACK,
	INTERFACE_VETH,
	INTERFACE_DUMMY,	/* dummy, ifb: leads nowhere */
	INTERFACE_TUN,		/* packets go to a program */
	INTERFACE_TAP,		/* frames go to a program */
	INTERFACE_BRIDGE,
	INTERFACE_BOND,		/* bond, team */
	INTERFACE_VLAN,
	INTERFACE_MACVLAN,	/* macvlan, macvtap, ipvlan, ipvtap */
	INTERFACE_MACSEC,
	INTERFACE_VXLAN,
	INTERFACE_GENEVE,
	INTERFACE_GRE,		/* gre, gretap, ip6gre, ip6gretap */
	INTERFACE_IPIP,		/* ipip, sit, ip6tnl */
	INTERFACE_WIREGUARD,
	INTERFACE_ESP,		/* vti, vti6, xfrm */
	INTERFACE_PPP,
	INTERFACE_WLAN,
	INTERFACE_WWAN,
	INTERFACE_OTHER,
	INTERFACE_KINDS
};

/* Why a chain ends where it does. */
enum interface_below {
	INTERFACE_BELOW_NOTHING,	/* it is a lowest one */
	INTERFACE_BELOW_DEVICE,		/* the next of the chain */
	INTERFACE_BELOW_PORTS,		/* none or several of them */
	INTERFACE_BELOW_ELSEWHERE,	/* in another network namespace */
	INTERFACE_BELOW_UNTOLD		/* the kernel does not say */
};

enum interface_duplex {
	INTERFACE_DUPLEX_UNKNOWN,
	INTERFACE_DUPLEX_HALF,
	INTERFACE_DUPLEX_FULL
};

/* What makes a tunnel's octets differ from those of its plain form. */
enum interface_oddity {
	INTERFACE_PLAIN,
	INTERFACE_PER_PACKET,	/* far end and options are set by packet */
	INTERFACE_IN_UDP,	/* FOU or GUE: inside UDP */
	INTERFACE_GPE,		/* VXLAN-GPE */
	INTERFACE_MPLS		/* carries MPLS */
};

struct interface_device {
	char name[INTERFACE_NAME_SIZE];	/* any octets but NUL, '/', space */
	enum interface_kind kind;
	char kernel_kind[32];		/* "vxlan"; "": no kind of its own */
	char driver[32];		/* "": unknown */
	uint64_t mtu_bytes;
	bool frames;			/* carries Ethernet frames */
	bool up, carrier;
	bool ipv4, ipv6;		/* addresses beyond the link's own; of
					 * the first device only */
	uint64_t line_bps;		/* or INTERFACE_UNKNOWN */
	enum interface_duplex duplex;
	bool negotiated;

	unsigned vlan_id;
	bool service_tag;		/* 802.1ad */
	bool macsec_sci;
	bool macsec_sci_if_peers;	/* sent with two peers and more */
	unsigned macsec_icv_bytes;
	unsigned outer_version;		/* of a tunnel: 4, 6, 0 unknown */
	unsigned inner_version;		/* 4, 6, 0 either */
	bool outer_assumed;		/* by the kernel's default */
	bool encapsulation_limit;	/* RFC 2473 section 4.1.1 */
	bool gre_checksum, gre_key, gre_sequence;	/* as sent */
	bool gre_differs;		/* as received: otherwise */
	enum interface_oddity oddity;

	enum interface_below below;
	bool by_route;			/* the next one, at this moment */
	char master[INTERFACE_NAME_SIZE];	/* it is a port of; or "" */
	struct interface_port {
		char name[INTERFACE_NAME_SIZE];
		bool real;		/* INTERFACE_PORT */
		uint64_t line_bps;	/* or INTERFACE_UNKNOWN */
	} ports[INTERFACE_PORTS_MAX];
	size_t ports_count;		/* may be beyond those kept */
};

/* From the one that was named down to the lowest that is known. */
struct interface_facts {
	struct interface_device device[INTERFACE_DEPTH_MAX];
	size_t count;			/* at least 1 */
};

/* -1: ERROR_ABSENT with the names there are, ERROR_INTERNAL. */
int interface_read(const char *name, struct interface_facts *out,
    struct error *err);

#endif
