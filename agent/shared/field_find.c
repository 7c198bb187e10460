/* SPDX-License-Identifier: GPL-3.0-or-later */
/* From a key with dots to its row, along the rows and the tree. */
#include <inttypes.h>
#include <stdbool.h>
#include <stdio.h>
#include <string.h>

#include "error.h"
#include "field.h"
#include "text.h"
#include "trial.h"

#define NAMES_MAX 64

struct walk {
	const char *key;	/* the whole */
	const char *rest;	/* what is left of it; "" at its end */
	const struct node *node;	/* NULL: not in the tree */
	const struct field *rows;	/* NULL: none below */
};

/* Moves on behind the first part of the rest and the dot after it. */
static size_t
next_part(struct walk *walk, const char **part)
{
	size_t length = strcspn(walk->rest, ".");

	*part = walk->rest;
	walk->rest += length;
	if (*walk->rest == '.')
		walk->rest++;
	return length;
}

static bool
is_part(const char *name, const char *part, size_t length)
{
	return strlen(name) == length && strncmp(name, part, length) == 0;
}

static int
refuse_unknown(const struct walk *walk, const char *part, size_t length,
    struct error *err)
{
	const char *names[NAMES_MAX], *near;
	char quoted[TEXT_QUOTE_SIZE], word[TEXT_QUOTE_SIZE], known[384] = "";
	size_t count = 0;

	for (const struct field *row = walk->rows; row->name != NULL &&
	    count < NAMES_MAX; row++)
		names[count++] = row->name;
	(void)snprintf(word, sizeof(word), "%.*s", (int)length, part);
	near = nearest_name(word, names, count);
	(void)text_quote(word, quoted, sizeof(quoted));
	if (near != NULL)
		return error_set(err, ERROR_USAGE, "unknown field '%s'; did "
		    "you mean '%s'?", quoted, near);
	for (size_t i = 0; i < count; i++)
		text_append(known, sizeof(known), "%s%s", i > 0 ? ", " : "",
		    names[i]);
	return error_set(err, ERROR_USAGE, "unknown field '%s'; known: %s",
	    quoted, known);
}

/* The number of an item that the list has. */
static int
enter_item(struct walk *walk, const struct field *row, struct error *err)
{
	const struct node *node = walk->node;
	char word[TEXT_QUOTE_SIZE], quoted[TEXT_QUOTE_SIZE];
	uint64_t count = 0, index = 0;
	struct error ignored;
	const char *part;
	size_t length = next_part(walk, &part);

	if (node != NULL && node->kind == NODE_SEQUENCE)
		for (node = node->children; node != NULL; node = node->next)
			count++;
	(void)snprintf(word, sizeof(word), "%.*s", (int)length, part);
	if (count == 0)
		return error_set(err, ERROR_USAGE, "%s: the declaration has "
		    "no such list", row->name);
	if (units_parse_count(word, 0, count - 1, &index, &ignored) == -1)
		return error_set(err, ERROR_USAGE, "%s: found '%s', allowed: "
		    "the number of an item, of which the list has %" PRIu64
		    " from 0 on", row->name, text_quote(word, quoted,
		    sizeof(quoted)), count);
	node = walk->node->children;
	for (; index > 0; index--)
		node = node->next;
	walk->node = node;
	return 0;
}

/* To what the row holds. */
static int
enter_row(struct walk *walk, const struct field *row, struct error *err)
{
	const struct node *node = walk->node;

	walk->node = node != NULL && node->kind == NODE_MAPPING ?
	    node_child(node, row->name) : NULL;
	walk->rows = row->fields;
	if (row->kind == FIELD_CUSTOM && row->rows_of != NULL)
		return row->rows_of(walk->node, &walk->rest, &walk->rows, err);
	if (row->kind == FIELD_LIST && *walk->rest != '\0')
		return enter_item(walk, row, err);
	return 0;
}

/* `a-to-b` and `b-to-a` below a row per direction. */
static bool
is_direction(const struct field *row, const char *rest)
{
	return row->per_direction &&
	    (strcmp(rest, direction_name(DIRECTION_A_TO_B)) == 0 ||
	    strcmp(rest, direction_name(DIRECTION_B_TO_A)) == 0);
}

int
field_find(const struct node *root, const struct field *rows,
    const char *key, const struct field **out, const struct field **below,
    struct error *err)
{
	struct walk walk = { key, key, root, rows };
	const struct field *row;
	const char *part;
	size_t length;

	for (;;) {
		length = next_part(&walk, &part);
		for (row = walk.rows; row->name != NULL; row++)
			if (is_part(row->name, part, length))
				break;
		if (row->name == NULL)
			return refuse_unknown(&walk, part, length, err);
		if (enter_row(&walk, row, err) == -1)
			return -1;
		if (*walk.rest == '\0' || is_direction(row, walk.rest))
			break;
		if (walk.rows == NULL)
			return error_set(err, ERROR_USAGE, "nothing is below "
			    "'%s'", row->name);
	}
	*out = row;
	*below = walk.rows;
	return 0;
}
