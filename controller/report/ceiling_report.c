/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/ceiling_report.h"

#include <inttypes.h>
#include <string.h>

#include "error.h"
#include "report/json_value.h"

int
ceiling_report_make(const struct circuit *circuit, struct ceiling_report *out,
    struct error *err)
{
	struct ceiling other;
	enum direction d;
	enum protocol p;

	out->circuit = circuit;
	out->protocol = circuit_default_protocol(circuit);
	for (d = 0; d < DIRECTIONS_SINGLE; d++) {
		for (p = 0; p < PROTOCOLS; p++) {
			if (ceiling_compute(circuit, d, p, &other, err) == -1)
				return -1;
			out->payload_bps[d][p] = other.rate_bps[LEVEL_PAYLOAD];
			if (p == out->protocol)
				out->ceilings[d] = other;
		}
	}
	return 0;
}

static json_t *
payload_by_protocol(const struct ceiling_report *report,
    enum direction direction)
{
	bool known = !report->ceilings[direction].reference;
	json_t *object = json_object();
	enum protocol p;

	for (p = 0; p < PROTOCOLS; p++)
		json_put(object, protocol_name(p), known ? json_value_u64(
		    report->payload_bps[direction][p]) : json_null());
	return object;
}

int
ceiling_report_json(const struct ceiling_report *report, FILE *out)
{
	json_t *root = json_object(), *circuit = json_object();
	json_t *ceilings = json_array(), *ceiling;
	enum direction d;
	int rc;

	json_put(root, "format", json_value_text("plafond-ceiling/1"));
	json_put(root, "software",
	    json_value_text("plafond " PLAFOND_VERSION));
	json_put(circuit, "name", json_value_text(report->circuit->name));
	json_put(circuit, "mtu_bytes",
	    json_value_u64(circuit_mtu(report->circuit)));
	json_put(root, "circuit", circuit);
	for (d = 0; d < DIRECTIONS_SINGLE; d++) {
		ceiling = json_ceiling(report->circuit, &report->ceilings[d]);
		json_put(ceiling, "payload_by_protocol",
		    payload_by_protocol(report, d));
		json_push(ceilings, ceiling);
	}
	json_put(root, "ceilings", ceilings);
	rc = json_dumpf(root, out, JSON_INDENT(2));
	(void)fputc('\n', out);
	json_decref(root);
	return rc;
}

/* RFC 4180: quotes around what holds a comma, a quote or a line's end; a quote
 * is doubled. */
static void
csv_text(const char *text, FILE *out)
{
	bool quoted = text[strcspn(text, ",\"\r\n")] != '\0';

	if (quoted)
		(void)fputc('"', out);
	for (; *text != '\0'; text++) {
		if (*text == '"')
			(void)fputc('"', out);
		(void)fputc(*text, out);
	}
	if (quoted)
		(void)fputc('"', out);
}

struct csv_row {
	const char *kind, *name, *class, *source;
	uint128 bytes_num, bytes_den;	/* den 0: none */
	uint64_t bps;
	bool binding;
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
	(void)fprintf(out, ",%" PRIu64 ",%s,", row->bps,
	    row->binding ? "yes" : "");
	csv_text(row->source, out);
	(void)fputs("\r\n", out);
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

void
ceiling_report_csv(const struct ceiling_report *report, FILE *out)
{
	int d;

	(void)fputs("direction,kind,name,class,bytes,bps,binding,source\r\n",
	    out);
	for (d = 0; d < DIRECTIONS_SINGLE; d++)
		csv_ceiling(&report->ceilings[d], out);
}
