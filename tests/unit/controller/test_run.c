/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <openssl/evp.h>

#include "conduct/run.h"

#define MS UINT64_C(1000000)
#define ROW_NS (100 * MS)
#define S UINT64_C(1000000000)

/* One trial, and the digests that its agents would state. */
struct scene {
	struct run run;
	struct trial_run out;
	EVP_MD_CTX *digests[DIRECTIONS_SINGLE][ENDS];	/* owned */
	struct wire_rows rows;
	uint64_t frames;
};

static struct scene *
scene_new(enum direction direction)
{
	struct scene *scene = calloc(1, sizeof(*scene));
	struct trial trial = { .number = 1, .direction = direction,
		.streams = 1, .row_ns = ROW_NS, .duration_ns = 3 * S };
	struct error err;

	assert_non_null(scene);
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		for (int e = 0; e < ENDS; e++) {
			scene->digests[d][e] = EVP_MD_CTX_new();
			assert_int_equal(EVP_DigestInit_ex(
			    scene->digests[d][e], EVP_sha256(), NULL), 1);
		}
	assert_int_equal(run_begin(&scene->run, &trial, &scene->out, &err),
	    0);
	assert_true(scene->out.started_utc_ns > 0);
	return scene;
}

static void
scene_free(struct scene *scene)
{
	run_fini(&scene->run);
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		for (int e = 0; e < ENDS; e++)
			EVP_MD_CTX_free(scene->digests[d][e]);
	free(scene);
}

/* Takes message. */
static void
give(struct scene *scene, enum direction direction, enum end end,
    json_t *message)
{
	char *text = json_dumps(json_object_get(message, "rows"),
	    JSON_COMPACT);
	struct error err;

	(void)EVP_DigestUpdate(scene->digests[direction][end], text,
	    strlen(text));
	(void)EVP_DigestUpdate(scene->digests[direction][end], "\n", 1);
	free(text);
	assert_int_equal(wire_decode_rows(message, &scene->rows, &err), 0);
	run_rows(&scene->run, end, &scene->rows, message);
	json_decref(message);
}

/* Row i of the receiver carries first + i * step bytes. */
static void
give_rows(struct scene *scene, enum direction direction, enum end end,
    uint64_t count, uint64_t first, uint64_t step)
{
	for (uint64_t i = 0; i < count; i++) {
		struct interval_row row = { i, (i + 1) * ROW_NS,
			first + i * step, 0, UNKNOWN_U64 };

		give(scene, direction, end, wire_encode_interval_rows(
		    ++scene->frames, direction, i == 0, &row, 1));
	}
}

static void
give_round_trip(struct scene *scene, enum direction direction, enum end end,
    uint64_t us)
{
	struct stream_row row;

	memset(&row, 0xff, sizeof(row));
	row.number = row.stream = row.bytes = 0;
	row.tcp.value[TCP_SAMPLE_min_rtt_us] = us;
	give(scene, direction, end, wire_encode_stream_rows(++scene->frames,
	    direction, true, &row, 1));
}

static struct measurement
receiver_of(enum direction direction, uint64_t zero_ns, uint64_t bytes)
{
	struct measurement m;

	memset(&m, 0, sizeof(m));
	m.direction = direction;
	m.is_receiver = true;
	m.zero_ns = zero_ns;
	m.settle_ns = S;
	m.duration_ns = 3 * S;
	m.bytes = bytes;
	m.row_min_bps = 3;
	m.row_max_bps = 4;
	m.interface_bytes = UNKNOWN_U64;
	return m;
}

static void
report(struct scene *scene, enum end end, struct measurement m)
{
	unsigned char digest[32];

	assert_int_equal(EVP_DigestFinal_ex(scene->digests[m.direction][end],
	    digest, NULL), 1);
	for (size_t i = 0; i < sizeof(digest); i++)
		(void)snprintf(m.sha256 + 2 * i, 3, "%02x", digest[i]);
	run_measurement(&scene->run, end, &m);
}

static void
report_sender(struct scene *scene, enum end end, enum direction direction,
    uint64_t interface_bytes)
{
	struct measurement m = receiver_of(direction, 0, 9999);

	m.is_receiver = false;
	m.interface_bytes = interface_bytes;
	report(scene, end, m);
}

