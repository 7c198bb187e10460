/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The text form of a sweep: a table a direction, or one for both. */
#include <string.h>

#include "columns.h"
#include "report/rate_unit.h"
#include "report/sweep.h"

static const enum layer_level levels[] = { LEVEL_LINE, LEVEL_FRAME,
	LEVEL_PACKET, LEVEL_SEGMENT, LEVEL_PAYLOAD };
#define SHOWN_LEVELS (sizeof(levels) / sizeof(levels[0]))
#define CONDITION_CELL_SIZE 160

/* What the accepted points of one direction have in common.  A condition above
 * the ceiling explains nothing and is not printed, unless it is what goes
 * through the range. */
struct common {
	const struct sweep_direction *first;	/* NULL: none is accepted */
	bool level[LEVELS];		/* some point has it */
	bool one_binding, one_condition;
	bool conditions;		/* they are printed */
	uint64_t largest_bps, least_bps;
};

/* Of what the circuit is used under. */
static bool
is_condition(const char *key)
{
	static const char prefix[] = "conditions.";

	return strncmp(key, prefix, sizeof(prefix) - 1) == 0;
}

static struct common
find_common(const struct sweep *sweep, enum direction direction)
{
	struct common c = { .one_binding = true, .one_condition = true,
		.conditions = is_condition(sweep->range.key) };
	size_t i, n;

	for (i = 0; i < sweep->range.count; i++) {
		const struct sweep_direction *d =
		    &sweep->points[i].directions[direction];

		if (sweep->points[i].refused)
			continue;
		if (c.first == NULL) {
			c.first = d;
			c.least_bps = d->rate_bps[LEVEL_PAYLOAD];
		}
		for (n = 0; n < LEVELS; n++)
			c.level[n] = c.level[n] || d->has_level[n];
		if (strcmp(d->binding, c.first->binding) != 0)
			c.one_binding = false;
		if (strcmp(d->condition, c.first->condition) != 0)
			c.one_condition = false;
		c.conditions = c.conditions || (d->condition[0] != '\0' &&
		    d->condition_bps < d->rate_bps[LEVEL_PAYLOAD]);
		if (d->rate_bps[LEVEL_LINE] > c.largest_bps)
			c.largest_bps = d->rate_bps[LEVEL_LINE];
		if (d->rate_bps[LEVEL_PAYLOAD] < c.least_bps)
			c.least_bps = d->rate_bps[LEVEL_PAYLOAD];
	}
	return c;
}

static bool
same_point(const struct sweep_direction *left,
    const struct sweep_direction *right)
{
	return memcmp(left->rate_bps, right->rate_bps,
	    sizeof(left->rate_bps)) == 0 &&
	    strcmp(left->binding, right->binding) == 0 &&
	    strcmp(left->condition, right->condition) == 0 &&
	    left->condition_bps == right->condition_bps;
}

static bool
directions_alike(const struct sweep *sweep)
{
	for (size_t i = 0; i < sweep->range.count; i++)
		if (!same_point(&sweep->points[i].directions[0],
		    &sweep->points[i].directions[1]))
			return false;
	return true;
}

/* Columns: value, levels, condition, binding. */
struct shape {
	struct columns *columns;
	const struct rate_unit *unit;
	const struct common *common;
	bool binding, condition;	/* columns for them */
};

static void
add_head(const struct sweep *sweep, const struct shape *shape)
{
	const char *cells[COLUMNS_MAX] = { NULL };
	size_t n = 0, i;

	cells[n++] = sweep->range.key;
	for (i = 0; i < SHOWN_LEVELS; i++)
		if (shape->common->level[levels[i]])
			cells[n++] = level_name(levels[i]);
	if (shape->condition)
		cells[n++] = "condition";
	if (shape->binding)
		cells[n++] = "set by";
	columns_row(shape->columns, cells);
	columns_rule(shape->columns);
}

