/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * packet_rate: how many packets of one size a circuit carries, whatever is in
 * them.
 *
 * The lowest bound of class medium or contract over all segments, as for the
 * ceiling, but without a transport: no acknowledgements and no payload.
 * Frames are those of the segment where the traffic enters (RFC 2544 section
 * 20, RFC 5180 appendix A).  Pure.
 */
#ifndef PLAFOND_PACKET_RATE_H
#define PLAFOND_PACKET_RATE_H

#include <stdbool.h>
#include <stdint.h>

#include "ceiling/bound.h"
#include "declare/circuit.h"
#include "declare/fraction.h"
#include "trial.h"

struct error;

struct packet_rate {
	uint64_t packet_bytes;		/* of the lowest IP layer */
	bool has_frame;
	struct fraction frame_bytes;	/* where it enters; 0: no frames */
	struct fraction packets_per_s;
	bool has_level[LEVELS];		/* LINE to PACKET */
	uint64_t rate_bps[LEVELS];	/* where it enters; rounded down */
	char binding[96];		/* name of the lowest bound */
	/* A contract that counts above the packet says nothing of it. */
	bool contract_ignored;
};

/* -1 (ERROR_INPUT): a medium makes no rate for such packets.  The circuit must
 * not be a reference. */
int packet_rate_compute(const struct circuit *circuit,
    enum direction direction, uint64_t packet_bytes, struct packet_rate *out,
    struct error *err);

/* The largest packet, up to the circuit's MTU, whose frame where the traffic
 * enters has frame_bytes; 0: none has. */
uint64_t packet_of_frame(const struct circuit *circuit,
    enum direction direction, uint64_t frame_bytes);
/* Octets of tags that a frame has there beyond the untagged one. */
uint64_t packet_tags_bytes(const struct circuit *circuit,
    enum direction direction);
/* Does the stack have frames there? */
bool packet_has_frames(const struct circuit *circuit,
    enum direction direction);

#endif
