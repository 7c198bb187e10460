/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <errno.h>
#include <string.h>

#include "clock.h"
#include "error.h"
#include "log.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

static void
an_error_starts_afresh(void **state)
{
	struct error err;

	(void)state;
	memset(&err, 'x', sizeof(err));
	assert_int_equal(error_set(&err, ERROR_PEER, "found %d", 3), -1);
	assert_int_equal(err.kind, ERROR_PEER);
	assert_int_equal(err.sys_errno, 0);
	assert_string_equal(err.where, "");
	assert_string_equal(err.cause, "found 3");
}

static void
errno_is_kept_and_told(void **state)
{
	struct error err;

	(void)state;
	errno = ENOENT;
	assert_int_equal(error_errno(&err, ERROR_ABSENT, "open '%s'", "x"),
	    -1);
	assert_int_equal(err.kind, ERROR_ABSENT);
	assert_int_equal(err.sys_errno, ENOENT);
	/* the C library's text of ENOENT */
	assert_string_equal(err.cause, "open 'x': No such file or directory");
}

static void
places_are_put_in_front(void **state)
{
	struct error err;
	char text[1024];

	(void)state;
	(void)error_set(&err, ERROR_INPUT, "found 3");
	assert_string_equal(error_text(&err, text, sizeof(text)), "found 3");
	error_wrap(&err, "line %d", 7);
	assert_string_equal(error_text(&err, text, sizeof(text)),
	    "line 7: found 3");
	error_wrap(&err, "file '%s'", "a");
	assert_string_equal(error_text(&err, text, sizeof(text)),
	    "file 'a': line 7: found 3");
	assert_string_equal(err.where, "file 'a': line 7");
}

static void
no_place_pushes_out_the_cause(void **state)
{
	char text[1024], place[600];
	struct error err;

	(void)state;
	memset(place, 'p', sizeof(place));
	place[sizeof(place) - 1] = '\0';
	(void)error_set(&err, ERROR_INPUT, "the cause");
	for (int i = 0; i < 5; i++)
		error_wrap(&err, "%s", place);
	assert_string_equal(err.cause, "the cause");
	assert_int_equal(strlen(err.where), sizeof(err.where) - 1);
	(void)error_text(&err, text, sizeof(text));
	assert_string_equal(text + strlen(text) - strlen(": the cause"),
	    ": the cause");
}

static void
a_long_cause_is_cut(void **state)
{
	char cause[2000], text[32];
	struct error err;

	(void)state;
	memset(cause, 'c', sizeof(cause));
	cause[sizeof(cause) - 1] = '\0';
	(void)error_set(&err, ERROR_INPUT, "%s", cause);
	assert_int_equal(strlen(err.cause), sizeof(err.cause) - 1);
	errno = EIO;
	(void)error_errno(&err, ERROR_READ, "%s", cause);
	assert_int_equal(strlen(err.cause), sizeof(err.cause) - 1);
	(void)error_text(&err, text, sizeof(text));
	assert_int_equal(strlen(text), sizeof(text) - 1);
}

static void
every_kind_has_its_exit_status(void **state)
{
	static const struct {
		enum error_kind kind;
		int status;
		const char *source;
	} table[] = {
		{ ERROR_NONE, 0, "C11 7.22.4.4" },
		{ ERROR_USAGE, 64, "sysexits.h, EX_USAGE" },
		{ ERROR_INPUT, 65, "sysexits.h, EX_DATAERR" },
		{ ERROR_ABSENT, 66, "sysexits.h, EX_NOINPUT" },
		{ ERROR_UNREACHABLE, 69, "sysexits.h, EX_UNAVAILABLE" },
		{ ERROR_PEER, 69, "sysexits.h, EX_UNAVAILABLE" },
		{ ERROR_INTERNAL, 70, "sysexits.h, EX_SOFTWARE" },
		{ ERROR_WRITE, 73, "sysexits.h, EX_CANTCREAT" },
		{ ERROR_READ, 74, "sysexits.h, EX_IOERR" },
		{ ERROR_BUSY, 75, "sysexits.h, EX_TEMPFAIL" },
		{ ERROR_REFUSED, 77, "sysexits.h, EX_NOPERM" },
		{ ERROR_POLICY, 78, "sysexits.h, EX_CONFIG" },
		{ ERROR_INTERRUPTED, 3, "as a void verdict" },
	};

	(void)state;
	assert_int_equal(COUNT(table), ERROR_KINDS);
	for (size_t i = 0; i < COUNT(table); i++)
		assert_int_equal(error_exit_status(table[i].kind),
		    table[i].status);
	assert_int_equal(error_exit_status(ERROR_KINDS), 70);
}

