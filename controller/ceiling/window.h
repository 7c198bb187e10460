/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * window: what fits into a round trip, a ramp, a bucket.
 *
 * Octets and rates are of one and the same layer; integers, rounded down
 * unless said otherwise.  Pure.
 */
#ifndef PLAFOND_WINDOW_H
#define PLAFOND_WINDOW_H

#include <stdint.h>

#include "clock.h"

#define WINDOW_SHIFT_MOST 14		/* RFC 7323 s2.3 */
#define WINDOW_UNSCALED_BYTES UINT64_C(65535)	/* RFC 9293 s3.1 */
#define WINDOW_LARGEST_BYTES (WINDOW_UNSCALED_BYTES << WINDOW_SHIFT_MOST)

/* Octets in flight at a rate: the bandwidth-delay product. */
uint64_t window_product_bytes(uint64_t bps, uint64_t round_trip_ns);
/* The same rounded up: the least window that carries the rate. */
uint64_t window_needed_bytes(uint64_t bps, uint64_t round_trip_ns);
/* Streams of that window that make up what is needed, rounded up, at least 1:
 * RFC 6349 s5.1. */
uint64_t window_streams(uint64_t needed_bytes, uint64_t window_bytes);
/* Least shift of RFC 7323 for that window, at most WINDOW_SHIFT_MOST. */
unsigned window_shift(uint64_t window_bytes);

/* min(10 MSS, max(2 MSS, 14600)): RFC 6928 s2. */
uint64_t window_initial_bytes(uint64_t mss_bytes);

/* Slow start: the window doubles every round trip until it carries the rate.
 * RFC 5681 s3.1; acknowledgements that are counted and not weighed (RFC 3465)
 * make it slower. */
struct ramp {
	uint64_t rounds;
	uint64_t ns;		/* saturates */
};
void window_ramp(uint64_t bps, uint64_t round_trip_ns,
    uint64_t initial_bytes, struct ramp *out);
/* Mean of the first length_ns of a stream that begins with slow start and then
 * has bps; round_trip_ns, initial_bytes and length_ns > 0. */
uint64_t window_cold_mean_bps(uint64_t bps, uint64_t round_trip_ns,
    uint64_t initial_bytes, uint64_t length_ns);

/* Token bucket that is full at first and refilled at bps, emptied at peak_bps:
 * how long it lasts, 8 B / (P - R).  UINT64_MAX: for ever. */
uint64_t bucket_lasts_ns(uint64_t bucket_bytes, uint64_t bps,
    uint64_t peak_bps);
/* The mean over length_ns > 0: R + 8 B / T, but not above P. */
uint64_t bucket_mean_bps(uint64_t bucket_bytes, uint64_t bps,
    uint64_t peak_bps, uint64_t length_ns);

/* Time that so many octets take: RFC 6349 s4.1's ideal transfer time.
 * bps > 0; saturates. */
uint64_t transfer_ideal_ns(uint64_t bytes, uint64_t bps);

#endif
