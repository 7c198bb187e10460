/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * judge_fixture: an invented gigabit circuit and its trials, filled by hand.
 *
 * Octets: IEEE 802.3 (preamble and SFD 8, gap 12, header 14, FCS 4), RFC 791
 * (20), RFC 9293 and RFC 7323 (20 + 12); so 1448 of 1538 octets are payload.
 */
#ifndef PLAFOND_JUDGE_FIXTURE_H
#define PLAFOND_JUDGE_FIXTURE_H

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "clock.h"
#include "declare/circuit.h"
#include "judge/verdict.h"
#include "wire.h"

#define FIXTURE_LINE_BPS UINT64_C(1000000000)
#define FIXTURE_PAYLOAD_BPS UINT64_C(941482444)	/* 1448/1538, rounded down */
#define FIXTURE_TRIALS_MAX 64

struct fixture {
	struct circuit circuit;
	struct ceiling ceilings[DIRECTIONS_SINGLE];
	struct host_facts hosts[ENDS];
	struct trial_run trials[FIXTURE_TRIALS_MAX];
	struct verdict_input input;
	struct verdict verdict;
};

static inline void
fixture_step(struct ceiling *ceiling, const char *name, uint64_t bytes,
    uint64_t bps, enum layer_level level, const char *source)
{
	struct ladder_step *step = &ceiling->steps[ceiling->steps_count++];

	(void)snprintf(step->name, sizeof(step->name), "%s", name);
	step->bytes_num = bytes;
	step->bytes_den = 1;
	step->bps = bps;
	step->reaches_level = true;
	step->level = level;
	step->source = source;
}

static inline void
fixture_ceiling(struct ceiling *ceiling, enum direction direction)
{
	static const uint64_t bytes[LEVELS] = { 1538, 1518, 1514, 1500, 1480,
		1448 };
	struct bound *bound = &ceiling->bounds[0];

	memset(ceiling, 0, sizeof(*ceiling));
	ceiling->direction = direction;
	ceiling->protocol = PROTOCOL_TCP;
	for (size_t i = 0; i < LEVELS; i++) {
		ceiling->has_level[i] = true;
		ceiling->level_bytes_num[i] = bytes[i];
		ceiling->rate_bps[i] = FIXTURE_LINE_BPS * bytes[i] / 1538;
	}
	ceiling->payload = mixed_product(fraction_whole(FIXTURE_LINE_BPS),
	    fraction_make(1448, 1538));
	ceiling->level_bytes_den = 1;
	ceiling->packet_bytes = 1500;
	ceiling->line_rate_bps = FIXTURE_LINE_BPS;
	ceiling->tolerance_ppm = 100;
	ceiling->accuracy = ACCURACY_EXACT;
	ceiling->binding_counted_at = LEVEL_LINE;
	ceiling->binding_counted_ratio = 1538.0 / 1448.0;
	(void)snprintf(bound->name, sizeof(bound->name),
	    "line of segment 'access'");
	(void)snprintf(bound->source, sizeof(bound->source), "IEEE 802.3");
	bound->class = BOUND_MEDIUM;
	bound->payload_bps = FIXTURE_PAYLOAD_BPS;
	bound->binding = true;
	ceiling->bounds_count = 1;
	/* 20, 18, 20 and 32 of 1538 octets; with the payload they add up. */
	fixture_step(ceiling, "ethernet: preamble, SFD, gap", 20, 13003902,
	    LEVEL_FRAME, "IEEE 802.3");
	fixture_step(ceiling, "ethernet: header, FCS", 18, 11703511,
	    LEVEL_PACKET, "IEEE 802.3");
	fixture_step(ceiling, "ipv4", 20, 13003901, LEVEL_SEGMENT, "RFC 791");
	fixture_step(ceiling, "tcp", 32, 20806242, LEVEL_PAYLOAD, "RFC 9293");
}