static void
finish(struct scene *scene, int64_t offset_a_ns, int64_t offset_b_ns)
{
	struct exchange_sample clocks[ENDS] = {
		[END_A] = { .offset_ns = offset_a_ns },
		[END_B] = { .offset_ns = offset_b_ns },
	};

	run_finish(&scene->run, clocks);
}

static void
assert_sound(const struct scene *scene)
{
	if (scene->out.failed)
		fail_msg("%s", scene->out.why.cause);
}

/* --- one direction ----------------------------------------------------- */

static void
one_direction_counts_the_receivers_own_window(void **state)
{
	struct scene *scene = scene_new(DIRECTION_B_TO_A);
	struct direction_run *way =
	    &scene->out.directions[DIRECTION_B_TO_A];

	(void)state;
	assert_true(way->present);
	assert_false(scene->out.directions[DIRECTION_A_TO_B].present);
	assert_int_equal(way->round_trip_ns, UNKNOWN_U64);
	/* the sender's own rows are no result */
	give_rows(scene, DIRECTION_B_TO_A, END_B, 41, 5000, 0);
	give_rows(scene, DIRECTION_B_TO_A, END_A, 40, 1000, 0);
	report_sender(scene, END_B, DIRECTION_B_TO_A, 123456);
	report(scene, END_A, receiver_of(DIRECTION_B_TO_A, 7, 30000));
	finish(scene, 0, 0);
	assert_sound(scene);
	assert_true(way->counted);
	assert_true(way->sender_reported);
	assert_true(way->receiver_reported);
	assert_int_equal(way->bytes, 30000);
	assert_int_equal(way->duration_ns, 3 * S);
	assert_int_equal(way->payload_bps, 80000);
	assert_int_equal(way->row_min_bps, 3);
	assert_int_equal(way->row_max_bps, 4);
	assert_int_equal(way->interface_bytes, 123456);
	assert_int_equal(way->series.rows, 40);
	assert_int_equal(way->series.spacing_ns, ROW_NS);
	assert_string_equal(way->series.sha256, way->receiver.sha256);
	scene_free(scene);
}

static void
the_round_trip_is_the_least_that_the_sender_saw(void **state)
{
	struct scene *scene = scene_new(DIRECTION_A_TO_B);
	struct direction_run *way =
	    &scene->out.directions[DIRECTION_A_TO_B];

	(void)state;
	give_round_trip(scene, DIRECTION_A_TO_B, END_A, UNKNOWN_U64);
	assert_int_equal(way->round_trip_ns, UNKNOWN_U64);
	give_round_trip(scene, DIRECTION_A_TO_B, END_A, 20500);
	give_round_trip(scene, DIRECTION_A_TO_B, END_A, 20000);
	give_round_trip(scene, DIRECTION_A_TO_B, END_A, 20300);
	give_round_trip(scene, DIRECTION_A_TO_B, END_B, 10);
	assert_int_equal(way->round_trip_ns, 20000000);
	assert_int_equal(way->series.rows, 0);
	scene_free(scene);
}

static void
a_digest_that_differs_fails_the_trial(void **state)
{
	(void)state;
	for (int end = 0; end < ENDS; end++) {
		struct scene *scene = scene_new(DIRECTION_A_TO_B);

		give_rows(scene, DIRECTION_A_TO_B, END_A, 40, 1000, 0);
		give_rows(scene, DIRECTION_A_TO_B, END_B, 40, 1000, 0);
		/* one more newline at that end */
		(void)EVP_DigestUpdate(scene->digests[0][end], "\n", 1);
		report_sender(scene, END_A, DIRECTION_A_TO_B, 0);
		report(scene, END_B, receiver_of(DIRECTION_A_TO_B, 0, 1));
		finish(scene, 0, 0);
		assert_true(scene->out.failed);
		assert_int_equal(scene->out.why.kind, ERROR_PEER);
		assert_non_null(strstr(scene->out.why.cause, "digest"));
		assert_non_null(strstr(scene->out.why.cause,
		    end == END_A ? "end a" : "end b"));
		scene_free(scene);
	}
}

