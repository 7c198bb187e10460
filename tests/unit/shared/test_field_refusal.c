/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <math.h>
#include <string.h>

#include "shared/field_fixture.h"

static const struct {
	const char *text;
	const char *message;
} refusals[] = {
	{ "name: a\nline-rate: 1 Gbps/s", "f.yaml:2:12: line-rate: "
	    "found '1 Gbps/s', allowed: a rate such as '1 Gbit/s' from "
	    "1 bit/s to 1 Tbit/s (unknown unit 'Gbps/s'; known: bit/s" },
	{ "{ name: a, line-rate: 2 Tbit/s }", "f.yaml:1:23: line-rate: "
	    "found '2 Tbit/s', allowed: a rate such as '1 Gbit/s' from "
	    "1 bit/s to 1 Tbit/s" },
	{ "{ name: a, line-rate: 1000 }", "f.yaml:1:23: line-rate: "
	    "found '1000', allowed: a rate such as '1 Gbit/s' from "
	    "1 bit/s to 1 Tbit/s (no unit; known: bit/s" },
	{ "{ name: a, line-rate: '' }", "f.yaml:1:23: line-rate: found ''" },
	{ "{ name: a, burst: 1 kB }", "f.yaml:1:19: burst: found '1 kB', "
	    "allowed: a size such as '1500 B' from 1500 B to 65535 B" },
	{ "{ name: a, delay: 1 B }", "f.yaml:1:19: delay: found '1 B', "
	    "allowed: a time such as '100 ms' ('B' is the unit of a size" },
	{ "{ name: a, share: 40 % }", "f.yaml:1:19: share: found '40 %', "
	    "allowed: a ratio such as '97 %' or '0.97' from 50 % to 100 %" },
	{ "{ name: a, share: -1 % }", "f.yaml:1:19: share: found '-1 %', "
	    "allowed: a ratio such as '97 %' or '0.97' from 50 % to 100 % "
	    "(a sign '-' is not allowed: never negative)" },
	{ "{ name: a, level: 3 dB }", "f.yaml:1:19: level: found '3 dB', "
	    "allowed: a level such as '-60 dBm' ('dB' is the unit of" },
	{ "{ name: a, streams: 65 }", "f.yaml:1:21: streams: found '65', "
	    "allowed: a whole number from 1 to 64" },
	{ "{ name: a, streams: 4 B }", "f.yaml:1:21: streams: found '4 B', "
	    "allowed: a whole number from 1 to 64" },
	{ "{ name: a, on: maybe }", "f.yaml:1:16: on: found 'maybe', "
	    "allowed: yes or no" },
	{ "{ name: a, on: Yes }", "f.yaml:1:16: on: found 'Yes'" },
	{ "{ name: a, kind: glass }", "f.yaml:1:18: kind: found 'glass', "
	    "allowed: one of copper, fibre, radio" },
	{ "name: 123456789", "f.yaml:1:7: name: found '123456789', "
	    "allowed: a text of 1 to 8 bytes" },
	{ "name: ''", "f.yaml:1:7: name: found '', allowed: a text of 1 to" },
	{ "name: \"a\\tb\"", "f.yaml:1:7: name: found 'a?b', allowed: a text "
	    "of 1 to 8 bytes (a control character)" },
	{ "name: \"a\\x7f\"", "f.yaml:1:7: name: found 'a?'" },
	{ "name: \"a\\x9b\"", "f.yaml:1:7: name: found 'a?'" },
	{ "name: \"a\\nb\"", "f.yaml:1:7: name: found 'a?b'" },
	{ "name: [ a ]", "f.yaml:1:7: name: found a list, allowed: a text" },
	{ "name: { a: b }", "f.yaml:1:7: name: found a mapping, allowed" },
	{ "a word", "f.yaml:1:1: thing: found a scalar 'a word', allowed: "
	    "a mapping" },
	{ "[ a ]", "f.yaml:1:1: thing: found a list, allowed: a mapping" },
	{ "burst: 64 kB", "f.yaml:1:1: required field 'name' is missing in "
	    "thing; allowed: a text of 1 to 8 bytes" },
	{ "name: a\ninner: {}", "f.yaml:2:8: required field 'name' is "
	    "missing in inner" },
	{ "name: a\ninner:\n  rate: 1 B/s", "f.yaml:3:3: required field "
	    "'name' is missing in inner" },
	{ "name: a\ninner: x", "f.yaml:2:8: inner: found a scalar 'x', "
	    "allowed: a mapping" },
	{ "name: a\ninner:", "f.yaml:2:7: inner: found a scalar ''" },
	{ "name: a\ninner: [ a ]", "f.yaml:2:8: inner: found a list" },
	{ "{ name: a, items: x }", "f.yaml:1:19: items: found a scalar 'x', "
	    "allowed: a list of 1 to 3 mappings" },
	{ "{ name: a, items: { name: b } }", "f.yaml:1:19: items: found a "
	    "mapping, allowed: a list of 1 to 3 mappings" },
	{ "{ name: a, items: [] }", "f.yaml:1:19: items: found a list of 0, "
	    "allowed: a list of 1 to 3 mappings" },
	{ "{ name: a, items: [ {}, {}, {}, {} ] }", "f.yaml:1:19: items: "
	    "found a list of 4, allowed: a list of 1 to 3 mappings" },
	{ "{ name: a, items: [ { name: b }, c ] }", "f.yaml:1:34: items.1: "
	    "found a scalar 'c', allowed: a mapping" },
	{ "{ name: a, items: [ { name: b }, {} ] }", "f.yaml:1:34: required "
	    "field 'name' is missing in items.1" },
	{ "{ name: a, items: [ { name: b, rat: 1 } ] }", "f.yaml:1:32: "
	    "unknown field 'rat' in items.0; did you mean 'rate'?" },
	{ "{ name: a, custom: x }", "f.yaml:1:20: custom: no list" },
	{ "{ name: a, line-rate: [ 1 ] }", "f.yaml:1:23: line-rate: found a "
	    "list, allowed: a rate such as '1 Gbit/s' from 1 bit/s to "
	    "1 Tbit/s, or a mapping of it for a-to-b, b-to-a" },
	{ "{ name: a, line-rate: { up: 1 Mbit/s } }", "f.yaml:1:25: unknown "
	    "field 'up' in line-rate; known: a-to-b, b-to-a" },
	{ "{ name: a, line-rate: { a-to-c: 1 bit/s } }", "f.yaml:1:25: "
	    "unknown field 'a-to-c' in line-rate; did you mean 'a-to-b'?" },
	{ "{ name: a, line-rate: { a-to-b: [ 1 ] } }", "f.yaml:1:33: "
	    "line-rate: found a list" },
	{ "{ name: a, line-rate: { b-to-a: 1 B } }", "f.yaml:1:33: "
	    "line-rate: found '1 B'" },
	{ "{ name: a, burst: { a-to-b: 64 kB } }", "f.yaml:1:19: burst: "
	    "found a mapping, allowed: a size" },
	{ "name: a\nkidn: radio", "f.yaml:2:1: unknown field 'kidn' in "
	    "thing; did you mean 'kind'?" },
	{ "name: a\nzzzzz: radio", "f.yaml:2:1: unknown field 'zzzzz' in "
	    "thing; known: name, line-rate, burst, delay, share, loss, "
	    "level, streams, priority, on, kind, inner, items, custom" },
	{ "name: a\n\"z\\e[0m\": radio", "f.yaml:2:1: unknown field 'z?[0m' "
	    "in thing" },
};

