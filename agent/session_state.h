/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * session_state: the machine of one control conversation, as a table.  Pure.
 *
 *             hello of a controller          prepare        start
 *   GREETING ------------------------> IDLE --------> PREPARED --> OPENING
 *      |  ^                             ^ ^              |            | opened
 *      |  |                       reported \  abort,     |            v
 *      |  | relay (TLS inside)          |   \ time up    |         RUNNING
 *      |  |                             |    `-----------+------------|
 *      |  STANDING (we called an agent) |                             |
 *      |                           REPORTING <------------------------'
 *      |                                            finished
 *      `-> HOSTING (an agent called us) --relay--> JOINING
 *          IDLE --relay--> RELAYING (the controller who asked)
 *
 * Any other pair of state and event leads to CLOSED.
 */
#ifndef PLAFOND_SESSION_STATE_H
#define PLAFOND_SESSION_STATE_H

#include <stdint.h>

/* state, longest stay in ms (0: no limit of its own) */
#define SESSION_STATES(X)	\
	X(GREETING, 10000)	\
	X(IDLE, 0)		\
	X(PREPARED, 10000)	\
	X(OPENING, 0)		/* within the 10 s of PREPARED: tokens age */ \
	X(RUNNING, 0)		\
	X(REPORTING, 10000)	\
	X(STANDING, 0)		\
	X(HOSTING, 0)		\
	X(RELAYING, 8000)	\
	X(JOINING, 5000)	\
	X(CLOSED, 0)
#define SESSION_STATE_ENUM(name, ms) SESSION_##name,
enum session_state { SESSION_STATES(SESSION_STATE_ENUM) SESSION_STATE_COUNT };
#undef SESSION_STATE_ENUM

#define SESSION_EVENTS(X)	\
	X(HELLO_CONTROLLER)	/* a trusted controller greeted */	\
	X(HELLO_CALLED)		/* the agent that we called greeted */	\
	X(HELLO_CALLER)		/* a known agent called us */		\
	X(PREPARE)							\
	X(START)							\
	X(OPENED)		/* all streams are open */		\
	X(FINISHED)		/* all transfers are over */		\
	X(REPORTED)		/* all measurements are acknowledged */	\
	X(RELAY)							\
	X(ABORT)		/* this trial failed, here or there */	\
	X(TIME_UP)							\
	X(GONE)			/* connection ended, silence, bad message */
#define SESSION_EVENT_ENUM(name) SESSION_EV_##name,
enum session_event { SESSION_EVENTS(SESSION_EVENT_ENUM) SESSION_EVENT_COUNT };
#undef SESSION_EVENT_ENUM

enum session_state session_next(enum session_state state,
    enum session_event event);
const char *session_state_name(enum session_state state);
const char *session_event_name(enum session_event event);
uint64_t session_state_limit_ms(enum session_state state);

#endif
