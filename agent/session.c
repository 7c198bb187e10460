/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "session.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <event2/event.h>

#include "clock.h"
#include "log.h"
#include "part.h"
#include "reference.h"
#include "session_inside.h"

void
session_defer(struct session *session, enum session_event event,
    const struct error *why)
{
	if (session->has_pending)
		return;
	session->has_pending = true;
	session->pending = event;
	session->why = *why;
	event_active(session->deferred, EV_TIMEOUT, 0);
}

void
session_send(struct session *session, json_t *message)
{
	struct error why;

	if (session->channel == NULL) {
		json_decref(message);
		return;
	}
	if (channel_send(session->channel, message, &why) == -1)
		session_defer(session, SESSION_EV_GONE, &why);
}

void
session_refuse(struct session *session, const char *reason,
    const struct error *why)
{
	struct wire_refused refused;
	char text[1024];

	memset(&refused, 0, sizeof(refused));
	(void)snprintf(refused.reason, sizeof(refused.reason), "%s", reason);
	(void)snprintf(refused.text, sizeof(refused.text), "%s",
	    error_text(why, text, sizeof(text)));
	log_warning("refused", "peer=%s reason=%s text=\"%s\"",
	    channel_peer_address(session->channel), reason, refused.text);
	session_send(session, wire_encode(WIRE_REFUSED, &refused));
}

static void
watch_silence(struct session *session)
{
	struct timeval limit = clock_timeval(session->silence_limit_ns);

	if (session->silence_limit_ns != 0)
		(void)event_add(session->silence, &limit);
}


/* The only place that changes the state; it sets the timers too. */
static void
enter(struct session *session, enum session_state state)
{
	uint64_t limit_ns = session_state_limit_ms(state) * NS_PER_MS;
	struct timeval limit;

	if (session_in_trial(session->state) && !session_in_trial(state))
		session_end_trial(session);
	session->state = state;
	/* the tokens of PREPARED are good until its limit, not longer */
	if (state == SESSION_OPENING)
		return;
	(void)event_del(session->deadline);
	if (state == SESSION_RUNNING)
		limit_ns = part_limit_ns(session->part);
	limit = clock_timeval(limit_ns);
	if (limit_ns != 0)
		(void)event_add(session->deadline, &limit);
	/* a controller that waits to be joined has stopped to beat */
	if (state == SESSION_RELAYING)
		(void)event_del(session->silence);
	if (state == SESSION_CLOSED)
		session_free(session);
}

void
session_step(struct session *session, enum session_event event)
{
	enum session_state next = session_next(session->state, event);

	log_debug("session", "state=%s event=%s next=%s",
	    session_state_name(session->state), session_event_name(event),
	    session_state_name(next));
	enter(session, next);
}

static void
on_deferred(evutil_socket_t fd, short what, void *arg)
{
	struct session *session = arg;
	bool finished = session->pending == SESSION_EV_FINISHED;

	(void)fd;
	(void)what;
	session->has_pending = false;
	if (session->pending == SESSION_EV_ABORT &&
	    session_in_trial(session->state))
		session_say_abort(session);
	session_step(session, session->pending);
	if (finished)
		session_end_report(session);
}

static void
on_deadline(evutil_socket_t fd, short what, void *arg)
{
	struct session *session = arg;

	(void)fd;
	(void)what;
	(void)error_set(&session->why, ERROR_PEER,
	    "state %s lasted longer than its limit",
	    session_state_name(session->state));
	if (session_in_trial(session->state))
		session_say_abort(session);
	else if (session->state == SESSION_RELAYING)
		session_say_no_caller(session);
	session_step(session, SESSION_EV_TIME_UP);
}

static void
on_silence(evutil_socket_t fd, short what, void *arg)
{
	struct session *session = arg;

	(void)fd;
	(void)what;
	log_warning("peer_silent", "peer=%s limit_ms=%lu",
	    channel_peer_address(session->channel),
	    (unsigned long)(session->silence_limit_ns / NS_PER_MS));
	session_step(session, SESSION_EV_GONE);
}

/* --- messages ---------------------------------------------------------- */