static void
errors_name_place_field_found_and_allowed(void **state)
{
	(void)state;
	for (size_t i = 0; i < COUNT(refusals); i++) {
		struct thing t;
		char message[800];

		if (read_thing(refusals[i].text, &t, message) == 0)
			fail_msg("'%s' was read", refusals[i].text);
		if (strncmp(message, refusals[i].message,
		    strlen(refusals[i].message)) != 0)
			fail_msg("'%s': '%s', not '%s'", refusals[i].text,
			    message, refusals[i].message);
	}
}

static void
long_text_leaves_room_for_what_is_allowed(void **state)
{
	char text[3000], message[800];
	struct thing t;

	(void)state;
	memset(text, 'x', sizeof(text));
	memcpy(text, "name: ", 6);
	text[sizeof(text) - 1] = '\0';
	assert_int_equal(read_thing(text, &t, message), -1);
	assert_non_null(strstr(message, "xxx...', allowed: a text of 1 to 8"));
}

static void
text_is_cut_between_characters(void **state)
{
	/* U+00E9 two bytes long, at odd and even places */
	static const char *const starts[] = { "", "x" };
	char text[300], message[800];
	struct thing t;

	(void)state;
	for (size_t i = 0; i < COUNT(starts); i++) {
		size_t used = (size_t)snprintf(text, sizeof(text),
		    "name: %s", starts[i]);

		for (; used + 3 < sizeof(text); used += 2)
			memcpy(text + used, "\303\251", 3);
		assert_int_equal(read_thing(text, &t, message), -1);
		assert_non_null(strstr(message, "\303\251...'"));
	}
}

