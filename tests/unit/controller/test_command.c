/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <sys/stat.h>

#include <dirent.h>
#include <stdlib.h>
#include <unistd.h>

#include <jansson.h>

#include "command.h"
#include "declare/layer.h"
#include "declare/medium.h"
#include "error.h"
#include "shared/scratch.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define ARGUMENTS_MAX 16
#define ANSWER_SIZE 65536

static int
parse(const struct command *command, const char *const words[],
    struct command_options *options, int *count, char *argv[],
    struct error *err)
{
	int argc = 0;

	while (words[argc] != NULL && argc < ARGUMENTS_MAX - 1) {
		argv[argc] = (char *)(uintptr_t)words[argc];
		argc++;
	}
	argv[argc] = NULL;
	return command_parse(command, argc, argv, options, count, err);
}

static void
options_stand_anywhere_and_in_every_spelling(void **state)
{
	static const char *const words[][ARGUMENTS_MAX] = {
		{ "ceiling", "--format", "json", "FILE", "-o", "out", "-vv",
		  "--set", "a=1", "--set=b=2", NULL },
		{ "ceiling", "FILE", "--format=json", "--output=out",
		  "--verbose", "-v", "--set=a=1", "--set", "b=2", NULL },
		{ "ceiling", "-vvoout", "--set=a=1", "--set", "b=2",
		  "--format=json", "--", "FILE", NULL },
	};
	struct command_options options;
	char *argv[ARGUMENTS_MAX];
	struct error err;
	size_t i;
	int count;

	(void)state;
	for (i = 0; i < COUNT(words); i++) {
		assert_int_equal(parse(&command_ceiling, words[i], &options,
		    &count, argv, &err), 0);
		assert_int_equal(count, 1);
		assert_string_equal(argv[1], "FILE");
		assert_int_equal(options.format, FORMAT_JSON);
		assert_string_equal(options.output, "out");
		assert_int_equal(options.verbose, 2);
		assert_int_equal(options.overrides_count, 2);
		assert_string_equal(options.overrides[0], "a=1");
		assert_string_equal(options.overrides[1], "b=2");
	}
}

static void
defaults_hold_where_nothing_is_said(void **state)
{
	static const char *const words[] = { "ceiling", "FILE", NULL };
	struct command_options options;
	char *argv[ARGUMENTS_MAX];
	struct error err;
	int count;

	(void)state;
	assert_int_equal(parse(&command_ceiling, words, &options, &count,
	    argv, &err), 0);
	assert_int_equal(options.format, FORMAT_TEXT);
	assert_string_equal(options.output, "");
	assert_null(options.sweep);
	assert_int_equal(options.packet_sizes, 0);
	assert_int_equal(options.quiet, 0);
}

static void
help_and_version_need_no_arguments(void **state)
{
	static const char *const words[][3] = {
		{ "ceiling", "-h", NULL }, { "ceiling", "--help", NULL },
		{ "ceiling", "-V", NULL }, { "ceiling", "--version", NULL },
	};
	struct command_options options;
	char *argv[ARGUMENTS_MAX];
	struct error err;
	size_t i;
	int count;

	(void)state;
	for (i = 0; i < COUNT(words); i++) {
		assert_int_equal(parse(&command_ceiling, words[i], &options,
		    &count, argv, &err), 0);
		assert_int_equal(options.help, i < 2);
		assert_int_equal(options.version, i >= 2);
	}
}

static void
a_wrong_command_line_is_a_usage_error_that_says_why(void **state)
{
	static const struct {
		const char *words[5], *expected;
	} vectors[] = {
		{ { "ceiling", NULL }, "missing FILE" },
		{ { "ceiling", "a", "b", NULL }, "too many" },
		{ { "ceiling", "a", "--fromat=json", NULL },
		  "did you mean '--format'" },
		{ { "ceiling", "a", "--colour", NULL }, "'--colour'" },
		{ { "ceiling", "a", "-x", NULL }, "'-x'" },
		{ { "ceiling", "a", "--format", NULL }, "needs a value" },
		{ { "ceiling", "a", "-o", NULL }, "needs a value" },
		{ { "ceiling", "a", "--format=yaml", NULL }, "yaml" },
		{ { "ceiling", "a", "--format=html", NULL },
		  "allowed: one of text, json, csv" },
		{ { "ceiling", "a", "--quiet=1", NULL }, "takes no value" },
		{ { "ceiling", "a", "--packet-sizes=1", NULL },
		  "takes no value" },
		{ { "ceiling", "a", "--sweep", NULL }, "needs a value" },
		{ { "ceiling", "a", "--sweep=a", "--sweep=b" },
		  "given twice" },
		{ { "ceiling", "a", "--state=x", NULL }, "'--state'" },
	};
	struct command_options options;
	char *argv[ARGUMENTS_MAX], why[1024];
	struct error err;
	size_t i;
	int count;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		assert_int_equal(parse(&command_ceiling, vectors[i].words,
		    &options, &count, argv, &err), -1);
		assert_int_equal(err.kind, ERROR_USAGE);
		assert_int_equal(error_exit_status(err.kind), 64);
		(void)error_text(&err, why, sizeof(why));
		if (strstr(why, vectors[i].expected) == NULL)
			fail_msg("'%s' is not in: %s", vectors[i].expected,
			    why);
	}
}

