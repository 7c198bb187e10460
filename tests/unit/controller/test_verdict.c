/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "judge_fixture.h"

/* Judge, and hold what must be true of every verdict. */
static void
judge(struct fixture *f)
{
	struct verdict *v = &f->verdict;
	int64_t sum[DIRECTIONS_SINGLE] = { 0, 0 };

	verdict_judge(&f->input, v);
	assert_int_equal(v->outcome == OUTCOME_VOID,
	    verdict_void_reason(v) != NULL);
	for (size_t i = 0; i < v->ledger_count; i++)
		sum[v->ledger[i].direction] += v->ledger[i].bps;
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++)
		if (v->has_achieved[d] && !f->ceilings[d].reference)
			assert_int_equal(sum[d],
			    (int64_t)f->ceilings[d].rate_bps[LEVEL_PAYLOAD] -
			    (int64_t)floor(v->achieved_bps[d].median));
}

static void
assert_void(struct fixture *f, const char *code, const char *part)
{
	const struct reason *reason;

	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_VOID);
	reason = fixture_reason(&f->verdict, code);
	assert_non_null(reason);
	assert_true(reason->voids);
	if (strstr(reason->text, part) == NULL)
		fail_msg("\"%s\" lacks \"%s\"", reason->text, part);
}

static void
assert_note(struct fixture *f, const char *code, const char *part)
{
	const struct reason *reason;

	judge(f);
	reason = fixture_reason(&f->verdict, code);
	assert_non_null(reason);
	assert_false(reason->voids);
	if (strstr(reason->text, part) == NULL)
		fail_msg("\"%s\" lacks \"%s\"", reason->text, part);
}

static void
outcomes_have_the_names_and_statuses_of_the_design(void **state)
{
	(void)state;
	assert_string_equal(outcome_name(OUTCOME_MEETS), "meets");
	assert_string_equal(outcome_name(OUTCOME_FALLS_SHORT), "falls-short");
	assert_string_equal(outcome_name(OUTCOME_UNDECIDED), "undecided");
	assert_string_equal(outcome_name(OUTCOME_VOID), "void");
	assert_int_equal(outcome_exit_status(OUTCOME_MEETS), 0);
	assert_int_equal(outcome_exit_status(OUTCOME_FALLS_SHORT), 1);
	assert_int_equal(outcome_exit_status(OUTCOME_UNDECIDED), 2);
	assert_int_equal(outcome_exit_status(OUTCOME_VOID), 3);
}

static void
seven_good_trials_a_direction_meet(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.995, 0.99);
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
	assert_int_equal(f->verdict.criteria_count, 2);
	assert_int_equal(f->verdict.reasons_count, 0);
	assert_true(fabs(f->verdict.attained[DIRECTION_A_TO_B] - 0.995) < 1e-6);
	assert_true(fabs(f->verdict.criteria[1].found - 0.99) < 1e-6);
	assert_true(f->verdict.criteria[0].judged);
	assert_string_equal(f->verdict.criteria[0].name, "throughput");
}

static void
six_good_trials_decide_nothing(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 6, 0.995, 0.99);
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_UNDECIDED);
	assert_string_equal(f->verdict.criteria[0].note,
	    "6 valid trials, the rule needs at least 7");
}

static void
one_direction_below_makes_the_whole_fall_short(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.995, 0.90);
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_FALLS_SHORT);
	assert_int_equal(f->verdict.criteria[0].outcome, OUTCOME_MEETS);
	assert_int_equal(f->verdict.criteria[1].outcome, OUTCOME_FALLS_SHORT);
}

static void
bounds_on_both_sides_are_undecided(void **state)
{
	struct fixture *f = *state;

	/* One trial of seven below: the lowest is the bound for n = 7. */
	fixture_fill(f, 6, 0.995, 0.995);
	fixture_add(f, DIRECTION_A_TO_B, FIXTURE_PAYLOAD_BPS / 2);
	fixture_add(f, DIRECTION_B_TO_A, FIXTURE_PAYLOAD_BPS - 1000000);
	f->input.trials_planned = f->input.trials_count;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_UNDECIDED);
	assert_int_equal(f->verdict.criteria[0].outcome, OUTCOME_UNDECIDED);
	assert_int_equal(f->verdict.criteria[1].outcome, OUTCOME_MEETS);
}

/* Seven equal trials at the edge: 97 % less 100 ppm of 941482444 bit/s is
 * 913237970.68 - 91323.80 = 913146646.88 bit/s, by hand. */
