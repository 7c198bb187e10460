/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "field.h"

#include <assert.h>
#include <inttypes.h>
#include <math.h>
#include <string.h>

#include "error.h"
#include "text.h"
#include "trial.h"

#define ALLOWED_SIZE 256
#define ROWS_MAX 64
#define NEAREST_LENGTH_MAX 32	/* of the names that are compared */
#define NEAREST_DISTANCE_MAX 3

/* "a rate such as '1 Gbit/s'" */
static const char *const examples[DIMENSIONS] = {
	[DIMENSION_RATE] = "a rate such as '1 Gbit/s'",
	[DIMENSION_SIZE] = "a size such as '1500 B'",
	[DIMENSION_TIME] = "a time such as '100 ms'",
	[DIMENSION_FREQUENCY] = "a frequency such as '28 MHz'",
	[DIMENSION_DECIBEL] = "a ratio in decibels such as '10 dB'",
	[DIMENSION_LEVEL] = "a level such as '-60 dBm'",
	[DIMENSION_POWER] = "a power such as '20 mW'",
	[DIMENSION_RATIO] = "a ratio such as '97 %' or '0.97'",
};

static const char *const direction_keys[DIRECTIONS_SINGLE] = {
	[DIRECTION_A_TO_B] = "a-to-b",
	[DIRECTION_B_TO_A] = "b-to-a",
};

static const char *const node_kinds[] = {
	[NODE_SCALAR] = "a scalar",
	[NODE_SEQUENCE] = "a list",
	[NODE_MAPPING] = "a mapping",
};

static const struct choice yes_no[] = {
	{ "yes", 1 }, { "no", 0 }, { "true", 1 }, { "false", 0 }, { NULL, 0 },
};

/* Optimal string alignment: Levenshtein's three edits and the exchange of two
 * neighbours, Damerau 1964. */
static size_t
edit_distance(const char *a, size_t a_length, const char *b, size_t b_length)
{
	size_t rows[3][NEAREST_LENGTH_MAX + 1];
	size_t *older = rows[0], *above = rows[1], *row = rows[2], *spare;

	for (size_t j = 0; j <= b_length; j++)
		above[j] = j;
	for (size_t i = 1; i <= a_length; i++) {
		row[0] = i;
		for (size_t j = 1; j <= b_length; j++) {
			size_t best = above[j - 1] + (a[i - 1] != b[j - 1]);

			if (above[j] + 1 < best)
				best = above[j] + 1;
			if (row[j - 1] + 1 < best)
				best = row[j - 1] + 1;
			if (i > 1 && j > 1 && a[i - 1] == b[j - 2] &&
			    a[i - 2] == b[j - 1] && older[j - 2] + 1 < best)
				best = older[j - 2] + 1;
			row[j] = best;
		}
		spare = older;
		older = above;
		above = row;
		row = spare;
	}
	return above[b_length];
}

const char *
nearest_name(const char *word, const char *const names[], size_t count)
{
	size_t length = strlen(word), limit = (length + 2) / 3;
	const char *nearest = NULL;

	if (length == 0 || length > NEAREST_LENGTH_MAX)
		return NULL;
	if (limit > NEAREST_DISTANCE_MAX)
		limit = NEAREST_DISTANCE_MAX;
	if (limit >= length)
		limit = length - 1;	/* nothing in common is not near */
	for (size_t i = 0; i < count; i++) {
		size_t name_length = strlen(names[i]), distance;

		if (name_length > NEAREST_LENGTH_MAX)
			continue;
		distance = edit_distance(word, length, names[i], name_length);
		if (distance > limit)
			continue;
		nearest = names[i];
		if (distance == 0)
			break;
		limit = distance - 1;	/* only a nearer one takes its place */
	}
	return nearest;
}

/* " from 1 bit/s to 1 Tbit/s", ", at least 1 bit/s", ... */
static void
append_range(char *buf, size_t size, const char *min, const char *max)
{
	if (min != NULL && max != NULL)
		text_append(buf, size, " from %s to %s", min, max);
	else if (min != NULL)
		text_append(buf, size, ", at least %s", min);
	else if (max != NULL)
		text_append(buf, size, ", at most %s", max);
}

