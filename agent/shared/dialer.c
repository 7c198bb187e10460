/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * dialer:
 *
 *   (name) looking up --> connecting to each address in turn --> done
 *   (literal) -----------------^
 *
 * The resolver answers a cancelled request later and from the loop, so what
 * it holds on to (struct lookup) may outlive the dialer.
 */
#include "dialer.h"

#include "channel.h"
#include "error.h"

#include <errno.h>
#include <netinet/in.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

#include <event2/dns.h>
#include <event2/event.h>
#include <event2/util.h>

#define RESOLVER_FILE "/etc/resolv.conf"

struct lookup {
	struct event_base *base;		/* borrowed: outlives us */
	struct evdns_base *dns;			/* owned */
	struct evdns_getaddrinfo_request *request;	/* NULL: answered */
	struct dialer *dialer;			/* borrowed; NULL: it is gone */
};

struct dialer {
	struct event_base *base;	/* borrowed: outlives us */
	struct lookup *lookup;		/* owns itself; NULL: none runs */
	struct evutil_addrinfo *list;	/* owned */
	struct evutil_addrinfo *next;	/* borrowed: in list */
	struct event *step;		/* owned: go on from the loop */
	struct event *writable;		/* owned: of fd */
	int fd;				/* being connected, or -1 */
	struct error last;		/* why the latest address failed */
	char address[300];		/* as it was given, for messages */
	dialer_done_fn done;
	void *arg;
};

static const struct timeval at_once;

static void
close_attempt(struct dialer *d)
{
	if (d->writable != NULL)
		event_free(d->writable);
	d->writable = NULL;
	if (d->fd != -1)
		(void)close(d->fd);
	d->fd = -1;
}

static void on_writable(evutil_socket_t fd, short what, void *arg);

static int
start_attempt(struct dialer *d, const struct evutil_addrinfo *to)
{
	d->fd = socket(to->ai_family, SOCK_STREAM | SOCK_CLOEXEC |
	    SOCK_NONBLOCK, 0);
	if (d->fd != -1 && (connect(d->fd, to->ai_addr, to->ai_addrlen) == 0 ||
	    errno == EINPROGRESS || errno == EINTR)) {
		d->writable = event_new(d->base, d->fd, EV_WRITE, on_writable,
		    d);
		if (d->writable != NULL && event_add(d->writable, NULL) == 0)
			return 0;
	}
	(void)error_errno(&d->last, ERROR_UNREACHABLE, "cannot connect to %s",
	    d->address);
	close_attempt(d);
	return -1;
}

static void
try_next(struct dialer *d)
{
	while (d->next != NULL) {
		const struct evutil_addrinfo *to = d->next;

		d->next = to->ai_next;
		if (start_attempt(d, to) == 0)
			return;
	}
	d->done(-1, &d->last, d->arg);
}

static void
on_writable(evutil_socket_t fd, short what, void *arg)
{
	struct dialer *d = arg;
	int failure = 0;
	socklen_t size = sizeof(failure);

	(void)what;
	if (getsockopt(fd, SOL_SOCKET, SO_ERROR, &failure, &size) == -1)
		failure = errno;
	if (failure == 0) {
		d->fd = -1;		/* the callee's from here on */
		close_attempt(d);
		d->done((int)fd, NULL, d->arg);
		return;
	}
	errno = failure;
	(void)error_errno(&d->last, ERROR_UNREACHABLE, "cannot connect to %s",
	    d->address);
	close_attempt(d);
	try_next(d);
}

static void
on_step(evutil_socket_t fd, short what, void *arg)
{
	(void)fd;
	(void)what;
	try_next(arg);
}

/* The resolver is still in our caller's frames: free it a turn later. */
static void
free_lookup(evutil_socket_t fd, short what, void *arg)
{
	struct lookup *lookup = arg;

	(void)fd;
	(void)what;
	evdns_base_free(lookup->dns, 0);
	free(lookup);
}

