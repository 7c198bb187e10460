/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the text of a ceiling says beside its tables. */
#include <inttypes.h>
#include <math.h>
#include <string.h>

#include "columns.h"
#include "report/ceiling_report.h"
#include "report/rate_unit.h"

#define TEXT_SIZE 512

/* "914.718 to 940.263", or one figure where both are the same. */
static const char *
range_text(const struct rate_unit *unit, uint64_t low_bps, uint64_t high_bps,
    char buf[2 * RATE_CELL_SIZE + 8])
{
	char low[RATE_CELL_SIZE], high[RATE_CELL_SIZE];

	(void)rate_unit_text(unit, low_bps, low);
	(void)rate_unit_text(unit, high_bps, high);
	(void)snprintf(buf, 2 * RATE_CELL_SIZE + 8, "%s%s%s", low,
	    low_bps == high_bps ? "" : " to ",
	    low_bps == high_bps ? "" : high);
	return buf;
}

static void
print_segments_an_ack(const struct both_report *both, FILE *out)
{
	if (!(both->low_segments > 0))
		return;
	(void)fprintf(out, "  one acknowledgement for %.4g",
	    both->low_segments);
	if (both->high_segments > both->low_segments)
		(void)fprintf(out, " to %.4g", both->high_segments);
	(void)fputs(" segments\n", out);
}

void
ceiling_text_both(const struct ceiling_report *report,
    enum direction direction, const char *way, const struct rate_unit *unit,
    FILE *out)
{
	const struct ceiling *ceiling = &report->ceilings[direction];
	const struct both_report *both = report->both, *own;
	char each[2 * RATE_CELL_SIZE + 8], all[2 * RATE_CELL_SIZE + 8];

	own = &both[direction];
	if (!ceiling->shared &&
	    own->low_bps == ceiling->rate_bps[LEVEL_PAYLOAD] &&
	    own->high_bps == own->low_bps) {
		(void)fputs("both directions at once: the same\n", out);
		return;
	}
	(void)fprintf(out, "both directions at once: %s %s %s\n",
	    range_text(unit, own->low_bps, own->high_bps, each),
	    unit->symbol, way);
	if (ceiling->shared)
		(void)fprintf(out, "  they share the line: %s %s together\n",
		    range_text(unit, both[0].low_bps + both[1].low_bps,
		    both[0].high_bps + both[1].high_bps, all), unit->symbol);
	print_segments_an_ack(own, out);
}

struct figures {
	struct columns *columns;
	const struct condition_figures *values;
	const struct conditions *conditions;
	const struct rate_unit *unit;
	enum direction direction;
	size_t count;
};

static void
add_figure(struct figures *figures, const char *what, const char *text)
{
	const char *cells[] = { what, text };

	columns_row(figures->columns, cells);
	figures->count++;
}

static bool
known(uint64_t value)
{
	return value != FIELD_UNSET;
}

static const char *
time_text(uint64_t ns, char buf[RATE_CELL_SIZE])
{
	return units_format(ns, DIMENSION_TIME, 3, buf, RATE_CELL_SIZE);
}

/* What one round trip asks of the windows. */
static void
add_window(struct figures *f)
{
	const struct condition_figures *v = f->values;
	char text[TEXT_SIZE], rtt[RATE_CELL_SIZE], window[RATE_CELL_SIZE];
	uint64_t window_bytes = f->conditions->window_bytes[f->direction];

	if (known(v->bdp_bytes)) {
		(void)snprintf(text, sizeof(text), "%" PRIu64 " B of the line "
		    "in %s", v->bdp_bytes,
		    time_text(f->conditions->round_trip_ns, rtt));
		add_figure(f, "bandwidth-delay product", text);
	}
	if (known(v->window_needed_bytes)) {
		(void)snprintf(text, sizeof(text), "%" PRIu64 " B over all "
		    "streams", v->window_needed_bytes);
		if (known(v->window_shift))
			(void)snprintf(text + strlen(text), sizeof(text) -
			    strlen(text), "; scaled by 2^%" PRIu64 " (RFC "
			    "7323) for one alone", v->window_shift);
		add_figure(f, "window needed", text);
	}
	if (known(v->streams_needed)) {
		(void)snprintf(text, sizeof(text), "%" PRIu64 "%s%s",
		    v->streams_needed, known(window_bytes) ?
		    ", each with a window of " : "", known(window_bytes) ?
		    units_format_exact(window_bytes, DIMENSION_SIZE, window,
		    sizeof(window)) : "");
		add_figure(f, "streams needed", text);
	}
}

/* What a test of finite length sees. */
static void
add_test(struct figures *f)
{
	const struct condition_figures *v = f->values;
	char text[TEXT_SIZE], what[96], length[RATE_CELL_SIZE] = "";
	char time[RATE_CELL_SIZE], rate[RATE_CELL_SIZE];

	if (known(f->conditions->test_length_ns))
		(void)units_format_exact(f->conditions->test_length_ns,
		    DIMENSION_TIME, length, sizeof(length));
	if (known(v->ramp_ns) && known(v->ramp_rounds)) {
		(void)snprintf(text, sizeof(text), "%" PRIu64 " round trips, "
		    "%s (RFC 6928)", v->ramp_rounds,
		    time_text(v->ramp_ns, time));
		add_figure(f, "slow start", text);
	}
	if (known(v->cold_mean_bps)) {
		(void)snprintf(what, sizeof(what), "mean of a cold %s",
		    length);
		(void)snprintf(text, sizeof(text), "%s %s of payload",
		    rate_unit_text(f->unit, v->cold_mean_bps, rate),
		    f->unit->symbol);
		add_figure(f, what, text);
	}
	if (known(v->burst_ns))
		add_figure(f, "burst allowance lasts",
		    time_text(v->burst_ns, time));
	if (known(v->burst_mean_bps)) {
		(void)snprintf(what, sizeof(what), "mean of %s with it",
		    length);
		(void)snprintf(text, sizeof(text), "%s %s of payload",
		    rate_unit_text(f->unit, v->burst_mean_bps, rate),
		    f->unit->symbol);
		add_figure(f, what, text);
	}
}

