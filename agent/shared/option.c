/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "option.h"

#include <ctype.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "columns.h"
#include "error.h"
#include "text.h"

#define OPTIONS_MAX 32

static const struct short_option {
	char letter;
	const char *name;
} short_options[] = {
	{ 'h', "help" },
	{ 'V', "version" },
	{ 'q', "quiet" },
	{ 'v', "verbose" },
	{ 'o', "output" },
};
#define SHORT_OPTIONS (sizeof(short_options) / sizeof(short_options[0]))

static bool
takes_value(const struct field *row)
{
	return row->kind != FIELD_YES_NO;
}

/* Length of the word in capitals that begins a row's help; 0 without one. */
static size_t
operand_length(const struct field *row)
{
	size_t length = strcspn(row->help, " ");

	for (size_t i = 0; i < length; i++)
		if (islower((unsigned char)row->help[i]))
			return 0;
	return length;
}

static const struct field *
find_row(const struct field *rows, const char *name, size_t length)
{
	for (const struct field *row = rows; row->name != NULL; row++)
		if (strlen(row->name) == length &&
		    strncmp(row->name, name, length) == 0)
			return row;
	return NULL;
}

static int
unknown(const struct field *rows, const char *word, size_t length,
    struct error *err)
{
	const char *names[OPTIONS_MAX], *near;
	char name[64], found[TEXT_QUOTE_SIZE];
	size_t count = 0;

	for (const struct field *row = rows; row->name != NULL &&
	    count < OPTIONS_MAX; row++)
		names[count++] = row->name;
	(void)snprintf(name, sizeof(name), "%.*s", (int)length, word);
	(void)text_quote(name, found, sizeof(found));
	near = nearest_name(name, names, count);
	if (near == NULL)
		return error_set(err, ERROR_USAGE, "unknown option '--%s'",
		    found);
	return error_set(err, ERROR_USAGE, "unknown option '--%s', did you "
	    "mean '--%s'?", found, near);
}

/* dashes: the option as it stands there, "-o" or "--output". */
static int
value_missing(const struct field *row, const char *dashes, int length,
    struct error *err)
{
	size_t operand = operand_length(row);

	return error_set(err, ERROR_USAGE, "%.*s needs a value: %.*s", length,
	    dashes, (int)(operand > 0 ? operand : strlen(row->help)),
	    row->help);
}

static int
apply(const struct field *row, const char *text, void *base,
    struct error *err)
{
	struct node node = { .kind = NODE_SCALAR };
	char *value = (char *)base + row->offset;
	int rc;

	if (row->kind == FIELD_YES_NO) {
		uint64_t times;

		memcpy(&times, value, sizeof(times));
		times++;
		memcpy(value, &times, sizeof(times));
		return 0;
	}
	node.origin = "command line";
	/* nobody changes it, and it lives as long as argv */
	node.text = (char *)(uintptr_t)text;
	rc = row->kind == FIELD_CUSTOM ? row->read(&node, row, base, err) :
	    field_set_text(row, text, NULL, value, err);
	if (rc == -1) {
		struct error cause = *err;

		return error_set(err, ERROR_USAGE, "--%s", cause.cause);
	}
	return 0;
}

static int
apply_long(const struct field *rows, const char *word, const char *next,
    void *base, bool *used_next, struct error *err)
{
	const char *equals = strchr(word, '=');
	size_t length = equals != NULL ? (size_t)(equals - word) :
	    strlen(word);
	const struct field *row = find_row(rows, word, length);

	if (row == NULL)
		return unknown(rows, word, length, err);
	if (!takes_value(row)) {
		if (equals != NULL)
			return error_set(err, ERROR_USAGE,
			    "--%s takes no value", row->name);
		return apply(row, NULL, base, err);
	}
	if (equals != NULL)
		return apply(row, equals + 1, base, err);
	if (next == NULL)
		return value_missing(row, word - 2, (int)length + 2, err);
	*used_next = true;
	return apply(row, next, base, err);
}

