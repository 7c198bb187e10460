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

#include "error.h"
#include "handover.h"
#include "wire.h"

#define MS UINT64_C(1000000)
#define SENT_MAX 2048

/* What a controller would receive. */
struct sink {
	json_t *messages[SENT_MAX];	/* owned */
	size_t count;
	struct handover_counter counter;
	struct handover *handover;	/* owned */
};

static void
take(json_t *message, void *arg)
{
	struct sink *sink = arg;

	assert_non_null(message);
	assert_true(sink->count < SENT_MAX);
	sink->messages[sink->count++] = message;
}

static struct sink *
sink_new(enum direction direction, bool is_sender)
{
	struct sink *sink = calloc(1, sizeof(*sink));

	assert_non_null(sink);
	sink->handover = handover_new(direction, is_sender, &sink->counter,
	    take, sink);
	assert_non_null(sink->handover);
	return sink;
}

static void
sink_free(struct sink *sink)
{
	handover_free(sink->handover);
	for (size_t i = 0; i < sink->count; i++)
		json_decref(sink->messages[i]);
	free(sink);
}

static bool
is_type(const json_t *message, enum wire_type wanted)
{
	enum wire_type type;
	struct error err;

	return wire_type_of(message, &type, &err) == 0 && type == wanted;
}

static size_t
count_of(const struct sink *sink, enum wire_type type)
{
	size_t count = 0;

	for (size_t i = 0; i < sink->count; i++)
		count += is_type(sink->messages[i], type);
	return count;
}

/* Give the row with this number, `streams` of its streams sampled. */
static int
give(struct sink *sink, uint64_t number, uint64_t row_ns, uint64_t bytes,
    size_t streams, enum transfer_phase phase)
{
	struct interval_row row = { number, (number + 1) * row_ns, bytes,
		5 * number, UNKNOWN_U64 };
	struct stream_row rows[MEASUREMENT_STREAMS_SAMPLED];
	struct error err = { 0 };
	int rc;

	memset(rows, 0, sizeof(rows));
	for (size_t i = 0; i < streams; i++) {
		rows[i].number = number;
		rows[i].stream = i;
		rows[i].bytes = bytes / streams;
	}
	rc = handover_row(sink->handover, &(struct transfer_row){
		.interval = &row, .streams = rows, .streams_count = streams,
		.phase = phase }, &err);
	if (rc == -1)
		assert_int_equal(err.kind, ERROR_PEER);
	return rc;
}

/* --- batches ----------------------------------------------------------- */

static void
rows_go_out_in_batches_of_half_a_second(void **state)
{
	struct sink *sink = sink_new(DIRECTION_A_TO_B, true);
	static struct wire_rows rows;
	struct error err;

	(void)state;
	for (uint64_t i = 0; i < 4; i++)
		assert_int_equal(give(sink, i, 100 * MS, 1000, 2,
		    TRANSFER_COUNTING), 0);
	assert_int_equal(sink->count, 0);
	assert_int_equal(give(sink, 4, 100 * MS, 1000, 2, TRANSFER_COUNTING),
	    0);
	/* interval rows, then those of the streams */
	assert_int_equal(sink->count, 2);
	assert_int_equal(wire_decode_rows(sink->messages[0], &rows, &err), 0);
	assert_int_equal(rows.number, 1);
	assert_int_equal(rows.table, WIRE_TABLE_INTERVAL);
	assert_int_equal(rows.direction, DIRECTION_A_TO_B);
	assert_int_equal(rows.count, 5);
	for (size_t i = 0; i < 5; i++) {
		assert_int_equal(rows.interval[i].number, i);
		assert_int_equal(rows.interval[i].end_ns, (i + 1) * 100 * MS);
		assert_int_equal(rows.interval[i].bytes, 1000);
		assert_int_equal(rows.interval[i].steal_ns, UNKNOWN_U64);
	}
	assert_int_equal(wire_decode_rows(sink->messages[1], &rows, &err), 0);
	assert_int_equal(rows.number, 2);
	assert_int_equal(rows.table, WIRE_TABLE_STREAM);
	assert_int_equal(rows.count, 10);
	assert_int_equal(rows.stream[9].number, 4);
	assert_int_equal(rows.stream[9].stream, 1);
	assert_int_equal(rows.stream[9].bytes, 500);
	sink_free(sink);
}

