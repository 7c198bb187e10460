/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <string.h>

#include "report/progress.h"

#define S UINT64_C(1000000000)
#define WIDTH 79

static const struct progress_view typical = {
	.trial = 3, .trials = 14, .direction = "a-to-b", .phase = "counting",
	.payload_bps = 941482444, .target_bps = 941482444, .left_ns = 754 * S,
};

static void
assert_line(const struct progress_view *view, const char *expected)
{
	char line[WIDTH + 1];

	memset(line, 'x', sizeof(line));
	assert_ptr_equal(progress_text(view, line, sizeof(line)), line);
	assert_string_equal(line, expected);
}

static void
the_line_says_trial_rate_share_and_time_left(void **state)
{
	struct progress_view view = typical;

	(void)state;
	assert_line(&view, "trial 3/14  a-to-b  counting  941.4 Mbit/s"
	    "  100.0 % of ceiling  12:34 left");
	view.phase = "settling";
	view.direction = "both";
	view.payload_bps = 9000000;
	view.reference = true;
	view.left_ns = 1;
	assert_line(&view, "trial 3/14  both  settling      9 Mbit/s"
	    "    1.0 % of reference  0:01 left");
	/* nothing to set it against */
	view.target_bps = 0;
	view.payload_bps = 0;
	view.left_ns = 0;
	assert_line(&view, "trial 3/14  both  settling       0 bit/s"
	    "  0:00 left");
}

static void
time_left_is_rounded_up_to_a_second(void **state)
{
	static const struct { uint64_t left_ns; const char *text; } rows[] = {
		{ 0, " 0:00 left" },
		{ 1, " 0:01 left" },
		{ S, " 0:01 left" },
		{ S + 1, " 0:02 left" },
		{ 59 * S + 1, " 1:00 left" },
		{ 3600 * S, " 60:00 left" },
		{ 86400 * S, " 1440:00 left" },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++) {
		struct progress_view view = typical;
		char line[WIDTH + 1];

		view.left_ns = rows[i].left_ns;
		(void)progress_text(&view, line, sizeof(line));
		assert_non_null(strstr(line, rows[i].text));
	}
}

/* A terminal of 80 columns holds the longest line of an ordinary task whole:
 * 3 * 10 trials, a reference, an hour and more. */
static void
a_long_line_still_fits_a_terminal_whole(void **state)
{
	static const char *const phases[] = { "waiting", "settling",
		"counting", "closed" };
	struct progress_view view = typical;
	char line[WIDTH + 1];

	(void)state;
	view.trial = view.trials = 30;
	view.reference = true;
	view.payload_bps = view.target_bps = UINT64_C(141482444000);
	view.left_ns = 599 * 60 * S;
	for (size_t i = 0; i < 4; i++) {
		size_t length;

		view.phase = phases[i];
		(void)progress_text(&view, line, sizeof(line));
		length = strlen(line);
		assert_true(length <= WIDTH);
		assert_string_equal(line + length - 5, " left");
	}
}

static void
a_line_that_cannot_fit_is_cut_at_the_width(void **state)
{
	struct progress_view view = typical;
	char line[WIDTH + 1], little[8];

	(void)state;
	view.trial = view.trials = UINT64_MAX;
	view.payload_bps = UINT64_MAX;
	view.target_bps = 1;
	view.left_ns = UINT64_MAX;
	memset(line, 'x', sizeof(line));
	(void)progress_text(&view, line, sizeof(line));
	assert_int_equal(strlen(line), WIDTH);
	(void)progress_text(&view, little, sizeof(little));
	assert_string_equal(little, "trial 1");
	(void)progress_text(&view, little, 1);
	assert_string_equal(little, "");
}

static void
no_line_breaks_or_controls_are_in_it(void **state)
{
	char line[WIDTH + 1];

	(void)state;
	(void)progress_text(&typical, line, sizeof(line));
	for (const char *c = line; *c != '\0'; c++)
		assert_in_range((unsigned char)*c, 0x20, 0x7e);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(the_line_says_trial_rate_share_and_time_left),
		cmocka_unit_test(time_left_is_rounded_up_to_a_second),
		cmocka_unit_test(a_long_line_still_fits_a_terminal_whole),
		cmocka_unit_test(a_line_that_cannot_fit_is_cut_at_the_width),
		cmocka_unit_test(no_line_breaks_or_controls_are_in_it),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
