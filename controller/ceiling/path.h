/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * path: what each segment of a circuit costs and offers under one load.
 *
 * A load is one direction, one transport, and whether the other direction
 * carries the same at the same time.  Acknowledgements ride beside the data
 * where the line is shared by both directions, or where both carry data.
 * Pure.
 */
#ifndef PLAFOND_PATH_H
#define PLAFOND_PATH_H

#include <stdbool.h>
#include <stddef.h>

#include "ceiling/capacity.h"
#include "ceiling/overhead.h"
#include "declare/circuit.h"
#include "declare/fraction.h"

struct error;

struct load {
	enum direction direction;	/* single */
	bool declared;			/* the stack as it stands */
	enum protocol protocol;		/* else with this on top of IP */
	bool both;			/* the other direction does the same */
	/* Segments that one acknowledgement answers; num 0: as declared. */
	struct fraction segments_per_ack;
	/* Where both carry data: packets of the other direction for one of
	 * this; num 0: as many as both ceilings allow at once. */
	struct fraction other_packets;
};

struct path_segment {
	struct overhead overhead;
	struct medium_capacity capacity;
	enum accuracy accuracy;		/* the worst of medium and layers */
	bool reference;			/* nothing of capacity is set */
	struct fraction segments_per_ack;	/* 0 where none are sent */
	struct fraction acks_per_packet;	/* on the line, of either
						 * direction; else 0 */
	bool acks_on_line, acks_in_contract;
	/* Of the line to this direction of this circuit: after contention and
	 * what the other direction takes of a shared line. */
	struct fraction share;
};

/* Segment i at the circuit's MTU.  -1 (ERROR_INPUT): the layers do not fit, or
 * the medium makes no rate. */
int path_segment_make(const struct circuit *circuit, size_t i,
    const struct load *load, struct path_segment *out, struct error *err);
/* The stack of segment i under the load. */
void path_stack(const struct circuit *circuit, size_t i,
    const struct load *load, struct layer_stack *out);

/* Octets of the transport's stream, which windows count, in one packet: the
 * payload and what lies above the transport.  0: it acknowledges nothing. */
struct fraction path_stream_octets(const struct path_segment *segment);
/* Segments that one acknowledgement answers where the receiver's host gives
 * 64 KiB at a time to its TCP: floor(65535 / octets of the stream), not fewer
 * than declared. */
struct fraction path_offload_segments(const struct path_segment *segment);
/* From TCP's counters: data segments received and acknowledgements without
 * data sent.  In thousandths, 0.001 to SEGMENTS_PER_ACK_MOST, so that fractions
 * stay small.  False: one of them is 0 or UNKNOWN_U64. */
bool path_counted_segments(uint64_t data_segments, uint64_t acks,
    struct fraction *segments_per_ack);
#define SEGMENTS_PER_ACK_MOST 1000

/* bit/s that the layers of this direction get. */
struct fraction path_offered_bps(const struct path_segment *segment);
/* Octets at a level, acknowledgements included where they are counted there:
 * on the line, or by a contract.  LINE is what the lowest layer makes. */
struct fraction path_octets_on_line(const struct path_segment *segment,
    enum layer_level level);
struct fraction path_octets_in_contract(const struct path_segment *segment,
    enum layer_level level);
/* Octets of the line itself that one packet takes, with the medium's own. */
struct fraction path_line_octets(const struct path_segment *segment);

#endif