static void
a_window_that_did_not_close_is_no_result(void **state)
{
	static const enum measurement_end ends[] = { MEASUREMENT_STOPPED,
		MEASUREMENT_PEER_LOST };

	(void)state;
	for (size_t i = 0; i < 2; i++) {
		struct scene *scene = scene_new(DIRECTION_A_TO_B);
		struct measurement m = receiver_of(DIRECTION_A_TO_B, 0, 5000);

		m.end = ends[i];
		m.duration_ns = S;
		report_sender(scene, END_A, DIRECTION_A_TO_B, 0);
		report(scene, END_B, m);
		finish(scene, 0, 0);
		assert_true(scene->out.failed);
		assert_non_null(strstr(scene->out.why.cause, "a-to-b"));
		assert_false(scene->out.directions[0].counted);
		/* and yet what was measured is said */
		assert_int_equal(scene->out.directions[0].bytes, 5000);
		assert_int_equal(scene->out.directions[0].duration_ns, S);
		scene_free(scene);
	}
}

static void
a_window_of_no_time_is_no_result(void **state)
{
	struct scene *scene = scene_new(DIRECTION_A_TO_B);
	struct measurement m = receiver_of(DIRECTION_A_TO_B, 0, 5000);

	(void)state;
	m.duration_ns = 0;
	report(scene, END_B, m);
	finish(scene, 0, 0);
	assert_true(scene->out.failed);
	assert_false(scene->out.directions[0].counted);
	assert_int_equal(scene->out.directions[0].payload_bps, 0);
	scene_free(scene);
}

static void
of_a_lost_receiver_its_rows_are_told(void **state)
{
	struct scene *scene = scene_new(DIRECTION_A_TO_B);
	struct direction_run *way =
	    &scene->out.directions[DIRECTION_A_TO_B];

	(void)state;
	give_rows(scene, DIRECTION_A_TO_B, END_B, 17, 1000, 1);
	report_sender(scene, END_A, DIRECTION_A_TO_B, 5);
	finish(scene, 0, 0);
	assert_true(scene->out.failed);
	assert_false(way->counted);
	assert_false(way->receiver_reported);
	assert_true(way->sender_reported);
	/* 17 * 1000 + (0 + 1 + ... + 16) */
	assert_int_equal(way->bytes, 17136);
	assert_int_equal(way->duration_ns, 1700 * MS);
	assert_int_equal(way->payload_bps, 0);
	scene_free(scene);
}

static void
without_any_row_there_is_nothing_to_tell(void **state)
{
	struct scene *scene = scene_new(DIRECTION_A_TO_B);

	(void)state;
	finish(scene, 0, 0);
	assert_true(scene->out.failed);
	assert_false(scene->out.directions[0].counted);
	assert_int_equal(scene->out.directions[0].bytes, 0);
	assert_int_equal(scene->out.directions[0].duration_ns, 0);
	scene_free(scene);
}

static void
a_cause_that_is_known_already_is_kept(void **state)
{
	struct scene *scene = scene_new(DIRECTION_A_TO_B);

	(void)state;
	scene->out.failed = true;
	(void)error_set(&scene->out.why, ERROR_UNREACHABLE, "gone");
	finish(scene, 0, 0);
	assert_int_equal(scene->out.why.kind, ERROR_UNREACHABLE);
	assert_string_equal(scene->out.why.cause, "gone");
	scene_free(scene);
}

/* --- both -------------------------------------------------------------- */

/* Zero of a-to-b at b's 5 s, b's clock 2 s ahead: ours 3 s, window [4, 7) s.
 * Zero of b-to-a at a's 13 s, a's clock 10.5 s ahead: ours 2.5 s, window
 * [3.5, 6.5) s.  Overlap [4, 6.5) s: rows 10..34 and 15..39. */
