/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "session_state.h"

#include <stddef.h>

static const struct move {
	enum session_state from;
	enum session_event event;
	enum session_state to;
} moves[] = {
	{ SESSION_GREETING, SESSION_EV_HELLO_CONTROLLER, SESSION_IDLE },
	{ SESSION_GREETING, SESSION_EV_HELLO_CALLED, SESSION_STANDING },
	{ SESSION_GREETING, SESSION_EV_HELLO_CALLER, SESSION_HOSTING },
	{ SESSION_IDLE, SESSION_EV_PREPARE, SESSION_PREPARED },
	{ SESSION_IDLE, SESSION_EV_RELAY, SESSION_RELAYING },
	/* messages that crossed our abort */
	{ SESSION_IDLE, SESSION_EV_START, SESSION_IDLE },
	{ SESSION_IDLE, SESSION_EV_ABORT, SESSION_IDLE },
	{ SESSION_PREPARED, SESSION_EV_START, SESSION_OPENING },
	{ SESSION_PREPARED, SESSION_EV_ABORT, SESSION_IDLE },
	{ SESSION_PREPARED, SESSION_EV_TIME_UP, SESSION_IDLE },
	{ SESSION_OPENING, SESSION_EV_OPENED, SESSION_RUNNING },
	{ SESSION_OPENING, SESSION_EV_ABORT, SESSION_IDLE },
	{ SESSION_OPENING, SESSION_EV_TIME_UP, SESSION_IDLE },
	{ SESSION_RUNNING, SESSION_EV_FINISHED, SESSION_REPORTING },
	{ SESSION_RUNNING, SESSION_EV_ABORT, SESSION_IDLE },
	{ SESSION_RUNNING, SESSION_EV_TIME_UP, SESSION_IDLE },
	{ SESSION_REPORTING, SESSION_EV_REPORTED, SESSION_IDLE },
	{ SESSION_REPORTING, SESSION_EV_ABORT, SESSION_IDLE },
	{ SESSION_REPORTING, SESSION_EV_TIME_UP, SESSION_IDLE },
	{ SESSION_STANDING, SESSION_EV_RELAY, SESSION_GREETING },
	{ SESSION_HOSTING, SESSION_EV_RELAY, SESSION_JOINING },
};

#define STATE_NAME(name, ms) [SESSION_##name] = #name,
static const char *const state_names[] = { SESSION_STATES(STATE_NAME) };
#define STATE_LIMIT(name, ms) [SESSION_##name] = (ms),
static const uint64_t state_limits_ms[] = { SESSION_STATES(STATE_LIMIT) };
#define EVENT_NAME(name) [SESSION_EV_##name] = #name,
static const char *const event_names[] = { SESSION_EVENTS(EVENT_NAME) };

enum session_state
session_next(enum session_state state, enum session_event event)
{
	for (size_t i = 0; i < sizeof(moves) / sizeof(moves[0]); i++)
		if (moves[i].from == state && moves[i].event == event)
			return moves[i].to;
	return SESSION_CLOSED;
}

const char *
session_state_name(enum session_state state)
{
	return state_names[state];
}

const char *
session_event_name(enum session_event event)
{
	return event_names[event];
}

uint64_t
session_state_limit_ms(enum session_state state)
{
	return state_limits_ms[state];
}
