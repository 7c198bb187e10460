/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * field: YAML text to a tree, and a tree to a struct by a table of rows.
 *
 * Every YAML file of the product (declaration, policy) and every option of the
 * command line goes through these rows; parser, help, manual and tests walk
 * them.  Anchors, aliases, tags, duplicate keys and a second document are
 * refused; depth, nodes and bytes are bounded.  Errors name
 * file:line:column, field, found and allowed, and for an unknown field the
 * nearest known name.  Reading the file is the only I/O here.
 */
#ifndef PLAFOND_FIELD_H
#define PLAFOND_FIELD_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "units.h"

struct error;

#define DOCUMENT_BYTES_MAX (1024 * 1024)
#define DOCUMENT_NODES_MAX 20000
#define DOCUMENT_DEPTH_MAX 16

enum node_kind { NODE_SCALAR, NODE_SEQUENCE, NODE_MAPPING };

struct node {
	enum node_kind kind;
	unsigned line, column;	/* from 1; 0: not from a file */
	unsigned key_line, key_column;	/* of the key, under a mapping */
	const char *origin;	/* borrowed: file name, or "--set KEY" */
	char *origin_copy;	/* owned; of a root and of an override's top */
	char *key;		/* owned; name under a mapping, else NULL */
	char *text;		/* owned; scalar, else NULL */
	struct node *children;	/* owned; first child */
	struct node *next;	/* owned by the parent */
};

/* Returns owned tree of one document; origin is copied.  The root keeps the
 * copy alive.  -1: ERROR_ABSENT, ERROR_READ or ERROR_INPUT. */
int document_read_file(const char *path, struct node **out, struct error *err);
int document_read_text(const char *text, size_t size, const char *origin,
    struct node **out, struct error *err);
void document_free(struct node *root);	/* NULL is fine */

/* Put the YAML value of "a.b.0.c=VALUE" into the tree, making mappings on the
 * way; a number names an item of a list, and an item that is a bare name stands
 * for a mapping of that name.  The node's origin is "--set a.b". */
int document_override(struct node *root, const char *assignment,
    struct error *err);
/* The same of a key and its value, with another option's name in the origin:
 * "--sweep a.b". */
int document_put(struct node *root, const char *option, const char *key,
    const char *value, struct error *err);

const struct node *node_child(const struct node *mapping, const char *key);

/* error_set with "origin:line:column" as `where`, the origin alone where there
 * is no line, nothing for a NULL node. */
int node_error(const struct node *node, struct error *err, const char *fmt, ...)
    __attribute__((format(printf, 3, 4)));

/* "Not given", for a field without a default. */
#define FIELD_UNSET UINT64_MAX		/* quantity, count, choice, yes/no */
/* a real is NAN, a text is "" */

enum field_kind {
	FIELD_TEXT,		/* char[size] */
	FIELD_QUANTITY,		/* uint64_t of `dimension` (RATE, SIZE, TIME) */
	FIELD_REAL,		/* double of `dimension` */
	FIELD_COUNT,		/* uint64_t, no unit */
	FIELD_YES_NO,		/* uint64_t 0 or 1; "yes", "no" */
	FIELD_CHOICE,		/* uint64_t, the value of the choice's row */
	FIELD_MAPPING,		/* a struct at offset, by `fields` */
	FIELD_LIST,		/* array of structs by `fields`, count beside */
	FIELD_CUSTOM		/* `read` does it */
};

struct choice {
	const char *name;	/* NULL ends the table */
	uint64_t value;
};

struct field {
	const char *name;	/* NULL ends the table */
	enum field_kind kind;
	enum dimension dimension;
	size_t offset;		/* of the value in the struct */
	size_t size;		/* TEXT: capacity; LIST: bytes an element */
	uint64_t min, max;	/* QUANTITY, COUNT; max 0: no limit;
				 * LIST: number of elements (max needed) */
	double real_min, real_max;	/* REAL; both 0: no limit */
	bool required;		/* per_direction: both; TEXT: not empty */
	bool per_direction;	/* scalar, or { a-to-b: , b-to-a: }; value[2] */
	const char *default_text;	/* parsed like a scalar; NULL: unset */
	const struct choice *choices;	/* CHOICE */
	const struct field *fields;	/* MAPPING, LIST */
	size_t count_offset;	/* LIST: size_t */
	/* CUSTOM: node NULL means absent (apply a default or complain; in an
	 * absent mapping that is not required, no complaint). */
	int (*read)(const struct node *node, const struct field *field,
	    void *base, struct error *err);
	/* CUSTOM: the rows that the node makes apply, NULL where its keys are
	 * no rows.  *key is what follows the row's own name ("3.tls.version",
	 * or ""), and is moved on to what names one of *rows; *rows NULL: the
	 * key ends before.  -1: ERROR_USAGE, with what is allowed. */
	int (*rows_of)(const struct node *node, const char **key,
	    const struct field **rows, struct error *err);
	const char *help;	/* one line, with the unit and the source */
};

/* Fill *base from a mapping by the rows; `what` names the mapping in messages
 * ("circuit", "medium").  Every field is set: value, default or unset.
 * node NULL stands for an empty mapping.  A mapping that is absent and not
 * required demands nothing of its own rows.  -1: ERROR_INPUT with place;
 * *base is then in part filled. */
int fields_read(const struct node *node, const struct field *rows,
    const char *what, void *base, struct error *err);

/* The row that a key as in document_override leads to, in the tree as it
 * stands: "mtu", "segments.0.medium.line-rate", "service.committed.a-to-b".
 * *below: the rows that lie below it, NULL where there are none.
 * -1 (ERROR_USAGE): there is no such row; the nearest is named. */
int field_find(const struct node *root, const struct field *rows,
    const char *key, const struct field **out, const struct field **below,
    struct error *err);

/* One scalar text into one row's value (command line, defaults); for a row
 * per direction, into one of the two.  at NULL: no place. */
int field_set_text(const struct field *row, const char *text,
    const struct node *at, void *value, struct error *err);

/* What a row accepts, in words: "a rate such as 1 Gbit/s, 1 bit/s to ...". */
const char *field_allowed(const struct field *row, char *buf, size_t size);

/* The nearest of the names by edit distance, NULL where none is near. */
const char *nearest_name(const char *word, const char *const names[],
    size_t count);

#endif
