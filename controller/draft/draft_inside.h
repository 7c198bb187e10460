/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * draft_inside: the parts of a draft.  Pure.
 */
#ifndef PLAFOND_DRAFT_INSIDE_H
#define PLAFOND_DRAFT_INSIDE_H

#include <stdbool.h>
#include <stdio.h>

#include "draft/interface.h"

struct draft_stack;

#define DRAFT_NAME_SIZE (4 * INTERFACE_NAME_SIZE + 1)

/* Words broken to lines of at most 80 columns: `first` before the first, `next`
 * before the others. */
void draft_comment(const char *first, const char *next, const char *text,
    FILE *out);
/* Name of a device fit for a comment; buf has DRAFT_NAME_SIZE. */
const char *draft_name(const char *name, char *buf);

/* One comment a device. */
void draft_devices(const struct interface_facts *facts, FILE *out);
/* The field `medium`; true where a person must complete it. */
bool draft_medium(const struct interface_facts *facts,
    const struct draft_stack *stack, FILE *out);

#endif