static void
the_requirement_gives_way_by_the_tolerance_of_the_clock(void **state)
{
	static const struct {
		uint64_t bps;
		enum outcome outcome;
	} rows[] = {
		{ UINT64_C(913146647), OUTCOME_MEETS },
		{ UINT64_C(913146646), OUTCOME_FALLS_SHORT },
	};
	struct fixture *f = *state;

	for (size_t i = 0; i < 2; i++) {
		f->input.trials_count = 0;
		memset(f->trials, 0, sizeof(f->trials));
		for (int n = 0; n < 7; n++) {
			fixture_add(f, DIRECTION_A_TO_B, rows[i].bps);
			fixture_add(f, DIRECTION_B_TO_A, FIXTURE_PAYLOAD_BPS);
		}
		f->input.trials_planned = f->input.trials_count;
		judge(f);
		assert_int_equal(f->verdict.outcome, rows[i].outcome);
	}
}

static void
no_trial_at_all_is_void(void **state)
{
	struct fixture *f = *state;

	f->input.trials_planned = 0;
	assert_void(f, "no-valid-trial", "a-to-b has no valid trial");
	assert_true(isnan(f->verdict.attained[0]));
	assert_int_equal(f->verdict.ledger_count, 0);
}

static void
an_interrupt_is_void_and_keeps_what_was_measured(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 2, 0.995, 0.99);
	f->input.trials_planned = 14;
	f->input.interrupted = true;
	assert_void(f, "interrupted", "4 of 14 trials");
	assert_true(f->verdict.has_achieved[DIRECTION_B_TO_A]);
	assert_null(fixture_reason(&f->verdict, "trials-missing"));
}

static void
a_failed_trial_is_void_and_says_which_and_why(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.995, 0.99);
	f->trials[3].failed = true;
	(void)error_set(&f->trials[3].why, ERROR_UNREACHABLE,
	    "the agent at end b vanished");
	assert_void(f, "trial-failed", "1 of 14 trials failed; trial 4: the "
	    "agent at end b vanished");
	assert_int_equal(f->verdict.achieved_bps[DIRECTION_B_TO_A].n, 6);
}

static void
a_window_that_did_not_close_is_void(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.995, 0.99);
	f->trials[0].directions[0].receiver.end = MEASUREMENT_PEER_LOST;
	assert_void(f, "trial-failed", "trial 1: the receiver's window");
}

static void
trials_that_were_not_run_are_void(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.995, 0.99);
	f->input.trials_planned = 15;
	assert_void(f, "trials-missing", "14 of 15");
}

static void
a_host_slower_than_the_ceiling_is_void(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.995, 0.99);
	f->input.reference_bps[END_B] = FIXTURE_PAYLOAD_BPS - 1;
	assert_void(f, "host-limit", "the host at end b moves 941.482 Mbit/s");
	f->input.reference_bps[END_B] = FIXTURE_PAYLOAD_BPS;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
	f->input.reference_bps[END_B] = UNKNOWN_U64;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
}

static void
a_policy_below_the_ceiling_is_void(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.5, 0.99);
	f->input.rate_limit_bps[END_A] = UINT64_C(500000000);
	assert_void(f, "rate-limit", "end a allows 500 Mbit/s");
	f->input.rate_limit_bps[END_A] = FIXTURE_PAYLOAD_BPS;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_FALLS_SHORT);
}

/* 941482444 (1 + 100 ppm) = 941576592 bit/s, by hand. */
static void
a_rate_above_the_ceiling_beyond_the_tolerance_is_void(void **state)
{
	struct fixture *f = *state;

	for (int n = 0; n < 7; n++) {
		fixture_add(f, DIRECTION_A_TO_B, UINT64_C(941576592));
		fixture_add(f, DIRECTION_B_TO_A, UINT64_C(941576592));
	}
	f->input.trials_planned = 14;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
	for (size_t i = 0; i < 14; i += 2)
		f->trials[i].directions[DIRECTION_A_TO_B].payload_bps += 10;
	assert_void(f, "above-ceiling", "counted-at");
	assert_non_null(strstr(verdict_void_reason(&f->verdict)->text,
	    "token bucket"));
	assert_non_null(strstr(verdict_void_reason(&f->verdict)->text,
	    "start of the clock"));
	/* An estimate may be too low itself: that is said and voids nothing. */
	f->ceilings[DIRECTION_A_TO_B].accuracy = ACCURACY_MODEL;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
	assert_non_null(fixture_reason(&f->verdict, "above-estimate"));
	f->ceilings[DIRECTION_A_TO_B].accuracy = ACCURACY_EXACT;
	/* A bucket of 6 B adds 8 * 6 / 3 s = 16 bit/s. */
	f->ceilings[DIRECTION_A_TO_B].burst_bytes = 6;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
}

