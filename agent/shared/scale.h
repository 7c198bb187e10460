/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * scale: the tables of prefixes and units, private to units.c and
 * units_format.c.  Nothing else names a symbol.
 *
 * A symbol is a prefix and a unit; what it stands for is the fraction
 * prefix.num * unit.num / (prefix.den * unit.den) of the dimension's unit.
 * Numbers are digits * 10^-decimals, so every text is an exact fraction.
 */
#ifndef PLAFOND_SCALE_H
#define PLAFOND_SCALE_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "units.h"

/* With the largest SI symbol, 1 PB/s = 8 * 10^15 bit/s, digits * 10^-19 is a
 * whole number only where the digits end in 0: 10^4 must divide 8 * digits. */
#define DECIMALS_MAX 18
#define SYMBOL_SIZE 16
#define SCALES_MAX 16

enum prefix_kind {
	PREFIX_NONE = 1,
	PREFIX_LARGE = 2,	/* SI, multiples */
	PREFIX_SMALL = 4,	/* SI, parts */
	PREFIX_BINARY = 8	/* IEC 80000-13 */
};

struct prefix {
	const char *symbol;
	uint64_t num, den;
	enum prefix_kind kind;
};

struct unit {
	enum dimension dimension;
	const char *symbol;
	uint64_t num, den;
	unsigned accepted;	/* prefixes on input */
	unsigned shown;		/* prefixes on output; 0: input only */
	unsigned exact;		/* as shown, for units_format_exact */
};

/* What messages call a dimension. */
struct dimension_words {
	const char *noun;
	const char *whole;	/* what an integer counts; NULL: double */
	const char *zero;
	const char *allowed;
	bool sign;		/* a level below its reference is negative */
};

struct scale {
	const struct prefix *prefix;
	const struct unit *unit;
};

extern const struct prefix scale_prefixes[];
extern const size_t scale_prefixes_count;
extern const struct unit scale_units[];
extern const size_t scale_units_count;
extern const struct dimension_words scale_words[DIMENSIONS];

/* Returns buf. */
const char *scale_symbol(struct scale scale, char buf[SYMBOL_SIZE]);

/* The scales that write a dimension, ascending within a kind of prefix.
 * Returns their number. */
size_t scale_collect(enum dimension dimension, bool exact,
    struct scale scales[SCALES_MAX]);

/* exponent: 19 at most */
uint64_t scale_power_of_ten(unsigned exponent);

#endif
