/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ring.h"

#include <assert.h>
#include <stdalign.h>
#include <stdatomic.h>
#include <stdlib.h>

#include "error.h"

#define CACHE_LINE_BYTES 64	/* x86-64 and most of arm64, from memory */

/* Both counts only grow; their difference is what the ring holds. */
struct ring {
	size_t slots, slot_bytes;
	unsigned char *memory;		/* owned */
	alignas(CACHE_LINE_BYTES) atomic_size_t committed;
	alignas(CACHE_LINE_BYTES) atomic_size_t popped;
};

int
ring_new(size_t slots, size_t slot_bytes, struct ring **out,
    struct error *err)
{
	struct ring *ring;

	assert(slots > 0 && (slots & (slots - 1)) == 0);
	ring = aligned_alloc(CACHE_LINE_BYTES, sizeof(*ring));
	if (ring == NULL)
		return error_errno(err, ERROR_INTERNAL, "ring");
	ring->slots = slots;
	/* whole lines, so that two slots never share one */
	ring->slot_bytes = (slot_bytes + CACHE_LINE_BYTES - 1) /
	    CACHE_LINE_BYTES * CACHE_LINE_BYTES;
	atomic_init(&ring->committed, 0);
	atomic_init(&ring->popped, 0);
	ring->memory = aligned_alloc(CACHE_LINE_BYTES,
	    slots * ring->slot_bytes);
	if (ring->memory == NULL) {
		free(ring);
		return error_errno(err, ERROR_INTERNAL, "ring of %zu slots",
		    slots);
	}
	*out = ring;
	return 0;
}

void
ring_free(struct ring *ring)
{
	if (ring == NULL)
		return;
	free(ring->memory);
	free(ring);
}

static void *
slot(struct ring *ring, size_t count)
{
	return ring->memory + (count & (ring->slots - 1)) * ring->slot_bytes;
}

void *
ring_reserve(struct ring *ring)
{
	size_t committed = atomic_load_explicit(&ring->committed,
	    memory_order_relaxed);
	size_t popped = atomic_load_explicit(&ring->popped,
	    memory_order_acquire);

	return committed - popped < ring->slots ? slot(ring, committed) : NULL;
}

void
ring_commit(struct ring *ring)
{
	size_t committed = atomic_load_explicit(&ring->committed,
	    memory_order_relaxed);

	atomic_store_explicit(&ring->committed, committed + 1,
	    memory_order_release);
}

const void *
ring_front(struct ring *ring)
{
	size_t popped = atomic_load_explicit(&ring->popped,
	    memory_order_relaxed);
	size_t committed = atomic_load_explicit(&ring->committed,
	    memory_order_acquire);

	return committed != popped ? slot(ring, popped) : NULL;
}

void
ring_pop(struct ring *ring)
{
	size_t popped = atomic_load_explicit(&ring->popped,
	    memory_order_relaxed);

	atomic_store_explicit(&ring->popped, popped + 1, memory_order_release);
}