static void
a_busy_worker_excuses_the_circuit_only_where_it_fell_short(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.90, 0.99);
	f->trials[0].directions[0].sender.cpu_busiest_ratio_ppm = 970000;
	f->trials[2].directions[0].receiver.cpu_busiest_ratio_ppm = 990000;
	assert_void(f, "sender-cpu", "in 1 of 7 a-to-b trials");
	assert_non_null(fixture_reason(&f->verdict, "receiver-cpu"));
	f->trials[0].directions[0].sender.cpu_busiest_ratio_ppm = 969999;
	f->trials[2].directions[0].receiver.cpu_busiest_ratio_ppm =
	    UNKNOWN_U64;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_FALLS_SHORT);
	/* b-to-a meets: its worker may be as busy as it likes. */
	f->trials[1].directions[1].sender.cpu_busiest_ratio_ppm = 1000000;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_FALLS_SHORT);
}

static void
load_that_left_elsewhere_is_void(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.995, 0.99);
	(void)snprintf(f->circuit.ends[END_A].interface, 16, "eth1");
	f->trials[0].directions[0].interface_bytes = 70000;
	assert_void(f, "load-elsewhere", "interface eth1 at end a");
	f->trials[0].directions[0].interface_bytes = UNKNOWN_U64;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
}

static void
notes_stand_beside_the_outcome_and_change_nothing(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.995, 0.99);
	(void)snprintf(f->hosts[END_A].default_congestion_control, 16, "bbr");
	f->trials[0].directions[0].receiver.settled = false;
	f->trials[0].directions[0].sender.last
	    .value[TCP_SAMPLE_snd_mss_bytes] = 1408;
	f->trials[1].directions[1].sender.steal_ns = 400 * NS_PER_MS;
	assert_note(f, "congestion-control", "a-to-b used congestion control "
	    "cubic; the default of the host at end a is bbr");
	assert_note(f, "not-settled", "in 1 of 7 a-to-b trials");
	assert_note(f, "segment-size", "segments of 1408 B; the declared "
	    "layers and MTU give 1448 B");
	assert_note(f, "stolen-time", "b-to-a: up to 10.0 % of a trial's time "
	    "was stolen from the machine at end b");
	f->trials[3].directions[1].receiver.steal_ns = 60 * NS_PER_MS;
	assert_note(f, "stolen-time", "b-to-a: up to 1.5 % of a trial's time "
	    "was stolen from the machine at end a, 10.0 % at end b");
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
	f->trials[0].trial.settle_extends = false;
	judge(f);
	assert_null(fixture_reason(&f->verdict, "not-settled"));
}

static void
trials_of_both_directions_are_reported_and_not_judged(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.995, 0.99);
	fixture_add(f, DIRECTION_BOTH, FIXTURE_PAYLOAD_BPS / 3);
	f->input.trials_planned = 15;
	f->circuit.plan.directions = 7;
	assert_note(f, "both-reported", "reported, not judged");
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
	assert_int_equal(f->verdict.achieved_bps[0].n, 7);
}

static void
declared_criteria_without_a_trial_of_their_kind_are_not_judged(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.995, 0.99);
	f->circuit.criteria.loss_ratio[DIRECTION_A_TO_B] = 0.001;
	f->circuit.criteria.delay_ns[DIRECTION_B_TO_A] = 20000000;
	f->circuit.criteria.single_stream_ratio[DIRECTION_A_TO_B] = 0.9;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
	assert_int_equal(f->verdict.criteria_count, 5);
	assert_string_equal(f->verdict.criteria[2].name, "single-stream");
	assert_false(f->verdict.criteria[2].judged);
	assert_string_equal(f->verdict.criteria[3].name, "loss");
	assert_string_equal(f->verdict.criteria[3].note,
	    "not judged: no trial of this kind was run");
	assert_false(f->verdict.criteria[3].at_least);
	assert_string_equal(f->verdict.criteria[4].name, "delay");
	assert_int_equal(f->verdict.criteria[4].direction, DIRECTION_B_TO_A);
	assert_true(f->verdict.criteria[4].is_time);
	assert_true(f->verdict.criteria[4].required == 20000000);
	assert_true(isnan(f->verdict.criteria[4].found));
}

static void
one_stream_is_judged_where_all_trials_had_one(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.98, 0.99);
	f->circuit.criteria.single_stream_ratio[DIRECTION_A_TO_B] = 0.985;
	for (size_t i = 0; i < f->input.trials_count; i++)
		f->trials[i].trial.streams = 1;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_FALLS_SHORT);
	assert_true(f->verdict.criteria[2].judged);
	assert_int_equal(f->verdict.criteria[2].outcome, OUTCOME_FALLS_SHORT);
}

