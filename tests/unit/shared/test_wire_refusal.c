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

/* --- every member of every message -------------------------------------- */

/* Calls `visit` once a member of every plain message, objects within objects
 * included, each time with a fresh valid message. */
typedef void (*visit_fn)(enum wire_type type, json_t *message, json_t *object,
    const struct wire_member *m);

static void
visit_members(uint64_t *seed, enum wire_type type,
    const struct wire_member *members, const char *inside, visit_fn visit)
{
	for (const struct wire_member *m = members; m->name != NULL; m++) {
		json_t *message = random_message(seed, type);
		json_t *object = inside == NULL ? message :
		    json_object_get(message, inside);

		assert_non_null(object);
		visit(type, message, object, m);
		json_decref(message);
		if (m->kind == WIRE_OBJECT) {
			assert_null(inside);	/* one level is all we have */
			visit_members(seed, type, m->members, m->name, visit);
		}
	}
}

static void
visit_all(visit_fn visit)
{
	uint64_t seed = 5;

	for (int i = 0; i < WIRE_TYPES; i++)
		if (is_plain((enum wire_type)i))
			visit_members(&seed, (enum wire_type)i,
			    wire_members((enum wire_type)i), NULL, visit);
}

static void
assert_refused(enum wire_type type, const json_t *message, const char *name)
{
	char wanted[80];
	struct error err;

	(void)snprintf(wanted, sizeof(wanted), "member '%s'", name);
	assert_int_equal(decode(type, message, &err), -1);
	if (strstr(err.cause, wanted) == NULL)
		fail_msg("'%s' does not name '%s'", err.cause, name);
}

/* --- what is refused --------------------------------------------------- */

static void
visit_missing(enum wire_type type, json_t *message, json_t *object,
    const struct wire_member *m)
{
	struct error err;

	assert_int_equal(json_object_del(object, m->name), 0);
	if (m->optional)
		assert_int_equal(decode(type, message, &err), 0);
	else
		assert_refused(type, message, m->name);
}

static void
a_missing_member_is_refused_by_name(void **state)
{
	(void)state;
	visit_all(visit_missing);
}

static bool
fits(const struct wire_member *m, const json_t *value)
{
	switch (m->kind) {
	case WIRE_U64:
		return json_is_integer(value) ||
		    (m->nullable && json_is_null(value));
	case WIRE_BOOL:
		return json_is_boolean(value);
	case WIRE_TEXT:
		return json_is_string(value);
	case WIRE_TOKENS:
		return json_is_array(value);
	case WIRE_NAME:
	case WIRE_OBJECT:
		break;
	}
	return false;
}

static void
visit_wrong_type(enum wire_type type, json_t *message, json_t *object,
    const struct wire_member *m)
{
	json_t *values[] = { json_null(), json_true(), json_integer(1),
		json_real(1.0), json_string("?"), json_array(),
		json_object() };

	for (size_t i = 0; i < sizeof(values) / sizeof(values[0]); i++) {
		if (!fits(m, values[i])) {
			assert_int_equal(json_object_set(object, m->name,
			    values[i]), 0);
			/* of an empty object the first member is missing */
			assert_refused(type, message,
			    m->kind == WIRE_OBJECT &&
			    json_is_object(values[i]) ? m->members[0].name :
			    m->name);
		}
		json_decref(values[i]);
	}
}

static void
a_member_of_another_type_is_refused_by_name(void **state)
{
	(void)state;
	visit_all(visit_wrong_type);
}

static void
set_number(json_t *object, const struct wire_member *m, json_int_t value)
{
	assert_int_equal(json_object_set_new(object, m->name,
	    json_integer(value)), 0);
}

