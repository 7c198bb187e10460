/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * rate_unit: one unit for a column of rates, three digits after the point.
 *
 * Rounds down; the text forms of a ceiling share it.  Pure.
 */
#ifndef PLAFOND_RATE_UNIT_H
#define PLAFOND_RATE_UNIT_H

#include <stdint.h>

#define RATE_CELL_SIZE 32

struct rate_unit {
	uint64_t least_bps;	/* of the column's largest, from here on */
	uint64_t digit_bps;	/* the last digit */
	const char *symbol;	/* "Mbit/s" */
};

/* For a column whose largest and least interesting rates are these: a smaller
 * unit where the larger one would leave fewer than three digits of the least.
 * least_bps 0: it does not count. */
const struct rate_unit *rate_unit_for(uint64_t largest_bps,
    uint64_t least_bps);
/* "941.482"; returns buf. */
const char *rate_unit_text(const struct rate_unit *unit, uint64_t bps,
    char buf[RATE_CELL_SIZE]);
/* A whole number of last digits, 0 to 3 of them after the point, with a sign
 * before it; returns buf. */
const char *rate_digits(uint64_t value, unsigned digits, const char *sign,
    char buf[RATE_CELL_SIZE]);

#endif
