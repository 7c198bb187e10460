/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * text: small helpers for words that came from outside, private to shared/.
 *
 * Pure; nothing is allocated.
 */
#ifndef PLAFOND_TEXT_H
#define PLAFOND_TEXT_H

#include <stdbool.h>
#include <stddef.h>

#define TEXT_QUOTE_SIZE 64	/* for the buffer of text_quote */

/* Copy for a message: control characters become '?', what does not fit is cut
 * between two UTF-8 characters and "..." says so.  Returns buf. */
const char *text_quote(const char *text, char *buf, size_t size);

/* True where UTF-8 text holds a control character: C0, DEL or C1. */
bool text_has_control(const char *text);

/* Append to the text in buf, in printf's way; what does not fit is cut. */
void text_append(char *buf, size_t size, const char *fmt, ...)
    __attribute__((format(printf, 3, 4)));

#endif
