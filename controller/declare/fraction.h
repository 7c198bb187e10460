/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * fraction: exact quotients of 128-bit integers, always in lowest terms.
 *
 * Rates and octets are carried through the ceiling as fractions and rounded
 * once, at the edge.  What does not fit into 128 bits is our own bug and an
 * assertion.  Bits above and below the bar that the limits of a declaration
 * leave at the worst:
 *
 *   octets that a packet hands to a line   66 / 28   length 18; 20 of packets
 *      in thousandths that acknowledgements answer, 20 of segments that one
 *      answers; a coding such as 65/64, 8
 *   the same as octets of the line itself 107 / 69   times line / offered, 41
 *   octets of payload in TLS records       30 / 15
 *   bit/s of an octet of the packet       115 / 107  a contract's 46 / octets
 *
 * A rate at a level is a product of the last and another one: only as a struct
 * mixed has it room.  Pure.
 */
#ifndef PLAFOND_FRACTION_H
#define PLAFOND_FRACTION_H

#include <stddef.h>
#include <stdint.h>

#include "units.h"

struct fraction {
	uint128 num, den;	/* den > 0 */
};

static inline struct fraction
fraction_whole(uint64_t value)
{
	return (struct fraction){ value, 1 };
}

struct fraction fraction_make(uint128 num, uint128 den);
struct fraction fraction_add(struct fraction left, struct fraction right);
/* left - right; left is the larger one. */
struct fraction fraction_subtract(struct fraction left, struct fraction right);
struct fraction fraction_multiply(struct fraction left, struct fraction right);
struct fraction fraction_divide(struct fraction left, struct fraction right);
/* Below 0, 0, above 0; never overflows. */
int fraction_compare(struct fraction left, struct fraction right);
/* Whole part; saturates at UINT64_MAX. */
uint64_t fraction_floor(struct fraction value);
/* Least multiple of align that is not below the value; align 0 or 1 leaves the
 * value as it is. */
struct fraction fraction_roundup(struct fraction value, uint64_t align);
/* Least common denominator of the values. */
uint128 fractions_denominator(const struct fraction values[], size_t count);
double fraction_double(struct fraction value);

/* A value as its whole part and the rest below 1, in any terms: it has room
 * for products that a fraction has not. */
struct mixed {
	uint64_t whole;
	struct fraction rest;
};

struct mixed mixed_split(struct fraction value);
struct mixed mixed_product(struct fraction left, struct fraction right);
/* Below 0, 0, above 0; never overflows. */
int mixed_compare(struct mixed left, struct mixed right);

/* Integers near the values that add up to total, which lies between the sum of
 * their whole parts and that of these plus 1: the largest rests get the
 * missing units, the first of equals before the next. */
void apportion(const struct mixed values[], size_t count, uint64_t total,
    uint64_t out[]);

#endif
