/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Analogue channels and leased IP services. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <math.h>
#include <stdint.h>
#include <cmocka.h>

#include "ceiling/capacity.h"
#include "declare/signal.h"
#include "medium_air.h"

#define IP "ipv4, udp"

static double
line_bps(const char *medium, enum direction direction)
{
	struct medium_capacity capacity;

	air_capacity(medium, IP, direction, &capacity);
	return fraction_double(capacity.line_bps);
}

/* S1 to S9, S13: Shannon 1949, computed with R and by hand. */
static void
analogue_channels_carry_what_shannon_says(void **state)
{
	static const struct {
		const char *id, *medium;
		double bps, tolerance;
	} vectors[] = {
		{ "S1", "kind: analogue, bandwidth: 3.1 kHz, snr: 30 dB",
		  30898, 0 },
		{ "S1", "kind: analogue, bandwidth: 3.1 kHz, snr: 35 dB",
		  36044, 0 },
		{ "S2", "kind: analogue, bandwidth: 3 kHz, snr: 20 dB",
		  19974, 0 },
		{ "S3", "kind: analogue, bandwidth: 4 kHz, snr: 20 dB",
		  26632, 0 },
		{ "S4", "kind: analogue, bandwidth: 3 kHz, snr: 30 dB",
		  29901, 0 },
		{ "S5", "kind: analogue, bandwidth: 1 MHz, snr: 24 dB",
		  7.978e6, 500 },
		{ "S6", "kind: analogue, bandwidth: 20 MHz, snr: 20 dB",
		  133.164e6, 500 },
		{ "S6", "kind: analogue, bandwidth: 20 MHz, snr: 25 dB",
		  166.188e6, 500 },
		{ "S7", "kind: analogue, bandwidth: 40 MHz, snr: 25 dB",
		  332.375e6, 500 },
		{ "S7", "kind: analogue, bandwidth: 80 MHz, snr: 30 dB",
		  797.378e6, 500 },
		{ "S7", "kind: analogue, bandwidth: 160 MHz, snr: 35 dB",
		  1860.353e6, 500 },
		{ "S8", "kind: analogue, bandwidth: 10 MHz, snr: -30 dB",
		  14420, 1 },
		{ "S8 as powers", "kind: analogue, bandwidth: 10 MHz, "
		  "signal-power: 1 W, noise-power: 1000 W", 14420, 1 },
		{ "S9", "kind: analogue, bandwidth: 3.1 kHz, snr: 0 dB",
		  3100, 0 },
		{ "S9 as powers", "kind: analogue, bandwidth: 1 MHz, "
		  "signal-power: 2 mW, noise-power: 2 mW", 1e6, 0 },
		{ "log2(1 + 3) = 2", "kind: analogue, bandwidth: 1 MHz, "
		  "signal-power: 3 mW, noise-power: 1 mW", 2e6, 0 },
		{ "two streams", "kind: analogue, bandwidth: 1 MHz, "
		  "signal-power: 3 mW, noise-power: 1 mW, streams: 2", 4e6,
		  0 },
		/* S/N = -65 + 173.975 - 73.0103 - 7 = 28.965 dB */
		{ "S13 at 290 K", "kind: analogue, bandwidth: 20 MHz, "
		  "received-level: -65 dBm, noise-figure: 7 dB", 192.474e6,
		  2000 },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++)
		assert_near(line_bps(vectors[i].medium, DIRECTION_A_TO_B),
		    vectors[i].bps, vectors[i].tolerance + 1e-6,
		    vectors[i].id);
}

/* S1 to S4 to the tenth, which whole bit/s do not show. */
static void
shannons_formula_to_the_tenth(void **state)
{
	(void)state;
	assert_near(shannon_bps(3100, ratio_of_db(30)), 30898.4, 0.0501, "S1");
	assert_near(shannon_bps(3100, ratio_of_db(35)), 36044.3, 0.0501, "S1");
	assert_near(shannon_bps(3000, ratio_of_db(20)), 19974.6, 0.0501, "S2");
	assert_near(shannon_bps(4000, ratio_of_db(20)), 26632.8, 0.0501, "S3");
	assert_near(shannon_bps(3000, ratio_of_db(30)), 29901.7, 0.0501, "S4");
	assert_near(shannon_bps(1e6, 1), 1e6, 0, "S9");
	/* the rule of thumb: noise of -174 dBm in each Hz */
	assert_near(-65 + 174 - decibels(20e6) - 7, 28.990, 0.000501, "S13");
	assert_near(shannon_bps(20e6, ratio_of_db(-65 + 174 - decibels(20e6) -
	    7)), 192.640e6, 501, "S13");
}

