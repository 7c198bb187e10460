/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/ladder_text.h"

#include <string.h>

#include "columns.h"

/* A column of the ladder in whole last digits. */
struct ladder_column {
	unsigned digits;		/* after the point */
	uint64_t top;			/* the medium's line rate */
	uint64_t levels[LEVELS];
	uint64_t steps[LADDER_STEPS_MAX];
};

/* Rates divided by this many bit/s: a unit's last digit, or for shares the
 * ten-thousandth part of the line rate.  Levels are rounded down, with a half
 * to the nearest. */
static void
fill_rates(struct ladder_column *column, const struct ceiling *ceiling,
    struct fraction digit, struct fraction half)
{
	struct mixed levels[LEVELS], steps[LADDER_STEPS_MAX];
	size_t i;

	for (i = 0; i < LEVELS; i++) {
		levels[i] = mixed_split(fraction_add(half, fraction_divide(
		    fraction_whole(ceiling->rate_bps[i]), digit)));
		column->levels[i] = levels[i].whole;
	}
	for (i = 0; i < ceiling->steps_count; i++)
		steps[i] = mixed_split(fraction_divide(fraction_whole(
		    ceiling->steps[i].bps), digit));
	column->top = fraction_floor(fraction_divide(fraction_whole(
	    ceiling->line_rate_bps), digit));
	ladder_round(ceiling->steps, ceiling->steps_count, steps, levels,
	    column->top, column->steps);
}

static void
fill_octets(struct ladder_column *column, const struct ceiling *ceiling)
{
	struct mixed levels[LEVELS], steps[LADDER_STEPS_MAX];
	uint64_t scale = 1;
	size_t i;

	column->digits = 0;
	if (ceiling->level_bytes_den != 1) {
		column->digits = 3;
		scale = 1000;
	}
	for (i = 0; i < LEVELS; i++) {
		levels[i] = mixed_product(fraction_whole(scale),
		    fraction_make(ceiling->level_bytes_num[i],
		    ceiling->level_bytes_den));
		column->levels[i] = levels[i].whole;
	}
	for (i = 0; i < ceiling->steps_count; i++)
		steps[i] = mixed_product(fraction_whole(scale),
		    fraction_make(ceiling->steps[i].bytes_num,
		    ceiling->steps[i].bytes_den));
	ladder_round(ceiling->steps, ceiling->steps_count, steps, levels,
	    levels[LEVEL_LINE].whole, column->steps);
}

struct ladder {
	struct ladder_column octets, rates, shares;
};

/* What is 0 as printed has no sign. */
static const char *
cell(const struct ladder_column *column, uint64_t value, const char *sign,
    char buf[RATE_CELL_SIZE])
{
	return rate_digits(value, column->digits, value != 0 ? sign : "", buf);
}

static void
level_row(struct columns *columns, const struct ladder *ladder,
    enum layer_level level)
{
	char octets[RATE_CELL_SIZE], rate[RATE_CELL_SIZE];
	char share[RATE_CELL_SIZE];
	const char *cells[] = { level_name(level),
		cell(&ladder->octets, ladder->octets.levels[level], "",
		    octets),
		cell(&ladder->rates, ladder->rates.levels[level], "", rate),
		cell(&ladder->shares, ladder->shares.levels[level], "",
		    share), "" };

	columns_row(columns, cells);
}

static void
step_row(struct columns *columns, const struct ladder *ladder,
    const struct ladder_step *step, size_t i)
{
	char name[sizeof(step->name) + 4], octets[RATE_CELL_SIZE];
	char rate[RATE_CELL_SIZE], share[RATE_CELL_SIZE];
	const char *cells[] = { name, step->bytes_num == 0 ? "" :
		cell(&ladder->octets, ladder->octets.steps[i], "-", octets),
		cell(&ladder->rates, ladder->rates.steps[i], "-", rate),
		cell(&ladder->shares, ladder->shares.steps[i], "-", share),
		step->source };

	(void)snprintf(name, sizeof(name), "  %s", step->name);
	columns_row(columns, cells);
}

/* A layer that puts nothing around another's octets has no step, though its
 * level is there: Ethernet on a medium without gaps. */
static bool
has_step(const struct ceiling *ceiling, enum layer_level level)
{
	for (size_t i = 0; i < ceiling->steps_count; i++)
		if (ceiling->steps[i].reaches_level &&
		    ceiling->steps[i].level == level)
			return true;
	return false;
}

/* Such levels that have these octets a packet, from *next on. */
static void
levels_without_step(struct columns *columns, const struct ladder *ladder,
    const struct ceiling *ceiling, uint64_t octets, enum layer_level *next)
{
	enum layer_level level;

	for (level = *next; level < LEVEL_PAYLOAD; level++) {
		if (level == LEVEL_FRAME_WITHOUT_FCS ||
		    !ceiling->has_level[level] || has_step(ceiling, level))
			continue;
		if (ladder->octets.levels[level] != octets)
			break;
		level_row(columns, ladder, level);
		*next = level + 1;
	}
}

static void
add_steps(struct columns *columns, const struct ladder *ladder,
    const struct ceiling *ceiling)
{
	uint64_t octets = ladder->octets.levels[LEVEL_LINE];
	enum layer_level next = LEVEL_FRAME;
	size_t i;

	for (i = 0; i < ceiling->steps_count; i++) {
		const struct ladder_step *step = &ceiling->steps[i];

		if (!step->reaches_level || step->level != LEVEL_LINE)
			levels_without_step(columns, ladder, ceiling, octets,
			    &next);
		step_row(columns, ladder, step, i);
		octets -= ladder->octets.steps[i];
		if (step->reaches_level)
			level_row(columns, ladder, step->level);
	}
}

void
ladder_text(const struct ceiling *ceiling, const struct rate_unit *unit,
    const char *line_source, FILE *out)
{
	struct columns *columns = columns_new("lrrrl");
	struct ladder ladder;
	char octets[RATE_CELL_SIZE] = "", rate[RATE_CELL_SIZE];
	char share[RATE_CELL_SIZE];
	const char *head[] = { "from the line to the payload", "B/packet",
		unit->symbol, "% of line", "source" };
	const char *top[] = { "line rate", octets, rate, share, line_source };

	memset(&ladder, 0, sizeof(ladder));
	fill_octets(&ladder.octets, ceiling);
	ladder.rates.digits = 3;
	fill_rates(&ladder.rates, ceiling, fraction_whole(unit->digit_bps),
	    fraction_whole(0));
	ladder.shares.digits = 2;
	fill_rates(&ladder.shares, ceiling, fraction_make(
	    ceiling->line_rate_bps, 10000), fraction_make(1, 2));
	(void)cell(&ladder.rates, ladder.rates.top, "", rate);
	(void)cell(&ladder.shares, ladder.shares.top, "", share);
	columns_row(columns, head);
	columns_rule(columns);
	if (ceiling->unused_bps == 0) {
		top[0] = level_name(LEVEL_LINE);
		(void)cell(&ladder.octets, ladder.octets.levels[LEVEL_LINE],
		    "", octets);
	}
	columns_row(columns, top);
	add_steps(columns, &ladder, ceiling);
	columns_print(columns, 0, out);
	columns_free(columns);
}
