/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "error.h"
#include "option.h"

#define SET_MAX 4

struct values {
	char output[32], name[16];
	uint64_t rate_bps, count, format, quiet, verbose, help;
	double share;
	const char *set[SET_MAX];
	size_t set_count;
};

static int
read_set(const struct node *node, const struct field *field, void *base,
    struct error *err)
{
	struct values *values = base;

	if (values->set_count == SET_MAX)
		return error_set(err, ERROR_INPUT, "--%s: at most %d",
		    field->name, SET_MAX);
	values->set[values->set_count++] = node->text;
	return 0;
}

static const struct choice formats[] = {
	{ "text", 1 }, { "json", 2 }, { NULL, 0 },
};

#define ROW(member_, name_, kind_)					\
	.name = (name_), .kind = (kind_),				\
	.offset = offsetof(struct values, member_),			\
	.size = sizeof(((struct values *)0)->member_)
static const struct field rows[] = {
	{ ROW(output, "output", FIELD_TEXT), .help = "FILE of the record" },
	{ ROW(name, "name", FIELD_TEXT), .default_text = "quay",
	    .help = "a name" },
	{ ROW(rate_bps, "rate", FIELD_QUANTITY), .dimension = DIMENSION_RATE,
	    .default_text = "1 Mbit/s", .min = 1, .help = "a rate" },
	{ ROW(count, "count", FIELD_COUNT), .max = 9, .help = "a count" },
	{ ROW(format, "format", FIELD_CHOICE), .choices = formats,
	    .default_text = "text", .help = "text or json" },
	{ ROW(share, "share", FIELD_REAL), .dimension = DIMENSION_RATIO,
	    .help = "a share" },
	{ ROW(quiet, "quiet", FIELD_YES_NO), .help = "say less" },
	{ ROW(verbose, "verbose", FIELD_YES_NO), .help = "say more" },
	{ ROW(help, "help", FIELD_YES_NO), .help = "this page" },
	{ .name = "set", .kind = FIELD_CUSTOM, .read = read_set,
	    .help = "KEY=VALUE may be repeated" },
	{ .name = NULL }
};

#define WORDS_MAX 16

struct line {
	char *argv[WORDS_MAX + 2];
	int argc, arguments;
	struct values values;
	struct error err;
};

/* Words apart by single spaces; "" stands for none. */
static int
read_line(struct line *line, const char *text)
{
	static char copy[512], program[] = "program";
	char *rest = copy, *word;

	memset(line, 0, sizeof(*line));
	/* what nobody sets is seen */
	memset(&line->values, 0x5a, offsetof(struct values, set));
	(void)snprintf(copy, sizeof(copy), "%s", text);
	line->argv[line->argc++] = program;
	while ((word = strsep(&rest, " ")) != NULL && text[0] != '\0')
		line->argv[line->argc++] = word;
	return options_read(rows, line->argc, line->argv, &line->values,
	    &line->arguments, &line->err);
}

static void
assert_taken(struct line *line, const char *text)
{
	if (read_line(line, text) == -1)
		fail_msg("%s: %s", text, line->err.cause);
}

static void
without_options_everything_has_its_default_or_is_unset(void **state)
{
	struct line line;

	(void)state;
	assert_taken(&line, "");
	assert_int_equal(line.arguments, 0);
	assert_string_equal(line.values.output, "");
	assert_string_equal(line.values.name, "quay");
	assert_int_equal(line.values.rate_bps, 1000000);
	assert_int_equal(line.values.count, FIELD_UNSET);
	assert_int_equal(line.values.format, 1);
	assert_true(isnan(line.values.share));
	assert_int_equal(line.values.quiet, 0);
	assert_int_equal(line.values.verbose, 0);
	assert_int_equal(line.values.help, 0);
	assert_int_equal(line.values.set_count, 0);
}

static void
a_value_stands_behind_an_equals_sign_or_as_the_next_word(void **state)
{
	struct line line;

	(void)state;
	assert_taken(&line, "--rate=2Gbit/s --count 7 --format=json --share "
	    "0.5 --name=a=b --output -");
	assert_int_equal(line.values.rate_bps, UINT64_C(2000000000));
	assert_int_equal(line.values.count, 7);
	assert_int_equal(line.values.format, 2);
	assert_true(line.values.share > 0.499 && line.values.share < 0.501);
	assert_string_equal(line.values.name, "a=b");
	assert_string_equal(line.values.output, "-");
	assert_int_equal(line.arguments, 0);
	/* the last one counts; a value may look like an option */
	assert_taken(&line, "--name a --name --count --output=");
	assert_string_equal(line.values.name, "--count");
	assert_string_equal(line.values.output, "");
	assert_int_equal(line.values.count, FIELD_UNSET);
}

