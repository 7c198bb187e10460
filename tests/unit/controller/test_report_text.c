/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "record_fixture.h"
#include "report/text_page.h"
#include "utf8.h"

/* The whole page, owned (free). */
static char *
page_of(struct fixture *f, const struct text_style *style)
{
	struct record record = fixture_record(f);
	char *text = NULL;
	size_t size = 0;
	FILE *out = open_memstream(&text, &size);

	assert_non_null(out);
	report_text(&record, style, out);
	assert_int_equal(fclose(out), 0);
	return text;
}

static char *
sample_page(const char *name, const struct text_style *style)
{
	struct fixture *f = fixture_new();
	char *text = NULL;

	for (size_t i = 0; i < SAMPLES; i++)
		if (strcmp(samples[i].name, name) == 0) {
			samples[i].make(f);
			text = page_of(f, style);
		}
	free(f);
	assert_non_null(text);
	return text;
}

static void
assert_first_line(const char *text, const char *wanted)
{
	size_t length = strcspn(text, "\n");

	if (length != strlen(wanted) || strncmp(text, wanted, length) != 0)
		fail_msg("\"%.*s\" is not \"%s\"", (int)length, text, wanted);
}

static void
assert_has(const char *text, const char *part)
{
	if (strstr(text, part) == NULL)
		fail_msg("no \"%s\" in:\n%s", part, text);
}

static void
the_first_line_is_the_answer(void **state)
{
	static const struct {
		const char *sample, *line;
	} rows[] = {
		{ "meets", "HARBOUR-04   meets   a-to-b 99.80 %   "
		    "b-to-a 99.92 %" },
		{ "falls-short", "HARBOUR-04   falls-short   a-to-b 62.13 %   "
		    "b-to-a 99.39 %" },
		{ "undecided", "HARBOUR-04   undecided   a-to-b 99.49 %   "
		    "b-to-a 98.99 %" },
		{ "void", "HARBOUR-04   void   a-to-b 62.13 %   "
		    "b-to-a 99.38 %" },
		{ "nothing", "HARBOUR-04   void   a-to-b -   b-to-a -" },
		{ "host", "HOST   meets   a-to-b 94.49 %   b-to-a 91.86 %" },
	};
	struct text_style style = { .ascii = true };

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++) {
		char *text = sample_page(rows[i].sample, &style);

		assert_first_line(text, rows[i].line);
		free(text);
	}
}

static void
no_line_is_wider_than_asked(void **state)
{
	static const struct text_style styles[] = { { .columns = 0 },
		{ .columns = 100 }, { .ascii = true } };

	(void)state;
	for (size_t i = 0; i < SAMPLES; i++)
		for (size_t s = 0; s < 3; s++) {
			char *text = sample_page(samples[i].name, &styles[s]);
			char *rest = text, *line;
			unsigned most = styles[s].columns == 0 ? 80
			    : styles[s].columns;

			while ((line = strsep(&rest, "\n")) != NULL)
				if (utf8_columns(line) > most)
					fail_msg("too wide: %s", line);
			free(text);
		}
}

static void
ascii_is_ascii_and_colour_comes_only_when_asked(void **state)
{
	struct text_style style = { .ascii = true };

	(void)state;
	for (size_t i = 0; i < SAMPLES; i++) {
		char *text = sample_page(samples[i].name, &style);

		for (const char *c = text; *c != '\0'; c++)
			assert_true(*c == '\n' || (*c >= ' ' && *c <= '~'));
		free(text);
	}
	for (size_t i = 0; i < SAMPLES; i++) {
		char *plain, *coloured, *to;

		style = (struct text_style){ .colour = false };
		plain = sample_page(samples[i].name, &style);
		style.colour = true;
		coloured = sample_page(samples[i].name, &style);
		assert_null(strchr(plain, '\033'));
		assert_non_null(strchr(coloured, '\033'));
		/* Without its colours it is the same page. */
		to = coloured;
		for (const char *c = coloured; *c != '\0'; c++) {
			if (*c == '\033')
				c += strcspn(c, "m");
			else
				*to++ = *c;
		}
		*to = '\0';
		assert_string_equal(plain, coloured);
		free(plain);
		free(coloured);
	}
}

/* The number that ends at a column of the ladder, in last digits. */
static int64_t
column_value(const char *line, size_t end)
{
	char cell[20];
	char *point;

	(void)snprintf(cell, sizeof(cell), "%.14s", line + end - 14);
	point = strchr(cell, '.');
	if (point == NULL)
		return 0;
	memmove(point, point + 1, strlen(point));
	return strtoll(cell, NULL, 10);
}

