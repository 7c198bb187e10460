/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the media on coaxial cable offer their layers, against published
 * figures. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "../seeded.h"
#include "medium_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define DOWN DIRECTION_A_TO_B		/* the subscriber is end b */
#define UP DIRECTION_B_TO_A

/* Annex B: a table of RF specifications; annex A: symbol rate of the same
 * table, RS(204,188) and the MPEG header from memory. */
static void
a_docsis_channel_has_the_rates_of_j83(void **state)
{
	static const char table[] = "RF specification table; ITU-T J.83";
	static const struct {
		const char *medium, *last_code;
		double raw_mbit_per_s, info_mbit_per_s, payload_mbit_per_s;
		double raw_digit, info_digit, payload_digit;	/* bit/s */
	} vectors[] = {
		{ "modulation: 64-qam", "FEC frame trailer", 30.3416, 26.97035,
		  26.3965, 100, 10, 100 },
		{ "modulation: 256-qam", "FEC frame trailer", 42.8843,
		  38.81070, 37.9849, 100, 10, 100 },
		{ "annex: a, modulation: 64-qam", "Reed-Solomon code", 41.712,
		  38.44047, 37.6226, 0, 10, 100 },
		{ "annex: a", "Reed-Solomon code", 55.616, 51.25396, 50.1634,
		  0, 10, 100 },
		/* a constant of a public code base */
		{ "annex: b", "FEC frame trailer", 42.884296, 38.81070039,
		  37.9849, 0, 2, 100 },
	};
	struct medium_capacity capacity;
	char text[160];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ kind: docsis-3.0, "
		    "downstream-channels: 1, upstream-rate: 27 Mbit/s, %s }",
		    vectors[i].medium);
		capacity_of(text, DOWN, 1535, &capacity);
		assert_printed(text, fraction_double(capacity.line_bps),
		    vectors[i].raw_mbit_per_s * 1e6,
		    vectors[i].raw_digit, table);
		assert_printed(text, left_after(&capacity,
		    vectors[i].last_code), vectors[i].info_mbit_per_s * 1e6,
		    vectors[i].info_digit, table);
		assert_printed(text, left_after(&capacity, "MPEG header"),
		    vectors[i].payload_mbit_per_s * 1e6,
		    vectors[i].payload_digit, table);
		assert_int_equal(capacity.tolerance_ppm, 5);
	}
}

/* Of each code by itself, as J.83 annex B has it. */
static void
a_docsis_channel_shows_its_codes_as_steps(void **state)
{
	struct medium_capacity capacity;
	double trellis, words;

	(void)state;
	capacity_of("{ kind: docsis-3.0, downstream-channels: 1, "
	    "upstream-rate: 27 Mbit/s }", DOWN, 1535, &capacity);
	trellis = left_after(&capacity, "trellis code");
	words = left_after(&capacity, "Reed-Solomon code");
	assert_printed("19/20", trellis, 42884296.0 * 19 / 20, 2, "J.83");
	assert_printed("122/128", words, trellis * 122 / 128, 2, "J.83");
	/* 1535 octets and a pointer; of 37.9849 the table prints 37.960 */
	assert_printed("MAC frames", offered(&capacity), 37960000, 1000,
	    "K1");
}

/* A pointer stands in each MPEG packet in which a frame starts: one a frame,
 * while several short ones share one. */
static void
a_docsis_pointer_is_at_most_one_a_packet(void **state)
{
	static const struct { uint64_t frame_bytes, num, den; } vectors[] = {
		{ 1535, 1535, 1536 }, { 184, 184, 185 }, { 183, 183, 184 },
		{ 81, 183, 184 }, { 1, 183, 184 },
	};
	struct medium_capacity capacity;
	double packets;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		capacity_of("{ kind: docsis-3.0, downstream-channels: 32, "
		    "upstream-rate: 27 Mbit/s }", DOWN,
		    vectors[i].frame_bytes, &capacity);
		packets = left_after(&capacity, "MPEG header");
		assert_printed("pointer", offered(&capacity), packets *
		    (double)vectors[i].num / (double)vectors[i].den, 2,
		    "ITU-T J.122, from memory");
	}
}

