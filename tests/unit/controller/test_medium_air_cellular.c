/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "ceiling/capacity.h"
#include "declare/cellular.h"
#include "medium_air.h"

#define NR "kind: nr, channel-width: 100 MHz, subcarrier-spacing: 30 kHz, "
#define NR_TDD "tdd: { downlink-slots: 7, uplink-slots: 2, "		\
	"special-downlink-symbols: 6, special-uplink-symbols: 4 }"
#define LTE "kind: lte, channel-width: 20 MHz, "

/* What the layers get; b is the subscriber. */
static double
offered_mbps(const char *medium, const char *layer, enum direction direction)
{
	struct medium_capacity capacity;
	char layers[64];

	(void)snprintf(layers, sizeof(layers), "%s, ipv4, tcp", layer);
	air_capacity(medium, layers, direction, &capacity);
	return fraction_double(capacity_offered(&capacity)) / 1e6;
}

/* N1 to N6: 3GPP TS 38.306 section 4.1.2, to the cent of a Mbit/s. */
static const struct {
	const char *id, *medium;
	enum direction direction;
	double rate_mbps;
} nr_peaks[] = {
	{ "N1", NR "layers: 4, modulation: 256-qam",
	  DIRECTION_A_TO_B, 2337.00 },
	{ "N2", NR "layers: 2, modulation: 256-qam",
	  DIRECTION_A_TO_B, 1168.50 },
	{ "N3", NR "layers: 1, modulation: 64-qam",
	  DIRECTION_B_TO_A, 468.76 },
	{ "N3", NR "layers: { a-to-b: 4, b-to-a: 2 }, modulation: "
	  "256-qam", DIRECTION_B_TO_A, 1250.02 },
	{ "N4", "kind: nr, channel-width: 20 MHz, subcarrier-spacing: "
	  "15 kHz, layers: 4, modulation: 256-qam",
	  DIRECTION_A_TO_B, 453.70 },
	{ "N5", "kind: nr, channel-width: 100 MHz, "
	  "subcarrier-spacing: 120 kHz, layers: 2, modulation: "
	  "64-qam", DIRECTION_A_TO_B, 808.07 },
	{ "N6", NR "layers: 4, modulation: 256-qam, " NR_TDD,
	  DIRECTION_A_TO_B, 1736.06 },
	{ "N1 at the other end", NR "layers: 4, modulation: 256-qam, "
	  "subscriber: a", DIRECTION_B_TO_A, 2337.00 },
	{ "FR2 up: 66 * 12 * 112000 * 948/1024 * 0.9 * 6 * 2",
	  "kind: nr, channel-width: 100 MHz, subcarrier-spacing: "
	  "120 kHz, layers: 2, modulation: 64-qam",
	  DIRECTION_B_TO_A, 886.90 },
	{ "N6 up: 2 * 14 + 4 of 140 of 2500.03", NR "layers: 4, "
	  "modulation: 256-qam, " NR_TDD, DIRECTION_B_TO_A, 571.44 },
	{ "N1 * 3/4", NR "layers: 4, modulation: 256-qam, tdd: { "
	  "downlink-slots: 3, uplink-slots: 1 }", DIRECTION_A_TO_B,
	  1752.75 },
	{ "N1 * 20/28", NR "layers: 4, modulation: 256-qam, tdd: { "
	  "downlink-slots: 1, uplink-slots: 0, "
	  "special-downlink-symbols: 6, special-uplink-symbols: 2 }",
	  DIRECTION_A_TO_B, 1669.29 },
	{ "N1 * 0.8", NR "layers: 4, modulation: 256-qam, "
	  "scaling-factor: 0.8", DIRECTION_A_TO_B, 1869.60 },
	{ "N1 * 0.75", NR "layers: 4, modulation: 256-qam, "
	  "scaling-factor: 0.75", DIRECTION_A_TO_B, 1752.75 },
	{ "N1 * 0.4", NR "layers: 4, modulation: 256-qam, "
	  "scaling-factor: 0.4", DIRECTION_A_TO_B, 934.80 },
	{ "N1 * 0.9", NR "layers: 4, modulation: 256-qam, "
	  "block-error-target: 10 %", DIRECTION_A_TO_B, 2103.30 },
	{ "N1 * 2", NR "layers: 4, modulation: 256-qam, count: 2",
	  DIRECTION_A_TO_B, 4674.00 },
	{ "N1 + N4", "kind: nr, carriers: [ { channel-width: 100 MHz, "
	  "subcarrier-spacing: 30 kHz, layers: 4, modulation: 256-qam "
	  "}, { channel-width: 20 MHz, subcarrier-spacing: 15 kHz, "
	  "layers: 4, modulation: 256-qam } ]", DIRECTION_A_TO_B,
	  2790.70 },
	{ "N1 * 10/8", NR "layers: 4, modulation: 1024-qam",
	  DIRECTION_A_TO_B, 2921.25 },
	{ "N2 / 4", NR "layers: 2, modulation: qpsk",
	  DIRECTION_A_TO_B, 292.125 },
	{ "N2 / 2", NR "layers: 2, modulation: 16-qam",
	  DIRECTION_A_TO_B, 584.25 },
};

