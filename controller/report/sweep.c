/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/sweep.h"

#include <stdlib.h>
#include <string.h>

#include "ceiling/condition.h"
#include "error.h"

#define OPTION "--sweep"

/* What the table needs of a ceiling, which is large. */
static void
keep(const struct ceiling *ceiling, struct sweep_direction *out)
{
	memset(out, 0, sizeof(*out));
	memcpy(out->has_level, ceiling->has_level, sizeof(out->has_level));
	memcpy(out->rate_bps, ceiling->rate_bps, sizeof(out->rate_bps));
	for (size_t i = 0; i < ceiling->bounds_count; i++) {
		const struct bound *bound = &ceiling->bounds[i];

		if (!bound->binding)
			continue;
		if (bound->class == BOUND_CONDITION) {
			(void)snprintf(out->condition, sizeof(out->condition),
			    "%s", bound->name);
			out->condition_bps = bound->payload_bps;
		} else {
			(void)snprintf(out->binding, sizeof(out->binding),
			    "%s", bound->name);
			out->class = bound->class;
		}
	}
}

static int
compute(const struct circuit *circuit, struct sweep *sweep,
    struct sweep_point *point, struct error *err)
{
	struct load load = { .declared = true };
	struct ceiling ceiling;

	(void)snprintf(sweep->circuit, sizeof(sweep->circuit), "%s",
	    circuit->name);
	for (load.direction = 0; load.direction < DIRECTIONS_SINGLE;
	    load.direction++) {
		if (ceiling_of_load(circuit, &load, &ceiling, err) == -1 ||
		    condition_add_declared(circuit, &load, &ceiling,
		    err) == -1)
			return -1;
		keep(&ceiling, &point->directions[load.direction]);
		sweep->reference = ceiling.reference;
		(void)snprintf(sweep->top, sizeof(sweep->top), "%s",
		    ceiling.top);
	}
	return 0;
}

/* In the unit of its dimension, for programs that draw it. */
static double
number_of(const struct sweep_range *range, const char *value)
{
	struct field plain = *range->field;
	struct error ignored;
	uint64_t whole = 0;
	double real = 0;

	if (plain.kind != FIELD_REAL) {
		(void)field_set_text(&plain, value, NULL, &whole, &ignored);
		return (double)whole;
	}
	(void)field_set_text(&plain, value, NULL, &real, &ignored);
	return real;
}

/* -1: the tree cannot take the value, or memory is short. */
static int
make_point(struct node *root, struct sweep *sweep, size_t i,
    struct error *refusal, struct error *err)
{
	struct sweep_point *point = &sweep->points[i];
	struct circuit *circuit = NULL;
	int rc;

	(void)sweep_range_value(&sweep->range, i, point->value);
	point->number = number_of(&sweep->range, point->value);
	if (document_put(root, OPTION, sweep->range.key, point->value,
	    err) == -1)
		return -1;
	rc = circuit_read_tree(root, &circuit, refusal);
	if (rc == 0)
		rc = compute(circuit, sweep, point, refusal);
	circuit_free(circuit);
	if (rc == 0)
		return 0;
	if (refusal->kind != ERROR_INPUT) {
		*err = *refusal;
		return -1;
	}
	point->refused = true;
	(void)snprintf(point->why, sizeof(point->why), "%s", refusal->cause);
	return 0;
}

int
sweep_make(struct node *root, const struct sweep_range *range,
    struct sweep **out, struct error *err)
{
	struct sweep *sweep = calloc(1, sizeof(*sweep));
	struct error first, refusal;
	size_t refused = 0;

	if (sweep == NULL)
		return error_errno(err, ERROR_INTERNAL, "sweep");
	sweep->range = *range;
	for (size_t i = 0; i < range->count; i++) {
		if (make_point(root, sweep, i, &refusal, err) == -1)
			goto failed;
		if (sweep->points[i].refused && refused++ == 0)
			first = refusal;
	}
	if (refused == range->count) {
		*err = first;
		if (strncmp(err->where, OPTION, sizeof(OPTION) - 1) != 0)
			error_wrap(err, OPTION " %s=%s", range->key,
			    sweep->points[0].value);
		goto failed;
	}
	*out = sweep;
	return 0;
failed:
	free(sweep);
	return -1;
}
