/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * field_fixture: a struct with a field of every kind, its rows, and YAML text
 * read by them.
 */
#ifndef PLAFOND_TESTS_FIELD_FIXTURE_H
#define PLAFOND_TESTS_FIELD_FIXTURE_H

#include <stdio.h>
#include <string.h>

#include "error.h"
#include "field.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define ITEMS_MAX 3

struct item {
	char name[8];
	uint64_t rate_bps;
};

/* A field of every kind. */
struct thing {
	char name[9];
	uint64_t rate_bps[2];
	uint64_t burst_bytes;
	uint64_t delay_ns;
	double share_ratio;
	double loss_ratio[2];
	double level_dbm;
	uint64_t streams;
	uint64_t priority[2];
	uint64_t on;
	uint64_t kind;
	struct item inner;
	struct item items[ITEMS_MAX];
	size_t items_count;
	char custom[64];
};

static const struct choice kinds[] = {
	{ "copper", 10 }, { "fibre", 20 }, { "radio", 30 }, { NULL, 0 },
};

static const struct field item_rows[] = {
	{ .name = "name", .kind = FIELD_TEXT, .required = true,
	    .offset = offsetof(struct item, name), .size = 8 },
	{ .name = "rate", .kind = FIELD_QUANTITY, .dimension = DIMENSION_RATE,
	    .offset = offsetof(struct item, rate_bps),
	    .default_text = "5 kbit/s" },
	{ .name = NULL },
};

static int
read_custom(const struct node *node, const struct field *field, void *base,
    struct error *err)
{
	char *custom = (char *)base + field->offset;

	if (node != NULL && node->kind != NODE_SEQUENCE)
		return node_error(node, err, "%s: no list", field->name);
	(void)snprintf(custom, 64, "%s", node == NULL ? "absent" : "given");
	return 0;
}

static const struct field rows[] = {
	{ .name = "name", .kind = FIELD_TEXT, .required = true,
	    .offset = offsetof(struct thing, name), .size = 9 },
	{ .name = "line-rate", .kind = FIELD_QUANTITY,
	    .dimension = DIMENSION_RATE, .per_direction = true,
	    .offset = offsetof(struct thing, rate_bps),
	    .min = 1, .max = 1000000000000 },
	{ .name = "burst", .kind = FIELD_QUANTITY,
	    .dimension = DIMENSION_SIZE, .min = 1500, .max = 65535,
	    .offset = offsetof(struct thing, burst_bytes),
	    .default_text = "64 kB" },
	{ .name = "delay", .kind = FIELD_QUANTITY,
	    .dimension = DIMENSION_TIME,
	    .offset = offsetof(struct thing, delay_ns) },
	{ .name = "share", .kind = FIELD_REAL, .dimension = DIMENSION_RATIO,
	    .offset = offsetof(struct thing, share_ratio),
	    .real_min = 0.5, .real_max = 1 },
	{ .name = "loss", .kind = FIELD_REAL, .dimension = DIMENSION_RATIO,
	    .offset = offsetof(struct thing, loss_ratio), .real_max = 1,
	    .per_direction = true, .default_text = "0.1 %" },
	{ .name = "level", .kind = FIELD_REAL, .dimension = DIMENSION_LEVEL,
	    .offset = offsetof(struct thing, level_dbm) },
	{ .name = "streams", .kind = FIELD_COUNT, .min = 1, .max = 64,
	    .offset = offsetof(struct thing, streams), .default_text = "4" },
	{ .name = "priority", .kind = FIELD_COUNT, .max = 7,
	    .offset = offsetof(struct thing, priority),
	    .per_direction = true },
	{ .name = "on", .kind = FIELD_YES_NO,
	    .offset = offsetof(struct thing, on) },
	{ .name = "kind", .kind = FIELD_CHOICE, .choices = kinds,
	    .offset = offsetof(struct thing, kind),
	    .default_text = "fibre" },
	{ .name = "inner", .kind = FIELD_MAPPING, .fields = item_rows,
	    .offset = offsetof(struct thing, inner) },
	{ .name = "items", .kind = FIELD_LIST, .fields = item_rows,
	    .offset = offsetof(struct thing, items),
	    .size = sizeof(struct item), .min = 1, .max = ITEMS_MAX,
	    .count_offset = offsetof(struct thing, items_count) },
	{ .name = "custom", .kind = FIELD_CUSTOM, .read = read_custom,
	    .offset = offsetof(struct thing, custom),
	    .help = "a list of anything" },
	{ .name = NULL },
};

static inline const struct field *
row_named(const char *name)
{
	for (const struct field *row = rows; row->name != NULL; row++) {
		if (strcmp(row->name, name) == 0)
			return row;
	}
	fail_msg("no row %s", name);
	return NULL;
}

/* Read the text by the rows into `out`; the whole error into `message`. */
static inline int
read_thing(const char *text, struct thing *out, char message[800])
{
	struct node *root = NULL;
	struct error err = { 0 };
	int rc;

	message[0] = '\0';
	memset(out, 0x5a, sizeof(*out));
	rc = document_read_text(text, strlen(text), "f.yaml", &root, &err);
	if (rc == 0)
		rc = fields_read(root, rows, "thing", out, &err);
	document_free(root);
	if (rc == -1) {
		assert_int_equal(err.kind, ERROR_INPUT);
		(void)error_text(&err, message, 800);
	}
	return rc;
}

static inline void
read_good(const char *text, struct thing *out)
{
	char message[800];

	if (read_thing(text, out, message) == -1)
		fail_msg("'%s': %s", text, message);
}

#endif
