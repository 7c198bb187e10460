/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdio.h>

#include "columns.h"
#include "utf8.h"

static void
columns_align_whatever_the_script(void **state)
{
	static const char *const rows[][3] = {
		{ "caf\xc3\xa9", "1", "x" },
		{ "plain text", "22", "y" },
		{ "\xe2\x88\x92", "333", NULL },
	};
	struct columns *columns = columns_new("lrl");
	static char answer[4096];
	size_t i;
	FILE *f;

	(void)state;
	for (i = 0; i < sizeof(rows) / sizeof(rows[0]); i++)
		columns_row(columns, rows[i]);
	columns_rule(columns);
	f = fmemopen(answer, sizeof(answer), "w");
	assert_non_null(f);
	columns_print(columns, 1, f);
	(void)fclose(f);
	columns_free(columns);
	assert_string_equal(answer, " caf\xc3\xa9          1  x\n"
	    " plain text   22  y\n"
	    " \xe2\x88\x92           333\n"
	    " ------------------\n");
}

static void
text_wraps_at_the_edge_of_the_page(void **state)
{
	const char *const cells[] = { "name", "eighty columns are the width "
		"of a page and a word that does not fit begins a new line" };
	struct columns *columns = columns_new("lw");
	static char answer[4096];
	FILE *f;

	(void)state;
	columns_row(columns, cells);
	f = fmemopen(answer, sizeof(answer), "w");
	assert_non_null(f);
	columns_print(columns, 2, f);
	(void)fclose(f);
	columns_free(columns);
	assert_string_equal(answer, "  name  eighty columns are the width of a "
	    "page and a word that does not fit\n        begins a new line\n");
}

static void
malformed_text_becomes_replacement_characters(void **state)
{
	static const struct {
		const char *text, *clean;
	} rows[] = {
		{ "plain", "plain" },
		{ "\xc3\xa9\xe2\x82\xac\xf0\x9f\x99\x82",
		    "\xc3\xa9\xe2\x82\xac\xf0\x9f\x99\x82" },
		{ "\xc0\x80", "\xef\xbf\xbd\xef\xbf\xbd" },
		{ "\xe0\x80\x80", "\xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbd" },
		{ "\xed\xa0\x80", "\xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbd" },
		{ "\xf5", "\xef\xbf\xbd" },
		{ "a\xe2\x82", "a\xef\xbf\xbd\xef\xbf\xbd" },
	};
	char buf[64];

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++)
		assert_string_equal(utf8_clean(rows[i].text, buf,
		    sizeof(buf)), rows[i].clean);
	/* Never half a character. */
	assert_string_equal(utf8_clean("ab\xc3\xa9", buf, 4), "ab");
	assert_int_equal(utf8_columns("\xc3\xa9\xe2\x82\xac"), 2);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(columns_align_whatever_the_script),
		cmocka_unit_test(text_wraps_at_the_edge_of_the_page),
		cmocka_unit_test(malformed_text_becomes_replacement_characters),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
