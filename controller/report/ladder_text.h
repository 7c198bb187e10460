/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * ladder_text: the ladder of one ceiling, every column of which adds up as
 * printed.
 */
#ifndef PLAFOND_LADDER_TEXT_H
#define PLAFOND_LADDER_TEXT_H

#include <stdio.h>

#include "ceiling/ceiling.h"
#include "report/rate_unit.h"

/* line_source: where the line's rate is written.  Not for a reference. */
void ladder_text(const struct ceiling *ceiling, const struct rate_unit *unit,
    const char *line_source, FILE *out);

#endif
