/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The text form of ceiling_report: a ladder a direction, then the bounds, the
 * other transports, what follows from the conditions, and how far to rely on
 * it. */
#include <inttypes.h>
#include <string.h>

#include "columns.h"
#include "report/ceiling_report.h"
#include "report/ladder_text.h"
#include "report/rate_unit.h"

#define LAYERS_TEXT_SIZE 256

/* What makes the ceiling. */
static void
print_bounds(const struct ceiling *ceiling, const struct rate_unit *unit,
    FILE *out)
{
	struct columns *columns = columns_new("llrlw");
	const char *head[] = { "bound", "class", unit->symbol, "binds",
		"source" };
	char rate[RATE_CELL_SIZE];
	size_t i;

	columns_row(columns, head);
	columns_rule(columns);
	for (i = 0; i < ceiling->bounds_count; i++) {
		const struct bound *bound = &ceiling->bounds[i];
		const char *cells[] = { bound->name,
			bound_class_name(bound->class),
			rate_unit_text(unit, bound->payload_bps, rate),
			bound->binding ? "yes" : "", bound->source };

		if (bound->class != BOUND_CONDITION)
			columns_row(columns, cells);
	}
	columns_print(columns, 0, out);
	columns_free(columns);
}

/* What explains a shortfall. */
static void
print_conditions(const struct ceiling *ceiling, const struct rate_unit *unit,
    FILE *out)
{
	struct columns *columns = columns_new("lrw");
	const char *head[] = { "condition, lowers no ceiling", unit->symbol,
		"source" };
	char rate[RATE_CELL_SIZE], source[sizeof(ceiling->bounds[0].source) +
	    16];
	size_t i, count = 0;

	columns_row(columns, head);
	columns_rule(columns);
	for (i = 0; i < ceiling->bounds_count; i++) {
		const struct bound *bound = &ceiling->bounds[i];
		const char *cells[] = { bound->name, rate_unit_text(unit,
			bound->payload_bps, rate), source };

		if (bound->class != BOUND_CONDITION)
			continue;
		(void)snprintf(source, sizeof(source), "%s%s",
		    bound->binding ? "lowest: " : "", bound->source);
		columns_row(columns, cells);
		count++;
	}
	if (count > 0) {
		(void)fputc('\n', out);
		columns_print(columns, 0, out);
	}
	columns_free(columns);
}

static void
print_protocols(const struct ceiling_report *report, enum direction direction,
    const struct rate_unit *unit, FILE *out)
{
	const struct ceiling *ceiling = &report->ceilings[direction];
	struct columns *columns = columns_new("lrl");
	const char *head[] = { "payload over", unit->symbol, "" };
	char rate[RATE_CELL_SIZE];
	bool listed = false;
	enum protocol p;

	columns_row(columns, head);
	columns_rule(columns);
	for (p = 0; p < PROTOCOLS; p++) {
		bool declared = strcmp(protocol_name(p), ceiling->top) == 0;
		uint64_t bps = report->payload_bps[direction][p];
		const char *cells[] = { protocol_name(p), bps == FIELD_UNSET ?
			"-" : rate_unit_text(unit, bps, rate), declared ?
			"as declared" : "" };

		listed = listed || declared;
		columns_row(columns, cells);
	}
	if (!listed) {
		const char *cells[] = { ceiling->top, rate_unit_text(unit,
			ceiling->rate_bps[LEVEL_PAYLOAD], rate),
			"as declared" };

		columns_row(columns, cells);
	}
	columns_print(columns, 0, out);
	columns_free(columns);
}

/* What the medium says of the line: codes, modulation, steps of a modem. */
static void
print_notes(const struct ceiling *ceiling, const char *medium, FILE *out)
{
	struct columns *columns = columns_new("lw");
	char label[64];
	size_t i;

	(void)snprintf(label, sizeof(label), "%s:", medium);
	for (i = 0; i < ceiling->notes_count; i++) {
		const char *cells[] = { i == 0 ? label : "",
			ceiling->notes[i] };

		columns_row(columns, cells);
	}
	if (ceiling->notes_count > 0)
		(void)fputc('\n', out);
	columns_print(columns, 0, out);
	columns_free(columns);
}

