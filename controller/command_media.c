/* SPDX-License-Identifier: GPL-3.0-or-later */
/* plafond media: the table of media, or one row with its fields. */
#include <inttypes.h>
#include <string.h>

#include "columns.h"
#include "command.h"
#include "declare/medium.h"
#include "error.h"
#include "option.h"
#include "report/csv_text.h"
#include "report/json_value.h"
#include "report/row_json.h"

#define NAMES_MAX 64

static void
print_table(FILE *out)
{
	static const char *const head[] = { "medium", "accuracy", "duplex",
		"what it is; source" };
	struct columns *columns = columns_new("lllw");
	char what[512];
	size_t i;

	columns_row(columns, head);
	columns_rule(columns);
	for (i = 0; media[i] != NULL; i++) {
		const struct medium *medium = media[i];
		bool remembered = medium->memory != NULL;
		const char *cells[] = { medium->name,
			accuracy_name(medium->accuracy),
			duplex_name(medium->duplex), what };

		(void)snprintf(what, sizeof(what), "%s; %s%s", medium->title,
		    medium->source, remembered ? "; partly from memory" : "");
		columns_row(columns, cells);
	}
	columns_print(columns, 0, out);
	columns_free(columns);
	(void)fputs("\naccuracy: exact arithmetic, the standard's nominal "
	    "value, a model, or a\nreference that is no ceiling.\n"
	    "`plafond media NAME` shows the fields of one.\n", out);
}

/* "a, b and c" with commas. */
static const char *
join(const char *const names[], char *buf, size_t size)
{
	size_t i, used = 0;

	buf[0] = '\0';
	for (i = 0; names[i] != NULL; i++) {
		(void)snprintf(buf + used, size - used, "%s%s",
		    i == 0 ? "" : ", ", names[i]);
		used += strlen(buf + used);
	}
	return buf;
}

static void
print_medium(const struct medium *medium, FILE *out)
{
	struct columns *columns = columns_new("lw");
	char carries[512] = "", mtu[64], clock[64];
	const char *rows[][2] = {
		{ "accuracy", accuracy_name(medium->accuracy) },
		{ "", medium->accuracy_note },
		{ "memory", medium->memory },
		{ "duplex", duplex_name(medium->duplex) },
		{ "formula", medium->formula },
		{ "source", medium->source },
		{ "carries", join(medium->carries, carries,
		    sizeof(carries)) },
		{ "clock", clock },
		{ "MTU", mtu },
	};
	size_t i;

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
		if (rows[i][1] != NULL)
			columns_row(columns, rows[i]);
	columns_print(columns, 2, out);
	columns_free(columns);
	(void)fputs("\nFields\n", out);
	fields_print(medium->fields, out);
}

static void
print_text(const struct medium *medium, FILE *out)
{
	if (medium != NULL)
		print_medium(medium, out);
	else
		print_table(out);
}

static json_t *
json_medium(const struct medium *medium)
{
	json_t *object = json_object();

	json_put(object, "name", json_value_text(medium->name));
	json_put(object, "title", json_value_text(medium->title));
	json_put(object, "accuracy",
	    json_value_text(accuracy_name(medium->accuracy)));
	json_put(object, "accuracy_note",
	    row_json_text(medium->accuracy_note));
	json_put(object, "memory", row_json_text(medium->memory));
	json_put(object, "duplex",
	    json_value_text(duplex_name(medium->duplex)));
	json_put(object, "tolerance_ppm",
	    json_value_u64(medium->tolerance_ppm));
	json_put(object, "default_mtu_bytes",
	    medium->default_mtu_bytes == 0 ? json_null() :
	    json_value_u64(medium->default_mtu_bytes));
	json_put(object, "carries", row_json_names(medium->carries));
	json_put(object, "formula", row_json_text(medium->formula));
	json_put(object, "source", row_json_text(medium->source));
	json_put(object, "fields", row_json_fields(medium->fields));
	return object;
}

static void
csv_medium(const struct medium *medium, FILE *out)
{
	const char *cells[] = { medium->name, medium->title,
		accuracy_name(medium->accuracy), medium->accuracy_note,
		duplex_name(medium->duplex), medium->memory, medium->formula,
		medium->source };
	size_t i;

	for (i = 0; i < sizeof(cells) / sizeof(cells[0]); i++) {
		if (i > 0)
			(void)fputc(',', out);
		csv_text(cells[i] != NULL ? cells[i] : "", out);
	}
	(void)fprintf(out, ",%" PRIu64 "\r\n", medium->tolerance_ppm);
}

/* One row, or all where it is NULL. */
static int
print_form(const struct medium *one, bool json, FILE *out, struct error *err)
{
	json_t *array = json ? json_array() : NULL;
	size_t i;

	if (!json)
		(void)fputs("medium,title,accuracy,accuracy_note,duplex,"
		    "memory,formula,source,tolerance_ppm\r\n", out);
	for (i = 0; media[i] != NULL; i++) {
		if (one != NULL && media[i] != one)
			continue;
		if (json)
			json_push(array, json_medium(media[i]));
		else
			csv_medium(media[i], out);
	}
	return json ? row_json_print("plafond-media/1", "media", array, out,
	    err) : 0;
}

static int
find_medium(const char *name, const struct medium **out, struct error *err)
{
	const char *names[NAMES_MAX];
	size_t i;

	*out = medium_find(name);
	if (*out != NULL)
		return 0;
	for (i = 0; i < NAMES_MAX && media[i] != NULL; i++)
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
	if (options->format == FORMAT_TEXT) {
		print_text(medium, out);
	} else if (print_form(medium, options->format == FORMAT_JSON, out,
	    err) == -1) {
		command_output_discard(options, out);
		return -1;
	}
	return command_output_close(options, out, err);
}

static const struct field media_options[] = {
	OPTION_FORMAT_ROW(format_text_json_csv),
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
