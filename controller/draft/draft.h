/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * draft: a declaration, with comments, from what the kernel knows.
 *
 * What a person must confirm is marked `confirm:` on its line.  What the
 * kernel does not know is a line that is commented out and marked `fill in:`,
 * never a number.  Whatever the kernel says stands escaped in comments alone,
 * but for numbers.  Pure.
 */
#ifndef PLAFOND_DRAFT_H
#define PLAFOND_DRAFT_H

struct error;
struct interface_facts;

/* Owned text (free).  Where nothing that is needed is left open the
 * declaration's reader accepts it, or a comment says why it does not.
 * -1: ERROR_INTERNAL. */
int draft_make(const struct interface_facts *facts, char **out,
    struct error *err);

#endif
