/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * text_page: columns, wrapping and colour for a person at a terminal.
 *
 * Knows characters and columns, nothing of circuits.
 */
#ifndef PLAFOND_TEXT_PAGE_H
#define PLAFOND_TEXT_PAGE_H

#include <stdbool.h>
#include <stdint.h>
#include <stdio.h>

#include "report/record.h"

#define TEXT_CELL_SIZE 64

/* Signs that ASCII has to write otherwise. */
struct text_signs {
	const char *to, *minus, *at_least, *at_most, *none, *cut;
};

struct text_page {
	FILE *out;
	bool colour, ascii;
	unsigned columns;
	unsigned at;			/* column reached in this line */
	const struct text_signs *signs;
	/* One unit for all rates of a page, so that points stand in line. */
	uint64_t digit_bps;		/* of the last digit after the point */
	const char *rate_unit;
};

enum text_paint { PAINT_NONE, PAINT_BOLD, PAINT_GOOD, PAINT_BAD, PAINT_OPEN,
	PAINT_VOID, PAINTS };

void text_page_init(struct text_page *page, const struct text_style *style,
    uint64_t largest_bps, FILE *out);

void text_put(struct text_page *page, const char *text);
void text_putf(struct text_page *page, const char *fmt, ...)
    __attribute__((format(printf, 2, 3)));
void text_paint(struct text_page *page, enum text_paint paint,
    const char *text);
/* At least one space, then text from this column on, or ending before it. */
void text_left(struct text_page *page, unsigned column, const char *text);
void text_right(struct text_page *page, unsigned column, const char *text);
/* text_left, cut so that it ends before `end`. */
void text_cut(struct text_page *page, unsigned column, unsigned end,
    const char *text);
void text_end(struct text_page *page);
void text_heading(struct text_page *page, const char *text);
/* Words from here on, further lines indented to `column`. */
void text_wrap(struct text_page *page, unsigned column, const char *text);

/* In the unit of the page, three digits after the point, rounded down. */
const char *text_rate(const struct text_page *page, uint64_t bps,
    char buf[TEXT_CELL_SIZE]);
/* A count of last digits, with its sign. */
const char *text_change(const struct text_page *page, int64_t digits,
    char buf[TEXT_CELL_SIZE]);
/* "99.48 %", rounded down, so that nothing below a limit looks like it. */
const char *text_percent(double ratio, char buf[TEXT_CELL_SIZE]);

#endif
