/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <math.h>
#include <stdbool.h>

#include "error.h"
#include "judge/statistic.h"

#define N_MAX 100

/* 1, 2, ... n: then an order statistic's value is its rank. */
static struct median_estimate
estimate_of_ranks(size_t n, double confidence)
{
	double values[N_MAX];
	struct median_estimate estimate;
	struct error err;

	assert_in_range(n, 1, N_MAX);
	/* Out of order: the function has to sort. */
	for (size_t i = 0; i < n; i++)
		values[i] = (double)(i % 2 == 0 ? n - i / 2 : 1 + i / 2);
	assert_int_equal(statistic_median(values, n, confidence, 0.99,
	    &estimate, &err), 0);
	return estimate;
}

static const struct {
	size_t n;
	double low, high, coverage;
	const char *source;
} intervals[] = {
	{ 6, 1, 6, 0.96875, "by hand: 1 - 2 / 2^6" },
	{ 7, 1, 7, 0.984375, "by hand: 1 - 2 / 2^7" },
	{ 8, 1, 8, 0.9921875, "by hand: 1 - 2 / 2^8" },
	{ 9, 2, 8, 0.9609375, "by hand: 1 - 2 (1 + 9) / 2^9" },
	{ 10, 2, 9, 0.978515625, "by hand: 1 - 2 (1 + 10) / 2^10" },
	{ 12, 3, 10, 0.96142578125, "by hand: 1 - 2 (1 + 12 + 66) / 2^12" },
	{ 15, 4, 12, 0.96484375, "by hand: 1 - 2 (1+15+105+455) / 2^15" },
	{ 20, 6, 15, 0.9586, "R 4.2.2: 1 - 2 * pbinom(5, 20, 0.5)" },
	{ 25, 8, 18, 0.9567, "R 4.2.2: 1 - 2 * pbinom(7, 25, 0.5)" },
	{ 30, 10, 21, 0.9572, "R 4.2.2: 1 - 2 * pbinom(9, 30, 0.5)" },
	{ 50, 18, 33, 0.9672, "R 4.2.2: 1 - 2 * pbinom(17, 50, 0.5)" },
	{ 100, 40, 61, 0.9648, "R 4.2.2: 1 - 2 * pbinom(39, 100, 0.5)" },
};

static void
the_interval_has_the_published_ranks(void **state)
{
	(void)state;
	for (size_t i = 0; i < sizeof(intervals) / sizeof(*intervals); i++) {
		struct median_estimate got =
		    estimate_of_ranks(intervals[i].n, 0.95);

		assert_true(got.has_interval);
		assert_true(got.low == intervals[i].low);
		assert_true(got.high == intervals[i].high);
		/* The figures from R are printed to four digits. */
		assert_true(fabs(got.coverage - intervals[i].coverage) < 5e-5);
	}
}

/* Critical values r of the sign test, two-sided 5 %: the interval's rank is
 * r + 1.  Dixon and Mood, The statistical sign test, J. Am. Stat. Assoc. 41
 * (1946), table 1 (from memory); none for n < 6. */
static const int sign_test_two_sided_5[] = { -1, -1, -1, -1, -1, -1, 0, 0, 0,
	1, 1, 1, 2, 2, 2, 3, 3, 4, 4, 4, 5, 5, 5, 6, 6, 7 };

static void
the_interval_agrees_with_the_table_of_the_sign_test(void **state)
{
	(void)state;
	for (size_t n = 1; n <= 25; n++) {
		struct median_estimate got = estimate_of_ranks(n, 0.95);
		int critical = sign_test_two_sided_5[n];

		assert_int_equal(got.has_interval, critical >= 0);
		if (critical >= 0)
			assert_true(got.low == critical + 1);
	}
}

/* Largest k with sum of C(n, 0..k-1) * divisor <= 2^n, in whole numbers; n is
 * small enough for 64 bits.  An independent way to the same rank. */
static size_t
rank_by_counting(size_t n, uint64_t divisor)
{
	uint64_t choose = 1, sum = 0, all = UINT64_C(1) << n;

	for (size_t k = 0; k <= n; k++) {
		sum += choose;
		if (sum * divisor > all)
			return k;
		choose = choose * (n - k) / (k + 1);
	}
	return n;
}

static void
every_rank_agrees_with_counting_in_whole_numbers(void **state)
{
	(void)state;
	for (size_t n = 1; n <= 52; n++) {
		struct median_estimate got = estimate_of_ranks(n, 0.95);
		size_t interval = rank_by_counting(n, 40);	/* 2.5 % */
		size_t bound = rank_by_counting(n, 100);	/* 1 % */

		assert_int_equal(got.has_interval, interval > 0);
		if (interval > 0) {
			assert_true(got.low == (double)interval);
			assert_true(got.high == (double)(n + 1 - interval));
		}
		assert_int_equal(got.has_bounds, bound > 0);
		if (bound > 0) {
			assert_true(got.lower == (double)bound);
			assert_true(got.upper == (double)(n + 1 - bound));
			assert_true(got.bound_coverage >= 0.99);
		}
	}
}