static void
of_both_directions_only_the_overlap_counts(void **state)
{
	struct scene *scene = scene_new(DIRECTION_BOTH);
	struct direction_run *forth = &scene->out.directions[0];
	struct direction_run *back = &scene->out.directions[1];

	(void)state;
	give_rows(scene, DIRECTION_A_TO_B, END_B, 40, 1000, 1000);
	give_rows(scene, DIRECTION_B_TO_A, END_A, 40, 500, 0);
	report(scene, END_B, receiver_of(DIRECTION_A_TO_B, 5 * S, 1));
	report(scene, END_A, receiver_of(DIRECTION_B_TO_A, 13 * S, 1));
	report_sender(scene, END_A, DIRECTION_A_TO_B, 0);
	report_sender(scene, END_B, DIRECTION_B_TO_A, 0);
	finish(scene, 10500 * (int64_t)MS, 2000 * (int64_t)MS);
	assert_sound(scene);
	assert_true(forth->counted);
	assert_true(back->counted);
	assert_int_equal(forth->duration_ns, 2500 * MS);
	assert_int_equal(back->duration_ns, 2500 * MS);
	/* 1000 * (11 + ... + 35) */
	assert_int_equal(forth->bytes, 575000);
	assert_int_equal(forth->payload_bps, 1840000);
	assert_int_equal(back->bytes, 12500);
	assert_int_equal(back->payload_bps, 40000);
	scene_free(scene);
}

/* The same, with clocks behind ours, and an overlap that begins and ends
 * within rows: shifted by 30 ms. */
static void
an_overlap_within_rows_is_interpolated(void **state)
{
	struct scene *scene = scene_new(DIRECTION_BOTH);

	(void)state;
	give_rows(scene, DIRECTION_A_TO_B, END_B, 40, 1000, 0);
	give_rows(scene, DIRECTION_B_TO_A, END_A, 40, 500, 0);
	report(scene, END_B, receiver_of(DIRECTION_A_TO_B, 0, 1));
	report(scene, END_A, receiver_of(DIRECTION_B_TO_A, S, 1));
	finish(scene, -30 * (int64_t)MS, -1000 * (int64_t)MS);
	assert_sound(scene);
	/* zeros at ours 1 s and 1.03 s */
	assert_int_equal(scene->out.directions[0].duration_ns, 2970 * MS);
	assert_int_equal(scene->out.directions[0].bytes, 29700);
	assert_int_equal(scene->out.directions[1].bytes, 14850);
	scene_free(scene);
}

static void
windows_that_do_not_overlap_fail_the_trial(void **state)
{
	struct scene *scene = scene_new(DIRECTION_BOTH);

	(void)state;
	give_rows(scene, DIRECTION_A_TO_B, END_B, 40, 1000, 0);
	give_rows(scene, DIRECTION_B_TO_A, END_A, 40, 500, 0);
	report(scene, END_B, receiver_of(DIRECTION_A_TO_B, 0, 1));
	report(scene, END_A, receiver_of(DIRECTION_B_TO_A, 3 * S, 1));
	finish(scene, 0, 0);
	assert_true(scene->out.failed);
	assert_non_null(strstr(scene->out.why.cause, "overlap"));
	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		assert_false(scene->out.directions[d].counted);
		assert_int_equal(scene->out.directions[d].payload_bps, 0);
	}
	scene_free(scene);
}

static void
one_direction_lost_of_both_fails_the_trial(void **state)
{
	struct scene *scene = scene_new(DIRECTION_BOTH);

	(void)state;
	give_rows(scene, DIRECTION_A_TO_B, END_B, 40, 1000, 0);
	give_rows(scene, DIRECTION_B_TO_A, END_A, 10, 500, 0);
	report(scene, END_B, receiver_of(DIRECTION_A_TO_B, 0, 30000));
	finish(scene, 0, 0);
	assert_true(scene->out.failed);
	assert_non_null(strstr(scene->out.why.cause, "b-to-a"));
	assert_int_equal(scene->out.directions[0].bytes, 30000);
	assert_false(scene->out.directions[1].counted);
	assert_int_equal(scene->out.directions[1].bytes, 5000);
	assert_int_equal(scene->out.directions[1].duration_ns, S);
	scene_free(scene);
}

/* --- agents that say nonsense ------------------------------------------ */

static void
rows_of_a_direction_that_is_not_tried_are_ignored(void **state)
{
	struct scene *scene = scene_new(DIRECTION_A_TO_B);

	(void)state;
	give_rows(scene, DIRECTION_B_TO_A, END_A, 3, 1000, 0);
	report(scene, END_A, receiver_of(DIRECTION_B_TO_A, 0, 30000));
	assert_false(scene->out.directions[1].present);
	assert_false(scene->out.directions[1].receiver_reported);
	assert_int_equal(scene->out.directions[1].series.rows, 0);
	assert_sound(scene);
	scene_free(scene);
}

