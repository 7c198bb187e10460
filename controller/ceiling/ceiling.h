/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * ceiling: the highest rate to expect at each layer in one direction.
 *
 * The lowest bound of class medium or contract over all segments, carried as
 * a fraction of integers to the edge.  Knows nothing of agents.  Pure.
 */
#ifndef PLAFOND_CEILING_H
#define PLAFOND_CEILING_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "ceiling/bound.h"
#include "ceiling/path.h"
#include "declare/circuit.h"
#include "trial.h"
#include "units.h"

struct error;

/* Contention, the other direction, the contract; the medium's own; the
 * acknowledgements; then the layers'. */
#define LADDER_STEPS_MAX (OVERHEAD_PARTS_MAX + MEDIUM_STEPS_MAX + 4)

/* One line of the ladder: what is taken off, and where that leads.  The octets
 * of the steps and of the payload add up to those of the line; the rates of
 * the steps between two levels to the difference of their rates. */
struct ladder_step {
	char name[64];		/* "ethernet: preamble, SFD, gap" */
	uint128 bytes_num, bytes_den;	/* octets a packet; 0/1: of none */
	uint64_t bps;		/* apportioned: the column adds up */
	bool reaches_level;	/* after this step we are at `level` */
	enum layer_level level;
	const char *source;	/* borrowed from the tables */
};

struct ceiling {
	enum direction direction;	/* single */
	enum protocol protocol;		/* the nearest, of a declared stack */
	char top[64];			/* "tcp+tls": what is above IP */
	bool both;			/* the other direction has its load */
	bool shared;			/* both share the narrow line */
	/* Segments that one acknowledgement answers, where they lower it; else
	 * 0. */
	double segments_per_ack;
	bool reference;			/* medium host: no rates below */
	bool has_level[LEVELS];		/* a medium without frames has none */
	uint64_t rate_bps[LEVELS];	/* rounded down; 0 without the level */
	struct mixed payload;		/* bit/s, exact */
	uint128 level_bytes_num[LEVELS];	/* octets a packet, there */
	uint128 level_bytes_den;
	/* The same of the transport's own stream of octets, which windows
	 * count: payload and what lies above the transport.  0: nothing of the
	 * transport is acknowledged. */
	uint128 stream_bytes_num;
	uint64_t packet_bytes;		/* L, the lowest IP layer's packet */
	uint64_t line_rate_bps;		/* of the narrow segment's medium */
	uint64_t shared_bps;		/* line rate that others get */
	uint64_t unused_bps;		/* line rate that the contract leaves */
	size_t bounds_count;
	size_t steps_count;
	size_t narrow;			/* segment of the binding bound */
	uint64_t tolerance_ppm;		/* of the narrow medium's clock */
	enum accuracy accuracy;		/* of the narrow segment */
	size_t notes_count;
	uint64_t burst_bytes;		/* of the binding contract, or 0 */
	uint64_t burst_payload_bytes;	/* payload that it lets through */
	/* Level at which the binding contract is counted, and the rate there
	 * divided by the payload rate; payload and 1 where a medium binds. */
	uint64_t binding_counted_at;
	double binding_counted_ratio;
	/* Last, for nothing beyond their counts is set. */
	struct bound bounds[BOUNDS_MAX];
	struct ladder_step steps[LADDER_STEPS_MAX];
	char notes[MEDIUM_NOTES_MAX][MEDIUM_NOTE_SIZE];	/* on its medium */
};

/* Ceiling of one direction under a load.  Borrows circuit.
 * -1 (ERROR_INPUT): the layers do not fit into the MTU, or a medium's
 * parameters make no rate. */
int ceiling_of_load(const struct circuit *circuit, const struct load *load,
    struct ceiling *out, struct error *err);
/* The same for a transport alone on the circuit: the declared stack's transport
 * and what lies above it are replaced by `protocol`. */
int ceiling_compute(const struct circuit *circuit, enum direction direction,
    enum protocol protocol, struct ceiling *out, struct error *err);
/* What to expect of a load before anything is counted: from the declared
 * segments an acknowledgement to those of one receive offload of 64 KiB.  Both
 * alike where acknowledgements take nothing from the ceiling. */
int ceiling_range(const struct circuit *circuit, const struct load *load,
    struct ceiling *low, struct ceiling *high, struct error *err);
/* The bound that makes the ceiling; NULL: a reference has none. */
const struct bound *ceiling_binding(const struct ceiling *ceiling);
/* The protocol that the declared stack ends in. */
enum protocol circuit_default_protocol(const struct circuit *circuit);

/* Add a condition (it never lowers the ceiling) and mark the lowest one. */
int ceiling_add_condition(struct ceiling *ceiling, const char *name,
    uint64_t payload_bps, const char *source, struct error *err);

/* Whole numbers for a column of the ladder that begins at `top`: between two
 * levels the steps add up to the difference of the levels' whole parts.  What
 * rounding takes from the lower level goes to its last step; the rest by
 * largest remainders. */
void ladder_round(const struct ladder_step *steps, size_t count,
    const struct mixed values[], const struct mixed levels[LEVELS],
    uint64_t top, uint64_t out[]);

#endif
