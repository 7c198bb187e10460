/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * answers: what the way back of acknowledgements allows.
 *
 * Where a line is shared, or both directions carry data, acknowledgements are
 * a step of the ladder (path.h); here they are a condition.  Pure.
 */
#ifndef PLAFOND_ANSWERS_H
#define PLAFOND_ANSWERS_H

#include "ceiling/ceiling.h"
#include "ceiling/path.h"
#include "declare/circuit.h"

struct error;

/* Adds, over all segments, the lowest rate at which what they offer in the
 * other direction answers the segments of this; nothing where none does.
 * -1 (ERROR_INPUT): as ceiling_of_load. */
int answers_add(const struct circuit *circuit, const struct load *load,
    struct ceiling *ceiling, struct error *err);

#endif
