/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The text form of ceiling_report: a ladder a direction, every column of which
 * adds up as printed, then the bounds, then the other protocols. */
#include <inttypes.h>
#include <string.h>

#include "columns.h"
#include "report/ceiling_report.h"

#define CELL_SIZE 32

/* One unit for a column of rates, three digits after the point. */
struct rate_unit {
	uint64_t least_line_bps;	/* from this line rate on */
	uint64_t digit_bps;		/* the last digit */
	const char *symbol;
};
static const struct rate_unit rate_units[] = {
	{ UINT64_C(100000000000), 1000000, "Gbit/s" },
	{ 10000000, 1000, "Mbit/s" },
	{ 0, 1, "kbit/s" },
};

static const struct rate_unit *
unit_for(uint64_t line_rate_bps)
{
	const struct rate_unit *unit = rate_units;

	while (line_rate_bps < unit->least_line_bps)
		unit++;
	return unit;
}

/* A column of the ladder in whole last digits. */
struct ladder_column {
	unsigned digits;		/* after the point */
	uint64_t top;			/* the medium's line rate */
	uint64_t levels[LEVELS];
	uint64_t steps[LADDER_STEPS_MAX];
};

/* Sets digits, 0 to 3, of a whole number of last digits. */
static const char *
decimal(uint64_t value, unsigned digits, const char *sign, char buf[CELL_SIZE])
{
	uint64_t unit = 1;
	unsigned i;

	for (i = 0; i < digits; i++)
		unit *= 10;
	if (digits == 0)
		(void)snprintf(buf, CELL_SIZE, "%s%" PRIu64, sign, value);
	else
		(void)snprintf(buf, CELL_SIZE, "%s%" PRIu64 ".%0*" PRIu64, sign,
		    value / unit, (int)digits, value % unit);
	return buf;
}

static void
round_levels(struct ladder_column *column, const struct ceiling *ceiling,
    const struct fraction levels[LEVELS], const struct fraction steps[])
{
	int level;

	for (level = 0; level < LEVELS; level++)
		column->levels[level] = fraction_floor(levels[level]);
	ladder_round(ceiling->steps, ceiling->steps_count, steps, levels,
	    column->steps);
}

/* Rates divided by this many bit/s: a unit's last digit, or for shares the
 * ten-thousandth part of the line rate.  Levels are rounded down, with a half
 * to the nearest. */
static void
fill_rates(struct ladder_column *column, const struct ceiling *ceiling,
    struct fraction digit, struct fraction half)
{
	struct fraction levels[LEVELS], steps[LADDER_STEPS_MAX];
	size_t i;

	for (i = 0; i < LEVELS; i++)
		levels[i] = fraction_add(half, fraction_divide(fraction_whole(
		    ceiling->rate_bps[i]), digit));
	for (i = 0; i < ceiling->steps_count; i++)
		steps[i] = fraction_divide(fraction_whole(
		    ceiling->steps[i].bps), digit);
	column->top = fraction_floor(fraction_divide(fraction_whole(
	    ceiling->line_rate_bps), digit));
	round_levels(column, ceiling, levels, steps);
}

static void
fill_octets(struct ladder_column *column, const struct ceiling *ceiling)
{
	struct fraction levels[LEVELS], steps[LADDER_STEPS_MAX];
	uint64_t scale = 1;
	size_t i;

	column->digits = 0;
	if (ceiling->level_bytes_den != 1) {
		column->digits = 3;
		scale = 1000;
	}
	for (i = 0; i < LEVELS; i++)
		levels[i] = fraction_make(scale * ceiling->level_bytes_num[i],
		    ceiling->level_bytes_den);
	for (i = 0; i < ceiling->steps_count; i++)
		steps[i] = fraction_make(scale * ceiling->steps[i].bytes_num,
		    ceiling->steps[i].bytes_den);
	round_levels(column, ceiling, levels, steps);
}

struct ladder {
	struct ladder_column octets, rates, shares;
};

static void
level_row(struct columns *columns, const struct ladder *ladder,
    enum layer_level level)
{
	char octets[CELL_SIZE], rate[CELL_SIZE], share[CELL_SIZE];
	const char *cells[] = { level_name(level),
		decimal(ladder->octets.levels[level], ladder->octets.digits,
		    "", octets),
		decimal(ladder->rates.levels[level], ladder->rates.digits, "",
		    rate),
		decimal(ladder->shares.levels[level], ladder->shares.digits,
		    "", share), "" };