static void
a_direction_that_was_not_planned_is_not_missed(void **state)
{
	struct fixture *f = *state;

	f->circuit.plan.directions = 1;
	for (int n = 0; n < 7; n++)
		fixture_add(f, DIRECTION_A_TO_B, FIXTURE_PAYLOAD_BPS);
	f->input.trials_planned = 7;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
	assert_false(f->verdict.criteria[1].judged);
}

static void
a_circuit_with_nothing_to_judge_is_undecided(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.995, 0.99);
	f->circuit.criteria.throughput_ratio[0] = NAN;
	f->circuit.criteria.throughput_ratio[1] = NAN;
	assert_note(f, "nothing-judged", "no criterion was judged");
	assert_int_equal(f->verdict.outcome, OUTCOME_UNDECIDED);
}

static void
a_sound_reference_meets_without_criteria_and_has_no_ledger(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 3, 0.9, 0.8);
	fixture_make_host(f, FIXTURE_PAYLOAD_BPS);
	f->input.reference_bps[END_A] = FIXTURE_PAYLOAD_BPS / 2;
	f->trials[0].directions[0].sender.cpu_busiest_ratio_ppm = 1000000;
	judge(f);
	assert_int_equal(f->verdict.reasons_count, 0);
	assert_int_equal(f->verdict.outcome, OUTCOME_MEETS);
	assert_int_equal(f->verdict.ledger_count, 0);
	/* Against the larger of the two references. */
	assert_true(fabs(f->verdict.attained[0] - 0.9) < 1e-6);
	f->input.reference_bps[END_A] = UNKNOWN_U64;
	f->input.reference_bps[END_B] = UNKNOWN_U64;
	assert_void(f, "no-reference", "not measured");
	assert_true(isnan(f->verdict.attained[0]));
}

static void
a_reference_is_judged_where_a_criterion_is_declared(void **state)
{
	struct fixture *f = *state;

	fixture_fill(f, 7, 0.9, 0.8);
	fixture_make_host(f, FIXTURE_PAYLOAD_BPS);
	f->circuit.criteria.throughput_ratio[0] = 0.85;
	f->circuit.criteria.throughput_ratio[1] = 0.85;
	judge(f);
	assert_int_equal(f->verdict.outcome, OUTCOME_FALLS_SHORT);
	assert_int_equal(f->verdict.criteria[0].outcome, OUTCOME_MEETS);
}

static void
reasons_beyond_the_last_place_still_void(void **state)
{
	struct verdict v = { .outcome = OUTCOME_MEETS };

	(void)state;
	for (int i = 0; i < REASONS_MAX; i++)
		verdict_add_note(&v, "note", "%d", i);
	verdict_add_reason(&v, "late", "too many");
	assert_int_equal(v.reasons_count, REASONS_MAX);
	assert_int_equal(v.outcome, OUTCOME_VOID);
}

#define TEST(f)								\
	cmocka_unit_test_setup_teardown(f, fixture_set_up, fixture_tear_down)

int
main(void)
{
	const struct CMUnitTest tests[] = {
		TEST(outcomes_have_the_names_and_statuses_of_the_design),
		TEST(seven_good_trials_a_direction_meet),
		TEST(six_good_trials_decide_nothing),
		TEST(one_direction_below_makes_the_whole_fall_short),
		TEST(bounds_on_both_sides_are_undecided),
		TEST(the_requirement_gives_way_by_the_tolerance_of_the_clock),
		TEST(no_trial_at_all_is_void),
		TEST(an_interrupt_is_void_and_keeps_what_was_measured),
		TEST(a_failed_trial_is_void_and_says_which_and_why),
		TEST(a_window_that_did_not_close_is_void),
		TEST(trials_that_were_not_run_are_void),
		TEST(a_host_slower_than_the_ceiling_is_void),
		TEST(a_policy_below_the_ceiling_is_void),
		TEST(
		    a_rate_above_the_ceiling_beyond_the_tolerance_is_void),
		TEST(
		    a_busy_worker_excuses_the_circuit_only_where_it_fell_short),
		TEST(load_that_left_elsewhere_is_void),
		TEST(notes_stand_beside_the_outcome_and_change_nothing),
		TEST(trials_of_both_directions_are_reported_and_not_judged),
		TEST(
	    declared_criteria_without_a_trial_of_their_kind_are_not_judged),
		TEST(one_stream_is_judged_where_all_trials_had_one),
		TEST(a_direction_that_was_not_planned_is_not_missed),
		TEST(a_circuit_with_nothing_to_judge_is_undecided),
		TEST(
		    a_sound_reference_meets_without_criteria_and_has_no_ledger),
		TEST(a_reference_is_judged_where_a_criterion_is_declared),
		TEST(reasons_beyond_the_last_place_still_void),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
