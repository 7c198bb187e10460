/* SPDX-License-Identifier: GPL-3.0-or-later */
/* All figures worked by hand unless a row says otherwise. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdlib.h>
#include <string.h>

#include "clock.h"
#include "interval.h"

#define MS NS_PER_MS

static void
edges_lie_on_the_grid(void **state)
{
	struct interval_grid grid = { .zero_ns = 1234567, .row_ns = 100 * MS };

	(void)state;
	assert_int_equal(interval_edge_ns(&grid), 1234567);
	grid.next = 1;
	assert_int_equal(interval_edge_ns(&grid), 101234567);
	/* 24 h of 10 ms rows: 8 640 000 of them */
	grid.row_ns = 10 * MS;
	grid.next = 8640000;
	assert_int_equal(interval_edge_ns(&grid), UINT64_C(86400001234567));
}

/* An edge that the stream has passed, or where nobody waits any longer. */
static uint64_t
cut_at(struct interval_stream *stream, uint64_t edge_ns)
{
	if (!interval_hold(stream, edge_ns))
		interval_force(stream, edge_ns);
	return interval_cut(stream);
}

static void
bytes_at_an_edge_are_linear_between_two_calls(void **state)
{
	static const struct {
		uint64_t from_ns, from_bytes, to_ns, more_bytes, at_ns, bytes;
		const char *source;
	} rows[] = {
		{ 1000, 0, 2000, 1000, 1500, 500, "half way" },
		{ 1000, 0, 2000, 1000, 1333, 333, "a third" },
		{ 1000, 0, 2000, 1000, 1000, 0, "at the first call" },
		{ 1000, 0, 2000, 1000, 2000, 1000, "at the second" },
		{ 1000, 7, 2000, 1000, 500, 7, "before: the nearer one" },
		{ 1000, 7, 2000, 1000, 2500, 1007, "after: likewise" },
		{ 0, 0, 3, 10, 1, 3, "10/3 rounded down" },
		{ 0, 0, 3, 10, 2, 6, "20/3 rounded down" },
		{ 1000, 50, 1000, 9, 1000, 59, "two calls at one time" },
		{ 1000, 50, 2000, 0, 1700, 50, "idle" },
		{ 0, 0, UINT64_C(1) << 40, UINT64_C(1) << 62,
		    UINT64_C(1) << 39, UINT64_C(1) << 61,
		    "the product takes more than 64 bits" },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(*rows); i++) {
		struct interval_stream stream;

		interval_stream_init(&stream, rows[i].from_ns);
		interval_observe(&stream, rows[i].from_ns, rows[i].from_bytes);
		interval_observe(&stream, rows[i].to_ns, rows[i].more_bytes);
		assert_int_equal(interval_bytes_at(&stream, rows[i].at_ns),
		    rows[i].bytes);
	}
}

static void
several_edges_in_one_gap_share_its_bytes(void **state)
{
	struct interval_stream stream;

	(void)state;
	interval_stream_init(&stream, 0);
	interval_observe(&stream, 35 * MS, 3500);
	assert_int_equal(cut_at(&stream, 10 * MS), 1000);
	assert_int_equal(cut_at(&stream, 20 * MS), 1000);
	assert_int_equal(cut_at(&stream, 30 * MS), 1000);
	/* 500 left over from the gap, and 500 more */
	interval_observe(&stream, 40 * MS, 500);
	assert_int_equal(cut_at(&stream, 40 * MS), 1000);
}

static void
an_idle_stream_has_empty_intervals(void **state)
{
	struct interval_stream stream;

	(void)state;
	interval_stream_init(&stream, 0);
	interval_observe(&stream, 5 * MS, 77);
	interval_observe(&stream, 11 * MS, 0);
	assert_int_equal(cut_at(&stream, 10 * MS), 77);
	interval_observe(&stream, 21 * MS, 0);
	assert_int_equal(cut_at(&stream, 20 * MS), 0);
	/* a late look moves no edge: two intervals are closed by it */
	interval_observe(&stream, 47 * MS, 0);
	assert_int_equal(cut_at(&stream, 30 * MS), 0);
	assert_int_equal(cut_at(&stream, 40 * MS), 0);
}

