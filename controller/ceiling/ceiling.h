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
#include "ceiling/overhead.h"
#include "declare/circuit.h"
#include "trial.h"
#include "units.h"

struct error;

#define LADDER_STEPS_MAX (OVERHEAD_PARTS_MAX + 1)

/* One line of the ladder: what is taken off, and where that leads.  The octets
 * of the steps and of the payload add up to those of the line; the rates of
 * the steps between two levels to the difference of their rates. */
struct ladder_step {
	char name[64];		/* "ethernet: preamble, SFD, gap" */
	uint64_t bytes_num, bytes_den;	/* octets a packet; 0/1 if unused */
	uint64_t bps;		/* apportioned: the column adds up */
	bool reaches_level;	/* after this step we are at `level` */
	enum layer_level level;
	const char *source;	/* borrowed from the tables */
};

struct ceiling {
	enum direction direction;	/* single */
	enum protocol protocol;
	bool reference;			/* medium host: no rates below */
	bool has_level[LEVELS];		/* a medium without frames has none */
	uint64_t rate_bps[LEVELS];	/* rounded down; 0 without the level */
	uint128 payload_num, payload_den;	/* exact payload rate */
	uint64_t level_bytes_num[LEVELS];	/* octets a packet, there */
	uint64_t level_bytes_den;
	uint64_t packet_bytes;		/* L, the lowest IP layer's packet */
	uint64_t line_rate_bps;		/* of the narrow segment's medium */
	uint64_t unused_bps;		/* line rate that the contract leaves */
	struct bound bounds[BOUNDS_MAX];
	size_t bounds_count;
	struct ladder_step steps[LADDER_STEPS_MAX];
	size_t steps_count;
	size_t narrow;			/* segment of the binding bound */
	uint64_t tolerance_ppm;		/* of the narrow medium's clock */
	enum medium_accuracy accuracy;
	uint64_t burst_bytes;		/* of the binding contract, or 0 */
	/* Level at which the binding contract is counted, and the rate there
	 * divided by the payload rate; payload and 1 where a medium binds. */
	uint64_t binding_counted_at;
	double binding_counted_ratio;
};

/* Ceiling of one direction for a transport (the declared stack's transport and
 * what lies above it are replaced by `protocol`).  Borrows circuit.
 * -1 (ERROR_INPUT): the layers do not fit into the MTU. */
int ceiling_compute(const struct circuit *circuit, enum direction direction,
    enum protocol protocol, struct ceiling *out, struct error *err);
/* The protocol that the declared stack ends in. */
enum protocol circuit_default_protocol(const struct circuit *circuit);

/* Add a condition (it never lowers the ceiling) and mark the lowest one. */
int ceiling_add_condition(struct ceiling *ceiling, const char *name,
    uint64_t payload_bps, const char *source, struct error *err);

/* Whole numbers for a column of the ladder: between two levels the steps add up
 * to the difference of the levels' whole parts.  What rounding takes from the
 * lower level goes to its last step; the rest by largest remainders. */
void ladder_round(const struct ladder_step *steps, size_t count,
    const struct fraction values[], const struct fraction levels[LEVELS],
    uint64_t out[]);

#endif