static void
a_batch_holds_at_most_64_rows(void **state)
{
	struct sink *sink = sink_new(DIRECTION_A_TO_B, true);
	static struct wire_rows rows;
	struct error err;

	(void)state;
	/* rows closer than any trial allows, and all the streams there are */
	for (uint64_t i = 0; i < 63; i++)
		assert_int_equal(give(sink, i, MS, 800,
		    MEASUREMENT_STREAMS_SAMPLED, TRANSFER_COUNTING), 0);
	assert_int_equal(sink->count, 0);
	assert_int_equal(give(sink, 63, MS, 800, MEASUREMENT_STREAMS_SAMPLED,
	    TRANSFER_COUNTING), 0);
	assert_int_equal(sink->count, 2);
	assert_int_equal(wire_decode_rows(sink->messages[0], &rows, &err), 0);
	assert_int_equal(rows.count, 64);
	assert_int_equal(wire_decode_rows(sink->messages[1], &rows, &err), 0);
	assert_int_equal(rows.count, 64 * MEASUREMENT_STREAMS_SAMPLED);
	sink_free(sink);
}

static void
the_columns_go_out_once_a_table(void **state)
{
	struct sink *sink = sink_new(DIRECTION_A_TO_B, true);

	(void)state;
	/* the streams are sampled from the second batch on */
	for (uint64_t i = 0; i < 20; i++)
		assert_int_equal(give(sink, i, 100 * MS, 1000, i < 5 ? 0 : 1,
		    TRANSFER_COUNTING), 0);
	assert_int_equal(sink->count, 7);
	for (size_t i = 0; i < sink->count; i++)
		assert_int_equal(json_object_get(sink->messages[i],
		    "columns") != NULL, i == 0 || i == 2);
	sink_free(sink);
}

static void
two_directions_share_one_numbering(void **state)
{
	struct sink *sink = sink_new(DIRECTION_A_TO_B, true);
	struct handover *first = sink->handover;
	struct handover *second = handover_new(DIRECTION_B_TO_A, false,
	    &sink->counter, take, sink);
	uint64_t number = 0;

	(void)state;
	for (uint64_t i = 0; i < 10; i++) {
		sink->handover = first;
		assert_int_equal(give(sink, i, 100 * MS, 1000, 1,
		    TRANSFER_COUNTING), 0);
		sink->handover = second;
		assert_int_equal(give(sink, i, 100 * MS, 1000, 1,
		    TRANSFER_COUNTING), 0);
	}
	for (size_t i = 0; i < sink->count; i++)
		if (is_type(sink->messages[i], WIRE_ROWS))
			assert_int_equal(json_integer_value(json_object_get(
			    sink->messages[i], "number")), ++number);
	assert_int_equal(number, 8);
	assert_int_equal(sink->counter.sent, 8);
	handover_free(first);
	sink_free(sink);
}

