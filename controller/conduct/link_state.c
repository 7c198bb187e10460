/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "conduct/link_state.h"

#include <stddef.h>

static const struct move {
	enum link_state from;
	enum link_event event;
	enum link_state to;
} moves[] = {
	{ LINK_REACHING, LINK_EV_OPEN, LINK_GREETING },
	{ LINK_GREETING, LINK_EV_CAPABILITY, LINK_IDLE },
	{ LINK_IDLE, LINK_EV_RELAY, LINK_RELAYING },
	{ LINK_RELAYING, LINK_EV_RELAYED, LINK_REACHING },
	{ LINK_IDLE, LINK_EV_PREPARE, LINK_PREPARING },
	{ LINK_PREPARING, LINK_EV_READY, LINK_READY },
	{ LINK_PREPARING, LINK_EV_REFUSED, LINK_IDLE },
	{ LINK_PREPARING, LINK_EV_ABORT, LINK_IDLE },
	{ LINK_READY, LINK_EV_START, LINK_STARTING },
	{ LINK_READY, LINK_EV_ABORT, LINK_IDLE },
	{ LINK_STARTING, LINK_EV_STARTED, LINK_RUNNING },
	{ LINK_STARTING, LINK_EV_REFUSED, LINK_IDLE },
	{ LINK_STARTING, LINK_EV_ABORT, LINK_IDLE },
	{ LINK_RUNNING, LINK_EV_MEASURED, LINK_IDLE },
	{ LINK_RUNNING, LINK_EV_ABORT, LINK_IDLE },
	{ LINK_IDLE, LINK_EV_ASK, LINK_ASKING },
	{ LINK_ASKING, LINK_EV_ANSWER, LINK_IDLE },
	{ LINK_ASKING, LINK_EV_REFUSED, LINK_IDLE },
	{ LINK_ASKING, LINK_EV_ABORT, LINK_IDLE },
	/* messages that crossed our abort */
	{ LINK_IDLE, LINK_EV_ABORT, LINK_IDLE },
	{ LINK_IDLE, LINK_EV_READY, LINK_IDLE },
	{ LINK_IDLE, LINK_EV_STARTED, LINK_IDLE },
	{ LINK_IDLE, LINK_EV_MEASURED, LINK_IDLE },
	{ LINK_IDLE, LINK_EV_ANSWER, LINK_IDLE },
	{ LINK_IDLE, LINK_EV_REFUSED, LINK_IDLE },
};

#define STATE_NAME(name, ms) [LINK_##name] = #name,
static const char *const state_names[] = { LINK_STATES(STATE_NAME) };
#define STATE_LIMIT(name, ms) [LINK_##name] = (ms),
static const uint64_t state_limits_ms[] = { LINK_STATES(STATE_LIMIT) };
#define EVENT_NAME(name) [LINK_EV_##name] = #name,
static const char *const event_names[] = { LINK_EVENTS(EVENT_NAME) };

enum link_state
link_next(enum link_state state, enum link_event event)
{
	for (size_t i = 0; i < sizeof(moves) / sizeof(moves[0]); i++)
		if (moves[i].from == state && moves[i].event == event)
			return moves[i].to;
	return LINK_GONE;
}

const char *
link_state_name(enum link_state state)
{
	return state_names[state];
}

const char *
link_event_name(enum link_event event)
{
	return event_names[event];
}

uint64_t
link_state_limit_ms(enum link_state state)
{
	return state_limits_ms[state];
}
