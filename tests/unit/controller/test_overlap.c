/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdbool.h>
#include <string.h>

#include "conduct/overlap.h"
#include "seeded.h"
#include "units.h"

#define MS UINT64_C(1000000)

static struct overlap overlap;

static int
reset(void **state)
{
	(void)state;
	memset(&overlap, 0, sizeof(overlap));
	return 0;
}

static void
add(uint64_t end_ns, uint64_t bytes)
{
	assert_int_equal(overlap_add(&overlap, end_ns, bytes), 0);
}

/* UINT64_MAX: not to be had. */
static uint64_t
between(uint64_t from_ns, uint64_t to_ns)
{
	uint64_t bytes = 77;

	if (overlap_bytes(&overlap, from_ns, to_ns, &bytes) == 0)
		return bytes;
	assert_int_equal(bytes, 77);
	return UINT64_MAX;
}

static void
from_edge_to_edge_it_is_exact(void **state)
{
	(void)state;
	add(100, 7);
	add(200, 11);
	add(300, 13);
	assert_int_equal(between(0, 100), 7);
	assert_int_equal(between(100, 200), 11);
	assert_int_equal(between(200, 300), 13);
	assert_int_equal(between(0, 300), 31);
	assert_int_equal(between(100, 300), 24);
	for (uint64_t edge = 0; edge <= 300; edge += 100)
		assert_int_equal(between(edge, edge), 0);
	assert_int_equal(overlap.bytes, 31);
	assert_int_equal(overlap_end_ns(&overlap), 300);
}

static void
between_edges_it_is_linear(void **state)
{
	(void)state;
	add(100, 1000);
	add(200, 0);
	add(400, 500);
	assert_int_equal(between(0, 50), 500);
	assert_int_equal(between(25, 75), 500);
	assert_int_equal(between(0, 1), 10);
	assert_int_equal(between(99, 100), 10);
	assert_int_equal(between(100, 150), 0);
	assert_int_equal(between(200, 300), 250);
	assert_int_equal(between(50, 300), 750);
	/* rounded down at each instant, so that neighbours add up */
	assert_int_equal(between(200, 201), 2);
	assert_int_equal(between(201, 202), 3);
	assert_int_equal(between(200, 202), 5);
}

static void
beyond_the_rows_there_is_nothing(void **state)
{
	(void)state;
	assert_int_equal(between(0, 0), UINT64_MAX);
	assert_int_equal(overlap_end_ns(&overlap), 0);
	add(100, 1000);
	assert_int_equal(between(0, 101), UINT64_MAX);
	assert_int_equal(between(101, 102), UINT64_MAX);
	assert_int_equal(between(0, UINT64_MAX), UINT64_MAX);
	assert_int_equal(between(0, 100), 1000);
}

/* What an agent says may be anything. */
static void
a_row_that_does_not_follow_is_not_taken(void **state)
{
	(void)state;
	assert_int_equal(overlap_add(&overlap, 0, 5), -1);
	add(100, 1000);
	assert_int_equal(overlap_add(&overlap, 100, 5), -1);
	assert_int_equal(overlap_add(&overlap, 99, 5), -1);
	assert_int_equal(overlap_add(&overlap, 0, 5), -1);
	assert_int_equal(overlap.rows, 1);
	assert_int_equal(overlap.bytes, 1000);
	add(UINT64_MAX, 5);
	assert_int_equal(overlap_add(&overlap, UINT64_MAX, 5), -1);
	assert_int_equal(between(100, UINT64_MAX), 5);
}

