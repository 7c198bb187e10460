/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <math.h>
#include <stdlib.h>

#include "line_fixture.h"

#define MS UINT64_C(1000000)
#define S UINT64_C(1000000000)
#define COUNT(a) (sizeof(a) / sizeof(*(a)))

/* 1500 B at 1 Mbit/s: 12 ms a packet. */
static struct line_settings
megabit(void)
{
	struct line_settings settings = line_plain();

	settings.rate_bps = 1000000;
	return settings;
}

static const struct {
	uint64_t rate_bps, propagation_ns, due_ns;
	struct octets octets;
	const char *source;
} arrivals[] = {
	{ 64000, 0, 187500000, { 0, 1, 0 },
	    "by hand: 12000 bit at 64 kbit/s" },
	{ 10000000, 5000000, 6230400, { 38, 1, 84 },
	    "by hand: 1538 octets (IEEE 802.3) in 1.2304 ms" },
	{ UINT64_C(10000000000), 1000000, 1001231, { 38, 1, 84 },
	    "by hand: 1230.4 ns, and only then is it whole" },
	{ 0, 20000000, 20000000, { 38, 1, 84 }, "no serialisation" },
};

static void
a_packet_arrives_after_its_last_bit_and_the_way(void **state)
{
	(void)state;
	for (size_t i = 0; i < COUNT(arrivals); i++) {
		struct line_settings settings = line_plain();
		struct line_verdict verdict;
		struct line_delivery delivery;
		struct line *line;

		settings.rate_bps = arrivals[i].rate_bps;
		settings.octets = arrivals[i].octets;
		settings.propagation_ns = arrivals[i].propagation_ns;
		line = line_made(&settings);
		assert_true(line_next_due_ns(line) == LINE_NEVER_NS);
		verdict = line_load(line, 0, 1500);
		assert_true(verdict.accepted);
		assert_int_equal(verdict.due_ns[0], arrivals[i].due_ns);
		assert_int_equal(line_next_due_ns(line), arrivals[i].due_ns);
		assert_false(line_take(line, arrivals[i].due_ns - 1,
		    &delivery));
		assert_true(line_take(line, arrivals[i].due_ns, &delivery));
		assert_int_equal(delivery.handle, verdict.handles[0]);
		assert_int_equal(delivery.packet.bytes, 1500);
		assert_false(delivery.copy);
		assert_int_equal(line_pending(line), 0);
		line_free(line);
	}
}

/* One packet is sent, 3000 B wait, not a byte more. */
static void
a_queue_drops_at_the_exact_byte(void **state)
{
	struct line_settings settings = megabit();
	struct line *line;
	struct line_verdict verdict;

	(void)state;
	settings.queue_bytes = 3000;
	line = line_made(&settings);
	assert_true(line_load(line, 0, 1500).accepted);
	assert_true(line_load(line, 0, 1500).accepted);
	assert_true(line_load(line, 0, 1499).accepted);
	verdict = line_load(line, 0, 2);
	assert_false(verdict.accepted);
	assert_int_equal(verdict.drop, LINE_DROP_QUEUE);
	assert_true(line_load(line, 0, 1).accepted);
	/* The second begins at 12 ms and leaves 1500 B of room. */
	assert_false(line_load(line, 12 * MS - 1, 1500).accepted);
	assert_false(line_load(line, 12 * MS, 1501).accepted);
	assert_true(line_load(line, 12 * MS, 1500).accepted);
	assert_int_equal(line_load_total(line).dropped[LINE_DROP_QUEUE].bytes,
	    3003);
	line_free(line);
}

static void
a_queue_of_time_drops_what_would_wait_longer(void **state)
{
	struct line_settings settings = megabit();
	struct line *line;

	(void)state;
	settings.queue_ns = 24 * MS;
	line = line_made(&settings);
	for (int i = 0; i < 3; i++)	/* wait 0, 12, 24 ms */
		assert_true(line_load(line, 0, 1500).accepted);
	assert_false(line_load(line, 0, 1).accepted);
	assert_false(line_load(line, 12 * MS - 1, 1).accepted);
	assert_true(line_load(line, 12 * MS, 1).accepted);
	line_free(line);
}

static void
a_packet_that_need_not_wait_is_never_refused(void **state)
{
	struct line_settings settings = megabit();
	struct line *line;

	(void)state;
	settings.queue_bytes = 1;
	settings.queue_ns = 1;
	line = line_made(&settings);
	for (uint64_t i = 0; i < 100; i++) {
		assert_true(line_load(line, i * 12 * MS, 1500).accepted);
		assert_false(line_load(line, i * 12 * MS, 1500).accepted);
	}
	line_free(line);
}

static void
packets_above_the_mtu_are_answered_or_vanish(void **state)
{
	(void)state;
	for (int answer = 0; answer < 2; answer++) {
		struct line_settings settings = line_plain();
		struct line_verdict verdict;
		struct line *line;

		settings.mtu_bytes = 1400;
		settings.mtu_answer = answer;
		line = line_made(&settings);
		verdict = line_load(line, 0, 1401);
		assert_false(verdict.accepted);
		assert_int_equal(verdict.drop, LINE_DROP_MTU);
		assert_int_equal(verdict.answer, answer);
		assert_true(line_load(line, 0, 1400).accepted);
		line_free(line);
	}
}

