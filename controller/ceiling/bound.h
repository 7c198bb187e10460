/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * bound: upper limits of the payload rate in one direction.
 *
 * Bounds of class medium or contract make the ceiling: the lowest of them.
 * A condition never lowers it; it explains a shortfall.  Pure.
 */
#ifndef PLAFOND_BOUND_H
#define PLAFOND_BOUND_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "ceiling/path.h"
#include "declare/circuit.h"
#include "declare/fraction.h"
#include "trial.h"

/* A segment has a line, a channel, a contract and a device. */
#define BOUNDS_MAX (4 * SEGMENTS_MAX + 16)

enum bound_class { BOUND_MEDIUM, BOUND_CONTRACT, BOUND_CONDITION };
const char *bound_class_name(enum bound_class class);

struct bound {
	char name[96];		/* "line of segment 'access'" */
	enum bound_class class;
	uint64_t payload_bps;	/* rounded down */
	bool binding;		/* of the ceiling, or among conditions */
	char source[160];
};

/* A bound with what the ceiling needs beside it. */
struct exact_bound {
	struct bound bound;
	struct fraction bps_an_octet;	/* of the packet, at any level */
	struct mixed payload;		/* bit/s */
	size_t segment;			/* where it lies */
	enum layer_level counted_at;	/* of a contract; else payload */
	uint64_t burst_bytes;		/* of a contract, counted like it */
	uint64_t burst_payload_bytes;	/* payload that it lets through */
};

/* The line of segment i under the load. */
void bound_medium(const struct circuit *circuit, size_t i,
    const struct path_segment *segment, struct exact_bound *out);
/* Its channel's capacity by Shannon; false: it is not known. */
bool bound_channel(const struct circuit *circuit, size_t i,
    const struct path_segment *segment, struct exact_bound *out);
/* The contract of segment i; false: it states no rate in this direction. */
bool bound_segment_contract(const struct circuit *circuit, size_t i,
    enum direction direction, const struct path_segment *segment,
    struct exact_bound *out);
/* The circuit's own services added up.  False: there are none, or one states
 * no rate in this direction and so may use what the line leaves.  Segment i
 * is where the traffic enters and is metered. */
bool bound_circuit_contract(const struct circuit *circuit, size_t i,
    enum direction direction, const struct path_segment *segment,
    struct exact_bound *out);
/* What a device at segment i forwards, in packets a second; false: none is
 * declared. */
bool bound_device(const struct circuit *circuit, size_t i,
    const struct path_segment *segment, struct exact_bound *out);

#endif