static void
rows_that_do_not_follow_fail_the_trial(void **state)
{
	struct scene *scene = scene_new(DIRECTION_A_TO_B);

	(void)state;
	give_rows(scene, DIRECTION_A_TO_B, END_B, 2, 1000, 0);
	assert_sound(scene);
	give_rows(scene, DIRECTION_A_TO_B, END_B, 1, 1000, 0);
	assert_true(scene->out.failed);
	assert_non_null(strstr(scene->out.why.cause, "does not follow"));
	assert_int_equal(scene->out.directions[0].series.rows, 2);
	scene_free(scene);
}

static void
what_comes_after_the_measurement_fails_the_trial(void **state)
{
	struct scene *scene = scene_new(DIRECTION_A_TO_B);

	(void)state;
	give_rows(scene, DIRECTION_A_TO_B, END_B, 2, 1000, 0);
	report(scene, END_B, receiver_of(DIRECTION_A_TO_B, 0, 30000));
	assert_sound(scene);
	give_rows(scene, DIRECTION_A_TO_B, END_B, 1, 1000, 0);
	assert_true(scene->out.failed);
	assert_int_equal(scene->out.directions[0].series.rows, 2);
	scene_free(scene);
	scene = scene_new(DIRECTION_A_TO_B);
	report(scene, END_B, receiver_of(DIRECTION_A_TO_B, 0, 30000));
	run_measurement(&scene->run, END_B,
	    &scene->out.directions[0].receiver);
	assert_true(scene->out.failed);
	scene_free(scene);
}

static void
a_receiver_at_the_sending_end_fails_the_trial(void **state)
{
	struct scene *scene = scene_new(DIRECTION_A_TO_B);

	(void)state;
	report(scene, END_A, receiver_of(DIRECTION_A_TO_B, 0, 30000));
	assert_true(scene->out.failed);
	assert_false(scene->out.directions[0].sender_reported);
	assert_false(scene->out.directions[0].receiver_reported);
	scene_free(scene);
}

static void
a_run_can_begin_again(void **state)
{
	struct scene *scene = scene_new(DIRECTION_BOTH);
	struct trial trial = scene->out.trial;
	struct error err;

	(void)state;
	give_rows(scene, DIRECTION_A_TO_B, END_B, 3, 1000, 0);
	trial.direction = DIRECTION_A_TO_B;
	trial.number = 2;
	assert_int_equal(run_begin(&scene->run, &trial, &scene->out, &err),
	    0);
	assert_int_equal(scene->out.trial.number, 2);
	assert_int_equal(scene->out.directions[0].series.rows, 0);
	assert_false(scene->out.directions[1].present);
	finish(scene, 0, 0);
	assert_int_equal(scene->out.directions[0].bytes, 0);
	run_fini(&scene->run);
	scene_free(scene);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    one_direction_counts_the_receivers_own_window),
		cmocka_unit_test(
		    the_round_trip_is_the_least_that_the_sender_saw),
		cmocka_unit_test(a_digest_that_differs_fails_the_trial),
		cmocka_unit_test(a_window_that_did_not_close_is_no_result),
		cmocka_unit_test(a_window_of_no_time_is_no_result),
		cmocka_unit_test(of_a_lost_receiver_its_rows_are_told),
		cmocka_unit_test(without_any_row_there_is_nothing_to_tell),
		cmocka_unit_test(a_cause_that_is_known_already_is_kept),
		cmocka_unit_test(of_both_directions_only_the_overlap_counts),
		cmocka_unit_test(an_overlap_within_rows_is_interpolated),
		cmocka_unit_test(windows_that_do_not_overlap_fail_the_trial),
		cmocka_unit_test(one_direction_lost_of_both_fails_the_trial),
		cmocka_unit_test(
		    rows_of_a_direction_that_is_not_tried_are_ignored),
		cmocka_unit_test(rows_that_do_not_follow_fail_the_trial),
		cmocka_unit_test(
		    what_comes_after_the_measurement_fails_the_trial),
		cmocka_unit_test(a_receiver_at_the_sending_end_fails_the_trial),
		cmocka_unit_test(a_run_can_begin_again),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