static inline void
fixture_circuit(struct circuit *circuit)
{
	static const struct medium ethernet = { .name = "ethernet",
		.title = "Ethernet", .accuracy = ACCURACY_EXACT };
	static const struct layer layers[] = { { .name = "ethernet" },
		{ .name = "ipv4" }, { .name = "tcp" } };
	struct segment *segment = &circuit->segments[0];

	(void)snprintf(circuit->name, sizeof(circuit->name), "HARBOUR-04");
	(void)snprintf(circuit->ends[END_A].name, CIRCUIT_NAME_SIZE, "quay");
	(void)snprintf(circuit->ends[END_B].name, CIRCUIT_NAME_SIZE, "mast");
	circuit->ends_declared = true;
	(void)snprintf(segment->name, sizeof(segment->name), "access");
	segment->medium.medium = &ethernet;
	segment->layers.count = 3;
	for (size_t i = 0; i < 3; i++)
		segment->layers.use[i].layer = &layers[i];
	segment->mtu_bytes = 1500;
	circuit->segments_count = 1;
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++) {
		circuit->criteria.throughput_ratio[d] = 0.97;
		circuit->criteria.single_stream_ratio[d] = NAN;
		circuit->criteria.loss_ratio[d] = NAN;
		circuit->criteria.delay_ns[d] = FIELD_UNSET;
		circuit->criteria.delay_variation_ns[d] = FIELD_UNSET;
	}
	circuit->plan.trials = 7;
	circuit->plan.duration_ns = 3 * NS_PER_S;
	circuit->plan.settle_ns = NS_PER_S;
	circuit->plan.row_ns = 100 * NS_PER_MS;
	circuit->plan.streams = FIELD_UNSET;
	circuit->plan.directions = 3;
	(void)snprintf(circuit->plan.congestion_control,
	    sizeof(circuit->plan.congestion_control), "cubic");
}

static inline void
fixture_host(struct host_facts *host, const char *name)
{
	(void)snprintf(host->hostname, sizeof(host->hostname), "%s", name);
	(void)snprintf(host->software, sizeof(host->software),
	    "plafond-agent 0.1.0");
	(void)snprintf(host->kernel, sizeof(host->kernel),
	    "Linux 6.1.0 x86_64");
	host->cpus = 4;
	(void)snprintf(host->default_congestion_control,
	    sizeof(host->default_congestion_control), "cubic");
	(void)snprintf(host->interface, sizeof(host->interface), "eth1");
	host->interface_mtu_bytes = 1500;
	host->link_speed_bps = FIXTURE_LINE_BPS;
	host->receive_buffer_max_bytes = 212992;
	host->send_buffer_max_bytes = 212992;
	host->tcp_receive_max_bytes = 6291456;
	host->tcp_send_max_bytes = 4194304;
	host->tcp_timestamps = 1;
}

/* Owned (free). */
static inline struct fixture *
fixture_new(void)
{
	struct fixture *f = calloc(1, sizeof(*f));

	if (f == NULL)
		abort();
	fixture_circuit(&f->circuit);
	fixture_ceiling(&f->ceilings[DIRECTION_A_TO_B], DIRECTION_A_TO_B);
	fixture_ceiling(&f->ceilings[DIRECTION_B_TO_A], DIRECTION_B_TO_A);
	fixture_host(&f->hosts[END_A], "quay-1");
	fixture_host(&f->hosts[END_B], "mast-1");
	f->input = (struct verdict_input){ .circuit = &f->circuit,
		.ceilings = f->ceilings, .trials = f->trials,
		.trials_planned = 14,
		.reference_bps = { UINT64_C(38000000000),
		    UINT64_C(36000000000) },
		.hosts = f->hosts };
	return f;
}

static inline void
fixture_measurement(struct measurement *m, enum direction direction,
    bool is_receiver, uint64_t bytes)
{
	m->direction = direction;
	m->is_receiver = is_receiver;
	m->end = MEASUREMENT_COMPLETE;
	m->settle_ns = NS_PER_S;
	m->duration_ns = 3 * NS_PER_S;
	m->settled = true;
	m->bytes = bytes;
	m->cpu_ns = 400 * NS_PER_MS;
	m->steal_ns = 0;
	m->cpu_busiest_ratio_ppm = 100000;
	m->rows = 40;
	m->stream_rows = 40;
	m->streams = 1;
	m->elapsed_ns = 4 * NS_PER_S;
	(void)snprintf(m->congestion_control, sizeof(m->congestion_control),
	    "cubic");
	for (size_t i = 0; i < TCP_SAMPLE_COUNT; i++)
		m->last.value[i] = UNKNOWN_U64;
	m->last.value[TCP_SAMPLE_snd_mss_bytes] = 1448;
	memset(m->sha256, 'a', SHA256_HEX_SIZE - 1);
}