	columns_row(columns, cells);
}

static void
step_row(struct columns *columns, const struct ladder *ladder,
    const struct ladder_step *step, size_t i)
{
	char name[sizeof(step->name) + 4];
	char octets[CELL_SIZE], rate[CELL_SIZE], share[CELL_SIZE];
	const char *cells[] = { name, octets, rate, share, step->source };

	(void)snprintf(name, sizeof(name), "  %s", step->name);
	(void)decimal(ladder->octets.steps[i], ladder->octets.digits, "-",
	    octets);
	if (step->bytes_num == 0)
		octets[0] = '\0';
	(void)decimal(ladder->rates.steps[i], ladder->rates.digits, "-", rate);
	(void)decimal(ladder->shares.steps[i], ladder->shares.digits, "-",
	    share);
	columns_row(columns, cells);
}

static void
print_ladder(const struct ceiling *ceiling, const struct rate_unit *unit,
    const char *line_source, FILE *out)
{
	struct columns *columns = columns_new("lrrrl");
	struct ladder ladder;
	char octets[CELL_SIZE] = "", rate[CELL_SIZE], share[CELL_SIZE];
	const char *head[] = { "from the line to the payload", "B/packet",
		unit->symbol, "% of line", "source" };
	const char *top[] = { "line rate", octets, rate, share, line_source };
	size_t i;

	memset(&ladder, 0, sizeof(ladder));
	fill_octets(&ladder.octets, ceiling);
	ladder.rates.digits = 3;
	fill_rates(&ladder.rates, ceiling, fraction_whole(unit->digit_bps),
	    fraction_whole(0));
	ladder.shares.digits = 2;
	fill_rates(&ladder.shares, ceiling, fraction_make(
	    ceiling->line_rate_bps, 10000), fraction_make(1, 2));
	(void)decimal(ladder.rates.top, ladder.rates.digits, "", rate);
	(void)decimal(ladder.shares.top, ladder.shares.digits, "", share);
	columns_row(columns, head);
	columns_rule(columns);
	if (ceiling->unused_bps == 0) {
		top[0] = level_name(LEVEL_LINE);
		(void)decimal(ladder.octets.levels[LEVEL_LINE],
		    ladder.octets.digits, "", octets);
	}
	columns_row(columns, top);
	for (i = 0; i < ceiling->steps_count; i++) {
		step_row(columns, &ladder, &ceiling->steps[i], i);
		if (ceiling->steps[i].reaches_level)
			level_row(columns, &ladder, ceiling->steps[i].level);
	}
	columns_print(columns, 0, out);
	columns_free(columns);
}

static void
print_bounds(const struct ceiling *ceiling, const struct rate_unit *unit,
    FILE *out)
{
	struct columns *columns = columns_new("llrll");
	const char *head[] = { "bound", "class", unit->symbol, "binds",
		"source" };
	char rate[CELL_SIZE];
	size_t i;

	columns_row(columns, head);
	columns_rule(columns);
	for (i = 0; i < ceiling->bounds_count; i++) {
		const struct bound *bound = &ceiling->bounds[i];
		const char *cells[] = { bound->name,
			bound_class_name(bound->class),
			decimal(bound->payload_bps / unit->digit_bps, 3, "",
			    rate), bound->binding ? "yes" : "",
			bound->source };

		columns_row(columns, cells);
	}
	columns_print(columns, 0, out);
	columns_free(columns);
}

static void
print_protocols(const struct ceiling_report *report, enum direction direction,
    const struct rate_unit *unit, FILE *out)
{
	struct columns *columns = columns_new("lr");
	const char *head[] = { "payload of a trial over", unit->symbol };
	char rate[CELL_SIZE];
	enum protocol p;

	columns_row(columns, head);
	columns_rule(columns);
	for (p = 0; p < PROTOCOLS; p++) {
		const char *cells[] = { protocol_name(p), decimal(
			report->payload_bps[direction][p] / unit->digit_bps,
			3, "", rate) };

		columns_row(columns, cells);
	}
	columns_print(columns, 0, out);
	columns_free(columns);
}

