/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * ladder_checks: what holds for every ceiling.
 */
#ifndef PLAFOND_TEST_LADDER_CHECKS_H
#define PLAFOND_TEST_LADDER_CHECKS_H

#include <math.h>

#include "ceiling/ceiling.h"

/* What the steps print is what lies between the levels; nothing is lost, in
 * bit/s and in octets. */
static inline void
assert_columns_add_up(const struct ceiling *c)
{
	uint64_t bps = c->line_rate_bps;
	struct fraction octets = fraction_make(c->level_bytes_num[LEVEL_LINE],
	    c->level_bytes_den);
	size_t i;

	for (i = 0; i < c->steps_count; i++) {
		assert_true(bps >= c->steps[i].bps);
		bps -= c->steps[i].bps;
		octets = fraction_subtract(octets, fraction_make(
		    c->steps[i].bytes_num, c->steps[i].bytes_den));
		if (!c->steps[i].reaches_level)
			continue;
		assert_int_equal(bps, c->rate_bps[c->steps[i].level]);
		assert_int_equal(fraction_compare(octets, fraction_make(
		    c->level_bytes_num[c->steps[i].level],
		    c->level_bytes_den)), 0);
	}
	assert_int_equal(bps, c->rate_bps[LEVEL_PAYLOAD]);
	assert_int_equal(fraction_compare(octets, fraction_make(
	    c->level_bytes_num[LEVEL_PAYLOAD], c->level_bytes_den)), 0);
}

/* From the line to the payload, at the levels that are there. */
static inline void
assert_levels_descend(const struct ceiling *c)
{
	uint64_t above_bps = c->line_rate_bps;
	uint128 above_num = c->level_bytes_num[LEVEL_LINE];
	int level;

	for (level = 0; level < LEVELS; level++) {
		if (!c->has_level[level])
			continue;
		assert_true(c->rate_bps[level] <= above_bps);
		assert_true(c->level_bytes_num[level] <= above_num);
		above_bps = c->rate_bps[level];
		above_num = c->level_bytes_num[level];
	}
	assert_true(c->has_level[LEVEL_LINE] && c->has_level[LEVEL_PACKET] &&
	    c->has_level[LEVEL_SEGMENT] && c->has_level[LEVEL_PAYLOAD]);
	assert_int_equal(c->payload.whole, c->rate_bps[LEVEL_PAYLOAD]);
	assert_true(fraction_compare(c->payload.rest, fraction_whole(1)) < 0);
	assert_true(isfinite(c->binding_counted_ratio) &&
	    isfinite(c->segments_per_ack));
}

#endif
