/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "declaration_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define REST "\nlayers: [ ethernet, ipv4, tcp ]\n"

static void
every_row_is_complete_and_found_by_its_name(void **state)
{
	const struct medium *medium;
	size_t i, m, n;

	(void)state;
	for (m = 0; media[m] != NULL; m++) {
		medium = media[m];
		assert_ptr_equal(medium_find(medium->name), medium);
		for (n = m + 1; media[n] != NULL; n++)
			assert_string_not_equal(medium->name, media[n]->name);
		assert_non_null(medium->title);
		assert_non_null(medium->fields);
		assert_string_equal(medium->fields[0].name, "kind");
		assert_non_null(medium->formula);
		assert_non_null(medium->source);
		assert_non_null(medium->accuracy_note);
		assert_non_null(accuracy_name(medium->accuracy));
		assert_true(medium->memory == NULL ||
		    medium->accuracy != ACCURACY_EXACT);
		assert_int_equal(medium->capacity == NULL,
		    medium->accuracy == ACCURACY_REFERENCE);
		assert_non_null(medium->carries[0]);
		for (i = 0; medium->carries[i] != NULL; i++) {
			assert_non_null(layer_find_on(medium->carries[i], ""));
			assert_true(medium_carries(medium,
			    medium->carries[i]));
		}
		for (i = 0; medium->fields[i].name != NULL; i++)
			assert_non_null(medium->fields[i].help);
	}
	assert_null(medium_find("nothing"));
	assert_false(medium_carries(media[0], "nothing"));
}

/* The name of the rate is the MAC rate (IEEE 802.3). */
static void
ethernet_offers_the_rate_that_names_it(void **state)
{
	static const struct {
		const char *text;
		uint64_t bps;
	} vectors[] = {
		{ "10 Mbit/s", 10000000 },
		{ "100 Mbit/s", 100000000 },
		{ "1 Gbit/s", 1000000000 },
		{ "2.5 Gbit/s", 2500000000 },
		{ "25 Gbit/s", 25000000000 },
		{ "400 Gbit/s", 400000000000 },
		{ "1.6 Tbit/s", 1600000000000 },
		{ "1 bit/s", 1 },
	};
	struct path_segment segment;
	struct circuit *circuit;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		circuit = circuit_of(vectors[i].text, "ethernet, ipv4, tcp",
		    "");
		segment_of(circuit, DIRECTION_A_TO_B, &segment);
		assert_int_equal(fraction_compare(path_offered_bps(&segment),
		    fraction_whole(vectors[i].bps)), 0);
		circuit_free(circuit);
	}
}

static void
a_rate_may_differ_by_direction(void **state)
{
	struct circuit *circuit = circuit_accepted("circuit: X\nmedium: "
	    "{ kind: ethernet, line-rate: { a-to-b: 1 Gbit/s, "
	    "b-to-a: 100 Mbit/s } }" REST);
	struct path_segment segment;

	(void)state;
	segment_of(circuit, DIRECTION_B_TO_A, &segment);
	assert_int_equal(fraction_floor(path_offered_bps(&segment)),
	    100000000);
	circuit_free(circuit);
}

static void
a_wrong_medium_is_refused_with_its_place(void **state)
{
	static const struct {
		const char *medium, *expected;
	} vectors[] = {
		{ "{ kind: ethernt, line-rate: 1 Gbit/s }", "test:2:17" },
		{ "{ kind: ethernt, line-rate: 1 Gbit/s }",
		  "did you mean 'ethernet'" },
		{ "{ kind: carrier-pigeon }", "allowed: ethernet, pdh" },
		{ "{ line-rate: 1 Gbit/s }", "kind" },
		{ "{ kind: [ ethernet ] }", "kind" },
		{ "[ ethernet ]", "test:2:9" },
		{ "ethernet", "test:2:9" },
		{ "ethernet", "'line-rate' is missing" },
		{ "{ kind: ethernet }", "'line-rate' is missing" },
		{ "{ kind: ethernet, rate: 1 Gbit/s }", "line-rate" },
		{ "{ kind: ethernet, line-rate: 0 bit/s }", "line-rate" },
		{ "{ kind: ethernet, line-rate: 1.7 Tbit/s }", "1.6 Tbit/s" },
		{ "{ kind: ethernet, line-rate: 1 G }", "line-rate" },
		{ "{ kind: ethernet, line-rate: -1 Gbit/s }", "line-rate" },
		{ "{ kind: ethernet, line-rate: 1000 }", "line-rate" },
		{ "{ kind: host, line-rate: 1 Gbit/s }", "line-rate" },
	};
	char text[256];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "circuit: X\nmedium: %s%s",
		    vectors[i].medium, REST);
		circuit_refused(text, vectors[i].expected);
	}
}

static void
the_lowest_layer_must_suit_the_medium(void **state)
{
	(void)state;
	circuit_refused("circuit: X\nmedium: { kind: ethernet, line-rate: "
	    "1 Gbit/s }\nlayers: [ ipv4, tcp ]\n", "ipv4 on medium ethernet");
	circuit_refused("circuit: X\nmedium: host\nlayers: [ ethernet, ipv4, "
	    "tcp ]\n", "ethernet on medium host");
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(every_row_is_complete_and_found_by_its_name),
		cmocka_unit_test(ethernet_offers_the_rate_that_names_it),
		cmocka_unit_test(a_rate_may_differ_by_direction),
		cmocka_unit_test(a_wrong_medium_is_refused_with_its_place),
		cmocka_unit_test(the_lowest_layer_must_suit_the_medium),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
