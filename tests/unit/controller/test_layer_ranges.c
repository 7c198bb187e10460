/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the options of the layers of access lines may be; the sections are from
 * memory. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "stack_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

static const struct {
	const char *layer, *option, *above;
	uint64_t least_bytes, most_bytes;
	const char *source;
} ranges[] = {
	{ "docsis", "downstream-header-bytes", "ethernet, ipv4, tcp", 4, 240,
	  "CM-SP-MULPI: EHDR of 0 to 240 octets; not shorter than the 4 of "
	  "the other direction" },
	{ "docsis", "upstream-header-bytes", "ethernet, ipv4, tcp", 0, 11,
	  "not longer than the 11 of the other direction" },
	{ "lte", "mac-bytes", "ipv4, tcp", 2, 3,
	  "TS 36.321 s6.1.2: F of 7 or 15 bits" },
	{ "lte", "rlc-bytes", "ipv4, tcp", 1, 5,
	  "TS 36.322 s6.2.1: SN of 5, 10 or 16 bits, and segments" },
	{ "lte", "pdcp-bytes", "ipv4, tcp", 1, 3,
	  "TS 36.323 s6.2: SN of 7, 12, 15 or 18 bits" },
	{ "nr", "mac-bytes", "ipv4, tcp", 2, 3,
	  "TS 38.321 s6.1.2: L of 8 or 16 bits" },
	{ "nr", "rlc-bytes", "ipv4, tcp", 1, 5,
	  "TS 38.322 s6.2.2: SN of 6, 12 or 18 bits, and segments" },
	{ "nr", "pdcp-bytes", "ipv4, tcp", 2, 3,
	  "TS 38.323 s6.2.2: SN of 12 or 18 bits" },
};

static bool
accepted(size_t i, uint64_t bytes, const char *more)
{
	struct layer_stack stack;
	struct error err;
	char text[256];

	(void)snprintf(text, sizeof(text), "{ %s: { %s: %lu B%s } }, %s",
	    ranges[i].layer, ranges[i].option, (unsigned long)bytes, more,
	    ranges[i].above);
	return stack_read(text, &stack, &err) == 0;
}

static void
options_end_where_the_standards_do(void **state)
{
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(ranges); i++) {
		if (!accepted(i, ranges[i].least_bytes, "") ||
		    !accepted(i, ranges[i].most_bytes, ""))
			fail_msg("%s refused", ranges[i].option);
		if ((ranges[i].least_bytes > 0 &&
		    accepted(i, ranges[i].least_bytes - 1, "")) ||
		    accepted(i, ranges[i].most_bytes + 1, ""))
			fail_msg("%s of %s accepted", ranges[i].option,
			    ranges[i].layer);
	}
}

static void
extended_headers_reach_from_none_to_240(void **state)
{
	(void)state;
	assert_true(accepted(0, 0, ", upstream-header-bytes: 0 B"));
	assert_true(accepted(1, 240, ", downstream-header-bytes: 240 B"));
	assert_false(accepted(0, 241, ", upstream-header-bytes: 0 B"));
	assert_false(accepted(1, 241, ", downstream-header-bytes: 241 B"));
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(options_end_where_the_standards_do),
		cmocka_unit_test(extended_headers_reach_from_none_to_240),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