static void
nr_gives_the_peak_rate_of_the_standard(void **state)
{
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(nr_peaks); i++)
		assert_near(offered_mbps(nr_peaks[i].medium, "nr",
		    nr_peaks[i].direction), nr_peaks[i].rate_mbps, 0.00501,
		    nr_peaks[i].id);
}

/* 273 * 12 * 28000 * 8 * 4 = 2935296000 bit/s in all resource elements. */
static void
the_steps_of_nr_lead_from_all_resource_elements_down(void **state)
{
	static const uint64_t left[] = {
		2717442000,	/* * 948/1024 */
		2337000120,	/* * 0.86 */
		1752750090,	/* * 0.75 */
		1302042924,	/* * 104/140, rounded down */
		1171838631,	/* * 0.9 of it before rounding */
	};
	struct medium_capacity capacity;
	size_t i;

	(void)state;
	air_capacity(NR "layers: 4, modulation: 256-qam, scaling-factor: "
	    "0.75, block-error-target: 10 %, contention: 7, " NR_TDD,
	    "nr, ipv4, tcp", DIRECTION_A_TO_B, &capacity);
	assert_int_equal(fraction_floor(capacity.line_bps), 2935296000);
	assert_int_equal(capacity.steps_count, COUNT(left));
	for (i = 0; i < COUNT(left); i++)
		assert_int_equal(fraction_floor(capacity.steps[i].left_bps),
		    left[i]);
	assert_int_equal(capacity.contention, 7);
	assert_string_equal(capacity.notes[0], "downlink: 1 x 100 MHz, 273 "
	    "resource blocks each: 1171.839 Mbit/s");
	assert_int_equal(capacity.duplex, DUPLEX_FULL);
}

/* N7 and the handbooks' 75.6 a layer: 3GPP TS 36.213 table 7.1.7.2.1-1; 256-QAM
 * from memory. */
static void
lte_gives_the_rates_of_its_blocks(void **state)
{
	static const struct {
		const char *id, *medium;
		enum direction direction;
		double rate_mbps;
	} vectors[] = {
		{ "N7", LTE "transport-block-bits: 75376", DIRECTION_A_TO_B,
		  75.376 },
		{ "N7", LTE "transport-block-bits: { a-to-b: 75376, b-to-a: "
		  "51024 }, codewords: { a-to-b: 2, b-to-a: 1 }",
		  DIRECTION_A_TO_B, 150.752 },
		{ "N7", LTE "transport-block-bits: { a-to-b: 75376, b-to-a: "
		  "51024 }, codewords: { a-to-b: 2, b-to-a: 1 }",
		  DIRECTION_B_TO_A, 51.024 },
		{ "N7", LTE "transport-block-bits: 97896, codewords: 2",
		  DIRECTION_A_TO_B, 195.792 },
		{ "as many as 100 blocks hold", LTE "transport-block-bits: "
		  "672000, codewords: 2", DIRECTION_A_TO_B, 1344 },
		{ "one layer", LTE "layers: 1, modulation: 64-qam",
		  DIRECTION_A_TO_B, 75.6 },
		{ "two layers", LTE "layers: 2, modulation: 64-qam",
		  DIRECTION_A_TO_B, 151.2 },
		{ "raw", LTE "layers: 1, modulation: 64-qam, overhead: 0 %",
		  DIRECTION_A_TO_B, 100.8 },
		{ "1.4 MHz: 6 * 168 * 6 * 0.75", "kind: lte, channel-width: "
		  "1.4 MHz, layers: 1, modulation: 64-qam", DIRECTION_A_TO_B,
		  4.536 },
		{ "2:1:2 of 5, special 10:2 of 14", LTE "layers: 2, "
		  "modulation: 64-qam, tdd: { downlink-slots: 2, "
		  "uplink-slots: 2, special-downlink-symbols: 10, "
		  "special-uplink-symbols: 2 }", DIRECTION_A_TO_B,
		  151.2 * 38 / 70 },
		{ "20 + 10 MHz", "kind: lte, carriers: [ { channel-width: "
		  "20 MHz, layers: 2, modulation: 64-qam }, { channel-width: "
		  "10 MHz, transport-block-bits: 36696, codewords: 2 } ]",
		  DIRECTION_A_TO_B, 151.2 + 73.392 },
	};
	struct medium_capacity capacity;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++)
		assert_near(offered_mbps(vectors[i].medium, "lte",
		    vectors[i].direction), vectors[i].rate_mbps, 1e-6,
		    vectors[i].id);
	air_capacity(LTE "layers: 1, modulation: 64-qam", "lte, ipv4, tcp",
	    DIRECTION_A_TO_B, &capacity);
	assert_int_equal(fraction_floor(capacity.line_bps), 100800000);
	assert_string_equal(capacity.steps[0].what,
	    "control, references, coding");
}

