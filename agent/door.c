/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "door.h"

#include <arpa/inet.h>
#include <assert.h>
#include <errno.h>
#include <netinet/in.h>
#include <stdlib.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

#include <event2/event.h>
#include <openssl/crypto.h>

#include "error.h"
#include "greeting.h"
#include "log.h"
#include "policy.h"
#include "transfer.h"

#define REFUSED_LOGGED_MAX 16	/* lines of the log, one trial */

/* A connection that has not shown its token yet. */
struct guest {
	struct door *door;		/* borrowed: outlives us */
	struct event *event;		/* owned; NULL: this place is free */
	int fd;
	unsigned char greeting[GREETING_SIZE];
	size_t received;
};

struct door {
	struct event_base *base;	/* borrowed: outlives us */
	const struct policy *policy;	/* borrowed: outlives us */
	struct trial trial;
	int fd;
	struct event *accepting;	/* owned; NULL before door_expect */
	struct opening expected[2 * TRIAL_STREAMS_MAX];
	bool used[2 * TRIAL_STREAMS_MAX];
	size_t expected_count;
	struct guest guests[DOOR_GUESTS_MAX];
	unsigned refused;
	opened_fn opened;
	void *arg;
};

/* Whoever may come may come again: not every one is a line of the log. */
static void
say_refused(struct door *door, const char *reason)
{
	if (door->refused++ < REFUSED_LOGGED_MAX)
		log_warning("stream_refused", "reason=%s", reason);
}

static void
guest_leave(struct guest *guest)
{
	event_free(guest->event);
	guest->event = NULL;
	if (guest->fd != -1)
		(void)close(guest->fd);
	guest->fd = -1;
}

/* Looks at every token whatever it finds, so that time tells nothing. */
static size_t
find_token(const struct door *door, const unsigned char *token)
{
	size_t found = SIZE_MAX;

	for (size_t i = 0; i < door->expected_count; i++)
		if (CRYPTO_memcmp(door->expected[i].token, token,
		    TRIAL_TOKEN_BYTES) == 0)
			found = i;
	return found;
}

static void
guest_admit(struct guest *guest)
{
	struct door *door = guest->door;
	size_t i = find_token(door, guest->greeting + GREETING_MARK_SIZE);
	const unsigned char answer = GREETING_ANSWER;
	int fd = guest->fd;

	if (memcmp(guest->greeting, GREETING_MARK, GREETING_MARK_SIZE) != 0 ||
	    i == SIZE_MAX || door->used[i]) {
		say_refused(door, i != SIZE_MAX && door->used[i] ?
		    "used-token" : "no-token");
		guest_leave(guest);
		return;
	}
	if (send(fd, &answer, 1, MSG_NOSIGNAL) != 1) {
		guest_leave(guest);
		return;
	}
	door->used[i] = true;
	guest->fd = -1;
	guest_leave(guest);
	door->opened(door->expected[i].direction, door->expected[i].stream, fd,
	    door->arg);
}

static void
on_guest(evutil_socket_t fd, short what, void *arg)
{
	struct guest *guest = arg;
	ssize_t n;

	if (what & EV_TIMEOUT) {
		say_refused(guest->door, "silent");
		guest_leave(guest);
		return;
	}
	n = recv((int)fd, guest->greeting + guest->received,
	    GREETING_SIZE - guest->received, 0);
	if (n == -1 && (errno == EAGAIN || errno == EINTR))
		return;
	if (n <= 0) {
		guest_leave(guest);
		return;
	}
	guest->received += (size_t)n;
	if (guest->received == GREETING_SIZE)
		guest_admit(guest);
}

static struct guest *
free_place(struct door *door)
{
	for (size_t i = 0; i < DOOR_GUESTS_MAX; i++)
		if (door->guests[i].event == NULL)
			return &door->guests[i];
	return NULL;
}

static void
on_accept(evutil_socket_t listener, short what, void *arg)
{
	static const struct timeval limit = {
		.tv_sec = DOOR_LIMIT_NS / 1000000000
	};
	struct door *door = arg;
	struct sockaddr_storage address;
	socklen_t length = sizeof(address);
	struct guest *guest;
	int fd;

	(void)what;
	fd = accept4((int)listener, (struct sockaddr *)&address, &length,
	    SOCK_NONBLOCK | SOCK_CLOEXEC);
	if (fd == -1) {
		/* the waiting one would wake us again and again: the trial
		 * ends by its own limit of time */
		if (errno == EMFILE || errno == ENFILE)
			(void)event_del(door->accepting);
		return;
	}
	guest = free_place(door);
	if (guest == NULL || !policy_allows_peer(door->policy,
	    (struct sockaddr *)&address)) {
		say_refused(door, guest == NULL ? "too-many" : "peer");
		(void)close(fd);
		return;
	}
	*guest = (struct guest){ .door = door, .fd = fd };
	guest->event = event_new(door->base, fd, EV_READ | EV_PERSIST,
	    on_guest, guest);
	if (guest->event == NULL || event_add(guest->event, &limit) == -1) {
		if (guest->event != NULL)
			event_free(guest->event);
		guest->event = NULL;
		(void)close(fd);
	}
}