/* By hand: 12 ms a packet; the line is down within [from, to). */
static const struct {
	uint64_t rate_bps, sent_ns, from_ns, to_ns;
	bool lost;
} outages[] = {
	{ 1000000, 0, 12 * MS, 20 * MS, false },	/* just out */
	{ 1000000, 1, 12 * MS, 20 * MS, true },
	{ 1000000, 20 * MS - 1, 12 * MS, 20 * MS, true },
	{ 1000000, 20 * MS, 12 * MS, 20 * MS, false },
	{ 1000000, 0, 5 * MS, 5 * MS + 1, true },	/* in the middle */
	{ 0, 12 * MS - 1, 12 * MS, 20 * MS, false },
	{ 0, 12 * MS, 12 * MS, 20 * MS, true },
	{ 0, 20 * MS - 1, 12 * MS, 20 * MS, true },
	{ 0, 20 * MS, 12 * MS, 20 * MS, false },
};

static void
an_outage_begins_and_ends_at_its_edges(void **state)
{
	(void)state;
	for (size_t i = 0; i < COUNT(outages); i++) {
		struct line_settings settings = line_plain();
		struct line_verdict verdict;
		struct line *line;
		struct error err;

		settings.rate_bps = outages[i].rate_bps;
		settings.outage_count = 1;
		settings.outages[0] = (struct line_outage){
			outages[i].from_ns, outages[i].to_ns };
		line = line_new(&settings, 7 * S, &err);
		assert_non_null(line);
		verdict = line_load(line, 7 * S + outages[i].sent_ns, 1500);
		assert_int_equal(verdict.accepted, !outages[i].lost);
		if (outages[i].lost)
			assert_int_equal(verdict.drop, LINE_DROP_OUTAGE);
		line_free(line);
	}
}

/* At 6 ms half of the packet is out; the rest takes 3 ms at 2 Mbit/s. */
static void
a_rate_step_counts_from_the_origin(void **state)
{
	struct line_settings settings = megabit();
	struct line *line;
	struct error err;

	(void)state;
	settings.step_count = 1;
	settings.steps[0] = (struct serial_step){ 6 * MS, 2000000 };
	line = line_new(&settings, 5 * S, &err);
	assert_non_null(line);
	assert_int_equal(line_load(line, 5 * S, 1500).due_ns[0],
	    5 * S + 9 * MS);
	assert_int_equal(line_load(line, 5 * S, 1500).due_ns[0],
	    5 * S + 15 * MS);
	line_free(line);
}

static void
a_shaper_before_a_faster_line_sets_the_pace(void **state)
{
	struct line_settings settings = line_plain();
	struct line *line;
	uint64_t due_ns = 0;

	(void)state;
	settings.rate_bps = 1000000000;	/* 12 us */
	settings.shaper.rate_bps = 10000000;	/* 1.2 ms */
	settings.shaper.burst_bytes = 3000;
	line = line_made(&settings);
	assert_int_equal(line_load(line, 0, 1500).due_ns[0], 12000);
	assert_int_equal(line_load(line, 0, 1500).due_ns[0], 24000);
	for (int i = 0; i < 100; i++)
		due_ns = line_load(line, 0, 1500).due_ns[0];
	assert_int_equal(due_ns, 120 * MS + 12000);
	line_free(line);
}

static void
the_emulations_own_limit_has_its_own_cause(void **state)
{
	const struct line_settings settings = megabit();
	struct line *line = line_made(&settings);
	struct line_verdict verdict;
	uint64_t accepted = 0;

	(void)state;
	do {
		verdict = line_load(line, 0, 1500);
		accepted += verdict.accepted;
	} while (verdict.accepted);
	assert_int_equal(verdict.drop, LINE_DROP_MEMORY);
	assert_in_range(accepted, LINE_PACKETS_MAX - 2, LINE_PACKETS_MAX);
	assert_int_equal(line_drain(line, LINE_NOW_MAX_NS), accepted);
	line_free(line);
}

/* 2 Mbit/s of background in packets of 250 B: one a millisecond. */
static void
background_traffic_takes_its_share(void **state)
{
	struct line_settings settings = line_plain();
	struct line *line;
	struct truth_row total;
	uint64_t bytes = 0, took;

	(void)state;
	settings.rate_bps = 5000000;
	settings.queue_bytes = 15000;
	settings.background = (struct background_settings){ 2000000, 250,
		false };
	line = line_made(&settings);
	for (uint64_t t = 0; t < 100 * S; t += 400000)
		line_load(line, t, 500);	/* 10 Mbit/s */
	line_advance(line, 100 * S);
	line_drain(line, 100 * S);
	truth_total(line_truth(line), &total);
	assert_int_equal(total.classes[LINE_CLASS_BACKGROUND].entered.packets,
	    100000);
	bytes = total.classes[LINE_CLASS_LOAD].left.bytes;
	took = total.classes[LINE_CLASS_BACKGROUND].left.bytes;
	/* Together the whole line, but for what is in the queue. */
	assert_in_range(bytes + took, 62500000 - 16000, 62500000 + 16000);
	assert_true(took > 0 && bytes > took);
	line_free(line);
}

