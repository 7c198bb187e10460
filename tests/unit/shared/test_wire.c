/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "channel.h"
#include "error.h"
#include "wire.h"
#include "wire_fixture.h"

/* --- tables ------------------------------------------------------------ */

static void
assert_table(const struct wire_member *members, size_t size)
{
	for (const struct wire_member *m = members; m->name != NULL; m++) {
		assert_true(m->name[0] != '\0');
		assert_non_null(m->help);
		assert_true(m->offset < size);
		assert_true(m->min <= greatest(m));
		assert_true(greatest(m) <= WIRE_INTEGER_MAX);
		assert_true(m->kind != WIRE_TEXT || (m->size > 1 &&
		    m->size <= WIRE_MEMBERS_SIZE &&
		    m->offset + m->size <= size));
		assert_true(m->kind != WIRE_NAME || m->names != NULL);
		assert_true(m->kind != WIRE_OBJECT || m->members != NULL);
		for (const struct wire_member *n = members; n != m; n++)
			assert_string_not_equal(n->name, m->name);
		if (m->kind == WIRE_OBJECT)
			assert_table(m->members, size - m->offset);
	}
}

static void
every_message_has_a_name_of_its_own_and_a_table(void **state)
{
	(void)state;
	for (int i = 0; i < WIRE_TYPES; i++) {
		enum wire_type type = (enum wire_type)i;

		assert_non_null(wire_type_name(type));
		assert_true(strlen(wire_type_name(type)) > 0);
		for (int k = 0; k < i; k++)
			assert_string_not_equal(wire_type_name(type),
			    wire_type_name((enum wire_type)k));
		if (type == WIRE_ROWS)
			assert_null(wire_members(type));
		else {
			assert_non_null(wire_members(type));
			assert_table(wire_members(type), wire_size(type));
		}
	}
}

static void
the_size_of_every_message_is_that_of_its_struct(void **state)
{
	static const struct {
		enum wire_type type;
		const char *name;
		size_t size;
		bool request;	/* what a controller asks: strict */
	} rows[] = {
		{ WIRE_HELLO, "hello", sizeof(struct wire_hello), false },
		{ WIRE_REFUSED, "refused", sizeof(struct wire_refused), false },
		{ WIRE_CAPABILITY, "capability",
		    sizeof(struct wire_capability), false },
		{ WIRE_BEAT, "beat", sizeof(struct wire_beat), true },
		{ WIRE_BEAT_REPLY, "beat-reply",
		    sizeof(struct wire_beat_reply), false },
		{ WIRE_PREPARE, "prepare", sizeof(struct wire_prepare), true },
		{ WIRE_READY, "ready", sizeof(struct wire_ready), false },
		{ WIRE_START, "start", sizeof(struct wire_start), true },
		{ WIRE_STARTED, "started", 0, false },
		{ WIRE_PROGRESS, "progress", sizeof(struct wire_progress),
		    false },
		{ WIRE_ROWS, "rows", sizeof(struct wire_rows), false },
		{ WIRE_ROWS_RECEIVED, "rows-received", sizeof(uint64_t),
		    true },
		{ WIRE_MEASUREMENT, "measurement", sizeof(struct measurement),
		    false },
		{ WIRE_MEASUREMENT_RECEIVED, "measurement-received", 0, true },
		{ WIRE_REFERENCE, "reference", sizeof(struct wire_reference),
		    true },
		{ WIRE_REFERENCE_RESULT, "reference-result",
		    sizeof(struct wire_reference_result), false },
		{ WIRE_RELAY, "relay", sizeof(struct wire_relay), true },
		{ WIRE_RELAYED, "relayed", 0, false },
		{ WIRE_ABORT, "abort", sizeof(struct wire_abort), false },
	};

	(void)state;
	assert_int_equal(sizeof(rows) / sizeof(rows[0]), WIRE_TYPES);
	for (size_t i = 0; i < WIRE_TYPES; i++) {
		assert_int_equal(rows[i].type, i);
		assert_int_equal(wire_size(rows[i].type), rows[i].size);
		assert_string_equal(wire_type_name(rows[i].type),
		    rows[i].name);
		assert_int_equal(wire_is_request(rows[i].type),
		    rows[i].request);
	}
}

static void
a_message_without_a_known_type_is_refused(void **state)
{
	static const char *const texts[] = { "{}", "{\"type\":null}",
		"{\"type\":5}", "{\"type\":[\"beat\"]}", "{\"type\":\"\"}",
		"{\"type\":\"Beat\"}", "{\"type\":\"beat \"}",
		"{\"Type\":\"beat\"}" };
	enum wire_type type = WIRE_TYPES;
	struct error err;
	json_t *message;

	(void)state;
	for (size_t i = 0; i < sizeof(texts) / sizeof(texts[0]); i++) {
		assert_int_equal(frame_decode(texts[i], strlen(texts[i]),
		    &message, &err), 0);
		assert_int_equal(wire_type_of(message, &type, &err), -1);
		assert_int_equal(err.kind, ERROR_PEER);
		assert_int_equal(type, WIRE_TYPES);
		json_decref(message);
	}
	message = json_pack("{s:s}", "type", "be\033[31mat");
	assert_int_equal(wire_type_of(message, &type, &err), -1);
	assert_null(strchr(err.cause, '\033'));
	json_decref(message);
}

/* --- there and back ---------------------------------------------------- */