static void
bursts_of_a_shaper_do_not_show_in_a_row(void **state)
{
	/* 45 segments of 1448 B every 5 ms; the edges lie 2 ms behind a burst,
	 * so that each row holds 20 of them */
	const uint64_t burst_bytes = 45 * 1448;
	struct interval_grid grid = { .zero_ns = 2 * MS, .row_ns = 100 * MS };
	struct interval_stream stream;

	(void)state;
	interval_stream_init(&stream, 0);
	for (uint64_t ms = 5; ms <= 1000; ms += 5) {
		uint64_t edge_ns = interval_edge_ns(&grid);
		uint64_t bytes;

		interval_observe(&stream, ms * MS, burst_bytes);
		if (!interval_hold(&stream, edge_ns))
			continue;
		bytes = interval_cut(&stream);
		/* 2/5 of the first burst had come by the zero */
		assert_int_equal(bytes, grid.next == 0 ?
		    burst_bytes * 2 / 5 : burst_bytes * 20);
		grid.next++;
	}
	assert_int_equal(grid.next, 10);
}

static void
what_is_held_at_an_edge_stays_whatever_follows(void **state)
{
	struct interval_stream stream;

	(void)state;
	interval_stream_init(&stream, 0);
	interval_observe(&stream, 8 * MS, 800);
	assert_false(interval_hold(&stream, 10 * MS));
	interval_observe(&stream, 12 * MS, 400);
	assert_true(interval_hold(&stream, 10 * MS));
	/* other streams have not passed the edge yet */
	interval_observe(&stream, 14 * MS, 5000);
	assert_false(interval_hold(&stream, 10 * MS));
	assert_int_equal(interval_cut(&stream), 1000);
	assert_true(interval_hold(&stream, 13 * MS));
	assert_int_equal(interval_cut(&stream), 200 + 2500);
}

static void
a_stream_that_was_waited_for_in_vain_begins_anew(void **state)
{
	struct interval_grid grid = { .zero_ns = 0, .row_ns = 100 * MS,
		.next = 1 };
	struct interval_stream stream;

	(void)state;
	interval_stream_init(&stream, 0);
	interval_observe(&stream, 90 * MS, 900);
	assert_int_equal(interval_patience_ns(&grid), 150 * MS);
	interval_force(&stream, 150 * MS);
	assert_int_equal(interval_cut(&stream), 900);
	/* 1000 B came some time in the 100 ms since the last look */
	interval_observe(&stream, 250 * MS, 1000);
	assert_true(interval_hold(&stream, 200 * MS));
	assert_int_equal(interval_cut(&stream), 500);
}

static void
nothing_before_the_zero_counts(void **state)
{
	struct interval_stream stream;

	(void)state;
	interval_stream_init(&stream, 0);
	interval_observe(&stream, 5 * MS, 500);
	interval_observe(&stream, 12 * MS, 700);
	/* the zero at 10 ms: 500 + 700 x 5/7 */
	assert_int_equal(cut_at(&stream, 10 * MS), 1000);
	interval_observe(&stream, 20 * MS, 800);
	assert_int_equal(cut_at(&stream, 20 * MS), 1000);
}

static void
a_zero_that_is_known_late_counts_from_the_call_before(void **state)
{
	struct interval_stream stream;

	(void)state;
	interval_stream_init(&stream, 0);
	interval_observe(&stream, 5 * MS, 500);
	interval_observe(&stream, 12 * MS, 700);
	assert_int_equal(cut_at(&stream, 2 * MS), 500);
	assert_int_equal(cut_at(&stream, 12 * MS), 700);
}

/* xorshift64*, Vigna 2014; from memory. */
static uint64_t
next_random(uint64_t *x)
{
	*x ^= *x >> 12;
	*x ^= *x << 25;
	*x ^= *x >> 27;
	return *x * UINT64_C(2685821657736338717);
}

