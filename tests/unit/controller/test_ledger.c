/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "judge/ledger.h"
#include "judge_fixture.h"

static const struct ledger_entry *
entry(const struct fixture *f, const char *name)
{
	for (size_t i = 0; i < f->verdict.ledger_count; i++)
		if (f->verdict.ledger[i].direction == DIRECTION_A_TO_B &&
		    strcmp(f->verdict.ledger[i].name, name) == 0)
			return &f->verdict.ledger[i];
	return NULL;
}

/* Make it the ledger of a-to-b alone. */
static void
make(struct fixture *f)
{
	struct median_estimate achieved;
	double values[FIXTURE_TRIALS_MAX];
	struct error err;
	size_t count = 0;
	int64_t sum = 0;

	for (size_t i = 0; i < f->input.trials_count; i++)
		values[count++] =
		    (double)f->trials[i].directions[0].payload_bps;
	assert_int_equal(statistic_median(values, count, 0.95, 0.99,
	    &achieved, &err), 0);
	f->verdict.ledger_count = ledger_make(&f->ceilings[0], f->trials,
	    f->input.trials_count, &achieved, f->verdict.ledger,
	    LEDGER_ENTRIES_MAX);
	assert_true(f->verdict.ledger_count > 0);
	for (size_t i = 0; i < f->verdict.ledger_count; i++)
		sum += f->verdict.ledger[i].bps;
	assert_int_equal(sum, (int64_t)f->ceilings[0].rate_bps[LEVEL_PAYLOAD] -
	    (int64_t)floor(achieved.median));
}

static void
set_tcp(struct trial_run *run, enum tcp_sample_field field, uint64_t value)
{
	run->directions[0].sender.last.value[field] = value;
}

static void
without_evidence_everything_is_unexplained(void **state)
{
	struct fixture *f = *state;

	fixture_add(f, DIRECTION_A_TO_B, UINT64_C(900000000));
	make(f);
	assert_int_equal(f->verdict.ledger_count, 1);
	assert_string_equal(f->verdict.ledger[0].name, "unexplained");
	assert_int_equal(f->verdict.ledger[0].bps, 41482444);
	assert_string_equal(f->verdict.ledger[0].evidence,
	    "no evidence in these trials accounts for it");
}

/* Gigabit Ethernet, 1448 B a segment: 941.482 Mbit/s.  With segments of 1388 B
 * (an MTU of 1440 B) 1388 of 1478 octets: 939.106901 Mbit/s, worked out by
 * hand from the octets of IEEE 802.3; the difference is 2375543 bit/s. */
static void
smaller_segments_cost_what_their_headers_take(void **state)
{
	struct fixture *f = *state;
	struct trial_run *run;

	run = fixture_add(f, DIRECTION_A_TO_B, UINT64_C(930000000));
	set_tcp(run, TCP_SAMPLE_snd_mss_bytes, 1388);
	make(f);
	assert_non_null(entry(f, "segment-size"));
	assert_in_range(entry(f, "segment-size")->bps, 2375543, 2375545);
	assert_string_equal(entry(f, "segment-size")->evidence,
	    "segments of 1388 B were sent where the declared layers and MTU "
	    "give 1448 B (TCP_INFO, 1 trial)");
}

static void
larger_segments_than_declared_are_a_gain(void **state)
{
	struct fixture *f = *state;

	set_tcp(fixture_add(f, DIRECTION_A_TO_B, UINT64_C(941482444)),
	    TCP_SAMPLE_snd_mss_bytes, 8948);
	make(f);
	assert_true(entry(f, "segment-size")->bps < 0);
	assert_true(entry(f, "unexplained")->bps > 0);
}

static void
retransmissions_cost_their_share_of_one_stream_only(void **state)
{
	struct fixture *f = *state;
	struct trial_run *run;

	run = fixture_add(f, DIRECTION_A_TO_B, UINT64_C(900000000));
	run->trial.streams = 1;
	/* 2 % of what was sent: 2 / 98 of the achieved rate, by hand. */
	set_tcp(run, TCP_SAMPLE_bytes_sent, 1000000);
	set_tcp(run, TCP_SAMPLE_bytes_retrans, 20000);
	make(f);
	assert_int_equal(entry(f, "retransmitted")->bps, 18367347);
	assert_int_equal(entry(f, "unexplained")->bps, 41482444 - 18367347);
	run->trial.streams = 2;
	make(f);
	assert_null(entry(f, "retransmitted"));
}

