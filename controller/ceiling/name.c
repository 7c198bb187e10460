/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/name.h"

#include <string.h>

void
name_join(char *buf, size_t size, const char *first, const char *second,
    const char *third)
{
	const char *const parts[] = { first, second, third };
	size_t used = 0, length, i;

	for (i = 0; i < sizeof(parts) / sizeof(parts[0]); i++) {
		length = strnlen(parts[i], size - 1 - used);
		memcpy(buf + used, parts[i], length);
		used += length;
	}
	buf[used] = '\0';
}