static void
allowed_whole(const struct field *row, char *buf, size_t size)
{
	char min[64], max[64];

	if (row->kind == FIELD_QUANTITY) {
		text_append(buf, size, "%s", examples[row->dimension]);
		(void)units_format_exact(row->min, row->dimension, min,
		    sizeof(min));
		(void)units_format_exact(row->max, row->dimension, max,
		    sizeof(max));
	} else {
		text_append(buf, size, "a whole number");
		min[0] = max[0] = '\0';
		text_append(min, sizeof(min), "%" PRIu64, row->min);
		text_append(max, sizeof(max), "%" PRIu64, row->max);
	}
	append_range(buf, size, row->min > 0 || row->max > 0 ? min : NULL,
	    row->max > 0 ? max : NULL);
}

static void
allowed_real(const struct field *row, char *buf, size_t size)
{
	char min[64], max[64];
	bool limited = row->real_min < 0 || row->real_min > 0 ||
	    row->real_max < 0 || row->real_max > 0;

	text_append(buf, size, "%s", examples[row->dimension]);
	(void)units_format_real(row->real_min, row->dimension, 9, min,
	    sizeof(min));
	(void)units_format_real(row->real_max, row->dimension, 9, max,
	    sizeof(max));
	append_range(buf, size, limited && isfinite(row->real_min) ? min : NULL,
	    limited && isfinite(row->real_max) ? max : NULL);
}

static void
allowed_choice(const struct field *row, char *buf, size_t size)
{
	text_append(buf, size, row->choices[1].name != NULL ? "one of " : "");
	for (const struct choice *c = row->choices; c->name != NULL; c++)
		text_append(buf, size, "%s%s", c == row->choices ? "" : ", ",
		    c->name);
}

/* What one value of the row may be, whatever the directions. */
static const char *
allowed_value(const struct field *row, char *buf, size_t size)
{
	buf[0] = '\0';
	switch (row->kind) {
	case FIELD_TEXT:
		text_append(buf, size, "a text of %s%zu bytes",
		    row->required ? "1 to " : "at most ", row->size - 1);
		break;
	case FIELD_QUANTITY:
	case FIELD_COUNT:
		allowed_whole(row, buf, size);
		break;
	case FIELD_REAL:
		allowed_real(row, buf, size);
		break;
	case FIELD_YES_NO:
		text_append(buf, size, "yes or no");
		break;
	case FIELD_CHOICE:
		allowed_choice(row, buf, size);
		break;
	case FIELD_MAPPING:
		text_append(buf, size, "a mapping");
		break;
	case FIELD_LIST:
		text_append(buf, size, "a list of %" PRIu64 " to %" PRIu64
		    " mappings", row->min, row->max);
		break;
	case FIELD_CUSTOM:
		text_append(buf, size, "%s", row->help != NULL ? row->help :
		    "see the manual");
		break;
	}
	return buf;
}

const char *
field_allowed(const struct field *row, char *buf, size_t size)
{
	assert(size > 0);
	(void)allowed_value(row, buf, size);
	if (row->per_direction)
		text_append(buf, size, ", or a mapping of it for a-to-b, "
		    "b-to-a");
	return buf;
}

/* reason: NULL where the range says enough. */
static int
refuse_text(const struct field *row, const char *text, const char *reason,
    const struct node *at, struct error *err)
{
	char quoted[TEXT_QUOTE_SIZE], allowed[ALLOWED_SIZE];

	return node_error(at, err, "%s: found '%s', allowed: %s%s%s%s",
	    row->name, text_quote(text, quoted, sizeof(quoted)),
	    allowed_value(row, allowed, sizeof(allowed)),
	    reason != NULL ? " (" : "", reason != NULL ? reason : "",
	    reason != NULL ? ")" : "");
}

static int
refuse_kind(const struct field *row, const struct node *node,
    struct error *err)
{
	char quoted[TEXT_QUOTE_SIZE], allowed[ALLOWED_SIZE];

	(void)field_allowed(row, allowed, sizeof(allowed));
	if (node->kind != NODE_SCALAR)
		return node_error(node, err, "%s: found %s, allowed: %s",
		    row->name, node_kinds[node->kind], allowed);
	return node_error(node, err, "%s: found a scalar '%s', allowed: %s",
	    row->name, text_quote(node->text, quoted, sizeof(quoted)),
	    allowed);
}

static int
set_text(const struct field *row, const char *text, const struct node *at,
    char *value, struct error *err)
{
	size_t length = strlen(text);

	assert(row->size > 0);
	if (text_has_control(text))
		return refuse_text(row, text, "a control character", at, err);
	if (length >= row->size || (length == 0 && row->required))
		return refuse_text(row, text, NULL, at, err);
	memset(value, 0, row->size);
	memcpy(value, text, length);
	return 0;
}

