/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * link_state: the machine of the controller's connection to one agent.  Pure.
 *
 *   REACHING --open--> GREETING --capability--> IDLE
 *                        ^                       |  relay (asked of the other
 *                        `------- RELAYING <-----'  agent; TLS inside)
 *
 *   IDLE --prepare--> PREPARING --ready--> READY --start--> STARTING
 *     ^                                                        | started
 *     |  measured                                              v
 *     `----------------------------------------------------- RUNNING
 *   IDLE --ask--> ASKING --answer--> IDLE
 *   abort leads from any of these to IDLE, refusal from PREPARING, STARTING and
 *   ASKING; in IDLE what the agent said before it heard of our abort changes
 *   nothing.
 *   Any other pair of state and event, and every TIME_UP, leads to GONE.
 */
#ifndef PLAFOND_LINK_STATE_H
#define PLAFOND_LINK_STATE_H

#include <stdint.h>

/* state, longest stay in ms (0: no limit of its own) */
#define LINK_STATES(X)		\
	X(REACHING, 10000)	\
	X(GREETING, 10000)	\
	X(IDLE, 0)		\
	X(RELAYING, 10000)	\
	X(PREPARING, 10000)	\
	X(READY, 0)		\
	X(STARTING, 10000)	\
	X(RUNNING, 0)		\
	X(ASKING, 10000)	\
	X(GONE, 0)
#define LINK_STATE_ENUM(name, ms) LINK_##name,
enum link_state { LINK_STATES(LINK_STATE_ENUM) LINK_STATE_COUNT };
#undef LINK_STATE_ENUM

#define LINK_EVENTS(X)		\
	X(OPEN)			\
	X(CAPABILITY)		\
	X(RELAY)		\
	X(RELAYED)		\
	X(PREPARE)		\
	X(READY)		\
	X(START)		\
	X(STARTED)		\
	X(MEASURED)	/* every measurement of this trial is here */	\
	X(ASK)		/* for the host's reference */			\
	X(ANSWER)							\
	X(ABORT)	/* here or there: the trial is off */		\
	X(REFUSED)							\
	X(TIME_UP)							\
	X(LOST)		/* connection ended, silence, bad message */
#define LINK_EVENT_ENUM(name) LINK_EV_##name,
enum link_event { LINK_EVENTS(LINK_EVENT_ENUM) LINK_EVENT_COUNT };
#undef LINK_EVENT_ENUM

enum link_state link_next(enum link_state state, enum link_event event);
const char *link_state_name(enum link_state state);
const char *link_event_name(enum link_event event);
uint64_t link_state_limit_ms(enum link_state state);

#endif