/* May come from inside evdns_getaddrinfo too, for names in the hosts file. */
static void
on_answer(int result, struct evutil_addrinfo *list, void *arg)
{
	struct lookup *lookup = arg;
	struct dialer *d = lookup->dialer;

	lookup->request = NULL;
	if (d == NULL) {
		if (list != NULL)
			evutil_freeaddrinfo(list);
	} else {
		d->lookup = NULL;
		d->list = d->next = list;
		if (result != 0)
			(void)error_set(&d->last, ERROR_UNREACHABLE,
			    "cannot find the address of %s: %s", d->address,
			    evutil_gai_strerror(result));
		(void)event_add(d->step, &at_once);
	}
	(void)event_base_once(lookup->base, -1, EV_TIMEOUT, free_lookup,
	    lookup, &at_once);
}

static int
start_lookup(struct dialer *d, const char *host, const char *port,
    struct evutil_addrinfo *hints, struct error *err)
{
	struct lookup *lookup = calloc(1, sizeof(*lookup));
	struct evdns_getaddrinfo_request *request;

	if (lookup != NULL)
		lookup->dns = evdns_base_new(d->base,
		    EVDNS_BASE_DISABLE_WHEN_INACTIVE);
	if (lookup == NULL || lookup->dns == NULL) {
		free(lookup);
		return error_set(err, ERROR_INTERNAL, "cannot start the look-up"
		    " of %s", d->address);
	}
	/* Reads the hosts file too; without name servers that is all. */
	(void)evdns_base_resolv_conf_parse(lookup->dns, DNS_OPTIONS_ALL,
	    RESOLVER_FILE);
	lookup->base = d->base;
	lookup->dialer = d;
	d->lookup = lookup;
	request = evdns_getaddrinfo(lookup->dns, host, port, hints, on_answer,
	    lookup);
	/* NULL: on_answer has run, and lookup lives until the next turn. */
	if (request != NULL)
		lookup->request = request;
	return 0;
}

static int
start(struct dialer *d, struct error *err)
{
	struct evutil_addrinfo hints = { .ai_family = AF_UNSPEC,
	    .ai_socktype = SOCK_STREAM, .ai_protocol = IPPROTO_TCP,
	    .ai_flags = EVUTIL_AI_NUMERICHOST | EVUTIL_AI_NUMERICSERV };
	char host[256], digits[8];
	uint16_t port;

	if (address_split(d->address, 0, host, sizeof(host), &port, err) == -1)
		return -1;
	if (port == 0)
		return error_set(err, ERROR_INPUT, "'%s': the port is missing; "
		    "allowed: HOST:PORT, [IPv6]:PORT", d->address);
	(void)snprintf(digits, sizeof(digits), "%u", (unsigned)port);
	if (evutil_getaddrinfo(host, digits, &hints, &d->list) == 0) {
		d->next = d->list;
		(void)event_add(d->step, &at_once);
		return 0;
	}
	d->list = NULL;
	hints.ai_flags = EVUTIL_AI_NUMERICSERV;
	return start_lookup(d, host, digits, &hints, err);
}

struct dialer *
dialer_new(struct event_base *base, const char *address, dialer_done_fn done,
    void *arg, struct error *err)
{
	struct dialer *d = calloc(1, sizeof(*d));

	if (d != NULL)
		d->step = evtimer_new(base, on_step, d);
	if (d == NULL || d->step == NULL) {
		free(d);
		(void)error_set(err, ERROR_INTERNAL, "out of memory");
		return NULL;
	}
	d->base = base;
	d->fd = -1;
	d->done = done;
	d->arg = arg;
	(void)snprintf(d->address, sizeof(d->address), "%s", address);
	(void)error_set(&d->last, ERROR_UNREACHABLE, "%s has no address",
	    d->address);
	if (start(d, err) == -1) {
		dialer_free(d);
		return NULL;
	}
	return d;
}

void
dialer_free(struct dialer *d)
{
	if (d == NULL)
		return;
	if (d->lookup != NULL) {
		d->lookup->dialer = NULL;
		if (d->lookup->request != NULL)
			evdns_getaddrinfo_cancel(d->lookup->request);
	}
	close_attempt(d);
	event_free(d->step);
	if (d->list != NULL)
		evutil_freeaddrinfo(d->list);
	free(d);
}