static int
set_whole(const struct field *row, const char *text, const struct node *at,
    uint64_t *value, struct error *err)
{
	/* the largest number of all means unset */
	uint64_t max = row->max > 0 ? row->max : FIELD_UNSET - 1, found = 0;
	struct error why = { 0 };

	if (row->kind == FIELD_COUNT) {
		if (units_parse_count(text, row->min, max, &found, &why) == -1)
			return refuse_text(row, text, NULL, at, err);
	} else {
		if (units_parse(text, row->dimension, &found, &why) == -1)
			return refuse_text(row, text, why.cause, at, err);
		if (found < row->min || found > max)
			return refuse_text(row, text, NULL, at, err);
	}
	*value = found;
	return 0;
}

static int
set_real(const struct field *row, const char *text, const struct node *at,
    double *value, struct error *err)
{
	bool limited = row->real_min < 0 || row->real_min > 0 ||
	    row->real_max < 0 || row->real_max > 0;
	struct error why = { 0 };
	double found = 0;

	if (units_parse_real(text, row->dimension, &found, &why) == -1)
		return refuse_text(row, text, why.cause, at, err);
	if (limited && (found < row->real_min || found > row->real_max))
		return refuse_text(row, text, NULL, at, err);
	*value = found;
	return 0;
}

static int
set_choice(const struct field *row, const struct choice *choices,
    const char *text, const struct node *at, uint64_t *value,
    struct error *err)
{
	for (const struct choice *c = choices; c->name != NULL; c++) {
		if (strcmp(c->name, text) == 0) {
			*value = c->value;
			return 0;
		}
	}
	return refuse_text(row, text, NULL, at, err);
}

int
field_set_text(const struct field *row, const char *text,
    const struct node *at, void *value, struct error *err)
{
	switch (row->kind) {
	case FIELD_TEXT:
		return set_text(row, text, at, value, err);
	case FIELD_QUANTITY:
	case FIELD_COUNT:
		return set_whole(row, text, at, value, err);
	case FIELD_REAL:
		return set_real(row, text, at, value, err);
	case FIELD_YES_NO:
		return set_choice(row, yes_no, text, at, value, err);
	case FIELD_CHOICE:
		return set_choice(row, row->choices, text, at, value, err);
	case FIELD_MAPPING:
	case FIELD_LIST:
	case FIELD_CUSTOM:
		break;
	}
	return refuse_text(row, text, "it is not one value", at, err);
}

/* Absent: the default, or unset. */
static int
set_absent(const struct field *row, void *value, struct error *err)
{
	if (row->default_text != NULL)
		return field_set_text(row, row->default_text, NULL, value,
		    err);
	if (row->kind == FIELD_TEXT)
		memset(value, 0, row->size);
	else if (row->kind == FIELD_REAL)
		*(double *)value = (double)NAN;
	else
		*(uint64_t *)value = FIELD_UNSET;
	return 0;
}

/* One mapping being read. */
struct scope {
	const char *what;	/* its name */
	const struct node *at;	/* it, or what should hold it; may be NULL */
	bool optional;		/* absent: nothing is demanded of it */
};

static int
refuse_missing(const struct scope *scope, const char *name,
    const struct field *row, struct error *err)
{
	char allowed[ALLOWED_SIZE];

	return node_error(scope->at, err,
	    "required field '%s' is missing in %s; allowed: %s", name,
	    scope->what, allowed_value(row, allowed, sizeof(allowed)));
}

/* The message for a key that none of the names is. */
static int
refuse_unknown(const struct node *node, const char *what,
    const char *const names[], size_t count, struct error *err)
{
	struct node place = { .origin = node->origin, .line = node->key_line,
		.column = node->key_column };
	const char *near = nearest_name(node->key, names, count);
	char quoted[TEXT_QUOTE_SIZE], known[ALLOWED_SIZE] = "";

	(void)text_quote(node->key, quoted, sizeof(quoted));
	if (near != NULL)
		return node_error(&place, err, "unknown field '%s' in %s; "
		    "did you mean '%s'?", quoted, what, near);
	for (size_t i = 0; i < count; i++)
		text_append(known, sizeof(known), "%s%s", i > 0 ? ", " : "",
		    names[i]);
	return node_error(&place, err, "unknown field '%s' in %s; known: %s",
	    quoted, what, known);
}

static bool
is_among(const char *word, const char *const names[], size_t count)
{
	for (size_t i = 0; i < count; i++) {
		if (strcmp(word, names[i]) == 0)
			return true;
	}
	return false;
}

