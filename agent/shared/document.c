/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * YAML 1.1 through the event interface of libyaml, not its documents, so that
 * anchors and aliases are seen and refused before they can multiply.
 */
#include "field.h"

#include <assert.h>
#include <errno.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <yaml.h>

#include "document.h"
#include "error.h"
#include "text.h"

#define ORIGIN_SHOWN_SIZE 200	/* leaves room in error.where */

/* What reads one document.  Level 0 is the root. */
struct builder {
	yaml_parser_t parser;
	const char *text;	/* borrowed; all of it */
	size_t size;
	const char *seen;	/* in text, at character number seen_index */
	size_t seen_index;
	bool is_value;		/* of an override: places mean nothing */
	unsigned depth;		/* levels above the root, then open ones */
	unsigned base_depth;
	unsigned nodes;
	unsigned documents;
	struct node *root;	/* owned */
	struct node *open[DOCUMENT_DEPTH_MAX];	/* borrowed from root */
	struct node **tail[DOCUMENT_DEPTH_MAX];	/* where the next child goes */
	char *key;		/* owned; waits for its value */
	yaml_mark_t key_mark;
	char *origin;		/* owned until the root has it */
};

void
document_free(struct node *root)
{
	struct node *child, *next;

	if (root == NULL)
		return;
	for (child = root->children; child != NULL; child = next) {
		next = child->next;
		document_free(child);	/* DOCUMENT_DEPTH_MAX deep at most */
	}
	free(root->key);
	free(root->text);
	free(root->origin_copy);
	free(root);
}

const struct node *
node_child(const struct node *mapping, const char *key)
{
	const struct node *child;

	if (mapping == NULL || mapping->kind != NODE_MAPPING)
		return NULL;
	for (child = mapping->children; child != NULL; child = child->next) {
		if (strcmp(child->key, key) == 0)
			return child;
	}
	return NULL;
}

__attribute__((format(printf, 3, 0)))
static int
place_error(const struct node *node, struct error *err, const char *fmt,
    va_list ap)
{
	char cause[sizeof(err->cause)], origin[ORIGIN_SHOWN_SIZE];

	(void)vsnprintf(cause, sizeof(cause), fmt, ap);
	(void)error_set(err, ERROR_INPUT, "%s", cause);
	if (node == NULL || node->origin == NULL)
		return -1;
	(void)text_quote(node->origin, origin, sizeof(origin));
	if (node->line == 0)
		error_wrap(err, "%s", origin);
	else
		error_wrap(err, "%s:%u:%u", origin, node->line, node->column);
	return -1;
}

int
node_error(const struct node *node, struct error *err, const char *fmt, ...)
{
	va_list ap;

	va_start(ap, fmt);
	(void)place_error(node, err, fmt, ap);
	va_end(ap);
	return -1;
}

int
document_no_memory(struct error *err)
{
	return error_set(err, ERROR_INTERNAL, "out of memory");
}

static unsigned
from_one(const struct builder *b, size_t position)
{
	return b->is_value ? 0 : (unsigned)position + 1;
}

/* As node_error, at a place in the text. */
__attribute__((format(printf, 4, 5)))
static int
refuse(const struct builder *b, yaml_mark_t mark, struct error *err,
    const char *fmt, ...)
{
	struct node place = {
		.origin = b->origin != NULL ? b->origin : b->root->origin,
		.line = from_one(b, mark.line),
		.column = from_one(b, mark.column),
	};
	va_list ap;

	va_start(ap, fmt);
	(void)place_error(&place, err, fmt, ap);
	va_end(ap);
	return -1;
}

/* Line and column of a byte, for the reader counts bytes only. */
static yaml_mark_t
mark_of_byte(const struct builder *b, size_t offset)
{
	yaml_mark_t mark = { 0 };

	for (size_t i = 0; i < offset && i < b->size; i++) {
		if (b->text[i] == '\n') {
			mark.line++;
			mark.column = 0;
		} else if (((unsigned char)b->text[i] & 0xc0) != 0x80) {
			mark.column++;
		}
	}
	return mark;
}

static int
refuse_syntax(const struct builder *b, struct error *err)
{
	const yaml_parser_t *p = &b->parser;
	const char *problem = p->problem != NULL ? p->problem : "not YAML";

	if (p->error == YAML_MEMORY_ERROR)
		return document_no_memory(err);
	if (p->error == YAML_READER_ERROR)
		return refuse(b, mark_of_byte(b, p->problem_offset), err,
		    "not UTF-8 text: %s", problem);
	return refuse(b, p->problem_mark, err, "not YAML: %s%s%s",
	    p->context != NULL ? p->context : "",
	    p->context != NULL ? ", " : "", problem);
}

/* The byte at a character's number; numbers must not fall. */
static char
source_at(struct builder *b, size_t index)
{
	const char *end = b->text + b->size;

	while (b->seen < end && b->seen_index < index) {
		b->seen++;
		while (b->seen < end &&
		    ((unsigned char)*b->seen & 0xc0) == 0x80)
			b->seen++;
		b->seen_index++;
	}
	return b->seen < end && b->seen_index == index ? *b->seen : '\0';
}