static void
add_point(const struct sweep_point *point, enum direction direction,
    const struct shape *shape)
{
	const struct sweep_direction *d = &point->directions[direction];
	char rates[SHOWN_LEVELS][RATE_CELL_SIZE];
	char condition[CONDITION_CELL_SIZE] = "", rate[RATE_CELL_SIZE];
	const char *cells[COLUMNS_MAX] = { point->value };
	size_t n = 1, i;

	for (i = 0; i < SHOWN_LEVELS; i++) {
		if (!shape->common->level[levels[i]])
			continue;
		cells[n++] = point->refused || !d->has_level[levels[i]] ? "-" :
		    rate_unit_text(shape->unit, d->rate_bps[levels[i]],
		    rates[i]);
	}
	if (!point->refused && d->condition[0] != '\0')
		(void)snprintf(condition, sizeof(condition), "%s%s%s",
		    rate_unit_text(shape->unit, d->condition_bps, rate),
		    shape->common->one_condition ? "" : " ",
		    shape->common->one_condition ? "" : d->condition);
	if (shape->condition)
		cells[n++] = condition;
	if (shape->binding)
		cells[n++] = point->refused ? "refused" : d->binding;
	columns_row(shape->columns, cells);
}

static void
print_table(const struct sweep *sweep, enum direction direction,
    const struct common *common, const struct rate_unit *unit, FILE *out)
{
	char alignment[COLUMNS_MAX + 1] = "r", *end = alignment + 1;
	struct shape shape = { .unit = unit, .common = common,
		.binding = !common->one_binding,
		.condition = common->conditions };
	size_t i;

	for (i = 0; i < SHOWN_LEVELS; i++)
		if (common->level[levels[i]])
			*end++ = 'r';
	if (shape.condition)
		*end++ = common->one_condition ? 'r' : 'l';
	if (shape.binding)
		*end++ = 'l';
	*end = '\0';
	shape.columns = columns_new(alignment);
	add_head(sweep, &shape);
	for (i = 0; i < sweep->range.count; i++)
		add_point(&sweep->points[i], direction, &shape);
	columns_print(shape.columns, 0, out);
	columns_free(shape.columns);
}

static void
print_direction(const struct sweep *sweep, enum direction direction,
    const char *title, FILE *out)
{
	struct common common = find_common(sweep, direction);
	const struct rate_unit *unit;

	unit = rate_unit_for(common.largest_bps, common.least_bps);
	(void)fprintf(out, "\n%s, in %s", title, unit->symbol);
	if (common.first != NULL && common.one_binding)
		(void)fprintf(out, "; set by %s", common.first->binding);
	if (common.conditions && common.one_condition)
		(void)fprintf(out, "\nlowest condition: %s",
		    common.first->condition);
	(void)fputs("\n\n", out);
	print_table(sweep, direction, &common, unit, out);
}

/* The first one's reason stands for all. */
static void
print_refused(const struct sweep *sweep, FILE *out)
{
	struct columns *columns;
	const struct sweep_point *first = NULL;
	char text[SWEEP_VALUE_SIZE + 600];
	const char *cells[] = { text };
	size_t i, count = 0;

	for (i = 0; i < sweep->range.count; i++)
		if (sweep->points[i].refused && count++ == 0)
			first = &sweep->points[i];
	if (first == NULL)
		return;
	columns = columns_new("w");
	(void)snprintf(text, sizeof(text), "-: the declaration is refused "
	    "with %s%s: %s", first->value, count > 1 ? " and others" : "",
	    first->why);
	columns_row(columns, cells);
	(void)fputc('\n', out);
	columns_print(columns, 0, out);
	columns_free(columns);
}

void
sweep_text(const struct sweep *sweep, FILE *out)
{
	const struct sweep_range *range = &sweep->range;
	enum direction d;

	(void)fprintf(out, "%s: %s from %s to %s, over %s\n", sweep->circuit,
	    range->key, sweep->points[0].value,
	    sweep->points[range->count - 1].value, sweep->top);
	if (sweep->reference) {
		(void)fputs("its medium is a reference and has no ceiling\n",
		    out);
		return;
	}
	if (directions_alike(sweep))
		print_direction(sweep, DIRECTION_A_TO_B,
		    "both directions alike", out);
	else
		for (d = 0; d < DIRECTIONS_SINGLE; d++)
			print_direction(sweep, d, direction_name(d), out);
	print_refused(sweep, out);
}