static int
on_beat(struct session *session, const void *body, struct error *err)
{
	const struct wire_beat *beat = body;
	uint64_t arrival_ns = clock_raw_ns() - session->zero_ns;
	uint64_t utc_ns;
	struct wire_beat_reply reply = {
		.number = beat->number,
		.t1_ns = beat->t1_ns,
		.t2_ns = arrival_ns,
	};

	(void)err;
	session->silence_limit_ns = wire_limit_ns(NS_PER_S,
	    beat->largest_round_trip_ns, session->peer.beat_ns);
	utc_ns = clock_utc_ns();
	reply.utc_s = utc_ns / NS_PER_S;
	reply.utc_ns = utc_ns % NS_PER_S;
	reply.t3_ns = clock_raw_ns() - session->zero_ns;
	session_send(session, wire_encode(WIRE_BEAT_REPLY, &reply));
	return 0;
}


static const struct handler {
	enum wire_type type;
	int (*handle)(struct session *session, const void *body,
	    struct error *err);
} handlers[] = {
	{ WIRE_BEAT, on_beat },
	{ WIRE_PREPARE, session_on_prepare },
	{ WIRE_START, session_on_start },
	{ WIRE_ROWS_RECEIVED, session_on_rows_received },
	{ WIRE_MEASUREMENT_RECEIVED, session_on_measurement_received },
	{ WIRE_REFERENCE, session_on_reference },
	{ WIRE_RELAY, session_on_relay },
	{ WIRE_RELAYED, session_on_relayed },
	{ WIRE_ABORT, session_on_abort },
};

static int
dispatch(struct session *session, enum wire_type type, const json_t *message,
    struct error *err)
{
	for (size_t i = 0; i < sizeof(handlers) / sizeof(handlers[0]); i++) {
		void *body;
		int rc;

		if (handlers[i].type != type)
			continue;
		body = calloc(1, wire_size(type) + 1);
		if (body == NULL)
			return error_errno(err, ERROR_INTERNAL, "a message");
		rc = wire_decode(type, message, body, err);
		if (rc == 0)
			rc = handlers[i].handle(session, body, err);
		free(body);
		return rc;
	}
	return error_set(err, ERROR_PEER, "message '%s' is not for an agent",
	    wire_type_name(type));
}

static void
on_message(struct channel *channel, const json_t *message, void *arg)
{
	struct session *session = arg;
	enum wire_type type;
	struct error why;
	int rc;

	watch_silence(session);
	rc = wire_type_of(message, &type, &why);
	if (rc == 0 && type == WIRE_BEAT_REPLY)
		return;
	if (rc == 0 && type == WIRE_REFUSED) {
		struct wire_refused refused = { .text = "" };
		char text[2 * WIRE_TEXT_SIZE];

		(void)wire_decode(WIRE_REFUSED, message, &refused, &why);
		log_warning("refused_by_peer", "peer=%s text=\"%s\"",
		    channel_peer_address(channel),
		    log_escape(refused.text, text, sizeof(text)));
		session_step(session, SESSION_EV_GONE);
		return;
	}
	if (rc == 0 && type == WIRE_HELLO)
		rc = session_on_hello(session, message, &why);
	else if (rc == 0 && session->state == SESSION_GREETING)
		rc = error_set(&why, ERROR_PEER, "'%s' before hello",
		    wire_type_name(type));
	else if (rc == 0)
		rc = dispatch(session, type, message, &why);
	if (rc == -1) {
		char text[1024], escaped[2048];

		log_warning("session_failed", "reason=\"%s\"", log_escape(
		    error_text(&why, text, sizeof(text)), escaped,
		    sizeof(escaped)));
		session_step(session, SESSION_EV_GONE);
	}
}

static void
on_open(struct channel *channel, void *arg)
{
	struct session *session = arg;
	struct error why;

	if (session->origin == ORIGIN_DIALLED && channel_check_trust(channel,
	    &session->call->policy->trust, &why) == -1) {
		log_warning("call_refused", "address=%s reason=\"%s\"",
		    session->call->policy->address, why.cause);
		session_step(session, SESSION_EV_GONE);
		return;
	}
	session_say_hello(session);
}

