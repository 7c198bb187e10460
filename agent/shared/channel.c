/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * channel: life, callbacks and frames.  The states are drawn in
 * channel_parts.h.
 *
 * TLS is always a filter upon a socket's bufferevent, never libevent's direct
 * form: that one waits for the socket while decrypted bytes lie in OpenSSL,
 * once a watermark has stopped it.
 */
#include "channel_parts.h"

#include "clock.h"
#include "dialer.h"
#include "tls.h"
#include "trust.h"

#include <assert.h>
#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/socket.h>

#include <event2/buffer.h>
#include <event2/bufferevent.h>
#include <event2/bufferevent_ssl.h>
#include <event2/event.h>

#include <openssl/err.h>

#define HEADER_BYTES 4
#define MESSAGES_A_TURN 16	/* so that one peer cannot hold the loop */

#define STATE_TEXT(id, text) [CHANNEL_##id] = text,
static const char *const state_texts[] = { CHANNEL_STATES(STATE_TEXT) };
#undef STATE_TEXT

static void on_turn(evutil_socket_t fd, short what, void *arg);
static void on_deadline(evutil_socket_t fd, short what, void *arg);

struct channel *
channel_new(struct event_base *base, const struct channel_callbacks *callbacks,
    void *arg, struct error *err)
{
	struct channel *c = calloc(1, sizeof(*c));

	if (c != NULL) {
		c->base = base;
		c->turn = evtimer_new(base, on_turn, c);
		c->deadline = evtimer_new(base, on_deadline, c);
		c->early = evbuffer_new();
		channel_set_callbacks(c, callbacks, arg);
	}
	if (c == NULL || c->turn == NULL || c->deadline == NULL ||
	    c->early == NULL) {
		channel_free(c);
		(void)error_set(err, ERROR_INTERNAL, "out of memory");
		return NULL;
	}
	return c;
}

static struct evbuffer *
bottom_output(const struct channel *c)
{
	return bufferevent_get_output(channel_bottom(c->bev));
}

/* Everything but the object, its strings and the peer's certificate. */
static void
drop_transport(struct channel *c)
{
	dialer_free(c->dialer);
	c->dialer = NULL;
	if (c->watch != NULL)
		(void)evbuffer_remove_cb_entry(bottom_output(c), c->watch);
	c->watch = NULL;
	if (c->bev != NULL)
		bufferevent_free(c->bev);
	c->bev = NULL;
	if (c->turn != NULL)
		(void)event_del(c->turn);
	if (c->deadline != NULL)
		(void)event_del(c->deadline);
}

void
channel_free(struct channel *c)
{
	if (c == NULL)
		return;
	drop_transport(c);
	c->state = CHANNEL_ENDED;
	memset(&c->callbacks, 0, sizeof(c->callbacks));
	if (c->depth > 0) {
		c->doomed = true;
		return;
	}
	channel_free(c->outer);
	if (c->turn != NULL)
		event_free(c->turn);
	if (c->deadline != NULL)
		event_free(c->deadline);
	if (c->early != NULL)
		evbuffer_free(c->early);
	SSL_CTX_free(c->tls);
	X509_free(c->peer);
	sk_X509_pop_free(c->chain, X509_free);
	free(c);
}

void
channel_enter(struct channel *c)
{
	c->depth++;
	assert(c->depth > 0);
}

void
channel_leave(struct channel *c)
{
	if (--c->depth == 0 && c->doomed)
		channel_free(c);
}

void
channel_wake(struct channel *c)
{
	static const struct timeval at_once;

	/* A timer, not event_active: sockets get their turn in between.  Adding
	 * it once more would take a due one off the loop's list again. */
	if (!event_pending(c->turn, EV_TIMEOUT, NULL))
		(void)event_add(c->turn, &at_once);
}

void
channel_set_deadline(struct channel *c, uint64_t limit_ns)
{
	struct timeval limit = clock_timeval(limit_ns);

	(void)event_add(c->deadline, &limit);
}

void
channel_set_callbacks(struct channel *c,
    const struct channel_callbacks *callbacks, void *arg)
{
	c->callbacks = *callbacks;
	c->arg = arg;
}

void
channel_lend(struct channel *c)
{
	c->state = CHANNEL_LENT;
	memset(&c->callbacks, 0, sizeof(c->callbacks));
	(void)event_del(c->turn);
	(void)event_del(c->deadline);
}