/* TS 38.101-1 table 5.3.2-1, TS 38.101-2 table 5.3.2-1, TS 36.101 table 5.6-1
 * (this one from memory). */
static void
resource_blocks_are_those_of_the_tables(void **state)
{
	static const struct {
		enum frequency_range range;
		uint64_t spacing_khz, mhz[17], blocks[17];
	} rows[] = {
		{ FREQUENCY_RANGE_1, 15,
		  { 5, 10, 15, 20, 25, 30, 35, 40, 45, 50 },
		  { 25, 52, 79, 106, 133, 160, 188, 216, 242, 270 } },
		{ FREQUENCY_RANGE_1, 30, { 5, 10, 15, 20, 25, 30, 35, 40, 45,
		  50, 60, 70, 80, 90, 100 },
		  { 11, 24, 38, 51, 65, 78, 92, 106, 119, 133, 162, 189, 217,
		  245, 273 } },
		{ FREQUENCY_RANGE_1, 60, { 10, 15, 20, 25, 30, 35, 40, 45,
		  50, 60, 70, 80, 90, 100 },
		  { 11, 18, 24, 31, 38, 44, 51, 58, 65, 79, 93, 107, 121,
		  135 } },
		{ FREQUENCY_RANGE_2, 60, { 50, 100, 200 }, { 66, 132, 264 } },
		{ FREQUENCY_RANGE_2, 120, { 50, 100, 200, 400 },
		  { 32, 66, 132, 264 } },
	};
	static const uint64_t lte[][2] = { { 1400, 6 }, { 3000, 15 },
		{ 5000, 25 }, { 10000, 50 }, { 15000, 75 }, { 20000, 100 } };
	uint64_t mhz;
	size_t i, n;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		n = 0;
		for (mhz = 1; mhz <= 400; mhz++) {
			uint64_t expected = 0;

			if (mhz == rows[i].mhz[n])
				expected = rows[i].blocks[n++];
			assert_int_equal(nr_blocks(rows[i].range,
			    rows[i].spacing_khz, mhz * 1000), expected);
		}
		assert_int_equal(rows[i].mhz[n], 0);
	}
	assert_int_equal(nr_blocks(FREQUENCY_RANGE_2, 30, 100000), 0);
	for (i = 0; i < COUNT(lte); i++)
		assert_int_equal(lte_blocks(lte[i][0]), lte[i][1]);
	assert_int_equal(lte_blocks(40000), 0);
}

/* The octets of the layers lie inside the peak: N1 * 1448 / 1510 with headers
 * of 3 + 3 + 3 + 1 (3GPP TS 38.321 ff., from memory). */
