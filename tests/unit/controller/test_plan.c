/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdlib.h>
#include <string.h>

#include "conduct/plan.h"
#include "declaration_text.h"

#define MS UINT64_C(1000000)
#define S UINT64_C(1000000000)

static struct plan plan;
static struct ceiling ceilings[DIRECTIONS_SINGLE];

static void
plan_of(const char *text, const struct plan_facts *facts)
{
	struct circuit *circuit = circuit_accepted(text);
	struct error err;

	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		assert_int_equal(ceiling_compute(circuit, (enum direction)d,
		    PROTOCOL_TCP, &ceilings[d], &err), 0);
	memset(&plan, 0xa5, sizeof(plan));
	plan_make(circuit, ceilings, facts, &plan);
	circuit_free(circuit);
}

#define ETHERNET "circuit: TEST\n" \
    "medium: { kind: ethernet, line-rate: 1 Gbit/s }\n" \
    "layers: [ ethernet, ipv4, tcp ]\n"

/* --- arithmetic -------------------------------------------------------- */

static void
connections_fill_the_path_as_in_rfc_6349(void **state)
{
	static const char table[] = "RFC 6349 Table 5.1, K = 1000";
	static const char rule[] = "RFC 6349 section 5.1: BDP / window, "
	    "rounded up; at least 1, at most 256";
	static const struct {
		uint64_t rate_bps, round_trip_ns, window_bytes, streams;
		const char *source;
	} rows[] = {
		{ 500000000, 5 * MS, 16000, 20, table },
		{ 500000000, 5 * MS, 32000, 10, table },
		{ 500000000, 5 * MS, 64000, 5, table },
		{ 500000000, 5 * MS, 128000, 3, table },
		{ 500000000, 5 * MS, 312500, 1, rule },
		{ 500000000, 5 * MS, 312499, 2, rule },
		{ 500000000, 5 * MS, UINT64_MAX, 1, rule },
		{ 500000000, 0, 16000, 1, rule },
		{ 0, 5 * MS, 16000, 1, rule },
		/* nobody knows the window */
		{ 500000000, 5 * MS, 0, 1, rule },
		{ UINT64_C(10000000000), 100 * MS, 488282, 256, rule },
		{ UINT64_C(10000000000), 100 * MS, 1000, 256, rule },
		{ UINT64_MAX, UINT64_MAX, 1, 256, rule },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++)
		assert_int_equal(plan_streams(rows[i].rate_bps,
		    rows[i].round_trip_ns, rows[i].window_bytes),
		    rows[i].streams);
}

static void
the_ramp_doubles_from_the_initial_window(void **state)
{
	static const char formula[] = "n = ceil(log2(C RTT / 8 / IW)) round "
	    "trips, IW of RFC 6928 section 2, worked out by hand";
	static const struct {
		uint64_t rate_bps, round_trip_ns, mss_bytes, ramp_ns;
		const char *source;
	} rows[] = {
		/* IW = 14480: 5, 8, 10 and 13 doublings */
		{ 100000000, 20 * MS, 1448, 100 * MS, formula },
		{ 1000000000, 20 * MS, 1448, 160 * MS, formula },
		{ 1000000000, 100 * MS, 1448, 1000 * MS, formula },
		{ UINT64_C(10000000000), 50 * MS, 1448, 650 * MS, formula },
		/* 14480 B are there from the start: 11.584 Mbit/s, 10 ms */
		{ 11584000, 10 * MS, 1448, 0, formula },
		{ 11584800, 10 * MS, 1448, 10 * MS, formula },
		{ 23168000, 10 * MS, 1448, 10 * MS, formula },
		{ 23168800, 10 * MS, 1448, 20 * MS, formula },
		/* IW = min(10 MSS, max(2 MSS, 14600)): 17896 B of 8948 B */
		{ 14316800, 10 * MS, 8948, 0, formula },
		{ 14317600, 10 * MS, 8948, 10 * MS, formula },
		/* and 5360 B of 536 B */
		{ 4288000, 10 * MS, 536, 0, formula },
		{ 4288800, 10 * MS, 536, 10 * MS, formula },
		{ 1000000000, 0, 1448, 0, formula },
		{ 0, 20 * MS, 1448, 0, formula },
		{ 1000000000, 20 * MS, 0, 0, formula },
		/* no longer than any settle time */
		{ UINT64_MAX, 9 * S, 1448, 10 * S, formula },
		{ UINT64_MAX, 11 * S, 1448, 10 * S, formula },
		{ UINT64_MAX, UINT64_MAX, 1448, 10 * S, formula },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++)
		assert_int_equal(plan_ramp_ns(rows[i].rate_bps,
		    rows[i].round_trip_ns, rows[i].mss_bytes),
		    rows[i].ramp_ns);
}

