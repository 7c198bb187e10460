/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <math.h>
#include <stdlib.h>

#include "ceiling/both.h"
#include "ceiling/ceiling.h"
#include "declaration_text.h"
#include "judge/two_way.h"
#include "measurement.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define TCP "ethernet, ipv4, tcp"

static void
load_ceiling(const struct circuit *circuit, const struct load *load,
    struct ceiling *out)
{
	struct error err;
	char why[1024];

	if (ceiling_of_load(circuit, load, out, &err) == -1)
		fail_msg("%s", error_text(&err, why, sizeof(why)));
}

static void
range_of(const struct circuit *circuit, const struct load *load,
    struct ceiling *low, struct ceiling *high)
{
	struct error err;
	char why[1024];

	if (ceiling_range(circuit, load, low, high, &err) == -1)
		fail_msg("%s", error_text(&err, why, sizeof(why)));
}

/* An acknowledgement with timestamps is 52 + 18 + 20 = 90 octets of line; an
 * offload of 65535 octets answers floor(65535/1448) = 45 segments. */
static void
a_gigabit_of_both_is_between_914_7_and_940_2(void **state)
{
	const struct load load = { .direction = DIRECTION_B_TO_A,
		.declared = true, .both = true };
	struct circuit *circuit = circuit_of("1 Gbit/s", TCP, "");
	struct ceiling low, high;

	(void)state;
	range_of(circuit, &load, &low, &high);
	/* 1448 / (1538 + 45) and 1448 / (1538 + 2) of 1 Gbit/s */
	assert_int_equal(low.rate_bps[LEVEL_PAYLOAD], 914718888);
	assert_int_equal(high.rate_bps[LEVEL_PAYLOAD], 940259740);
	assert_true(low.both && high.both);
	assert_true(low.segments_per_ack == 2.0);
	assert_true(high.segments_per_ack == 45.0);
	circuit_free(circuit);
}

static void
a_range_is_a_point_where_acknowledgements_cost_nothing(void **state)
{
	static const struct load loads[] = {
		{ .direction = DIRECTION_A_TO_B, .declared = true },
		{ .direction = DIRECTION_A_TO_B, .protocol = PROTOCOL_UDP,
		  .both = true },
	};
	struct circuit *circuit = circuit_of("1 Gbit/s", TCP, "");
	struct ceiling low, high;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(loads); i++) {
		range_of(circuit, &loads[i], &low, &high);
		assert_int_equal(mixed_compare(low.payload, high.payload), 0);
	}
	circuit_free(circuit);
	/* more than the offload gives is declared: it stays */
	circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, { tcp: { "
	    "segments-per-acknowledgement: 60 } }", "");
	range_of(circuit, &(const struct load){ .declared = true,
	    .both = true }, &low, &high);
	assert_true(high.segments_per_ack == 60.0);
	circuit_free(circuit);
}

static struct circuit *
half_duplex(const char *tcp)
{
	char text[512];

	(void)snprintf(text, sizeof(text), "circuit: COAX\nmedium: { kind: "
	    "ethernet, line-rate: 10 Mbit/s, duplex: half }\nlayers: "
	    "[ ethernet, ipv4, { tcp: { %s } } ]\n", tcp);
	return circuit_accepted(text);
}

static struct fraction
whole(const struct ceiling *ceiling)
{
	return fraction_add(fraction_whole(ceiling->payload.whole),
	    ceiling->payload.rest);
}

/* Stevens, TCP/IP Illustrated volume 1, chapter 24: 10 Mbit/s of Ethernet, MSS
 * 1460, acknowledgements of 84 octets; 1 155 063 and 1 183 667 B/s. */
static void
a_shared_line_carries_its_acknowledgements(void **state)
{
	static const struct {
		const char *tcp;
		uint64_t bytes_per_s, payload_bps;
	} rows[] = {
		{ "timestamps: no", 1155063, 9240506 },
		{ "timestamps: no, segments-per-acknowledgement: 22", 1183667,
		  9469339 },
	};
	struct circuit *circuit;
	struct ceiling c, ways[2];
	size_t i, d;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		circuit = half_duplex(rows[i].tcp);
		load_ceiling(circuit, &(const struct load){ .declared = true },
		    &c);
		assert_int_equal(c.rate_bps[LEVEL_PAYLOAD] / 8,
		    rows[i].bytes_per_s);
		assert_int_equal(c.rate_bps[LEVEL_PAYLOAD],
		    rows[i].payload_bps);
		assert_true(c.shared);
		for (d = 0; d < 2; d++)
			load_ceiling(circuit, &(const struct load){
			    .direction = (enum direction)d, .declared = true,
			    .both = true }, &ways[d]);
		/* the two share one ceiling, exactly */
		assert_int_equal(fraction_compare(fraction_add(
		    whole(&ways[0]), whole(&ways[1])), whole(&c)), 0);
		assert_int_equal(ways[0].shared_bps, 5000000);
		circuit_free(circuit);
	}
}

