/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Loss, order, copies and delay variation across a whole line. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <math.h>
#include <string.h>

#include "line_fixture.h"

#define MS UINT64_C(1000000)
#define N 20000
#define SIGMAS 5

/* Which numbers a cause takes, 'x' or '.'. */
static void
lost_numbers(const struct line_settings *settings, enum line_drop cause,
    uint64_t gap_ns, char lost[N])
{
	struct line *line = line_made(settings);
	struct line_verdict verdict;

	for (uint64_t n = 0; n < N; n++) {
		verdict = line_load(line, n * gap_ns, 40 +
		    (uint32_t)(n * gap_ns % 1400));
		line_drain(line, n * gap_ns);
		lost[n] = !verdict.accepted && verdict.drop == cause ? 'x' :
		    '.';
	}
	line_free(line);
}

static void
other_features(struct line_settings *s)
{
	s->rate_bps = 100000000;
	s->propagation_ns = 3 * MS;
	s->variation = (struct variation_settings){ VARIATION_NORMAL, MS,
		0.5, true };
	s->reordering = (struct line_reordering){ 0.1, 3, 5 * MS };
	s->duplication = (struct line_duplication){ 0.2, 0 };
	s->background = (struct background_settings){ 9000000, 900, true };
	s->outage_count = 0;
}

static void
the_same_seed_loses_the_same_numbers(void **state)
{
	static char alone[N], among[N], slower[N], other[N];
	struct line_settings settings = line_plain();
	size_t count = 0;

	(void)state;
	settings.seed = 11;
	settings.loss_ratio = 0.03;
	lost_numbers(&settings, LINE_DROP_LOSS, MS, alone);
	lost_numbers(&settings, LINE_DROP_LOSS, 7919, slower);
	other_features(&settings);
	lost_numbers(&settings, LINE_DROP_LOSS, 3 * MS, among);
	settings.seed = 12;
	lost_numbers(&settings, LINE_DROP_LOSS, 3 * MS, other);
	assert_memory_equal(alone, slower, N);
	assert_memory_equal(alone, among, N);
	assert_int_not_equal(memcmp(alone, other, N), 0);
	for (size_t i = 0; i < N; i++)
		count += alone[i] == 'x';
	/* Binomial. */
	assert_true(fabs((double)count - 0.03 * N) <
	    SIGMAS * sqrt(0.03 * 0.97 * N));
}

static void
the_same_seed_has_the_same_runs_of_loss(void **state)
{
	static char alone[N], among[N];
	struct line_settings settings = line_plain();

	(void)state;
	settings.seed = 11;
	settings.bursts = (struct bursts_settings){ 0.01, 0.2, 0, 1 };
	lost_numbers(&settings, LINE_DROP_BURSTS, MS, alone);
	other_features(&settings);
	lost_numbers(&settings, LINE_DROP_BURSTS, 2 * MS, among);
	assert_memory_equal(alone, among, N);
	assert_non_null(memchr(alone, 'x', N));
}

/* What another feature drops first is gone for this one, no more. */
static void
losses_of_one_feature_do_not_move_those_of_another(void **state)
{
	static char loss[N], bursts[N], both_loss[N], both_bursts[N];
	struct line_settings settings = line_plain();

	(void)state;
	settings.seed = 5;
	settings.loss_ratio = 0.1;
	lost_numbers(&settings, LINE_DROP_LOSS, MS, loss);
	settings.bursts = (struct bursts_settings){ 0.05, 0.3, 0, 1 };
	lost_numbers(&settings, LINE_DROP_LOSS, MS, both_loss);
	lost_numbers(&settings, LINE_DROP_BURSTS, MS, both_bursts);
	settings.loss_ratio = 0;
	lost_numbers(&settings, LINE_DROP_BURSTS, MS, bursts);
	assert_memory_equal(loss, both_loss, N);
	assert_non_null(memchr(both_bursts, 'x', N));
	for (size_t i = 0; i < N; i++)
		assert_int_equal(both_bursts[i],
		    loss[i] == 'x' ? '.' : bursts[i]);
}

