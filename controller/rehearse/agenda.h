/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * agenda: handles in the order in which they fall due.
 *
 * A binary heap of a fixed size.  What falls due at the same time comes in the
 * order in which it was added or moved.  Pure.
 */
#ifndef PLAFOND_AGENDA_H
#define PLAFOND_AGENDA_H

#include <stddef.h>
#include <stdint.h>

struct agenda_entry {
	uint64_t due_ns;
	uint64_t order;
	uint32_t place;		/* in the heap */
};

struct agenda {
	struct agenda_entry *entries;	/* owned; by handle */
	uint32_t *heap;			/* owned; handles, due first in front */
	uint32_t *unused;		/* owned; a stack of handles */
	uint32_t count, most;
	uint64_t orders;
};

/* -1: no memory; agenda_fini is then still fine. */
int agenda_init(struct agenda *agenda, uint32_t most);
void agenda_fini(struct agenda *agenda);
uint32_t agenda_room(const struct agenda *agenda);
/* A handle below most; there must be room. */
uint32_t agenda_add(struct agenda *agenda, uint64_t due_ns);
/* To an earlier or the same time, behind what is due then by now. */
void agenda_advance(struct agenda *agenda, uint32_t handle, uint64_t due_ns);
uint64_t agenda_due_ns(const struct agenda *agenda, uint32_t handle);
/* UINT64_MAX: nothing is due. */
uint64_t agenda_next_ns(const struct agenda *agenda);
/* The first handle, which is free from now on; there must be one. */
uint32_t agenda_take(struct agenda *agenda);

#endif