static inline void
fixture_direction(struct direction_run *way, enum direction direction,
    uint64_t payload_bps)
{
	uint64_t bytes = payload_bps * 3 / 8;

	way->present = way->counted = true;
	way->sender_reported = way->receiver_reported = true;
	fixture_measurement(&way->sender, direction, false, bytes * 4 / 3);
	fixture_measurement(&way->receiver, direction, true, bytes);
	way->bytes = bytes;
	way->duration_ns = 3 * NS_PER_S;
	way->payload_bps = payload_bps;
	way->row_min_bps = payload_bps - payload_bps / 400;
	way->row_max_bps = payload_bps + payload_bps / 900;
	way->round_trip_ns = 800000;
	way->interface_bytes = bytes * 4 / 3 * 1514 / 1448;
	for (uint64_t i = 0; i < 30; i++)
		series_add(&way->series, 100 * NS_PER_MS, bytes / 30);
	memset(way->series.sha256, 'a', SHA256_HEX_SIZE - 1);
}

/* One more trial; `both` has the rate in each direction. */
static inline struct trial_run *
fixture_add(struct fixture *f, enum direction direction, uint64_t payload_bps)
{
	struct trial_run *run = &f->trials[f->input.trials_count++];

	if (f->input.trials_count > FIXTURE_TRIALS_MAX)
		abort();
	run->trial.number = f->input.trials_count;
	run->trial.protocol = PROTOCOL_TCP;
	run->trial.direction = direction;
	run->trial.streams = 4;
	run->trial.settle_ns = NS_PER_S;
	run->trial.settle_extends = true;
	run->trial.duration_ns = 3 * NS_PER_S;
	run->trial.row_ns = 100 * NS_PER_MS;
	(void)snprintf(run->trial.congestion_control,
	    sizeof(run->trial.congestion_control), "cubic");
	run->started_utc_ns = UINT64_C(1796119200000000000) +
	    run->trial.number * 4 * NS_PER_S;
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++)
		if (direction_has(direction, (enum direction)d))
			fixture_direction(&run->directions[d],
			    (enum direction)d, payload_bps);
	return run;
}

/* count trials a direction, alternating, at these shares of the ceiling. */
static inline void
fixture_fill(struct fixture *f, size_t count, double a_to_b, double b_to_a)
{
	for (size_t i = 0; i < count; i++) {
		/* A little apart, so that medians and bounds differ. */
		double apart = 0.0002 * ((double)(i % 3) - 1);

		fixture_add(f, DIRECTION_A_TO_B, (uint64_t)((a_to_b + apart) *
		    (double)FIXTURE_PAYLOAD_BPS));
		fixture_add(f, DIRECTION_B_TO_A, (uint64_t)((b_to_a + apart) *
		    (double)FIXTURE_PAYLOAD_BPS));
	}
	f->input.trials_planned = f->input.trials_count;
}

static inline int
fixture_set_up(void **state)
{
	*state = fixture_new();
	return 0;
}

static inline int
fixture_tear_down(void **state)
{
	free(*state);
	return 0;
}

/* Make it a reference: the memory of one machine. */
static inline void
fixture_make_host(struct fixture *f, uint64_t reference_bps)
{
	static const struct medium host = { .name = "host",
		.title = "memory of one machine",
		.accuracy = ACCURACY_REFERENCE };

	(void)snprintf(f->circuit.name, sizeof(f->circuit.name), "HOST");
	f->circuit.segments[0].medium.medium = &host;
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++) {
		memset(&f->ceilings[d], 0, sizeof(f->ceilings[d]));
		f->ceilings[d].direction = (enum direction)d;
		f->ceilings[d].reference = true;
		f->ceilings[d].accuracy = ACCURACY_REFERENCE;
		f->circuit.criteria.throughput_ratio[d] = NAN;
	}
	for (size_t end = 0; end < ENDS; end++) {
		f->input.reference_bps[end] = reference_bps;
		(void)snprintf(f->hosts[end].interface,
		    sizeof(f->hosts[end].interface), "lo");
		f->hosts[end].interface_mtu_bytes = 65536;
		f->hosts[end].link_speed_bps = UNKNOWN_U64;
	}
}

static inline const struct reason *
fixture_reason(const struct verdict *verdict, const char *code)
{
	for (size_t i = 0; i < verdict->reasons_count; i++)
		if (strcmp(verdict->reasons[i].code, code) == 0)
			return &verdict->reasons[i];
	return NULL;
}

#endif