/* x w + y a/2 = R and y w + x a/2 = R' with w 1538, a 90: x and y by hand. */
static void
unequal_directions_carry_each_others_acknowledgements(void **state)
{
	static const struct {
		const char *rates;
		double bps[2];
	} rows[] = {
		{ "{ a-to-b: 100 Mbit/s, b-to-a: 10 Mbit/s }",
		  { 93953209.3, 6665868.4 } },
		{ "{ a-to-b: 10 Mbit/s, b-to-a: 100 Mbit/s }",
		  { 6665868.4, 93953209.3 } },
	};
	struct circuit *circuit;
	struct ceiling c;
	size_t i, d;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		circuit = circuit_of(rows[i].rates, TCP, "");
		for (d = 0; d < 2; d++) {
			load_ceiling(circuit, &(const struct load){
			    .direction = (enum direction)d, .declared = true,
			    .both = true }, &c);
			assert_true(fabs((double)c.rate_bps[LEVEL_PAYLOAD] -
			    rows[i].bps[d]) < 1e-3 * rows[i].bps[d]);
			assert_true(c.segments_per_ack == 2.0);
		}
		circuit_free(circuit);
	}
}

/* 100 times as fast one way: the slow way has room for little else. */
static void
a_way_crowded_out_still_has_a_ceiling(void **state)
{
	struct circuit *circuit = circuit_of("{ a-to-b: 1 Gbit/s, b-to-a: "
	    "10 Mbit/s }", TCP, "");
	struct ceiling c;

	(void)state;
	load_ceiling(circuit, &(const struct load){ .declared = true,
	    .direction = DIRECTION_B_TO_A, .both = true }, &c);
	assert_in_range(c.rate_bps[LEVEL_PAYLOAD], 1, 500000);
	load_ceiling(circuit, &(const struct load){ .declared = true,
	    .direction = DIRECTION_A_TO_B, .both = true }, &c);
	assert_in_range(c.rate_bps[LEVEL_PAYLOAD], 900000000, 941482444);
	circuit_free(circuit);
}

static void
contracts_count_acknowledgements_in_both(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", TCP, "service: "
	    "{ committed: 100 Mbit/s, counted-at: packet }");
	struct ceiling c;

	(void)state;
	load_ceiling(circuit, &(const struct load){ .declared = true,
	    .both = true }, &c);
	/* 1448 / (1500 + 52/2) of 100 Mbit/s */
	assert_int_equal(c.rate_bps[LEVEL_PAYLOAD], 94888597);
	circuit_free(circuit);
	circuit = circuit_of("1 Gbit/s", TCP, "device: { "
	    "packets-per-second: 10000 }");
	load_ceiling(circuit, &(const struct load){ .declared = true,
	    .both = true }, &c);
	/* a packet and a half for each 1448 octets */
	assert_int_equal(c.rate_bps[LEVEL_PAYLOAD], 77226666);
	circuit_free(circuit);
}

static void
counters_become_segments_in_thousandths(void **state)
{
	static const struct {
		uint64_t data, acks, thousandths;	/* 0: unknown */
	} rows[] = {
		{ 1000, 500, 2000 }, { 100000, 2222, 45004 },
		{ 2, 3, 666 }, { 1, 1000000, 1 }, { 1000000, 1, 1000000 },
		{ 0, 1, 0 }, { 1, 0, 0 }, { UNKNOWN_U64, 1, 0 },
		{ 1, UNKNOWN_U64, 0 }, { UNKNOWN_U64 - 1, 2, 1000000 },
	};
	struct fraction found;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		assert_int_equal(path_counted_segments(rows[i].data,
		    rows[i].acks, &found), rows[i].thousandths != 0);
		if (rows[i].thousandths != 0)
			assert_int_equal(fraction_compare(found,
			    fraction_make(rows[i].thousandths, 1000)), 0);
	}
}

/* Data at the receiver of the direction, acknowledgements from the receiver of
 * the other: they go the same way. */
