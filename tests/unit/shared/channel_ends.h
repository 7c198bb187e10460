/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * channel_ends: channels on real sockets on loopback with the real loop, all
 * ends in one process, and what each end's callbacks have seen.  Included
 * after cmocka.h.
 */
#ifndef PLAFOND_TESTS_CHANNEL_ENDS_H
#define PLAFOND_TESTS_CHANNEL_ENDS_H

#include "channel.h"
#include "clock.h"
#include "error.h"
#include "identity.h"
#include "scratch.h"

#include <errno.h>
#include <netinet/in.h>
#include <signal.h>
#include <stdbool.h>
#include <stdio.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

#include <event2/event.h>
#include <openssl/ssl.h>

#define GUARD_S 20		/* a test that hangs fails after this */
#define LIMIT_NS (10 * NS_PER_S)

enum who { NORTH, SOUTH, MIDDLE, WHOS };

struct fixture {
	struct event_base *base;
	char folder[SCRATCH_SIZE];
	struct identity *identities[WHOS];
	SSL_CTX *tls[WHOS];
};

struct relayed;

/* One end of a channel, and what its callbacks have seen. */
struct end {
	struct fixture *f;
	struct channel *channel;
	unsigned opened, messages, closed;
	uint64_t sum;			/* of "number" in all messages */
	bool in_order;			/* and each was one more */
	char text[64];			/* "text" of the latest */
	size_t text_length;
	struct error why;
	bool inside_call;		/* the test is inside a channel call */
	unsigned free_at_message, finish_at_message;	/* 0: never */
	bool free_at_open, free_at_closed;
	/* What a message makes of a relayed conversation; NULL: nothing. */
	void (*act_at_message)(struct relayed *r);
	struct relayed *relayed;
};

static inline void
forget(struct end *end)
{
	channel_free(end->channel);
	end->channel = NULL;
}

static inline void
on_open(struct channel *channel, void *arg)
{
	struct end *end = arg;

	assert_false(end->inside_call);
	end->channel = channel;
	end->opened++;
	if (end->free_at_open)
		forget(end);
}

static inline void
on_message(struct channel *channel, const json_t *message, void *arg)
{
	struct end *end = arg;
	const json_t *text = json_object_get(message, "text");
	uint64_t number = (uint64_t)json_integer_value(
	    json_object_get(message, "number"));

	assert_false(end->inside_call);
	assert_ptr_equal(channel, end->channel);
	end->messages++;
	end->in_order = number == end->messages &&
	    (end->in_order || number == 1);
	end->sum += number;
	end->text_length = json_string_length(text);
	if (text != NULL)
		(void)snprintf(end->text, sizeof(end->text), "%s",
		    json_string_value(text));
	if (end->messages == end->free_at_message)
		forget(end);
	else if (end->messages == end->finish_at_message) {
		channel_finish(end->channel);
		end->channel = NULL;
	} else if (end->act_at_message != NULL)
		end->act_at_message(end->relayed);
}

static inline void
on_closed(struct channel *channel, const struct error *why, void *arg)
{
	struct end *end = arg;

	assert_false(end->inside_call);
	if (end->channel != NULL)
		assert_ptr_equal(channel, end->channel);
	end->closed++;
	end->why = *why;
	if (end->free_at_closed)
		forget(end);
}

static const struct channel_callbacks callbacks = { on_open, on_message,
    on_closed };

static inline int
set_up(void **state)
{
	static const char *const names[] = { "north", "south", "middle" };
	struct fixture *f = calloc(1, sizeof(*f));
	struct error err;
	char folder[64];
	size_t i;

	(void)signal(SIGPIPE, SIG_IGN);
	f->base = event_base_new();
	scratch_make(f->folder);
	for (i = 0; i < WHOS; i++) {
		(void)snprintf(folder, sizeof(folder), "%s/%s", f->folder,
		    names[i]);
		assert_int_equal(identity_open(folder, names[i],
		    &f->identities[i], &err), 0);
		f->tls[i] = identity_tls_context(f->identities[i], &err);
		assert_non_null(f->tls[i]);
	}
	*state = f;
	return 0;
}

static inline int
tear_down(void **state)
{
	struct fixture *f = *state;
	size_t i;

	/* Ends by itself: nothing may be left that waits for something. */
	(void)event_base_loop(f->base, 0);
	for (i = 0; i < WHOS; i++) {
		SSL_CTX_free(f->tls[i]);
		identity_free(f->identities[i]);
	}
	event_base_free(f->base);
	scratch_remove(f->folder);
	free(f);
	return 0;
}

static inline void
on_guard(evutil_socket_t fd, short what, void *arg)
{
	(void)fd;
	(void)what;
	*(bool *)arg = true;
}

/* Turn the loop until *counter reaches `wanted`. */
static inline void
run_until(struct fixture *f, const unsigned *counter, unsigned wanted)
{
	static const struct timeval limit = { .tv_sec = GUARD_S };
	bool late = false;
	struct event *guard = evtimer_new(f->base, on_guard, &late);

	(void)event_add(guard, &limit);
	while (*counter < wanted && !late)
		(void)event_base_loop(f->base, EVLOOP_ONCE);
	event_free(guard);
	assert_false(late);
}