static void
print_direction(const struct ceiling_report *report, enum direction direction,
    bool alone, FILE *out)
{
	const struct ceiling *ceiling = &report->ceilings[direction];
	const struct rate_unit *unit = rate_unit_for(ceiling->line_rate_bps,
	    ceiling->rate_bps[LEVEL_PAYLOAD]);
	const struct bound *binding = ceiling_binding(ceiling);
	const struct medium *medium;
	char rate[RATE_CELL_SIZE];

	medium = report->circuit->segments[ceiling->narrow].medium.medium;
	(void)fprintf(out, "\n%s: %s %s of payload over %s\nset by %s\n",
	    alone ? direction_name(direction) : "both directions alike",
	    rate_unit_text(unit, ceiling->rate_bps[LEVEL_PAYLOAD],
	    rate), unit->symbol, ceiling->top, binding != NULL ?
	    binding->name : "nothing");
	if (report->circuit->segments_count > 1)
		(void)fprintf(out, "in segment '%s', whose ladder this is\n",
		    report->circuit->segments[ceiling->narrow].name);
	ceiling_text_both(report, direction, alone ? "this way" : "each way",
	    unit, out);
	(void)fputc('\n', out);
	ladder_text(ceiling, unit, medium->source, out);
	print_notes(ceiling, medium->name, out);
	(void)fputc('\n', out);
	print_bounds(ceiling, unit, out);
	(void)fputc('\n', out);
	print_protocols(report, direction, unit, out);
	print_conditions(ceiling, unit, out);
	ceiling_text_figures(report, direction, unit, out);
}

static bool
same_notes(const struct ceiling *left, const struct ceiling *right)
{
	size_t i;

	if (left->notes_count != right->notes_count)
		return false;
	for (i = 0; i < left->notes_count; i++)
		if (strcmp(left->notes[i], right->notes[i]) != 0)
			return false;
	return true;
}

/* The same but for the direction. */
static bool
alike(const struct ceiling_report *report)
{
	const struct ceiling *left = &report->ceilings[DIRECTION_A_TO_B];
	const struct ceiling *right = &report->ceilings[DIRECTION_B_TO_A];
	const struct both_report *both = report->both;
	size_t i;

	if (left->narrow != right->narrow ||
	    left->line_rate_bps != right->line_rate_bps ||
	    left->bounds_count != right->bounds_count ||
	    mixed_compare(left->payload, right->payload) != 0 ||
	    both[0].low_bps != both[1].low_bps ||
	    both[0].high_bps != both[1].high_bps ||
	    report->figures[0].burst_ns != report->figures[1].burst_ns ||
	    report->figures[0].window_needed_bytes !=
	    report->figures[1].window_needed_bytes ||
	    report->figures[0].streams_needed !=
	    report->figures[1].streams_needed || !same_notes(left, right))
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
	static const char *const head[] = { "segment", "medium", "duplex",
		"MTU", "layers" };
	const struct circuit *circuit = report->circuit;
	struct columns *columns = columns_new("lllrw");
	char mtu[32], layers[LAYERS_TEXT_SIZE];
	size_t i;

	columns_row(columns, head);
	columns_rule(columns);
	for (i = 0; i < circuit->segments_count; i++) {
		const struct segment *segment = &circuit->segments[i];
		const char *cells[] = { segment->name,
			segment->medium.medium->name,
			duplex_name(report->segments[i].duplex), mtu,
			layers_text(&segment->layers, layers,
			    sizeof(layers)) };

		(void)snprintf(mtu, sizeof(mtu), "%" PRIu64 " B",
		    segment->mtu_bytes);
		columns_row(columns, cells);
	}
	columns_print(columns, 0, out);
	columns_free(columns);
}

static void
print_circuit(const struct ceiling_report *report, FILE *out)
{
	const struct circuit *circuit = report->circuit;
	struct columns *columns = columns_new("w");
	char layers[LAYERS_TEXT_SIZE];
	const char *cells[] = { layers };

	(void)fprintf(out, "%s: packets of at most %" PRIu64 " B\n",
	    circuit->name, circuit_mtu(circuit));
	if (circuit->segments_count > 1) {
		(void)fputc('\n', out);
		print_segments(report, out);
	} else {
		(void)layers_text(&circuit->segments[0].layers, layers,
		    sizeof(layers));
		columns_row(columns, cells);
		columns_print(columns, 0, out);
		(void)fprintf(out, "on %s, duplex: %s\n",
		    circuit->segments[0].medium.medium->name,
		    duplex_name(report->segments[0].duplex));
	}
	columns_free(columns);
}

void
ceiling_report_text(const struct ceiling_report *report, FILE *out)
{
	const struct circuit *circuit = report->circuit;
	enum direction d;

	if (circuit_is_reference(circuit)) {
		(void)fprintf(out, "%s: medium %s is a reference: it shows "
		    "what the machine can do and has\nno ceiling.\n",
		    circuit->name, circuit->segments[0].medium.medium->name);
		return;
	}
	print_circuit(report, out);
	if (alike(report)) {
		print_direction(report, DIRECTION_A_TO_B, false, out);
	} else {
		for (d = 0; d < DIRECTIONS_SINGLE; d++)
			print_direction(report, d, true, out);
	}
	ceiling_text_accuracy(report, out);
}