static void
count(struct trial_run *run, enum direction d, uint64_t data_in, uint64_t acks,
    uint64_t data_out)
{
	uint64_t *value = run->directions[d].receiver.last.value;

	run->directions[d].receiver_reported = true;
	value[TCP_SAMPLE_data_segs_in_packets] = data_in;
	value[TCP_SAMPLE_segs_out_packets] = acks + data_out;
	value[TCP_SAMPLE_data_segs_out_packets] = data_out;
}

static void
a_trial_of_both_is_set_against_what_was_counted(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", TCP, "");
	struct trial_run *run = calloc(1, sizeof(*run));
	const uint64_t alone_bps = 941482444;

	(void)state;
	assert_non_null(run);
	run->trial.direction = DIRECTION_A_TO_B;
	assert_int_equal(two_way_target_bps(circuit, run, DIRECTION_A_TO_B,
	    alone_bps), alone_bps);
	run->trial.direction = DIRECTION_BOTH;
	/* not counted: as declared, one for two */
	assert_int_equal(two_way_target_bps(circuit, run, DIRECTION_A_TO_B,
	    alone_bps), 914718888);
	count(run, DIRECTION_A_TO_B, 450000, 30000, 2);
	count(run, DIRECTION_B_TO_A, 300000, 10000, 0);
	/* 1448 / (1538 + 90/45) and 1448 / (1538 + 90/10) of 1 Gbit/s */
	assert_int_equal(two_way_target_bps(circuit, run, DIRECTION_A_TO_B,
	    alone_bps), 940259740);
	assert_int_equal(two_way_target_bps(circuit, run, DIRECTION_B_TO_A,
	    alone_bps), 936005171);
	count(run, DIRECTION_B_TO_A, 300000, UNKNOWN_U64, 0);
	assert_int_equal(two_way_target_bps(circuit, run, DIRECTION_A_TO_B,
	    alone_bps), 914718888);
	free(run);
	circuit_free(circuit);
}

/* Whatever is counted, 128 bits hold the ladder and its columns add up. */
static void
no_count_overflows_the_ladder(void **state)
{
	static const char *const mediums[] = {
		"{ kind: ethernet, phy: 10gbase-w }",
		"{ kind: ethernet, line-rate: 1599999999999 bit/s }",
		("{ kind: ethernet, line-rate: { a-to-b: 1599999999999 bit/s, "
		    "b-to-a: 7 kbit/s } }"),
	};
	static const uint64_t thousandths[] = { 1, 7, 999, 1999, 44971,
		999983, 1000000 };
	struct circuit *circuit;
	struct ceiling c;
	char text[512];
	uint64_t left_bps;
	size_t i, n, s;

	(void)state;
	for (i = 0; i < COUNT(mediums); i++) {
		(void)snprintf(text, sizeof(text), "circuit: BIG\nmedium: %s\n"
		    "mtu: 65521 B\nlayers: [ ethernet, vlan, ipv6, tcp, { tls: "
		    "{ record-bytes: 16381 B } } ]\nservice: { committed: "
		    "1599999999989 bit/s, counted-at: packet }\n", mediums[i]);
		circuit = circuit_accepted(text);
		for (n = 0; n <= COUNT(thousandths); n++) {
			struct load load = { .declared = true, .both = true };

			if (n < COUNT(thousandths)) {
				load.segments_per_ack = fraction_make(
				    thousandths[n], 1000);
				load.other_packets = fraction_whole(1);
			}
			load_ceiling(circuit, &load, &c);
			left_bps = c.line_rate_bps;
			for (s = 0; s < c.steps_count; s++) {
				assert_true(c.steps[s].bps <= left_bps);
				left_bps -= c.steps[s].bps;
			}
			assert_int_equal(left_bps, c.rate_bps[LEVEL_PAYLOAD]);
		}
		circuit_free(circuit);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_gigabit_of_both_is_between_914_7_and_940_2),
		cmocka_unit_test(
		    a_range_is_a_point_where_acknowledgements_cost_nothing),
		cmocka_unit_test(a_shared_line_carries_its_acknowledgements),
		cmocka_unit_test(
		    unequal_directions_carry_each_others_acknowledgements),
		cmocka_unit_test(a_way_crowded_out_still_has_a_ceiling),
		cmocka_unit_test(contracts_count_acknowledgements_in_both),
		cmocka_unit_test(counters_become_segments_in_thousandths),
		cmocka_unit_test(
		    a_trial_of_both_is_set_against_what_was_counted),
		cmocka_unit_test(no_count_overflows_the_ladder),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