static const struct bound *
binding_bound(const struct ceiling *ceiling)
{
	size_t i;

	for (i = 0; i < ceiling->bounds_count; i++)
		if (ceiling->bounds[i].binding &&
		    ceiling->bounds[i].class != BOUND_CONDITION)
			return &ceiling->bounds[i];
	return NULL;
}

static void
print_direction(const struct ceiling_report *report, enum direction direction,
    const char *title, FILE *out)
{
	const struct ceiling *ceiling = &report->ceilings[direction];
	const struct rate_unit *unit = unit_for(ceiling->line_rate_bps);
	const struct bound *binding = binding_bound(ceiling);
	const struct medium *medium;
	char rate[CELL_SIZE];

	medium = report->circuit->segments[ceiling->narrow].medium.medium;
	(void)fprintf(out, "\n%s: %s %s of payload over %s\nset by %s\n",
	    title, decimal(ceiling->rate_bps[LEVEL_PAYLOAD] / unit->digit_bps,
	    3, "", rate), unit->symbol, protocol_name(ceiling->protocol),
	    binding != NULL ? binding->name : "nothing");
	if (report->circuit->segments_count > 1)
		(void)fprintf(out, "in segment '%s', whose ladder this is\n",
		    report->circuit->segments[ceiling->narrow].name);
	(void)fputc('\n', out);
	print_ladder(ceiling, unit, medium->source, out);
	(void)fputc('\n', out);
	print_bounds(ceiling, unit, out);
	(void)fputc('\n', out);
	print_protocols(report, direction, unit, out);
}

/* The same but for the direction. */
static bool
alike(const struct ceiling *left, const struct ceiling *right)
{
	size_t i;

	if (left->narrow != right->narrow ||
	    left->line_rate_bps != right->line_rate_bps ||
	    left->bounds_count != right->bounds_count ||
	    left->payload_num != right->payload_num ||
	    left->payload_den != right->payload_den)
		return false;
	for (i = 0; i < left->bounds_count; i++)
		if (strcmp(left->bounds[i].name, right->bounds[i].name) != 0 ||
		    left->bounds[i].payload_bps != right->bounds[i].payload_bps)
			return false;
	return true;
}

static void
print_segments(const struct ceiling_report *report, FILE *out)
{
	static const char *const head[] = { "segment", "medium", "MTU",
		"layers" };
	const struct circuit *circuit = report->circuit;
	struct columns *columns = columns_new("llrw");
	char mtu[CELL_SIZE], layers[256];
	size_t i;

	columns_row(columns, head);
	columns_rule(columns);
	for (i = 0; i < circuit->segments_count; i++) {
		const struct segment *segment = &circuit->segments[i];
		const char *cells[] = { segment->name,
			segment->medium.medium->name, mtu,
			layers_text(&segment->layers, layers,
			    sizeof(layers)) };

		(void)snprintf(mtu, sizeof(mtu), "%" PRIu64 " B",
		    segment->mtu_bytes);
		columns_row(columns, cells);
	}
	(void)fputc('\n', out);
	columns_print(columns, 0, out);
	columns_free(columns);
}

void
ceiling_report_text(const struct ceiling_report *report, FILE *out)
{
	const struct circuit *circuit = report->circuit;
	const struct ceiling *ceilings = report->ceilings;
	char layers[256];
	enum direction d;

	if (circuit_is_reference(circuit)) {
		(void)fprintf(out, "%s: medium %s is a reference: it shows "
		    "what the machine can do and has\nno ceiling.\n",
		    circuit->name, circuit->segments[0].medium.medium->name);
		return;
	}
	(void)fprintf(out, "%s: packets of at most %" PRIu64 " B\n%s\n",
	    circuit->name, circuit_mtu(circuit),
	    layers_text(&circuit->segments[0].layers, layers,
	    sizeof(layers)));
	if (circuit->segments_count > 1)
		print_segments(report, out);
	if (alike(&ceilings[DIRECTION_A_TO_B], &ceilings[DIRECTION_B_TO_A])) {
		print_direction(report, DIRECTION_A_TO_B,
		    "both directions alike", out);
	} else {
		for (d = 0; d < DIRECTIONS_SINGLE; d++)
			print_direction(report, d, direction_name(d), out);
	}
	(void)fprintf(out, "\nAccuracy: %s; the clock of a line is within %"
	    PRIu64 " ppm.\n",
	    accuracy_name(ceilings[0].accuracy), ceilings[0].tolerance_ppm);
}
