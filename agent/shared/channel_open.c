/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * channel_open: the four ways to a channel.  All but the socket pair end in
 * channel.c's on_event, once the TLS handshake is done.
 */
#include "channel_parts.h"

#include "address.h"
#include "dialer.h"
#include "tls.h"

#include <assert.h>
#include <fcntl.h>
#include <netinet/in.h>
#include <netinet/tcp.h>
#include <stdio.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

#include <event2/bufferevent.h>
#include <event2/bufferevent_ssl.h>
#include <event2/event.h>

/* The socket's bufferevent (owned); fd is closed on failure too. */
static struct bufferevent *
take_socket(struct event_base *base, int fd, struct error *err)
{
	struct bufferevent *bev = NULL;

	if (evutil_make_socket_nonblocking(fd) == 0 &&
	    evutil_make_socket_closeonexec(fd) == 0)
		bev = bufferevent_socket_new(base, fd, BEV_OPT_CLOSE_ON_FREE);
	if (bev == NULL) {
		(void)error_set(err, ERROR_INTERNAL,
		    "cannot take socket %d into the event loop", fd);
		(void)close(fd);
	}
	return bev;
}

static void
note_addresses(struct channel *c, int fd)
{
	struct sockaddr_storage at;
	struct sockaddr *any = (struct sockaddr *)&at;
	socklen_t size = sizeof(at);

	/* -1: the peer has gone already, and the next read says so. */
	if (c->peer_address[0] == '\0')
		(void)snprintf(c->peer_address, sizeof(c->peer_address),
		    "a peer that has gone");
	if (getpeername(fd, any, &size) == 0)
		address_text(any, size, true, c->peer_address,
		    sizeof(c->peer_address));
	size = sizeof(at);
	if (getsockname(fd, any, &size) == 0)
		address_text(any, size, false, c->local_address,
		    sizeof(c->local_address));
}

/* Put TLS upon `below`, which stays the caller's on failure. */
static int
start_tls(struct channel *c, struct bufferevent *below, bool as_server,
    struct error *err)
{
	SSL *ssl = SSL_new(c->tls);
	struct bufferevent *bev;

	if (ssl == NULL)
		return tls_error(err, ERROR_INTERNAL, "cannot start TLS");
	bev = bufferevent_openssl_filter_new(c->base, below, ssl, as_server ?
	    BUFFEREVENT_SSL_ACCEPTING : BUFFEREVENT_SSL_CONNECTING,
	    BEV_OPT_CLOSE_ON_FREE);
	if (bev == NULL)
		return error_set(err, ERROR_INTERNAL, "cannot start TLS");
	/* Every frame has its length and every conversation its end, so a
	 * missing close_notify takes nothing away unseen. */
	bufferevent_openssl_set_allow_dirty_shutdown(bev, 1);
	c->state = CHANNEL_HANDSHAKING;
	channel_attach(c, bev);
	/* The filter waits for `below` to move before its first step. */
	bufferevent_trigger(below, EV_READ | EV_WRITE,
	    BEV_TRIG_IGNORE_WATERMARKS | BEV_TRIG_DEFER_CALLBACKS);
	return 0;
}

static int
start_tls_on_socket(struct channel *c, int fd, bool as_server,
    struct error *err)
{
	static const int yes = 1;
	struct bufferevent *bev;

	/* Beats are small and must not wait for acknowledgements. */
	(void)setsockopt(fd, IPPROTO_TCP, TCP_NODELAY, &yes, sizeof(yes));
	note_addresses(c, fd);
	bev = take_socket(c->base, fd, err);
	if (bev == NULL)
		return -1;
	if (start_tls(c, bev, as_server, err) == -1) {
		bufferevent_free(bev);
		return -1;
	}
	return 0;
}

static void
use_tls(struct channel *c, SSL_CTX *tls, uint64_t open_limit_ns)
{
	(void)SSL_CTX_up_ref(tls);
	c->tls = tls;
	c->limit_ns = open_limit_ns;
	channel_set_deadline(c, open_limit_ns);
}

static void
on_dialed(int fd, const struct error *why, void *arg)
{
	struct channel *c = arg;
	struct error err;

	channel_enter(c);
	if (fd == -1)
		channel_end(c, why);
	else {
		dialer_free(c->dialer);
		c->dialer = NULL;
		if (start_tls_on_socket(c, fd, false, &err) == -1)
			channel_end(c, &err);
	}
	channel_leave(c);
}

struct channel *
channel_dial(struct event_base *base, const char *address, SSL_CTX *tls,
    uint64_t open_limit_ns, const struct channel_callbacks *callbacks,
    void *arg, struct error *err)
{
	struct channel *c = channel_new(base, callbacks, arg, err);

	if (c == NULL)
		return NULL;
	c->state = CHANNEL_CONNECTING;
	(void)snprintf(c->peer_address, sizeof(c->peer_address), "%s",
	    address);
	c->dialer = dialer_new(base, address, on_dialed, c, err);
	if (c->dialer == NULL) {
		channel_free(c);
		return NULL;
	}
	use_tls(c, tls, open_limit_ns);
	return c;
}

struct channel *
channel_accept(struct event_base *base, int fd, SSL_CTX *tls,
    uint64_t open_limit_ns, const struct channel_callbacks *callbacks,
    void *arg, struct error *err)
{
	struct channel *c = channel_new(base, callbacks, arg, err);

	if (c == NULL) {
		(void)close(fd);
		return NULL;
	}
	use_tls(c, tls, open_limit_ns);
	if (start_tls_on_socket(c, fd, true, err) == -1) {
		channel_free(c);
		return NULL;
	}
	return c;
}

struct channel *
channel_pair(struct event_base *base, int fd,
    const struct channel_callbacks *callbacks, void *arg, struct error *err)
{
	struct channel *c = channel_new(base, callbacks, arg, err);
	struct bufferevent *bev;

	if (c == NULL) {
		(void)close(fd);
		return NULL;
	}
	(void)snprintf(c->peer_address, sizeof(c->peer_address),
	    "socket pair");
	bev = take_socket(base, fd, err);
	if (bev == NULL) {
		channel_free(c);
		return NULL;
	}
	c->state = CHANNEL_OPENING;
	channel_attach(c, bev);
	channel_wake(c);
	return c;
}

struct channel *
channel_inside(struct event_base *base, struct channel *outer, SSL_CTX *tls,
    bool as_server, uint64_t open_limit_ns,
    const struct channel_callbacks *callbacks, void *arg, struct error *err)
{
	struct channel *c;

	if (outer->state != CHANNEL_OPEN || outer->over) {
		(void)error_set(err, ERROR_UNREACHABLE,
		    "the connection to %s is closed", outer->peer_address);
		return NULL;
	}
	c = channel_new(base, callbacks, arg, err);
	if (c == NULL)
		return NULL;
	memcpy(c->peer_address, outer->peer_address, sizeof(c->peer_address));
	memcpy(c->local_address, outer->local_address,
	    sizeof(c->local_address));
	use_tls(c, tls, open_limit_ns);
	if (start_tls(c, outer->bev, as_server, err) == -1) {
		channel_free(c);
		return NULL;
	}
	channel_lend(outer);
	outer->bev = NULL;
	c->outer = outer;
	return c;
}
