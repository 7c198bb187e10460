/* SPDX-License-Identifier: GPL-3.0-or-later */
/* document: what override.c shares with document.c; private to shared/. */
#ifndef PLAFOND_DOCUMENT_H
#define PLAFOND_DOCUMENT_H

#include "field.h"

/* As document_read_text for the value of an override, which will stand
 * `depth` levels below a root and has no lines.  It may be empty. */
int document_read_value(const char *text, const char *origin, unsigned depth,
    struct node **out, struct error *err);

/* Fills err; returns -1. */
int document_no_memory(struct error *err);

#endif