static void
more_overrides_than_fit_are_refused(void **state)
{
	static char *argv[COMMAND_OVERRIDES_MAX + 4];
	struct command_options options;
	struct error err;
	int i, count;

	(void)state;
	argv[0] = (char *)(uintptr_t)"ceiling";
	argv[1] = (char *)(uintptr_t)"FILE";
	for (i = 0; i <= COMMAND_OVERRIDES_MAX; i++)
		argv[2 + i] = (char *)(uintptr_t)"--set=a=1";
	assert_int_equal(command_parse(&command_ceiling,
	    COMMAND_OVERRIDES_MAX + 2, argv, &options, &count, &err), 0);
	argv[0] = (char *)(uintptr_t)"ceiling";
	assert_int_equal(command_parse(&command_ceiling,
	    COMMAND_OVERRIDES_MAX + 3, argv, &options, &count, &err), -1);
	assert_int_equal(err.kind, ERROR_USAGE);
}

/* What a function prints, in a buffer of ANSWER_SIZE. */
static FILE *
answer_begin(char *answer)
{
	FILE *f = fmemopen(answer, ANSWER_SIZE, "w");

	assert_non_null(f);
	return f;
}

static size_t
widest_line(const char *text)
{
	size_t widest = 0, length;

	for (; *text != '\0'; text += text[length] == '\n' ? length + 1 :
	    length) {
		length = strcspn(text, "\n");
		if (length > widest)
			widest = length;
	}
	return widest;
}

static void
help_lists_every_option_of_every_command_in_80_columns(void **state)
{
	static const struct command *const commands[] = { &command_ceiling,
		&command_media, &command_layers, &command_ready,
		&command_accept, &command_identity };
	static char answer[ANSWER_SIZE];
	const struct field *row;
	char option[64];
	size_t i;
	FILE *f;

	(void)state;
	for (i = 0; i < COUNT(commands); i++) {
		memset(answer, 0, sizeof(answer));
		f = answer_begin(answer);
		command_help(commands[i], f);
		(void)fclose(f);
		assert_true(widest_line(answer) <= 80);
		assert_non_null(strstr(answer, commands[i]->name));
		for (row = commands[i]->options; row != NULL &&
		    row->name != NULL; row++) {
			(void)snprintf(option, sizeof(option), "--%s ",
			    row->name);
			assert_non_null(strstr(answer, option));
		}
	}
	memset(answer, 0, sizeof(answer));
	f = answer_begin(answer);
	command_list(commands, COUNT(commands), f);
	(void)fclose(f);
	for (i = 0; i < COUNT(commands); i++)
		assert_non_null(strstr(answer, commands[i]->summary));
}

/* A folder of its own for each test; its absolute path in *state. */
static int
make_folder(void **state)
{
	char folder[SCRATCH_SIZE];

	scratch_make(folder);
	*state = realpath(folder, NULL);
	return *state != NULL ? 0 : -1;
}

static int
remove_folder(void **state)
{
	scratch_remove(*state);
	free(*state);
	return 0;
}

static size_t
entries(const char *path)
{
	DIR *folder = opendir(path);
	size_t count = 0;

	assert_non_null(folder);
	while (readdir(folder) != NULL)
		count++;
	(void)closedir(folder);
	return count - 2;	/* . and .. */
}

