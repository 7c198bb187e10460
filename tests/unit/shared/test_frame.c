/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "channel.h"
#include "error.h"

#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const struct {
	unsigned char bytes[8];
	size_t size;
	int rc;
	size_t length;
	const char *source;
} lengths[] = {
	{ { 0 }, 0, 0, 0, "no header yet" },
	{ { 0xff, 0xff, 0xff }, 3, 0, 0, "a header needs all four bytes" },
	{ { 0, 0, 0, 2, '{', '}' }, 6, 1, 2, "network order, by hand" },
	{ { 0, 0, 0, 2, '{', '}', 0, 0 }, 8, 1, 2, "another frame behind" },
	{ { 0, 0, 0, 2, '{' }, 5, 0, 0, "one byte short" },
	{ { 0, 0, 1, 0 }, 4, 0, 0, "256 bytes to come" },
	{ { 0, 0x10, 0, 0 }, 4, 0, 0, "2^20, the largest" },
	{ { 0, 0x10, 0, 1 }, 4, -1, 0, "2^20 + 1" },
	{ { 0x80, 0, 0, 1 }, 4, -1, 0, "negative, were it signed" },
	{ { 0xff, 0xff, 0xff, 0xff }, 4, -1, 0, "2^32 - 1" },
	{ { 0, 0, 0, 0 }, 4, -1, 0, "nothing is no object" },
};

static void
a_length_is_four_bytes_in_network_order(void **state)
{
	size_t i;

	(void)state;
	for (i = 0; i < sizeof(lengths) / sizeof(lengths[0]); i++) {
		struct error err = { 0 };
		size_t length = 0;
		int rc = frame_length(lengths[i].bytes, lengths[i].size,
		    &length, &err);

		if (rc != lengths[i].rc || length != lengths[i].length ||
		    (rc == -1) != (err.kind == ERROR_PEER))
			fail_msg("%s: %d, %zu", lengths[i].source, rc,
			    length);
	}
}

#define TEXT(literal) literal, sizeof(literal) - 1

static const struct {
	const char *text;
	size_t size;
	bool good;
	const char *source;
} texts[] = {
	{ TEXT("{}"), true, "RFC 8259, 4" },
	{ TEXT(" {\"a\" : [1, 2.5, true, null, \"x\"]} \r\n"), true,
	    "RFC 8259, 2: white space" },
	{ TEXT("{\"a\":\"\xc3\xa9\xe2\x82\xac\xf0\x9f\x98\x80\"}"), true,
	    "RFC 3629: 2, 3 and 4 bytes" },
	{ TEXT("{\"n\":9007199254740991}"), true, "RFC 7493, 2.2: 2^53 - 1" },
	{ TEXT("{\"n\":-9007199254740991}"), true, "RFC 7493, 2.2" },
	{ TEXT("{\"n\":9007199254740992}"), false, "RFC 7493, 2.2: 2^53" },
	{ TEXT("{\"n\":-9007199254740992}"), false, "RFC 7493, 2.2" },
	{ TEXT("{\"a\":[{\"n\":9007199254740992}]}"), false,
	    "RFC 7493, 2.2, further down" },
	{ TEXT("{\"n\":18446744073709551616}"), false, "2^64" },
	{ TEXT("{\"a\":1,\"a\":2}"), false, "RFC 7493, 2.3: duplicates" },
	{ TEXT("{\"x\":{\"a\":1,\"\\u0061\":2}}"), false,
	    "RFC 7493, 2.3: one name in two spellings" },
	{ TEXT(""), false, "empty" },
	{ TEXT("[]"), false, "an array" },
	{ TEXT("1"), false, "a number" },
	{ TEXT("null"), false, "null" },
	{ TEXT("{"), false, "cut" },
	{ TEXT("{}x"), false, "text behind" },
	{ TEXT("{}{}"), false, "two objects" },
	{ TEXT("{} \0"), false, "a NUL behind" },
	{ TEXT("{\"a\":\"\\u0000\"}"), false, "a NUL inside" },
	{ TEXT("{a:1}"), false, "RFC 8259, 4: names are strings" },
	{ TEXT("{\"a\":1,}"), false, "RFC 8259, 4: no trailing comma" },
	{ TEXT("{\"a\":01}"), false, "RFC 8259, 6: leading zero" },
	{ TEXT("{\"a\":NaN}"), false, "RFC 8259, 6: NaN" },
	{ TEXT("{\"a\":\"\xff\"}"), false, "RFC 3629: never a byte" },
	{ TEXT("{\"a\":\"\xc0\xaf\"}"), false, "RFC 3629: overlong" },
	{ TEXT("{\"a\":\"\xed\xa0\x80\"}"), false, "RFC 3629: a surrogate" },
	{ TEXT("{\"a\":\"\xc3\"}"), false, "RFC 3629: cut" },
	{ TEXT("{\"a\":\"\\ud800\"}"), false, "RFC 7493, 2.1: a surrogate" },
	{ TEXT("{\"a\":\"\n\"}"), false, "RFC 8259, 7: control characters" },
	{ TEXT("\xef\xbb\xbf{}"), false, "RFC 8259, 8.1: byte order mark" },
};

