/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <string.h>

#include "conduct/exchange.h"
#include "seeded.h"

#define MS UINT64_C(1000000)

static struct exchange exchange;

static struct exchange_sample
best_of(const struct exchange *from)
{
	struct exchange_sample sample;

	assert_true(exchange_best(from, &sample));
	return sample;
}

static int
reset(void **state)
{
	(void)state;
	memset(&exchange, 0, sizeof(exchange));
	return 0;
}

static void
offset_and_delay_are_those_of_rfc_5905(void **state)
{
	static const char formula[] = "RFC 5905 section 8: theta = 1/2 * "
	    "[(T2 - T1) + (T3 - T4)], delta = (T4 - T1) - (T3 - T2)";
	static const struct {
		uint64_t t1_ns, t2_ns, t3_ns, t4_ns;
		int64_t offset_ns;
		uint64_t delay_ns;
		const char *source;
	} rows[] = {
		/* seconds 100.000, 100.055, 100.056, 100.031 */
		{ 100000 * MS, 100055 * MS, 100056 * MS, 100031 * MS,
		    40 * (int64_t)MS, 30 * MS, formula },
		{ 100000 * MS, 100015 * MS, 100015 * MS, 100030 * MS, 0,
		    30 * MS, formula },
		/* the agent's clock began later than ours */
		{ 100000 * MS, 15 * MS, 16 * MS, 100031 * MS,
		    -100000 * (int64_t)MS, 30 * MS, formula },
		/* odd nanoseconds: the halves are added before rounding */
		{ 0, 3, 3, 2, 2, 2, formula },
		{ 0, 1, 1, 1, 0, 1, formula },
		{ 10, 1, 1, 13, -10, 3, formula },
		/* the delay never vanishes: rho, the clock's precision */
		{ 5, 5, 5, 5, 0, 1, formula },
		/* an agent whose clock runs fast while it holds the beat */
		{ 0, 0, 20, 10, 5, 1, formula },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++) {
		struct exchange_sample sample;

		memset(&exchange, 0, sizeof(exchange));
		exchange_add(&exchange, rows[i].t1_ns, rows[i].t2_ns,
		    rows[i].t3_ns, rows[i].t4_ns, 0, 0);
		sample = best_of(&exchange);
		assert_int_equal(sample.offset_ns, rows[i].offset_ns);
		assert_int_equal(sample.delay_ns, rows[i].delay_ns);
	}
}

/* Civil time at t3 has aged by half the delay when it arrives. */
static void
civil_time_is_set_against_ours_at_its_arrival(void **state)
{
	(void)state;
	exchange_add(&exchange, 0, 15 * MS, 15 * MS, 30 * MS, 1000 * MS,
	    1015 * MS);
	assert_int_equal(best_of(&exchange).civil_offset_ns, 0);
	reset(NULL);
	exchange_add(&exchange, 0, 15 * MS, 15 * MS, 30 * MS, 3000 * MS,
	    1015 * MS);
	assert_int_equal(best_of(&exchange).civil_offset_ns,
	    2000 * (int64_t)MS);
	reset(NULL);
	exchange_add(&exchange, 0, 15 * MS, 15 * MS, 30 * MS, 0, 1015 * MS);
	assert_int_equal(best_of(&exchange).civil_offset_ns,
	    -1000 * (int64_t)MS);
}

static void
no_time_that_an_agent_states_overflows(void **state)
{
	static const uint64_t times[] = { 0, 1, UINT64_C(1) << 53,
		INT64_MAX, UINT64_C(1) << 63, UINT64_MAX };

	(void)state;
	for (size_t i = 0; i < 6 * 6 * 6; i++)
		exchange_add(&exchange, 10, times[i % 6], times[i / 6 % 6],
		    20, times[i / 36], 1);
	assert_true(best_of(&exchange).delay_ns >= 1);
}

static void
stamps_that_run_backwards_are_dropped(void **state)
{
	struct exchange_sample sample;

	(void)state;
	assert_false(exchange_best(&exchange, &sample));
	exchange_add(&exchange, 11, 50, 60, 10, 0, 0);
	exchange_add(&exchange, 0, 60, 59, 10, 0, 0);
	assert_int_equal(exchange.count, 0);
	assert_int_equal(exchange.largest_delay_ns, 0);
	assert_false(exchange_best(&exchange, &sample));
}