static void
a_result_is_there_whole_or_not_at_all(void **state)
{
	static struct command_options options;
	struct error err;
	char line[32] = "";
	struct stat st;
	FILE *f;

	(void)snprintf(options.output, sizeof(options.output), "%s/result",
	    (char *)*state);
	assert_int_equal(command_output_open(&options, &f, &err), 0);
	(void)fputs("one", f);
	(void)fflush(f);
	assert_int_equal(stat(options.output, &st), -1);
	assert_int_equal(command_output_close(&options, f, &err), 0);
	assert_int_equal(stat(options.output, &st), 0);
	assert_int_equal(st.st_size, 3);
	assert_int_equal(entries(*state), 1);

	assert_int_equal(command_output_open(&options, &f, &err), 0);
	(void)fputs("two and more", f);
	command_output_discard(&options, f);
	assert_int_equal(entries(*state), 1);
	f = fopen(options.output, "r");
	assert_non_null(f);
	assert_non_null(fgets(line, sizeof(line), f));
	assert_string_equal(line, "one");
	(void)fclose(f);
}

static void
what_cannot_be_written_is_a_write_error(void **state)
{
	static struct command_options options;
	struct error err;
	FILE *f;

	(void)snprintf(options.output, sizeof(options.output), "%s/no/result",
	    (char *)*state);
	assert_int_equal(command_output_open(&options, &f, &err), -1);
	assert_int_equal(err.kind, ERROR_WRITE);
	assert_int_equal(error_exit_status(err.kind), 73);
	(void)strcpy(options.output, "/dev/full");
	assert_int_equal(command_output_open(&options, &f, &err), 0);
	(void)fputs("x", f);
	assert_int_equal(command_output_close(&options, f, &err), -1);
	assert_int_equal(err.kind, ERROR_WRITE);
}

static void
a_device_is_written_and_never_replaced(void **state)
{
	static struct command_options options;
	struct error err;
	struct stat st;
	FILE *f;

	(void)state;
	(void)strcpy(options.output, "/dev/null");
	assert_int_equal(command_output_open(&options, &f, &err), 0);
	(void)fputs("x", f);
	assert_int_equal(command_output_close(&options, f, &err), 0);
	assert_int_equal(stat("/dev/null", &st), 0);
	assert_true(S_ISCHR(st.st_mode));
}

static void
a_symbolic_link_keeps_leading_to_the_result(void **state)
{
	static struct command_options options;
	char target[1024];
	struct error err;
	struct stat st;
	FILE *f;

	(void)snprintf(target, sizeof(target), "%s/target", (char *)*state);
	(void)snprintf(options.output, sizeof(options.output), "%s/link",
	    (char *)*state);
	f = fopen(target, "w");
	assert_non_null(f);
	(void)fclose(f);
	assert_int_equal(symlink(target, options.output), 0);
	assert_int_equal(command_output_open(&options, &f, &err), 0);
	(void)fputs("new", f);
	assert_int_equal(command_output_close(&options, f, &err), 0);
	assert_int_equal(lstat(options.output, &st), 0);
	assert_true(S_ISLNK(st.st_mode));
	assert_int_equal(stat(target, &st), 0);
	assert_int_equal(st.st_size, 3);
}

static void
the_state_folder_follows_option_then_environment(void **state)
{
	static struct command_options options;
	char path[4096], expected[4096];
	struct error err;
	struct stat st;

	assert_int_equal(setenv("HOME", *state, 1), 0);
	assert_int_equal(setenv("XDG_STATE_HOME", "relative", 1), 0);
	assert_int_equal(command_state_folder(&options, path, sizeof(path),
	    &err), 0);
	(void)snprintf(expected, sizeof(expected), "%s/.local/state/plafond",
	    (char *)*state);
	assert_string_equal(path, expected);
	assert_int_equal(stat(path, &st), 0);
	assert_int_equal(st.st_mode & 0777, 0700);
	while (strlen(path) > strlen(*state)) {
		assert_int_equal(rmdir(path), 0);
		*strrchr(path, '/') = '\0';
	}
	assert_int_equal(setenv("XDG_STATE_HOME", *state, 1), 0);
	assert_int_equal(command_state_folder(&options, path, sizeof(path),
	    &err), 0);
	(void)snprintf(expected, sizeof(expected), "%s/plafond",
	    (char *)*state);
	assert_string_equal(path, expected);
	assert_int_equal(rmdir(path), 0);
	(void)snprintf(options.state, sizeof(options.state), "%s/given",
	    (char *)*state);
	assert_int_equal(command_state_folder(&options, path, sizeof(path),
	    &err), 0);
	assert_string_equal(path, options.state);
	assert_int_equal(rmdir(path), 0);
}

