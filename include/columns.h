/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * columns: a table of text that stands in straight columns.
 *
 * Widths are those of the widest cells, counted in characters of UTF-8.
 * The last column may be wrapped at the page's edge.  Knows no quantities.
 */
#ifndef PLAFOND_COLUMNS_H
#define PLAFOND_COLUMNS_H

#include <stddef.h>
#include <stdio.h>

#define COLUMNS_MAX 10
#define COLUMNS_PAGE 80

struct columns;

/* A letter for each column: l left, r right, w (the last) wrapped.  Returns
 * owned; NULL: no memory, and the calls below then do nothing. */
struct columns *columns_new(const char *alignment);
void columns_free(struct columns *columns);	/* NULL is fine */
/* One cell for each column; NULL is empty.  Copies. */
void columns_row(struct columns *columns, const char *const cells[]);
/* A line of dashes under the row before. */
void columns_rule(struct columns *columns);
/* With this many spaces before each row. */
void columns_print(const struct columns *columns, int indent, FILE *out);

#endif