static void
what_a_peer_says_is_escaped(void **state)
{
	static const struct {
		const char *text, *escaped;
	} table[] = {
		{ "", "" },
		{ "plain text 1.2", "plain text 1.2" },
		{ "a\"b", "a\\x22b" },
		{ "a\\b", "a\\x5cb" },
		{ "a\nb\r", "a\\x0ab\\x0d" },
		{ "\033[31m", "\\x1b[31m" },
		{ "\177", "\\x7f" },
		{ "\303\251", "\\xc3\\xa9" },
		{ "%s%n", "%s%n" },
	};
	char buf[64];

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++)
		assert_string_equal(log_escape(table[i].text, buf,
		    sizeof(buf)), table[i].escaped);
}

static void
escaped_text_keeps_to_its_buffer(void **state)
{
	(void)state;
	for (unsigned long size = 1; size < 40; size++) {
		char buf[64];

		memset(buf, '#', sizeof(buf));
		(void)log_escape("ab\ncd\"ef\\gh\001\002\003\004\005", buf,
		    size);
		assert_true(strlen(buf) < size);
		assert_int_equal(buf[size], '#');
	}
}

static void
civil_time_is_written_as_rfc_3339(void **state)
{
	static const struct {
		uint64_t utc_ns;
		const char *text;
		const char *source;
	} table[] = {
		{ 0, "1970-01-01T00:00:00.000Z", "POSIX, the Epoch" },
		{ 482196050520000000, "1985-04-12T23:20:50.520Z",
		    "RFC 3339, 5.8" },
		{ 482196050520999999, "1985-04-12T23:20:50.520Z",
		    "RFC 3339, 5.8; cut, not rounded" },
		{ 951782400000000000, "2000-02-29T00:00:00.000Z",
		    "GNU date -u" },
		{ 2147483648000000000, "2038-01-19T03:14:08.000Z",
		    "GNU date -u; beyond 31 bits" },
		{ UINT64_MAX, "2554-07-21T23:34:33.709Z", "GNU date -u" },
	};
	char buf[25];

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++) {
		clock_utc_text(table[i].utc_ns, buf);
		assert_string_equal(buf, table[i].text);
	}
}

static void
the_clocks_run_forwards(void **state)
{
	uint64_t raw_ns = clock_raw_ns(), cpu_ns = clock_thread_cpu_ns();

	(void)state;
	assert_true(clock_raw_ns() >= raw_ns);
	assert_true(clock_thread_cpu_ns() >= cpu_ns);
	/* this code is younger than 2020-01-01T00:00:00Z */
	assert_true(clock_utc_ns() > UINT64_C(1577836800) * NS_PER_S);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(an_error_starts_afresh),
		cmocka_unit_test(errno_is_kept_and_told),
		cmocka_unit_test(places_are_put_in_front),
		cmocka_unit_test(no_place_pushes_out_the_cause),
		cmocka_unit_test(a_long_cause_is_cut),
		cmocka_unit_test(every_kind_has_its_exit_status),
		cmocka_unit_test(what_a_peer_says_is_escaped),
		cmocka_unit_test(escaped_text_keeps_to_its_buffer),
		cmocka_unit_test(civil_time_is_written_as_rfc_3339),
		cmocka_unit_test(the_clocks_run_forwards),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