static void
the_ladder_ends_in_payload(void **state)
{
	struct ceiling ceiling;

	(void)state;
	air_ceiling(NR "layers: 4, modulation: 256-qam", "nr, ipv4, tcp",
	    PROTOCOL_TCP, DIRECTION_A_TO_B, &ceiling);
	assert_int_equal(ceiling.rate_bps[LEVEL_PAYLOAD],
	    UINT64_C(2337000120) * 1448 / 1510);
	assert_false(ceiling.shared);
	assert_int_equal(ceiling.line_rate_bps, 2935296000);
}

static const struct air_refusal nr_refusals[] = {
	{ "kind: nr", "'channel-width' is missing" },
	{ "kind: nr, channel-width: 20 MHz",
	  "'subcarrier-spacing' is missing" },
	{ NR "modulation: 64-qam", "'layers' is missing" },
	{ NR "layers: 2", "'modulation' is missing" },
	{ NR "layers: { a-to-b: 2 }, modulation: 64-qam",
	  "'layers' is missing" },
	{ NR "layers: 2, modulation: { b-to-a: 64-qam }",
	  "'modulation' is missing" },
	{ NR "layers: 9, modulation: 64-qam", "from 1 to 8" },
	{ NR "layers: 0, modulation: 64-qam", "from 1 to 8" },
	{ NR "layers: 8, modulation: 64-qam",
	  "found 8 away from the subscriber, allowed there: 1 to 4" },
	{ NR "layers: 2, modulation: 128-qam", "one of qpsk" },
	{ NR "layers: 2, modulation: qpsk, scaling-factor: 0.5",
	  "one of 1, 0.8, 0.75, 0.4" },
	{ "kind: nr, channel-width: 60 MHz, subcarrier-spacing: "
	  "15 kHz", "test:2:36" },
	{ "kind: nr, channel-width: 60 MHz, subcarrier-spacing: "
	  "15 kHz", "in fr1: 5, 10, 15, 20, 25, 30, 35, 40, 45, 50 "
	  "MHz" },
	{ "kind: nr, channel-width: 5 MHz, subcarrier-spacing: "
	  "120 kHz", "in fr2: 50, 100, 200, 400 MHz" },
	{ "kind: nr, channel-width: 100 MHz, subcarrier-spacing: "
	  "30 kHz, frequency-range: fr2", "in fr2: none MHz" },
	{ "kind: nr, channel-width: 50 MHz, subcarrier-spacing: "
	  "60 kHz", "'frequency-range' is missing" },
	{ "kind: nr, channel-width: 5.0005 MHz, subcarrier-spacing: "
	  "15 kHz", "allowed with a spacing of 15 kHz" },
	{ "kind: nr, channel-width: 401 MHz, subcarrier-spacing: "
	  "120 kHz", "to 400 MHz" },
	{ "kind: nr, channel-width: 100, subcarrier-spacing: 30 kHz",
	  "no unit" },
	{ "kind: nr, channel-width: 20 MHz, subcarrier-spacing: "
	  "15 MHz", "15 kHz, 30 kHz" },
	{ NR "layers: 2, modulation: qpsk, tdd: { downlink-slots: 7 "
	  "}", "required field 'uplink-slots'" },
	{ NR "layers: 2, modulation: qpsk, tdd: { downlink-slots: 7, "
	  "uplink-slots: 0 }", "a direction has no symbols" },
	{ NR "layers: 2, modulation: qpsk, tdd: { downlink-slots: 0, "
	  "uplink-slots: 3 }", "a direction has no symbols" },
	{ NR "layers: 2, modulation: qpsk, tdd: { downlink-slots: 7, "
	  "uplink-slots: 2, special-downlink-symbols: 10, "
	  "special-uplink-symbols: 5 }", "found 15 symbols" },
	{ NR "layers: 2, modulation: qpsk, tdd: { downlink-slots: "
	  "161, uplink-slots: 2 }", "from 0 to 160" },
	{ NR "layers: 2, modulation: qpsk, tdd: { downlink-slots: 1, "
	  "uplink-slots: 2, special-uplink-symbols: 15 }",
	  "from 0 to 14" },
	{ NR "layers: 2, modulation: qpsk, tdd: { downlink-slots: 1, "
	  "uplink-slots: 161 }", "from 0 to 160" },
	{ NR "layers: 2, modulation: qpsk, tdd: { downlink-slots: 1, "
	  "uplink-slots: 2, special-downlink-symbols: 15 }",
	  "from 0 to 14" },
	{ NR "layers: 2, modulation: qpsk, tdd: yes", "a mapping" },
	{ NR "layers: 2, modulation: qpsk, block-error-target: 50.1 %",
	  "block-error-target" },
	{ NR "layers: 2, modulation: qpsk, block-error-target: "
	  "10 dB", "is the unit of a ratio in decibels" },
	{ NR "layers: 2, modulation: qpsk, subscriber: c",
	  "one of a, b" },
	{ NR "layers: 2, modulation: qpsk, contention: 0",
	  "contention" },
	{ NR "layers: 2, modulation: qpsk, count: 17", "count" },
	{ NR "layers: 2, modulation: qpsk, overhead: 10 %",
	  "unknown field 'overhead'" },
	{ "kind: nr, carriers: []", "found a list of 0" },
	{ "kind: nr, carriers: [ {}, {}, {}, {}, {}, {}, {}, {}, {} ]",
	  "a list of 1 to 8 mappings" },
	{ "kind: nr, carriers: [ { layers: 2 } ]",
	  "'channel-width' is missing" },
	{ NR "carriers: [ { layers: 2 } ]", "`carriers` is given" },
	{ "kind: nr, carriers: [ { channel-width: 100 MHz, "
	  "subcarrier-spacing: 30 kHz, layers: 2, modulation: qpsk }, "
	  "{ channel-width: 60 MHz, subcarrier-spacing: 15 kHz } ]",
	  "test:2:135" },
};

