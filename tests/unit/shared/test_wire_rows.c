/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdlib.h>
#include <string.h>

#include "channel.h"
#include "error.h"
#include "wire.h"
#include "wire_fixture.h"

#define HEAD "{\"type\":\"rows\",\"number\":7,\"table\":\"interval\"," \
    "\"direction\":\"a-to-b\","
#define COLUMNS "\"columns\":[\"number\",\"end_ns\",\"bytes\",\"cpu_ns\"," \
    "\"steal_ns\"],"

/* Through the two decoders, as what comes from a peer goes. */
static int
decode_rows(const char *text, struct wire_rows *out, struct error *err)
{
	json_t *message;
	int rc;

	memset(err, 0, sizeof(*err));
	if (frame_decode(text, strlen(text), &message, err) == -1)
		return -1;
	rc = wire_decode_rows(message, out, err);
	json_decref(message);
	return rc;
}

static struct wire_rows *
rows_new(void)
{
	struct wire_rows *rows = calloc(1, sizeof(*rows));

	assert_non_null(rows);
	return rows;
}

/* --- rows -------------------------------------------------------------- */

static void
interval_rows_written_by_hand_say_what_they_say(void **state)
{
	struct wire_rows *rows = rows_new();
	struct error err;

	(void)state;
	assert_int_equal(decode_rows(HEAD COLUMNS "\"rows\":["
	    "[0,100000000,1250000,5000,null],"
	    "[1,200000000,1250001,5001,9,\"a later column\"]]}", rows, &err),
	    0);
	assert_int_equal(rows->number, 7);
	assert_int_equal(rows->table, WIRE_TABLE_INTERVAL);
	assert_int_equal(rows->direction, DIRECTION_A_TO_B);
	assert_int_equal(rows->count, 2);
	assert_int_equal(rows->interval[0].number, 0);
	assert_int_equal(rows->interval[0].end_ns, 100000000);
	assert_int_equal(rows->interval[0].bytes, 1250000);
	assert_int_equal(rows->interval[0].cpu_ns, 5000);
	assert_int_equal(rows->interval[0].steal_ns, UNKNOWN_U64);
	assert_int_equal(rows->interval[1].bytes, 1250001);
	assert_int_equal(rows->interval[1].steal_ns, 9);
	free(rows);
}

static void
worker_rows_written_by_hand_say_what_they_say(void **state)
{
	struct wire_rows *rows = rows_new();
	struct error err;

	(void)state;
	assert_int_equal(decode_rows("{\"type\":\"rows\",\"number\":3,"
	    "\"table\":\"worker\",\"direction\":\"b-to-a\",\"columns\":"
	    "[\"number\",\"worker\",\"cpu_ns\"],\"rows\":[[4,0,5],"
	    "[4,1,6]]}", rows, &err), 0);
	assert_int_equal(rows->table, WIRE_TABLE_WORKER);
	assert_int_equal(rows->count, 2);
	assert_int_equal(rows->worker[1].number, 4);
	assert_int_equal(rows->worker[1].worker, 1);
	assert_int_equal(rows->worker[1].cpu_ns, 6);
	free(rows);
}

