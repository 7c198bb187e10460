/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <string.h>

#include "hex.h"

/* RFC 4648, section 10, whose digits are in upper case. */
static const struct {
	const char *octets, *text;
} vectors[] = {
	{ "", "" },
	{ "f", "66" },
	{ "fo", "666f" },
	{ "foobar", "666f6f626172" },
	{ "\x01\x80\xff", "0180ff" },
};

static void
octets_are_written_in_lower_case_and_read_again(void **state)
{
	unsigned char octets[8];
	char text[16];

	(void)state;
	for (size_t i = 0; i < sizeof(vectors) / sizeof(vectors[0]); i++) {
		size_t count = strlen(vectors[i].octets);

		hex_text((const unsigned char *)vectors[i].octets, count,
		    text);
		assert_string_equal(text, vectors[i].text);
		assert_int_equal(hex_octets(text, count, octets), 0);
		assert_memory_equal(octets, vectors[i].octets, count);
	}
}

static void
what_is_no_digit_is_refused(void **state)
{
	static const char *const texts[] = { "", "6", "666", "6g66", "66 6",
		"66F6", "66-6", "0x66" };
	unsigned char octets[2];

	(void)state;
	for (size_t i = 0; i < sizeof(texts) / sizeof(texts[0]); i++)
		assert_int_equal(hex_octets(texts[i], 2, octets), -1);
	assert_int_equal(hex_octets("666f and more", 2, octets), 0);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    octets_are_written_in_lower_case_and_read_again),
		cmocka_unit_test(what_is_no_digit_is_refused),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
