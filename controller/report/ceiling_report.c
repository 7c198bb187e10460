/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/ceiling_report.h"

#include <inttypes.h>
#include <math.h>
#include <string.h>

#include "error.h"
#include "report/csv_text.h"

/* The declared stack in one direction, alone and with the other. */
static int
make_direction(struct ceiling_report *report, enum direction direction,
    struct error *err)
{
	const struct circuit *circuit = report->circuit;
	const struct load load = { .direction = direction, .declared = true };
	struct ceiling *ceiling = &report->ceilings[direction], low, high;
	struct both_report *both = &report->both[direction];

	if (ceiling_of_load(circuit, &load, ceiling, err) == -1 ||
	    condition_add_declared(circuit, &load, ceiling, err) == -1)
		return -1;
	condition_figures(circuit, ceiling, &report->figures[direction]);
	if (ceiling->reference)
		return 0;
	if (ceiling_range(circuit, &(struct load){ .direction = direction,
	    .declared = true, .both = true }, &low, &high, err) == -1)
		return -1;
	both->low_bps = low.rate_bps[LEVEL_PAYLOAD];
	both->high_bps = high.rate_bps[LEVEL_PAYLOAD];
	both->low_segments = low.segments_per_ack;
	both->high_segments = high.segments_per_ack;
	return 0;
}

static int
make_segments(struct ceiling_report *report, struct error *err)
{
	const struct load load = { .direction = DIRECTION_A_TO_B,
		.declared = true };
	struct path_segment segment;
	size_t i;

	for (i = 0; i < report->circuit->segments_count; i++) {
		if (path_segment_make(report->circuit, i, &load, &segment,
		    err) == -1)
			return -1;
		report->segments[i].accuracy = segment.accuracy;
		if (segment.reference)
			continue;
		report->segments[i].duplex = segment.capacity.duplex;
		report->segments[i].tolerance_ppm =
		    segment.capacity.tolerance_ppm;
	}
	return 0;
}

int
ceiling_report_make(const struct circuit *circuit, struct ceiling_report *out,
    struct error *err)
{
	struct ceiling other;
	enum direction d;
	enum protocol p;

	memset(out, 0, sizeof(*out));
	out->circuit = circuit;
	if (make_segments(out, err) == -1)
		return -1;
	for (d = 0; d < DIRECTIONS_SINGLE; d++) {
		if (make_direction(out, d, err) == -1)
			return -1;
		for (p = 0; p < PROTOCOLS; p++) {
			out->payload_bps[d][p] = FIELD_UNSET;
			if (ceiling_compute(circuit, d, p, &other, err) == 0)
				out->payload_bps[d][p] =
				    other.rate_bps[LEVEL_PAYLOAD];
			else if (err->kind != ERROR_INPUT)
				return -1;
		}
	}
	return 0;
}

struct csv_row {
	const char *kind, *name, *class, *source;
	uint128 bytes_num, bytes_den;	/* den 0: none */
	uint64_t bps;			/* FIELD_UNSET: none */
	bool binding;
	const char *value;		/* of a figure; NULL: none */
};

static void
csv_row(enum direction direction, const struct csv_row *row, FILE *out)
{
	(void)fprintf(out, "%s,%s,", direction_name(direction), row->kind);
	csv_text(row->name, out);
	(void)fprintf(out, ",%s,", row->class);
	if (row->bytes_den != 0 && row->bytes_num % row->bytes_den == 0)
		(void)fprintf(out, "%" PRIu64,
		    (uint64_t)(row->bytes_num / row->bytes_den));
	else if (row->bytes_den != 0)
		(void)fprintf(out, "%.6f",
		    (double)row->bytes_num / (double)row->bytes_den);
	(void)fputc(',', out);
	if (row->bps != FIELD_UNSET)
		(void)fprintf(out, "%" PRIu64, row->bps);
	(void)fprintf(out, ",%s,", row->binding ? "yes" : "");
	csv_text(row->source, out);
	(void)fprintf(out, ",%s\r\n", row->value != NULL ? row->value : "");
}

