/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * validity: what makes a task's figures untrustworthy, and what a reader
 * should know beside them.
 *
 * Rows of checks; each looks at the input and at the medians and criteria
 * already in the verdict, and adds a reason (void) or a note.  Pure.
 */
#ifndef PLAFOND_VALIDITY_H
#define PLAFOND_VALIDITY_H

#include "judge/verdict.h"

void validity_examine(const struct verdict_input *input,
    struct verdict *verdict);

/* True where the plan holds trials of this direction alone, or of both. */
bool validity_planned(const struct verdict_input *input,
    enum direction direction);

#endif
