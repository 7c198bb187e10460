/* SPDX-License-Identifier: GPL-3.0-or-later */
/* --set KEY=VALUE on a tree that was read from a file. */
#include "field.h"

#include <inttypes.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "document.h"
#include "error.h"
#include "text.h"

/* The place of an override in messages. */
static char *
override_origin(const char *option, const char *key)
{
	size_t size = strlen(option) + strlen(key) + 2;
	char *origin = malloc(size);

	if (origin != NULL)
		(void)snprintf(origin, size, "%s %s", option, key);
	return origin;
}

/* Where the part of a key leads: the node's place in its list, or the place
 * at the end of a mapping that has no such key. */
static struct node **
find_slot(struct node *parent, const char *part, const char *origin,
    struct error *err)
{
	const struct node place = { .origin = origin };
	struct node **slot = &parent->children;
	char quoted[TEXT_QUOTE_SIZE];
	uint64_t index = 0, count = 0;
	struct error ignored;

	if (parent->kind == NODE_SCALAR) {
		(void)node_error(&place, err, "nothing is below '%s', "
		    "which is neither a list nor a mapping",
		    text_quote(parent->key != NULL ? parent->key :
		    parent->text, quoted, sizeof(quoted)));
		return NULL;
	}
	if (parent->kind == NODE_MAPPING) {
		while (*slot != NULL && strcmp((*slot)->key, part) != 0)
			slot = &(*slot)->next;
		return slot;
	}
	for (const struct node *n = *slot; n != NULL; n = n->next)
		count++;
	if (count == 0 || units_parse_count(part, 0, count - 1, &index,
	    &ignored) == -1) {
		(void)node_error(&place, err, "found '%s', allowed: the "
		    "number of an item, of which the list has %" PRIu64
		    " from 0 on", text_quote(part, quoted, sizeof(quoted)),
		    count);
		return NULL;
	}
	for (; index > 0 && *slot != NULL; index--)
		slot = &(*slot)->next;
	return slot;
}

/* A new mapping of an override; NULL: out of memory. */
static struct node *
new_mapping(const char *key, const char *origin)
{
	struct node *node = calloc(1, sizeof(*node));

	if (node == NULL)
		return NULL;
	node->kind = NODE_MAPPING;
	node->key = strdup(key);
	node->origin_copy = strdup(origin);
	node->origin = node->origin_copy;
	if (node->key == NULL || node->origin == NULL) {
		document_free(node);
		return NULL;
	}
	return node;
}

/* The item `- tls` of a list is short for `- tls: {}`.  -1: out of memory. */
static int
lengthen_item(struct node *item, const char *part, const char *origin,
    struct error *err)
{
	if (item->kind != NODE_SCALAR || item->key != NULL ||
	    strcmp(item->text, part) != 0)
		return 0;
	item->children = new_mapping(part, origin);
	if (item->children == NULL)
		return document_no_memory(err);
	item->kind = NODE_MAPPING;
	free(item->text);
	item->text = NULL;
	return 0;
}

/* Put *value where the parts of key lead; they are cut apart in place.  Takes
 * *value and sets it to NULL on success. */
static int
put_value(struct node *root, char *key, struct node **value,
    const char *origin, struct error *err)
{
	struct node **slot = NULL, *parent = root;
	char *rest = key, *part;

	while ((part = strsep(&rest, ".")) != NULL) {
		if (rest != NULL &&
		    lengthen_item(parent, part, origin, err) == -1)
			return -1;
		slot = find_slot(parent, part, origin, err);
		if (slot == NULL)
			return -1;
		if (rest == NULL)
			break;
		if (*slot == NULL)
			*slot = new_mapping(part, origin);
		if (*slot == NULL)
			return document_no_memory(err);
		parent = *slot;
	}
	if (parent->kind == NODE_MAPPING) {
		(*value)->key = strdup(part);
		if ((*value)->key == NULL)
			return document_no_memory(err);
	}
	if (*slot != NULL) {
		(*value)->next = (*slot)->next;
		(*slot)->next = NULL;
	}
	document_free(*slot);
	*slot = *value;
	*value = NULL;
	return 0;
}

/* How many parts a key has, 0 where one of them is empty. */
static unsigned
count_parts(const char *key)
{
	unsigned parts = 1;

	for (const char *p = key; *p != '\0'; p++) {
		if (*p == '.' && (p == key || p[1] == '.' || p[1] == '\0'))
			return 0;
		parts += *p == '.';
	}
	return key[0] != '\0' ? parts : 0;
}

int
document_put(struct node *root, const char *option, const char *key,
    const char *text, struct error *err)
{
	char *origin = override_origin(option, key), *parts = strdup(key);
	struct node place = { .origin = origin }, *value = NULL;
	unsigned count = count_parts(key);
	int rc = -1;

	if (origin == NULL || parts == NULL)
		(void)document_no_memory(err);
	else if (count == 0)
		(void)node_error(&place, err, "an empty name in the key, "
		    "allowed: KEY=VALUE such as medium.line-rate=1 Gbit/s");
	else if (document_read_value(text, origin, count, &value, err) == 0)
		rc = put_value(root, parts, &value, origin, err);
	document_free(value);
	free(parts);
	free(origin);
	return rc;
}

int
document_override(struct node *root, const char *assignment,
    struct error *err)
{
	static const char option[] = "--set";
	const char *equals = strchr(assignment, '=');
	char *key, *origin;
	int rc;

	if (equals != NULL) {
		key = strndup(assignment, (size_t)(equals - assignment));
		if (key == NULL)
			return document_no_memory(err);
		rc = document_put(root, option, key, equals + 1, err);
		free(key);
		return rc;
	}
	origin = override_origin(option, assignment);
	if (origin == NULL)
		return document_no_memory(err);
	(void)node_error(&(struct node){ .origin = origin }, err,
	    "no '=', allowed: KEY=VALUE");
	free(origin);
	return -1;
}
