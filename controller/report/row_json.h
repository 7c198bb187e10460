/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * row_json: rows of the tables of media and layers as JSON.
 */
#ifndef PLAFOND_ROW_JSON_H
#define PLAFOND_ROW_JSON_H

#include <stdio.h>

#include <jansson.h>

#include "field.h"

struct error;

/* Owned; NULL is null. */
json_t *row_json_text(const char *text);
json_t *row_json_names(const char *const names[]);
/* [{name, help, allowed, default, required}]; NULL is []. */
json_t *row_json_fields(const struct field *fields);
/* {format, software, NAME: rows}; takes rows.  -1: ERROR_INTERNAL. */
int row_json_print(const char *format, const char *name, json_t *rows,
    FILE *out, struct error *err);

#endif
