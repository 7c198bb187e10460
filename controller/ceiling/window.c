/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/window.h"

#include "units.h"

/* RFC 6928 s2 */
#define INITIAL_SEGMENTS 10
#define INITIAL_SEGMENTS_LEAST 2
#define INITIAL_BYTES 14600

uint64_t
window_product_bytes(uint64_t bps, uint64_t round_trip_ns)
{
	return scale_u64(bps, round_trip_ns, 8 * NS_PER_S);
}

uint64_t
window_needed_bytes(uint64_t bps, uint64_t round_trip_ns)
{
	uint128 bits_ns = (uint128)bps * round_trip_ns;
	uint128 bytes = (bits_ns + 8 * NS_PER_S - 1) / (8 * NS_PER_S);

	return bytes > UINT64_MAX ? UINT64_MAX : (uint64_t)bytes;
}

uint64_t
window_streams(uint64_t needed_bytes, uint64_t window_bytes)
{
	if (needed_bytes <= window_bytes)
		return 1;
	return needed_bytes / window_bytes +
	    (needed_bytes % window_bytes != 0);
}

unsigned
window_shift(uint64_t window_bytes)
{
	unsigned shift = 0;

	while (shift < WINDOW_SHIFT_MOST &&
	    WINDOW_UNSCALED_BYTES << shift < window_bytes)
		shift++;
	return shift;
}

uint64_t
window_initial_bytes(uint64_t mss_bytes)
{
	uint64_t most = INITIAL_SEGMENTS * mss_bytes;
	uint64_t least = INITIAL_SEGMENTS_LEAST * mss_bytes;

	if (least < INITIAL_BYTES)
		least = INITIAL_BYTES;
	return most < least ? most : least;
}

void
window_ramp(uint64_t bps, uint64_t round_trip_ns, uint64_t initial_bytes,
    struct ramp *out)
{
	uint64_t full_bytes = window_needed_bytes(bps, round_trip_ns);
	uint64_t window_bytes = initial_bytes;

	out->rounds = 0;
	while (window_bytes < full_bytes) {
		out->rounds++;
		if (window_bytes > full_bytes / 2)
			break;
		window_bytes *= 2;
	}
	out->ns = scale_u64(out->rounds, round_trip_ns, 1);
}

uint64_t
window_cold_mean_bps(uint64_t bps, uint64_t round_trip_ns,
    uint64_t initial_bytes, uint64_t length_ns)
{
	struct ramp ramp;
	uint64_t rounds, window_bytes = initial_bytes, rest_bytes;
	uint64_t sent_bytes = 0, mean_bps;

	window_ramp(bps, round_trip_ns, initial_bytes, &ramp);
	rounds = length_ns / round_trip_ns;
	if (rounds > ramp.rounds)
		rounds = ramp.rounds;
	for (uint64_t i = 0; i < rounds; i++) {
		sent_bytes += window_bytes;
		window_bytes *= 2;
	}
	/* The last round may be cut off before its window is sent. */
	rest_bytes = window_product_bytes(bps,
	    length_ns - rounds * round_trip_ns);
	if (rounds < ramp.rounds && rest_bytes > window_bytes)
		rest_bytes = window_bytes;
	mean_bps = rate_bps(sent_bytes + rest_bytes, length_ns);
	return mean_bps < bps ? mean_bps : bps;
}

uint64_t
bucket_lasts_ns(uint64_t bucket_bytes, uint64_t bps, uint64_t peak_bps)
{
	if (peak_bps <= bps)
		return UINT64_MAX;
	return scale_u64(bucket_bytes, 8 * NS_PER_S, peak_bps - bps);
}

uint64_t
bucket_mean_bps(uint64_t bucket_bytes, uint64_t bps, uint64_t peak_bps,
    uint64_t length_ns)
{
	uint64_t more_bps = rate_bps(bucket_bytes, length_ns);

	if (peak_bps <= bps)
		return bps;
	return more_bps < peak_bps - bps ? bps + more_bps : peak_bps;
}

uint64_t
transfer_ideal_ns(uint64_t bytes, uint64_t bps)
{
	return scale_u64(bytes, 8 * NS_PER_S, bps);
}