/* Anchors, aliases and tags are refused. */
static int
check_properties(struct builder *b, const yaml_event_t *event,
    struct error *err)
{
	const yaml_char_t *anchor = NULL, *tag = NULL;
	bool tagged = false;

	if (event->type == YAML_ALIAS_EVENT)
		return refuse(b, event->start_mark, err,
		    "an alias ('*') is not allowed");
	if (event->type == YAML_SCALAR_EVENT) {
		anchor = event->data.scalar.anchor;
		tag = event->data.scalar.tag;
		/* libyaml forgets the tag "!" of a scalar */
		tagged = source_at(b, event->start_mark.index) == '!';
	} else if (event->type == YAML_SEQUENCE_START_EVENT) {
		anchor = event->data.sequence_start.anchor;
		tag = event->data.sequence_start.tag;
	} else if (event->type == YAML_MAPPING_START_EVENT) {
		anchor = event->data.mapping_start.anchor;
		tag = event->data.mapping_start.tag;
	}
	if (anchor != NULL)
		return refuse(b, event->start_mark, err,
		    "an anchor ('&') is not allowed");
	if (tag != NULL || tagged)
		return refuse(b, event->start_mark, err,
		    "a tag ('!') is not allowed");
	return 0;
}

/* The open collection, NULL above the root. */
static struct node *
parent_of_next(const struct builder *b)
{
	return b->depth > b->base_depth ?
	    b->open[b->depth - b->base_depth - 1] : NULL;
}

/* The event begins a key: keep it until its value comes. */
static int
take_key(struct builder *b, const yaml_event_t *event, struct error *err)
{
	const char *key = (const char *)event->data.scalar.value;
	const struct node *twin;
	char quoted[TEXT_QUOTE_SIZE];

	if (event->type != YAML_SCALAR_EVENT)
		return refuse(b, event->start_mark, err,
		    "a key must be a word, not a list or a mapping");
	if (key[0] == '\0')
		return refuse(b, event->start_mark, err, "an empty key");
	if (strcmp(key, "<<") == 0)
		return refuse(b, event->start_mark, err,
		    "a merge key ('<<') is not allowed");
	twin = node_child(parent_of_next(b), key);
	if (twin != NULL)
		return refuse(b, event->start_mark, err,
		    "duplicate key '%s'",
		    text_quote(key, quoted, sizeof(quoted)));
	b->key = strdup(key);
	b->key_mark = event->start_mark;
	return b->key != NULL ? 0 : document_no_memory(err);
}

/* Put a node where the next one goes. */
static void
link_node(struct builder *b, struct node *node)
{
	size_t level = b->depth - b->base_depth;

	if (level == 0) {
		b->root = node;
		node->origin_copy = b->origin;
		b->origin = NULL;
		return;
	}
	assert(b->root != NULL);
	node->origin = b->root->origin;
	node->key = b->key;
	if (node->key != NULL) {
		node->key_line = from_one(b, b->key_mark.line);
		node->key_column = from_one(b, b->key_mark.column);
	}
	b->key = NULL;
	*b->tail[level - 1] = node;
	b->tail[level - 1] = &node->next;
}

static int
add_node(struct builder *b, const yaml_event_t *event, enum node_kind kind,
    struct error *err)
{
	struct node *node;

	if (b->depth >= DOCUMENT_DEPTH_MAX)
		return refuse(b, event->start_mark, err,
		    "nested deeper than %d levels", DOCUMENT_DEPTH_MAX);
	if (++b->nodes > DOCUMENT_NODES_MAX)
		return refuse(b, event->start_mark, err,
		    "more than %d values", DOCUMENT_NODES_MAX);
	node = calloc(1, sizeof(*node));
	if (node == NULL)
		return document_no_memory(err);
	node->kind = kind;
	node->origin = b->origin;
	node->line = from_one(b, event->start_mark.line);
	node->column = from_one(b, event->start_mark.column);
	link_node(b, node);
	if (kind == NODE_SCALAR) {
		node->text = strdup((const char *)event->data.scalar.value);
		return node->text != NULL ? 0 : document_no_memory(err);
	}
	b->open[b->depth - b->base_depth] = node;
	b->tail[b->depth - b->base_depth] = &node->children;
	b->depth++;
	return 0;
}

static int
take_node(struct builder *b, const yaml_event_t *event, enum node_kind kind,
    struct error *err)
{
	const struct node *parent = parent_of_next(b);

	if (check_properties(b, event, err) == -1)
		return -1;
	if (kind == NODE_SCALAR && strlen((const char *)
	    event->data.scalar.value) != event->data.scalar.length)
		return refuse(b, event->start_mark, err,
		    "a NUL character is not allowed");
	if (parent != NULL && parent->kind == NODE_MAPPING && b->key == NULL)
		return take_key(b, event, err);
	return add_node(b, event, kind, err);
}

static int
start_document(struct builder *b, const yaml_event_t *event,
    struct error *err)
{
	if (event->data.document_start.tag_directives.start !=
	    event->data.document_start.tag_directives.end)
		return refuse(b, event->start_mark, err,
		    "a tag directive ('%%TAG') is not allowed");
	if (++b->documents > 1)
		return refuse(b, event->start_mark, err,
		    "a second document is not allowed");
	return 0;
}