static void
add_transfer(struct figures *f)
{
	const struct condition_figures *v = f->values;
	char text[TEXT_SIZE], time[RATE_CELL_SIZE], size[RATE_CELL_SIZE];

	if (!known(v->transfer_ns))
		return;
	(void)snprintf(text, sizeof(text), "%s for %s (RFC 6349 section 4.1)",
	    time_text(v->transfer_ns, time), units_format_exact(
	    f->conditions->transfer_bytes, DIMENSION_SIZE, size,
	    sizeof(size)));
	add_figure(f, "ideal transfer time", text);
}

void
ceiling_text_figures(const struct ceiling_report *report,
    enum direction direction, const struct rate_unit *unit, FILE *out)
{
	struct figures f = { .columns = columns_new("lw"),
		.values = &report->figures[direction],
		.conditions = &report->circuit->conditions, .unit = unit,
		.direction = direction };
	char text[TEXT_SIZE];

	if (!isnan(f.values->loss_ratio)) {
		(void)snprintf(text, sizeof(text), "%.4g of the packets",
		    f.values->loss_ratio);
		add_figure(&f, "loss", text);
	}
	add_window(&f);
	add_test(&f);
	add_transfer(&f);
	for (size_t i = 0; i < f.values->notes_count; i++)
		add_figure(&f, i == 0 ? "note" : "", f.values->notes[i]);
	if (f.count > 0) {
		(void)fputs("\nfigures beside the ceiling\n", out);
		columns_print(f.columns, 2, out);
	}
	columns_free(f.columns);
}

/* "model; rests on memory: ..." */
static void
add_accuracy(struct columns *columns, const char *name,
    enum accuracy accuracy, const char *note, const char *memory,
    uint64_t tolerance_ppm)
{
	const char *class = accuracy_name(accuracy);
	char text[2 * TEXT_SIZE], clock[64] = "";
	const char *cells[] = { name, text };
	size_t length = strlen(class);

	if (tolerance_ppm != 0)
		(void)snprintf(clock, sizeof(clock), ", within %" PRIu64
		    " ppm", tolerance_ppm);
	/* Some notes begin with the class themselves. */
	if (note != NULL && strncmp(note, class, length) == 0 &&
	    strncmp(note + length, ": ", 2) == 0)
		note += length + 2;
	(void)snprintf(text, sizeof(text), "%s%s%s%s%s%s", class, clock,
	    note != NULL ? ": " : "", note != NULL ? note : "", memory != NULL ?
	    "; rests on memory: " : "", memory != NULL ? memory : "");
	columns_row(columns, cells);
}

static void
add_layers(struct columns *columns, const struct circuit *circuit, size_t i)
{
	const struct layer_stack *stack = &circuit->segments[i].layers;
	const struct layer *layer, *other;
	size_t n, before, packet = layers_lowest_packet(stack);
	char name[48];

	for (n = 0; n < stack->count; n++) {
		layer = stack->use[n].layer;
		if (layer->accuracy == ACCURACY_EXACT ||
		    (i > 0 && n >= packet))	/* those of segment 0 */
			continue;
		for (before = 0; before < n; before++) {
			other = stack->use[before].layer;
			if (other == layer)
				break;
		}
		if (before < n)
			continue;
		(void)snprintf(name, sizeof(name), "layer %s", layer->name);
		add_accuracy(columns, name, layer->accuracy, NULL,
		    layer->memory, 0);
	}
}

void
ceiling_text_accuracy(const struct ceiling_report *report, FILE *out)
{
	const struct circuit *circuit = report->circuit;
	struct columns *columns = columns_new("lw");
	char name[CIRCUIT_NAME_SIZE + 48];
	bool exact = true;
	size_t i, n;

	for (i = 0; i < circuit->segments_count; i++) {
		const struct segment *segment = &circuit->segments[i];
		const struct medium *medium = segment->medium.medium;

		(void)snprintf(name, sizeof(name), "%s%s%s", segment->name,
		    segment->name[0] != '\0' ? ": " : "", medium->name);
		add_accuracy(columns, name, medium->accuracy,
		    medium->accuracy_note, medium->memory,
		    report->segments[i].tolerance_ppm);
		add_layers(columns, circuit, i);
		for (n = 0; n < segment->layers.count; n++)
			exact = exact && segment->layers.use[n].layer->
			    accuracy == ACCURACY_EXACT;
	}
	if (exact)
		add_accuracy(columns, "layers", ACCURACY_EXACT, NULL, NULL, 0);
	(void)fputs("\naccuracy\n", out);
	columns_print(columns, 2, out);
	columns_free(columns);
}
