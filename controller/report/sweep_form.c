/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A sweep for programs: JSON "plafond-sweep/1" and CSV (RFC 4180). */
#include <inttypes.h>

#include "report/csv_text.h"
#include "report/json_value.h"
#include "report/sweep.h"

static const char *const units[DIMENSIONS] = {
	[DIMENSION_RATE] = "bit/s",
	[DIMENSION_SIZE] = "B",
	[DIMENSION_TIME] = "ns",
	[DIMENSION_FREQUENCY] = "Hz",
	[DIMENSION_DECIBEL] = "dB",
	[DIMENSION_LEVEL] = "dBm",
	[DIMENSION_POWER] = "W",
	[DIMENSION_RATIO] = "1",
};

static const struct member {
	enum layer_level level;
	const char *name;
} members[] = {
	{ LEVEL_LINE, "line_bps" },
	{ LEVEL_FRAME, "frame_bps" },
	{ LEVEL_PACKET, "packet_bps" },
	{ LEVEL_SEGMENT, "segment_bps" },
	{ LEVEL_PAYLOAD, "payload_bps" },
};
#define MEMBERS (sizeof(members) / sizeof(members[0]))

static const char *
unit_of(const struct field *field)
{
	return field->kind == FIELD_COUNT ? "1" : units[field->dimension];
}

static json_t *
json_direction(const struct sweep *sweep, const struct sweep_direction *d,
    enum direction direction)
{
	json_t *object = json_object(), *condition = json_null();

	json_put(object, "direction",
	    json_value_text(direction_name(direction)));
	for (size_t i = 0; i < MEMBERS; i++)
		json_put(object, members[i].name, sweep->reference ||
		    !d->has_level[members[i].level] ? json_null() :
		    json_value_u64(d->rate_bps[members[i].level]));
	json_put(object, "binding", json_value_text(d->binding));
	json_put(object, "class", d->binding[0] == '\0' ? json_null() :
	    json_value_text(bound_class_name(d->class)));
	if (d->condition[0] != '\0') {
		condition = json_object();
		json_put(condition, "name", json_value_text(d->condition));
		json_put(condition, "payload_bps",
		    json_value_u64(d->condition_bps));
	}
	json_put(object, "condition", condition);
	return object;
}

static json_t *
json_point(const struct sweep *sweep, const struct sweep_point *point)
{
	json_t *object = json_object(), *array = json_array();
	enum direction d;

	json_put(object, "value", json_value_text(point->value));
	json_put(object, "number", sweep->range.field->kind == FIELD_REAL ?
	    json_value_real(point->number) :
	    json_value_u64((uint64_t)point->number));
	json_put(object, "refused", point->refused ?
	    json_value_text(point->why) : json_null());
	for (d = 0; d < DIRECTIONS_SINGLE && !point->refused; d++)
		json_push(array, json_direction(sweep, &point->directions[d],
		    d));
	json_put(object, "ceilings", array);
	return object;
}

int
sweep_json(const struct sweep *sweep, FILE *out)
{
	json_t *root = json_object(), *circuit = json_object();
	json_t *points = json_array();
	int rc;

	json_put(root, "format", json_value_text("plafond-sweep/1"));
	json_put(root, "software",
	    json_value_text("plafond " PLAFOND_VERSION));
	json_put(circuit, "name", json_value_text(sweep->circuit));
	json_put(root, "circuit", circuit);
	json_put(root, "top", json_value_text(sweep->top));
	json_put(root, "key", json_value_text(sweep->range.key));
	json_put(root, "unit", json_value_text(unit_of(sweep->range.field)));
	for (size_t i = 0; i < sweep->range.count; i++)
		json_push(points, json_point(sweep, &sweep->points[i]));
	json_put(root, "points", points);
	rc = json_dumpf(root, out, JSON_INDENT(2));
	(void)fputc('\n', out);
	json_decref(root);
	return rc;
}

static void
csv_direction(const struct sweep *sweep, const struct sweep_point *point,
    enum direction direction, FILE *out)
{
	const struct sweep_direction *d = &point->directions[direction];
	bool known = !point->refused && !sweep->reference;

	csv_text(sweep->range.key, out);
	(void)fputc(',', out);
	csv_text(point->value, out);
	(void)fprintf(out, ",%s", direction_name(direction));
	for (size_t i = 0; i < MEMBERS; i++) {
		(void)fputc(',', out);
		if (known && d->has_level[members[i].level])
			(void)fprintf(out, "%" PRIu64,
			    d->rate_bps[members[i].level]);
	}
	(void)fputc(',', out);
	csv_text(d->binding, out);
	(void)fprintf(out, ",%s,", known ? bound_class_name(d->class) : "");
	csv_text(d->condition, out);
	(void)fputc(',', out);
	if (d->condition[0] != '\0')
		(void)fprintf(out, "%" PRIu64, d->condition_bps);
	(void)fputc(',', out);
	csv_text(point->why, out);
	(void)fputs("\r\n", out);
}

void
sweep_csv(const struct sweep *sweep, FILE *out)
{
	enum direction d;

	(void)fputs("key,value,direction", out);
	for (size_t i = 0; i < MEMBERS; i++)
		(void)fprintf(out, ",%s", members[i].name);
	(void)fputs(",binding,class,condition,condition_bps,refused\r\n", out);
	for (size_t i = 0; i < sweep->range.count; i++)
		for (d = 0; d < DIRECTIONS_SINGLE; d++)
			csv_direction(sweep, &sweep->points[i], d, out);
}
