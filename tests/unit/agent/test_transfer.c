/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Real transfers over loopback, both ends in this process on one loop.  Bounds
 * are generous: nothing here judges speed. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "agent/transfer_fixture.h"

static void
run_pair(const struct trial *trial, unsigned workers, struct side *sender,
    struct side *receiver)
{
	struct event_base *base = event_base_new();
	int to[TRIAL_STREAMS_MAX], from[TRIAL_STREAMS_MAX];
	unsigned open = 2;

	assert_non_null(base);
	connect_pairs(trial->streams, to, from);
	sender->base = receiver->base = base;
	sender->open = receiver->open = &open;
	start_side(receiver, trial, false, from, workers);
	start_side(sender, trial, true, to, workers);
	run_loop(base);
	assert_int_equal(sender->done, 1);
	assert_int_equal(receiver->done, 1);
	/* everything was closed */
	for (uint64_t i = 0; i < trial->streams; i++) {
		assert_int_equal(fcntl(to[i], F_GETFD), -1);
		assert_int_equal(fcntl(from[i], F_GETFD), -1);
	}
	event_base_free(base);
}

static void
check_receiver(const struct side *side, const struct trial *trial)
{
	uint64_t rows = (trial->settle_ns + trial->duration_ns) /
	    trial->row_ns;
	const struct measurement *totals = &side->totals;

	assert_int_equal(side->end, MEASUREMENT_COMPLETE);
	assert_int_equal(side->rows, rows);
	assert_int_equal(totals->rows, rows);
	assert_int_equal(totals->stream_rows, side->stream_rows);
	assert_int_equal(totals->bytes, side->counted_bytes);
	assert_int_equal(totals->settle_ns, trial->settle_ns);
	assert_int_equal(totals->duration_ns, trial->duration_ns);
	assert_int_equal(totals->elapsed_ns, rows * trial->row_ns);
	assert_int_equal(totals->cpu_ns, side->cpu_ns);
	assert_int_equal(totals->streams, trial->streams);
	assert_int_equal(totals->end, MEASUREMENT_COMPLETE);
	assert_true(totals->is_receiver);
	assert_true(totals->bytes > 0);
	assert_in_range(totals->zero_ns, 0, GUARD_S * NS_PER_S);
	/* a thread cannot have more than one core; clocks are a little apart */
	assert_in_range(totals->cpu_busiest_ratio_ppm, 1, 1500000);
	/* what the kernel counted holds what we counted */
	assert_true(totals->last.value[TCP_SAMPLE_bytes_received] != 0);
	assert_true(totals->congestion_control[0] != '\0');
}

static void
check_sender(const struct side *side, const struct side *receiver)
{
	const struct measurement *totals = &side->totals;

	assert_int_equal(side->end, MEASUREMENT_COMPLETE);
	assert_false(totals->is_receiver);
	assert_int_equal(totals->rows, side->rows);
	assert_true(totals->bytes >= side->bytes);
	/* nothing is received that was not handed over */
	assert_true(totals->bytes >= receiver->counted_bytes);
	assert_true(totals->last.value[TCP_SAMPLE_bytes_sent] > 0);
}

static void
one_stream_completes(void **state)
{
	struct trial trial = short_trial(1);
	struct side sender = { 0 }, receiver = { 0 };

	(void)state;
	run_pair(&trial, 0, &sender, &receiver);
	check_receiver(&receiver, &trial);
	check_sender(&sender, &receiver);
	assert_int_equal(receiver.streams_sampled, 1);
	/* one stream: its rows are the rows */
	assert_int_equal(receiver.stream_bytes, receiver.bytes);
	assert_int_equal(sender.stream_bytes, sender.bytes);
	/* the kernel's own count: at least the rows, for it has the ends too */
	assert_true(receiver.totals.last.value[TCP_SAMPLE_bytes_received] >=
	    receiver.bytes);
}

static void
sixteen_streams_complete_and_eight_are_sampled(void **state)
{
	struct trial trial = short_trial(16);
	struct side sender = { 0 }, receiver = { 0 };

	(void)state;
	run_pair(&trial, 3, &sender, &receiver);
	check_receiver(&receiver, &trial);
	check_sender(&sender, &receiver);
	assert_int_equal(receiver.streams_sampled, 8);
	assert_true(receiver.stream_bytes <= receiver.bytes);
}

static void
eight_streams_are_all_sampled_by_four_workers(void **state)
{
	struct trial trial = short_trial(8);
	struct side sender = { 0 }, receiver = { 0 };

	(void)state;
	run_pair(&trial, 4, &sender, &receiver);
	check_receiver(&receiver, &trial);
	assert_int_equal(receiver.streams_sampled, 8);
	assert_int_equal(receiver.stream_bytes, receiver.bytes);
}

static void
two_hundred_and_fifty_six_streams_complete(void **state)
{
	struct trial trial = short_trial(256);
	struct side sender = { 0 }, receiver = { 0 };

	(void)state;
	trial.row_ns = 100 * MS;
	run_pair(&trial, 2, &sender, &receiver);
	check_receiver(&receiver, &trial);
	check_sender(&sender, &receiver);
}

