/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <string.h>

#include "conduct/link_state.h"

/* Short names keep the matrix readable; -- is GONE. */
enum {
	RC = LINK_REACHING, GR = LINK_GREETING, ID = LINK_IDLE,
	RL = LINK_RELAYING, PR = LINK_PREPARING, RE = LINK_READY,
	ST = LINK_STARTING, RU = LINK_RUNNING, AS = LINK_ASKING,
	__ = LINK_GONE
};

/* Written out from the picture in link_state.h.  In IDLE: what the agent said
 * before it heard our abort. */
static const struct {
	enum link_event event;
	int next[LINK_STATE_COUNT];	/* by the state before */
} matrix[] = {
	/*			     RC  GR  ID  RL  PR  RE  ST  RU  AS  gone */
	{ LINK_EV_OPEN,		   { GR, __, __, __, __, __, __, __, __, __ } },
	{ LINK_EV_CAPABILITY,	   { __, ID, __, __, __, __, __, __, __, __ } },
	{ LINK_EV_RELAY,	   { __, __, RL, __, __, __, __, __, __, __ } },
	{ LINK_EV_RELAYED,	   { __, __, __, RC, __, __, __, __, __, __ } },
	{ LINK_EV_PREPARE,	   { __, __, PR, __, __, __, __, __, __, __ } },
	{ LINK_EV_READY,	   { __, __, ID, __, RE, __, __, __, __, __ } },
	{ LINK_EV_START,	   { __, __, __, __, __, ST, __, __, __, __ } },
	{ LINK_EV_STARTED,	   { __, __, ID, __, __, __, RU, __, __, __ } },
	{ LINK_EV_MEASURED,	   { __, __, ID, __, __, __, __, ID, __, __ } },
	{ LINK_EV_ASK,		   { __, __, AS, __, __, __, __, __, __, __ } },
	{ LINK_EV_ANSWER,	   { __, __, ID, __, __, __, __, __, ID, __ } },
	{ LINK_EV_ABORT,	   { __, __, ID, __, ID, ID, ID, ID, ID, __ } },
	{ LINK_EV_REFUSED,	   { __, __, ID, __, ID, __, ID, __, ID, __ } },
	{ LINK_EV_TIME_UP,	   { __, __, __, __, __, __, __, __, __, __ } },
	{ LINK_EV_LOST,		   { __, __, __, __, __, __, __, __, __, __ } },
};

static void
every_state_with_every_event_leads_where_the_picture_says(void **state)
{
	(void)state;
	assert_int_equal(sizeof(matrix) / sizeof(matrix[0]),
	    LINK_EVENT_COUNT);
	for (size_t e = 0; e < LINK_EVENT_COUNT; e++) {
		assert_int_equal(matrix[e].event, e);
		for (int s = 0; s < LINK_STATE_COUNT; s++) {
			enum link_state next = link_next((enum link_state)s,
			    matrix[e].event);

			if ((int)next != matrix[e].next[s])
				fail_msg("%s in %s leads to %s",
				    link_event_name(matrix[e].event),
				    link_state_name((enum link_state)s),
				    link_state_name(next));
		}
	}
}

static void
every_state_and_event_has_a_name_of_its_own(void **state)
{
	static const char *const states[] = { "REACHING", "GREETING", "IDLE",
		"RELAYING", "PREPARING", "READY", "STARTING", "RUNNING",
		"ASKING", "GONE" };

	(void)state;
	assert_int_equal(sizeof(states) / sizeof(states[0]),
	    LINK_STATE_COUNT);
	for (int s = 0; s < LINK_STATE_COUNT; s++)
		assert_string_equal(link_state_name((enum link_state)s),
		    states[s]);
	for (int e = 0; e < LINK_EVENT_COUNT; e++) {
		const char *name = link_event_name((enum link_event)e);

		assert_non_null(name);
		for (int k = 0; k < e; k++)
			assert_string_not_equal(name,
			    link_event_name((enum link_event)k));
	}
}

/* READY lasts as long as the other agent prepares; no limit of time is longer
 * than WIRE_LIMIT_MAX_NS. */
static void
states_that_wait_for_the_agent_are_limited(void **state)
{
	static const uint64_t limits_ms[LINK_STATE_COUNT] = {
		[LINK_REACHING] = 10000, [LINK_GREETING] = 10000,
		[LINK_IDLE] = 0, [LINK_RELAYING] = 10000,
		[LINK_PREPARING] = 10000, [LINK_READY] = 0,
		[LINK_STARTING] = 10000, [LINK_RUNNING] = 0,
		[LINK_ASKING] = 10000, [LINK_GONE] = 0,
	};

	(void)state;
	for (int s = 0; s < LINK_STATE_COUNT; s++)
		assert_int_equal(link_state_limit_ms((enum link_state)s),
		    limits_ms[s]);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    every_state_with_every_event_leads_where_the_picture_says),
		cmocka_unit_test(every_state_and_event_has_a_name_of_its_own),
		cmocka_unit_test(states_that_wait_for_the_agent_are_limited),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