/* Packets a millisecond apart, 5 ms on the way. */
static size_t
arrive(const struct line_settings *settings, uint64_t packets,
    struct line_delivery out[])
{
	struct line *line = line_made(settings);
	size_t count = 0;

	for (uint64_t n = 0; n < packets; n++) {
		line_load(line, n * MS, 100);
		while (line_take(line, n * MS, &out[count]))
			count++;
	}
	while (line_take(line, LINE_NOW_MAX_NS, &out[count]))
		count++;
	line_free(line);
	return count;
}

/* Every packet is held for 3 others: all are, so the order stays, each comes
 * when the third after it does, and the last three when their time is up. */
static void
a_packet_held_for_others_comes_right_after_them(void **state)
{
	struct line_settings settings = line_plain();
	struct line_delivery got[10];

	(void)state;
	settings.propagation_ns = 5 * MS;
	settings.reordering = (struct line_reordering){ 1, 3, 50 * MS };
	assert_int_equal(arrive(&settings, 10, got), 10);
	for (uint64_t i = 0; i < 10; i++) {
		assert_int_equal(got[i].packet.number, i);
		assert_int_equal(got[i].packet.due_ns,
		    i < 7 ? (i + 3 + 5) * MS : (i + 5 + 50) * MS);
	}
}

static void
reordering_moves_a_packet_by_so_many(void **state)
{
	static struct line_delivery got[N];
	struct line_settings settings = line_plain();
	uint64_t held = 0, place[N], highest = 0, late = 0;

	(void)state;
	settings.seed = 3;
	settings.propagation_ns = 5 * MS;
	settings.reordering = (struct line_reordering){ 0.01, 4, 900 * MS };
	assert_int_equal(arrive(&settings, N, got), N);
	for (uint64_t i = 0; i < N; i++) {
		place[got[i].packet.number] = i;
		late += got[i].packet.number < highest;
		if (got[i].packet.number > highest)
			highest = got[i].packet.number;
	}
	for (uint64_t n = 0; n < N - 10; n++) {
		if (place[n] <= n + 1)
			continue;
		/* Behind 4 others, but for those that are held as well. */
		assert_in_range(place[n], n + 2, n + 4);
		assert_int_equal(got[place[n]].packet.due_ns, (n + 9) * MS);
		held++;
	}
	assert_true(held <= late && late <= held + 10);
	assert_true(fabs((double)held - 0.01 * N) <
	    SIGMAS * sqrt(0.01 * 0.99 * N));
}

/* 2.5 ms more with packets a millisecond apart: two pass. */
static void
reordering_by_time_counts_in_the_truth(void **state)
{
	struct line_settings settings = line_plain();
	struct line *line;
	struct truth_counts counts;

	(void)state;
	settings.seed = 3;
	settings.reordering = (struct line_reordering){ 0.01, 0,
		5 * MS / 2 };
	line = line_made(&settings);
	for (uint64_t n = 0; n < N; n++)
		line_load(line, n * MS, 100);
	line_drain(line, LINE_NOW_MAX_NS);
	counts = line_load_total(line);
	assert_int_equal(counts.left.packets, N);
	/* RFC 4737: one held right after another held one is not late. */
	assert_true(fabs((double)counts.reordered.packets - 0.01 * N) <
	    SIGMAS * sqrt(0.01 * 0.99 * N));
	assert_int_equal(counts.reordered.bytes,
	    100 * counts.reordered.packets);
	line_free(line);
}

