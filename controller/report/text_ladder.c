/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/text_ladder.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#define ROWS_MAX (2 * (LADDER_STEPS_MAX + LEDGER_ENTRIES_MAX) + 4)
#define LABEL_COLUMN 2
#define LABEL_END 48
static const unsigned value_columns[DIRECTIONS_SINGLE] = { 62, 78 };

/* What one direction takes off (or adds) under one name. */
struct row {
	const char *name;		/* borrowed */
	bool has[DIRECTIONS_SINGLE];
	int64_t bps[DIRECTIONS_SINGLE];
};

struct table {
	struct row rows[ROWS_MAX];
	size_t count;
	size_t next[DIRECTIONS_SINGLE];	/* first row that may still match */
};

/* A name of the other direction is shared where the order allows it, so that
 * each direction's rows keep their order. */
static void
add(struct table *table, enum direction direction, const char *name,
    int64_t bps)
{
	size_t i = table->next[direction];

	while (i < table->count && (table->rows[i].has[direction] ||
	    strcmp(table->rows[i].name, name) != 0))
		i++;
	if (i == table->count) {
		i = table->next[direction];
		memmove(&table->rows[i + 1], &table->rows[i],
		    (table->count - i) * sizeof(table->rows[0]));
		memset(&table->rows[i], 0, sizeof(table->rows[i]));
		table->rows[i].name = name;
		table->count++;
	}
	table->rows[i].has[direction] = true;
	table->rows[i].bps[direction] = bps;
	table->next[direction] = i + 1;
}

/* The printed rates are rounded down, a change is the difference of two. */
static void
print_changes(struct text_page *page, const struct table *table,
    const bool shown[DIRECTIONS_SINGLE], int64_t running[DIRECTIONS_SINGLE])
{
	char buf[TEXT_CELL_SIZE];

	for (size_t i = 0; i < table->count; i++) {
		text_cut(page, LABEL_COLUMN, LABEL_END, table->rows[i].name);
		for (size_t d = 0; d < DIRECTIONS_SINGLE; d++) {
			int64_t digit = (int64_t)page->digit_bps, before;

			if (!shown[d] || !table->rows[i].has[d])
				continue;
			before = running[d] / digit;
			running[d] -= table->rows[i].bps[d];
			text_right(page, value_columns[d], text_change(page,
			    running[d] / digit - before, buf));
		}
		text_end(page);
	}
}

static void
print_total(struct text_page *page, const char *name,
    const bool shown[DIRECTIONS_SINGLE],
    const int64_t running[DIRECTIONS_SINGLE])
{
	char buf[TEXT_CELL_SIZE];

	text_left(page, LABEL_COLUMN, "");
	text_paint(page, PAINT_BOLD, name);
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++)
		if (shown[d])
			text_right(page, value_columns[d], text_rate(page,
			    (uint64_t)running[d], buf));
	text_end(page);
}

static void
add_steps(struct table *table, const struct ceiling *ceiling)
{
	for (size_t i = 0; i < ceiling->steps_count; i++)
		add(table, ceiling->direction, ceiling->steps[i].name,
		    (int64_t)ceiling->steps[i].bps);
}

static void
add_entries(struct table *table, const struct verdict *verdict,
    enum direction direction)
{
	for (size_t i = 0; i < verdict->ledger_count; i++)
		if (verdict->ledger[i].direction == direction)
			add(table, direction, verdict->ledger[i].name,
			    verdict->ledger[i].bps);
}

static void
print_ladder(struct text_page *page, const struct record *record,
    const bool shown[DIRECTIONS_SINGLE], struct table *table)
{
	int64_t running[DIRECTIONS_SINGLE];
	bool achieved[DIRECTIONS_SINGLE];
	size_t d;

	for (d = 0; d < DIRECTIONS_SINGLE; d++) {
		running[d] = (int64_t)record->ceilings[d].line_rate_bps;
		achieved[d] = shown[d] && record->verdict->has_achieved[d];
		if (shown[d])
			add_steps(table, &record->ceilings[d]);
	}
	print_total(page, "line rate", shown, running);
	print_changes(page, table, shown, running);
	print_total(page, "ceiling, payload", shown, running);
	memset(table, 0, sizeof(*table));
	for (d = 0; d < DIRECTIONS_SINGLE; d++)
		if (achieved[d])
			add_entries(table, record->verdict,
			    (enum direction)d);
	if (!achieved[0] && !achieved[1])
		return;
	print_changes(page, table, achieved, running);
	print_total(page, "achieved, median", achieved, running);
}

void
text_ladder(struct text_page *page, const struct record *record,
    const bool shown[DIRECTIONS_SINGLE])
{
	struct table *table = calloc(1, sizeof(*table));

	if (table == NULL)
		return;
	text_heading(page, "From the line to the result, ");
	text_paint(page, PAINT_BOLD, page->rate_unit);
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++)
		if (shown[d])
			text_right(page, value_columns[d],
			    direction_name((enum direction)d));
	text_end(page);
	print_ladder(page, record, shown, table);
	free(table);
}