static int
take_event(struct builder *b, const yaml_event_t *event, struct error *err)
{
	switch (event->type) {
	case YAML_DOCUMENT_START_EVENT:
		return start_document(b, event, err);
	case YAML_ALIAS_EVENT:
		return check_properties(b, event, err);
	case YAML_SCALAR_EVENT:
		return take_node(b, event, NODE_SCALAR, err);
	case YAML_SEQUENCE_START_EVENT:
		return take_node(b, event, NODE_SEQUENCE, err);
	case YAML_MAPPING_START_EVENT:
		return take_node(b, event, NODE_MAPPING, err);
	case YAML_SEQUENCE_END_EVENT:
	case YAML_MAPPING_END_EVENT:
		b->depth--;
		return 0;
	case YAML_NO_EVENT:
	case YAML_STREAM_START_EVENT:
	case YAML_STREAM_END_EVENT:
	case YAML_DOCUMENT_END_EVENT:
		return 0;
	}
	return 0;
}

static int
take_events(struct builder *b, struct error *err)
{
	bool more = true;

	while (more) {
		yaml_event_t event;
		int rc;

		if (yaml_parser_parse(&b->parser, &event) == 0)
			return refuse_syntax(b, err);
		rc = take_event(b, &event, err);
		more = event.type != YAML_STREAM_END_EVENT;
		yaml_event_delete(&event);
		if (rc == -1)
			return -1;
	}
	return 0;
}

/* An override may be empty, a file may not. */
static int
check_root(struct builder *b, struct error *err)
{
	yaml_char_t empty[1] = { 0 };
	const yaml_event_t nothing = {
		.type = YAML_SCALAR_EVENT,
		.data.scalar.value = empty,
	};

	if (b->is_value && b->root == NULL)
		return add_node(b, &nothing, NODE_SCALAR, err);
	if (!b->is_value && (b->root == NULL ||
	    (b->root->kind == NODE_SCALAR && b->root->text[0] == '\0')))
		return refuse(b, (yaml_mark_t){ 0 }, err, "is empty");
	return 0;
}

/* Read b->text; the tree is owned by the caller. */
static int
build(struct builder *b, const char *origin, struct node **out,
    struct error *err)
{
	static const char mark[] = "\357\273\277";	/* U+FEFF, RFC 3629 */
	int rc = -1;

	b->depth = b->base_depth;
	b->origin = strdup(origin);
	if (b->origin == NULL)
		return document_no_memory(err);
	if (b->size > DOCUMENT_BYTES_MAX) {
		(void)refuse(b, (yaml_mark_t){ 0 }, err,
		    "longer than %d B", DOCUMENT_BYTES_MAX);
		goto out;
	}
	if (b->size >= 3 && memcmp(b->text, mark, 3) == 0) {
		b->text += 3;
		b->size -= 3;
	}
	b->seen = b->text;
	if (yaml_parser_initialize(&b->parser) == 0) {
		(void)document_no_memory(err);
		goto out;
	}
	yaml_parser_set_encoding(&b->parser, YAML_UTF8_ENCODING);
	yaml_parser_set_input_string(&b->parser,
	    (const unsigned char *)b->text, b->size);
	if (take_events(b, err) == 0 && check_root(b, err) == 0) {
		*out = b->root;
		b->root = NULL;
		rc = 0;
	}
out:
	yaml_parser_delete(&b->parser);
	document_free(b->root);
	free(b->key);
	free(b->origin);
	return rc;
}

int
document_read_text(const char *text, size_t size, const char *origin,
    struct node **out, struct error *err)
{
	struct builder b = { .text = size > 0 ? text : "", .size = size };

	return build(&b, origin, out, err);
}

int
document_read_file(const char *path, struct node **out, struct error *err)
{
	char quoted[ORIGIN_SHOWN_SIZE];
	char *text = NULL;
	size_t size = 0;
	int rc = -1;
	FILE *f = fopen(path, "re");

	(void)text_quote(path, quoted, sizeof(quoted));
	if (f == NULL)
		return error_errno(err, errno == ENOENT || errno == ENOTDIR ?
		    ERROR_ABSENT : ERROR_READ, "cannot open '%s'", quoted);
	text = malloc(DOCUMENT_BYTES_MAX + 1);
	if (text == NULL) {
		(void)document_no_memory(err);
		goto out;
	}
	size = fread(text, 1, DOCUMENT_BYTES_MAX + 1, f);
	if (ferror(f) != 0) {
		(void)error_errno(err, ERROR_READ, "cannot read '%s'", quoted);
		goto out;
	}
	rc = document_read_text(text, size, path, out, err);
out:
	free(text);
	(void)fclose(f);
	return rc;
}

int
document_read_value(const char *text, const char *origin, unsigned depth,
    struct node **out, struct error *err)
{
	struct builder b = { .text = text, .size = strlen(text),
		.is_value = true, .base_depth = depth };

	return build(&b, origin, out, err);
}