/* As many workers as there can be: a batch ends before its frame is full. */
static void
every_worker_has_a_row_beside_those_of_the_streams(void **state)
{
	static const size_t counts[] = { 1, 4, 100, TRIAL_STREAMS_MAX };
	static struct worker_row workers[TRIAL_STREAMS_MAX];
	static struct wire_rows rows;
	struct error err;

	(void)state;
	for (size_t c = 0; c < sizeof(counts) / sizeof(counts[0]); c++) {
		struct sink *sink = sink_new(DIRECTION_A_TO_B, true);
		struct measurement measurement = { .streams = 1 };
		uint64_t seen = 0;

		for (uint64_t i = 0; i < 30; i++) {
			struct interval_row row = { i, (i + 1) * 10 * MS, 1,
				2, 3 };
			struct transfer_row given = { .interval = &row,
				.workers = workers,
				.workers_count = counts[c] };

			for (size_t w = 0; w < counts[c]; w++)
				workers[w] = (struct worker_row){ i, w, i + w };
			assert_int_equal(handover_row(sink->handover, &given,
			    &err), 0);
		}
		handover_finish(sink->handover, &measurement);
		assert_int_equal(measurement.worker_rows, 30 * counts[c]);
		assert_int_equal(measurement.stream_rows, 0);
		for (size_t i = 0; i + 1 < sink->count; i++) {
			assert_int_equal(wire_decode_rows(sink->messages[i],
			    &rows, &err), 0);
			for (size_t k = 0; k < rows.count &&
			    rows.table == WIRE_TABLE_WORKER; k++, seen++) {
				assert_int_equal(rows.worker[k].number,
				    seen / counts[c]);
				assert_int_equal(rows.worker[k].worker,
				    seen % counts[c]);
			}
		}
		assert_int_equal(seen, 30 * counts[c]);
		sink_free(sink);
	}
}

/* --- the end ----------------------------------------------------------- */

/* SHA-256 over the compact text of each frame's rows and a newline. */
static void
digest_of(const struct sink *sink, char hex[SHA256_HEX_SIZE])
{
	EVP_MD_CTX *digest = EVP_MD_CTX_new();
	unsigned char bytes[32];

	assert_int_equal(EVP_DigestInit_ex(digest, EVP_sha256(), NULL), 1);
	for (size_t i = 0; i < sink->count; i++) {
		char *text;

		if (!is_type(sink->messages[i], WIRE_ROWS))
			continue;
		text = json_dumps(json_object_get(sink->messages[i], "rows"),
		    JSON_COMPACT);
		assert_int_equal(EVP_DigestUpdate(digest, text,
		    strlen(text)), 1);
		assert_int_equal(EVP_DigestUpdate(digest, "\n", 1), 1);
		free(text);
	}
	assert_int_equal(EVP_DigestFinal_ex(digest, bytes, NULL), 1);
	for (size_t i = 0; i < 32; i++)
		(void)snprintf(hex + 2 * i, 3, "%02x", bytes[i]);
	EVP_MD_CTX_free(digest);
}

static void
the_measurement_is_completed_and_comes_last(void **state)
{
	struct sink *sink = sink_new(DIRECTION_A_TO_B, false);
	struct measurement measurement, found;
	char hex[SHA256_HEX_SIZE];
	struct error err;

	(void)state;
	for (uint64_t i = 0; i < 13; i++)
		assert_int_equal(give(sink, i, 100 * MS, 1000 + i, 3,
		    TRANSFER_COUNTING), 0);
	memset(&measurement, 0, sizeof(measurement));
	measurement.is_receiver = true;
	measurement.streams = 3;
	measurement.bytes = 77;
	handover_finish(sink->handover, &measurement);
	assert_true(is_type(sink->messages[sink->count - 1],
	    WIRE_MEASUREMENT));
	assert_int_equal(count_of(sink, WIRE_MEASUREMENT), 1);
	assert_int_equal(wire_decode(WIRE_MEASUREMENT,
	    sink->messages[sink->count - 1], &found, &err), 0);
	assert_int_equal(found.rows, 13);
	assert_int_equal(found.stream_rows, 39);
	assert_int_equal(found.bytes, 77);
	assert_true(found.is_receiver);
	digest_of(sink, hex);
	assert_string_equal(found.sha256, hex);
	assert_string_equal(measurement.sha256, hex);
	sink_free(sink);
}

static void
without_rows_the_digest_is_that_of_nothing(void **state)
{
	struct sink *sink = sink_new(DIRECTION_B_TO_A, true);
	struct measurement measurement;

	(void)state;
	memset(&measurement, 0, sizeof(measurement));
	measurement.direction = DIRECTION_B_TO_A;
	measurement.streams = 1;
	handover_finish(sink->handover, &measurement);
	assert_int_equal(sink->count, 1);
	assert_int_equal(measurement.rows, 0);
	/* SHA-256 of the empty message, NIST example values (from memory) */
	assert_string_equal(measurement.sha256,
	    "e3b0c44298fc1c149afbf4c8996fb924"
	    "27ae41e4649b934ca495991b7852b855");
	sink_free(sink);
}