static void
rows_of_every_table_survive_the_way_through_json_text(void **state)
{
	static struct interval_row interval[WIRE_ROWS_MAX];
	static struct stream_row stream[WIRE_ROWS_MAX];
	static struct worker_row worker[WIRE_ROWS_MAX];
	struct wire_rows *rows = rows_new();
	struct error err;
	uint64_t seed = 3;

	(void)state;
	for (size_t i = 0; i < WIRE_ROWS_MAX; i++) {
		interval[i] = (struct interval_row){ i, i * 1000,
			seeded_between(&seed, 0, WIRE_INTEGER_MAX),
			WIRE_INTEGER_MAX, i % 2 == 0 ? UNKNOWN_U64 : i };
		worker[i] = (struct worker_row){ i / 4, i % 4,
			WIRE_INTEGER_MAX - i };
		stream[i].number = i / 8;
		stream[i].stream = i % 8;
		stream[i].bytes = WIRE_INTEGER_MAX;
		for (size_t k = 0; k < TCP_SAMPLE_COUNT; k++)
			stream[i].tcp.value[k] = k % 3 == 0 ? UNKNOWN_U64 :
			    seeded_between(&seed, 0, WIRE_INTEGER_MAX);
	}
	for (int with_columns = 0; with_columns < 2; with_columns++) {
		json_t *message = wire_encode_interval_rows(1,
		    DIRECTION_B_TO_A, with_columns, interval, WIRE_ROWS_MAX);
		char *text = json_dumps(message, JSON_COMPACT);

		assert_int_equal(json_object_get(message, "columns") != NULL,
		    with_columns);
		assert_int_equal(decode_rows(text, rows, &err), 0);
		assert_int_equal(rows->direction, DIRECTION_B_TO_A);
		assert_int_equal(rows->count, WIRE_ROWS_MAX);
		assert_memory_equal(rows->interval, interval,
		    sizeof(interval));
		free(text);
		json_decref(message);
		message = wire_encode_stream_rows(2, DIRECTION_A_TO_B,
		    with_columns, stream, WIRE_ROWS_MAX);
		text = json_dumps(message, JSON_COMPACT);
		/* the largest frame that there is */
		assert_true(strlen(text) <= CHANNEL_FRAME_MAX);
		assert_int_equal(decode_rows(text, rows, &err), 0);
		assert_int_equal(rows->table, WIRE_TABLE_STREAM);
		assert_memory_equal(rows->stream, stream, sizeof(stream));
		free(text);
		json_decref(message);
		message = wire_encode_worker_rows(3, DIRECTION_A_TO_B,
		    with_columns, worker, WIRE_ROWS_MAX);
		text = json_dumps(message, JSON_COMPACT);
		assert_int_equal(decode_rows(text, rows, &err), 0);
		assert_int_equal(rows->table, WIRE_TABLE_WORKER);
		assert_memory_equal(rows->worker, worker, sizeof(worker));
		free(text);
		json_decref(message);
	}
	free(rows);
}

static const char *const no_rows[] = {
	"{\"type\":\"rows\"}",
	/* head */
	"{\"table\":\"interval\",\"direction\":\"a-to-b\",\"rows\":[]}",
	"{\"number\":-1,\"table\":\"interval\","
	    "\"direction\":\"a-to-b\",\"rows\":[]}",
	"{\"number\":\"1\",\"table\":\"interval\","
	    "\"direction\":\"a-to-b\",\"rows\":[]}",
	"{\"number\":1,\"direction\":\"a-to-b\",\"rows\":[]}",
	"{\"number\":1,\"table\":\"packet\","
	    "\"direction\":\"a-to-b\",\"rows\":[]}",
	"{\"number\":1,\"table\":0,"
	    "\"direction\":\"a-to-b\",\"rows\":[]}",
	"{\"number\":1,\"table\":\"interval\",\"rows\":[]}",
	"{\"number\":1,\"table\":\"interval\","
	    "\"direction\":\"both\",\"rows\":[]}",
	"{\"number\":1,\"table\":\"interval\","
	    "\"direction\":1,\"rows\":[]}",
	/* columns */
	HEAD "\"columns\":{},\"rows\":[]}",
	HEAD "\"columns\":[],\"rows\":[]}",
	HEAD "\"columns\":null,\"rows\":[]}",
	HEAD "\"columns\":[\"number\",\"end_ns\",\"bytes\","
	    "\"cpu_ns\"],\"rows\":[]}",
	HEAD "\"columns\":[\"number\",\"bytes\",\"end_ns\","
	    "\"cpu_ns\",\"steal_ns\"],\"rows\":[]}",
	HEAD "\"columns\":[1,2,3,4,5],\"rows\":[]}",
	/* rows */
	HEAD "\"row\":[]}",
	HEAD "\"rows\":{}}",
	HEAD "\"rows\":[7]}",
	HEAD "\"rows\":[{}]}",
	HEAD "\"rows\":[[]]}",
	HEAD "\"rows\":[[0,1,2,3]]}",
	HEAD "\"rows\":[[0,1,2,3,4],[1,2,3]]}",
	/* values */
	HEAD "\"rows\":[[-1,1,2,3,4]]}",
	HEAD "\"rows\":[[0,1,2,3,-4]]}",
	HEAD "\"rows\":[[0,1,2.0,3,4]]}",
	HEAD "\"rows\":[[0,1,\"2\",3,4]]}",
	HEAD "\"rows\":[[0,1,true,3,4]]}",
	/* what is always known */
	HEAD "\"rows\":[[null,1,2,3,4]]}",
	HEAD "\"rows\":[[0,null,2,3,4]]}",
	HEAD "\"rows\":[[0,1,null,3,4]]}",
	HEAD "\"rows\":[[0,1,2,null,4]]}",
	"{\"number\":1,\"table\":\"stream\",\"direction\":"
	    "\"a-to-b\",\"rows\":[[0,0,1]]}",
	"{\"number\":1,\"table\":\"worker\",\"direction\":"
	    "\"a-to-b\",\"rows\":[[0,0,null]]}",
};