/* 1000 B at 3 Mbit/s: 2666666 2/3 ns apart, 3 in 8 ms exactly. */
static void
even_background_does_not_drift(void **state)
{
	const struct background_settings settings = { 3000000, 1000, false };
	struct background background;

	(void)state;
	background_init(&background, &settings, chance_stream(4, 4), 5);
	assert_int_equal(background.next_ns, 2666671);
	for (int i = 1; i < 300000; i++)
		background_step(&background);
	assert_int_equal(background.next_ns, 800 * S + 5);
}

static void
poisson_background_has_its_mean_and_its_variance(void **state)
{
	const struct background_settings settings = { 8000000, 1000, true };
	struct background background;
	uint64_t counts[1000] = { 0 };
	double mean = 0, variance = 0;

	(void)state;
	/* 1000 packets a second over 1000 s, 1000 in each on average. */
	background_init(&background, &settings, chance_stream(4, 4), 0);
	while (background.next_ns < 1000 * S) {
		counts[background.next_ns / S]++;
		background_step(&background);
	}
	for (size_t i = 0; i < 1000; i++)
		mean += (double)counts[i] / 1000;
	for (size_t i = 0; i < 1000; i++)
		variance += pow((double)counts[i] - mean, 2) / 999;
	/* 5 sigma of 10^6 packets, and of a variance out of 1000. */
	assert_true(fabs(mean - 1000) < 5);
	assert_true(fabs(variance - 1000) < 5 * 1000 * sqrt(2.0 / 999));
}

static void
truth_is_kept_by_interval_class_and_cause(void **state)
{
	struct line_settings settings = line_plain();
	const struct truth *truth;
	struct line_verdict verdict;
	struct line *line;

	(void)state;
	settings.propagation_ns = 1;
	settings.mtu_bytes = 1500;
	settings.interval_ns = 10 * MS;
	settings.intervals = 2;
	settings.sample_every = 2;
	line = line_made(&settings);
	truth = line_truth(line);
	line_load(line, 0, 100);
	line_load(line, 10 * MS - 1, 200);	/* leaves in the next one */
	line_offer(line, 10 * MS, 300, LINE_CLASS_CONTROL, &verdict);
	line_offer(line, 10 * MS, 1501, LINE_CLASS_OTHER, &verdict);
	line_load(line, 20 * MS, 400);
	line_load(line, 70 * MS, 500);		/* later than all rows */
	line_drain(line, 80 * MS);
	assert_int_equal(truth->rows[0].classes[LINE_CLASS_LOAD].entered.bytes,
	    300);
	assert_int_equal(truth->rows[0].classes[LINE_CLASS_LOAD].left.bytes,
	    100);
	assert_int_equal(truth->rows[1].classes[LINE_CLASS_LOAD].left.bytes,
	    200);
	assert_int_equal(truth->rows[1].classes[LINE_CLASS_CONTROL].left.bytes,
	    300);
	assert_int_equal(truth->rows[1].classes[LINE_CLASS_OTHER]
	    .dropped[LINE_DROP_MTU].bytes, 1501);
	assert_int_equal(truth->rows[2].classes[LINE_CLASS_LOAD].left.bytes,
	    900);
	/* Numbers 0, 2 and 4 of 0 to 5. */
	assert_int_equal(truth->sample_count, 3);
	assert_int_equal(truth->samples[2].number, 4);
	assert_int_equal(truth->samples[2].due_ns, 20 * MS + 1);
	assert_int_equal(truth->samples[2].entered_ns, 20 * MS);
	line_free(line);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    a_packet_arrives_after_its_last_bit_and_the_way),
		cmocka_unit_test(a_queue_drops_at_the_exact_byte),
		cmocka_unit_test(a_queue_of_time_drops_what_would_wait_longer),
		cmocka_unit_test(a_packet_that_need_not_wait_is_never_refused),
		cmocka_unit_test(packets_above_the_mtu_are_answered_or_vanish),
		cmocka_unit_test(an_outage_begins_and_ends_at_its_edges),
		cmocka_unit_test(a_rate_step_counts_from_the_origin),
		cmocka_unit_test(a_shaper_before_a_faster_line_sets_the_pace),
		cmocka_unit_test(the_emulations_own_limit_has_its_own_cause),
		cmocka_unit_test(background_traffic_takes_its_share),
		cmocka_unit_test(even_background_does_not_drift),
		cmocka_unit_test(
		    poisson_background_has_its_mean_and_its_variance),
		cmocka_unit_test(truth_is_kept_by_interval_class_and_cause),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