/* Runs a command and returns what it wrote. */
static void
run_into(const struct command *command, const char *folder, char *argv[],
    int argc, uint64_t format, char *answer)
{
	static struct command_options options;
	struct error err;
	size_t length;
	FILE *f;

	memset(&options, 0, sizeof(options));
	options.format = format;
	(void)snprintf(options.output, sizeof(options.output), "%s/rows",
	    folder);
	if (command->run(&options, argc, argv, &err) == -1)
		fail_msg("%s: %s", command->name, err.cause);
	f = fopen(options.output, "r");
	assert_non_null(f);
	length = fread(answer, 1, 4 * ANSWER_SIZE - 1, f);
	answer[length] = '\0';
	(void)fclose(f);
}

static void
tables_list_every_medium_and_layer_in_every_form(void **state)
{
	static const uint64_t formats[] = { FORMAT_TEXT, FORMAT_JSON,
		FORMAT_CSV };
	static char answer[4 * ANSWER_SIZE];
	json_t *root;
	size_t i, n;

	for (i = 0; i < COUNT(formats); i++) {
		run_into(&command_media, *state, NULL, 0, formats[i], answer);
		for (n = 0; media[n] != NULL; n++)
			assert_non_null(strstr(answer, media[n]->name));
		if (formats[i] == FORMAT_TEXT)
			assert_true(widest_line(answer) <= 80);
		run_into(&command_layers, *state, NULL, 0, formats[i],
		    answer);
		for (n = 0; layer_table[n] != NULL; n++)
			assert_non_null(strstr(answer, layer_table[n]->name));
		if (formats[i] == FORMAT_TEXT)
			assert_true(widest_line(answer) <= 80);
		if (formats[i] != FORMAT_JSON)
			continue;
		root = json_loads(answer, JSON_REJECT_DUPLICATES, NULL);
		assert_int_equal(json_array_size(json_object_get(root,
		    "layers")), n);
		json_decref(root);
	}
}

static void
a_page_shows_all_that_its_row_says(void **state)
{
	static char answer[4 * ANSWER_SIZE], name[64];
	char *argv[] = { name, NULL };
	const struct field *field;
	size_t i;

	for (i = 0; media[i] != NULL; i++) {
		(void)snprintf(name, sizeof(name), "%s", media[i]->name);
		run_into(&command_media, *state, argv, 1, FORMAT_TEXT, answer);
		assert_non_null(strstr(answer,
		    accuracy_name(media[i]->accuracy)));
		assert_non_null(strstr(answer,
		    duplex_name(media[i]->duplex)));
		assert_int_equal(strstr(answer, "\n  memory ") != NULL,
		    media[i]->memory != NULL);
		assert_true(widest_line(answer) <= 80);
		for (field = media[i]->fields; field->name != NULL; field++)
			assert_non_null(strstr(answer, field->name));
	}
	for (i = 0; layer_table[i] != NULL; i++) {
		(void)snprintf(name, sizeof(name), "%s", layer_table[i]->name);
		run_into(&command_layers, *state, argv, 1, FORMAT_TEXT,
		    answer);
		assert_non_null(strstr(answer, layer_table[i]->title));
		assert_true(widest_line(answer) <= 80);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(options_stand_anywhere_and_in_every_spelling),
		cmocka_unit_test(defaults_hold_where_nothing_is_said),
		cmocka_unit_test(help_and_version_need_no_arguments),
		cmocka_unit_test(
		    a_wrong_command_line_is_a_usage_error_that_says_why),
		cmocka_unit_test(more_overrides_than_fit_are_refused),
		cmocka_unit_test(
		    help_lists_every_option_of_every_command_in_80_columns),
		cmocka_unit_test_setup_teardown(
		    a_result_is_there_whole_or_not_at_all, make_folder,
		    remove_folder),
		cmocka_unit_test_setup_teardown(
		    what_cannot_be_written_is_a_write_error, make_folder,
		    remove_folder),
		cmocka_unit_test(a_device_is_written_and_never_replaced),
		cmocka_unit_test_setup_teardown(
		    a_symbolic_link_keeps_leading_to_the_result, make_folder,
		    remove_folder),
		cmocka_unit_test_setup_teardown(
		    the_state_folder_follows_option_then_environment,
		    make_folder, remove_folder),
		cmocka_unit_test_setup_teardown(
		    tables_list_every_medium_and_layer_in_every_form,
		    make_folder, remove_folder),
		cmocka_unit_test_setup_teardown(
		    a_page_shows_all_that_its_row_says, make_folder,
		    remove_folder),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
