/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * option: a command line by a table of rows, for both programs.
 *
 * Rows are those of field.h: name, kind, limits, default, help.  GNU long
 * options, in any order among the arguments; a YES_NO row is a flag and counts
 * how often it stands there; a CUSTOM row gets its text as a scalar node and
 * may repeat.  The only short options are -h -V -q -v and -o FILE, which stand
 * for --help --version --quiet --verbose --output where a row has that name.
 */
#ifndef PLAFOND_OPTION_H
#define PLAFOND_OPTION_H

#include <stdio.h>

#include "field.h"

struct error;

/* Set every row's default (without one: unset, as in field.h; a CUSTOM row's
 * value is the caller's), then what argv (argv[0] is skipped) says; the
 * arguments that are no options are moved to the front of argv, from argv[1]
 * on, and counted.  -1: ERROR_USAGE, with the nearest name to an unknown. */
int options_read(const struct field *rows, int argc, char *argv[], void *base,
    int *arguments_count, struct error *err);

/* A help page's list of the rows: "  -o, --output FILE  help; default: ...".
 * The help of a row that takes a value begins with a word in capitals, which
 * stands beside the option; without one that is VALUE.  Choices are listed. */
void options_print(const struct field *rows, FILE *out);

/* The same of the fields of a YAML file, with those of their mappings:
 * "  ends.a.name:  help; what is allowed; default: ...". */
void fields_print(const struct field *rows, FILE *out);

#endif