static void
rows_add_up_to_the_cumulative_difference(void **state)
{
	uint64_t random = 42;

	(void)state;
	for (unsigned run = 0; run < 200; run++) {
		struct interval_grid grid = { .row_ns = 10 * MS };
		struct interval_stream stream;
		uint64_t now_ns = 0, sum = 0, at_zero = 0;

		grid.zero_ns = next_random(&random) % (50 * MS);
		interval_stream_init(&stream, 0);
		for (unsigned call = 0; call < 500; call++) {
			now_ns += next_random(&random) % (3 * MS) *
			    (next_random(&random) % 16 == 0 ? 20 : 1);
			interval_observe(&stream, now_ns,
			    next_random(&random) % (4 << 20));
			while (interval_edge_ns(&grid) <= now_ns) {
				uint64_t bytes = cut_at(&stream,
				    interval_edge_ns(&grid));

				if (grid.next++ == 0)
					at_zero = bytes;
				else
					sum += bytes;
			}
		}
		grid.next--;
		assert_int_equal(sum + at_zero, stream.cut_bytes);
		/* and up to the end, whatever the last edge was */
		sum += cut_at(&stream, now_ns);
		assert_int_equal(sum + at_zero, stream.now_bytes);
	}
}

static struct interval_part *
new_part(uint64_t number, uint64_t bytes, uint64_t cpu_ns, size_t streams)
{
	struct interval_part *part = calloc(1, interval_part_bytes(streams));

	assert_non_null(part);
	part->number = number;
	part->bytes = bytes;
	part->cpu_ns = cpu_ns;
	part->streams_count = streams;
	return part;
}

static void
parts_of_one_to_four_workers_make_a_row(void **state)
{
	(void)state;
	for (size_t count = 1; count <= 4; count++) {
		const struct interval_part *parts[4];
		struct interval_part *own[4];
		struct stream_row streams[MEASUREMENT_STREAMS_SAMPLED];
		struct interval_row row;
		size_t streams_count;

		for (size_t i = 0; i < count; i++) {
			own[i] = new_part(6, 100 + i, 10 * (i + 1), 2);
			own[i]->streams[0].stream = i;
			own[i]->streams[0].bytes = 40 + i;
			own[i]->streams[1].stream = i + count;
			parts[i] = own[i];
		}
		assert_true(interval_merge(parts, count, 100 * MS, &row,
		    streams, &streams_count));
		assert_int_equal(row.number, 6);
		assert_int_equal(row.end_ns, 700 * MS);
		/* 100, 201, 303, 406 and 10, 30, 60, 100 */
		assert_int_equal(row.bytes, 100 * count +
		    count * (count - 1) / 2);
		assert_int_equal(row.cpu_ns, 5 * count * (count + 1));
		assert_int_equal(streams_count, 2 * count);
		for (size_t i = 0; i < streams_count; i++)
			assert_int_equal(streams[i].stream, i);
		assert_int_equal(streams[count - 1].bytes, 39 + count);
		for (size_t i = 0; i < count; i++)
			free(own[i]);
	}
}

static void
one_late_worker_holds_the_row_back(void **state)
{
	(void)state;
	for (size_t late = 0; late < 4; late++) {
		const struct interval_part *parts[4];
		struct interval_part *own = new_part(0, 1, 1, 0);
		struct stream_row streams[MEASUREMENT_STREAMS_SAMPLED];
		struct interval_row row;
		size_t streams_count = 99;

		for (size_t i = 0; i < 4; i++)
			parts[i] = i == late ? NULL : own;
		assert_false(interval_merge(parts, 4, 100 * MS, &row, streams,
		    &streams_count));
		assert_int_equal(streams_count, 99);
		parts[late] = own;
		assert_true(interval_merge(parts, 4, 100 * MS, &row, streams,
		    &streams_count));
		assert_int_equal(row.bytes, 4);
		free(own);
	}
}

static void
up_to_eight_streams_are_sampled_evenly_spaced(void **state)
{
	static const struct {
		uint64_t streams, count, second, last;
	} rows[] = {
		{ 1, 1, 0, 0 }, { 2, 2, 1, 1 }, { 8, 8, 1, 7 },
		{ 9, 8, 1, 7 },		/* 9 x 7/8 = 7.875 */
		{ 16, 8, 2, 14 }, { 256, 8, 32, 224 },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(*rows); i++) {
		uint64_t count = 0, last = 0;

		for (uint64_t s = 0; s < rows[i].streams; s++) {
			if (!interval_sampled(s, rows[i].streams))
				continue;
			if (++count == 2)
				assert_int_equal(s, rows[i].second);
			last = s;
		}
		assert_true(interval_sampled(0, rows[i].streams));
		assert_int_equal(count, rows[i].count);
		assert_int_equal(last, rows[i].last);
		assert_int_equal(interval_sampled_count(rows[i].streams),
		    count);
	}
}

