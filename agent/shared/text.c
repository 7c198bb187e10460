/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "text.h"

#include <assert.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

static const char cut_mark[] = "...";

/* Bytes of the control character at p, 0 where it is none.  C1 controls,
 * U+0080 to U+009F, are C2 80 to C2 9F: RFC 3629. */
static size_t
control_length(const char *p)
{
	unsigned char c = (unsigned char)p[0];

	if (c != '\0' && (c < 0x20 || c == 0x7f))
		return 1;
	if (c == 0xc2 && ((unsigned char)p[1] & 0xe0) == 0x80)
		return 2;
	return 0;
}

static bool
is_continuation(char c)
{
	return ((unsigned char)c & 0xc0) == 0x80;
}

const char *
text_quote(const char *text, char *buf, size_t size)
{
	size_t used = 0;

	assert(size > sizeof(cut_mark));
	while (*text != '\0' && used < size - 1) {
		size_t skip = control_length(text);

		buf[used++] = skip > 0 ? '?' : *text;
		text += skip > 0 ? skip : 1;
	}
	if (*text != '\0') {
		used = size - sizeof(cut_mark);
		while (used > 0 && is_continuation(buf[used]))
			used--;
		memcpy(buf + used, cut_mark, sizeof(cut_mark) - 1);
		used += sizeof(cut_mark) - 1;
	}
	buf[used] = '\0';
	return buf;
}

bool
text_has_control(const char *text)
{
	for (; *text != '\0'; text++) {
		if (control_length(text) > 0)
			return true;
	}
	return false;
}

void
text_append(char *buf, size_t size, const char *fmt, ...)
{
	size_t used = strlen(buf);
	va_list ap;

	assert(used < size);
	va_start(ap, fmt);
	(void)vsnprintf(buf + used, size - used, fmt, ap);
	va_end(ap);
}
