/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "conduct/plan.h"

#include <stdio.h>
#include <string.h>

#include "ceiling/window.h"

#define PAYLOAD_PERIOD_BYTES (UINT64_C(16) << 20)
/* Within one machine nothing on the way can compress or deduplicate, and a
 * payload that fits the cache measures the transfer, not the memory. */
#define PAYLOAD_PERIOD_REFERENCE_BYTES (UINT64_C(1) << 20)

uint64_t
plan_streams(uint64_t rate_bps, uint64_t round_trip_ns, uint64_t window_bytes)
{
	uint64_t streams;

	if (window_bytes == 0)
		return 1;
	streams = window_streams(window_needed_bytes(rate_bps, round_trip_ns),
	    window_bytes);
	return streams < TRIAL_STREAMS_MAX ? streams : TRIAL_STREAMS_MAX;
}

uint64_t
plan_ramp_ns(uint64_t rate_bps, uint64_t round_trip_ns, uint64_t mss_bytes)
{
	struct ramp ramp;

	if (mss_bytes == 0)
		return 0;
	window_ramp(rate_bps, round_trip_ns, window_initial_bytes(mss_bytes),
	    &ramp);
	return ramp.ns < TRIAL_SETTLE_MAX_NS ? ramp.ns : TRIAL_SETTLE_MAX_NS;
}

/* Up to a whole row, or down where that would be too long. */
static uint64_t
whole_rows(uint64_t settle_ns, uint64_t row_ns)
{
	uint64_t rows;

	if (settle_ns > TRIAL_SETTLE_MAX_NS)
		settle_ns = TRIAL_SETTLE_MAX_NS;
	rows = settle_ns / row_ns + (settle_ns % row_ns != 0);
	if (rows * row_ns > TRIAL_SETTLE_MAX_NS)
		rows--;
	return rows * row_ns;
}

uint64_t
plan_settle_ns(uint64_t stated_ns, uint64_t ramp_ns, uint64_t round_trip_ns,
    uint64_t burst_bytes, uint64_t line_bps, uint64_t contract_bps,
    uint64_t row_ns)
{
	uint64_t settle_ns = stated_ns, drain_ns = 0;

	if (ramp_ns > TRIAL_SETTLE_MAX_NS || round_trip_ns >
	    TRIAL_SETTLE_MAX_NS)
		return whole_rows(TRIAL_SETTLE_MAX_NS, row_ns);
	if (ramp_ns + 10 * round_trip_ns > settle_ns)
		settle_ns = ramp_ns + 10 * round_trip_ns;
	if (burst_bytes != 0 && line_bps > contract_bps)
		drain_ns = bucket_lasts_ns(burst_bytes, contract_bps,
		    line_bps);
	if (drain_ns > settle_ns)
		settle_ns = drain_ns;
	return whole_rows(settle_ns, row_ns);
}

/* At the lowest level that there is, to compare with the line rate. */
static uint64_t
contract_bps(const struct ceiling *ceiling)
{
	int level = LEVEL_LINE;

	while (level < LEVEL_PAYLOAD && !ceiling->has_level[level])
		level++;
	return ceiling->rate_bps[level];
}

/* What the path of one direction asks for; a trial of both gets the larger. */
static void
fit_to_path(const struct circuit *circuit, const struct ceiling *ceiling,
    const struct plan_facts *facts, uint64_t window_bytes,
    struct trial *trial)
{
	const struct plan_declaration *declared = &circuit->plan;
	uint64_t payload_bps = ceiling->rate_bps[LEVEL_PAYLOAD];
	uint64_t streams = plan_streams(payload_bps, facts->round_trip_ns,
	    window_bytes);
	uint64_t ramp_ns, settle_ns;

	if (declared->streams == FIELD_UNSET && streams > trial->streams)
		trial->streams = streams;
	ramp_ns = plan_ramp_ns(payload_bps, facts->round_trip_ns,
	    ceiling->level_bytes_den == 0 ? 0 :
	    (uint64_t)(ceiling->level_bytes_num[LEVEL_PAYLOAD] /
	    ceiling->level_bytes_den));
	settle_ns = plan_settle_ns(declared->settle_ns, ramp_ns,
	    facts->round_trip_ns, ceiling->burst_bytes,
	    ceiling->line_rate_bps, contract_bps(ceiling), trial->row_ns);
	if (settle_ns > trial->settle_ns)
		trial->settle_ns = settle_ns;
}

static void
make_trial(const struct circuit *circuit, const struct ceiling ceilings[],
    const struct plan_facts *facts, enum direction direction,
    struct trial *trial)
{
	const struct plan_declaration *declared = &circuit->plan;
	bool reference = circuit_is_reference(circuit);

	memset(trial, 0, sizeof(*trial));
	trial->protocol = PROTOCOL_TCP;
	trial->direction = direction;
	trial->opens = (enum end)declared->opens;
	trial->streams = declared->streams == FIELD_UNSET ? 1 :
	    declared->streams;
	trial->duration_ns = declared->duration_ns;
	trial->row_ns = declared->row_ns;
	trial->settle_ns = plan_settle_ns(declared->settle_ns, 0, 0, 0, 0, 0,
	    declared->row_ns);
	trial->settle_extends = declared->settle_extends == FIELD_UNSET ?
	    !reference : declared->settle_extends != 0;
	(void)snprintf(trial->congestion_control,
	    sizeof(trial->congestion_control), "%s",
	    declared->congestion_control);
	trial->dscp = declared->dscp;
	trial->mss_bytes = declared->mss_bytes;
	trial->send_buffer_bytes = declared->send_buffer_bytes;
	trial->receive_buffer_bytes = declared->receive_buffer_bytes;
	trial->payload_period_bytes = reference ?
	    PAYLOAD_PERIOD_REFERENCE_BYTES : PAYLOAD_PERIOD_BYTES;
	for (int d = 0; !reference && d < DIRECTIONS_SINGLE; d++)
		if (direction_has(direction, (enum direction)d))
			fit_to_path(circuit, &ceilings[d], facts,
			    facts->window_bytes[d], trial);
}

void
plan_make(const struct circuit *circuit, const struct ceiling ceilings[],
    const struct plan_facts *facts, struct plan *out)
{
	out->count = 0;
	for (uint64_t n = 0; n < circuit->plan.trials; n++)
		for (int d = 0; d < DIRECTIONS; d++) {
			struct trial *trial;

			if ((circuit->plan.directions & (UINT64_C(1) << d)) ==
			    0 || out->count == PLAN_TRIALS_MAX)
				continue;
			trial = &out->trials[out->count++];
			make_trial(circuit, ceilings, facts,
			    (enum direction)d, trial);
			trial->number = out->count;
		}
}

uint64_t
plan_duration_ns(const struct plan *plan)
{
	uint64_t total_ns = 0;

	for (size_t i = 0; i < plan->count; i++)
		total_ns += plan->trials[i].duration_ns +
		    (plan->trials[i].settle_extends ? TRIAL_SETTLE_MAX_NS :
		    plan->trials[i].settle_ns);
	return total_ns;
}