int
address_make(const char *address, uint16_t port, struct sockaddr_storage *out,
    unsigned *length, struct error *err)
{
	struct sockaddr_in *v4 = (struct sockaddr_in *)out;
	struct sockaddr_in6 *v6 = (struct sockaddr_in6 *)out;

	memset(out, 0, sizeof(*out));
	if (inet_pton(AF_INET, address, &v4->sin_addr) == 1) {
		v4->sin_family = AF_INET;
		v4->sin_port = htons(port);
		*length = sizeof(*v4);
		return 0;
	}
	if (inet_pton(AF_INET6, address, &v6->sin6_addr) == 1) {
		v6->sin6_family = AF_INET6;
		v6->sin6_port = htons(port);
		*length = sizeof(*v6);
		return 0;
	}
	return error_set(err, ERROR_INPUT,
	    "found '%.64s', allowed: a numeric IPv4 or IPv6 address", address);
}

int
greeting_socket(const struct trial *trial, bool is_sender, const char *local,
    const char *interface, uint16_t port, int family, struct error *err)
{
	struct sockaddr_storage address;
	unsigned length = 0;
	int fd, yes = 1, no = 0;

	if (local[0] == '\0')
		local = family == AF_INET6 ? "::" : "0.0.0.0";
	if (address_make(local, port, &address, &length, err) == -1)
		return -1;
	fd = socket(address.ss_family, SOCK_STREAM | SOCK_NONBLOCK |
	    SOCK_CLOEXEC, 0);
	if (fd == -1)
		return error_errno(err, ERROR_INTERNAL, "a data socket");
	(void)setsockopt(fd, SOL_SOCKET, SO_REUSEADDR, &yes, sizeof(yes));
	/* [::] takes IPv4 too, whatever the host's default */
	if (address.ss_family == AF_INET6)
		(void)setsockopt(fd, IPPROTO_IPV6, IPV6_V6ONLY, &no,
		    sizeof(no));
	if (transfer_prepare_socket(fd, address.ss_family, trial, is_sender,
	    err) == -1)
		goto fail;
	if (interface[0] != '\0' && setsockopt(fd, SOL_SOCKET,
	    SO_BINDTODEVICE, interface, (socklen_t)strlen(interface)) == -1) {
		(void)error_errno(err, ERROR_REFUSED,
		    "bind data to interface '%s'", interface);
		goto fail;
	}
	if (bind(fd, (struct sockaddr *)&address, length) == -1) {
		(void)error_errno(err, errno == EADDRINUSE ? ERROR_BUSY :
		    ERROR_REFUSED, "bind data to %s port %u", local, port);
		goto fail;
	}
	return fd;
fail:
	(void)close(fd);
	return -1;
}

static int
listen_socket(const struct trial *trial, const char *local,
    const char *interface, unsigned ports, uint16_t *port, struct error *err)
{
	struct sockaddr_in6 bound = { 0 };
	socklen_t length = sizeof(bound);
	int fd = -1;

	for (unsigned i = 0; fd == -1 && i < ports; i++) {
		fd = greeting_socket(trial, false, local, interface,
		    *port == 0 ? 0 : (uint16_t)(*port + i), AF_INET6, err);
		if (fd == -1 && err->kind != ERROR_BUSY)
			return -1;
	}
	if (fd == -1)
		return -1;
	if (listen(fd, DOOR_GUESTS_MAX) == -1 ||
	    getsockname(fd, (struct sockaddr *)&bound, &length) == -1) {
		(void)error_errno(err, ERROR_INTERNAL, "listen for data");
		(void)close(fd);
		return -1;
	}
	/* sin_port and sin6_port lie at the same place. */
	*port = ntohs(bound.sin6_port);
	return fd;
}

int
door_open(struct event_base *base, const struct policy *policy,
    const struct trial *trial, const char *local, const char *interface,
    unsigned ports, uint16_t *port, struct door **out, struct error *err)
{
	struct door *door = calloc(1, sizeof(*door));

	if (door == NULL)
		return error_errno(err, ERROR_INTERNAL, "the data port");
	door->base = base;
	door->policy = policy;
	door->trial = *trial;
	door->fd = listen_socket(trial, local, interface, ports, port, err);
	if (door->fd == -1) {
		free(door);
		return -1;
	}
	*out = door;
	return 0;
}

int
door_expect(struct door *door, const struct opening openings[], size_t count,
    opened_fn opened, void *arg, struct error *err)
{
	assert(count <= 2 * TRIAL_STREAMS_MAX && door->accepting == NULL);
	memcpy(door->expected, openings, count * sizeof(openings[0]));
	door->expected_count = count;
	door->opened = opened;
	door->arg = arg;
	door->accepting = event_new(door->base, door->fd,
	    EV_READ | EV_PERSIST, on_accept, door);
	if (door->accepting == NULL || event_add(door->accepting, NULL) == -1)
		return error_set(err, ERROR_INTERNAL,
		    "the data port cannot be watched");
	return 0;
}

void
door_free(struct door *door)
{
	if (door == NULL)
		return;
	for (size_t i = 0; i < DOOR_GUESTS_MAX; i++)
		if (door->guests[i].event != NULL)
			guest_leave(&door->guests[i]);
	if (door->accepting != NULL)
		event_free(door->accepting);
	(void)close(door->fd);
	OPENSSL_cleanse(door->expected, sizeof(door->expected));
	free(door);
}