static void
what_nr_does_not_define_is_refused_with_its_place(void **state)
{
	(void)state;
	air_refused_all(nr_refusals, COUNT(nr_refusals), "nr, ipv4, tcp");
}

static const struct air_refusal lte_refusals[] = {
	{ "kind: lte", "'channel-width' is missing" },
	{ "kind: lte, channel-width: 40 MHz",
	  "1.4, 3, 5, 10, 15, 20 MHz" },
	{ "kind: lte, channel-width: 1 MHz", "from 1.4 MHz" },
	{ LTE "modulation: 64-qam", "'layers' is missing" },
	{ LTE "layers: 2", "'modulation' is missing" },
	{ LTE "layers: 5, modulation: 64-qam", "allowed there: 1 to "
	  "4" },
	{ LTE "layers: 2, modulation: 64-qam, codewords: 2",
	  "codewords: without transport-block-bits" },
	{ LTE "transport-block-bits: 75376, layers: 2",
	  "layers: transport-block-bits is given too" },
	{ LTE "transport-block-bits: 75376, modulation: 64-qam",
	  "modulation: transport-block-bits is given too" },
	{ LTE "transport-block-bits: 75376, overhead: 25 %",
	  "overhead: transport-block-bits is given too" },
	{ LTE "transport-block-bits: { a-to-b: 75376 }",
	  "'transport-block-bits' is missing" },
	{ LTE "transport-block-bits: 15", "from 16 to 1000000" },
	{ LTE "transport-block-bits: 1000000, codewords: 2",
	  "100 resource blocks hold 1344000 bits" },
	{ LTE "transport-block-bits: 672001, codewords: 2",
	  "hold 1344000 bits" },
	{ LTE "transport-block-bits: 75376, codewords: 3",
	  "from 1 to 2" },
	{ LTE "layers: 2, modulation: 64-qam, overhead: 90.1 %",
	  "overhead" },
	{ LTE "layers: 2, modulation: 64-qam, subcarrier-spacing: "
	  "15 kHz", "unknown field" },
};

static void
what_lte_does_not_define_is_refused_with_its_place(void **state)
{
	(void)state;
	air_refused_all(lte_refusals, COUNT(lte_refusals), "lte, ipv4, tcp");
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(nr_gives_the_peak_rate_of_the_standard),
		cmocka_unit_test(
		    the_steps_of_nr_lead_from_all_resource_elements_down),
		cmocka_unit_test(lte_gives_the_rates_of_its_blocks),
		cmocka_unit_test(resource_blocks_are_those_of_the_tables),
		cmocka_unit_test(the_ladder_ends_in_payload),
		cmocka_unit_test(
		    what_nr_does_not_define_is_refused_with_its_place),
		cmocka_unit_test(
		    what_lte_does_not_define_is_refused_with_its_place),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
