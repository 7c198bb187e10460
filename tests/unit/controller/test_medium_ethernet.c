/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Medium Ethernet: each physical layer by its name. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "medium_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

/* The MAC rate, and of what a reader is told about the line: coded bits a
 * symbol are for information only.  WAN PHY: 64/66 of the payload of an
 * STS-192c, 9584.64 Mbit/s (IEEE 802.3 clause 50). */
static const struct {
	const char *phy;
	uint64_t num_bps, den;
	const char *code, *source;
} vectors[] = {
	{ "10base-t", 10000000, 1, "Manchester, 20 MBd",
	  "IEEE 802.3 clause 14, from memory" },
	{ "100base-x", 100000000, 1, "4B/5B, 125 MBd", "IEEE 802.3 clause 24" },
	{ "1000base-x", 1000000000, 1, "8b/10b, 1.25 GBd",
	  "IEEE 802.3 clause 36" },
	{ "1000base-t", 1000000000, 1, "PAM-5 on 4 pairs, 125 MBd each",
	  "IEEE 802.3 clause 40" },
	{ "2.5gbase-t", 2500000000, 1, "64b/65b, DSQ128, LDPC on 4 pairs, "
	  "200 MBd each", "IEEE 802.3 clause 126, from memory" },
	{ "5gbase-t", 5000000000, 1, "64b/65b, DSQ128, LDPC on 4 pairs, "
	  "400 MBd each", "IEEE 802.3 clause 126, from memory" },
	{ "10gbase-t", 10000000000, 1, "64b/65b, DSQ128, LDPC on 4 pairs, "
	  "800 MBd each", "IEEE 802.3 clause 55" },
	{ "10gbase-r", 10000000000, 1, "64b/66b, 10.3125 GBd",
	  "IEEE 802.3 clause 49" },
	{ "10gbase-w", UINT64_C(613416960000), 66, "64b/66b in STS-192c, "
	  "9.95328 GBd", "IEEE 802.3 clause 50: 9584640000 * 64 / 66" },
	{ "25gbase-r", 25000000000, 1, "25.78125 GBd",
	  "IEEE 802.3 clause 107" },
	{ "40gbase-r", 40000000000, 1, "64b/66b, 4 lanes of 10.3125 GBd",
	  "IEEE 802.3 clause 82, from memory" },
	{ "50gbase-r", 50000000000, 1, "26.5625 GBd", "IEEE 802.3 clause 133" },
	{ "100gbase-r", 100000000000, 1, "4 lanes of 25.78125 GBd",
	  "IEEE 802.3 clause 82" },
	{ "200gbase-r", 200000000000, 1, "4 lanes of 26.5625 GBd",
	  "IEEE 802.3 clause 119, from memory" },
	{ "400gbase-r", 400000000000, 1, "8 lanes of 26.5625 GBd or 4 of "
	  "53.125 GBd", "IEEE 802.3 clause 119, from memory" },
};

static void
each_phy_has_the_rate_of_its_mac(void **state)
{
	struct medium_capacity capacity;
	char text[128];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ kind: ethernet, phy: %s "
		    "}", vectors[i].phy);
		capacity_of(text, DIRECTION_A_TO_B, 1538, &capacity);
		if (fraction_compare(capacity.line_bps, fraction_make(
		    vectors[i].num_bps, vectors[i].den)) != 0)
			fail_msg("%s: %f (%s)", vectors[i].phy,
			    fraction_double(capacity.line_bps),
			    vectors[i].source);
		assert_int_equal(capacity.steps_count, 0);
		assert_int_equal(capacity.notes_count, 1);
		if (strstr(capacity.notes[0], vectors[i].code) == NULL)
			fail_msg("%s: %s", vectors[i].phy, capacity.notes[0]);
	}
}

static void
a_rate_beside_a_phy_must_be_its_own(void **state)
{
	struct medium_use use;

	(void)state;
	medium_accepted("{ kind: ethernet, phy: 10gbase-w, line-rate: "
	    "9294196363 bit/s }", &use);
	medium_refused("{ kind: ethernet, phy: 10gbase-w, line-rate: "
	    "@9294196364 bit/s }", "10gbase-w has 9294196363 bit/s");
	medium_refused("{ kind: ethernet, phy: 1000base-t, line-rate: "
	    "@100 Mbit/s }", "1000base-t has 1000000000 bit/s");
	medium_refused("{ kind: ethernet, phy: @11gbase-t }", "10gbase-t");
}

static void
half_duplex_is_shared_by_both_directions(void **state)
{
	struct medium_capacity capacity;

	(void)state;
	capacity_of("{ kind: ethernet, phy: 10base-t, duplex: half }",
	    DIRECTION_A_TO_B, 1538, &capacity);
	assert_int_equal(capacity.duplex, DUPLEX_SHARED);
	capacity_of("{ kind: ethernet, phy: 10base-t }", DIRECTION_A_TO_B,
	    1538, &capacity);
	assert_int_equal(capacity.duplex, DUPLEX_FULL);
	/* each clock within 100 ppm: RFC 5180 appendix A.1 */
	assert_int_equal(capacity.tolerance_ppm, 100);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(each_phy_has_the_rate_of_its_mac),
		cmocka_unit_test(a_rate_beside_a_phy_must_be_its_own),
		cmocka_unit_test(half_duplex_is_shared_by_both_directions),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
