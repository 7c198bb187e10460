/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "declare/fraction.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

static void
apportion_gives_units_to_the_largest_remainders(void **state)
{
	static const struct {
		uint128 num[4], den;
		uint64_t out[4];
	} vectors[] = {
		{ { 7, 8, 9, 4 }, 10, { 0, 1, 1, 0 } },		/* sum 2.8 */
		{ { 19, 15, 6, 0 }, 10, { 2, 1, 1, 0 } },	/* sum 4 */
		{ { 10, 10, 11, 0 }, 3, { 3, 3, 4, 0 } },	/* sum 10.3 */
		{ { 5, 0, 0, 0 }, 10, { 0, 0, 0, 0 } },		/* sum 0.5 */
	};
	uint64_t out[4];
	size_t i, n;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		apportion(vectors[i].num, 4, vectors[i].den, out);
		for (n = 0; n < 4; n++)
			assert_int_equal(out[n], vectors[i].out[n]);
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
		cmocka_unit_test(
		    apportion_gives_units_to_the_largest_remainders),
		cmocka_unit_test(fractions_are_compared_without_overflow),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