static void
visit_limits(enum wire_type type, json_t *message, json_t *object,
    const struct wire_member *m)
{
	struct error err;

	if (m->kind != WIRE_U64)
		return;
	set_number(object, m, (json_int_t)m->min);
	assert_int_equal(decode(type, message, &err), 0);
	set_number(object, m, (json_int_t)m->min - 1);
	assert_refused(type, message, m->name);
	set_number(object, m, -1);
	assert_refused(type, message, m->name);
	set_number(object, m, INT64_MIN);
	assert_refused(type, message, m->name);
	set_number(object, m, (json_int_t)greatest(m));
	assert_int_equal(decode(type, message, &err), 0);
	set_number(object, m, (json_int_t)greatest(m) + 1);
	assert_refused(type, message, m->name);
	set_number(object, m, INT64_MAX);
	assert_refused(type, message, m->name);
}

static void
a_number_is_held_to_its_limits(void **state)
{
	(void)state;
	visit_all(visit_limits);
}

static void
visit_texts(enum wire_type type, json_t *message, json_t *object,
    const struct wire_member *m)
{
	char text[WIRE_MEMBERS_SIZE + 1];
	struct error err;

	if (m->kind != WIRE_TEXT)
		return;
	memset(text, 'x', sizeof(text));
	text[m->size] = '\0';
	(void)json_object_set_new(object, m->name, json_string(text));
	assert_refused(type, message, m->name);
	(void)json_object_set_new(object, m->name, json_string(text + 1));
	assert_int_equal(decode(type, message, &err), 0);
	(void)json_object_set_new(object, m->name, json_stringn("a\0b", 3));
	assert_refused(type, message, m->name);
	(void)json_object_set_new(object, m->name, json_stringn("a\0", 2));
	assert_refused(type, message, m->name);
}

static void
a_text_too_long_or_with_a_nul_is_refused(void **state)
{
	struct error err;
	json_t *message;

	(void)state;
	visit_all(visit_texts);
	assert_int_equal(frame_decode("{\"type\":\"a\\u0000\"}", 18, &message,
	    &err), -1);
}

static void
visit_unknown(enum wire_type type, json_t *message, json_t *object,
    const struct wire_member *m)
{
	/* not even the name that every message has */
	const char *name = object == message ? "nonsense" : "type";
	struct error err;

	(void)m;
	(void)json_object_set_new(object, name, json_null());
	if (wire_is_request(type))
		assert_refused(type, message, name);
	else
		assert_int_equal(decode(type, message, &err), 0);
}

static void
an_unknown_member_is_refused_in_requests_only(void **state)
{
	json_t *message = json_pack("{s:s,s:i}", "type",
	    "measurement-received", "a\033\n", 1);
	struct error err;

	(void)state;
	visit_all(visit_unknown);
	assert_int_equal(decode(WIRE_MEASUREMENT_RECEIVED, message, &err), -1);
	assert_null(strchr(err.cause, '\033'));
	assert_null(strchr(err.cause, '\n'));
	json_decref(message);
}

static void
what_nobody_knows_travels_as_null(void **state)
{
	struct measurement body, found;
	struct error err;
	json_t *message, *last;

	(void)state;
	memset(&body, 0, sizeof(body));
	body.streams = 1;
	body.steal_ns = body.interface_bytes = UNKNOWN_U64;
	for (int i = 0; i < TCP_SAMPLE_COUNT; i++)
		body.last.value[i] = UNKNOWN_U64;
	body.last.value[TCP_SAMPLE_rtt_us] = 20000;
	message = wire_encode(WIRE_MEASUREMENT, &body);
	last = json_object_get(message, "last");
	assert_true(json_is_null(json_object_get(message, "steal_ns")));
	assert_true(json_is_null(json_object_get(last, "snd_mss_bytes")));
	assert_int_equal(json_integer_value(json_object_get(last, "rtt_us")),
	    20000);
	assert_int_equal(wire_decode(WIRE_MEASUREMENT, message, &found, &err),
	    0);
	assert_int_equal(found.steal_ns, UNKNOWN_U64);
	assert_int_equal(found.interface_bytes, UNKNOWN_U64);
	assert_int_equal(found.last.value[TCP_SAMPLE_rtt_us], 20000);
	assert_int_equal(found.last.value[TCP_SAMPLE_rcv_wnd_bytes],
	    UNKNOWN_U64);
	json_decref(message);
	/* a count beyond I-JSON is cut, for a member that is always known */
	body.bytes = UINT64_MAX;
	message = wire_encode(WIRE_MEASUREMENT, &body);
	assert_int_equal(json_integer_value(json_object_get(message,
	    "bytes")), WIRE_INTEGER_MAX);
	json_decref(message);
}

