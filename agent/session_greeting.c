/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Who greets whom, who is trusted, and joining a controller with a caller. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <event2/event.h>

#include "clock.h"
#include "host.h"
#include "log.h"
#include "relay.h"
#include "session_inside.h"

void
session_say_hello(struct session *session)
{
	struct wire_hello hello;

	memset(&hello, 0, sizeof(hello));
	hello.protocol = WIRE_PROTOCOL_VERSION;
	(void)snprintf(hello.role, sizeof(hello.role), "agent");
	(void)snprintf(hello.software, sizeof(hello.software),
	    "plafond-agent %s", PLAFOND_VERSION);
	(void)snprintf(hello.name, sizeof(hello.name), "%s",
	    session->agent->policy.name);
	hello.beat_ns = WIRE_BEAT_IDLE_NS;
	session_send(session, wire_encode(WIRE_HELLO, &hello));
}

static void
say_capability(struct session *session)
{
	const struct policy *policy = &session->agent->policy;
	struct wire_capability *capability = calloc(1, sizeof(*capability));

	if (capability == NULL)
		return;
	host_read_facts(session->peer.local, session->peer.interface,
	    &capability->host);
	wire_trial_members(capability->members, sizeof(capability->members));
	host_congestion_controls(capability->congestion_controls,
	    sizeof(capability->congestion_controls));
	capability->streams_max = TRIAL_STREAMS_MAX;
	capability->longest_trial_ns = policy->longest_trial_ns;
	capability->highest_rate_bps = policy->highest_rate_bps;
	capability->data_port = policy->data_port != 0 ?
	    policy->data_port : 1;
	session_send(session, wire_encode(WIRE_CAPABILITY, capability));
	free(capability);
}

/* May this controller command us? */
static int
check_controller(struct session *session, struct error *err)
{
	const struct policy *policy = &session->agent->policy;

	if (session->origin == ORIGIN_EMBEDDED)
		return 0;
	if (session->origin == ORIGIN_DIALLED)	/* checked when it opened */
		return 0;
	for (size_t i = 0; i < policy->controllers_count; i++)
		if (channel_check_trust(session->channel,
		    &policy->controllers[i].trust, err) == 0)
			return 0;
	/* one rule: its own reason (an expired certificate, say) helps more */
	if (policy->controllers_count == 1 &&
	    policy->controllers[0].trust.authority[0] != '\0')
		return -1;
	return error_set(err, ERROR_REFUSED, "this agent's policy does not "
	    "name %s among its controllers",
	    channel_peer_digest(session->channel));
}

static int
check_caller(struct session *session, struct error *err)
{
	const struct policy *policy = &session->agent->policy;

	for (size_t i = 0; i < policy->callers_count; i++)
		if (strcmp(policy->callers[i].name, session->peer.name) == 0)
			return channel_check_trust(session->channel,
			    &policy->callers[i].trust, err);
	return error_set(err, ERROR_REFUSED, "this agent's policy does not "
	    "name '%.60s' among its callers", session->peer.name);
}

/* Join controllers that wait with callers that are there. */
static void
match_callers(struct agent *agent)
{
	for (struct session *asker = agent->sessions; asker != NULL;
	    asker = asker->next) {
		struct session *caller = agent->sessions;
		struct wire_relay relay;

		if (asker->state != SESSION_RELAYING ||
		    asker->relay_to != NULL)
			continue;
		while (caller != NULL && (caller->state != SESSION_HOSTING ||
		    strcmp(caller->caller, asker->wanted) != 0))
			caller = caller->next;
		if (caller == NULL)
			continue;
		memset(&relay, 0, sizeof(relay));
		(void)snprintf(relay.name, sizeof(relay.name), "%s",
		    asker->wanted);
		session_send(caller, wire_encode(WIRE_RELAY, &relay));
		asker->relay_to = caller;
		session_step(caller, SESSION_EV_RELAY);
	}
}

static int
greet(struct session *session, struct error *err)
{
	bool controller = strcmp(session->peer.role, "controller") == 0;

	session->silence_limit_ns = wire_limit_ns(NS_PER_S, 0,
	    session->peer.beat_ns);
	if (controller) {
		if (check_controller(session, err) == -1)
			return -1;
		log_info("controller", "peer=%s identity=%s",
		    channel_peer_address(session->channel),
		    channel_peer_digest(session->channel));
		say_capability(session);
		session_step(session, SESSION_EV_HELLO_CONTROLLER);
		return 0;
	}
	if (session->origin == ORIGIN_DIALLED) {
		log_info("standing_by", "peer=%s",
		    channel_peer_address(session->channel));
		session_step(session, SESSION_EV_HELLO_CALLED);
		return 0;
	}
	if (check_caller(session, err) == -1)
		return -1;
	(void)snprintf(session->caller, sizeof(session->caller), "%s",
	    session->peer.name);
	log_info("caller", "peer=%s name=%s",
	    channel_peer_address(session->channel), session->caller);
	session_step(session, SESSION_EV_HELLO_CALLER);
	event_active(session->beating, EV_TIMEOUT, 0);
	match_callers(session->agent);
	return 0;
}

