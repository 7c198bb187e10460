/* SPDX-License-Identifier: GPL-3.0-or-later */
/* plafond media: the table of media, or one row with its fields. */
#include <inttypes.h>
#include <string.h>

#include "command.h"
#include "columns.h"
#include "declare/medium.h"
#include "error.h"
#include "option.h"

static void
print_table(FILE *out)
{
	static const char *const head[] = { "medium", "accuracy",
		"what it is" };
	struct columns *columns = columns_new("llw");
	size_t i;

	columns_row(columns, head);
	columns_rule(columns);
	for (i = 0; media[i] != NULL; i++) {
		const char *cells[] = { media[i]->name,
			accuracy_name(media[i]->accuracy), media[i]->title };

		columns_row(columns, cells);
	}
	columns_print(columns, 0, out);
	columns_free(columns);
	(void)fputs("\n`plafond media NAME` shows the fields of one.\n", out);
}

static void
print_medium(const struct medium *medium, FILE *out)
{
	struct columns *columns = columns_new("lw");
	char carries[256] = "", mtu[64], clock[64];
	const char *rows[][2] = {
		{ "accuracy", accuracy_name(medium->accuracy) },
		{ "", medium->accuracy_note },
		{ "formula", medium->formula },
		{ "source", medium->source },
		{ "carries", carries },
		{ "clock", clock },
		{ "MTU", mtu },
	};
	size_t i, used;

	for (i = 0; medium->carries[i] != NULL; i++) {
		used = strlen(carries);
		(void)snprintf(carries + used, sizeof(carries) - used, "%s%s",
		    i == 0 ? "" : ", ", medium->carries[i]);
	}
	(void)snprintf(clock, sizeof(clock), "within %" PRIu64 " ppm",
	    medium->tolerance_ppm);
	(void)snprintf(mtu, sizeof(mtu), "%" PRIu64 " B unless declared",
	    medium->default_mtu_bytes);
	if (medium->tolerance_ppm == 0)
		(void)snprintf(clock, sizeof(clock), "no say");
	if (medium->default_mtu_bytes == 0)
		(void)snprintf(mtu, sizeof(mtu), "what its layers allow");
	(void)fprintf(out, "%s: %s\n\n", medium->name, medium->title);
	for (i = 0; i < sizeof(rows) / sizeof(rows[0]); i++)
		columns_row(columns, rows[i]);
	columns_print(columns, 2, out);
	columns_free(columns);
	(void)fputs("\nFields\n", out);
	fields_print(medium->fields, out);
}

static int
find_medium(const char *name, const struct medium **out, struct error *err)
{
	const char *names[64];
	size_t i;

	*out = medium_find(name);
	if (*out != NULL)
		return 0;
	for (i = 0; i < 64 && media[i] != NULL; i++)
		names[i] = media[i]->name;
	return command_unknown("medium", name, names, i, err);
}

static int
media_run(const struct command_options *options, int argc, char *const argv[],
    struct error *err)
{
	const struct medium *medium = NULL;
	FILE *out;

	if (argc == 1 && find_medium(argv[0], &medium, err) == -1)
		return -1;
	if (command_output_open(options, &out, err) == -1)
		return -1;
	if (medium != NULL)
		print_medium(medium, out);
	else
		print_table(out);
	return command_output_close(options, out, err);
}

static const struct field media_options[] = {
	OPTION_OUTPUT_ROW,
	OPTION_COMMON_ROWS
};

const struct command command_media = {
	.name = "media",
	.arguments = "[NAME]",
	.arguments_max = 1,
	.summary = "the media that a declaration can name, and their fields",
	.options = media_options,
	.run = media_run,
};
