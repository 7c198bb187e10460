/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "utf8.h"

#include <assert.h>
#include <string.h>

#define REPLACEMENT 0xfffdu

/* Length of the sequence that a first byte opens, and the least value that may
 * be written with it (RFC 3629 section 3 forbids longer forms). */
static size_t
sequence_length(unsigned char first, uint32_t *least)
{
	if (first < 0x80) {
		*least = 0;
		return 1;
	}
	if (first >= 0xc2 && first <= 0xdf) {
		*least = 0x80;
		return 2;
	}
	if (first >= 0xe0 && first <= 0xef) {
		*least = 0x800;
		return 3;
	}
	if (first >= 0xf0 && first <= 0xf4) {
		*least = 0x10000;
		return 4;
	}
	return 0;
}

uint32_t
utf8_next(const char **text)
{
	const unsigned char *at = (const unsigned char *)*text;
	uint32_t least = 0, value;
	size_t length = sequence_length(at[0], &least);

	if (at[0] == '\0')
		return 0;
	*text += 1;
	if (length == 0)
		return REPLACEMENT;
	value = length == 1 ? at[0] : at[0] & (0x7fu >> length);
	for (size_t i = 1; i < length; i++) {
		if ((at[i] & 0xc0) != 0x80)
			return REPLACEMENT;
		value = value << 6 | (at[i] & 0x3fu);
	}
	/* Surrogates and what lies beyond Unicode are not characters. */
	if (value < least || value > 0x10ffff ||
	    (value >= 0xd800 && value <= 0xdfff))
		return REPLACEMENT;
	*text += length - 1;
	return value;
}

static size_t
encode(uint32_t value, char out[4])
{
	if (value < 0x80) {
		out[0] = (char)value;
		return 1;
	}
	if (value < 0x800) {
		out[0] = (char)(0xc0 | value >> 6);
		out[1] = (char)(0x80 | (value & 0x3f));
		return 2;
	}
	if (value < 0x10000) {
		out[0] = (char)(0xe0 | value >> 12);
		out[1] = (char)(0x80 | (value >> 6 & 0x3f));
		out[2] = (char)(0x80 | (value & 0x3f));
		return 3;
	}
	out[0] = (char)(0xf0 | value >> 18);
	out[1] = (char)(0x80 | (value >> 12 & 0x3f));
	out[2] = (char)(0x80 | (value >> 6 & 0x3f));
	out[3] = (char)(0x80 | (value & 0x3f));
	return 4;
}

static uint32_t
keep(uint32_t value)
{
	return value;
}

static uint32_t
without_control(uint32_t value)
{
	return value < 0x20 || (value >= 0x7f && value < 0xa0) ? REPLACEMENT
	    : value;
}

static uint32_t
ascii_only(uint32_t value)
{
	return value < 0x20 || value >= 0x7f ? '?' : value;
}

static const char *
copy(const char *text, uint32_t (*change)(uint32_t), char *buf, size_t size)
{
	size_t used = 0;
	uint32_t value;

	assert(size > 0);
	while ((value = utf8_next(&text)) != 0) {
		char bytes[4];
		size_t n = encode(change(value), bytes);

		if (used + n >= size)
			break;
		memcpy(buf + used, bytes, n);
		used += n;
	}
	buf[used] = '\0';
	return buf;
}

const char *
utf8_clean(const char *text, char *buf, size_t size)
{
	return copy(text, keep, buf, size);
}

const char *
utf8_printable(const char *text, int ascii, char *buf, size_t size)
{
	return copy(text, ascii ? ascii_only : without_control, buf, size);
}

size_t
utf8_columns(const char *text)
{
	size_t count = 0;

	while (utf8_next(&text) != 0)
		count++;
	return count;
}
