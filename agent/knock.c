/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <assert.h>
#include <errno.h>
#include <stdlib.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

#include <event2/event.h>

#include "door.h"
#include "error.h"
#include "greeting.h"

/* One connection on its way:
 * connecting -> greeting sent -> answered (handed over). */
struct attempt {
	struct knock *knock;		/* borrowed: outlives us */
	struct event *event;		/* owned; NULL: handed over */
	int fd;
	struct opening opening;
	bool greeted;
};

struct knock {
	struct attempt *attempts;	/* owned */
	size_t count;
	struct event *failing;	/* owned; brings `failed` from the loop */
	bool broken;
	struct error why;
	char peer[64];
	uint16_t port;
	opened_fn opened;
	void (*failed)(const struct error *why, void *arg);
	void *arg;
};

static void
attempt_drop(struct attempt *attempt)
{
	if (attempt->event != NULL)
		event_free(attempt->event);
	attempt->event = NULL;
	if (attempt->fd != -1)
		(void)close(attempt->fd);
	attempt->fd = -1;
}

static void
on_failing(evutil_socket_t fd, short what, void *arg)
{
	struct knock *knock = arg;

	(void)fd;
	(void)what;
	knock->failed(&knock->why, knock->arg);
}

/* Fail all of them; the callback comes from the loop. */
static void
knock_break(struct knock *knock, int sys_errno, const char *what)
{
	if (knock->broken)
		return;
	knock->broken = true;
	errno = sys_errno;
	if (sys_errno != 0)
		(void)error_errno(&knock->why, ERROR_UNREACHABLE,
		    "data connection to %s port %u: %s", knock->peer,
		    knock->port, what);
	else
		(void)error_set(&knock->why, ERROR_UNREACHABLE,
		    "data connection to %s port %u: %s", knock->peer,
		    knock->port, what);
	for (size_t i = 0; i < knock->count; i++)
		attempt_drop(&knock->attempts[i]);
	event_active(knock->failing, EV_TIMEOUT, 0);
}

static void
send_greeting(struct attempt *attempt)
{
	unsigned char greeting[GREETING_SIZE];
	int sys_errno = 0;
	socklen_t length = sizeof(sys_errno);

	(void)getsockopt(attempt->fd, SOL_SOCKET, SO_ERROR, &sys_errno,
	    &length);
	if (sys_errno != 0) {
		knock_break(attempt->knock, sys_errno, "connect");
		return;
	}
	memcpy(greeting, GREETING_MARK, GREETING_MARK_SIZE);
	memcpy(greeting + GREETING_MARK_SIZE, attempt->opening.token,
	    TRIAL_TOKEN_BYTES);
	/* a new connection always has room for 24 octets */
	if (send(attempt->fd, greeting, sizeof(greeting), MSG_NOSIGNAL) !=
	    (ssize_t)sizeof(greeting))
		knock_break(attempt->knock, errno, "greeting");
}

static void
receive_answer(struct attempt *attempt)
{
	struct knock *knock = attempt->knock;
	unsigned char answer;
	ssize_t n = recv(attempt->fd, &answer, 1, 0);
	int fd = attempt->fd;

	if (n == -1 && (errno == EAGAIN || errno == EINTR))
		return;
	if (n != 1 || answer != GREETING_ANSWER) {
		knock_break(knock, n == -1 ? errno : 0,
		    "the other agent did not accept the stream's token");
		return;
	}
	attempt->fd = -1;
	attempt_drop(attempt);
	knock->opened(attempt->opening.direction, attempt->opening.stream, fd,
	    knock->arg);
}

static const struct timeval limit = { .tv_sec = DOOR_LIMIT_NS / 1000000000 };

static void
on_attempt(evutil_socket_t fd, short what, void *arg)
{
	struct attempt *attempt = arg;
	struct event_base *base = event_get_base(attempt->event);

	if (what & EV_TIMEOUT) {
		knock_break(attempt->knock, 0, "no answer within 10 s");
		return;
	}
	if (attempt->greeted) {
		receive_answer(attempt);
		return;
	}
	attempt->greeted = true;
	send_greeting(attempt);
	if (attempt->knock->broken)
		return;
	(void)event_del(attempt->event);
	(void)event_assign(attempt->event, base, fd, EV_READ | EV_PERSIST,
	    on_attempt, attempt);
	(void)event_add(attempt->event, &limit);
}

static int
attempt_start(struct event_base *base, struct attempt *attempt,
    const struct trial *trial, const char *local, const char *interface,
    enum end end, const struct sockaddr_storage *address, unsigned length,
    struct error *err)
{
	bool is_sender = direction_sender(attempt->opening.direction) == end;

	attempt->fd = greeting_socket(trial, is_sender, local, interface, 0,
	    address->ss_family, err);
	if (attempt->fd == -1)
		return -1;
	if (connect(attempt->fd, (const struct sockaddr *)address, length) ==
	    -1 && errno != EINPROGRESS)
		return error_errno(err, ERROR_UNREACHABLE,
		    "data connection to %s port %u", attempt->knock->peer,
		    attempt->knock->port);
	attempt->event = event_new(base, attempt->fd, EV_WRITE, on_attempt,
	    attempt);
	if (attempt->event == NULL || event_add(attempt->event, &limit) == -1)
		return error_set(err, ERROR_INTERNAL,
		    "a data connection cannot be watched");
	return 0;
}

int
knock_start(struct event_base *base, const struct trial *trial,
    const char *local, const char *interface,
    const char *peer, uint16_t port, const struct opening openings[],
    size_t count, opened_fn opened,
    void (*failed)(const struct error *why, void *arg), void *arg,
    struct knock **out, struct error *err)
{
	struct sockaddr_storage address;
	struct knock *knock;
	unsigned length;

	if (address_make(peer, port, &address, &length, err) == -1)
		return -1;
	knock = calloc(1, sizeof(*knock));
	if (knock == NULL)
		return error_errno(err, ERROR_INTERNAL, "data connections");
	knock->attempts = calloc(count, sizeof(knock->attempts[0]));
	if (knock->attempts != NULL)
		knock->failing = event_new(base, -1, 0, on_failing, knock);
	if (knock->failing == NULL) {
		(void)error_errno(err, ERROR_INTERNAL, "data connections");
		goto fail;
	}
	knock->opened = opened;
	knock->failed = failed;
	knock->arg = arg;
	knock->port = port;
	(void)strncpy(knock->peer, peer, sizeof(knock->peer) - 1);
	for (size_t i = 0; i < count; i++)
		knock->attempts[i].fd = -1;
	knock->count = count;
	for (size_t i = 0; i < count; i++) {
		struct attempt *attempt = &knock->attempts[i];

		attempt->knock = knock;
		attempt->opening = openings[i];
		if (attempt_start(base, attempt, trial, local, interface,
		    trial->opens, &address, length, err) == -1)
			goto fail;
	}
	*out = knock;
	return 0;
fail:
	knock_free(knock);
	return -1;
}

void
knock_free(struct knock *knock)
{
	if (knock == NULL)
		return;
	for (size_t i = 0; i < knock->count; i++)
		attempt_drop(&knock->attempts[i]);
	if (knock->failing != NULL)
		event_free(knock->failing);
	free(knock->attempts);
	free(knock);
}
