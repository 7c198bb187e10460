/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the agent of a link says, and what follows from it. */
#include <stdio.h>
#include <string.h>

#include <event2/event.h>

#include "clock.h"
#include "conduct/link_inside.h"
#include "log.h"

void
link_say_hello(struct link *link)
{
	struct wire_hello hello;

	memset(&hello, 0, sizeof(hello));
	hello.protocol = WIRE_PROTOCOL_VERSION;
	(void)snprintf(hello.role, sizeof(hello.role), "controller");
	(void)snprintf(hello.software, sizeof(hello.software), "plafond %s",
	    PLAFOND_VERSION);
	hello.beat_ns = WIRE_BEAT_NS;
	(void)snprintf(hello.local, sizeof(hello.local), "%s",
	    link->declared->data);
	(void)snprintf(hello.interface, sizeof(hello.interface), "%s",
	    link->declared->interface);
	link_send(link, wire_encode(WIRE_HELLO, &hello));
}

static int
on_hello(struct link *link, const json_t *message, struct error *err)
{
	json_int_t protocol = json_integer_value(json_object_get(message,
	    "protocol"));

	if (protocol != WIRE_PROTOCOL_VERSION)
		return error_set(err, ERROR_PEER, "it speaks version %"
		    JSON_INTEGER_FORMAT " of the control protocol, this "
		    "controller speaks %d: install the same release at both",
		    protocol, WIRE_PROTOCOL_VERSION);
	return wire_decode(WIRE_HELLO, message, &link->hello, err);
}

static int
ask_relay(struct link *link)
{
	struct wire_relay relay;

	memset(&relay, 0, sizeof(relay));
	(void)snprintf(relay.name, sizeof(relay.name), "%s",
	    link->relay_name);
	(void)event_del(link->beating);
	link_send(link, wire_encode(WIRE_RELAY, &relay));
	link_step(link, LINK_EV_RELAY);
	return 0;
}

static int
on_capability(struct link *link, const json_t *message, struct error *err)
{
	if (wire_decode(WIRE_CAPABILITY, message, &link->capability, err) ==
	    -1)
		return -1;
	link_step(link, LINK_EV_CAPABILITY);
	if (link->state != LINK_IDLE)
		return 0;
	if (link->relaying)
		return ask_relay(link);
	link_watch_silence(link);
	event_active(link->beating, EV_TIMEOUT, 0);
	return 0;
}

static int
on_beat_reply(struct link *link, const json_t *message, struct error *err)
{
	struct wire_beat_reply reply;
	uint64_t t4_ns = clock_raw_ns() - link->zero_ns;
	uint64_t utc_ns = clock_utc_ns();

	if (wire_decode(WIRE_BEAT_REPLY, message, &reply, err) == -1)
		return -1;
	exchange_add(&link->exchange, reply.t1_ns, reply.t2_ns, reply.t3_ns,
	    t4_ns, reply.utc_s * NS_PER_S + reply.utc_ns, utc_ns);
	/* the first few follow at once, for a good offset before the start */
	if (link->exchange.count < 8 && link->state == LINK_IDLE)
		event_active(link->beating, EV_TIMEOUT, 0);
	return 0;
}

static int
on_ready(struct link *link, const json_t *message, struct error *err)
{
	if (wire_decode(WIRE_READY, message, &link->ready, err) == -1)
		return -1;
	link_step(link, LINK_EV_READY);
	return 0;
}

static int
on_started(struct link *link, const json_t *message, struct error *err)
{
	(void)message;
	(void)err;
	link_step(link, LINK_EV_STARTED);
	return 0;
}

static int
on_progress(struct link *link, const json_t *message, struct error *err)
{
	struct wire_progress progress;

	if (wire_decode(WIRE_PROGRESS, message, &progress, err) == -1)
		return -1;
	if (link->state == LINK_RUNNING)
		link->callbacks.progress(link, &progress, link->arg);
	return 0;
}

static int
on_rows(struct link *link, const json_t *message, struct error *err)
{
	json_t *received;

	if (wire_decode_rows(message, link->rows, err) == -1)
		return -1;
	if (link->state == LINK_RUNNING)
		link->callbacks.rows(link, link->rows, message, link->arg);
	received = wire_encode(WIRE_ROWS_RECEIVED, &link->rows->number);
	link_send(link, received);
	return 0;
}

static int
on_measurement(struct link *link, const json_t *message, struct error *err)
{
	struct measurement measurement;

	if (wire_decode(WIRE_MEASUREMENT, message, &measurement, err) == -1)
		return -1;
	if (measurement.direction == DIRECTION_BOTH)
		return error_set(err, ERROR_PEER,
		    "a measurement of no single direction");
	if (link->state == LINK_RUNNING)
		link->callbacks.measurement(link, &measurement, link->arg);
	link_send(link, wire_encode(WIRE_MEASUREMENT_RECEIVED, NULL));
	if (link->state != LINK_RUNNING)
		return 0;
	if (link->measurements_due > 0)
		link->measurements_due--;
	if (link->measurements_due == 0)
		link_step(link, LINK_EV_MEASURED);
	return 0;
}

