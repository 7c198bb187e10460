/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Whatever the settings, every packet is accounted for exactly once. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdlib.h>

#include "line_fixture.h"
#include "seeded.h"

#define LINES 120
#define PACKETS 3000

static bool
one_in(uint64_t *seed, uint64_t n)
{
	return seeded_between(seed, 1, n) == 1;
}

static double
some_ratio(uint64_t *seed)
{
	return one_in(seed, 10) ? 1 :
	    (double)seeded_between(seed, 0, 1000) / 4000;
}

static struct octets
some_octets(uint64_t *seed)
{
	return (struct octets){ seeded_between(seed, 0, 9000),
		seeded_between(seed, 1, 300), seeded_between(seed, 0, 100) };
}

static void
randomise_line(struct line_settings *s, uint64_t *seed)
{
	static const uint64_t rates_bps[] = { 64000, 1536000, 10000000,
		99999989, 1000000000, UINT64_C(10000000000) };

	if (one_in(seed, 2))
		s->rate_bps = rates_bps[seeded_between(seed, 0, 5)];
	s->octets = some_octets(seed);
	for (size_t i = 0; s->rate_bps > 0 && i < 5 && one_in(seed, 2); i++)
		s->steps[s->step_count++] = (struct serial_step){
			(i + 1) * seeded_between(seed, 90000000, 100000000),
			rates_bps[seeded_between(seed, 0, 5)] };
	if (one_in(seed, 3))
		s->shaper = (struct bucket_settings){
			rates_bps[seeded_between(seed, 1, 5)],
			seeded_between(seed, 0, 20000), some_octets(seed) };
	if (one_in(seed, 3))
		s->policer = (struct bucket_settings){
			rates_bps[seeded_between(seed, 1, 5)],
			seeded_between(seed, 0, 20000), some_octets(seed) };
	if (one_in(seed, 2))
		s->queue_bytes = seeded_between(seed, 1, 100000);
	if (one_in(seed, 3))
		s->queue_ns = seeded_between(seed, 1, 100000000);
	if ((s->rate_bps > 0 || s->shaper.rate_bps > 0) && one_in(seed, 2))
		s->background = (struct background_settings){
			seeded_between(seed, 100000, 20000000),
			seeded_between(seed, 40, 1500), one_in(seed, 2) };
}

static void
randomise_losses(struct line_settings *s, uint64_t *seed)
{
	if (one_in(seed, 3))
		s->mtu_bytes = seeded_between(seed, 500, 1500);
	s->mtu_answer = one_in(seed, 2);
	if (one_in(seed, 2))
		s->loss_ratio = some_ratio(seed);
	if (one_in(seed, 2))
		s->bursts = (struct bursts_settings){ some_ratio(seed),
			some_ratio(seed) * 0.9 + 0.001,
			some_ratio(seed), some_ratio(seed) };
	for (size_t i = 0; i < 4 && one_in(seed, 2); i++)
		s->outages[s->outage_count++] = (struct line_outage){
			i * 200000000 + seeded_between(seed, 0, 90000000),
			i * 200000000 + seeded_between(seed, 90000001,
			    200000000) };
}

static void
randomise_delays(struct line_settings *s, uint64_t *seed)
{
	s->propagation_ns = seeded_between(seed, 0, 20000000);
	if (one_in(seed, 2))
		s->variation = (struct variation_settings){
			(enum variation_kind)seeded_between(seed, 1, 3),
			seeded_between(seed, 1, 5000000),
			some_ratio(seed) * 0.9, one_in(seed, 2) };
	if (one_in(seed, 2))
		s->reordering = (struct line_reordering){ some_ratio(seed),
			seeded_between(seed, 0, LINE_HELD_MAX),
			seeded_between(seed, 1, 50000000) };
	if (one_in(seed, 2))
		s->duplication = (struct line_duplication){ some_ratio(seed),
			seeded_between(seed, 0, 5000000) };
	s->interval_ns = seeded_between(seed, 1000000, 300000000);
	s->intervals = seeded_between(seed, 1, 50);
	s->sample_every = seeded_between(seed, 0, 20);
}

/* What the driver's side has seen. */
struct seen {
	struct truth_counts classes[LINE_CLASSES];
	uint64_t verdicts, deliveries, last_ns;
	uint8_t copies[PACKETS];	/* still to come, by number */
};