static void
short_options_stand_alone_or_in_groups(void **state)
{
	static const struct {
		const char *text, *output;
		uint64_t quiet, verbose, help;
	} lines[] = {
		{ "-q", "", 1, 0, 0 },
		{ "-v -v", "", 0, 2, 0 },
		{ "-vv", "", 0, 2, 0 },
		{ "-vqh", "", 1, 1, 1 },
		{ "-o file", "file", 0, 0, 0 },
		{ "-ofile", "file", 0, 0, 0 },
		{ "-vofile -q", "file", 1, 1, 0 },
		{ "-vo file -q", "file", 1, 1, 0 },
		{ "-ovq", "vq", 0, 0, 0 },
		{ "-o -q", "-q", 0, 0, 0 },
		{ "--verbose -v --verbose", "", 0, 3, 0 },
	};
	struct line line;

	(void)state;
	for (size_t i = 0; i < sizeof(lines) / sizeof(lines[0]); i++) {
		assert_taken(&line, lines[i].text);
		assert_string_equal(line.values.output, lines[i].output);
		assert_int_equal(line.values.quiet, lines[i].quiet);
		assert_int_equal(line.values.verbose, lines[i].verbose);
		assert_int_equal(line.values.help, lines[i].help);
		assert_int_equal(line.arguments, 0);
	}
}

static void
arguments_keep_their_order_among_the_options(void **state)
{
	struct line line;

	(void)state;
	assert_taken(&line, "one -v two --count 3 - three --output=x four");
	assert_int_equal(line.arguments, 5);
	assert_string_equal(line.argv[1], "one");
	assert_string_equal(line.argv[2], "two");
	assert_string_equal(line.argv[3], "-");
	assert_string_equal(line.argv[4], "three");
	assert_string_equal(line.argv[5], "four");
	assert_int_equal(line.values.count, 3);
	assert_int_equal(line.values.verbose, 1);
}

static void
after_two_dashes_everything_is_an_argument(void **state)
{
	struct line line;

	(void)state;
	assert_taken(&line, "-v -- -q --count -- one");
	assert_int_equal(line.arguments, 4);
	assert_string_equal(line.argv[1], "-q");
	assert_string_equal(line.argv[2], "--count");
	assert_string_equal(line.argv[3], "--");
	assert_string_equal(line.argv[4], "one");
	assert_int_equal(line.values.quiet, 0);
	assert_int_equal(line.values.verbose, 1);
	assert_taken(&line, "--");
	assert_int_equal(line.arguments, 0);
}

static void
a_custom_option_may_repeat(void **state)
{
	struct line line;

	(void)state;
	assert_taken(&line, "--set a=1 file --set=b.c=2 --set d=");
	assert_int_equal(line.values.set_count, 3);
	assert_string_equal(line.values.set[0], "a=1");
	assert_string_equal(line.values.set[1], "b.c=2");
	assert_string_equal(line.values.set[2], "d=");
	assert_string_equal(line.argv[1], "file");
	assert_int_equal(read_line(&line, "--set 1 --set 2 --set 3 --set 4 "
	    "--set 5"), -1);
	assert_int_equal(line.err.kind, ERROR_USAGE);
}

static void
what_is_wrong_is_a_usage_error_that_names_it(void **state)
{
	static const struct { const char *text, *says; } lines[] = {
		{ "--cuont 3", "'--cuont', did you mean '--count'?" },
		{ "--cuont=3", "'--cuont', did you mean '--count'?" },
		{ "--coun 3", "did you mean '--count'?" },
		{ "--counts 3", "did you mean '--count'?" },
		{ "--nonsense", "unknown option '--nonsense'" },
		{ "--=3", "unknown option '--'" },
		{ "-x", "'-x'" },
		{ "-vx", "'-x'" },
		{ "-V", "'-V'" },	/* no such row here */
		{ "--count", "--count needs a value: a count" },
		{ "file --set", "--set needs a value: KEY=VALUE" },
		{ "-o", "-o needs a value: FILE" },
		{ "-vo", "-o needs a value" },
		{ "--quiet=yes", "--quiet takes no value" },
		{ "--quiet=", "--quiet takes no value" },
		{ "--count=10", "--count: found '10', allowed" },
		{ "--count=-1", "count" },
		{ "--count=", "count" },
		{ "--rate 1", "rate" },
		{ "--rate 0bit/s", "rate" },
		{ "--format xml", "--format: found 'xml', allowed: one of "
		  "text, json" },
		{ "--share much", "share" },
		{ "--name 0123456789012345", "name" },
	};
	struct line line;

	(void)state;
	for (size_t i = 0; i < sizeof(lines) / sizeof(lines[0]); i++) {
		if (read_line(&line, lines[i].text) == 0)
			fail_msg("taken: %s", lines[i].text);
		assert_int_equal(line.err.kind, ERROR_USAGE);
		if (strstr(line.err.cause, lines[i].says) == NULL)
			fail_msg("%s: %s", lines[i].text, line.err.cause);
	}
}