/* A run of equal rows; the last run of a vector goes on for ever. */
struct run {
	uint64_t rows, bytes;
};

struct settle_vector {
	const char *source;
	uint64_t row_ms, settle_ms;
	bool extends;
	struct run runs[4];
	uint64_t settle_rows;	/* expected */
	bool settled;		/* expected */
};

static const struct settle_vector settle_vectors[] = {
	{ "least settle alone, a whole number of rows",
	    100, 1000, false, { { 1, 100 } }, 10, false },
	{ "least settle rounded up to a row: 1050 ms",
	    100, 1050, false, { { 1, 100 } }, 11, false },
	{ "2 s of even rate, not extended: two means agree at its end",
	    100, 2000, false, { { 1, 100 } }, 20, true },
	{ "even rate: two seconds are the least that can agree",
	    100, 1000, true, { { 1, 100 } }, 20, true },
	{ "even rate, 10 ms rows: 200 of them", 10, 1000, true,
	    { { 1, 100 } }, 200, true },
	{ "300 ms rows: four stand for the second", 300, 0, true,
	    { { 1, 100 } }, 8, true },
	{ "least settle of 3.1 s over even rate: at once after it",
	    100, 3100, true, { { 1, 100 } }, 31, true },
	{ "1000 against 990 differs by 1 % of the larger, not less; a row "
	    "later 999 against 990: 0.9 %",
	    100, 1000, true, { { 10, 100 }, { 1, 99 } }, 21, true },
	{ "1000 against 991 (9 x 99 + 100): 0.9 %", 100, 1000, true,
	    { { 10, 100 }, { 9, 99 }, { 1, 100 } }, 20, true },
	{ "a step from 50 to 100 after 1.5 s: the last ten rows are all 100 "
	    "from row 25 on, the ten before them from row 35 on; at row 34 "
	    "950 against 1000: 5 %", 100, 1000, true,
	    { { 15, 50 }, { 1, 100 } }, 35, true },
	{ "nothing carried never settles: the limit of 10 s",
	    100, 1000, true, { { 1, 0 } }, 100, false },
	{ "a least settle beyond the limit counts all the same",
	    100, 12000, true, { { 1, 0 } }, 120, false },
	{ "rows of 60 s: the limit is over after one", 60000, 1000, true,
	    { { 1, 100 } }, 1, false },
	{ "rows of 2 s stand for the second each", 2000, 0, true,
	    { { 1, 100 } }, 2, true },
	{ "rows of 2 s: 100, 200 do not agree, 200, 200 do", 2000, 0, true,
	    { { 1, 100 }, { 1, 200 } }, 3, true },
};

static uint64_t
bytes_of_row(const struct settle_vector *vector, uint64_t row)
{
	const struct run *run = vector->runs;

	for (; row >= run->rows && run[1].rows != 0; run++)
		row -= run->rows;
	return run->bytes;
}

static void
settle_ends_when_two_seconds_agree(void **state)
{
	(void)state;
	for (size_t i = 0; i < sizeof(settle_vectors) /
	    sizeof(*settle_vectors); i++) {
		const struct settle_vector *v = &settle_vectors[i];
		struct trial trial = { .row_ns = v->row_ms * MS,
		    .settle_ns = v->settle_ms * MS,
		    .settle_extends = v->extends,
		    .duration_ns = v->row_ms * MS };
		struct interval_window window;
		uint64_t row = 0;

		interval_window_init(&window, &trial);
		while (row < 1000 && interval_window_add(&window,
		    bytes_of_row(v, row)) == INTERVAL_SETTLE)
			row++;
		if (row != v->settle_rows)
			fail_msg("%s: %u rows", v->source, (unsigned)row);
		assert_int_equal(window.settle_rows, v->settle_rows);
		if (window.settled != v->settled)
			fail_msg("%s: settled %d", v->source, window.settled);
		assert_true(interval_window_closed(&window));
	}
}

