/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * fraction: exact quotients of 128-bit integers, always in lowest terms.
 *
 * Rates and octets are carried through the ceiling as fractions and rounded
 * once, at the edge.  What does not fit into 128 bits is our own bug: the
 * limits of the declaration keep a product of a rate (41 bits) and two
 * lengths below it.  Pure.
 */
#ifndef PLAFOND_FRACTION_H
#define PLAFOND_FRACTION_H

#include <stddef.h>
#include <stdint.h>

#include "units.h"

struct fraction {
	uint128 num, den;	/* den > 0 */
};

struct fraction fraction_make(uint128 num, uint128 den);
struct fraction fraction_whole(uint64_t value);
struct fraction fraction_add(struct fraction left, struct fraction right);
/* left - right; left is the larger one. */
struct fraction fraction_subtract(struct fraction left, struct fraction right);
struct fraction fraction_multiply(struct fraction left, struct fraction right);
struct fraction fraction_divide(struct fraction left, struct fraction right);
/* Below 0, 0, above 0; never overflows. */
int fraction_compare(struct fraction left, struct fraction right);
/* Whole part; saturates at UINT64_MAX. */
uint64_t fraction_floor(struct fraction value);
/* value - floor(value) */
struct fraction fraction_rest(struct fraction value);
/* Least multiple of align that is not below the value; align 0 or 1 leaves the
 * value as it is. */
struct fraction fraction_roundup(struct fraction value, uint64_t align);
/* Least common denominator of the values. */
uint128 fractions_denominator(const struct fraction values[], size_t count);
double fraction_double(struct fraction value);

/* Integers near num[i]/den that add up to floor(sum(num)/den): the largest
 * remainders get the missing units. */
void apportion(const uint128 num[], size_t count, uint128 den, uint64_t out[]);
/* The same for fractions, at most FRACTIONS_MAX of them. */
#define FRACTIONS_MAX 128
void fractions_apportion(const struct fraction values[], size_t count,
    uint64_t out[]);

#endif