static void
every_message_survives_the_way_through_json_text(void **state)
{
	uint64_t seed = 1;

	(void)state;
	for (int i = 0; i < 40 * WIRE_TYPES; i++) {
		enum wire_type type = (enum wire_type)(i % WIRE_TYPES), found;
		size_t size = wire_size(type);
		json_t *message, *back;
		struct error err;
		void *body, *decoded;
		char *text;

		if (!is_plain(type))
			continue;
		body = random_body(&seed, type, TRIAL_STREAMS_MAX);
		decoded = malloc(size != 0 ? size : 1);
		assert_non_null(decoded);
		message = wire_encode(type, body);
		text = json_dumps(message, JSON_COMPACT);
		assert_non_null(text);
		assert_true(strlen(text) <= CHANNEL_FRAME_MAX);
		assert_int_equal(frame_decode(text, strlen(text), &back,
		    &err), 0);
		assert_int_equal(wire_type_of(back, &found, &err), 0);
		assert_int_equal(found, type);
		assert_int_equal(wire_decode(type, back, decoded, &err), 0);
		assert_memory_equal(decoded, body, size != 0 ? size : 0);
		json_decref(back);
		json_decref(message);
		free(text);
		free(decoded);
		free(body);
	}
}

/* The names on the wire, written out by hand. */
static void
a_prepare_written_by_hand_says_what_it_says(void **state)
{
	static const char text[] = "{\"type\":\"prepare\",\"trial\":{"
	    "\"number\":3,\"protocol\":\"tcp\",\"direction\":\"b-to-a\","
	    "\"opens\":\"b\",\"streams\":4,\"settle_ns\":1000000000,"
	    "\"settle_extends\":true,\"duration_ns\":3000000000,"
	    "\"row_ns\":100000000,\"congestion_control\":\"cubic\","
	    "\"dscp\":46,\"payload_period_bytes\":16777216},"
	    "\"end\":\"b\",\"local\":\"198.18.0.2\",\"interface\":\"eth1\"}";
	struct wire_prepare prepare;
	struct error err;
	json_t *message;

	(void)state;
	assert_int_equal(frame_decode(text, strlen(text), &message, &err), 0);
	assert_int_equal(wire_decode(WIRE_PREPARE, message, &prepare, &err),
	    0);
	assert_int_equal(prepare.trial.number, 3);
	assert_int_equal(prepare.trial.protocol, PROTOCOL_TCP);
	assert_int_equal(prepare.trial.direction, DIRECTION_B_TO_A);
	assert_int_equal(prepare.trial.opens, END_B);
	assert_int_equal(prepare.trial.streams, 4);
	assert_int_equal(prepare.trial.settle_ns, 1000000000);
	assert_true(prepare.trial.settle_extends);
	assert_int_equal(prepare.trial.duration_ns, UINT64_C(3000000000));
	assert_int_equal(prepare.trial.row_ns, 100000000);
	assert_string_equal(prepare.trial.congestion_control, "cubic");
	assert_int_equal(prepare.trial.dscp, 46);
	assert_int_equal(prepare.trial.mss_bytes, 0);
	assert_int_equal(prepare.trial.rate_limit_bps, 0);
	assert_int_equal(prepare.trial.payload_period_bytes, 16777216);
	assert_int_equal(prepare.end, END_B);
	assert_string_equal(prepare.local, "198.18.0.2");
	assert_string_equal(prepare.interface, "eth1");
	json_decref(message);
}

static void
a_beat_reply_written_by_hand_says_what_it_says(void **state)
{
	static const char text[] = "{\"type\":\"beat-reply\",\"number\":1,"
	    "\"t1_ns\":2,\"t2_ns\":3,\"t3_ns\":4,\"utc_s\":5,\"utc_ns\":6,"
	    "\"more\":[]}";
	struct wire_beat_reply reply;
	struct error err;
	json_t *message;

	(void)state;
	assert_int_equal(frame_decode(text, strlen(text), &message, &err), 0);
	assert_int_equal(wire_decode(WIRE_BEAT_REPLY, message, &reply, &err),
	    0);
	assert_int_equal(reply.number, 1);
	assert_int_equal(reply.t1_ns, 2);
	assert_int_equal(reply.t2_ns, 3);
	assert_int_equal(reply.t3_ns, 4);
	assert_int_equal(reply.utc_s, 5);
	assert_int_equal(reply.utc_ns, 6);
	json_decref(message);
}

/* A host's name need not be UTF-8, and a sentence may be cut within a letter:
 * the message still goes out whole. */
static void
a_text_that_is_no_utf8_still_travels(void **state)
{
	struct wire_abort abort, found;
	struct error err;
	json_t *message;

	(void)state;
	memset(&abort, 0, sizeof(abort));
	(void)snprintf(abort.reason, sizeof(abort.reason), "caf\xc3");
	message = wire_encode(WIRE_ABORT, &abort);
	assert_int_equal(wire_decode(WIRE_ABORT, message, &found, &err), 0);
	assert_string_equal(found.reason, "caf?");
	json_decref(message);
	memset(abort.reason, 0xff, sizeof(abort.reason) - 1);
	message = wire_encode(WIRE_ABORT, &abort);
	assert_int_equal(wire_decode(WIRE_ABORT, message, &found, &err), 0);
	assert_int_equal(strlen(found.reason), sizeof(abort.reason) - 1);
	json_decref(message);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    every_message_has_a_name_of_its_own_and_a_table),
		cmocka_unit_test(
		    the_size_of_every_message_is_that_of_its_struct),
		cmocka_unit_test(a_message_without_a_known_type_is_refused),
		cmocka_unit_test(
		    every_message_survives_the_way_through_json_text),
		cmocka_unit_test(a_prepare_written_by_hand_says_what_it_says),
		cmocka_unit_test(
		    a_beat_reply_written_by_hand_says_what_it_says),
		cmocka_unit_test(a_text_that_is_no_utf8_still_travels),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
