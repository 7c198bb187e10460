/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * csv_text: one text as a field of CSV (RFC 4180).
 */
#ifndef PLAFOND_CSV_TEXT_H
#define PLAFOND_CSV_TEXT_H

#include <stdio.h>

/* Quotes around what holds a comma, a quote or a line's end; a quote is
 * doubled. */
void csv_text(const char *text, FILE *out);

#endif