static void
seven_values_are_the_fewest_that_bound_the_median_at_99_percent(void **state)
{
	struct median_estimate got;

	(void)state;
	/* 1 / 2^6 is 1.6 %, 1 / 2^7 is 0.78125 %. */
	got = estimate_of_ranks(6, 0.95);
	assert_false(got.has_bounds);
	got = estimate_of_ranks(7, 0.95);
	assert_true(got.has_bounds);
	assert_true(got.lower == 1);
	assert_true(got.upper == 7);
	assert_true(got.bound_coverage == 0.9921875);
	/* 11 values spare one: (1 + 11) / 2^11 is 0.59 %. */
	got = estimate_of_ranks(11, 0.95);
	assert_true(got.lower == 2);
	assert_true(got.upper == 10);
}

static void
a_level_met_exactly_counts_as_met(void **state)
{
	struct median_estimate got = estimate_of_ranks(5, 0.9375);

	(void)state;
	/* By hand: 1 - 2 / 2^5 = 0.9375. */
	assert_true(got.has_interval);
	assert_true(got.low == 1);
	assert_true(got.high == 5);
}

static void
the_median_is_the_middle_or_the_mean_of_the_middle_two(void **state)
{
	/* R 4.2.2: quantile(x, 0.5, type = 7) is 13.55. */
	static const double ten[] = { 41.0, 12.1, 12.4, 15.2, 12.4, 12.9, 13.3,
		14.6, 13.8, 19.7 };
	/* R 4.2.2: median(c(941.2, 938.7, ...)) is 940.3, and the interval at
	 * 0.9922 is all of it. */
	static const double eight[] = { 941.2, 938.7, 940.5, 939.9, 941.0,
		937.8, 940.1, 940.8 };
	struct median_estimate got;
	struct error err;

	(void)state;
	assert_int_equal(statistic_median(ten, 10, 0.95, 0.99, &got, &err), 0);
	assert_true(fabs(got.median - 13.55) < 1e-12);
	assert_true(got.min == 12.1 && got.max == 41.0);
	assert_int_equal(got.n, 10);
	assert_int_equal(statistic_median(eight, 8, 0.95, 0.99, &got, &err),
	    0);
	assert_true(fabs(got.median - 940.3) < 1e-9);
	assert_true(got.low == 937.8 && got.high == 941.2);
	assert_true(got.coverage == 0.9921875);
	assert_int_equal(statistic_median(ten, 1, 0.95, 0.99, &got, &err), 0);
	assert_true(got.median == 41.0);
	assert_false(got.has_interval || got.has_bounds);
}

static void
large_values_do_not_overflow_the_mean_of_two(void **state)
{
	static const double values[] = { 1.5e308, 1.5e308 };
	struct median_estimate got;
	struct error err;

	(void)state;
	assert_int_equal(statistic_median(values, 2, 0.95, 0.99, &got, &err),
	    0);
	assert_true(got.median == 1.5e308);
}

static void
what_is_not_a_number_is_refused_and_nothing_is_written(void **state)
{
	static const double bad[] = { 1.0, NAN, 2.0 };
	static const double endless[] = { INFINITY };
	struct median_estimate got = { .n = 77 };
	struct error err;

	(void)state;
	assert_int_equal(statistic_median(bad, 3, 0.95, 0.99, &got, &err), -1);
	assert_int_equal(err.kind, ERROR_INPUT);
	assert_string_equal(err.cause, "value 2 of 3 is not a number");
	assert_int_equal(statistic_median(endless, 1, 0.95, 0.99, &got, &err),
	    -1);
	assert_int_equal(statistic_median(bad, 0, 0.95, 0.99, &got, &err), -1);
	assert_int_equal(got.n, 77);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(the_interval_has_the_published_ranks),
		cmocka_unit_test(
		    the_interval_agrees_with_the_table_of_the_sign_test),
		cmocka_unit_test(
		    every_rank_agrees_with_counting_in_whole_numbers),
		cmocka_unit_test(
	    seven_values_are_the_fewest_that_bound_the_median_at_99_percent),
		cmocka_unit_test(a_level_met_exactly_counts_as_met),
		cmocka_unit_test(
		    the_median_is_the_middle_or_the_mean_of_the_middle_two),
		cmocka_unit_test(large_values_do_not_overflow_the_mean_of_two),
		cmocka_unit_test(
		    what_is_not_a_number_is_refused_and_nothing_is_written),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