static void
bonded_channels_add_up(void **state)
{
	static const struct {
		unsigned channels;
		double info_mbit_per_s;
	} vectors[] = {
		{ 4, 155.24 }, { 8, 310.49 }, { 16, 620.97 }, { 24, 931.46 },
		{ 32, 1241.94 },
	};
	struct medium_capacity capacity;
	char text[128];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ kind: docsis-3.0, "
		    "downstream-channels: %u, upstream-rate: 27 Mbit/s, "
		    "upstream-channels: 8 }", vectors[i].channels);
		capacity_of(text, DOWN, 1535, &capacity);
		assert_printed(text, left_after(&capacity,
		    "FEC frame trailer"), vectors[i].info_mbit_per_s * 1e6, 1e4,
		    "K2: channels * 38.8107");
		capacity_of(text, UP, 1528, &capacity);
		assert_int_equal(capacity_offered(&capacity).num, 216000000);
	}
}

/* Estimates worked out from the constants of a public capacity script. */
static void
an_ofdm_block_has_the_estimated_rate(void **state)
{
	static const struct {
		const char *block;
		double mbit_per_s;
	} vectors[] = {
		{ "bits-per-subcarrier: 12, cyclic-prefix: 0.9375 us",
		  1848.0 },
		{ "bits-per-subcarrier: 12, cyclic-prefix: 1.25 us", 1820.8 },
		{ "bits-per-subcarrier: 12, cyclic-prefix: 2.5 us", 1719.6 },
		{ "bits-per-subcarrier: 12", 1719.6 },
		{ "bits-per-subcarrier: 12, cyclic-prefix: 5 us", 1547.7 },
		{ "bits-per-subcarrier: 8", 1148.9 },
		{ "bits-per-subcarrier: 10", 1433.0 },
		{ "bits-per-subcarrier: 11", 1576.3 },
	};
	struct medium_capacity capacity;
	char text[192];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ kind: docsis-3.1, "
		    "occupied: 192 MHz, upstream-rate: 50 Mbit/s, %s }",
		    vectors[i].block);
		capacity_of(text, DOWN, 1535, &capacity);
		assert_printed(text, offered(&capacity),
		    vectors[i].mbit_per_s * 1e6, 1e5,
		    "K4, K5: 3800 subcarriers");
	}
	capacity_of(text, UP, 1528, &capacity);
	assert_int_equal(capacity_offered(&capacity).num, 50000000);
}

/* Worked out by hand from the formula: whole bit/s, to see every constant.
 * 3800 subcarriers, PLC 8, pilots 8 + 48, scattered 29.6875. */
static void
an_ofdm_block_is_computed_to_the_bit(void **state)
{
	static const struct {
		const char *block;
		/* data subcarriers * 128, bits, samples a symbol */
		uint64_t data_128ths, bits, samples;
	} vectors[] = {
		/* 2.7 codewords, NCP 4 * 48/6 = 32: 3674.3125 */
		{ "occupied: 192 MHz, bits-per-subcarrier: 12", 470312, 12,
		  4608 },
		/* NCP 4 * 48/4 = 48 */
		{ "occupied: 192 MHz, bits-per-subcarrier: 12, "
		  "control-modulation: 16-qam", 468264, 12, 4608 },
		/* NCP 4 * 48/2 = 96 */
		{ "occupied: 192 MHz, bits-per-subcarrier: 12, "
		  "control-modulation: qpsk, cyclic-prefix: 3.75 us", 462120,
		  12, 4864 },
		/* pilots 8 + 120 */
		{ "occupied: 192 MHz, bits-per-subcarrier: 12, "
		  "pilot-density: 120", 461096, 12, 4608 },
		/* 8 MHz of guard: 3680; pilots 8 + 47; scattered 28.75 */
		{ "occupied: 192 MHz, bits-per-subcarrier: 12, guard: 8 MHz",
		  455200, 12, 4608 },
		/* no guard: 3840; pilots 8 + 49, scattered 30; and with M = 120
		 * the most pilots that there are, 8 + 120 */
		{ "occupied: 192 MHz, bits-per-subcarrier: 12, guard: 0 Hz",
		  475264, 12, 4608 },
		{ "occupied: 192 MHz, bits-per-subcarrier: 12, guard: 0 Hz, "
		  "pilot-density: 120", 466176, 12, 4608 },
		/* 7600 of 25 kHz: PLC 16, scattered 59.375; 6.7 codewords
		 * hence NCP 64: 7404.625 */
		{ "occupied: 192 MHz, bits-per-subcarrier: 14, spacing: "
		  "25 kHz", 947792, 14, 8704 },
		/* 440 of 50 kHz: pilots 8 + 8 at the least, scattered
		 * 3.4375, one codeword: NCP 16 */
		{ "occupied: 24 MHz, bits-per-subcarrier: 1", 50760, 1, 4608 },
	};
	struct medium_capacity capacity;
	char text[192];
	double bps;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ kind: docsis-3.1, "
		    "upstream-rate: 50 Mbit/s, %s }", vectors[i].block);
		capacity_of(text, DOWN, 1535, &capacity);
		bps = (double)vectors[i].data_128ths / 128 *
		    (double)vectors[i].bits * 204.8e6 /
		    (double)vectors[i].samples;
		assert_printed(text, left_after(&capacity,
		    "pilots, PLC and NCP"), bps, 2, "by hand");
		assert_printed(text, offered(&capacity), bps * 14216 / 16200,
		    2, "by hand");
	}
}

