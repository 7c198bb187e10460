/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * text_ladder: one column a direction from the line's rate to the achieved.
 *
 * The steps of the ceiling and the entries of the ledger stand under each
 * other, and every column adds up as printed.
 */
#ifndef PLAFOND_TEXT_LADDER_H
#define PLAFOND_TEXT_LADDER_H

#include "report/text_page.h"

void text_ladder(struct text_page *page, const struct record *record,
    const bool shown[DIRECTIONS_SINGLE]);

#endif