static void
the_ladder_adds_up_as_printed(void **state)
{
	struct text_style style = { .ascii = true };
	char *text = sample_page("falls-short", &style);
	char *rest = strstr(text, "From the line"), *line;
	int64_t sum = 0;
	int totals = 0;

	(void)state;
	assert_non_null(rest);
	(void)strsep(&rest, "\n");
	while (totals < 3 && (line = strsep(&rest, "\n")) != NULL) {
		int64_t value = column_value(line, 62);

		if (strncmp(line, "  line rate", 11) == 0) {
			assert_int_equal(value, 1000000);
			sum = value;
			totals++;
		} else if (strncmp(line, "  ceiling, payload", 18) == 0) {
			assert_int_equal(value, 941482);
			assert_int_equal(value, sum);
			totals++;
		} else if (strncmp(line, "  achieved, median", 18) == 0) {
			assert_int_equal(value, sum);
			totals++;
		} else {
			sum += value;
		}
	}
	assert_int_equal(totals, 3);
	free(text);
}

static void
each_outcome_says_why(void **state)
{
	static const struct {
		const char *sample, *part;
	} rows[] = {
		{ "meets", "Both criteria judged are met, with 99 % "
		    "confidence; 4 more were not judged." },
		{ "meets", "not judged: no trial of this kind was run" },
		{ "meets", "medium: line of segment 'access'" },
		{ "falls-short", "a-to-b throughput: 62.13 % attained "
		    "(median), 97 % required" },
		{ "falls-short", "segments of 1400 B were sent where" },
		{ "undecided", "3 valid trials, the rule needs at least 7." },
		{ "void", "Not to be trusted, for 2 reasons." },
		{ "void", "sender-cpu" },
		{ "void", "failed    the agent at end b" },
		{ "void", "a-to-b, both" },
		{ "nothing", "the task was stopped after 0 of 14 trials" },
		{ "host", "a reference, not a ceiling" },
		{ "host", "speed unknown" },
	};
	struct text_style style = { .ascii = true };

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++) {
		char *text = sample_page(rows[i].sample, &style);

		assert_has(text, rows[i].part);
		free(text);
	}
}

static void
each_trial_is_one_row(void **state)
{
	struct text_style style = { .ascii = true };
	char *text = sample_page("meets", &style);
	char *at = strstr(text, "Trials,");
	int rows = 0;

	(void)state;
	assert_non_null(at);
	while ((at = strchr(at, '\n')) != NULL && at[1] == ' ') {
		at++;
		rows++;
	}
	assert_int_equal(rows, 14);
	free(text);
}

static void
a_terminal_is_safe_from_what_a_peer_says(void **state)
{
	struct fixture *f = fixture_new();
	struct text_style style = { .colour = false };
	char *text;

	(void)state;
	sample_undecided(f);
	(void)snprintf(f->hosts[0].hostname, sizeof(f->hosts[0].hostname),
	    "evil\033]0;x\007\xc2\x9b");
	(void)snprintf(f->circuit.name, sizeof(f->circuit.name),
	    "a name that is far too long to stand in one line with it all");
	text = page_of(f, &style);
	assert_null(strchr(text, '\033'));
	assert_null(strchr(text, '\007'));
	assert_null(strstr(text, "\xc2\x9b"));
	assert_has(text, "a name that is far too long");
	assert_true(strcspn(text, "\n") <= 80 + 2);
	free(text);
	free(f);
}

/* RFC 3629 section 3, and section 10 on overlong forms. */
static void
ends_have_their_names_and_what_their_host_reaches(void **state)
{
	const struct text_style style = { .columns = 100 };
	struct fixture *f = fixture_new();
	char *text;

	(void)state;
	sample_host(f);
	(void)snprintf(f->circuit.ends[END_A].name,
	    sizeof(f->circuit.ends[END_A].name), "quay");
	(void)snprintf(f->circuit.ends[END_B].name,
	    sizeof(f->circuit.ends[END_B].name), "b");
	for (size_t end = 0; end < ENDS; end++)
		f->hosts[end].kernel[0] = f->hosts[end].hostname[0] = '\0';
	text = page_of(f, &style);
	assert_has(text, "\n  a quay ");
	assert_has(text, "\n  b      ");
	assert_has(text, "host reference 38.12 Gbit/s");
	free(text);
	free(f);
}

static void
shares_are_rounded_down(void **state)
{
	char buf[TEXT_CELL_SIZE];

	(void)state;
	assert_string_equal(text_percent(0.97, buf), "97.00 %");
	assert_string_equal(text_percent(0.969999, buf), "96.99 %");
	assert_string_equal(text_percent(1, buf), "100.00 %");
	assert_string_equal(text_percent(0.29, buf), "29.00 %");
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(the_first_line_is_the_answer),
		cmocka_unit_test(no_line_is_wider_than_asked),
		cmocka_unit_test(
		    ascii_is_ascii_and_colour_comes_only_when_asked),
		cmocka_unit_test(the_ladder_adds_up_as_printed),
		cmocka_unit_test(each_outcome_says_why),
		cmocka_unit_test(each_trial_is_one_row),
		cmocka_unit_test(a_terminal_is_safe_from_what_a_peer_says),
		cmocka_unit_test(
		    ends_have_their_names_and_what_their_host_reaches),
		cmocka_unit_test(shares_are_rounded_down),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