/* --- acknowledgement --------------------------------------------------- */

static void
frames_that_nobody_acknowledges_are_bounded(void **state)
{
	struct sink *sink = sink_new(DIRECTION_A_TO_B, true);
	struct measurement measurement;
	uint64_t i = 0, refused;

	(void)state;
	while (give(sink, i, 500 * MS, 1000, 1, TRANSFER_COUNTING) == 0)
		assert_true(++i < 1000);
	assert_int_equal(sink->counter.sent, WIRE_ROWS_UNACKNOWLEDGED_MAX);
	/* and it stays refused, whatever comes */
	for (refused = 0; refused < 200; refused++)
		assert_int_equal(give(sink, i + refused, 500 * MS, 1000, 8,
		    TRANSFER_COUNTING), -1);
	assert_int_equal(sink->counter.sent, WIRE_ROWS_UNACKNOWLEDGED_MAX);
	/* what was refused is not in the totals */
	memset(&measurement, 0, sizeof(measurement));
	measurement.streams = 1;
	handover_finish(sink->handover, &measurement);
	assert_int_equal(measurement.rows, i);
	sink_free(sink);
}

static void
acknowledged_frames_make_room(void **state)
{
	struct sink *sink = sink_new(DIRECTION_A_TO_B, true);

	(void)state;
	for (uint64_t i = 0; i < 900; i++) {
		assert_int_equal(give(sink, i, 500 * MS, 1000, 1,
		    TRANSFER_COUNTING), 0);
		if (sink->counter.sent % 100 == 0)
			handover_received(&sink->counter, sink->counter.sent);
	}
	assert_int_equal(sink->counter.sent, 1800);
	sink_free(sink);
}

static void
an_acknowledgement_never_goes_back_nor_ahead(void **state)
{
	struct handover_counter counter = { .sent = 10 };

	(void)state;
	handover_received(&counter, 4);
	assert_int_equal(counter.received, 4);
	handover_received(&counter, 3);
	assert_int_equal(counter.received, 4);
	handover_received(&counter, 11);
	assert_int_equal(counter.received, 4);
	handover_received(&counter, UINT64_MAX);
	assert_int_equal(counter.received, 4);
	handover_received(&counter, 0);
	assert_int_equal(counter.received, 4);
	handover_received(&counter, 10);
	assert_int_equal(counter.received, 10);
}

/* --- progress ---------------------------------------------------------- */

static struct wire_progress
last_progress(const struct sink *sink)
{
	struct wire_progress progress = { .elapsed_ns = 0 };
	struct error err;

	for (size_t i = 0; i < sink->count; i++)
		if (is_type(sink->messages[i], WIRE_PROGRESS))
			assert_int_equal(wire_decode(WIRE_PROGRESS,
			    sink->messages[i], &progress, &err), 0);
	return progress;
}

static void
a_receiver_tells_progress_every_200_ms(void **state)
{
	struct sink *sink = sink_new(DIRECTION_B_TO_A, false);
	struct wire_progress progress;

	(void)state;
	for (uint64_t i = 0; i < 19; i++)
		assert_int_equal(give(sink, i, 10 * MS, 1000, 1,
		    TRANSFER_SETTLING), 0);
	assert_int_equal(count_of(sink, WIRE_PROGRESS), 0);
	assert_int_equal(give(sink, 19, 10 * MS, 1000, 1, TRANSFER_SETTLING),
	    0);
	assert_int_equal(count_of(sink, WIRE_PROGRESS), 1);
	progress = last_progress(sink);
	assert_int_equal(progress.direction, DIRECTION_B_TO_A);
	assert_int_equal(progress.elapsed_ns, 200 * MS);
	assert_int_equal(progress.bytes, 20000);
	/* 20 kB in 0.2 s */
	assert_int_equal(progress.rate_bps, 800000);
	assert_string_equal(progress.phase, "settling");
	for (uint64_t i = 20; i < 100; i++)
		assert_int_equal(give(sink, i, 10 * MS, 1000, 1,
		    TRANSFER_COUNTING), 0);
	assert_int_equal(count_of(sink, WIRE_PROGRESS), 5);
	/* the end is told at once */
	assert_int_equal(give(sink, 100, 10 * MS, 1000, 1, TRANSFER_CLOSED),
	    0);
	assert_int_equal(count_of(sink, WIRE_PROGRESS), 6);
	assert_string_equal(last_progress(sink).phase, "closed");
	sink_free(sink);
}

