/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * trial_run: what came back from one trial, both agents together.
 *
 * Filled by the pair, borrowed by judge and report.  Pure data, but for the
 * series, which series.c keeps bounded.
 */
#ifndef PLAFOND_TRIAL_RUN_H
#define PLAFOND_TRIAL_RUN_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "error.h"
#include "measurement.h"
#include "trial.h"

#define SERIES_BUCKETS_MAX 600

/* Rate of successive equal stretches of a trial, payload, at the receiver. */
struct series_bucket {
	uint64_t min_bps, mean_bps, max_bps;
	uint64_t bytes, duration_ns;	/* so that the mean stays exact */
};
struct series {
	uint64_t rows;			/* interval rows seen */
	uint64_t spacing_ns;		/* of the rows */
	uint64_t rows_per_bucket;	/* doubles when the buckets are full */
	struct series_bucket buckets[SERIES_BUCKETS_MAX];
	size_t buckets_count;
	char sha256[SHA256_HEX_SIZE];	/* of the rows as sent */
};

struct direction_run {
	bool present;			/* the trial has this direction */
	bool counted;			/* payload_bps is a result */
	struct measurement sender, receiver;
	bool sender_reported, receiver_reported;
	uint64_t bytes;			/* counted; in `both`, in the overlap */
	uint64_t duration_ns;		/* of what was counted */
	uint64_t payload_bps;
	uint64_t row_min_bps, row_max_bps;	/* of counted rows: spread */
	uint64_t round_trip_ns;		/* least of the streams, UNKNOWN_U64 */
	uint64_t interface_bytes;	/* kernel's counter at the sender's
					 * interface over the trial, or
					 * UNKNOWN_U64 */
	struct series series;
};

struct trial_run {
	struct trial trial;
	uint64_t started_utc_ns;
	struct direction_run directions[DIRECTIONS_SINGLE];
	bool failed;			/* why then says what happened */
	struct error why;
};

/* Add one counted or settling row; when all buckets are full neighbours are
 * merged, so any length of trial needs the same memory. */
void series_add(struct series *series, uint64_t row_ns, uint64_t bytes);

/* True where the result of this direction may be used: the trial did not fail
 * and the receiver's window closed. */
bool trial_run_counts(const struct trial_run *run, enum direction single);

#endif