struct bufferevent *
channel_bottom(struct bufferevent *bev)
{
	struct bufferevent *below;

	while ((below = bufferevent_get_underlying(bev)) != NULL)
		bev = below;
	return bev;
}

size_t
channel_unsent(struct bufferevent *bev)
{
	size_t size = 0;

	for (; bev != NULL; bev = bufferevent_get_underlying(bev))
		size += evbuffer_get_length(bufferevent_get_output(bev));
	return size;
}

void
channel_end(struct channel *c, const struct error *why)
{
	struct error copy = *why;

	if (c->state == CHANNEL_ENDED)
		return;
	drop_transport(c);
	c->state = CHANNEL_ENDED;
	if (c->callbacks.closed != NULL)
		c->callbacks.closed(c, &copy, c->arg);
}

/* 1: *out is the next message (owned); 0: none is complete. */
static int
next_message(struct channel *c, json_t **out, struct error *err)
{
	struct evbuffer *input = bufferevent_get_input(c->bev);
	unsigned char header[HEADER_BYTES];
	size_t length;
	const char *frame;
	int rc;

	if (evbuffer_copyout(input, header, sizeof(header)) <
	    (ev_ssize_t)sizeof(header))
		return 0;
	/* The header alone is looked at; the size says what lies behind it. */
	rc = frame_length(header, evbuffer_get_length(input), &length, err);
	if (rc != 1)
		return rc;
	frame = (const char *)evbuffer_pullup(input,
	    (ev_ssize_t)(HEADER_BYTES + length));
	if (frame == NULL)
		return error_set(err, ERROR_INTERNAL, "out of memory");
	if (frame_decode(frame + HEADER_BYTES, length, out, err) == -1)
		return -1;
	(void)evbuffer_drain(input, HEADER_BYTES + length);
	return 1;
}

/* The peer has gone and all complete messages are delivered. */
static void
end_of_input(struct channel *c)
{
	size_t left = evbuffer_get_length(bufferevent_get_input(c->bev));

	if (c->why.kind == ERROR_NONE && left > 0)
		(void)error_set(&c->why, ERROR_PEER, "the connection to %s "
		    "ended inside a message", c->peer_address);
	channel_end(c, &c->why);
}

/* The callback may free, finish, lend or replace anything: only an OPEN
 * channel goes on. */
static void
deliver(struct channel *c)
{
	struct error err;
	json_t *message = NULL;
	unsigned n;
	int rc;

	for (n = 0; n < MESSAGES_A_TURN && c->state == CHANNEL_OPEN; n++) {
		rc = next_message(c, &message, &err);
		if (rc == -1) {
			error_wrap(&err, "from %s", c->peer_address);
			channel_end(c, &err);
			return;
		}
		if (rc == 0)
			break;
		if (c->callbacks.message != NULL)
			c->callbacks.message(c, message, c->arg);
		json_decref(message);
	}
	if (c->state != CHANNEL_OPEN)
		return;
	if (n == MESSAGES_A_TURN)
		channel_wake(c);
	else if (c->over)
		end_of_input(c);
}

static void
announce_open(struct channel *c)
{
	c->state = CHANNEL_OPEN;
	(void)event_del(c->deadline);
	(void)bufferevent_write_buffer(c->bev, c->early);
	if (c->callbacks.open != NULL)
		c->callbacks.open(c, c->arg);
	deliver(c);
}

static int
keep_peer(struct channel *c, struct error *err)
{
	SSL *ssl = bufferevent_openssl_get_ssl(c->bev);
	STACK_OF(X509) *chain = SSL_get_peer_cert_chain(ssl);

	c->peer = SSL_get1_peer_certificate(ssl);
	if (c->peer == NULL)
		return error_set(err, ERROR_PEER,
		    "%s has shown no certificate", c->peer_address);
	if (chain != NULL)
		c->chain = X509_chain_up_ref(chain);
	return identity_certificate_digest(c->peer, c->peer_digest, err);
}

/* The bytes must be in the kernel, then the TLS layers say that they end, then
 * TCP does.  The peer's own end is awaited: closing a socket with unread bytes
 * sends a reset, which can take our last message with it. */