static void
a_sender_tells_no_progress(void **state)
{
	struct sink *sink = sink_new(DIRECTION_A_TO_B, true);

	(void)state;
	for (uint64_t i = 0; i < 100; i++)
		assert_int_equal(give(sink, i, 10 * MS, 1000, 1,
		    i < 99 ? TRANSFER_COUNTING : TRANSFER_CLOSED), 0);
	assert_int_equal(count_of(sink, WIRE_PROGRESS), 0);
	sink_free(sink);
}

/* 1 kB a row in the first two seconds, 3 kB from then on: after another
 * second nothing of the first two is left in the rate. */
static void
the_rate_is_that_of_the_last_second(void **state)
{
	static const uint64_t spacings_ms[] = { 10, 20, 100, 250, 500, 1000 };

	(void)state;
	for (size_t k = 0; k < 6; k++) {
		struct sink *sink = sink_new(DIRECTION_A_TO_B, false);
		uint64_t row_ns = spacings_ms[k] * MS;
		uint64_t rows = 1000 / spacings_ms[k];

		for (uint64_t i = 0; i < 2 * rows; i++)
			assert_int_equal(give(sink, i, row_ns, 1000, 0,
			    TRANSFER_COUNTING), 0);
		assert_int_equal(last_progress(sink).rate_bps, 8000 * rows);
		for (uint64_t i = 2 * rows; i < 3 * rows; i++)
			assert_int_equal(give(sink, i, row_ns, 3000, 0,
			    TRANSFER_COUNTING), 0);
		assert_int_equal(last_progress(sink).rate_bps, 24000 * rows);
		sink_free(sink);
	}
}

static void
a_row_longer_than_a_second_stands_for_it(void **state)
{
	struct sink *sink = sink_new(DIRECTION_A_TO_B, false);

	(void)state;
	assert_int_equal(give(sink, 0, 5000 * MS, 1000000, 0,
	    TRANSFER_COUNTING), 0);
	assert_int_equal(last_progress(sink).rate_bps, 1600000);
	assert_int_equal(give(sink, 1, 5000 * MS, 2000000, 0,
	    TRANSFER_COUNTING), 0);
	assert_int_equal(last_progress(sink).rate_bps, 3200000);
	assert_int_equal(give(sink, 2, 5000 * MS, 500000, 0,
	    TRANSFER_COUNTING), 0);
	assert_int_equal(last_progress(sink).rate_bps, 800000);
	sink_free(sink);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(rows_go_out_in_batches_of_half_a_second),
		cmocka_unit_test(a_batch_holds_at_most_64_rows),
		cmocka_unit_test(the_columns_go_out_once_a_table),
		cmocka_unit_test(two_directions_share_one_numbering),
		cmocka_unit_test(
		    every_worker_has_a_row_beside_those_of_the_streams),
		cmocka_unit_test(the_measurement_is_completed_and_comes_last),
		cmocka_unit_test(without_rows_the_digest_is_that_of_nothing),
		cmocka_unit_test(frames_that_nobody_acknowledges_are_bounded),
		cmocka_unit_test(acknowledged_frames_make_room),
		cmocka_unit_test(an_acknowledgement_never_goes_back_nor_ahead),
		cmocka_unit_test(a_receiver_tells_progress_every_200_ms),
		cmocka_unit_test(a_sender_tells_no_progress),
		cmocka_unit_test(the_rate_is_that_of_the_last_second),
		cmocka_unit_test(a_row_longer_than_a_second_stands_for_it),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