static void
rows_that_are_none_are_refused(void **state)
{
	struct wire_rows *rows = rows_new();
	struct error err;

	(void)state;
	for (size_t i = 0; i < sizeof(no_rows) / sizeof(no_rows[0]); i++) {
		if (decode_rows(no_rows[i], rows, &err) == 0)
			fail_msg("taken: %s", no_rows[i]);
		assert_int_equal(err.kind, ERROR_PEER);
		assert_true(err.cause[0] != '\0');
	}
	free(rows);
}

static void
more_rows_than_a_frame_may_hold_are_refused(void **state)
{
	struct wire_rows *rows = rows_new();
	static struct interval_row interval[WIRE_ROWS_MAX + 1];
	struct error err;
	json_t *message = wire_encode_interval_rows(1, DIRECTION_A_TO_B, true,
	    interval, WIRE_ROWS_MAX + 1);

	(void)state;
	assert_int_equal(wire_decode_rows(message, rows, &err), -1);
	assert_non_null(strstr(err.cause, "513"));
	(void)json_array_remove(json_object_get(message, "rows"), 0);
	assert_int_equal(wire_decode_rows(message, rows, &err), 0);
	json_decref(message);
	/* beyond I-JSON, were there a way around frame_decode */
	message = json_pack("{s:i,s:s,s:s,s:[[i,i,I,i,i]]}", "number", 1,
	    "table", "interval", "direction", "a-to-b", "rows", 0, 1,
	    (json_int_t)WIRE_INTEGER_MAX + 1, 3, 4);
	assert_int_equal(wire_decode_rows(message, rows, &err), -1);
	json_decref(message);
	free(rows);
}

static void
the_text_of_rows_is_compact_and_the_same_at_both_ends(void **state)
{
	static const struct interval_row interval[] = {
		{ 0, 100, 5, 6, UNKNOWN_U64 }, { 1, 200, 7, 8, 9 },
	};
	json_t *sent = wire_encode_interval_rows(1, DIRECTION_A_TO_B, true,
	    interval, 2);
	char *spaced = json_dumps(sent, JSON_INDENT(2));
	char *text = wire_rows_text(sent), *again;
	json_t *received;
	struct error err;

	(void)state;
	assert_string_equal(text, "[[0,100,5,6,null],[1,200,7,8,9]]");
	assert_int_equal(frame_decode(spaced, strlen(spaced), &received,
	    &err), 0);
	again = wire_rows_text(received);
	assert_string_equal(again, text);
	free(again);
	free(text);
	free(spaced);
	json_decref(received);
	json_decref(sent);
	/* nothing to make a text of */
	sent = json_object();
	assert_null(wire_rows_text(sent));
	json_decref(sent);
}

/* --- limits of time ---------------------------------------------------- */