static void
a_measurement_or_progress_of_both_directions_is_refused(void **state)
{
	uint64_t seed = 11;
	json_t *message = random_message(&seed, WIRE_MEASUREMENT);

	(void)state;
	(void)json_object_set_new(message, "direction", json_string("both"));
	assert_refused(WIRE_MEASUREMENT, message, "direction");
	json_decref(message);
	message = random_message(&seed, WIRE_PROGRESS);
	(void)json_object_set_new(message, "direction", json_string("both"));
	assert_refused(WIRE_PROGRESS, message, "direction");
	json_decref(message);
}

static void
a_token_is_32_lower_case_hex_digits(void **state)
{
	static const struct { const char *token; int rc; } rows[] = {
		{ "00112233445566778899aabbccddeeff", 0 },
		{ "00112233445566778899aabbccddeef", -1 },
		{ "00112233445566778899aabbccddeeff0", -1 },
		{ "00112233445566778899AABBCCDDEEFF", -1 },
		{ "00112233445566778899aabbccddeefg", -1 },
		{ "00112233445566778899aabbccddee f", -1 },
		{ "0x112233445566778899aabbccddeeff", -1 },
		{ "", -1 },
	};
	struct error err;

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++) {
		json_t *message = json_pack("{s:s,s:s,s:i,s:[s]}", "type",
		    "start", "peer", "::1", "peer_port", 1, "tokens",
		    rows[i].token);

		assert_int_equal(decode(WIRE_START, message, &err),
		    rows[i].rc);
		json_decref(message);
	}
}

static void
no_more_tokens_than_streams_are_taken(void **state)
{
	json_t *message = json_pack("{s:s,s:s,s:i,s:[]}", "type", "start",
	    "peer", "::1", "peer_port", 1, "tokens");
	json_t *tokens = json_object_get(message, "tokens");
	struct wire_start start;
	struct error err;

	(void)state;
	for (int i = 0; i < TRIAL_STREAMS_MAX; i++)
		(void)json_array_append_new(tokens,
		    json_string("00112233445566778899aabbccddeeff"));
	assert_int_equal(wire_decode(WIRE_START, message, &start, &err), 0);
	assert_int_equal(start.tokens_count, TRIAL_STREAMS_MAX);
	assert_string_equal(start.tokens[TRIAL_STREAMS_MAX - 1],
	    "00112233445566778899aabbccddeeff");
	(void)json_array_append_new(tokens,
	    json_string("00112233445566778899aabbccddeeff"));
	assert_refused(WIRE_START, message, "tokens");
	json_decref(message);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_missing_member_is_refused_by_name),
		cmocka_unit_test(a_member_of_another_type_is_refused_by_name),
		cmocka_unit_test(a_number_is_held_to_its_limits),
		cmocka_unit_test(a_text_too_long_or_with_a_nul_is_refused),
		cmocka_unit_test(
		    an_unknown_member_is_refused_in_requests_only),
		cmocka_unit_test(what_nobody_knows_travels_as_null),
		cmocka_unit_test(
		    a_measurement_or_progress_of_both_directions_is_refused),
		cmocka_unit_test(a_token_is_32_lower_case_hex_digits),
		cmocka_unit_test(no_more_tokens_than_streams_are_taken),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