/* Blocks multiply; single-carrier channels stand beside them. */
static void
blocks_and_channels_add_up(void **state)
{
	static const char ofdm[] = "kind: docsis-3.1, occupied: 192 MHz, "
	    "bits-per-subcarrier: 12, upstream-rate: 50 Mbit/s";
	struct medium_capacity one, two, mixed, channels;
	char text[256];

	(void)state;
	(void)snprintf(text, sizeof(text), "{ %s }", ofdm);
	capacity_of(text, DOWN, 1535, &one);
	/* 3800 * 12 bits / 20 us */
	assert_int_equal(one.line_bps.num, 2280000000);
	assert_printed("prefix", left_after(&one, "cyclic prefix"),
	    3800 * 12 / 22.5e-6, 2, "by hand");
	(void)snprintf(text, sizeof(text), "{ %s, blocks: 2 }", ofdm);
	capacity_of(text, DOWN, 1535, &two);
	assert_printed("two", offered(&two), 2 * offered(&one), 4, "twice");
	(void)snprintf(text, sizeof(text), "{ %s, downstream-channels: 32 }",
	    ofdm);
	capacity_of(text, DOWN, 1535, &mixed);
	capacity_of("{ kind: docsis-3.0, downstream-channels: 32, "
	    "upstream-rate: 1 Mbit/s }", DOWN, 1535, &channels);
	assert_printed("mixed", offered(&mixed), offered(&one) +
	    offered(&channels), 0, "sum");
	assert_int_equal(mixed.line_bps.num, one.line_bps.num +
	    channels.line_bps.num);
	assert_int_equal(mixed.steps_count, MEDIUM_STEPS_MAX);
}

/* Whatever is declared: rates descend (asserted on the way), something is
 * left, and a model's rates are whole. */
static void
any_block_leaves_something(void **state)
{
	static const char *const prefixes[] = { "0.9375 us", "1.25 us",
		"2.5 us", "3.75 us", "5 us" };
	static const char *const controls[] = { "qpsk", "16-qam", "64-qam" };
	struct medium_capacity capacity;
	uint64_t seed = 5180;
	char text[384];
	size_t i, step;

	(void)state;
	for (i = 0; i < 300; i++) {
		(void)snprintf(text, sizeof(text), "{ kind: docsis-3.1, "
		    "blocks: %u, occupied: %u kHz, guard: %u kHz, spacing: "
		    "%u kHz, cyclic-prefix: %s, bits-per-subcarrier: %u.%u, "
		    "pilot-density: %u, control-modulation: %s, "
		    "downstream-channels: %u, upstream-rate: 1 Mbit/s }",
		    (unsigned)seeded_between(&seed, 1, 8),
		    (unsigned)seeded_between(&seed, 24000, 192000),
		    (unsigned)seeded_between(&seed, 0, 10000),
		    (unsigned)seeded_between(&seed, 1, 2) * 25,
		    prefixes[seeded_between(&seed, 0, 4)],
		    (unsigned)seeded_between(&seed, 1, 13),
		    (unsigned)seeded_between(&seed, 0, 9),
		    (unsigned)seeded_between(&seed, 48, 120),
		    controls[seeded_between(&seed, 0, 2)],
		    (unsigned)seeded_between(&seed, 0, 32));
		capacity_of(text, DOWN, seeded_between(&seed, 1, 65535),
		    &capacity);
		assert_true(offered(&capacity) > 0);
		for (step = 0; step < capacity.steps_count; step++)
			assert_int_equal(capacity.steps[step].left_bps.den,
			    1);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_docsis_channel_has_the_rates_of_j83),
		cmocka_unit_test(a_docsis_channel_shows_its_codes_as_steps),
		cmocka_unit_test(a_docsis_pointer_is_at_most_one_a_packet),
		cmocka_unit_test(bonded_channels_add_up),
		cmocka_unit_test(an_ofdm_block_has_the_estimated_rate),
		cmocka_unit_test(an_ofdm_block_is_computed_to_the_bit),
		cmocka_unit_test(blocks_and_channels_add_up),
		cmocka_unit_test(any_block_leaves_something),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