static void
a_rate_that_doubles_each_second_meets_the_limit(void **state)
{
	struct trial trial = { .row_ns = 1000 * MS, .settle_ns = 1000 * MS,
	    .settle_extends = true, .duration_ns = 1000 * MS };
	struct interval_window window;
	uint64_t rows = 0;

	(void)state;
	interval_window_init(&window, &trial);
	while (interval_window_add(&window, UINT64_C(1) << rows) ==
	    INTERVAL_SETTLE)
		rows++;
	assert_int_equal(rows, 10);
	assert_false(window.settled);
	assert_int_equal(window.bytes, 1024);
}

static void
the_window_is_the_rows_after_settle(void **state)
{
	struct trial trial = { .row_ns = 100 * MS, .settle_ns = 200 * MS,
	    .duration_ns = 300 * MS };
	static const enum interval_place places[] = { INTERVAL_SETTLE,
	    INTERVAL_SETTLE, INTERVAL_COUNTED, INTERVAL_COUNTED,
	    INTERVAL_COUNTED, INTERVAL_AFTER, INTERVAL_AFTER };
	struct interval_window window;

	(void)state;
	interval_window_init(&window, &trial);
	for (unsigned i = 0; i < sizeof(places) / sizeof(*places); i++) {
		assert_int_equal(interval_window_closed(&window), i >= 5);
		assert_int_equal(interval_window_add(&window,
		    UINT64_C(1) << i), places[i]);
	}
	/* 4 + 8 + 16 */
	assert_int_equal(window.bytes, 28);
	assert_int_equal(window.counted_rows, 3);
}

static void
without_settle_the_first_row_counts(void **state)
{
	struct trial trial = { .row_ns = 100 * MS, .duration_ns = 100 * MS };
	struct interval_window window;

	(void)state;
	interval_window_init(&window, &trial);
	assert_false(interval_window_closed(&window));
	assert_int_equal(interval_window_add(&window, 5), INTERVAL_COUNTED);
	assert_true(interval_window_closed(&window));
	assert_int_equal(window.bytes, 5);
}

static void
a_day_of_rows_keeps_the_window_small(void **state)
{
	struct trial trial = { .row_ns = 10 * MS, .settle_ns = 1000 * MS,
	    .settle_extends = true, .duration_ns = TRIAL_DURATION_MAX_NS };
	struct interval_window window;
	uint64_t rows = 0;

	(void)state;
	/* 400 Gbit/s are 500 000 000 B in 10 ms */
	interval_window_init(&window, &trial);
	while (!interval_window_closed(&window)) {
		(void)interval_window_add(&window, 500000000);
		rows++;
	}
	assert_int_equal(rows, 8640000 + 200);
	assert_int_equal(window.bytes, UINT64_C(4320000000000000));
	assert_true(sizeof(window) < 4096);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(edges_lie_on_the_grid),
		cmocka_unit_test(
		    bytes_at_an_edge_are_linear_between_two_calls),
		cmocka_unit_test(several_edges_in_one_gap_share_its_bytes),
		cmocka_unit_test(an_idle_stream_has_empty_intervals),
		cmocka_unit_test(bursts_of_a_shaper_do_not_show_in_a_row),
		cmocka_unit_test(
		    what_is_held_at_an_edge_stays_whatever_follows),
		cmocka_unit_test(
		    a_stream_that_was_waited_for_in_vain_begins_anew),
		cmocka_unit_test(nothing_before_the_zero_counts),
		cmocka_unit_test(
		    a_zero_that_is_known_late_counts_from_the_call_before),
		cmocka_unit_test(rows_add_up_to_the_cumulative_difference),
		cmocka_unit_test(parts_of_one_to_four_workers_make_a_row),
		cmocka_unit_test(one_late_worker_holds_the_row_back),
		cmocka_unit_test(
		    up_to_eight_streams_are_sampled_evenly_spaced),
		cmocka_unit_test(settle_ends_when_two_seconds_agree),
		cmocka_unit_test(
		    a_rate_that_doubles_each_second_meets_the_limit),
		cmocka_unit_test(the_window_is_the_rows_after_settle),
		cmocka_unit_test(without_settle_the_first_row_counts),
		cmocka_unit_test(a_day_of_rows_keeps_the_window_small),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