static void
settle_time_is_the_longest_of_three(void **state)
{
	static const char rule[] = "max(stated, ramp + 10 RTT, 8 B / (P - R)) "
	    "in whole rows, <= 10 s";
	static const struct {
		uint64_t stated_ns, ramp_ns, round_trip_ns, burst_bytes;
		uint64_t line_bps, contract_bps, row_ns, settle_ns;
		const char *source;
	} rows[] = {
		{ S, 0, 0, 0, 0, 0, 100 * MS, S, rule },
		{ 0, 0, 0, 0, 0, 0, 100 * MS, 0, rule },
		{ S, 160 * MS, 20 * MS, 0, 0, 0, 100 * MS, S, rule },
		{ S, S, 100 * MS, 0, 0, 0, 100 * MS, 2 * S, rule },
		{ S, 650 * MS, 50 * MS, 0, 0, 0, 100 * MS, 1200 * MS, rule },
		/* 64 kB at 1 Gbit/s against 500 Mbit/s: 1.024 ms */
		{ 0, 0, 0, 64000, 1000000000, 500000000, MS, 2 * MS, rule },
		/* 50 MB at 1 Gbit/s against 800 Mbit/s: 2 s */
		{ S, S, 10 * MS, 50000000, 1000000000, 800000000, 100 * MS,
		    2 * S, rule },
		{ S, 0, 0, 1000000000, 1000000000, 900000000, 100 * MS,
		    10 * S, rule },
		/* no burst outruns a line that is no faster */
		{ S, 0, 0, 1000000000, 1000000000, 1000000000, 100 * MS, S,
		    rule },
		{ S, 0, 0, 1000000000, 1000000000, 2000000000, 100 * MS, S,
		    rule },
		/* whole rows: up, and down where there is no room */
		{ S + 1, 0, 0, 0, 0, 0, 100 * MS, 1100 * MS, rule },
		{ S, 0, 0, 0, 0, 0, 300 * MS, 1200 * MS, rule },
		{ 20 * S, 0, 0, 0, 0, 0, 300 * MS, 9900 * MS, rule },
		{ 20 * S, 0, 0, 0, 0, 0, 4 * S, 8 * S, rule },
		{ 20 * S, 0, 0, 0, 0, 0, 10 * S, 10 * S, rule },
		/* nothing wraps */
		{ S, UINT64_MAX, UINT64_MAX, UINT64_MAX, UINT64_MAX, 0,
		    100 * MS, 10 * S, rule },
		{ S, 0, UINT64_MAX / 10 + 1, 0, 0, 0, 100 * MS, 10 * S,
		    rule },
		{ UINT64_MAX, 0, 0, 0, 0, 0, 100 * MS, 10 * S, rule },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++)
		assert_int_equal(plan_settle_ns(rows[i].stated_ns,
		    rows[i].ramp_ns, rows[i].round_trip_ns,
		    rows[i].burst_bytes, rows[i].line_bps,
		    rows[i].contract_bps, rows[i].row_ns), rows[i].settle_ns);
}

/* --- plans ------------------------------------------------------------- */

static void
directions_take_turns(void **state)
{
	static const struct plan_facts facts = { 0 };

	(void)state;
	plan_of(ETHERNET, &facts);
	assert_int_equal(plan.count, 14);
	for (size_t i = 0; i < plan.count; i++) {
		assert_int_equal(plan.trials[i].number, i + 1);
		assert_int_equal(plan.trials[i].direction, i % 2 == 0 ?
		    DIRECTION_A_TO_B : DIRECTION_B_TO_A);
	}
	plan_of(ETHERNET "plan: { trials: 3, directions: [ both, a-to-b, "
	    "b-to-a ] }\n", &facts);
	assert_int_equal(plan.count, 9);
	for (size_t i = 0; i < plan.count; i++)
		assert_int_equal(plan.trials[i].direction, i % 3);
	plan_of(ETHERNET "plan: { trials: 2, directions: b-to-a }\n", &facts);
	assert_int_equal(plan.count, 2);
	assert_int_equal(plan.trials[1].direction, DIRECTION_B_TO_A);
	plan_of(ETHERNET "plan: { trials: 1000, directions: [ a-to-b, "
	    "b-to-a, both ] }\n", &facts);
	assert_int_equal(plan.count, PLAN_TRIALS_MAX);
}

static void
what_is_declared_is_carried_over(void **state)
{
	static const struct plan_facts facts = { .round_trip_ns = 100 * MS,
		.window_bytes = { 1000, 1000 } };
	const struct trial *trial = &plan.trials[0];

	(void)state;
	plan_of(ETHERNET "plan: { trials: 1, duration: 30 s, settle: 2 s, "
	    "settle-extends: no, row-spacing: 50 ms, streams: 4, opens: b, "
	    "congestion-control: reno, dscp: 46, mss: 1400 B, "
	    "send-buffer: 64 KiB, receive-buffer: 128 KiB }\n", &facts);
	assert_int_equal(plan.count, 2);
	assert_int_equal(trial->protocol, PROTOCOL_TCP);
	assert_int_equal(trial->duration_ns, 30 * S);
	assert_false(trial->settle_extends);
	assert_int_equal(trial->row_ns, 50 * MS);
	/* the number of streams is declared, whatever would be computed */
	assert_int_equal(trial->streams, 4);
	assert_int_equal(trial->opens, END_B);
	assert_string_equal(trial->congestion_control, "reno");
	assert_int_equal(trial->dscp, 46);
	assert_int_equal(trial->mss_bytes, 1400);
	assert_int_equal(trial->send_buffer_bytes, 65536);
	assert_int_equal(trial->receive_buffer_bytes, 131072);
	assert_int_equal(trial->payload_period_bytes, 16777216);
	assert_int_equal(trial->rate_limit_bps, 0);
}