static void
saw(struct truth_count *count, uint32_t bytes)
{
	count->packets++;
	count->bytes += bytes;
}

static void
fetch(struct line *line, uint64_t now_ns, struct seen *seen)
{
	struct line_delivery delivery;
	const struct truth_sample *packet = &delivery.packet;

	while (line_take(line, now_ns, &delivery)) {
		assert_true(packet->due_ns >= packet->entered_ns);
		assert_true(packet->due_ns <= now_ns);
		assert_true(packet->due_ns >= seen->last_ns);
		seen->last_ns = packet->due_ns;
		assert_int_not_equal(seen->copies[packet->number], 0);
		seen->copies[packet->number]--;
		saw(&seen->classes[packet->class].left, packet->bytes);
		if (delivery.copy)
			saw(&seen->classes[packet->class].duplicated,
			    packet->bytes);
	}
}

static void
offer(struct line *line, uint64_t now_ns, uint64_t *seed, struct seen *seen)
{
	uint32_t bytes = (uint32_t)seeded_between(seed, 20, 1600);
	enum line_class class = (enum line_class)seeded_between(seed, 0, 2);
	struct line_verdict verdict;

	line_offer(line, now_ns, bytes, class, &verdict);
	saw(&seen->classes[class].entered, bytes);
	if (!verdict.accepted) {
		assert_in_range(verdict.drop, 0, LINE_DROPS - 1);
		saw(&seen->classes[class].dropped[verdict.drop], bytes);
		return;
	}
	assert_in_range(verdict.copies, 1, 2);
	for (unsigned i = 0; i < verdict.copies; i++) {
		assert_true(verdict.due_ns[i] >= now_ns);
		assert_in_range(verdict.handles[i], 0, LINE_PACKETS_MAX - 1);
	}
	seen->copies[verdict.number] = (uint8_t)verdict.copies;
}

static void
compare(const struct line *line, const struct seen *seen)
{
	struct truth_row total;
	struct truth_counts *counts;
	uint64_t dropped;

	truth_total(line_truth(line), &total);
	for (size_t i = 0; i < LINE_CLASSES; i++) {
		counts = &total.classes[i];
		dropped = truth_dropped_all(counts).packets;
		assert_int_equal(counts->entered.packets +
		    counts->duplicated.packets,
		    counts->left.packets + dropped);
		assert_int_equal(counts->entered.bytes +
		    counts->duplicated.bytes, counts->left.bytes +
		    truth_dropped_all(counts).bytes);
		if (i == LINE_CLASS_BACKGROUND)
			continue;
		counts->reordered = (struct truth_count){ 0, 0 };
		assert_memory_equal(counts, &seen->classes[i],
		    sizeof(*counts));
	}
}

static void
every_packet_is_accounted_for_exactly_once(void **state)
{
	uint64_t seed = 20261201, now_ns;
	struct seen *seen = malloc(sizeof(*seen));

	(void)state;
	assert_non_null(seen);
	for (int i = 0; i < LINES; i++) {
		struct line_settings settings = line_plain();
		struct line *line;

		*seen = (struct seen){ 0 };
		settings.seed = seeded_u64(&seed);
		randomise_line(&settings, &seed);
		randomise_losses(&settings, &seed);
		randomise_delays(&settings, &seed);
		line = line_made(&settings);
		now_ns = 0;
		for (int n = 0; n < PACKETS; n++) {
			offer(line, now_ns, &seed, seen);
			if (one_in(&seed, 2))
				fetch(line, now_ns, seen);
			now_ns += one_in(&seed, 3) ? 0 :
			    seeded_between(&seed, 0, 500000);
		}
		fetch(line, LINE_NOW_MAX_NS, seen);
		assert_true(line_next_due_ns(line) == LINE_NEVER_NS);
		assert_int_equal(line_pending(line), 0);
		assert_int_equal(line_pending_copies(line), 0);
		for (size_t n = 0; n < PACKETS; n++)
			assert_int_equal(seen->copies[n], 0);
		compare(line, seen);
		line_free(line);
	}
	free(seen);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(every_packet_is_accounted_for_exactly_once),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