static void
csv_ceiling(const struct ceiling *ceiling, FILE *out)
{
	enum layer_level level;
	size_t i;

	for (level = 0; level < LEVELS; level++)
		if (ceiling->has_level[level] && !ceiling->reference)
			csv_row(ceiling->direction, &(struct csv_row){
			    .kind = "level", .name = level_name(level),
			    .class = "", .source = "",
			    .bytes_num = ceiling->level_bytes_num[level],
			    .bytes_den = ceiling->level_bytes_den,
			    .bps = ceiling->rate_bps[level] }, out);
	for (i = 0; i < ceiling->steps_count; i++)
		csv_row(ceiling->direction, &(struct csv_row){
		    .kind = "step", .name = ceiling->steps[i].name,
		    .class = "", .source = ceiling->steps[i].source,
		    .bytes_num = ceiling->steps[i].bytes_num,
		    .bytes_den = ceiling->steps[i].bytes_den,
		    .bps = ceiling->steps[i].bps }, out);
	for (i = 0; i < ceiling->bounds_count; i++)
		csv_row(ceiling->direction, &(struct csv_row){
		    .kind = "bound", .name = ceiling->bounds[i].name,
		    .class = bound_class_name(ceiling->bounds[i].class),
		    .source = ceiling->bounds[i].source,
		    .bps = ceiling->bounds[i].payload_bps,
		    .binding = ceiling->bounds[i].binding }, out);
}

static void
csv_value(enum direction direction, const char *name, uint64_t value,
    FILE *out)
{
	char text[32];

	if (value == FIELD_UNSET)
		return;
	(void)snprintf(text, sizeof(text), "%" PRIu64, value);
	csv_row(direction, &(struct csv_row){ .kind = "figure", .name = name,
	    .class = "", .source = "", .bps = FIELD_UNSET, .value = text },
	    out);
}

static void
csv_figures(enum direction direction, const struct condition_figures *f,
    FILE *out)
{
	char text[32];

	(void)snprintf(text, sizeof(text), "%.9g", f->loss_ratio);
	if (!isnan(f->loss_ratio))
		csv_row(direction, &(struct csv_row){ .kind = "figure",
		    .name = "loss_ratio", .class = "", .source = "",
		    .bps = FIELD_UNSET, .value = text }, out);
	csv_value(direction, "bdp_bytes", f->bdp_bytes, out);
	csv_value(direction, "window_needed_bytes", f->window_needed_bytes,
	    out);
	csv_value(direction, "window_shift", f->window_shift, out);
	csv_value(direction, "streams_needed", f->streams_needed, out);
	csv_value(direction, "ramp_rounds", f->ramp_rounds, out);
	csv_value(direction, "ramp_ns", f->ramp_ns, out);
	csv_value(direction, "cold_mean_bps", f->cold_mean_bps, out);
	csv_value(direction, "burst_ns", f->burst_ns, out);
	csv_value(direction, "burst_mean_bps", f->burst_mean_bps, out);
	csv_value(direction, "transfer_ns", f->transfer_ns, out);
}

/* What is beside the ladder: both directions at once, other transports. */
static void
csv_beside(const struct ceiling_report *report, enum direction direction,
    FILE *out)
{
	const struct ceiling *ceiling = &report->ceilings[direction];
	const struct medium *medium =
	    report->circuit->segments[ceiling->narrow].medium.medium;
	enum protocol p;

	if (ceiling->reference)
		return;
	csv_row(direction, &(struct csv_row){ .kind = "both", .name = "low",
	    .class = "", .source = "", .bps =
	    report->both[direction].low_bps }, out);
	csv_row(direction, &(struct csv_row){ .kind = "both", .name = "high",
	    .class = "", .source = "", .bps =
	    report->both[direction].high_bps }, out);
	for (p = 0; p < PROTOCOLS; p++)
		csv_row(direction, &(struct csv_row){ .kind = "payload",
		    .name = protocol_name(p), .class = "", .source = "",
		    .bps = report->payload_bps[direction][p] }, out);
	csv_row(direction, &(struct csv_row){ .kind = "accuracy",
	    .name = medium->accuracy_note != NULL ? medium->accuracy_note :
	    medium->title, .class = accuracy_name(ceiling->accuracy),
	    .source = medium->source, .bps = FIELD_UNSET }, out);
	csv_row(direction, &(struct csv_row){ .kind = "duplex",
	    .name = duplex_name(ceiling->shared ? DUPLEX_SHARED :
	    DUPLEX_FULL), .class = "", .source = "", .bps = FIELD_UNSET },
	    out);
	for (size_t i = 0; i < ceiling->notes_count; i++)
		csv_row(direction, &(struct csv_row){ .kind = "note",
		    .name = ceiling->notes[i], .class = "", .source = "",
		    .bps = FIELD_UNSET }, out);
}

void
ceiling_report_csv(const struct ceiling_report *report, FILE *out)
{
	enum direction d;

	(void)fputs("direction,kind,name,class,bytes,bps,binding,source,"
	    "value\r\n", out);
	for (d = 0; d < DIRECTIONS_SINGLE; d++) {
		csv_ceiling(&report->ceilings[d], out);
		csv_beside(report, d, out);
		csv_figures(d, &report->figures[d], out);
	}
}