static void
an_omitted_plan_has_the_designs_defaults(void **state)
{
	static const struct plan_facts facts = { 0 };
	const struct trial *trial = &plan.trials[13];

	(void)state;
	plan_of(ETHERNET, &facts);
	assert_int_equal(trial->duration_ns, 3 * S);
	assert_int_equal(trial->settle_ns, S);
	assert_true(trial->settle_extends);
	assert_int_equal(trial->row_ns, 100 * MS);
	assert_int_equal(trial->streams, 1);
	assert_int_equal(trial->opens, END_A);
	assert_string_equal(trial->congestion_control, "cubic");
	assert_int_equal(trial->dscp, 0);
	assert_int_equal(trial->mss_bytes, 0);
}

/* 941 482 444 bit/s of payload (TCP over IPv4 with time stamps, 1448/1538) at
 * 100 ms are 11 768 530 B: 12 windows of 1 MB, 10 doublings of 14480 B, and
 * 1 s of ramp and 10 round trips to settle. */
static void
streams_and_settle_time_follow_from_the_path(void **state)
{
	static const struct plan_facts facts = { .round_trip_ns = 100 * MS,
		.window_bytes = { 1000000, 4000000 } };

	(void)state;
	plan_of(ETHERNET, &facts);
	assert_int_equal(plan.trials[0].streams, 12);
	assert_int_equal(plan.trials[1].streams, 3);
	assert_int_equal(plan.trials[0].settle_ns, 2 * S);
	assert_int_equal(plan.trials[1].settle_ns, 2 * S);
	plan_of(ETHERNET "plan: { directions: both }\n", &facts);
	/* a direction: the larger number */
	assert_int_equal(plan.trials[0].streams, 12);
}

/* Only b-to-a has a burst: 50 MB, counted at the frame, against 800 Mbit/s of
 * frames (1518 of 1538 B of the line): 8 B / (10^9 - 810 540 184) = 2.11 s. */
#define ONE_BURST ETHERNET "service: { committed: { a-to-b: 900 Mbit/s, " \
    "b-to-a: 800 Mbit/s }, counted-at: frame, burst: { a-to-b: 1 kB, " \
    "b-to-a: 50 MB } }\n"

static void
a_burst_allowance_is_drained_before_anything_counts(void **state)
{
	static const struct plan_facts facts = { .round_trip_ns = MS };

	(void)state;
	plan_of(ONE_BURST, &facts);
	assert_int_equal(plan.trials[0].settle_ns, S);
	assert_int_equal(plan.trials[1].settle_ns, 2200 * MS);
	plan_of(ONE_BURST "plan: { directions: [ both ] }\n", &facts);
	assert_int_equal(plan.trials[0].settle_ns, 2200 * MS);
}

static void
a_reference_is_one_stream_that_need_not_settle(void **state)
{
	static const struct plan_facts facts = { .round_trip_ns = 100 * MS,
		.window_bytes = { 1, 1 } };
	const struct trial *trial = &plan.trials[0];

	(void)state;
	plan_of("circuit: HOST\nmedium: { kind: host }\n"
	    "layers: [ ipv4, tcp ]\n", &facts);
	assert_int_equal(plan.count, 14);
	assert_int_equal(trial->streams, 1);
	assert_int_equal(trial->settle_ns, S);
	assert_false(trial->settle_extends);
	assert_int_equal(trial->payload_period_bytes, 1048576);
}

static void
the_time_of_a_plan_is_that_of_its_trials(void **state)
{
	static const struct plan_facts facts = { 0 };

	(void)state;
	plan.count = 0;
	assert_int_equal(plan_duration_ns(&plan), 0);
	plan_of(ETHERNET "plan: { trials: 2, settle-extends: no }\n", &facts);
	assert_int_equal(plan_duration_ns(&plan), 4 * (3 + 1) * S);
	/* each may extend its settle time to 10 s */
	plan_of(ETHERNET "plan: { trials: 2 }\n", &facts);
	assert_int_equal(plan_duration_ns(&plan), 4 * (3 + 10) * S);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(connections_fill_the_path_as_in_rfc_6349),
		cmocka_unit_test(the_ramp_doubles_from_the_initial_window),
		cmocka_unit_test(settle_time_is_the_longest_of_three),
		cmocka_unit_test(directions_take_turns),
		cmocka_unit_test(what_is_declared_is_carried_over),
		cmocka_unit_test(an_omitted_plan_has_the_designs_defaults),
		cmocka_unit_test(streams_and_settle_time_follow_from_the_path),
		cmocka_unit_test(
		    a_burst_allowance_is_drained_before_anything_counts),
		cmocka_unit_test(
		    a_reference_is_one_stream_that_need_not_settle),
		cmocka_unit_test(the_time_of_a_plan_is_that_of_its_trials),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