static void
go_on_finishing(struct channel *c)
{
	struct bufferevent *bev;

	(void)evbuffer_drain(bufferevent_get_input(c->bev), SIZE_MAX);
	if (c->broken || (c->over && c->half_closed)) {
		channel_free(c);
		return;
	}
	/* The peer's last word in TLS has made libevent stop writing. */
	if (c->over)
		(void)bufferevent_enable(c->bev, EV_WRITE);
	if (channel_unsent(c->bev) > 0)
		return;
	if (!c->shut) {
		c->shut = true;
		for (bev = c->bev; bev != NULL;
		    bev = bufferevent_get_underlying(bev)) {
			SSL *ssl = bufferevent_openssl_get_ssl(bev);

			if (ssl != NULL)
				(void)SSL_shutdown(ssl);
		}
		tls_forget_errors();
	}
	if (channel_unsent(c->bev) > 0)
		return;
	if (!c->half_closed)
		(void)shutdown(bufferevent_getfd(channel_bottom(c->bev)),
		    SHUT_WR);
	c->half_closed = true;
	if (c->over)
		channel_free(c);
}

static void
on_sent(struct evbuffer *output, const struct evbuffer_cb_info *info,
    void *arg)
{
	(void)output;
	if (info->n_deleted > 0)
		channel_wake(arg);
}

static void
go_on_handshaking(struct channel *c)
{
	if (c->greeted && keep_peer(c, &c->why) == 0)
		announce_open(c);
	else if (c->greeted || c->over)
		channel_end(c, &c->why);
}

static void
on_turn(evutil_socket_t fd, short what, void *arg)
{
	struct channel *c = arg;

	(void)fd;
	(void)what;
	channel_enter(c);
	if (c->state == CHANNEL_FINISHING)
		go_on_finishing(c);
	else if (c->why.kind != ERROR_NONE && !c->over)
		channel_end(c, &c->why);	/* the peer does not read */
	else if (c->state == CHANNEL_HANDSHAKING)
		go_on_handshaking(c);
	else if (c->state == CHANNEL_OPENING)
		announce_open(c);
	else
		deliver(c);
	channel_leave(c);
}

static void
on_deadline(evutil_socket_t fd, short what, void *arg)
{
	struct channel *c = arg;
	struct error why;

	(void)fd;
	(void)what;
	channel_enter(c);
	if (c->state == CHANNEL_FINISHING) {
		channel_free(c);
	} else {
		(void)error_set(&why, ERROR_UNREACHABLE,
		    "no answer from %s within %g s %s", c->peer_address,
		    (double)c->limit_ns / (double)NS_PER_S,
		    state_texts[c->state]);
		channel_end(c, &why);
	}
	channel_leave(c);
}

/* OpenSSL's first complaint.  libevent hands them out last one first, and at
 * the end its own kind of error, which is of no library. */
static unsigned long
first_tls_error(struct bufferevent *bev)
{
	unsigned long code, first = 0;

	while ((code = bufferevent_get_openssl_error(bev)) != 0)
		if (ERR_GET_LIB(code) != 0 || first == 0)
			first = code;
	return first;
}

/* Why the transport ended; ERROR_NONE where the peer closed it in order.
 * Called inside libevent's failed step, so that errno is still its own. */
static void
explain(struct channel *c, short what, struct error *why)
{
	int number = EVUTIL_SOCKET_ERROR();
	unsigned long code = c->tls != NULL ? first_tls_error(c->bev) : 0;
	char reason[200];

	memset(why, 0, sizeof(*why));
	if ((what & BEV_EVENT_ERROR) != 0 && code != 0)
		(void)error_set(why, ERROR_PEER, "TLS with %s failed %s: %s",
		    c->peer_address, state_texts[c->state],
		    tls_reason(code, reason, sizeof(reason)));
	else if ((what & BEV_EVENT_ERROR) != 0) {
		errno = number;
		(void)error_errno(why, ERROR_UNREACHABLE,
		    "the connection to %s broke %s", c->peer_address,
		    state_texts[c->state]);
	} else if (c->state == CHANNEL_HANDSHAKING)
		(void)error_set(why, ERROR_PEER, "%s closed the connection %s",
		    c->peer_address, state_texts[c->state]);
}

/* Both callbacks may come from deep inside libevent, even while the user
 * sends: they note what happened, and on_turn acts on it. */
static void
on_read(struct bufferevent *bev, void *arg)
{
	(void)bev;
	channel_wake(arg);
}

