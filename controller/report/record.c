/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/record.h"

#include <string.h>

#include "clock.h"

void
record_make_id(uint64_t utc_ns, const unsigned char random[10],
    char out[RECORD_ID_SIZE])
{
	static const char digits[] = "0123456789abcdef";
	uint64_t utc_ms = utc_ns / NS_PER_MS;
	unsigned char id[16];
	size_t at = 0;

	for (size_t i = 0; i < 6; i++)
		id[i] = (unsigned char)(utc_ms >> (8 * (5 - i)) & 0xff);
	memcpy(id + 6, random, 10);
	/* Version 7 and the variant, RFC 9562 sections 4.1 and 4.2. */
	id[6] = (unsigned char)(0x70 | (id[6] & 0x0f));
	id[8] = (unsigned char)(0x80 | (id[8] & 0x3f));
	for (size_t i = 0; i < sizeof(id); i++) {
		if (i == 4 || i == 6 || i == 8 || i == 10)
			out[at++] = '-';
		out[at++] = digits[id[i] >> 4];
		out[at++] = digits[id[i] & 0x0f];
	}
	out[at] = '\0';
}