static void
on_closed(struct channel *channel, const struct error *why, void *arg)
{
	struct session *session = arg;
	char text[1024], escaped[2048];

	session->peer_gone = true;
	if (why->kind != ERROR_NONE)
		log_info("session_closed", "peer=%s reason=\"%s\"",
		    channel_peer_address(channel), log_escape(error_text(why,
		    text, sizeof(text)), escaped, sizeof(escaped)));
	session_step(arg, SESSION_EV_GONE);
}

const struct channel_callbacks session_channel_callbacks = {
	on_open, on_message, on_closed
};

/* --- life -------------------------------------------------------------- */

static struct session *
session_new(struct agent *agent, enum origin origin)
{
	struct session *session = calloc(1, sizeof(*session));

	if (session == NULL)
		return NULL;
	session->agent = agent;
	session->origin = origin;
	session->zero_ns = clock_raw_ns();
	session->deadline = event_new(agent->base, -1, 0, on_deadline,
	    session);
	session->silence = event_new(agent->base, -1, 0, on_silence, session);
	session->beating = event_new(agent->base, -1, 0, session_on_beating,
	    session);
	session->deferred = event_new(agent->base, -1, 0, on_deferred,
	    session);
	session->next = agent->sessions;
	agent->sessions = session;
	agent->sessions_count++;
	if (session->deadline == NULL || session->silence == NULL ||
	    session->beating == NULL || session->deferred == NULL) {
		session_free(session);
		return NULL;
	}
	return session;
}

static int
session_begin(struct session *session, struct channel *channel)
{
	if (channel == NULL) {
		session_free(session);
		return -1;
	}
	session->channel = channel;
	enter(session, SESSION_GREETING);
	return 0;
}

int
session_accept(struct agent *agent, int fd, struct error *err)
{
	struct session *session = session_new(agent, ORIGIN_ACCEPTED);

	if (session == NULL)
		return error_errno(err, ERROR_INTERNAL, "a session");
	return session_begin(session, channel_accept(agent->base, fd,
	    agent->tls, session_state_limit_ms(SESSION_GREETING) * NS_PER_MS,
	    &session_channel_callbacks, session, err));
}

int
session_dial(struct agent *agent, struct call *call, struct error *err)
{
	struct session *session = session_new(agent, ORIGIN_DIALLED);

	if (session == NULL)
		return error_errno(err, ERROR_INTERNAL, "a session");
	if (session_begin(session, channel_dial(agent->base,
	    call->policy->address, agent->tls, session_state_limit_ms(
	    SESSION_GREETING) * NS_PER_MS, &session_channel_callbacks, session,
	    err)) == -1)
		return -1;
	session->call = call;
	call->session = session;
	return 0;
}

int
session_embed(struct agent *agent, int fd, struct error *err)
{
	struct session *session = session_new(agent, ORIGIN_EMBEDDED);

	if (session == NULL)
		return error_errno(err, ERROR_INTERNAL, "a session");
	return session_begin(session, channel_pair(agent->base, fd,
	    &session_channel_callbacks, session, err));
}

/* Whoever waits for this session as a relay's other side waits in vain. */
static void
forget_session(struct session *session)
{
	struct agent *agent = session->agent;
	struct session **at = &agent->sessions;

	while (*at != session)
		at = &(*at)->next;
	*at = session->next;
	agent->sessions_count--;
	for (struct session *s = agent->sessions; s != NULL; s = s->next)
		if (s->relay_to == session)
			s->relay_to = NULL;
}

void
session_free(struct session *session)
{
	struct call *call = session->call;
	struct agent *agent = session->agent;

	session_end_trial(session);
	forget_session(session);
	reference_free(session->reference);
	/* what is queued (a refusal, say) still goes out */
	if (session->peer_gone)
		channel_free(session->channel);
	else if (session->channel != NULL)
		channel_finish(session->channel);
	if (session->deadline != NULL)
		event_free(session->deadline);
	if (session->silence != NULL)
		event_free(session->silence);
	if (session->beating != NULL)
		event_free(session->beating);
	if (session->deferred != NULL)
		event_free(session->deferred);
	if (session->origin == ORIGIN_EMBEDDED) {
		agent->ended = true;
		(void)event_base_loopexit(agent->base, NULL);
	}
	free(session);
	if (call != NULL)
		call_ended(call);
}
