/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * text_tables: trials, medians and criteria of a record, a row each.
 */
#ifndef PLAFOND_TEXT_TABLES_H
#define PLAFOND_TEXT_TABLES_H

#include "report/text_page.h"

void text_trials(struct text_page *page, const struct record *record);
void text_medians(struct text_page *page, const struct record *record);
void text_criteria(struct text_page *page, const struct verdict *verdict);

/* Cells that the head of the report uses too. */
enum text_paint text_outcome_paint(enum outcome outcome);
const char *text_attained(const struct verdict *verdict,
    enum direction direction, const struct text_page *page,
    char buf[TEXT_CELL_SIZE]);
/* "97 %", "0.1 %", "20 ms": as it was declared. */
const char *text_required(const struct criterion_outcome *row,
    char buf[TEXT_CELL_SIZE]);

#endif
