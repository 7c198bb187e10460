/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/fraction.h"

#include <assert.h>

static uint128
greatest_common_divisor(uint128 a, uint128 b)
{
	uint128 rest;

	while (b != 0) {
		rest = a % b;
		a = b;
		b = rest;
	}
	return a;
}

static uint128
multiply(uint128 a, uint128 b)
{
	assert(a == 0 || b <= ~(uint128)0 / a);
	return a * b;
}

struct fraction
fraction_make(uint128 num, uint128 den)
{
	uint128 common;

	assert(den > 0);
	common = greatest_common_divisor(num, den);
	return (struct fraction){ num / common, den / common };
}

struct fraction
fraction_whole(uint64_t value)
{
	return (struct fraction){ value, 1 };
}

/* Over the least common denominator, so that sums stay small. */
struct fraction
fraction_add(struct fraction left, struct fraction right)
{
	uint128 common = greatest_common_divisor(left.den, right.den);
	uint128 l = multiply(left.num, right.den / common);
	uint128 r = multiply(right.num, left.den / common);

	assert(l + r >= l);
	return fraction_make(l + r, multiply(left.den, right.den / common));
}

struct fraction
fraction_subtract(struct fraction left, struct fraction right)
{
	uint128 common = greatest_common_divisor(left.den, right.den);
	uint128 l = multiply(left.num, right.den / common);
	uint128 r = multiply(right.num, left.den / common);

	assert(l >= r);
	return fraction_make(l - r, multiply(left.den, right.den / common));
}

/* Crosswise common factors go first, so that products stay small. */
struct fraction
fraction_multiply(struct fraction left, struct fraction right)
{
	struct fraction l = fraction_make(left.num, right.den);
	struct fraction r = fraction_make(right.num, left.den);

	return (struct fraction){ multiply(l.num, r.num),
		multiply(l.den, r.den) };
}

struct fraction
fraction_divide(struct fraction left, struct fraction right)
{
	assert(right.num > 0);
	return fraction_multiply(left,
	    (struct fraction){ right.den, right.num });
}

/* Compares whole parts, then the reciprocals of the rests (Euclid). */
int
fraction_compare(struct fraction left, struct fraction right)
{
	int sign = 1;
	uint128 l, r, rest;

	for (;;) {
		l = left.num / left.den;
		r = right.num / right.den;
		if (l != r)
			return l < r ? -sign : sign;
		left.num %= left.den;
		right.num %= right.den;
		if (left.num == 0 || right.num == 0)
			break;
		rest = left.num;
		left.num = left.den;
		left.den = rest;
		rest = right.num;
		right.num = right.den;
		right.den = rest;
		sign = -sign;
	}
	if (left.num == right.num)
		return 0;
	return left.num == 0 ? -sign : sign;
}

uint64_t
fraction_floor(struct fraction value)
{
	uint128 whole = value.num / value.den;

	return whole > UINT64_MAX ? UINT64_MAX : (uint64_t)whole;
}

struct fraction
fraction_rest(struct fraction value)
{
	return fraction_make(value.num % value.den, value.den);
}

struct fraction
fraction_roundup(struct fraction value, uint64_t align)
{
	uint128 step, count;

	assert(value.den > 0);
	if (align <= 1)
		return value;
	step = multiply(value.den, align);
	count = value.num / step + (value.num % step != 0);
	return fraction_make(multiply(count, align), 1);
}

uint128
fractions_denominator(const struct fraction values[], size_t count)
{
	uint128 den = 1;
	size_t i;

	for (i = 0; i < count; i++) {
		assert(values[i].den > 0);
		den = multiply(den / greatest_common_divisor(den,
		    values[i].den), values[i].den);
	}
	return den;
}

double
fraction_double(struct fraction value)
{
	return (double)value.num / (double)value.den;
}

void
apportion(const uint128 num[], size_t count, uint128 den, uint64_t out[])
{
	uint128 sum_rest = 0, best_rest;
	uint64_t missing;
	size_t i, best;

	assert(den > 0);
	for (i = 0; i < count; i++) {
		out[i] = (uint64_t)(num[i] / den);
		sum_rest += num[i] % den;
	}
	/* A unit goes to each of the largest remainders; whoever has one is
	 * known by its output lying above the quotient. */
	for (missing = (uint64_t)(sum_rest / den); missing > 0; missing--) {
		best = count;
		best_rest = 0;
		for (i = 0; i < count; i++) {
			if (out[i] == (uint64_t)(num[i] / den) &&
			    (best == count || num[i] % den > best_rest)) {
				best = i;
				best_rest = num[i] % den;
			}
		}
		assert(best < count);
		out[best]++;
	}
}

void
fractions_apportion(const struct fraction values[], size_t count,
    uint64_t out[])
{
	uint128 num[FRACTIONS_MAX], den = fractions_denominator(values, count);
	size_t i;

	assert(count <= FRACTIONS_MAX);
	for (i = 0; i < count; i++)
		num[i] = multiply(values[i].num, den / values[i].den);
	apportion(num, count, den, out);
}