static int
on_reference_result(struct link *link, const json_t *message,
    struct error *err)
{
	if (wire_decode(WIRE_REFERENCE_RESULT, message, &link->reference,
	    err) == -1)
		return -1;
	link_step(link, LINK_EV_ANSWER);
	return 0;
}

/* Refusal of an identity or a version ends the connection; of a request, only
 * the request. */
static int
on_refused(struct link *link, const json_t *message, struct error *err)
{
	struct wire_refused refused;
	char text[2 * WIRE_TEXT_SIZE];
	enum error_kind kind;

	if (wire_decode(WIRE_REFUSED, message, &refused, err) == -1)
		return -1;
	kind = strcmp(refused.reason, "busy") == 0 ? ERROR_BUSY :
	    strcmp(refused.reason, "version") == 0 ? ERROR_PEER :
	    strcmp(refused.reason, "caller") == 0 ? ERROR_UNREACHABLE :
	    ERROR_REFUSED;
	(void)error_set(&link->why, kind, "refused: %s",
	    log_escape(refused.text, text, sizeof(text)));
	error_wrap(&link->why, "agent '%s' of end %s", link->declared->name,
	    end_name(link->end));
	link_step(link, LINK_EV_REFUSED);
	return 0;
}

static int
on_abort(struct link *link, const json_t *message, struct error *err)
{
	struct wire_abort abort;
	char text[2 * WIRE_TEXT_SIZE];

	if (wire_decode(WIRE_ABORT, message, &abort, err) == -1)
		return -1;
	(void)error_set(&link->why, ERROR_PEER, "%s",
	    log_escape(abort.reason, text, sizeof(text)));
	error_wrap(&link->why, "agent '%s' of end %s", link->declared->name,
	    end_name(link->end));
	link_step(link, LINK_EV_ABORT);
	return 0;
}

static int
on_relayed(struct link *link, const json_t *message, struct error *err)
{
	struct channel *inside;

	(void)message;
	link_step(link, LINK_EV_RELAYED);
	if (link->state != LINK_REACHING)
		return 0;
	inside = channel_inside(link->base, link->channel, link->tls, false,
	    link_state_limit_ms(LINK_REACHING) * NS_PER_MS,
	    &link_channel_callbacks, link, err);
	if (inside == NULL)
		return -1;
	link->channel = inside;
	link->relaying = false;
	return 0;
}

static const struct handler {
	enum wire_type type;
	int (*handle)(struct link *link, const json_t *message,
	    struct error *err);
} handlers[] = {
	{ WIRE_HELLO, on_hello },
	{ WIRE_CAPABILITY, on_capability },
	{ WIRE_BEAT_REPLY, on_beat_reply },
	{ WIRE_READY, on_ready },
	{ WIRE_STARTED, on_started },
	{ WIRE_PROGRESS, on_progress },
	{ WIRE_ROWS, on_rows },
	{ WIRE_MEASUREMENT, on_measurement },
	{ WIRE_REFERENCE_RESULT, on_reference_result },
	{ WIRE_REFUSED, on_refused },
	{ WIRE_ABORT, on_abort },
	{ WIRE_RELAYED, on_relayed },
};

static int
dispatch(struct link *link, const json_t *message, struct error *err)
{
	enum wire_type type;

	if (wire_type_of(message, &type, err) == -1)
		return -1;
	for (size_t i = 0; i < sizeof(handlers) / sizeof(handlers[0]); i++)
		if (handlers[i].type == type)
			return handlers[i].handle(link, message, err);
	return error_set(err, ERROR_PEER,
	    "message '%s' is not for a controller", wire_type_name(type));
}

static void
on_message(struct channel *channel, const json_t *message, void *arg)
{
	struct link *link = arg;
	struct error why;

	(void)channel;
	link_watch_silence(link);
	if (dispatch(link, message, &why) == -1)
		link_lose(link, &why);
}

static void
on_open(struct channel *channel, void *arg)
{
	struct link *link = arg;
	struct error why;

	if (link->child == 0 && channel_check_trust(channel, link->relaying ?
	    link->outer_identity : &link->declared->identity, &why) == -1) {
		link_lose(link, &why);
		return;
	}
	link_step(link, LINK_EV_OPEN);
	link_say_hello(link);
}

static void
on_closed(struct channel *channel, const struct error *why, void *arg)
{
	(void)channel;
	link_lose(arg, why);
}

const struct channel_callbacks link_channel_callbacks = {
	on_open, on_message, on_closed
};
