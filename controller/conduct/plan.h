/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * plan: which trials a task needs, from the declaration and what the agents
 * said of themselves.  Pure.
 */
#ifndef PLAFOND_PLAN_H
#define PLAFOND_PLAN_H

#include <stddef.h>
#include <stdint.h>

#include "ceiling/ceiling.h"
#include "declare/circuit.h"
#include "trial.h"

#define PLAN_TRIALS_MAX (3 * 1000)

struct plan {
	struct trial trials[PLAN_TRIALS_MAX];
	size_t count;
};

/* What the plan must know beyond the declaration. */
struct plan_facts {
	uint64_t round_trip_ns;			/* between the ends */
	uint64_t window_bytes[DIRECTIONS_SINGLE];	/* largest that the
						 * hosts can open; 0 unknown */
};

/* ceiling(bandwidth-delay product / window), at least 1, at most
 * TRIAL_STREAMS_MAX: RFC 6349 section 5.1 and Table 5.1. */
uint64_t plan_streams(uint64_t rate_bps, uint64_t round_trip_ns,
    uint64_t window_bytes);
/* Time of slow start to fill the path: doublings from the initial window of
 * RFC 6928, section 2, once a round trip; at most 10 s. */
uint64_t plan_ramp_ns(uint64_t rate_bps, uint64_t round_trip_ns,
    uint64_t mss_bytes);
/* max(stated, ramp + 10 round trips, drain of a burst allowance: 8 B / (P - R)
 * at line rate P and contract rate R), rounded up to a row (down where a row
 * more would be too long), at most 10 s. */
uint64_t plan_settle_ns(uint64_t stated_ns, uint64_t ramp_ns,
    uint64_t round_trip_ns, uint64_t burst_bytes, uint64_t line_bps,
    uint64_t contract_bps, uint64_t row_ns);

/* Trials in turn: one of each direction, then the next of each, so that what
 * drifts over time touches the directions alike. */
void plan_make(const struct circuit *circuit, const struct ceiling ceilings[],
    const struct plan_facts *facts, struct plan *out);
/* Longest time that the plan takes, without preflight. */
uint64_t plan_duration_ns(const struct plan *plan);

#endif
