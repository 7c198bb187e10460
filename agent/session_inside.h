/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * session_inside: the session as its own files see it: session.c (life, machine
 * and messages), session_greeting.c (hello, trust, relaying) and
 * session_trial.c (a trial and the host's reference).
 */
#ifndef PLAFOND_SESSION_INSIDE_H
#define PLAFOND_SESSION_INSIDE_H

#include <stdbool.h>
#include <stdint.h>
#include <sys/time.h>

#include <jansson.h>

#include "agent.h"
#include "channel.h"
#include "error.h"
#include "session.h"
#include "session_state.h"
#include "wire.h"

struct part;
struct reference;

enum origin { ORIGIN_ACCEPTED, ORIGIN_DIALLED, ORIGIN_EMBEDDED };

struct session {
	struct agent *agent;		/* borrowed: outlives us */
	struct session *next;		/* in the agent's list */
	struct channel *channel;	/* owned; NULL once handed on */
	struct call *call;		/* borrowed; NULL unless we dialled */
	enum origin origin;
	bool peer_gone;			/* the channel has ended */
	enum session_state state;
	uint64_t zero_ns;		/* raw clock at the session's start */
	struct event *deadline;		/* owned; the state's longest stay */
	struct event *silence;		/* owned; nothing heard from the peer */
	struct event *beating;		/* owned; our beats to a caller */
	struct event *deferred;		/* owned; brings `pending` */
	enum session_event pending;
	bool has_pending;
	struct error why;		/* of the pending event, or the end */
	uint64_t silence_limit_ns;
	struct wire_hello peer;
	struct part *part;		/* owned; while a trial is on */
	unsigned acknowledged;		/* measurements of this trial */
	struct reference *reference;	/* owned */
	char caller[64];		/* of an agent that called us */
	char wanted[64];		/* RELAYING: the caller asked for */
	struct session *relay_to;	/* and here it is */
	uint64_t beats;
};


/* A message from the peer, decoded; -1 ends the session. */
typedef int (*session_handler_fn)(struct session *session, const void *body,
    struct error *err);

extern const struct channel_callbacks session_channel_callbacks;

/* The only way to change the state: an event, now ... */
void session_step(struct session *session, enum session_event event);
/* ... or from the loop, where we may be inside somebody's callback. */
void session_defer(struct session *session, enum session_event event,
    const struct error *why);
void session_send(struct session *session, json_t *message);
/* Tell the peer no, with the reason for a person. */
void session_refuse(struct session *session, const char *reason,
    const struct error *why);

/* session_greeting.c */
void session_say_hello(struct session *session);
int session_on_hello(struct session *session, const json_t *message,
    struct error *err);
int session_on_relay(struct session *session, const void *body,
    struct error *err);
void session_say_no_caller(struct session *session);
int session_on_relayed(struct session *session, const void *body,
    struct error *err);
void session_on_beating(int fd, short what, void *arg);

/* session_trial.c */
int session_on_prepare(struct session *session, const void *body,
    struct error *err);
int session_on_start(struct session *session, const void *body,
    struct error *err);
int session_on_rows_received(struct session *session, const void *body,
    struct error *err);
int session_on_measurement_received(struct session *session,
    const void *body, struct error *err);
int session_on_abort(struct session *session, const void *body,
    struct error *err);
int session_on_reference(struct session *session, const void *body,
    struct error *err);
bool session_in_trial(enum session_state state);
void session_end_trial(struct session *session);
void session_end_report(struct session *session);
void session_say_abort(struct session *session);

#endif