/* S10 and S11: (2^eta - 1) / eta and 2^eta - 1 in dB. */
static void
the_least_energy_for_a_bit(void **state)
{
	static const double etas[] = { 1, 2, 4, 6, 8, 10 };
	static const double ebn0_db[] = { 0, 1.761, 5.740, 10.212, 15.035,
		20.099 };
	static const double snr_db[] = { 0, 4.771, 11.761, 17.993, 24.065,
		30.099 };
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(etas); i++) {
		assert_near(shannon_least_ebn0_db(etas[i]), ebn0_db[i],
		    0.000501, "S10");
		assert_near(shannon_least_snr_db(etas[i]), snr_db[i],
		    0.000501, "S11");
	}
	assert_near(shannon_least_ebn0_db(1e-9), -1.5917, 0.00005, "ln 2");
}

/* S12, a table of k T B rounded to whole dB, recomputed with SciPy; S13's
 * rule of -174 dBm/Hz is 25 mdB off. */
static void
noise_is_k_t_b(void **state)
{
	static const struct {
		double hz, dbm;
	} vectors[] = {
		{ 1, -173.975 }, { 1e3, -143.975 }, { 200e3, -120.965 },
		{ 1e6, -113.975 }, { 20e6, -100.965 }, { 100e6, -93.975 },
		{ 400e6, -87.955 },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++)
		assert_near(noise_dbm(vectors[i].hz, 290, 0), vectors[i].dbm,
		    0.000501, "S12");
	assert_near(-65 - noise_dbm(20e6, 290, 7), 28.990 - 0.025, 0.001,
	    "S13");
	assert_near(BOLTZMANN_J_PER_K / 1.380649e-23, 1, 1e-12, "SI 2019");
}

/* Nothing that is printed is ever infinite or no number. */
static void
assert_all_finite(const struct medium_capacity *capacity)
{
	size_t i;

	assert_true(isfinite(fraction_double(capacity->line_bps)));
	for (i = 0; i < capacity->notes_count; i++) {
		assert_null(strstr(capacity->notes[i], "nan"));
		assert_null(strstr(capacity->notes[i], "inf "));
		assert_null(strstr(capacity->notes[i], "inf,"));
	}
}

static void
the_limit_of_a_weak_signal_is_explained(void **state)
{
	struct medium_capacity capacity;

	(void)state;
	air_capacity("kind: analogue, bandwidth: 10 MHz, signal-power: 1 W, "
	    "noise-power: 1000 W", IP, DIRECTION_A_TO_B, &capacity);
	assert_true(air_noted(&capacity, "S/N -30.000 dB, a ratio of 0.001"));
	assert_true(air_noted(&capacity, "never below ln 2 = -1.59 dB"));
	assert_true(air_noted(&capacity, "at that limit -1.590 dB"));
	assert_true(air_noted(&capacity, "signal below the noise"));
	assert_all_finite(&capacity);
	air_capacity("kind: analogue, bandwidth: 1 THz, snr: -100 dB", IP,
	    DIRECTION_A_TO_B, &capacity);
	assert_true(air_noted(&capacity, "at that limit -1.592 dB"));
	assert_all_finite(&capacity);
	air_capacity("kind: analogue, bandwidth: 1 kHz, signal-power: 1 GW, "
	    "noise-power: 0.000000000001 pW", IP, DIRECTION_A_TO_B,
	    &capacity);
	assert_all_finite(&capacity);
	air_capacity("kind: analogue, bandwidth: 1 Hz, snr: 3 dB", IP,
	    DIRECTION_A_TO_B, &capacity);	/* log2(1 + 1.995) */
	assert_int_equal(fraction_floor(capacity.line_bps), 1);
	assert_int_equal(capacity.steps_count, 0);
	assert_false(air_noted(&capacity, "signal below the noise"));
	air_refused_with("kind: analogue, bandwidth: 3.1 kHz, snr: -60 dB", IP,
	    "", "Eb/N0 stays above ln 2 = -1.59 dB");
	air_refused_with("kind: analogue, bandwidth: 1 Hz, signal-power: "
	    "0.000000000001 pW, noise-power: 1 GW", IP, "",
	    "less than 1 bit/s");
}