static void
a_very_long_word_is_refused(void **state)
{
	static char word[8192], program[] = "program", option[] = "--name";
	char *argv[] = { program, option, word, NULL };
	struct values values = { .count = 0 };
	struct error err;
	int arguments;

	(void)state;
	memset(word, 'x', sizeof(word) - 1);
	assert_int_equal(options_read(rows, 3, argv, &values, &arguments,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_USAGE);
	word[0] = word[1] = '-';
	argv[1] = word;
	assert_int_equal(options_read(rows, 2, argv, &values, &arguments,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_USAGE);
}

static void
assert_lines_fit(const char *text)
{
	while (*text != '\0') {
		size_t length = strcspn(text, "\n");

		assert_true(length <= 80);
		assert_true(length == 0 || text[length - 1] != ' ');
		text += length + (text[length] == '\n');
	}
}

static void
help_has_a_line_a_row_and_fits_a_terminal(void **state)
{
	static const struct field long_rows[] = {
		{ .name = "output", .kind = FIELD_TEXT, .help = "FILE that "
		    "holds the record when all is done, written whole or not "
		    "at all, with a help so long that it must be wrapped" },
		{ .name = "a-name-that-leaves-no-room", .kind = FIELD_TEXT,
		    .default_text = "1 Mbit/s", .help = "short" },
		{ .name = "format", .kind = FIELD_CHOICE, .choices = formats,
		    .default_text = "text", .help = "FORM of the result" },
		{ .name = "quiet", .kind = FIELD_YES_NO, .help = "SAY less" },
		{ .name = NULL }
	};
	static char text[4096];
	FILE *out = fmemopen(text, sizeof(text), "w");

	(void)state;
	assert_non_null(out);
	options_print(long_rows, out);
	assert_int_equal(fclose(out), 0);
	assert_non_null(strstr(text, "  -o, --output FILE "));
	assert_non_null(strstr(text, " that holds the record"));
	assert_non_null(strstr(text, "      --a-name-that-leaves-no-room "
	    "VALUE  short; default: 1 Mbit/s\n"));
	assert_non_null(strstr(text, "      --format FORM "));
	assert_non_null(strstr(text, " of the result: text, json; default:"));
	assert_non_null(strstr(text, "  -q, --quiet "));
	assert_non_null(strstr(text, " SAY less\n"));
	assert_lines_fit(text);
}

static void
fields_are_listed_as_yaml_with_those_of_their_mappings(void **state)
{
	static const struct field end[] = {
		{ .name = "name", .kind = FIELD_TEXT, .required = true,
		    .help = "its name" },
		{ .name = NULL }
	};
	static const struct field file[] = {
		{ .name = "a", .kind = FIELD_MAPPING, .fields = end,
		    .help = "one end" },
		{ .name = "b", .kind = FIELD_MAPPING, .fields = end,
		    .help = "the other" },
		{ .name = "rate", .kind = FIELD_QUANTITY, .min = 1,
		    .dimension = DIMENSION_RATE, .per_direction = true,
		    .default_text = "1 Mbit/s", .help = "how much" },
		{ .name = NULL }
	};
	static char text[4096];
	FILE *out = fmemopen(text, sizeof(text), "w");

	(void)state;
	assert_non_null(out);
	fields_print(file, out);
	assert_int_equal(fclose(out), 0);
	assert_non_null(strstr(text, "  a:       one end\n"));
	assert_non_null(strstr(text, "  a.name:  its name (required)\n"));
	assert_non_null(strstr(text, "  b:       the other; its fields are "
	    "those of a\n"));
	assert_null(strstr(text, "b.name:"));
	assert_non_null(strstr(text, "  rate:    how much; a rate such as "));
	assert_non_null(strstr(text, "; default: 1"));
	assert_non_null(strstr(text, "{ a-to-b: VALUE, b-to-a: VALUE }"));
	assert_lines_fit(text);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    without_options_everything_has_its_default_or_is_unset),
		cmocka_unit_test(
		    a_value_stands_behind_an_equals_sign_or_as_the_next_word),
		cmocka_unit_test(short_options_stand_alone_or_in_groups),
		cmocka_unit_test(arguments_keep_their_order_among_the_options),
		cmocka_unit_test(after_two_dashes_everything_is_an_argument),
		cmocka_unit_test(a_custom_option_may_repeat),
		cmocka_unit_test(what_is_wrong_is_a_usage_error_that_names_it),
		cmocka_unit_test(a_very_long_word_is_refused),
		cmocka_unit_test(help_has_a_line_a_row_and_fits_a_terminal),
		cmocka_unit_test(
		    fields_are_listed_as_yaml_with_those_of_their_mappings),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