static void
impossible_samples_are_no_evidence(void **state)
{
	struct fixture *f = *state;
	struct trial_run *run;

	run = fixture_add(f, DIRECTION_A_TO_B, UINT64_C(900000000));
	run->trial.streams = 1;
	set_tcp(run, TCP_SAMPLE_bytes_sent, 10);
	set_tcp(run, TCP_SAMPLE_bytes_retrans, 10);
	set_tcp(run, TCP_SAMPLE_snd_mss_bytes, 0);
	make(f);
	assert_int_equal(f->verdict.ledger_count, 1);
	run->directions[0].sender_reported = false;
	make(f);
	assert_int_equal(f->verdict.ledger_count, 1);
}

static void
more_claimed_than_missing_leaves_a_negative_rest(void **state)
{
	struct fixture *f = *state;
	struct trial_run *run;

	run = fixture_add(f, DIRECTION_A_TO_B, FIXTURE_PAYLOAD_BPS);
	run->trial.streams = 1;
	set_tcp(run, TCP_SAMPLE_bytes_sent, 1000);
	set_tcp(run, TCP_SAMPLE_bytes_retrans, 1);
	make(f);
	assert_true(entry(f, "retransmitted")->bps > 0);
	assert_int_equal(entry(f, "unexplained")->bps,
	    -entry(f, "retransmitted")->bps);
	assert_string_equal(entry(f, "unexplained")->evidence,
	    "the causes found claim more than is missing");
}

static void
a_reference_has_no_ledger(void **state)
{
	struct fixture *f = *state;
	struct median_estimate achieved = { .median = 1, .n = 1 };

	fixture_make_host(f, 1000);
	assert_int_equal(ledger_make(&f->ceilings[0], f->trials, 0, &achieved,
	    f->verdict.ledger, LEDGER_ENTRIES_MAX), 0);
}

/* A small generator (Knuth's MMIX constants): the same inputs every time. */
static uint64_t
next_random(uint64_t *seed)
{
	*seed = *seed * UINT64_C(6364136223846793005) +
	    UINT64_C(1442695040888963407);
	return *seed >> 20;
}

static void
every_ledger_adds_up_and_lost_evidence_becomes_unexplained(void **state)
{
	struct fixture *f = *state;
	uint64_t seed = 4;

	for (int round = 0; round < 500; round++) {
		int64_t rest, claimed;

		f->input.trials_count = 0;
		memset(f->trials, 0, sizeof(f->trials));
		for (uint64_t n = 1 + next_random(&seed) % 9; n > 0; n--) {
			struct trial_run *run = fixture_add(f,
			    DIRECTION_A_TO_B, 1 + next_random(&seed) %
			    UINT64_C(1000000000));
			uint64_t sent = next_random(&seed) % 1000000;

			run->trial.streams = 1 + next_random(&seed) % 2;
			set_tcp(run, TCP_SAMPLE_snd_mss_bytes,
			    88 + next_random(&seed) % 9000);
			set_tcp(run, TCP_SAMPLE_bytes_sent, sent);
			set_tcp(run, TCP_SAMPLE_bytes_retrans,
			    next_random(&seed) % 1000);
		}
		make(f);
		rest = entry(f, "unexplained")->bps;
		claimed = entry(f, "segment-size") != NULL
		    ? entry(f, "segment-size")->bps : 0;
		for (size_t i = 0; i < f->input.trials_count; i++)
			set_tcp(&f->trials[i], TCP_SAMPLE_snd_mss_bytes,
			    UNKNOWN_U64);
		make(f);
		assert_null(entry(f, "segment-size"));
		assert_int_equal(entry(f, "unexplained")->bps, rest + claimed);
	}
}

#define TEST(f)								\
	cmocka_unit_test_setup_teardown(f, fixture_set_up, fixture_tear_down)

int
main(void)
{
	const struct CMUnitTest tests[] = {
		TEST(without_evidence_everything_is_unexplained),
		TEST(smaller_segments_cost_what_their_headers_take),
		TEST(larger_segments_than_declared_are_a_gain),
		TEST(retransmissions_cost_their_share_of_one_stream_only),
		TEST(impossible_samples_are_no_evidence),
		TEST(more_claimed_than_missing_leaves_a_negative_rest),
		TEST(a_reference_has_no_ledger),
		TEST(
		    every_ledger_adds_up_and_lost_evidence_becomes_unexplained),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
