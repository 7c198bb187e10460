/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "ceiling/window.h"
#include "units.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define MS UINT64_C(1000000)

/* RFC 6349 table 3.3.1: its kB are 1000 B, printed with one or two decimals. */
static void
products_are_those_of_rfc_6349_table_3_3_1(void **state)
{
	static const struct {
		uint64_t bps, round_trip_us, bits, bytes;
	} rows[] = {
		{ 1536000, 20000, 30720, 3840 },
		{ 1536000, 50000, 76800, 9600 },
		{ 1536000, 100000, 153600, 19200 },
		{ 44210000, 10000, 442100, 55262 },
		{ 44210000, 15000, 663150, 82893 },
		{ 44210000, 25000, 1105250, 138156 },
		{ 100000000, 1000, 100000, 12500 },
		{ 100000000, 2000, 200000, 25000 },
		{ 100000000, 5000, 500000, 62500 },
		{ 1000000000, 100, 100000, 12500 },
		{ 1000000000, 500, 500000, 62500 },
		{ 1000000000, 1000, 1000000, 125000 },
		{ 10000000000, 50, 500000, 62500 },
		{ 10000000000, 300, 3000000, 375000 },
		/* in its text: ADSL of 5 Mbit/s and 640 kbit/s, 90 ms */
		{ 5000000, 90000, 450000, 56250 },
		{ 640000, 90000, 57600, 7200 },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		uint64_t ns = rows[i].round_trip_us * 1000;

		assert_int_equal(window_product_bytes(rows[i].bps, ns),
		    rows[i].bytes);
		assert_int_equal(window_product_bytes(8 * rows[i].bps, ns),
		    rows[i].bits);
		assert_int_equal(window_needed_bytes(rows[i].bps, ns),
		    (rows[i].bits + 7) / 8);
	}
}

/* RFC 6349 figures 3.3.1a and b: a T3 of 42.8 Mbit/s of TCP; KB are 1000 B. */
static void
a_window_a_round_trip_is_that_of_rfc_6349(void **state)
{
	static const struct {
		uint64_t window_bytes, round_trip_ms, printed_100_kbps;
		const char *source;
	} rows[] = {
		{ 16000, 5, 256, "RFC 6349 fig. 3.3.1a" },
		{ 16000, 10, 128, "RFC 6349 fig. 3.3.1a" },
		{ 16000, 15, 85, "RFC 6349 fig. 3.3.1a" },
		{ 16000, 25, 51, "RFC 6349 fig. 3.3.1a" },
		{ 64000, 10, 428, "RFC 6349 fig. 3.3.1a: the link" },
		{ 64000, 15, 341, "RFC 6349 fig. 3.3.1a" },
		{ 64000, 25, 204, "RFC 6349 fig. 3.3.1a, printed as 20.5" },
		{ 16000, 25, 51, "RFC 6349 fig. 3.3.1b" },
		{ 32000, 25, 102, "RFC 6349 fig. 3.3.1b" },
		{ 64000, 25, 204, "RFC 6349 fig. 3.3.1b, printed as 20.5" },
		{ 128000, 25, 409, "RFC 6349 fig. 3.3.1b" },
	};
	const uint64_t link_bps = 42802785;	/* 44.21 Mbit/s * 1460/1508 */
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		uint64_t bps = rate_bps(rows[i].window_bytes,
		    rows[i].round_trip_ms * MS);

		if (bps > link_bps)
			bps = link_bps;
		assert_int_equal(bps / 100000, rows[i].printed_100_kbps);
	}
}

static void
streams_are_those_of_rfc_6349_table_5_1(void **state)
{
	static const uint64_t rows[][2] = { { 16000, 20 }, { 32000, 10 },
		{ 64000, 5 }, { 128000, 3 } };
	uint64_t needed_bytes = window_needed_bytes(500000000, 5 * MS);
	size_t i;

	(void)state;
	assert_int_equal(needed_bytes, 312500);
	for (i = 0; i < COUNT(rows); i++)
		assert_int_equal(window_streams(needed_bytes, rows[i][0]),
		    rows[i][1]);
	assert_int_equal(window_streams(0, 1), 1);
	assert_int_equal(window_streams(16000, 16000), 1);
	assert_int_equal(window_streams(16001, 16000), 2);
}