static void
a_wrong_override_is_named_as_such(void **state)
{
	static const char text[] = "name: quay";
	struct node *root = NULL;
	struct error err = { 0 };
	struct thing t;

	(void)state;
	assert_int_equal(document_read_text(text, sizeof(text) - 1, "f",
	    &root, &err), 0);
	assert_int_equal(document_override(root, "line-rate=1", &err), 0);
	assert_int_equal(fields_read(root, rows, "thing", &t, &err), -1);
	assert_string_equal(err.where, "--set line-rate");
	assert_int_equal(document_override(root, "line-rate=1 bit/s", &err),
	    0);
	assert_int_equal(document_override(root, "lin-rate=1", &err), 0);
	assert_int_equal(fields_read(root, rows, "thing", &t, &err), -1);
	assert_string_equal(err.where, "--set lin-rate");
	assert_string_equal(err.cause, "unknown field 'lin-rate' in thing; "
	    "did you mean 'line-rate'?");
	document_free(root);
}

static void
an_argument_has_no_place(void **state)
{
	struct error err = { 0 };
	uint64_t value = 77;

	(void)state;
	assert_int_equal(field_set_text(row_named("streams"), "x", NULL,
	    &value, &err), -1);
	assert_string_equal(err.where, "");
	assert_string_equal(err.cause,
	    "streams: found 'x', allowed: a whole number from 1 to 64");
	assert_int_equal(value, 77);
	assert_int_equal(field_set_text(row_named("inner"), "x", NULL,
	    &value, &err), -1);
	assert_int_equal(field_set_text(row_named("items"), "x", NULL,
	    &value, &err), -1);
	assert_int_equal(field_set_text(row_named("custom"), "x", NULL,
	    &value, &err), -1);
}

static void
every_row_says_what_it_accepts(void **state)
{
	static const struct {
		const char *row, *allowed;
	} table[] = {
		{ "name", "a text of 1 to 8 bytes" },
		{ "line-rate", "a rate such as '1 Gbit/s' from 1 bit/s to "
		    "1 Tbit/s, or a mapping of it for a-to-b, b-to-a" },
		{ "burst", "a size such as '1500 B' from 1500 B to 65535 B" },
		{ "delay", "a time such as '100 ms'" },
		{ "share", "a ratio such as '97 %' or '0.97' from 50 % to "
		    "100 %" },
		{ "loss", "a ratio such as '97 %' or '0.97' from 0 % to "
		    "100 %, or a mapping of it for a-to-b, b-to-a" },
		{ "level", "a level such as '-60 dBm'" },
		{ "streams", "a whole number from 1 to 64" },
		{ "priority", "a whole number from 0 to 7, or a mapping of "
		    "it for a-to-b, b-to-a" },
		{ "on", "yes or no" },
		{ "kind", "one of copper, fibre, radio" },
		{ "inner", "a mapping" },
		{ "items", "a list of 1 to 3 mappings" },
		{ "custom", "a list of anything" },
	};
	char buf[200];

	(void)state;
	assert_int_equal(COUNT(table), COUNT(rows) - 1);
	for (size_t i = 0; i < COUNT(table); i++)
		assert_string_equal(field_allowed(row_named(table[i].row), buf,
		    sizeof(buf)), table[i].allowed);
}

static void
one_limit_alone_is_told(void **state)
{
	static const struct {
		struct field row;
		const char *allowed;
	} table[] = {
		{ { .kind = FIELD_COUNT, .min = 3 },
		    "a whole number, at least 3" },
		{ { .kind = FIELD_COUNT }, "a whole number" },
		{ { .kind = FIELD_QUANTITY, .dimension = DIMENSION_TIME,
		    .min = 1000 }, "a time such as '100 ms', at least 1 us" },
		{ { .kind = FIELD_REAL, .dimension = DIMENSION_FREQUENCY,
		    .real_min = 1, .real_max = (double)INFINITY },
		    "a frequency such as '28 MHz', at least 1 Hz" },
		{ { .kind = FIELD_REAL, .dimension = DIMENSION_DECIBEL,
		    .real_min = -(double)INFINITY, .real_max = 3 },
		    "a ratio in decibels such as '10 dB', at most 3 dB" },
		{ { .kind = FIELD_REAL, .dimension = DIMENSION_POWER,
		    .real_min = 0.001, .real_max = 4 },
		    "a power such as '20 mW' from 1 mW to 4 W" },
		{ { .kind = FIELD_TEXT, .size = 64 },
		    "a text of at most 63 bytes" },
		{ { .kind = FIELD_CHOICE, .choices = kinds + 2 }, "radio" },
	};
	char buf[200];

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++)
		assert_string_equal(field_allowed(&table[i].row, buf,
		    sizeof(buf)), table[i].allowed);
	(void)field_allowed(&table[2].row, buf, 10);
	assert_string_equal(buf, "a time su");
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(errors_name_place_field_found_and_allowed),
		cmocka_unit_test(long_text_leaves_room_for_what_is_allowed),
		cmocka_unit_test(text_is_cut_between_characters),
		cmocka_unit_test(a_wrong_override_is_named_as_such),
		cmocka_unit_test(an_argument_has_no_place),
		cmocka_unit_test(every_row_says_what_it_accepts),
		cmocka_unit_test(one_limit_alone_is_told),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