static void
a_frame_is_one_object_of_strict_json(void **state)
{
	size_t i;

	(void)state;
	for (i = 0; i < sizeof(texts) / sizeof(texts[0]); i++) {
		/* A copy without a NUL: nothing may be read behind it. */
		char *copy = malloc(texts[i].size + 1);
		struct error err = { 0 };
		json_t *object = NULL;
		int rc;

		memcpy(copy, texts[i].text, texts[i].size);
		copy = realloc(copy, texts[i].size > 0 ? texts[i].size : 1);
		rc = frame_decode(copy, texts[i].size, &object, &err);
		if ((rc == 0) != texts[i].good ||
		    (rc == 0) != json_is_object(object) ||
		    (rc == -1) != (err.kind == ERROR_PEER))
			fail_msg("%s: %d %s", texts[i].source, rc, err.cause);
		json_decref(object);
		free(copy);
	}
}

/* {"a":[[[...]]]} of so many objects and arrays. */
static int
decode_nested(unsigned depth)
{
	char text[512] = "{\"a\":";
	struct error err;
	json_t *object = NULL;
	unsigned i;
	int rc;

	for (i = 1; i < depth; i++)
		(void)strcat(text, "[");
	if (depth == 1)
		(void)strcat(text, "1");
	for (i = 1; i < depth; i++)
		(void)strcat(text, "]");
	(void)strcat(text, "}");
	rc = frame_decode(text, strlen(text), &object, &err);
	json_decref(object);
	return rc;
}

static void
nesting_ends_at_32(void **state)
{
	(void)state;
	assert_int_equal(decode_nested(1), 0);
	assert_int_equal(decode_nested(32), 0);
	assert_int_equal(decode_nested(33), -1);
	assert_int_equal(decode_nested(200), -1);
}

static void
a_frame_of_brackets_alone_is_refused(void **state)
{
	char *text = malloc(CHANNEL_FRAME_MAX);
	json_t *object = NULL;
	struct error err;

	(void)state;
	memset(text, '[', CHANNEL_FRAME_MAX);
	assert_int_equal(frame_decode(text, CHANNEL_FRAME_MAX, &object, &err),
	    -1);
	memcpy(text, "{\"a\":", 5);
	assert_int_equal(frame_decode(text, CHANNEL_FRAME_MAX, &object, &err),
	    -1);
	assert_int_equal(err.kind, ERROR_PEER);
	free(text);
}

static void
every_truncation_of_an_object_is_refused(void **state)
{
	static const char whole[] =
	    "{\"type\":\"hello\",\"n\":[1,-2.5e3,true,null],\"o\":{\"\":\"\\n"
	    "\xc3\xa9\"}}";
	json_t *object = NULL;
	struct error err;
	size_t size;

	(void)state;
	for (size = 0; size < sizeof(whole) - 1; size++) {
		assert_int_equal(frame_decode(whole, size, &object, &err), -1);
		assert_int_equal(err.kind, ERROR_PEER);
		assert_null(object);
	}
	assert_int_equal(frame_decode(whole, size, &object, &err), 0);
	json_decref(object);
}

static void
what_a_peer_wrote_is_escaped_in_the_cause(void **state)
{
	static const char text[] = "{\"a\": \x1b[31m\n}";
	json_t *object = NULL;
	struct error err;

	(void)state;
	assert_int_equal(frame_decode(text, sizeof(text) - 1, &object, &err),
	    -1);
	assert_null(strpbrk(err.cause, "\x1b\n"));
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_length_is_four_bytes_in_network_order),
		cmocka_unit_test(a_frame_is_one_object_of_strict_json),
		cmocka_unit_test(nesting_ends_at_32),
		cmocka_unit_test(a_frame_of_brackets_alone_is_refused),
		cmocka_unit_test(every_truncation_of_an_object_is_refused),
		cmocka_unit_test(what_a_peer_wrote_is_escaped_in_the_cause),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