static void
the_sample_with_the_least_delay_is_used(void **state)
{
	(void)state;
	exchange_add(&exchange, 0, 100, 100, 90, 0, 0);
	exchange_add(&exchange, 0, 200, 200, 30, 0, 0);
	exchange_add(&exchange, 0, 300, 300, 31, 0, 0);
	assert_int_equal(best_of(&exchange).delay_ns, 30);
	assert_int_equal(best_of(&exchange).offset_ns, 185);
	assert_int_equal(exchange.largest_delay_ns, 90);
}

static void
only_the_last_samples_are_kept(void **state)
{
	(void)state;
	/* the best of all, and then as many as push it out */
	exchange_add(&exchange, 0, 5, 5, 10, 0, 0);
	for (uint64_t i = 0; i < EXCHANGE_KEPT - 1; i++)
		exchange_add(&exchange, 0, 500, 500, 1000 - i, 0, 0);
	assert_int_equal(best_of(&exchange).delay_ns, 10);
	exchange_add(&exchange, 0, 500, 500, 2000, 0, 0);
	assert_int_equal(best_of(&exchange).delay_ns,
	    1000 - (EXCHANGE_KEPT - 2));
	for (uint64_t i = 0; i < 3 * EXCHANGE_KEPT; i++)
		exchange_add(&exchange, 0, 3000, 3000, 5000 + i, 0, 0);
	assert_int_equal(best_of(&exchange).delay_ns,
	    5000 + 2 * EXCHANGE_KEPT);
	assert_int_equal(exchange.count, 4 * EXCHANGE_KEPT + 1);
	/* the largest of all times, for the limits */
	assert_int_equal(exchange.largest_delay_ns,
	    5000 + 3 * EXCHANGE_KEPT - 1);
}

/* RFC 5905 appendix: however the delay is shared between the ways, the offset
 * is wrong by at most half of it. */
static void
the_offset_is_wrong_by_at_most_half_the_delay(void **state)
{
	uint64_t seed = 8;

	(void)state;
	for (int i = 0; i < 2000; i++) {
		uint64_t forth_ns = seeded_between(&seed, 0, 500 * MS);
		uint64_t back_ns = seeded_between(&seed, 0, 500 * MS);
		uint64_t held_ns = seeded_between(&seed, 0, 10 * MS);
		uint64_t t1_ns = seeded_between(&seed, 0, 1000000 * MS);
		uint64_t true_ns = seeded_between(&seed, 0, 1000000 * MS);
		uint64_t t2_ns = t1_ns + forth_ns + true_ns;
		int64_t error_ns;

		reset(NULL);
		exchange_add(&exchange, t1_ns, t2_ns, t2_ns + held_ns,
		    t1_ns + forth_ns + held_ns + back_ns, 0, 0);
		error_ns = best_of(&exchange).offset_ns - (int64_t)true_ns;
		if (error_ns < 0)
			error_ns = -error_ns;
		assert_true((uint64_t)error_ns * 2 <= forth_ns + back_ns + 1);
		assert_true(best_of(&exchange).delay_ns ==
		    forth_ns + back_ns || forth_ns + back_ns == 0);
	}
	/* all of it on one way: the bound is reached */
	reset(NULL);
	exchange_add(&exchange, 0, 100 * MS, 100 * MS, 100 * MS, 0, 0);
	assert_int_equal(best_of(&exchange).offset_ns, 50 * MS);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test_setup(offset_and_delay_are_those_of_rfc_5905,
		    reset),
		cmocka_unit_test_setup(
		    civil_time_is_set_against_ours_at_its_arrival, reset),
		cmocka_unit_test_setup(no_time_that_an_agent_states_overflows,
		    reset),
		cmocka_unit_test_setup(stamps_that_run_backwards_are_dropped,
		    reset),
		cmocka_unit_test_setup(
		    the_sample_with_the_least_delay_is_used, reset),
		cmocka_unit_test_setup(only_the_last_samples_are_kept, reset),
		cmocka_unit_test_setup(
		    the_offset_is_wrong_by_at_most_half_the_delay, reset),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
