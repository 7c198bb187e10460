/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/csv_text.h"

#include <stdbool.h>
#include <string.h>

void
csv_text(const char *text, FILE *out)
{
	bool quoted = text[strcspn(text, ",\"\r\n")] != '\0';

	if (quoted)
		(void)fputc('"', out);
	for (; *text != '\0'; text++) {
		if (*text == '"')
			(void)fputc('"', out);
		(void)fputc(*text, out);
	}
	if (quoted)
		(void)fputc('"', out);
}
