/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <string.h>

#include "session_state.h"

/* Short names keep the matrix readable; -- is CLOSED. */
enum {
	GR = SESSION_GREETING, ID = SESSION_IDLE, PR = SESSION_PREPARED,
	OP = SESSION_OPENING, RU = SESSION_RUNNING, RE = SESSION_REPORTING,
	ST = SESSION_STANDING, HO = SESSION_HOSTING, RL = SESSION_RELAYING,
	JO = SESSION_JOINING, __ = SESSION_CLOSED
};

/* Written out from the picture in session_state.h. */
static const struct {
	enum session_event event;
	int next[SESSION_STATE_COUNT];	/* by the state before */
} matrix[] = {
	/*		      GR  ID  PR  OP  RU  RE  ST  HO  RL  JO  closed */
	{ SESSION_EV_HELLO_CONTROLLER,
			    { ID, __, __, __, __, __, __, __, __, __, __ } },
	{ SESSION_EV_HELLO_CALLED,
			    { ST, __, __, __, __, __, __, __, __, __, __ } },
	{ SESSION_EV_HELLO_CALLER,
			    { HO, __, __, __, __, __, __, __, __, __, __ } },
	{ SESSION_EV_PREPARE,
			    { __, PR, __, __, __, __, __, __, __, __, __ } },
	/* in IDLE: a start or an abort that crossed our own abort */
	{ SESSION_EV_START, { __, ID, OP, __, __, __, __, __, __, __, __ } },
	{ SESSION_EV_OPENED,
			    { __, __, __, RU, __, __, __, __, __, __, __ } },
	{ SESSION_EV_FINISHED,
			    { __, __, __, __, RE, __, __, __, __, __, __ } },
	{ SESSION_EV_REPORTED,
			    { __, __, __, __, __, ID, __, __, __, __, __ } },
	{ SESSION_EV_RELAY, { __, RL, __, __, __, __, GR, JO, __, __, __ } },
	{ SESSION_EV_ABORT, { __, ID, ID, ID, ID, ID, __, __, __, __, __ } },
	{ SESSION_EV_TIME_UP,
			    { __, __, ID, ID, ID, ID, __, __, __, __, __ } },
	{ SESSION_EV_GONE,  { __, __, __, __, __, __, __, __, __, __, __ } },
};

static void
every_state_with_every_event_leads_where_the_picture_says(void **state)
{
	(void)state;
	assert_int_equal(sizeof(matrix) / sizeof(matrix[0]),
	    SESSION_EVENT_COUNT);
	for (size_t e = 0; e < SESSION_EVENT_COUNT; e++) {
		assert_int_equal(matrix[e].event, e);
		for (int s = 0; s < SESSION_STATE_COUNT; s++) {
			enum session_state next = session_next(
			    (enum session_state)s, matrix[e].event);

			if ((int)next != matrix[e].next[s])
				fail_msg("%s in %s leads to %s",
				    session_event_name(matrix[e].event),
				    session_state_name((enum session_state)s),
				    session_state_name(next));
		}
	}
}

static void
every_state_and_event_has_a_name_of_its_own(void **state)
{
	static const char *const states[] = { "GREETING", "IDLE", "PREPARED",
		"OPENING", "RUNNING", "REPORTING", "STANDING", "HOSTING",
		"RELAYING", "JOINING", "CLOSED" };

	(void)state;
	assert_int_equal(sizeof(states) / sizeof(states[0]),
	    SESSION_STATE_COUNT);
	for (int s = 0; s < SESSION_STATE_COUNT; s++)
		assert_string_equal(session_state_name(
		    (enum session_state)s), states[s]);
	for (int e = 0; e < SESSION_EVENT_COUNT; e++) {
		const char *name = session_event_name((enum session_event)e);

		assert_non_null(name);
		for (int k = 0; k < e; k++)
			assert_string_not_equal(name,
			    session_event_name((enum session_event)k));
	}
}

/* A token opens a stream within 10 s (design); waiting for work has no limit
 * of its own, and a trial's is computed.  Who waits for a relay (10 s) hears
 * of its failure: the relaying agent gives up before, the joining one before
 * that. */
static void
states_that_wait_for_the_peer_are_limited(void **state)
{
	static const uint64_t limits_ms[SESSION_STATE_COUNT] = {
		[SESSION_GREETING] = 10000, [SESSION_IDLE] = 0,
		[SESSION_PREPARED] = 10000, [SESSION_OPENING] = 0,
		[SESSION_RUNNING] = 0, [SESSION_REPORTING] = 10000,
		[SESSION_STANDING] = 0, [SESSION_HOSTING] = 0,
		[SESSION_RELAYING] = 8000, [SESSION_JOINING] = 5000,
		[SESSION_CLOSED] = 0,
	};

	(void)state;
	for (int s = 0; s < SESSION_STATE_COUNT; s++)
		assert_int_equal(session_state_limit_ms(
		    (enum session_state)s), limits_ms[s]);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    every_state_with_every_event_leads_where_the_picture_says),
		cmocka_unit_test(every_state_and_event_has_a_name_of_its_own),
		cmocka_unit_test(states_that_wait_for_the_peer_are_limited),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