/* By hand: S/N 15 with a gap of 10 log10 5 leaves 3, log2(4) = 2 of 4. */
static void
a_gap_is_a_step_below_the_line(void **state)
{
	struct medium_capacity capacity;

	(void)state;
	air_capacity("kind: analogue, bandwidth: 1 MHz, signal-power: 15 W, "
	    "noise-power: 1 W, gap: 6.989700043 dB, contention: 3, duplex: "
	    "half", IP, DIRECTION_A_TO_B, &capacity);
	assert_near(fraction_double(capacity.line_bps), 4e6, 1, "line");
	assert_int_equal(capacity.channel_bps, 4000000);
	assert_string_equal(capacity.steps[0].what, "gap to capacity");
	assert_near(fraction_double(capacity_offered(&capacity)), 2e6, 1.01,
	    "gap");
	assert_int_equal(capacity.contention, 3);
	assert_int_equal(capacity.duplex, DUPLEX_SHARED);
}

static void
directions_of_a_channel_may_differ(void **state)
{
	static const char medium[] = "kind: analogue, bandwidth: { a-to-b: "
	    "2 MHz, b-to-a: 1 MHz }, snr: { a-to-b: 0 dB, b-to-a: 10 dB }";

	(void)state;
	assert_near(line_bps(medium, DIRECTION_A_TO_B), 2e6, 1e-6, "a to b");
	assert_near(line_bps(medium, DIRECTION_B_TO_A), 1e6 * log2(11), 1,
	    "b to a");
	assert_near(line_bps("kind: analogue, bandwidth: 1 MHz, "
	    "received-level: -100 dBm, noise-figure: 0 dB, "
	    "temperature-kelvin: 29", DIRECTION_A_TO_B),
	    1e6 * log2(1 + pow(10, 2.39752)), 20, "29 K");
}

