/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * utf8: text from outside made fit for JSON and for a terminal.
 *
 * RFC 3629.  Pure.
 */
#ifndef PLAFOND_UTF8_H
#define PLAFOND_UTF8_H

#include <stddef.h>
#include <stdint.h>

/* One character from *text, which is moved on; U+FFFD for each byte that is
 * not part of a well-formed sequence.  0 at the end. */
uint32_t utf8_next(const char **text);

/* Copy with every malformed byte replaced by U+FFFD; cut between characters
 * where it does not fit.  Returns buf. */
const char *utf8_clean(const char *text, char *buf, size_t size);

/* For a terminal: control characters (C0, DEL, C1) become U+FFFD too; with
 * ascii everything that is not ASCII becomes '?'.  Returns buf. */
const char *utf8_printable(const char *text, int ascii, char *buf,
    size_t size);

/* Characters in text, each taken to be one column wide. */
size_t utf8_columns(const char *text);

#endif
