/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "declare/fraction.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

/* A sequence that is the same in every run (Lehmer, Park and Miller 1988). */
static uint64_t
next_random(uint64_t *seed, uint64_t below)
{
	*seed = *seed * 48271 % 2147483647;
	return *seed % below;
}

/* Equal, and in lowest terms: no prime below 100 divides both. */
static void
assert_same(struct fraction found, uint128 num, uint128 den)
{
	assert_true(found.num * den == num * found.den);
	for (unsigned p = 2; p < 100; p++)
		assert_true(found.num % p != 0 || found.den % p != 0);
}

static void
apportion_gives_units_to_the_largest_rests(void **state)
{
	static const struct {
		uint64_t num[4], den, total, out[4];
	} vectors[] = {
		{ { 7, 8, 9, 4 }, 10, 2, { 0, 1, 1, 0 } },	/* sum 2.8 */
		{ { 19, 15, 6, 0 }, 10, 4, { 2, 1, 1, 0 } },	/* sum 4 */
		{ { 10, 10, 11, 0 }, 3, 10, { 3, 3, 4, 0 } },	/* sum 10.3 */
		{ { 5, 0, 0, 0 }, 10, 0, { 0, 0, 0, 0 } },	/* sum 0.5 */
		{ { 5, 5, 5, 5 }, 10, 2, { 1, 1, 0, 0 } },	/* equals */
	};
	struct mixed values[4];
	uint64_t out[4];
	size_t i, n;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		for (n = 0; n < 4; n++)
			values[n] = mixed_split(fraction_make(
			    vectors[i].num[n], vectors[i].den));
		apportion(values, 4, vectors[i].total, out);
		for (n = 0; n < 4; n++)
			assert_int_equal(out[n], vectors[i].out[n]);
	}
}

/* Worked out by hand: 2^64 + 1 = 274177 * 67280421310721 (Landry 1880), so
 * nothing cancels in the last two. */
static void
products_are_exact_beyond_128_bits(void **state)
{
	const uint128 landry = 67280421310721, one = 1;
	struct mixed m;

	(void)state;
	m = mixed_product(fraction_make(22, 7), fraction_make(15, 4));
	assert_int_equal(m.whole, 11);			/* 11 + 11/14 */
	assert_int_equal(fraction_compare(m.rest, fraction_make(11, 14)), 0);
	m = mixed_product(fraction_make((one << 100) + 1, landry << 40),
	    fraction_make((landry << 40) * 3, (one << 100) + 1));
	assert_int_equal(m.whole, 3);
	assert_int_equal(m.rest.num, 0);
	/* (2^70 + 1) / (2^60 - 1) * (2^66 + 1) / (2^63 - 1)
	 *   = 2^13 + (2^73 + 2^70 + 2^66 + 1 + 2^76 - 2^13) / (den)
	 * for 2^13 (2^60 - 1)(2^63 - 1) = 2^136 - 2^76 - 2^73 + 2^13. */
	m = mixed_product(fraction_make((one << 70) + 1, (one << 60) - 1),
	    fraction_make((one << 66) + 1, (one << 63) - 1));
	assert_int_equal(m.whole, 1 << 13);
	assert_int_equal(fraction_compare(m.rest, fraction_make(
	    (one << 76) + (one << 73) + (one << 70) + (one << 66) + 1 -
	    (one << 13), ((one << 60) - 1) * ((one << 63) - 1))), 0);
}

/* Against plain 128-bit integers over one denominator. */
static void
sums_and_products_agree_with_integers(void **state)
{
	uint64_t seed = 99991, a, b, c, d;
	struct fraction l, r;
	struct mixed m;

	(void)state;
	for (int i = 0; i < 20000; i++) {
		a = next_random(&seed, UINT64_C(1) << (1 + i % 31));
		b = 1 + next_random(&seed, UINT64_C(1) << (1 + i % 29));
		c = next_random(&seed, UINT64_C(1) << (1 + i % 27));
		d = i % 3 == 0 ? b : 1 + next_random(&seed, 1000);
		l = fraction_make(a, b);
		r = fraction_make(c, d);
		assert_same(fraction_add(l, r), (uint128)a * d +
		    (uint128)c * b, (uint128)b * d);
		assert_same(fraction_multiply(l, r), (uint128)a * c,
		    (uint128)b * d);
		if (a * d >= c * b)
			assert_same(fraction_subtract(l, r), (uint128)a * d -
			    (uint128)c * b, (uint128)b * d);
		if (c != 0)
			assert_same(fraction_divide(l, r), (uint128)a * d,
			    (uint128)b * c);
		m = mixed_product(l, r);
		assert_int_equal(m.whole, (uint64_t)((uint128)a * c /
		    ((uint128)b * d)));
		assert_same(fraction_make(m.rest.num, m.rest.den),
		    (uint128)a * c % ((uint128)b * d), (uint128)b * d);
		assert_int_equal(fraction_compare(l, r),
		    a * d < c * b ? -1 : a * d > c * b);
	}
}

static void
fractions_are_compared_without_overflow(void **state)
{
	uint128 large = ~(uint128)0;

	(void)state;
	assert_true(fraction_compare(fraction_make(large, 3),
	    fraction_make(large - 1, 3)) > 0);
	assert_true(fraction_compare(fraction_make(large - 1, large),
	    fraction_make(large - 2, large - 1)) > 0);
	assert_true(fraction_compare(fraction_make(1, 3),
	    fraction_make(1, 2)) < 0);
	assert_true(fraction_compare(fraction_make(2, 6),
	    fraction_make(1, 3)) == 0);
	assert_true(fraction_compare(fraction_make(0, 6),
	    fraction_make(1, large)) < 0);
	assert_int_equal(fraction_floor(fraction_make(large, 1)), UINT64_MAX);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(apportion_gives_units_to_the_largest_rests),
		cmocka_unit_test(products_are_exact_beyond_128_bits),
		cmocka_unit_test(sums_and_products_agree_with_integers),
		cmocka_unit_test(fractions_are_compared_without_overflow),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