#define A "kind: analogue, bandwidth: 1 MHz, "
static const struct air_refusal channel_refusals[] = {
	{ "kind: analogue, snr: 20 dB", "'bandwidth' is missing" },
	{ "kind: analogue, bandwidth: 0 Hz, snr: 20 dB", "from 1 Hz" },
	{ "kind: analogue, bandwidth: 2 THz, snr: 20 dB",
	  "to 1 THz" },
	{ "kind: analogue, bandwidth: 1 Mbit/s, snr: 20 dB",
	  "'Mbit/s' is the unit of a rate" },
	{ "kind: analogue, bandwidth: 1 MHz", "'snr' is missing" },
	{ A "snr: 20", "no unit" },
	{ A "snr: 20 dBm", "is the unit of a level" },
	{ A "snr: -inf dB", "snr: found '-inf dB'" },
	{ A "snr: -inf dB", "a ratio of 0: no signal, at which nothing" },
	{ A "snr: nan dB", "snr: found 'nan dB'" },
	{ A "snr: 151 dB", "from -100 dB to 150 dB" },
	{ A "snr: -101 dB", "from -100 dB to 150 dB" },
	{ A "snr: { a-to-b: 20 dB }", "a direction is missing" },
	{ A "signal-power: { b-to-a: 1 W }, noise-power: 1 W",
	  "signal-power: a direction is missing" },
	{ A "signal-power: 1 W, noise-power: { b-to-a: 1 W }",
	  "noise-power: a direction is missing" },
	{ A "received-level: { b-to-a: -60 dBm }, noise-figure: 7 dB",
	  "received-level: a direction is missing" },
	{ A "signal-power: { a-to-b: 0 W, b-to-a: 1 W }, noise-power: 1 W",
	  "0 W carries nothing" },
	{ A "snr: 20 dB, signal-power: 1 W, noise-power: 1 W",
	  "S/N is declared twice" },
	{ A "snr: 20 dB, signal-power: 1 W, noise-power: 1 W",
	  "test:2:71" },
	{ A "snr: 20 dB, received-level: -60 dBm, noise-figure: 7 dB",
	  "S/N is declared twice" },
	{ A "signal-power: 1 W, noise-power: 1 W, received-level: "
	  "-60 dBm, noise-figure: 7 dB", "S/N is declared twice" },
	{ A "signal-power: 1 W", "'noise-power' is missing" },
	{ A "noise-power: 1 W", "'signal-power' is missing" },
	{ A "snr: 20 dB, noise-power: 1 W",
	  "'signal-power' is missing" },
	{ A "signal-power: 0 W, noise-power: 1 W",
	  "0 W carries nothing" },
	{ A "signal-power: 1 W, noise-power: 0 W", "has no limit" },
	{ A "signal-power: 1 W, noise-power: { a-to-b: 1 W, b-to-a: "
	  "0 W }", "has no limit" },
	{ A "signal-power: -1 W, noise-power: 1 W", "sign" },
	{ A "signal-power: 2 GW, noise-power: 1 W", "to 1 GW" },
	{ A "signal-power: 1 dBm, noise-power: 1 W",
	  "is the unit of a level" },
	{ A "received-level: -60 dBm", "'noise-figure' is missing" },
	{ A "noise-figure: 7 dB", "'received-level' is missing" },
	{ A "received-level: -201 dBm, noise-figure: 7 dB",
	  "received-level" },
	{ A "received-level: -60 dB, noise-figure: 7 dB",
	  "is the unit of a ratio in decibels" },
	{ A "received-level: -60 dBm, noise-figure: -1 dB",
	  "noise-figure" },
	{ A "received-level: -60 dBm, noise-figure: 61 dB",
	  "noise-figure" },
	{ A "snr: 20 dB, temperature-kelvin: 290",
	  "without received-level" },
	{ A "received-level: -60 dBm, noise-figure: 7 dB, "
	  "temperature-kelvin: 0", "from 1 to 10000" },
	{ A "snr: 20 dB, gap: -1 dB", "gap" },
	{ A "snr: 20 dB, gap: 31 dB", "to 30 dB" },
	{ A "snr: 20 dB, streams: 0", "streams" },
	{ A "snr: 20 dB, streams: 65", "streams" },
	{ A "snr: 20 dB, duplex: both", "full, half" },
	{ A "snr: 20 dB, contention: 0", "contention" },
	{ A "snr: 20 dB, mcs: 1", "unknown field" },
};

static void
what_makes_no_channel_is_refused_with_its_place(void **state)
{
	(void)state;
	air_refused_all(channel_refusals, COUNT(channel_refusals), IP);
	circuit_refused("circuit: X\nmedium: { " A "snr: 20 dB }\nlayers: [ "
	    "wlan, ipv4, udp ]\n", "wlan on medium analogue");
	air_impossible("kind: analogue, bandwidth: 1 THz, snr: 100 dB", IP,
	    "", "1.6 Tbit/s");
}

/* RFC 5136 section 2.3.1; by hand from the octets of the headers. */
static void
an_ip_service_is_counted_at_its_level(void **state)
{
	static const struct {
		const char *medium, *layers;
		enum layer_level level;
	} vectors[] = {
		{ "", IP, LEVEL_PACKET },
		{ ", counted-at: packet", IP, LEVEL_PACKET },
		{ ", counted-at: segment", IP, LEVEL_SEGMENT },
		{ ", counted-at: payload", "ipv6, tcp, tls", LEVEL_PAYLOAD },
		{ ", counted-at: packet", "ethernet, ipv4, tcp",
		  LEVEL_PACKET },
		{ ", counted-at: frame", "ethernet, vlan, ipv4, tcp",
		  LEVEL_FRAME },
	};
	struct path_segment segment;
	struct circuit *circuit;
	char text[256];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "circuit: X\nmedium: { "
		    "kind: ip-service, rate: 100 Mbit/s%s }\nlayers: [ %s ]\n",
		    vectors[i].medium, vectors[i].layers);
		circuit = circuit_accepted(text);
		segment_of(circuit, DIRECTION_A_TO_B, &segment);
		assert_int_equal(fraction_compare(fraction_multiply(
		    path_offered_bps(&segment), fraction_divide(
		    segment.overhead.octets[vectors[i].level],
		    segment.overhead.octets[LEVEL_LINE])),
		    fraction_whole(100000000)), 0);
		circuit_free(circuit);
	}
}