/* Of ten minutes of 10 ms rows the middle is one number. */
static void
a_long_series_knows_its_two_ends_and_its_sum(void **state)
{
	uint64_t rows = 60000, kept = OVERLAP_KEPT, row_ns = 10 * MS;
	uint64_t end_ns = rows * row_ns, head_ns = kept * row_ns;
	uint64_t tail_ns = end_ns - (kept - 1) * row_ns;

	(void)state;
	for (uint64_t i = 0; i < rows; i++)
		add((i + 1) * row_ns, 1000 + i);
	assert_int_equal(overlap.rows, rows);
	assert_int_equal(between(0, end_ns),
	    1000 * rows + rows * (rows - 1) / 2);
	assert_int_equal(between(0, row_ns), 1000);
	assert_int_equal(between(5 * row_ns, 6 * row_ns), 1005);
	assert_int_equal(between(head_ns - row_ns, head_ns),
	    1000 + kept - 1);
	assert_int_equal(between(end_ns - row_ns, end_ns), 1000 + rows - 1);
	assert_int_equal(between(tail_ns, tail_ns + row_ns),
	    1000 + rows - kept + 1);
	/* a window that begins and ends near the ends */
	assert_int_equal(between(100 * row_ns, (rows - 100) * row_ns),
	    1000 * (rows - 200) + (100 + rows - 101) * (rows - 200) / 2);
	/* an instant within the middle */
	assert_int_equal(between(head_ns + 1, end_ns), UINT64_MAX);
	assert_int_equal(between(0, end_ns / 2), UINT64_MAX);
	assert_int_equal(between(0, tail_ns - row_ns - 1), UINT64_MAX);
	assert_int_equal(between(end_ns / 2, end_ns / 2), UINT64_MAX);
	assert_int_equal(between(0, end_ns + 1), UINT64_MAX);
}

#define MODEL_ROWS (2 * OVERLAP_KEPT + 3)

static uint64_t model_end[MODEL_ROWS + 1], model_sum[MODEL_ROWS + 1];

/* Octets up to an instant, by looking at every row. */
static uint64_t
model_at(size_t rows, uint64_t at_ns)
{
	for (size_t i = 1; i <= rows; i++)
		if (at_ns <= model_end[i])
			return model_sum[i - 1] + (uint64_t)(
			    (uint128)(model_sum[i] - model_sum[i - 1]) *
			    (at_ns - model_end[i - 1]) /
			    (model_end[i] - model_end[i - 1]));
	return UINT64_MAX;
}

static bool
model_keeps(size_t rows, uint64_t at_ns)
{
	return rows <= 2 * OVERLAP_KEPT || at_ns <= model_end[OVERLAP_KEPT] ||
	    at_ns >= model_end[rows - OVERLAP_KEPT + 1];
}

static void
random_rows_agree_with_a_model_that_keeps_all(void **state)
{
	static const size_t counts[] = { 1, 2, 50, OVERLAP_KEPT - 1,
		OVERLAP_KEPT, OVERLAP_KEPT + 1, 2 * OVERLAP_KEPT - 1,
		2 * OVERLAP_KEPT, 2 * OVERLAP_KEPT + 1, MODEL_ROWS };
	uint64_t seed = 4;

	(void)state;
	for (size_t c = 0; c < sizeof(counts) / sizeof(counts[0]); c++) {
		size_t rows = counts[c];

		reset(NULL);
		for (size_t i = 1; i <= rows; i++) {
			uint64_t bytes = seeded_between(&seed, 0, 1 << 30);

			model_end[i] = model_end[i - 1] +
			    seeded_between(&seed, 1, 20 * MS);
			model_sum[i] = model_sum[i - 1] + bytes;
			add(model_end[i], bytes);
		}
		for (int k = 0; k < 100; k++) {
			uint64_t a_ns = seeded_between(&seed, 0,
			    model_end[rows] + 2);
			uint64_t b_ns = k % 2 == 0 ? model_end[
			    seeded_between(&seed, 0, rows)] :
			    seeded_between(&seed, 0, model_end[rows] + 2);
			uint64_t from_ns = a_ns < b_ns ? a_ns : b_ns;
			uint64_t to_ns = a_ns < b_ns ? b_ns : a_ns;

			if (to_ns > model_end[rows] ||
			    !model_keeps(rows, from_ns) ||
			    !model_keeps(rows, to_ns))
				assert_int_equal(between(from_ns, to_ns),
				    UINT64_MAX);
			else
				assert_int_equal(between(from_ns, to_ns),
				    model_at(rows, to_ns) -
				    model_at(rows, from_ns));
		}
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test_setup(from_edge_to_edge_it_is_exact, reset),
		cmocka_unit_test_setup(between_edges_it_is_linear, reset),
		cmocka_unit_test_setup(beyond_the_rows_there_is_nothing,
		    reset),
		cmocka_unit_test_setup(
		    a_row_that_does_not_follow_is_not_taken, reset),
		cmocka_unit_test_setup(
		    a_long_series_knows_its_two_ends_and_its_sum, reset),
		cmocka_unit_test_setup(
		    random_rows_agree_with_a_model_that_keeps_all, reset),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
