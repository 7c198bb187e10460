/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * waiting: the packets in front of a line whose first bit is not yet sent.
 *
 * A ring of a fixed size.  Pure.
 */
#ifndef PLAFOND_WAITING_H
#define PLAFOND_WAITING_H

#include <stdbool.h>
#include <stdint.h>

struct waiting_packet {
	uint64_t start_ns;	/* first bit, rounded up */
	uint32_t bytes;
};

struct waiting {
	struct waiting_packet *ring;	/* owned */
	uint32_t most, first, count;
	uint64_t bytes;
};

/* -1: no memory; waiting_fini is then still fine. */
int waiting_init(struct waiting *waiting, uint32_t most);
void waiting_fini(struct waiting *waiting);
/* What has begun by now waits no longer. */
void waiting_release(struct waiting *waiting, uint64_t now_ns);
bool waiting_is_full(const struct waiting *waiting);
/* Starts do not go back; there must be room. */
void waiting_add(struct waiting *waiting, uint64_t start_ns, uint32_t bytes);

#endif