static void
a_limit_is_the_greatest_of_three_and_at_most_10_s(void **state)
{
	static const char rule[] =
	    "max(stated, 3 x largest round trip, 8 x spacing), <= 10 s";
	static const struct {
		uint64_t stated_ns, round_trip_ns, spacing_ns, limit_ns;
		const char *source;
	} rows[] = {
		{ 0, 0, 0, 0, rule },
		{ 1000000000, 0, 0, 1000000000, rule },
		/* 8 x 250 ms: a controller that vanishes, within 2 s */
		{ 1000000000, 20000000, 250000000, 2000000000, rule },
		{ 1000000000, 333333333, 0, 1000000000, rule },
		{ 1000000000, 333333334, 0, 1000000002, rule },
		{ 1000000000, 700000000, 250000000, 2100000000, rule },
		{ 1000000000, 0, 125000000, 1000000000, rule },
		{ 1000000000, 0, 125000001, 1000000008, rule },
		{ UINT64_C(10000000000), 0, 0, UINT64_C(10000000000), rule },
		{ UINT64_C(20000000000), 0, 0, UINT64_C(10000000000), rule },
		{ 0, UINT64_C(3333333333), 0, UINT64_C(9999999999), rule },
		{ 0, UINT64_C(3333333334), 0, UINT64_C(10000000000), rule },
		{ 0, 0, UINT64_C(1250000000), UINT64_C(10000000000), rule },
		{ 0, 0, UINT64_C(1250000001), UINT64_C(10000000000), rule },
		/* products that would wrap 64 bits */
		{ 0, UINT64_MAX, 0, UINT64_C(10000000000), rule },
		{ 0, UINT64_MAX / 3 + 1, 0, UINT64_C(10000000000), rule },
		{ 0, 0, UINT64_MAX, UINT64_C(10000000000), rule },
		{ 0, 0, UINT64_C(1) << 61, UINT64_C(10000000000), rule },
		{ UINT64_MAX, UINT64_MAX, UINT64_MAX, UINT64_C(10000000000),
		    rule },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++)
		assert_int_equal(wire_limit_ns(rows[i].stated_ns,
		    rows[i].round_trip_ns, rows[i].spacing_ns),
		    rows[i].limit_ns);
}

/* --- an older agent ---------------------------------------------------- */

static struct wire_prepare
plain_prepare(void)
{
	struct wire_prepare prepare;

	memset(&prepare, 0, sizeof(prepare));
	prepare.trial = (struct trial){ .number = 1, .streams = 1,
		.duration_ns = 1000000000, .row_ns = 100000000,
		.congestion_control = "cubic",
		.payload_period_bytes = UINT64_C(16) << 20 };
	return prepare;
}

static void
a_peer_that_knows_all_members_gets_all_of_them(void **state)
{
	struct wire_prepare prepare = plain_prepare();
	char members[WIRE_MEMBERS_SIZE];
	json_t *message, *whole;
	struct error err;

	(void)state;
	wire_trial_members(members, sizeof(members));
	assert_string_equal(members, "number protocol direction opens streams "
	    "settle_ns settle_extends duration_ns row_ns congestion_control "
	    "dscp mss_bytes send_buffer_bytes receive_buffer_bytes "
	    "payload_period_bytes rate_limit_bps");
	prepare.trial.dscp = 46;
	message = wire_encode_prepare(&prepare, members, &err);
	whole = wire_encode(WIRE_PREPARE, &prepare);
	assert_non_null(message);
	assert_true(json_equal(message, whole));
	json_decref(whole);
	json_decref(message);
}

/* Neither "dscp" alone nor "rate_limit_bps" are words of this. */
#define OLD_MEMBERS "xdscp dscpx dscp_dscp number protocol direction opens " \
    "streams settle_ns settle_extends duration_ns row_ns " \
    "congestion_control payload_period_bytes mss_bytes"

static void
a_peer_that_knows_fewer_members_gets_those(void **state)
{
	struct wire_prepare prepare = plain_prepare(), found;
	struct error err;
	json_t *message, *trial;

	(void)state;
	message = wire_encode_prepare(&prepare, OLD_MEMBERS, &err);
	assert_non_null(message);
	trial = json_object_get(message, "trial");
	assert_null(json_object_get(trial, "dscp"));
	assert_null(json_object_get(trial, "rate_limit_bps"));
	assert_null(json_object_get(trial, "send_buffer_bytes"));
	assert_non_null(json_object_get(trial, "mss_bytes"));
	assert_non_null(json_object_get(trial, "settle_ns"));
	assert_int_equal(wire_decode(WIRE_PREPARE, message, &found, &err), 0);
	assert_memory_equal(&found, &prepare, sizeof(found));
	json_decref(message);
}

