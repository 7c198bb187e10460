/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * A YAML document, then after a NUL an override.  What is read must keep the
 * limits, and every quantity in it must survive the way to text and back.
 */
#include <math.h>
#include <stdbool.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "error.h"
#include "field.h"

#define REQUIRE(condition) do { if (!(condition)) abort(); } while (0)
#define ITEMS_MAX 3

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

struct item {
	char name[8];
	uint64_t size_bytes;
};

struct thing {
	char name[16];
	uint64_t rate_bps[2];
	uint64_t delay_ns;
	double loss_ratio;
	uint64_t count, on, kind;
	struct item inner;
	struct item items[ITEMS_MAX];
	size_t items_count;
};

static const struct choice kinds[] = {
	{ "copper", 1 }, { "radio", 2 }, { NULL, 0 },
};

static const struct field item_rows[] = {
	{ .name = "name", .kind = FIELD_TEXT, .size = 8,
	    .offset = offsetof(struct item, name) },
	{ .name = "size", .kind = FIELD_QUANTITY, .max = 65535,
	    .dimension = DIMENSION_SIZE,
	    .offset = offsetof(struct item, size_bytes) },
	{ .name = NULL },
};

static const struct field rows[] = {
	{ .name = "name", .kind = FIELD_TEXT, .size = 16,
	    .offset = offsetof(struct thing, name) },
	{ .name = "rate", .kind = FIELD_QUANTITY, .min = 1,
	    .dimension = DIMENSION_RATE, .per_direction = true,
	    .offset = offsetof(struct thing, rate_bps) },
	{ .name = "delay", .kind = FIELD_QUANTITY,
	    .dimension = DIMENSION_TIME,
	    .offset = offsetof(struct thing, delay_ns) },
	{ .name = "loss", .kind = FIELD_REAL, .real_max = 1,
	    .dimension = DIMENSION_RATIO,
	    .offset = offsetof(struct thing, loss_ratio) },
	{ .name = "count", .kind = FIELD_COUNT, .min = 1, .max = 9,
	    .offset = offsetof(struct thing, count) },
	{ .name = "on", .kind = FIELD_YES_NO,
	    .offset = offsetof(struct thing, on) },
	{ .name = "kind", .kind = FIELD_CHOICE, .choices = kinds,
	    .offset = offsetof(struct thing, kind) },
	{ .name = "inner", .kind = FIELD_MAPPING, .fields = item_rows,
	    .offset = offsetof(struct thing, inner) },
	{ .name = "items", .kind = FIELD_LIST, .fields = item_rows,
	    .size = sizeof(struct item), .max = ITEMS_MAX,
	    .offset = offsetof(struct thing, items),
	    .count_offset = offsetof(struct thing, items_count) },
	{ .name = NULL },
};

static void
check_quantity(const char *text)
{
	for (unsigned d = 0; d < DIMENSIONS; d++) {
		enum dimension dimension = (enum dimension)d;
		uint64_t value, again;
		struct error err;
		char exact[64];
		double real;

		if (units_parse_real(text, dimension, &real, &err) == -1)
			continue;
		REQUIRE(isfinite(real));
		(void)units_format_real(real, dimension, 3, exact,
		    sizeof(exact));
		if (d > DIMENSION_TIME ||
		    units_parse(text, dimension, &value, &err) == -1)
			continue;
		(void)units_format_exact(value, dimension, exact,
		    sizeof(exact));
		REQUIRE(units_parse(exact, dimension, &again, &err) == 0);
		REQUIRE(again == value);
	}
}

static void
check_tree(const struct node *node, unsigned depth)
{
	const struct node *child;

	REQUIRE(depth <= DOCUMENT_DEPTH_MAX);
	REQUIRE(node->origin != NULL);
	REQUIRE((node->kind == NODE_SCALAR) == (node->text != NULL));
	if (node->text != NULL)
		check_quantity(node->text);
	for (child = node->children; child != NULL; child = child->next) {
		REQUIRE((node->kind == NODE_MAPPING) == (child->key != NULL));
		check_tree(child, depth + 1);
	}
}

static void
check_fields(const struct node *root)
{
	struct thing thing;
	struct error err = { 0 };

	if (fields_read(root, rows, "thing", &thing, &err) == -1) {
		REQUIRE(err.kind == ERROR_INPUT);
		REQUIRE(err.cause[0] != '\0' && err.where[0] != '\0');
		return;
	}
	REQUIRE(thing.items_count <= ITEMS_MAX);
	REQUIRE(memchr(thing.name, '\0', sizeof(thing.name)) != NULL);
}

int
LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
	const uint8_t *nul = size > 0 ? memchr(data, '\0', size) : NULL;
	size_t text_size = nul != NULL ? (size_t)(nul - data) : size;
	struct error err = { 0 };
	struct node *root = NULL;
	char *assignment;

	if (document_read_text((const char *)data, text_size, "f", &root,
	    &err) == -1) {
		REQUIRE(root == NULL && err.kind == ERROR_INPUT);
		return 0;
	}
	check_tree(root, 1);
	check_fields(root);
	if (nul != NULL) {
		assignment = strndup((const char *)nul + 1,
		    size - text_size - 1);
		REQUIRE(assignment != NULL);
		(void)document_override(root, assignment, &err);
		free(assignment);
		check_tree(root, 1);
		check_fields(root);
	}
	document_free(root);
	return 0;
}