static void
windows_are_scaled_as_in_rfc_7323(void **state)
{
	static const struct {
		uint64_t window_bytes;
		unsigned shift;
	} rows[] = {
		{ 0, 0 }, { 65535, 0 }, { 65536, 1 }, { 131070, 1 },
		{ 131071, 2 }, { 536862720, 13 }, { 536862721, 14 },
		{ 1073725440, 14 }, { UINT64_MAX, 14 },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++)
		assert_int_equal(window_shift(rows[i].window_bytes),
		    rows[i].shift);
	/* 65535 << 14; RFC 7323 s2.3 rounds it to 1 GiB */
	assert_int_equal(WINDOW_LARGEST_BYTES, 1073725440);
	/* without scaling: 52.428 Mbit/s at 10 ms, 5.2428 at 100 ms */
	assert_int_equal(rate_bps(WINDOW_UNSCALED_BYTES, 10 * MS), 52428000);
	assert_int_equal(rate_bps(WINDOW_UNSCALED_BYTES, 100 * MS), 5242800);
}

static void
initial_windows_are_those_of_rfc_6928(void **state)
{
	static const uint64_t rows[][2] = { { 1448, 14480 }, { 1460, 14600 },
		{ 536, 5360 }, { 8948, 17896 }, { 7300, 14600 },
		{ 1500, 14600 } };
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++)
		assert_int_equal(window_initial_bytes(rows[i][0]),
		    rows[i][1]);
}

/* n = ceil(log2(W / IW)), IW 14480; mean = (8 IW (2^n - 1) + C (T - n RTT)) /
 * T: RFC 6928 s2 and RFC 5681 s3.1, worked out by hand. */
static void
slow_start_takes_its_share_of_the_mean(void **state)
{
	static const struct {
		uint64_t bps, round_trip_ms, length_s, rounds, ramp_ms;
		double mean_ratio;
	} rows[] = {
		{ 100000000, 20, 10, 5, 100, 0.9936 },
		{ 1000000000, 20, 10, 8, 160, 0.9870 },
		{ 1000000000, 100, 10, 10, 1000, 0.9119 },
		{ 1000000000, 100, 30, 10, 1000, 0.9706 },
		{ 10000000000, 50, 10, 13, 650, 0.9445 },
	};
	struct ramp ramp;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		double ratio;

		window_ramp(rows[i].bps, rows[i].round_trip_ms * MS, 14480,
		    &ramp);
		assert_int_equal(ramp.rounds, rows[i].rounds);
		assert_int_equal(ramp.ns, rows[i].ramp_ms * MS);
		ratio = (double)window_cold_mean_bps(rows[i].bps,
		    rows[i].round_trip_ms * MS, 14480,
		    rows[i].length_s * NS_PER_S) / (double)rows[i].bps;
		assert_true(ratio > rows[i].mean_ratio - 0.00005 &&
		    ratio < rows[i].mean_ratio + 0.00005);
	}
}

static void
a_short_test_sees_the_ramp_alone(void **state)
{
	struct ramp ramp;
	uint64_t mean_bps, last_bps = 0, ms;

	(void)state;
	/* two rounds of a 1 Gbit/s of 20 ms: 14480 + 28960 octets */
	assert_int_equal(window_cold_mean_bps(1000000000, 20 * MS, 14480,
	    40 * MS), 8688000);
	/* the third window of 57920 octets is out long before its round ends */
	assert_int_equal(window_cold_mean_bps(1000000000, 20 * MS, 14480,
	    50 * MS), 16217600);
	/* nothing to ramp up to */
	window_ramp(1000, 20 * MS, 14480, &ramp);
	assert_int_equal(ramp.rounds, 0);
	assert_int_equal(window_cold_mean_bps(1000, 20 * MS, 14480,
	    NS_PER_S), 1000);
	for (ms = 200; ms < 5000; ms += 10) {
		mean_bps = window_cold_mean_bps(1000000000, 20 * MS, 14480,
		    ms * MS);
		assert_true(mean_bps >= last_bps && mean_bps < 1000000000);
		last_bps = mean_bps;
	}
}