static void
settle_extends_until_two_seconds_agree(void **state)
{
	struct trial trial = short_trial(2);
	struct side sender = { 0 }, receiver = { 0 };

	(void)state;
	trial.settle_extends = true;
	/* far below what any host carries, so that the rate is even */
	trial.rate_limit_bps = 80000000;
	run_pair(&trial, 0, &sender, &receiver);
	assert_int_equal(receiver.end, MEASUREMENT_COMPLETE);
	assert_in_range(receiver.totals.settle_ns, 2000 * MS,
	    TRIAL_SETTLE_MAX_NS);
	assert_true(receiver.totals.settled ||
	    receiver.totals.settle_ns == TRIAL_SETTLE_MAX_NS);
	assert_int_equal(receiver.totals.bytes, receiver.counted_bytes);
}

static void
a_rate_limit_holds_the_sender_back(void **state)
{
	struct trial trial = short_trial(2);
	struct side sender = { 0 }, receiver = { 0 };

	(void)state;
	trial.rate_limit_bps = 80000000;
	run_pair(&trial, 0, &sender, &receiver);
	check_receiver(&receiver, &trial);
	/* 200 ms of it are 2 000 000 B; bursts and headers aside */
	assert_in_range(receiver.totals.bytes, 1, 4000000);
}

static void
a_receiver_that_is_stopped_says_so_and_its_sender_loses_it(void **state)
{
	struct trial trial = short_trial(4);
	struct side sender = { 0 }, receiver = { .stop_at_row = 7 };

	(void)state;
	trial.duration_ns = GUARD_S / 2 * NS_PER_S;
	run_pair(&trial, 2, &sender, &receiver);
	assert_int_equal(receiver.end, MEASUREMENT_STOPPED);
	assert_int_equal(receiver.why, ERROR_NONE);
	assert_in_range(receiver.rows, 7, 700);
	assert_int_equal(receiver.totals.bytes, receiver.counted_bytes);
	assert_int_equal(sender.end, MEASUREMENT_PEER_LOST);
	assert_int_equal(sender.why, ERROR_PEER);
}

static void
a_sender_that_is_stopped_leaves_the_rows_so_far(void **state)
{
	struct trial trial = short_trial(4);
	struct side sender = { .stop_at_row = 7 }, receiver = { 0 };

	(void)state;
	trial.duration_ns = GUARD_S / 2 * NS_PER_S;
	run_pair(&trial, 2, &sender, &receiver);
	assert_int_equal(sender.end, MEASUREMENT_STOPPED);
	assert_int_equal(receiver.end, MEASUREMENT_PEER_LOST);
	assert_int_equal(receiver.why, ERROR_PEER);
	assert_in_range(receiver.rows, 1, 700);
	assert_int_equal(receiver.totals.rows, receiver.rows);
	assert_int_equal(receiver.totals.bytes, receiver.counted_bytes);
	assert_int_equal(receiver.totals.duration_ns, receiver.rows > 5 ?
	    (receiver.rows - 5) * trial.row_ns : 0);
}

static void
free_right_after_start_joins(void **state)
{
	struct trial trial = short_trial(16);
	struct side sender = { 0 }, receiver = { 0 };
	int to[16], from[16];

	(void)state;
	sender.base = receiver.base = event_base_new();
	connect_pairs(16, to, from);
	start_side(&receiver, &trial, false, from, 0);
	start_side(&sender, &trial, true, to, 0);
	transfer_free(sender.transfer);
	transfer_free(receiver.transfer);
	transfer_free(NULL);
	(void)event_base_loop(sender.base, EVLOOP_NONBLOCK);
	assert_int_equal(sender.done + receiver.done, 0);
	assert_int_equal(fcntl(to[15], F_GETFD), -1);
	assert_int_equal(fcntl(from[0], F_GETFD), -1);
	event_base_free(sender.base);
}

static void
phases_have_names(void **state)
{
	(void)state;
	assert_string_equal(transfer_phase_name(TRANSFER_WAITING), "waiting");
	assert_string_equal(transfer_phase_name(TRANSFER_SETTLING),
	    "settling");
	assert_string_equal(transfer_phase_name(TRANSFER_COUNTING),
	    "counting");
	assert_string_equal(transfer_phase_name(TRANSFER_CLOSED), "closed");
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(one_stream_completes),
		cmocka_unit_test(
		    sixteen_streams_complete_and_eight_are_sampled),
		cmocka_unit_test(eight_streams_are_all_sampled_by_four_workers),
		cmocka_unit_test(two_hundred_and_fifty_six_streams_complete),
		cmocka_unit_test(settle_extends_until_two_seconds_agree),
		cmocka_unit_test(a_rate_limit_holds_the_sender_back),
		cmocka_unit_test(
		    a_receiver_that_is_stopped_says_so_and_its_sender_loses_it),
		cmocka_unit_test(
		    a_sender_that_is_stopped_leaves_the_rows_so_far),
		cmocka_unit_test(free_right_after_start_joins),
		cmocka_unit_test(phases_have_names),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
