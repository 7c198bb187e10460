/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/text_page.h"

#include <inttypes.h>
#include <math.h>
#include <stdarg.h>
#include <string.h>

#include "utf8.h"

#define TEXT_COLUMNS 80
#define TEXT_COLUMNS_LEAST 60

static const struct text_signs signs_utf8 = { "…", "−", "≥", "≤", "–", "…" };
static const struct text_signs signs_ascii = { "..", "-", ">=", "<=", "-",
	"~" };

/* SGR parameters, ECMA-48 section 8.3.117. */
static const char *const paints[PAINTS] = {
	[PAINT_NONE] = "0",
	[PAINT_BOLD] = "1",
	[PAINT_GOOD] = "1;32",
	[PAINT_BAD] = "1;31",
	[PAINT_OPEN] = "1;33",
	[PAINT_VOID] = "1;35",
};

void
text_page_init(struct text_page *page, const struct text_style *style,
    uint64_t largest_bps, FILE *out)
{
	static const struct {
		uint64_t from_bps, digit_bps;
		const char *unit;
	} units[] = {
		{ UINT64_C(10000000000), 1000000, "Gbit/s" },
		{ UINT64_C(10000000), 1000, "Mbit/s" },
		{ 0, 1, "kbit/s" },
	};
	size_t i = 0;

	while (largest_bps < units[i].from_bps)
		i++;
	*page = (struct text_page){ .out = out, .colour = style->colour,
		.ascii = style->ascii,
		.signs = style->ascii ? &signs_ascii : &signs_utf8,
		.digit_bps = units[i].digit_bps,
		.rate_unit = units[i].unit };
	page->columns = style->columns == 0 ? TEXT_COLUMNS
	    : style->columns < TEXT_COLUMNS_LEAST ? TEXT_COLUMNS_LEAST
	    : style->columns;
}

void
text_put(struct text_page *page, const char *text)
{
	char clean[1024];

	(void)utf8_printable(text, page->ascii, clean, sizeof(clean));
	(void)fputs(clean, page->out);
	page->at += (unsigned)utf8_columns(clean);
}

void
text_putf(struct text_page *page, const char *fmt, ...)
{
	char text[1024];
	va_list ap;

	va_start(ap, fmt);
	(void)vsnprintf(text, sizeof(text), fmt, ap);
	va_end(ap);
	text_put(page, text);
}

void
text_paint(struct text_page *page, enum text_paint paint, const char *text)
{
	if (page->colour && paint != PAINT_NONE)
		(void)fprintf(page->out, "\033[%sm", paints[paint]);
	text_put(page, text);
	if (page->colour && paint != PAINT_NONE)
		(void)fputs("\033[0m", page->out);
}

static void
pad(struct text_page *page, unsigned column)
{
	unsigned wanted = page->at > 0 && column <= page->at ? 1
	    : column > page->at ? column - page->at : 0;

	(void)fprintf(page->out, "%*s", (int)wanted, "");
	page->at += wanted;
}

void
text_left(struct text_page *page, unsigned column, const char *text)
{
	pad(page, column);
	text_put(page, text);
}

void
text_right(struct text_page *page, unsigned column, const char *text)
{
	unsigned width = (unsigned)utf8_columns(text);

	pad(page, column > width ? column - width : 0);
	text_put(page, text);
}

void
text_cut(struct text_page *page, unsigned column, unsigned end,
    const char *text)
{
	const char *at = text;
	char cut[512];
	size_t used;

	pad(page, column);
	if (page->at + utf8_columns(text) < end) {
		text_put(page, text);
		return;
	}
	for (unsigned n = page->at + 2; n < end && *at != '\0'; n++)
		(void)utf8_next(&at);
	used = (size_t)(at - text);
	(void)snprintf(cut, sizeof(cut), "%.*s%s", (int)used, text,
	    page->signs->cut);
	text_put(page, cut);
}

void
text_end(struct text_page *page)
{
	(void)fputc('\n', page->out);
	page->at = 0;
}

void
text_heading(struct text_page *page, const char *text)
{
	text_end(page);
	text_paint(page, PAINT_BOLD, text);
}

/* A number stays with what follows it: its unit. */
static size_t
word_length(const char *text)
{
	size_t length = strcspn(text, " ");

	if (length > 0 && text[length] == ' ' && text[length - 1] >= '0' &&
	    text[length - 1] <= '9')
		length += 1 + strcspn(text + length + 1, " ");
	return length;
}

void
text_wrap(struct text_page *page, unsigned column, const char *text)
{
	bool first = true;
	char word[512];

	while (*text != '\0') {
		size_t length = word_length(text);

		(void)snprintf(word, sizeof(word), "%.*s", (int)length, text);
		if (!first && page->at + 1 + utf8_columns(word) >
		    page->columns) {
			text_end(page);
			first = true;
		}
		if (!first)
			text_put(page, " ");
		else if (page->at == 0)
			pad(page, column);
		text_put(page, word);
		first = false;
		text += length;
		text += strspn(text, " ");
	}
	text_end(page);
}

static const char *
digits_text(uint64_t digits, const char *sign, char buf[TEXT_CELL_SIZE])
{
	(void)snprintf(buf, TEXT_CELL_SIZE, "%s%" PRIu64 ".%03" PRIu64, sign,
	    digits / 1000, digits % 1000);
	return buf;
}

const char *
text_rate(const struct text_page *page, uint64_t bps,
    char buf[TEXT_CELL_SIZE])
{
	return digits_text(bps / page->digit_bps, "", buf);
}

const char *
text_change(const struct text_page *page, int64_t digits,
    char buf[TEXT_CELL_SIZE])
{
	return digits < 0
	    ? digits_text((uint64_t)-digits, page->signs->minus, buf)
	    : digits_text((uint64_t)digits, digits > 0 ? "+" : "", buf);
}

const char *
text_percent(double ratio, char buf[TEXT_CELL_SIZE])
{
	/* A hair more than the value, or 0.97 would print as 96.99 %. */
	(void)snprintf(buf, TEXT_CELL_SIZE, "%.2f %%",
	    floor(ratio * 1e4 + 1e-7) / 100);
	return buf;
}