/* A few turns of the loop in which nothing more is expected. */
static inline void
run_idle(struct fixture *f)
{
	unsigned i;

	for (i = 0; i < 20; i++)
		(void)event_base_loop(f->base, EVLOOP_NONBLOCK);
}

static inline int
listen_any(char address[64])
{
	struct error err;
	uint16_t port;
	int fd = listen_on("127.0.0.1:0", &port, &err);

	assert_int_not_equal(fd, -1);
	(void)snprintf(address, 64, "127.0.0.1:%u", (unsigned)port);
	return fd;
}

/* A plain TCP connection to the listener, for peers of another kind. */
static inline int
plain_connection(int listener)
{
	struct sockaddr_in to;
	socklen_t size = sizeof(to);
	int fd = socket(AF_INET, SOCK_STREAM, 0);

	assert_int_equal(getsockname(listener, (struct sockaddr *)&to, &size),
	    0);
	assert_int_equal(connect(fd, (struct sockaddr *)&to, size), 0);
	return fd;
}

/* The listener does not block, so wait for the connection in the loop. */
struct acceptor {
	unsigned count;
	int fd;
};

static inline void
on_acceptable(evutil_socket_t fd, short what, void *arg)
{
	struct acceptor *acceptor = arg;

	(void)what;
	acceptor->fd = accept(fd, NULL, NULL);
	acceptor->count += acceptor->fd != -1;
}

static inline int
accept_one(struct fixture *f, int listener)
{
	struct acceptor acceptor = { .fd = -1 };
	struct event *event = event_new(f->base, listener, EV_READ |
	    EV_PERSIST, on_acceptable, &acceptor);

	(void)event_add(event, NULL);
	run_until(f, &acceptor.count, 1);
	event_free(event);
	return acceptor.fd;
}

static inline void
dial(struct fixture *f, struct end *end, enum who who, const char *address,
    uint64_t limit_ns)
{
	struct error err;

	end->f = f;
	end->inside_call = true;
	end->channel = channel_dial(f->base, address, f->tls[who], limit_ns,
	    &callbacks, end, &err);
	end->inside_call = false;
	assert_non_null(end->channel);
}

static inline void
take(struct fixture *f, struct end *end, enum who who, int fd,
    uint64_t limit_ns)
{
	struct error err;

	end->f = f;
	end->inside_call = true;
	end->channel = channel_accept(f->base, fd, f->tls[who], limit_ns,
	    &callbacks, end, &err);
	end->inside_call = false;
	assert_non_null(end->channel);
}

static inline void
connect_ends(struct fixture *f, struct end *caller, enum who calling,
    struct end *called, enum who answering)
{
	char address[64];
	int listener = listen_any(address);

	dial(f, caller, calling, address, LIMIT_NS);
	take(f, called, answering, accept_one(f, listener), LIMIT_NS);
	run_until(f, &caller->opened, 1);
	run_until(f, &called->opened, 1);
	(void)close(listener);
}

static inline void
pair_ends(struct fixture *f, struct end *left, struct end *right)
{
	struct error err;
	int fds[2];

	assert_int_equal(socketpair(AF_UNIX, SOCK_STREAM, 0, fds), 0);
	left->f = right->f = f;
	left->channel = channel_pair(f->base, fds[0], &callbacks, left, &err);
	right->channel = channel_pair(f->base, fds[1], &callbacks, right,
	    &err);
	assert_non_null(left->channel);
	assert_non_null(right->channel);
}

static inline int
send_number(struct end *end, unsigned number, const char *text)
{
	struct error err;
	int rc;

	end->inside_call = true;
	rc = channel_send(end->channel, json_pack("{s:i, s:s}", "number",
	    (int)number, "text", text), &err);
	end->inside_call = false;
	return rc;
}

/* The raw end of a socket pair whose other end is a channel. */
static inline int
raw_pair(struct fixture *f, struct end *end)
{
	struct error err;
	int fds[2];

	assert_int_equal(socketpair(AF_UNIX, SOCK_STREAM, 0, fds), 0);
	end->f = f;
	end->channel = channel_pair(f->base, fds[0], &callbacks, end, &err);
	assert_non_null(end->channel);
	return fds[1];
}

/* A message whose JSON text has exactly `size` bytes. */
static inline json_t *
message_of(size_t size)
{
	static const char around[] = "{\"number\":1,\"text\":\"\"}";
	size_t length = size - (sizeof(around) - 1);
	char *text = malloc(length);
	json_t *message;

	memset(text, 'x', length);
	message = json_pack("{s:i, s:s%}", "number", 1, "text", text, length);
	free(text);
	return message;
}

#define TEST(name) cmocka_unit_test_setup_teardown(name, set_up, tear_down)

#endif