static int
check_keys(const struct node *mapping, const char *what,
    const char *const names[], size_t count, struct error *err)
{
	const struct node *child;

	for (child = mapping->children; child != NULL; child = child->next) {
		if (!is_among(child->key, names, count))
			return refuse_unknown(child, what, names, count, err);
	}
	return 0;
}

static int
read_scalar(const struct node *node, const struct field *row, void *value,
    struct error *err)
{
	if (node == NULL)
		return set_absent(row, value, err);
	if (node->kind != NODE_SCALAR)
		return refuse_kind(row, node, err);
	return field_set_text(row, node->text, node, value, err);
}

/* Values of the directions lie one after the other, 8 bytes each. */
static int
read_directions(const struct node *node, const struct field *row, void *base,
    struct error *err)
{
	const struct scope scope = { row->name, node, false };

	assert(row->kind != FIELD_TEXT);
	if (node != NULL && node->kind == NODE_MAPPING &&
	    check_keys(node, row->name, direction_keys, DIRECTIONS_SINGLE,
	    err) == -1)
		return -1;
	for (size_t i = 0; i < DIRECTIONS_SINGLE; i++) {
		void *value = (char *)base + row->offset +
		    i * sizeof(uint64_t);
		const struct node *one = node;

		if (node != NULL && node->kind == NODE_MAPPING)
			one = node_child(node, direction_keys[i]);
		if (node != NULL && one == NULL && row->required &&
		    row->default_text == NULL)
			return refuse_missing(&scope, direction_keys[i], row,
			    err);
		if (read_scalar(one, row, value, err) == -1)
			return -1;
	}
	return 0;
}

static int read_mapping(const struct node *node, const struct field *rows,
    const struct scope *scope, void *base, struct error *err);

static int
read_list(const struct node *node, const struct field *row, void *base,
    struct error *err)
{
	size_t *count = (void *)((char *)base + row->count_offset);
	char *elements = (char *)base + row->offset;
	const struct node *item;
	size_t found = 0;

	*count = 0;
	if (node == NULL)
		return 0;
	if (node->kind != NODE_SEQUENCE)
		return refuse_kind(row, node, err);
	for (item = node->children; item != NULL; item = item->next)
		found++;
	if (found < row->min || found > row->max)
		return node_error(node, err, "%s: found a list of %zu, "
		    "allowed: a list of %" PRIu64 " to %" PRIu64 " mappings",
		    row->name, found, row->min, row->max);
	for (item = node->children; item != NULL; item = item->next) {
		char what[64] = "";
		const struct scope scope = { what, item, false };

		text_append(what, sizeof(what), "%s.%zu", row->name, *count);
		if (read_mapping(item, row->fields, &scope,
		    elements + *count * row->size, err) == -1)
			return -1;
		(*count)++;
	}
	return 0;
}

static int
read_row(const struct node *node, const struct field *row,
    const struct scope *outer, void *base, struct error *err)
{
	const struct scope inner = { row->name,
		node != NULL ? node : outer->at, node == NULL };
	void *value = (char *)base + row->offset;

	if (node == NULL && row->required && row->default_text == NULL &&
	    !outer->optional)
		return refuse_missing(outer, row->name, row, err);
	if (row->kind == FIELD_MAPPING)
		return read_mapping(node, row->fields, &inner, value, err);
	if (row->kind == FIELD_LIST)
		return read_list(node, row, base, err);
	if (row->kind == FIELD_CUSTOM)
		return row->read(node, row, base, err);
	if (row->per_direction)
		return read_directions(node, row, base, err);
	return read_scalar(node, row, value, err);
}

static int
read_mapping(const struct node *node, const struct field *rows,
    const struct scope *scope, void *base, struct error *err)
{
	const char *names[ROWS_MAX];
	const struct field row_of_scope = { .name = scope->what,
		.kind = FIELD_MAPPING };
	size_t count = 0;

	for (const struct field *row = rows; row->name != NULL; row++) {
		assert(count < ROWS_MAX);
		names[count++] = row->name;
	}
	if (node != NULL && node->kind != NODE_MAPPING)
		return refuse_kind(&row_of_scope, node, err);
	if (node != NULL &&
	    check_keys(node, scope->what, names, count, err) == -1)
		return -1;
	for (const struct field *row = rows; row->name != NULL; row++) {
		if (read_row(node_child(node, row->name), row, scope, base,
		    err) == -1)
			return -1;
	}
	return 0;
}

int
fields_read(const struct node *node, const struct field *rows,
    const char *what, void *base, struct error *err)
{
	const struct scope scope = { what, node, false };

	return read_mapping(node, rows, &scope, base, err);
}
