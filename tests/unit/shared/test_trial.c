/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <string.h>

#include "measurement.h"
#include "trial.h"

static void
the_names_are_those_of_the_design(void **state)
{
	(void)state;
	assert_string_equal(direction_name(DIRECTION_A_TO_B), "a-to-b");
	assert_string_equal(direction_name(DIRECTION_B_TO_A), "b-to-a");
	assert_string_equal(direction_name(DIRECTION_BOTH), "both");
	assert_string_equal(end_name(END_A), "a");
	assert_string_equal(end_name(END_B), "b");
	assert_string_equal(protocol_name(PROTOCOL_TCP), "tcp");
	assert_string_equal(protocol_name(PROTOCOL_UDP), "udp");
	assert_string_equal(protocol_name(PROTOCOL_TCP_TLS), "tcp+tls");
	assert_string_equal(measurement_end_name(MEASUREMENT_COMPLETE),
	    "complete");
	assert_string_equal(measurement_end_name(MEASUREMENT_STOPPED),
	    "stopped");
	assert_string_equal(measurement_end_name(MEASUREMENT_PEER_LOST),
	    "peer-lost");
}

static void
every_name_leads_back_to_its_value(void **state)
{
	enum direction direction;
	enum end end;

	(void)state;
	for (int i = 0; i < DIRECTIONS; i++) {
		assert_int_equal(direction_from_name(direction_name(
		    (enum direction)i), &direction), 0);
		assert_int_equal(direction, i);
	}
	for (int i = 0; i < ENDS; i++) {
		assert_int_equal(end_from_name(end_name((enum end)i), &end),
		    0);
		assert_int_equal(end, i);
	}
}

static void
the_tables_end_in_null(void **state)
{
	(void)state;
	assert_null(direction_names[DIRECTIONS]);
	assert_null(end_names[ENDS]);
	assert_null(protocol_names[PROTOCOLS]);
	assert_null(measurement_end_names[MEASUREMENT_ENDS]);
}

static void
any_other_name_is_refused_and_nothing_is_set(void **state)
{
	static const char *const names[] = { "", "A-to-B", "a-to-b ", " both",
		"a-to", "a-to-bb", "c", "A", "TCP", "tcp+", "tls", "done",
		"complete\n" };
	enum direction direction = DIRECTIONS;
	enum end end = ENDS;

	(void)state;
	for (size_t i = 0; i < sizeof(names) / sizeof(names[0]); i++) {
		assert_int_equal(direction_from_name(names[i], &direction),
		    -1);
		assert_int_equal(end_from_name(names[i], &end), -1);
	}
	assert_int_equal(direction, DIRECTIONS);
	assert_int_equal(end, ENDS);
}

static void
a_direction_says_who_sends_and_who_receives(void **state)
{
	(void)state;
	assert_int_equal(direction_sender(DIRECTION_A_TO_B), END_A);
	assert_int_equal(direction_receiver(DIRECTION_A_TO_B), END_B);
	assert_int_equal(direction_sender(DIRECTION_B_TO_A), END_B);
	assert_int_equal(direction_receiver(DIRECTION_B_TO_A), END_A);
}

static void
both_holds_either_direction_and_one_holds_itself(void **state)
{
	(void)state;
	assert_true(direction_has(DIRECTION_A_TO_B, DIRECTION_A_TO_B));
	assert_false(direction_has(DIRECTION_A_TO_B, DIRECTION_B_TO_A));
	assert_false(direction_has(DIRECTION_B_TO_A, DIRECTION_A_TO_B));
	assert_true(direction_has(DIRECTION_B_TO_A, DIRECTION_B_TO_A));
	assert_true(direction_has(DIRECTION_BOTH, DIRECTION_A_TO_B));
	assert_true(direction_has(DIRECTION_BOTH, DIRECTION_B_TO_A));
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(the_names_are_those_of_the_design),
		cmocka_unit_test(every_name_leads_back_to_its_value),
		cmocka_unit_test(the_tables_end_in_null),
		cmocka_unit_test(any_other_name_is_refused_and_nothing_is_set),
		cmocka_unit_test(a_direction_says_who_sends_and_who_receives),
		cmocka_unit_test(
		    both_holds_either_direction_and_one_holds_itself),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
