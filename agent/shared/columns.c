/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "columns.h"

#include <assert.h>
#include <stdbool.h>
#include <stdlib.h>
#include <string.h>

#include "utf8.h"

#define GAP 2		/* spaces between columns */
#define WRAP_LEAST 20	/* a wrapped column is never narrower */

struct row {
	bool rule;
	char *cells[COLUMNS_MAX];	/* owned */
};

struct columns {
	char alignment[COLUMNS_MAX + 1];
	size_t count;			/* of columns */
	struct row *rows;		/* owned */
	size_t rows_count, rows_room;
};

struct columns *
columns_new(const char *alignment)
{
	struct columns *columns = calloc(1, sizeof(*columns));

	assert(strlen(alignment) <= COLUMNS_MAX);
	if (columns == NULL)
		return NULL;
	columns->count = strlen(alignment);
	memcpy(columns->alignment, alignment, columns->count);
	return columns;
}

void
columns_free(struct columns *columns)
{
	size_t i, n;

	if (columns == NULL)
		return;
	for (i = 0; i < columns->rows_count; i++)
		for (n = 0; n < columns->count; n++)
			free(columns->rows[i].cells[n]);
	free(columns->rows);
	free(columns);
}

static struct row *
new_row(struct columns *columns)
{
	struct row *rows;
	size_t room;

	if (columns->rows_count == columns->rows_room) {
		room = columns->rows_room == 0 ? 16 : 2 * columns->rows_room;
		rows = realloc(columns->rows, room * sizeof(*rows));
		if (rows == NULL)
			return NULL;
		columns->rows = rows;
		columns->rows_room = room;
	}
	rows = &columns->rows[columns->rows_count++];
	memset(rows, 0, sizeof(*rows));
	return rows;
}

void
columns_row(struct columns *columns, const char *const cells[])
{
	struct row *row;
	size_t i;

	if (columns == NULL || (row = new_row(columns)) == NULL)
		return;
	for (i = 0; i < columns->count; i++)
		row->cells[i] = strdup(cells[i] != NULL ? cells[i] : "");
}

void
columns_rule(struct columns *columns)
{
	struct row *row;

	if (columns != NULL && (row = new_row(columns)) != NULL)
		row->rule = true;
}

static void
pad(size_t count, int character, FILE *out)
{
	for (; count > 0; count--)
		(void)fputc(character, out);
}

/* Words of text from this column on; returns nothing, ends no line. */
static void
print_wrapped(const char *text, size_t column, FILE *out)
{
	size_t at = column, length, width;
	char word[256];

	while (*text != '\0') {
		length = strcspn(text, " ");
		if (length >= sizeof(word))
			length = sizeof(word) - 1;
		memcpy(word, text, length);
		word[length] = '\0';
		width = utf8_columns(word);
		if (at > column && at + 1 + width > COLUMNS_PAGE) {
			(void)fputc('\n', out);
			pad(column, ' ', out);
			at = column;
		}
		if (at > column) {
			(void)fputc(' ', out);
			at++;
		}
		(void)fputs(word, out);
		at += width;
		text += length;
		text += strspn(text, " ");
	}
}

static bool
all_empty_after(const struct row *row, size_t i, size_t count)
{
	for (; i < count; i++)
		if (row->cells[i] != NULL && row->cells[i][0] != '\0')
			return false;
	return true;
}

static void
print_row(const struct columns *columns, const struct row *row,
    const size_t widths[], int indent, FILE *out)
{
	size_t i, at = (size_t)indent, width;
	const char *cell;

	pad((size_t)indent, ' ', out);
	for (i = 0; i < columns->count; i++) {
		cell = row->cells[i] != NULL ? row->cells[i] : "";
		width = utf8_columns(cell);
		if (columns->alignment[i] == 'w') {
			if (at + WRAP_LEAST > COLUMNS_PAGE)
				(void)fputs(cell, out);
			else
				print_wrapped(cell, at, out);
			break;
		}
		if (columns->alignment[i] == 'r')
			pad(widths[i] - width, ' ', out);
		(void)fputs(cell, out);
		if (all_empty_after(row, i + 1, columns->count))
			break;
		if (columns->alignment[i] == 'l')
			pad(widths[i] - width, ' ', out);
		pad(GAP, ' ', out);
		at += widths[i] + GAP;
	}
	(void)fputc('\n', out);
}

void
columns_print(const struct columns *columns, int indent, FILE *out)
{
	size_t widths[COLUMNS_MAX] = { 0 }, i, n, total, width;

	if (columns == NULL)
		return;
	for (i = 0; i < columns->rows_count; i++) {
		for (n = 0; n < columns->count; n++) {
			if (columns->rows[i].cells[n] == NULL)
				continue;
			width = utf8_columns(columns->rows[i].cells[n]);
			if (width > widths[n])
				widths[n] = width;
		}
	}
	total = GAP * (columns->count - 1);
	for (n = 0; n < columns->count; n++)
		total += widths[n];
	if (total + (size_t)indent > COLUMNS_PAGE)
		total = COLUMNS_PAGE - (size_t)indent;
	for (i = 0; i < columns->rows_count; i++) {
		if (!columns->rows[i].rule) {
			print_row(columns, &columns->rows[i], widths, indent,
			    out);
			continue;
		}
		pad((size_t)indent, ' ', out);
		pad(total, '-', out);
		(void)fputc('\n', out);
	}
}
