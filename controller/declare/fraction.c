/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/fraction.h"

#include <assert.h>
#include <stdbool.h>

/* Euclid; a division of 64 bits costs a small part of one of 128. */
static uint64_t
common_divisor_64(uint64_t a, uint64_t b)
{
	uint64_t rest;

	while (b != 0) {
		rest = a % b;
		a = b;
		b = rest;
	}
	return a;
}

static uint128
common_divisor(uint128 a, uint128 b)
{
	uint128 rest;

	if (a == 1 || b == 1)
		return 1;
	while (a > UINT64_MAX || b > UINT64_MAX) {
		if (b == 0)
			return a;
		rest = a % b;
		a = b;
		b = rest;
	}
	return common_divisor_64((uint64_t)a, (uint64_t)b);
}

/* a / b; most numbers here fit into 64 bits. */
static uint128
divide(uint128 a, uint128 b)
{
	if (b == 1)
		return a;
	if (a <= UINT64_MAX && b <= UINT64_MAX)
		return (uint64_t)a / (uint64_t)b;
	return a / b;
}

static uint128
multiply(uint128 a, uint128 b)
{
	uint128 product;
	bool overflow = __builtin_mul_overflow(a, b, &product);

	assert(!overflow);
	(void)overflow;
	return product;
}

static uint128
add(uint128 a, uint128 b)
{
	assert(a + b >= a);
	return a + b;
}

struct fraction
fraction_make(uint128 num, uint128 den)
{
	uint128 common;

	assert(den > 0);
	if (den == 1)
		return (struct fraction){ num, 1 };
	common = common_divisor(num, den);
	return (struct fraction){ divide(num, common), divide(den, common) };
}

/* Gives both the least common denominator, so that sums stay small. */
static uint128
align(struct fraction *left, struct fraction *right)
{
	uint128 common, den;

	if (left->den == right->den)
		return left->den;
	common = common_divisor(left->den, right->den);
	den = multiply(left->den, divide(right->den, common));
	left->num = multiply(left->num, divide(right->den, common));
	right->num = multiply(right->num, divide(left->den, common));
	return den;
}

struct fraction
fraction_add(struct fraction left, struct fraction right)
{
	uint128 den;

	if (left.den == 1 && right.den == 1)
		return (struct fraction){ add(left.num, right.num), 1 };
	den = align(&left, &right);
	return fraction_make(add(left.num, right.num), den);
}

struct fraction
fraction_subtract(struct fraction left, struct fraction right)
{
	uint128 den = align(&left, &right);

	assert(left.num >= right.num);
	return fraction_make(left.num - right.num, den);
}

/* Crosswise common factors go first: what is multiplied then has none left,
 * and products stay small. */
struct fraction
fraction_multiply(struct fraction left, struct fraction right)
{
	struct fraction l, r;

	if (left.den == 1 && right.den == 1)
		return (struct fraction){ multiply(left.num, right.num), 1 };
	l = fraction_make(left.num, right.den);
	r = fraction_make(right.num, left.den);
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

/* Whole parts, then the reciprocals of the rests (Euclid). */
static int
compare_long(struct fraction left, struct fraction right)
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

int
fraction_compare(struct fraction left, struct fraction right)
{
	uint128 l = left.num, r = right.num;

	if (left.den != right.den && (
	    __builtin_mul_overflow(left.num, right.den, &l) ||
	    __builtin_mul_overflow(right.num, left.den, &r)))
		return compare_long(left, right);
	return l < r ? -1 : l > r;
}

uint64_t
fraction_floor(struct fraction value)
{
	uint128 whole = divide(value.num, value.den);

	return whole > UINT64_MAX ? UINT64_MAX : (uint64_t)whole;
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
		den = multiply(den / common_divisor(den,
		    values[i].den), values[i].den);
	}
	return den;
}

double
fraction_double(struct fraction value)
{
	return (double)value.num / (double)value.den;
}

/* num / den with its whole part taken out, which may still be long. */
struct parts {
	uint128 whole, num, den;
};

static struct parts
take_whole(uint128 num, uint128 den)
{
	uint128 whole = divide(num, den);

	return (struct parts){ whole, num - whole * den, den };
}

static struct mixed
mixed_of(uint128 whole, uint128 num, uint128 den)
{
	assert(whole <= UINT64_MAX && num < den);
	return (struct mixed){ (uint64_t)whole, { num, den } };
}

struct mixed
mixed_split(struct fraction value)
{
	struct parts p = take_whole(value.num, value.den);

	return mixed_of(p.whole, p.num, p.den);
}

/* (v + p/q) (w + r/s) = vw + vr/s + wp/q + pr/(qs), where p < q and r < s. */
static struct mixed
product_long(struct parts vp, struct parts wr)
{
	struct parts vr = take_whole(multiply(vp.whole, wr.num), wr.den);
	struct parts wp = take_whole(multiply(wr.whole, vp.num), vp.den);
	struct parts rest = take_whole(add(add(multiply(vr.num, vp.den),
	    multiply(wp.num, wr.den)), multiply(vp.num, wr.num)),
	    multiply(vp.den, wr.den));

	return mixed_of(add(add(multiply(vp.whole, wr.whole), vr.whole),
	    add(wp.whole, rest.whole)), rest.num, rest.den);
}

/* Small denominators stay as they are: reducing takes longer than the product.
 * Large ones, as in fraction_multiply, first lose what is common. */
struct mixed
mixed_product(struct fraction left, struct fraction right)
{
	struct fraction l, r;
	uint128 num;

	if (left.den <= UINT32_MAX && right.den <= UINT32_MAX &&
	    !__builtin_mul_overflow(left.num, right.num, &num))
		return mixed_split((struct fraction){ num,
			left.den * right.den });
	l = fraction_make(left.num, right.den);
	r = fraction_make(right.num, left.den);
	return product_long(take_whole(l.num, r.den),
	    take_whole(r.num, l.den));
}

int
mixed_compare(struct mixed left, struct mixed right)
{
	if (left.whole != right.whole)
		return left.whole < right.whole ? -1 : 1;
	return fraction_compare(left.rest, right.rest);
}

void
apportion(const struct mixed values[], size_t count, uint64_t total,
    uint64_t out[])
{
	size_t i, best;

	for (i = 0; i < count; i++) {
		assert(values[i].whole <= total);
		out[i] = values[i].whole;
		total -= values[i].whole;
	}
	/* Whoever has got a unit is known by its output lying above. */
	for (; total > 0; total--) {
		best = count;
		for (i = 0; i < count; i++)
			if (out[i] == values[i].whole && (best == count ||
			    fraction_compare(values[i].rest,
			    values[best].rest) > 0))
				best = i;
		assert(best < count);
		out[best]++;
	}
}