static void
an_ip_service_gives_exact_ladders(void **state)
{
	struct ceiling ceiling;

	(void)state;
	air_ceiling("kind: ip-service, rate: { a-to-b: 100 Mbit/s, b-to-a: "
	    "20 Mbit/s }", "ipv4, tcp", PROTOCOL_TCP, DIRECTION_B_TO_A,
	    &ceiling);
	assert_int_equal(ceiling.rate_bps[LEVEL_PACKET], 20000000);
	assert_int_equal(ceiling.rate_bps[LEVEL_PAYLOAD],
	    UINT64_C(20000000) * 1448 / 1500);
	assert_int_equal(ceiling.accuracy, ACCURACY_EXACT);
	assert_int_equal(ceiling.packet_bytes, 1500);
	air_ceiling("kind: analogue, bandwidth: 1 MHz, snr: 20 dB", IP,
	    PROTOCOL_UDP, DIRECTION_A_TO_B, &ceiling);
	assert_int_equal(ceiling.packet_bytes, 1500);
	air_ceiling("kind: ip-service, rate: { a-to-b: 100 Mbit/s, b-to-a: "
	    "20 Mbit/s }", "ipv4, tcp", PROTOCOL_TCP, DIRECTION_B_TO_A,
	    &ceiling);
	/* 100 Mbit/s at packet are 1538/1500 of that on Ethernet (B4) */
	air_ceiling("kind: ip-service, rate: 100 Mbit/s",
	    "ethernet, ipv4, tcp", PROTOCOL_TCP, DIRECTION_A_TO_B, &ceiling);
	assert_near((double)ceiling.rate_bps[LEVEL_LINE] / 1e6, 102.533,
	    0.000501, "B4");
	assert_near((double)ceiling.rate_bps[LEVEL_PAYLOAD] / 1e6, 96.533,
	    0.000501, "B4");
}

static const struct air_refusal ip_refusals[] = {
	{ "kind: ip-service", "'rate' is missing" },
	{ "kind: ip-service, rate: 0 bit/s", "from 1 bit/s" },
	{ "kind: ip-service, rate: 1.7 Tbit/s", "1.6 Tbit/s" },
	{ "kind: ip-service, rate: 100 MHz", "unit of a frequency" },
	{ "kind: ip-service, rate: { a-to-b: 1 Mbit/s }", "b-to-a" },
	{ "kind: ip-service, rate: 1 Mbit/s, counted-at: line",
	  "frame, packet, segment, payload" },
};

static void
a_wrong_ip_service_is_refused_with_its_place(void **state)
{
	(void)state;
	air_refused_all(ip_refusals, COUNT(ip_refusals), IP);
	air_refused_with("kind: ip-service, rate: 1 Mbit/s, counted-at: frame",
	    IP, "", "allowed there: ethernet");
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(analogue_channels_carry_what_shannon_says),
		cmocka_unit_test(shannons_formula_to_the_tenth),
		cmocka_unit_test(the_least_energy_for_a_bit),
		cmocka_unit_test(noise_is_k_t_b),
		cmocka_unit_test(the_limit_of_a_weak_signal_is_explained),
		cmocka_unit_test(a_gap_is_a_step_below_the_line),
		cmocka_unit_test(directions_of_a_channel_may_differ),
		cmocka_unit_test(
		    what_makes_no_channel_is_refused_with_its_place),
		cmocka_unit_test(an_ip_service_is_counted_at_its_level),
		cmocka_unit_test(an_ip_service_gives_exact_ladders),
		cmocka_unit_test(a_wrong_ip_service_is_refused_with_its_place),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
