/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdlib.h>

#include "conduct/trial_run.h"

#define ROW_NS UINT64_C(100000000)
/* 1 bit/s is one eightieth of a byte in 100 ms: 125000 B are 10 Mbit/s. */
#define ROW_BYTES UINT64_C(125000)
#define ROW_BPS UINT64_C(10000000)

static struct series *
series_of(uint64_t rows)
{
	struct series *series = calloc(1, sizeof(*series));

	assert_non_null(series);
	for (uint64_t i = 0; i < rows; i++)
		series_add(series, ROW_NS, ROW_BYTES * (i % 4));
	return series;
}

static void
a_short_series_keeps_a_bucket_a_row(void **state)
{
	struct series *series = series_of(5);

	(void)state;
	assert_int_equal(series->rows, 5);
	assert_int_equal(series->rows_per_bucket, 1);
	assert_int_equal(series->buckets_count, 5);
	assert_int_equal(series->spacing_ns, ROW_NS);
	for (size_t i = 0; i < 5; i++) {
		assert_int_equal(series->buckets[i].min_bps, i % 4 * ROW_BPS);
		assert_int_equal(series->buckets[i].mean_bps, i % 4 * ROW_BPS);
		assert_int_equal(series->buckets[i].max_bps, i % 4 * ROW_BPS);
	}
	free(series);
}

static void
a_full_series_merges_neighbours_and_loses_nothing(void **state)
{
	struct series *series = series_of(SERIES_BUCKETS_MAX);
	const struct series_bucket *bucket = series->buckets;

	(void)state;
	assert_int_equal(series->buckets_count, SERIES_BUCKETS_MAX);
	series_add(series, ROW_NS, 7 * ROW_BYTES);
	assert_int_equal(series->buckets_count, SERIES_BUCKETS_MAX / 2 + 1);
	assert_int_equal(series->rows_per_bucket, 2);
	/* Rows 0 and 1, then 2 and 3 of the pattern. */
	assert_int_equal(bucket[0].min_bps, 0);
	assert_int_equal(bucket[0].mean_bps, ROW_BPS / 2);
	assert_int_equal(bucket[0].max_bps, ROW_BPS);
	assert_int_equal(bucket[1].mean_bps, 5 * ROW_BPS / 2);
	assert_int_equal(bucket[SERIES_BUCKETS_MAX / 2].mean_bps, 7 * ROW_BPS);
	/* The next row shares that bucket. */
	series_add(series, ROW_NS, ROW_BYTES);
	assert_int_equal(series->buckets_count, SERIES_BUCKETS_MAX / 2 + 1);
	assert_int_equal(bucket[SERIES_BUCKETS_MAX / 2].mean_bps, 4 * ROW_BPS);
	assert_int_equal(bucket[SERIES_BUCKETS_MAX / 2].min_bps, ROW_BPS);
	free(series);
}

static void
a_day_of_rows_fits_and_the_bytes_still_add_up(void **state)
{
	uint64_t rows = 864000, bytes = 0, ns = 0;
	struct series *series = series_of(rows);

	(void)state;
	assert_int_equal(series->rows, rows);
	assert_true(series->buckets_count <= SERIES_BUCKETS_MAX);
	assert_true(series->buckets_count > SERIES_BUCKETS_MAX / 2);
	/* 864000 / 600 = 1440 rows a bucket at least; 2048 is the power. */
	assert_int_equal(series->rows_per_bucket, 2048);
	for (size_t i = 0; i < series->buckets_count; i++) {
		bytes += series->buckets[i].bytes;
		ns += series->buckets[i].duration_ns;
		assert_true(series->buckets[i].min_bps <=
		    series->buckets[i].mean_bps);
		assert_true(series->buckets[i].mean_bps <=
		    series->buckets[i].max_bps);
	}
	/* Each four rows carry 0 + 1 + 2 + 3 units. */
	assert_int_equal(bytes, rows / 4 * 6 * ROW_BYTES);
	assert_int_equal(ns, rows * ROW_NS);
	free(series);
}

static void
only_a_finished_direction_of_a_sound_trial_counts(void **state)
{
	struct trial_run *run = calloc(1, sizeof(*run));
	struct direction_run *way;

	(void)state;
	assert_non_null(run);
	way = &run->directions[DIRECTION_B_TO_A];
	way->present = way->counted = way->receiver_reported = true;
	way->receiver.end = MEASUREMENT_COMPLETE;
	assert_true(trial_run_counts(run, DIRECTION_B_TO_A));
	assert_false(trial_run_counts(run, DIRECTION_A_TO_B));
	run->failed = true;
	assert_false(trial_run_counts(run, DIRECTION_B_TO_A));
	run->failed = false;
	way->receiver.end = MEASUREMENT_STOPPED;
	assert_false(trial_run_counts(run, DIRECTION_B_TO_A));
	way->receiver.end = MEASUREMENT_COMPLETE;
	way->counted = false;
	assert_false(trial_run_counts(run, DIRECTION_B_TO_A));
	free(run);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_short_series_keeps_a_bucket_a_row),
		cmocka_unit_test(
		    a_full_series_merges_neighbours_and_loses_nothing),
		cmocka_unit_test(a_day_of_rows_fits_and_the_bytes_still_add_up),
		cmocka_unit_test(
		    only_a_finished_direction_of_a_sound_trial_counts),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
