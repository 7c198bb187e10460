/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * overhead: what a full packet costs in octets at each level of a stack.
 *
 * Walks the layers and honours every member of struct layer_cost; knows no
 * layer by name and no rates.  Pure.
 */
#ifndef PLAFOND_OVERHEAD_H
#define PLAFOND_OVERHEAD_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "declare/fraction.h"
#include "declare/stack.h"

struct error;

/* A layer has at most four: coding, around, inside, padding. */
#define OVERHEAD_PARTS_MAX (4 * LAYERS_MAX)

/* One part of what one layer costs a packet. */
struct overhead_part {
	const struct layer *layer;	/* borrowed from the table */
	const char *what;		/* "header and FCS"; borrowed */
	struct fraction octets;
	bool reaches_level;		/* with this part taken off we are at */
	enum layer_level level;
};

struct overhead {
	bool has_level[LEVELS];
	struct fraction octets[LEVELS];	/* a packet; 0 without the level */
	/* Of a segment without payload, which acknowledges; LINE to SEGMENT.
	 * All 0 where the transport sends none. */
	struct fraction ack_octets[LEVELS];
	struct overhead_part parts[OVERHEAD_PARTS_MAX];	/* from the line up */
	size_t parts_count;
	uint64_t packet_bytes;		/* of the lowest IP layer */
};

/* Octets of the largest packet that fits into mtu_bytes; upstream: away from a
 * subscriber, where some layers cost less.  The parts and the payload add up
 * to the line.
 * -1 (ERROR_INPUT): the layers leave no room for payload. */
int overhead_compute(const struct layer_stack *stack, uint64_t mtu_bytes,
    bool upstream, struct overhead *out, struct error *err);
/* Octets at LINE, FRAME, FRAME_WITHOUT_FCS and PACKET of a packet of the lowest
 * IP layer, whatever it carries; the other levels and those that the stack
 * does not have are 0. */
void overhead_of_packet(const struct layer_stack *stack, uint64_t packet_bytes,
    bool upstream, struct fraction octets[LEVELS]);

#endif