static void
what_an_old_peer_cannot_be_told_is_refused_by_name(void **state)
{
	struct wire_prepare prepare = plain_prepare();
	struct error err;

	(void)state;
	prepare.trial.dscp = 1;
	assert_null(wire_encode_prepare(&prepare, OLD_MEMBERS, &err));
	assert_int_equal(err.kind, ERROR_REFUSED);
	assert_non_null(strstr(err.cause, "'dscp'"));
	prepare.trial.dscp = 0;
	prepare.trial.rate_limit_bps = 1;
	assert_null(wire_encode_prepare(&prepare, OLD_MEMBERS, &err));
	assert_non_null(strstr(err.cause, "'rate_limit_bps'"));
	assert_null(wire_encode_prepare(&prepare, "", &err));
	assert_int_equal(err.kind, ERROR_REFUSED);
	assert_non_null(strstr(err.cause, "'number'"));
}

/* --- damaged text ------------------------------------------------------ */

/* Whatever comes out, nothing may crash; a prefix is never a message. */
static void
decode_any(const char *text, size_t size, struct wire_rows *rows,
    bool must_fail)
{
	enum wire_type type;
	struct error err;
	json_t *message;
	void *body;

	if (frame_decode(text, size, &message, &err) == -1) {
		assert_int_equal(err.kind, ERROR_PEER);
		return;
	}
	assert_false(must_fail);
	if (wire_type_of(message, &type, &err) == 0) {
		if (type == WIRE_ROWS)
			(void)wire_decode_rows(message, rows, &err);
		else {
			body = calloc(1, wire_size(type) + 1);
			assert_non_null(body);
			(void)wire_decode(type, message, body, &err);
			free(body);
		}
	}
	json_decref(message);
}

static char *
text_of(uint64_t *seed, enum wire_type type)
{
	static const struct interval_row interval[3] = { { .number = 1 } };
	json_t *message = type != WIRE_ROWS ? random_message(seed, type) :
	    wire_encode_interval_rows(1, DIRECTION_A_TO_B, true, interval, 3);
	char *text = json_dumps(message, JSON_COMPACT);

	assert_non_null(text);
	json_decref(message);
	return text;
}

static void
every_truncation_of_every_message_fails_cleanly(void **state)
{
	struct wire_rows *rows = rows_new();
	uint64_t seed = 21;

	(void)state;
	for (int i = 0; i < WIRE_TYPES; i++) {
		char *text = text_of(&seed, (enum wire_type)i);
		size_t length = strlen(text);

		for (size_t n = 0; n < length; n++) {
			/* its own block, so that a byte too many is seen */
			char *cut = malloc(n + 1);

			assert_non_null(cut);
			memcpy(cut, text, n);
			decode_any(cut, n, rows, true);
			free(cut);
		}
		decode_any(text, length, rows, false);
		free(text);
	}
	free(rows);
}

static void
damaged_messages_never_crash_the_decoders(void **state)
{
	static const char bytes[] = "\"\\{}[]:,0-9eE.ntf \xff\xc3\x01";
	struct wire_rows *rows = rows_new();
	uint64_t seed = 22;

	(void)state;
	for (int i = 0; i < 200 * WIRE_TYPES; i++) {
		char *text = text_of(&seed, (enum wire_type)(i % WIRE_TYPES));
		size_t length = strlen(text);

		for (uint64_t k = seeded_between(&seed, 1, 3); k > 0; k--)
			text[seeded_between(&seed, 0, length - 1)] =
			    bytes[seeded_between(&seed, 0,
			    sizeof(bytes) - 2)];
		decode_any(text, length, rows, false);
		free(text);
	}
	free(rows);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    interval_rows_written_by_hand_say_what_they_say),
		cmocka_unit_test(
		    worker_rows_written_by_hand_say_what_they_say),
		cmocka_unit_test(
		    rows_of_every_table_survive_the_way_through_json_text),
		cmocka_unit_test(rows_that_are_none_are_refused),
		cmocka_unit_test(more_rows_than_a_frame_may_hold_are_refused),
		cmocka_unit_test(
		    the_text_of_rows_is_compact_and_the_same_at_both_ends),
		cmocka_unit_test(
		    a_limit_is_the_greatest_of_three_and_at_most_10_s),
		cmocka_unit_test(
		    a_peer_that_knows_all_members_gets_all_of_them),
		cmocka_unit_test(a_peer_that_knows_fewer_members_gets_those),
		cmocka_unit_test(
		    what_an_old_peer_cannot_be_told_is_refused_by_name),
		cmocka_unit_test(
		    every_truncation_of_every_message_fails_cleanly),
		cmocka_unit_test(damaged_messages_never_crash_the_decoders),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
