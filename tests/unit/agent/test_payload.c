/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "error.h"
#include "payload.h"

#define WORDS ((size_t)131072)	/* 1 MiB of 8-byte words */

static void
the_generator_gives_the_published_values(void **state)
{
	/* xoshiro256++ from state 1, 2, 3, 4: the reference vector that the
	 * Rust library rand_xoshiro prints from its authors' C program */
	static const uint64_t seed[4] = { 1, 2, 3, 4 };
	static const uint64_t words[] = {
		UINT64_C(41943041), UINT64_C(58720359),
		UINT64_C(3588806011781223), UINT64_C(3591011842654386),
		UINT64_C(9228616714210784205), UINT64_C(9973669472204895162),
		UINT64_C(14011001112246962877), UINT64_C(12406186145184390807),
		UINT64_C(15849039046786891736), UINT64_C(10450023813501588000),
	};
	unsigned char bytes[sizeof(words)];

	(void)state;
	payload_fill(bytes, sizeof(bytes), seed);
	for (size_t i = 0; i < sizeof(bytes); i++)
		assert_int_equal(bytes[i],
		    (words[i / 8] >> (8 * (i % 8))) & 0xff);
	/* a size that is no whole number of words is cut, not rounded */
	memset(bytes, 0xee, sizeof(bytes));
	payload_fill(bytes, 11, seed);
	assert_int_equal(bytes[8], words[1] & 0xff);
	assert_int_equal(bytes[11], 0xee);
}

static int
compare_words(const void *a, const void *b)
{
	uint64_t x, y;

	memcpy(&x, a, sizeof(x));
	memcpy(&y, b, sizeof(y));
	return (x > y) - (x < y);
}

static void
no_word_comes_twice_within_the_period(void **state)
{
	struct payload payload;
	struct error err;
	uint64_t *words = malloc(WORDS * sizeof(*words));

	(void)state;
	assert_non_null(words);
	assert_int_equal(payload_init(&payload, WORDS * 8, &err), 0);
	memcpy(words, payload.bytes, WORDS * 8);
	qsort(words, WORDS, sizeof(*words), compare_words);
	/* by chance once in 2^64 / 2^33 runs */
	for (size_t i = 1; i < WORDS; i++)
		assert_true(words[i] != words[i - 1]);
	free(words);
	payload_fini(&payload);
}

static void
all_bytes_are_as_frequent_as_chance_has_it(void **state)
{
	static const uint64_t seed[4] = { 5, 6, 7, 8 };
	unsigned char *bytes = malloc(WORDS * 8);
	uint64_t counts[256] = { 0 };
	double chi_square = 0;

	(void)state;
	assert_non_null(bytes);
	payload_fill(bytes, WORDS * 8, seed);
	for (size_t i = 0; i < WORDS * 8; i++)
		counts[bytes[i]]++;
	for (unsigned i = 0; i < 256; i++) {
		double off = (double)counts[i] - 4096;

		chi_square += off * off / 4096;
	}
	/* 255 degrees of freedom: mean 255, standard deviation 22.6; within
	 * five of them */
	assert_true(chi_square > 255 - 113 && chi_square < 255 + 113);
	free(bytes);
}

static void
another_transfer_sends_other_bytes(void **state)
{
	struct payload one, two;
	struct error err;

	(void)state;
	assert_int_equal(payload_init(&one, 4096, &err), 0);
	assert_int_equal(payload_init(&two, 4096, &err), 0);
	assert_memory_not_equal(one.bytes, two.bytes, 4096);
	assert_int_equal((uintptr_t)one.bytes % (size_t)getpagesize(), 0);
	payload_fini(&one);
	payload_fini(&two);
	payload_fini(&two);
}

static void
the_period_has_a_default_and_limits(void **state)
{
	struct payload payload;
	struct error err;

	(void)state;
	assert_int_equal(payload_init(&payload, 0, &err), 0);
	assert_int_equal(payload.period_bytes, 16777216);
	payload_fini(&payload);
	assert_int_equal(payload_init(&payload, 4095, &err), -1);
	assert_int_equal(err.kind, ERROR_INPUT);
	assert_int_equal(payload_init(&payload, UINT64_MAX, &err), -1);
	assert_int_equal(err.kind, ERROR_INPUT);
}

static void
the_end_of_the_period_shortens_a_call(void **state)
{
	unsigned char bytes[100];
	const struct payload payload = { .bytes = bytes, .period_bytes = 100 };
	static const struct {
		uint64_t position;
		size_t asked, offset, size;
	} rows[] = {
		{ 0, 40, 0, 40 }, { 60, 40, 60, 40 }, { 61, 40, 61, 39 },
		{ 99, 40, 99, 1 }, { 100, 40, 0, 40 }, { 250, 80, 50, 50 },
		{ UINT64_C(8640000000000000001), 40, 1, 40 },
		{ 0, 500, 0, 100 },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(*rows); i++) {
		size_t size = rows[i].asked;

		assert_ptr_equal(payload_at(&payload, rows[i].position, &size),
		    bytes + rows[i].offset);
		assert_int_equal(size, rows[i].size);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(the_generator_gives_the_published_values),
		cmocka_unit_test(no_word_comes_twice_within_the_period),
		cmocka_unit_test(all_bytes_are_as_frequent_as_chance_has_it),
		cmocka_unit_test(another_transfer_sends_other_bytes),
		cmocka_unit_test(the_period_has_a_default_and_limits),
		cmocka_unit_test(the_end_of_the_period_shortens_a_call),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
