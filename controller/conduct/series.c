/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "conduct/trial_run.h"

#include <assert.h>

#include "units.h"

/* Neighbours become one bucket each: half as many, twice as long. */
static void
merge_neighbours(struct series *series)
{
	size_t half = SERIES_BUCKETS_MAX / 2;

	for (size_t i = 0; i < half; i++) {
		const struct series_bucket *left = &series->buckets[2 * i];
		const struct series_bucket *right = left + 1;
		struct series_bucket both = *left;

		both.bytes += right->bytes;
		both.duration_ns += right->duration_ns;
		if (right->min_bps < both.min_bps)
			both.min_bps = right->min_bps;
		if (right->max_bps > both.max_bps)
			both.max_bps = right->max_bps;
		both.mean_bps = rate_bps(both.bytes, both.duration_ns);
		series->buckets[i] = both;
	}
	series->buckets_count = half;
	series->rows_per_bucket *= 2;
}

/* The bucket that the next row belongs to, begun where it is a new one. */
static struct series_bucket *
next_bucket(struct series *series)
{
	if (series->rows_per_bucket == 0)
		series->rows_per_bucket = 1;
	if (series->rows % series->rows_per_bucket != 0)
		return &series->buckets[series->buckets_count - 1];
	if (series->buckets_count == SERIES_BUCKETS_MAX)
		merge_neighbours(series);
	/* After a merge the last bucket is full too: rows is a multiple of
	 * the doubled length, for SERIES_BUCKETS_MAX is even. */
	series->buckets[series->buckets_count] = (struct series_bucket){
		.min_bps = UINT64_MAX };
	return &series->buckets[series->buckets_count++];
}

void
series_add(struct series *series, uint64_t row_ns, uint64_t bytes)
{
	struct series_bucket *bucket;
	uint64_t row_bps;

	assert(row_ns > 0);
	if (series->rows == 0)
		series->spacing_ns = row_ns;
	bucket = next_bucket(series);
	row_bps = rate_bps(bytes, row_ns);
	bucket->bytes += bytes;
	bucket->duration_ns += row_ns;
	bucket->mean_bps = rate_bps(bucket->bytes, bucket->duration_ns);
	if (row_bps < bucket->min_bps)
		bucket->min_bps = row_bps;
	if (row_bps > bucket->max_bps)
		bucket->max_bps = row_bps;
	series->rows++;
}

bool
trial_run_counts(const struct trial_run *run, enum direction single)
{
	const struct direction_run *way = &run->directions[single];

	return !run->failed && way->present && way->counted &&
	    way->receiver_reported &&
	    way->receiver.end == MEASUREMENT_COMPLETE;
}