int
session_on_hello(struct session *session, const json_t *message,
    struct error *err)
{
	json_int_t protocol = json_integer_value(json_object_get(message,
	    "protocol"));

	if (session->state != SESSION_GREETING)
		return error_set(err, ERROR_PEER, "a second hello");
	if (protocol != WIRE_PROTOCOL_VERSION) {
		(void)error_set(err, ERROR_PEER, "the peer speaks version %"
		    JSON_INTEGER_FORMAT " of the control protocol, this agent "
		    "speaks %d", protocol, WIRE_PROTOCOL_VERSION);
		session_refuse(session, "version", err);
		return -1;
	}
	if (wire_decode(WIRE_HELLO, message, &session->peer, err) == -1)
		return -1;
	if (greet(session, err) == 0)
		return 0;
	session_refuse(session, "identity", err);
	return -1;
}

/* --- relaying ---------------------------------------------------------- */

void
session_on_beating(evutil_socket_t fd, short what, void *arg)
{
	struct session *session = arg;
	struct timeval spacing = clock_timeval(WIRE_BEAT_IDLE_NS);
	struct wire_beat beat = {
		.number = ++session->beats,
		.t1_ns = clock_raw_ns() - session->zero_ns,
	};

	(void)fd;
	(void)what;
	if (session->state != SESSION_HOSTING)
		return;
	session_send(session, wire_encode(WIRE_BEAT, &beat));
	(void)event_add(session->beating, &spacing);
}

/* A controller asks to be joined with an agent that calls us; it may be about
 * to call again. */
static int
on_relay_asked(struct session *session, const struct wire_relay *relay)
{
	(void)snprintf(session->wanted, sizeof(session->wanted), "%s",
	    relay->name);
	session_step(session, SESSION_EV_RELAY);
	match_callers(session->agent);
	return 0;
}

void
session_say_no_caller(struct session *session)
{
	(void)error_set(&session->why, ERROR_UNREACHABLE,
	    "no agent named '%s' has called this agent", session->wanted);
	session_refuse(session, "caller", &session->why);
}

/* We stand by at an agent, and a controller wants us: answer, then speak TLS
 * with it inside; from then on as if it had dialled us. */
static int
on_inside_open(struct session *session, struct error *err)
{
	struct channel *inside;

	session_send(session, wire_encode(WIRE_RELAYED, NULL));
	inside = channel_inside(session->agent->base, session->channel,
	    session->agent->tls, true, session_state_limit_ms(
	    SESSION_GREETING) * NS_PER_MS, &session_channel_callbacks, session,
	    err);
	if (inside == NULL)
		return -1;
	session->channel = inside;
	session->origin = ORIGIN_ACCEPTED;
	session->silence_limit_ns = 0;
	(void)event_del(session->silence);
	session_step(session, SESSION_EV_RELAY);
	return 0;
}

int
session_on_relay(struct session *session, const void *body, struct error *err)
{
	if (session->state == SESSION_STANDING)
		return on_inside_open(session, err);
	if (session->state == SESSION_IDLE)
		return on_relay_asked(session, body);
	return error_set(err, ERROR_PEER, "relay is out of turn");
}

/* The caller is ready: join it with whoever asked, and let both go. */
int
session_on_relayed(struct session *session, const void *body, struct error *err)
{
	struct agent *agent = session->agent;
	struct session *asker;

	(void)body;
	for (asker = agent->sessions; asker != NULL; asker = asker->next)
		if (asker->state == SESSION_RELAYING &&
		    asker->relay_to == session)
			break;
	if (session->state != SESSION_JOINING || asker == NULL)
		return error_set(err, ERROR_PEER, "relayed is out of turn");
	session_send(asker, wire_encode(WIRE_RELAYED, NULL));
	if (relay_start(&agent->relays, asker->channel, session->channel,
	    err) == -1)
		return -1;
	asker->channel = NULL;
	session->channel = NULL;
	session_free(asker);
	session_step(session, SESSION_EV_GONE);
	return 0;
}

