/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "conduct/overlap.h"

#include "units.h"

int
overlap_add(struct overlap *overlap, uint64_t end_ns, uint64_t bytes)
{
	struct overlap_edge edge;

	if (end_ns <= overlap_end_ns(overlap))
		return -1;
	overlap->bytes += bytes;
	edge.end_ns = end_ns;
	edge.bytes = overlap->bytes;
	if (overlap->rows < OVERLAP_KEPT)
		overlap->head[overlap->rows] = edge;
	overlap->tail[overlap->rows % OVERLAP_KEPT] = edge;
	overlap->rows++;
	return 0;
}

uint64_t
overlap_end_ns(const struct overlap *overlap)
{
	return overlap->rows == 0 ? 0 :
	    overlap->tail[(overlap->rows - 1) % OVERLAP_KEPT].end_ns;
}

/* Edge of row i, -1: not kept. */
static int
edge_of(const struct overlap *overlap, uint64_t i, struct overlap_edge *out)
{
	if (i < OVERLAP_KEPT)
		*out = overlap->head[i];
	else if (i + OVERLAP_KEPT >= overlap->rows)
		*out = overlap->tail[i % OVERLAP_KEPT];
	else
		return -1;
	return 0;
}

/* Cumulative octets at an instant. */
static int
bytes_at(const struct overlap *overlap, uint64_t at_ns, uint64_t *out)
{
	struct overlap_edge before = { 0, 0 }, after;

	for (uint64_t i = 0; i < overlap->rows; i++) {
		if (edge_of(overlap, i, &after) == -1) {
			/* on to the first row that is kept again */
			i = overlap->rows - OVERLAP_KEPT;
			(void)edge_of(overlap, i, &before);
			if (at_ns < before.end_ns)
				return -1;
			continue;
		}
		if (at_ns <= after.end_ns) {
			*out = before.bytes + scale_u64(
			    after.bytes - before.bytes,
			    at_ns - before.end_ns,
			    after.end_ns - before.end_ns);
			return 0;
		}
		before = after;
	}
	return -1;
}

int
overlap_bytes(const struct overlap *overlap, uint64_t from_ns, uint64_t to_ns,
    uint64_t *out)
{
	uint64_t from_bytes, to_bytes;

	if (bytes_at(overlap, from_ns, &from_bytes) == -1 ||
	    bytes_at(overlap, to_ns, &to_bytes) == -1)
		return -1;
	*out = to_bytes - from_bytes;
	return 0;
}