static void
copies_come_later_and_are_counted_apart(void **state)
{
	struct line_settings settings = line_plain();
	struct line_delivery got[4];
	struct line *line;
	struct line_verdict verdict;
	struct truth_counts counts;

	(void)state;
	settings.propagation_ns = 5 * MS;
	settings.duplication = (struct line_duplication){ 1, 3 * MS };
	assert_int_equal(arrive(&settings, 2, got), 4);
	for (size_t i = 0; i < 4; i++) {
		assert_int_equal(got[i].packet.number, i % 2);
		assert_int_equal(got[i].copy, i >= 2);
		assert_int_equal(got[i].packet.due_ns,
		    (5 + i % 2 + (i >= 2 ? 3 : 0)) * MS);
	}
	line = line_made(&settings);
	verdict = line_load(line, 0, 100);
	assert_int_equal(verdict.copies, 2);
	assert_int_not_equal(verdict.handles[0], verdict.handles[1]);
	assert_int_equal(verdict.due_ns[1], 8 * MS);
	assert_int_equal(line_pending(line), 2);
	assert_int_equal(line_pending_copies(line), 1);
	line_drain(line, 8 * MS);
	counts = line_load_total(line);
	assert_int_equal(counts.entered.packets, 1);
	assert_int_equal(counts.left.packets, 2);
	assert_int_equal(counts.duplicated.packets, 1);
	assert_int_equal(counts.reordered.packets, 0);
	line_free(line);
}

static void
variation_reorders_only_if_asked(void **state)
{
	struct line_settings settings = line_plain();

	(void)state;
	settings.variation.spread_ns = 10 * MS;
	for (int kind = 1; kind < VARIATION_KINDS; kind++) {
		for (int asked = 0; asked < 2; asked++) {
			struct line *line;

			settings.variation.kind = (enum variation_kind)kind;
			settings.variation.reorders = asked;
			line = line_made(&settings);
			for (uint64_t n = 0; n < N; n++)
				line_load(line, n * MS, 100);
			line_drain(line, LINE_NOW_MAX_NS);
			assert_int_equal(line_load_total(line)
			    .reordered.packets > 0, asked);
			line_free(line);
		}
	}
}

/* Far enough apart, order costs nothing: the delay is what was asked for. */
static void
delays_across_the_line_are_as_asked_for(void **state)
{
	struct line_settings settings = line_plain();
	struct line *line;
	const struct truth *truth;
	double sum = 0;

	(void)state;
	settings.propagation_ns = 5 * MS;
	settings.sample_every = 1;
	settings.variation = (struct variation_settings){ VARIATION_UNIFORM,
		10 * MS, 0, false };
	line = line_made(&settings);
	for (uint64_t n = 0; n < N; n++)
		line_load(line, n * 10 * MS, 100);
	line_drain(line, LINE_NOW_MAX_NS);
	truth = line_truth(line);
	assert_int_equal(truth->sample_count, N);
	for (size_t i = 0; i < N; i++) {
		uint64_t delay_ns = truth->samples[i].due_ns -
		    truth->samples[i].entered_ns;

		assert_in_range(delay_ns, 5 * MS, 15 * MS);
		sum += (double)delay_ns / (double)MS;
	}
	/* Mean 10 ms, deviation 10 / sqrt(12) ms. */
	assert_true(fabs(sum / N - 10) < SIGMAS * 10 / sqrt(12.0 * N));
	line_free(line);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(the_same_seed_loses_the_same_numbers),
		cmocka_unit_test(the_same_seed_has_the_same_runs_of_loss),
		cmocka_unit_test(
		    losses_of_one_feature_do_not_move_those_of_another),
		cmocka_unit_test(
		    a_packet_held_for_others_comes_right_after_them),
		cmocka_unit_test(reordering_moves_a_packet_by_so_many),
		cmocka_unit_test(reordering_by_time_counts_in_the_truth),
		cmocka_unit_test(copies_come_later_and_are_counted_apart),
		cmocka_unit_test(variation_reorders_only_if_asked),
		cmocka_unit_test(delays_across_the_line_are_as_asked_for),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
