/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "hex.h"

#include <string.h>

static const char digits[] = "0123456789abcdef";

void
hex_text(const unsigned char *octets, size_t count, char *out)
{
	for (size_t i = 0; i < count; i++) {
		*out++ = digits[octets[i] >> 4];
		*out++ = digits[octets[i] & 15];
	}
	*out = '\0';
}

int
hex_octets(const char *text, size_t count, unsigned char *out)
{
	for (size_t i = 0; i < 2 * count; i++) {
		const char *digit = text[i] != '\0' ?
		    strchr(digits, text[i]) : NULL;
		unsigned value;

		if (digit == NULL)
			return -1;
		value = (unsigned)(digit - digits);
		out[i / 2] = (unsigned char)(i % 2 == 0 ? value << 4 :
		    out[i / 2] | value);
	}
	return 0;
}
