/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * ring: finished items from one thread to one other, without a lock.
 *
 * Single producer, single consumer: ring_reserve and ring_commit are the
 * producer's, ring_front and ring_pop the consumer's.  What was written to a
 * slot before its commit is seen after ring_front has returned it (C11
 * release and acquire).  Allocates at the start only.
 */
#ifndef PLAFOND_RING_H
#define PLAFOND_RING_H

#include <stddef.h>

struct error;
struct ring;

/* slots: a power of two.  Returns owned. */
int ring_new(size_t slots, size_t slot_bytes, struct ring **out,
    struct error *err);
void ring_free(struct ring *ring);	/* NULL is fine; both threads done */

void *ring_reserve(struct ring *ring);	/* the next slot; NULL: full */
void ring_commit(struct ring *ring);	/* hands over the reserved slot */

const void *ring_front(struct ring *ring);	/* the oldest; NULL: empty */
void ring_pop(struct ring *ring);		/* gives that slot back */

#endif