static void
on_event(struct bufferevent *bev, short what, void *arg)
{
	struct channel *c = arg;

	(void)bev;
	if ((what & BEV_EVENT_CONNECTED) != 0)
		c->greeted = true;
	else if (!c->over) {
		c->over = true;
		c->broken = (what & BEV_EVENT_ERROR) != 0;
		if (c->why.kind == ERROR_NONE)
			explain(c, what, &c->why);
	}
	channel_wake(c);
}

void
channel_attach(struct channel *c, struct bufferevent *bev)
{
	c->bev = bev;
	bufferevent_setcb(bev, on_read, NULL, on_event, c);
	/* One whole frame fits, and then the peer has to wait. */
	bufferevent_setwatermark(bev, EV_READ, 0,
	    HEADER_BYTES + CHANNEL_FRAME_MAX);
	(void)bufferevent_enable(bev, EV_READ | EV_WRITE);
}

/* Whether `size` more bytes may be queued. */
static int
check_room(struct channel *c, size_t size, struct error *err)
{
	size_t queued = evbuffer_get_length(c->early) + channel_unsent(c->bev);

	if (size == 0 || size > CHANNEL_FRAME_MAX)
		return error_set(err, ERROR_INTERNAL, "a message of %zu bytes; "
		    "allowed: 1 to %d", size, CHANNEL_FRAME_MAX);
	if (c->state > CHANNEL_OPEN || c->why.kind != ERROR_NONE)
		return error_set(err, ERROR_PEER,
		    "the connection to %s is closed", c->peer_address);
	if (queued + HEADER_BYTES + size <= CHANNEL_OUTPUT_MAX)
		return 0;
	(void)error_set(err, ERROR_PEER,
	    "%s does not read: %zu bytes wait to be sent", c->peer_address,
	    queued);
	c->why = *err;
	channel_wake(c);		/* `closed` comes from the loop */
	return -1;
}

int
channel_send(struct channel *c, json_t *message, struct error *err)
{
	struct evbuffer *output = c->early;
	unsigned char header[HEADER_BYTES];
	char *text;
	size_t size;
	int rc;

	assert(message != NULL);
	text = json_dumps(message, JSON_COMPACT);
	json_decref(message);
	size = text != NULL ? strlen(text) : 0;
	rc = check_room(c, size, err);
	if (rc == 0) {
		if (c->state == CHANNEL_OPEN)
			output = bufferevent_get_output(c->bev);
		header[0] = (unsigned char)(size >> 24 & 0xff);
		header[1] = (unsigned char)(size >> 16 & 0xff);
		header[2] = (unsigned char)(size >> 8 & 0xff);
		header[3] = (unsigned char)(size & 0xff);
		(void)evbuffer_add(output, header, sizeof(header));
		(void)evbuffer_add(output, text, size);
	}
	free(text);
	return rc;
}

void
channel_finish(struct channel *c)
{
	if (c == NULL)
		return;
	if ((c->state != CHANNEL_OPEN && c->state != CHANNEL_OPENING) ||
	    c->why.kind != ERROR_NONE) {
		channel_free(c);
		return;
	}
	(void)bufferevent_write_buffer(c->bev, c->early);
	memset(&c->callbacks, 0, sizeof(c->callbacks));
	c->state = CHANNEL_FINISHING;
	bufferevent_setwatermark(c->bev, EV_READ, 0, 0);
	(void)evbuffer_drain(bufferevent_get_input(c->bev), SIZE_MAX);
	c->watch = evbuffer_add_cb(bottom_output(c), on_sent, c);
	channel_set_deadline(c, CHANNEL_FINISH_NS);
	channel_wake(c);
}

int
channel_check_trust(const struct channel *c, const struct trust *trust,
    struct error *err)
{
	if (c->tls == NULL)
		return 0;
	if (c->peer == NULL)
		return error_set(err, ERROR_REFUSED,
		    "the peer has not shown its identity yet");
	return trust_check_chain(trust, c->peer, c->chain, clock_utc_ns(),
	    err);
}

const char *
channel_peer_digest(const struct channel *c)
{
	return c->peer_digest;
}

const char *
channel_peer_address(const struct channel *c)
{
	return c->peer_address;
}

const char *
channel_local_address(const struct channel *c)
{
	return c->local_address;
}
