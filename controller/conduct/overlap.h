/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * overlap: octets of one direction between any two instants near the two ends
 * of a trial, from its rows.
 *
 * When both directions run at once only the overlap of their two windows
 * counts, and that is known at the end.  So the first and the last rows are
 * kept as cumulative octets, and what lies between them as one number: any
 * length of trial needs the same memory.  Linear between edges.  Pure.
 */
#ifndef PLAFOND_OVERLAP_H
#define PLAFOND_OVERLAP_H

#include <stddef.h>
#include <stdint.h>

#define OVERLAP_KEPT 4096	/* rows at each end: 20 s and more at 10 ms */

struct overlap_edge {
	uint64_t end_ns, bytes;		/* since the direction's zero */
};
struct overlap {
	struct overlap_edge head[OVERLAP_KEPT];
	struct overlap_edge tail[OVERLAP_KEPT];	/* a ring */
	uint64_t rows;
	uint64_t bytes;
};

/* Rows in order.  -1: end_ns does not grow, the row is not taken. */
int overlap_add(struct overlap *overlap, uint64_t end_ns, uint64_t bytes);
/* End of the last row, 0 without rows. */
uint64_t overlap_end_ns(const struct overlap *overlap);
/* Octets in [from, to), to >= from.  -1: an instant lies beyond the rows, or
 * among rows that were not kept. */
int overlap_bytes(const struct overlap *overlap, uint64_t from_ns,
    uint64_t to_ns, uint64_t *out);

#endif