static int
apply_short(const struct field *rows, const char *letters, const char *next,
    void *base, bool *used_next, struct error *err)
{
	for (; *letters != '\0'; letters++) {
		const struct field *row = NULL;

		for (size_t i = 0; i < SHORT_OPTIONS; i++)
			if (short_options[i].letter == *letters)
				row = find_row(rows, short_options[i].name,
				    strlen(short_options[i].name));
		if (row == NULL)
			return error_set(err, ERROR_USAGE,
			    "unknown option '-%c'", isprint((unsigned char)
			    *letters) ? *letters : '?');
		if (!takes_value(row)) {
			if (apply(row, NULL, base, err) == -1)
				return -1;
			continue;
		}
		if (letters[1] != '\0')
			return apply(row, letters + 1, base, err);
		if (next == NULL) {
			const char dashes[] = { '-', *letters };

			return value_missing(row, dashes, sizeof(dashes), err);
		}
		*used_next = true;
		return apply(row, next, base, err);
	}
	return 0;
}

/* Nothing said: the default, or unset as in field.h; a flag is 0.  A CUSTOM
 * row's value is the caller's. */
static int
set_default(const struct field *row, void *value, struct error *err)
{
	const double unset = (double)NAN;

	if (row->kind == FIELD_CUSTOM)
		return 0;
	if (row->kind == FIELD_YES_NO)
		memset(value, 0, sizeof(uint64_t));
	else if (row->default_text != NULL)
		return field_set_text(row, row->default_text, NULL, value,
		    err);
	else if (row->kind == FIELD_TEXT)
		memset(value, 0, row->size);
	else if (row->kind == FIELD_REAL)
		memcpy(value, &unset, sizeof(unset));
	else
		memset(value, 0xff, sizeof(uint64_t));	/* FIELD_UNSET */
	return 0;
}

int
options_read(const struct field *rows, int argc, char *argv[], void *base,
    int *arguments_count, struct error *err)
{
	bool only_arguments = false;

	*arguments_count = 0;
	for (const struct field *row = rows; row->name != NULL; row++)
		if (set_default(row, (char *)base + row->offset, err) == -1)
			return -1;
	for (int i = 1; i < argc; i++) {
		char *word = argv[i];
		const char *next = i + 1 < argc ? argv[i + 1] : NULL;
		bool used_next = false;
		int rc = 0;

		if (only_arguments || word[0] != '-' || word[1] == '\0')
			argv[++*arguments_count] = word;
		else if (strcmp(word, "--") == 0)
			only_arguments = true;
		else if (word[1] == '-')
			rc = apply_long(rows, word + 2, next, base,
			    &used_next, err);
		else
			rc = apply_short(rows, word + 1, next, base,
			    &used_next, err);
		if (rc == -1)
			return -1;
		i += used_next;
	}
	return 0;
}

/* "  -o, --output FILE" */
static void
print_left(const struct field *row, char *buf, size_t size)
{
	size_t length = takes_value(row) ? operand_length(row) : 0;
	const char *operand = row->help;
	char letter[8] = "    ";

	if (takes_value(row) && length == 0) {
		operand = "VALUE";
		length = strlen(operand);
	}
	for (size_t i = 0; i < SHORT_OPTIONS; i++)
		if (strcmp(short_options[i].name, row->name) == 0)
			(void)snprintf(letter, sizeof(letter), "-%c, ",
			    short_options[i].letter);
	(void)snprintf(buf, size, "%s--%s%s%.*s", letter, row->name,
	    length > 0 ? " " : "", (int)length, operand);
}

/* What follows the operand, the choices, the default. */
static void
print_right(const struct field *row, char *buf, size_t size)
{
	size_t length = takes_value(row) ? operand_length(row) : 0;
	const char *between = ": ";

	buf[0] = '\0';
	text_append(buf, size, "%s", row->help + length + (length > 0));
	for (const struct choice *choice = row->kind == FIELD_CHOICE ?
	    row->choices : NULL; choice != NULL && choice->name != NULL;
	    choice++) {
		text_append(buf, size, "%s%s", between, choice->name);
		between = ", ";
	}
	if (row->default_text != NULL)
		text_append(buf, size, "; default: %s", row->default_text);
}

void
options_print(const struct field *rows, FILE *out)
{
	struct columns *columns = columns_new("lw");

	for (const struct field *row = rows; row->name != NULL; row++) {
		char left[64], right[512];
		const char *cells[] = { left, right };

		print_left(row, left, sizeof(left));
		print_right(row, right, sizeof(right));
		columns_row(columns, cells);
	}
	columns_print(columns, 2, out);
	columns_free(columns);
}