/* R + 8 B / T of RFC 2697's bucket; the kernel's own token bucket came within
 * 0.1 % of it. */
static void
a_full_bucket_raises_the_mean(void **state)
{
	static const struct {
		uint64_t bytes, length_ms, mean_kbps;
	} rows[] = {
		{ 15000, 1001, 10119 }, { 15000, 4001, 10029 },
		{ 250000, 1001, 11998 }, { 250000, 4001, 10499 },
		{ 1000000, 1000, 18000 }, { 1000000, 4001, 11999 },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++)
		assert_int_equal(bucket_mean_bps(rows[i].bytes, 10000000,
		    1000000000, rows[i].length_ms * MS) / 1000,
		    rows[i].mean_kbps);
	/* 50 Mbit/s with 10 MB over 10 s averages 58 Mbit/s */
	assert_int_equal(bucket_mean_bps(10000000, 50000000, 1000000000,
	    10 * NS_PER_S), 58000000);
	/* 8 B / (P - R): 1 MB at 100 Mbit/s over 20 Mbit/s is 0.1 s, and then
	 * B P / (P - R) = 1.25 MB have gone */
	assert_int_equal(bucket_lasts_ns(1000000, 20000000, 100000000),
	    100 * MS);
	assert_int_equal(bucket_mean_bps(1000000, 20000000, 100000000,
	    100 * MS), 100000000);
	/* it still lasts: the line is the limit; none: there is none */
	assert_int_equal(bucket_mean_bps(1000000, 20000000, 100000000, MS),
	    100000000);
	assert_int_equal(bucket_lasts_ns(1000000, 20000000, 20000000),
	    UINT64_MAX);
	assert_int_equal(bucket_mean_bps(1000000, 20000000, 20000000, MS),
	    20000000);
}

/* RFC 6349 s4.1.1 and s4.1.2: 100 MB, MSS 1460; it prints 571.0, 18.0, 9.0,
 * 1.0 and 0.1 s, the first from 1.4 Mbit/s and the others rounded. */
static void
ideal_transfer_times_are_those_of_rfc_6349(void **state)
{
	static const struct {
		uint64_t line_bps, payload, line, achievable_bps, ms;
	} rows[] = {
		{ 1400000, 1, 1, 1400000, 571428 },
		{ 1536000, 1460, 1508, 1487108, 537956 },
		{ 44210000, 1460, 1508, 42802785, 18690 },
		{ 100000000, 1460, 1538, 94928478, 8427 },
		{ 1000000000, 1460, 1538, 949284785, 842 },
		{ 10000000000, 1460, 1538, 9492847854, 84 },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		uint64_t bps = scale_u64(rows[i].line_bps, rows[i].payload,
		    rows[i].line);

		assert_int_equal(bps, rows[i].achievable_bps);
		assert_int_equal(transfer_ideal_ns(100000000, bps) / MS,
		    rows[i].ms);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(products_are_those_of_rfc_6349_table_3_3_1),
		cmocka_unit_test(a_window_a_round_trip_is_that_of_rfc_6349),
		cmocka_unit_test(streams_are_those_of_rfc_6349_table_5_1),
		cmocka_unit_test(windows_are_scaled_as_in_rfc_7323),
		cmocka_unit_test(initial_windows_are_those_of_rfc_6928),
		cmocka_unit_test(slow_start_takes_its_share_of_the_mean),
		cmocka_unit_test(a_short_test_sees_the_ramp_alone),
		cmocka_unit_test(a_full_bucket_raises_the_mean),
		cmocka_unit_test(ideal_transfer_times_are_those_of_rfc_6349),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
