/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The options of a declared layer by a key, for what-if. */
#include <stdio.h>
#include <string.h>

#include "declare/stack.h"
#include "error.h"
#include "log.h"

#define WORD_SIZE 64

/* Cuts the first part of the key off into word. */
static const char *
take_part(const char **key, char word[WORD_SIZE])
{
	size_t length = strcspn(*key, ".");

	(void)snprintf(word, WORD_SIZE, "%.*s", (int)length, *key);
	*key += length;
	if (**key == '.')
		(*key)++;
	return word;
}

/* The name of a layer in a list; NULL: none. */
static const char *
item_name(const struct node *item)
{
	if (item == NULL)
		return NULL;
	if (item->kind == NODE_MAPPING && item->children != NULL)
		return item->children->key;
	return item->text;
}

static const struct node *
find_item(const struct node *list, const char *number,
    const struct node **before)
{
	const struct node *item = list != NULL &&
	    list->kind == NODE_SEQUENCE ? list->children : NULL;
	struct error ignored;
	uint64_t index;

	*before = NULL;
	if (units_parse_count(number, 0, LAYERS_MAX, &index, &ignored) == -1)
		return NULL;
	for (; item != NULL && index > 0; index--) {
		*before = item;
		item = item->next;
	}
	return item;
}

/* "0.ethernet, 1.ipv4, 2.tcp" */
static const char *
declared_items(const struct node *list, char *buf, size_t size)
{
	const struct node *item = list->children;
	size_t i, used = 0;

	buf[0] = '\0';
	for (i = 0; item != NULL; item = item->next, i++) {
		const char *name = item_name(item);

		(void)snprintf(buf + used, size - used, "%s%zu.%s",
		    i == 0 ? "" : ", ", i, name != NULL ? name : "?");
		used += strlen(buf + used);
	}
	return buf;
}

int
layers_rows_of(const struct node *node, const char **key,
    const struct field **rows, struct error *err)
{
	char number[WORD_SIZE], word[WORD_SIZE] = "", found[WORD_SIZE];
	char items[256];
	const struct node *item, *before;
	const struct layer *layer = NULL;
	const char *name, *below, *whole = *key;

	*rows = NULL;
	if (**key == '\0')
		return 0;
	if (node == NULL || node->kind != NODE_SEQUENCE)
		return error_set(err, ERROR_USAGE, "layers: no list of them "
		    "is declared there");
	item = find_item(node, take_part(key, number), &before);
	name = item_name(item);
	below = item_name(before);
	if (name != NULL && strcmp(take_part(key, word), name) == 0)
		layer = layer_find_on(name, below != NULL ? below : "");
	if (name != NULL && layer == NULL && strcmp(word, name) == 0)
		layer = layer_find(name);
	if (layer == NULL)
		return error_set(err, ERROR_USAGE, "layers: found '%s', "
		    "allowed: an item's number and name, of %s",
		    log_escape(whole, found, sizeof(found)),
		    declared_items(node, items, sizeof(items)));
	if (layer->fields == NULL)
		return error_set(err, ERROR_USAGE, "layers: %s has no options",
		    name);
	*rows = layer->fields;
	return 0;
}
