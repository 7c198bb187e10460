/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "reference.h"

#include <errno.h>
#include <event2/event.h>
#include <netinet/in.h>
#include <netinet/tcp.h>
#include <pthread.h>
#include <signal.h>
#include <stdatomic.h>
#include <stdbool.h>
#include <stdlib.h>
#include <string.h>
#include <sys/eventfd.h>
#include <sys/socket.h>
#include <unistd.h>

#include "clock.h"
#include "error.h"
#include "payload.h"
#include "units.h"

#define CALL_BYTES ((size_t)1024 * 1024)
#define CONGESTION_CONTROL "cubic"	/* the default of a trial */

/* One of the two threads. */
struct half {
	struct reference *reference;	/* borrowed */
	pthread_t thread;
	bool has_thread;
	int fd;				/* owned */
	int sys_errno;			/* 0: in good order */
	uint64_t cpu_ns;
};

struct reference {
	struct half sender, receiver;
	struct payload payload;		/* hot: one call long */
	uint64_t duration_ns;
	uint64_t bytes, elapsed_ns;	/* received, from the first byte */
	_Atomic unsigned running;
	int wake_fd;			/* owned */
	struct event *wake;		/* owned */
	void (*done)(struct reference *reference, uint64_t payload_bps,
	    uint64_t cpu_ns, const struct error *why, void *arg);
	void *arg;			/* borrowed */
};

/* A thread's last words. */
static void *
leave(struct half *half)
{
	struct reference *reference = half->reference;
	const uint64_t one = 1;
	ssize_t written;

	half->cpu_ns = clock_thread_cpu_ns();
	if (atomic_fetch_sub(&reference->running, 1) == 1) {
		written = write(reference->wake_fd, &one, sizeof(one));
		(void)written;
	}
	return NULL;
}

static void *
run_sender(void *arg)
{
	struct half *half = arg;
	const struct payload *payload = &half->reference->payload;

	/* ends when the receiver shuts its socket down */
	while (send(half->fd, payload->bytes, payload->period_bytes,
	    MSG_NOSIGNAL) > 0)
		continue;
	half->sys_errno = errno == EPIPE || errno == ECONNRESET ? 0 : errno;
	return leave(half);
}

static void *
run_receiver(void *arg)
{
	struct half *half = arg;
	struct reference *reference = half->reference;
	uint64_t zero_ns = 0;

	while (reference->elapsed_ns < reference->duration_ns) {
		ssize_t got = recv(half->fd, NULL, CALL_BYTES, MSG_TRUNC);

		if (got <= 0) {
			half->sys_errno = got == 0 ? ECONNRESET : errno;
			break;
		}
		/* the bytes of the first call came before the time counts */
		if (zero_ns == 0)
			zero_ns = clock_raw_ns();
		else
			reference->bytes += (uint64_t)got;
		reference->elapsed_ns = clock_raw_ns() - zero_ns;
	}
	/* a sender that waits for room wakes up from this */
	(void)shutdown(reference->sender.fd, SHUT_RDWR);
	return leave(half);
}

static int
join_half(struct half *half)
{
	if (half->has_thread)
		(void)pthread_join(half->thread, NULL);
	half->has_thread = false;
	return half->sys_errno;
}

static void
on_wake(evutil_socket_t fd, short what, void *arg)
{
	struct reference *reference = arg;
	struct error why;
	uint64_t bps = 0, cpu_ns;
	int failed;

	(void)fd;
	(void)what;
	(void)event_del(reference->wake);
	failed = join_half(&reference->receiver);
	if (join_half(&reference->sender) != 0)
		failed = reference->sender.sys_errno;
	cpu_ns = reference->sender.cpu_ns + reference->receiver.cpu_ns;
	if (failed == 0 && reference->elapsed_ns > 0) {
		bps = rate_bps(reference->bytes, reference->elapsed_ns);
		reference->done(reference, bps, cpu_ns, NULL, reference->arg);
		return;
	}
	errno = failed;
	(void)error_errno(&why, ERROR_INTERNAL, "loopback reference");
	reference->done(reference, 0, cpu_ns, &why, reference->arg);
}

/* A kernel without it uses its default; the reference is still one. */
static int
new_socket(void)
{
	int fd = socket(AF_INET, SOCK_STREAM | SOCK_CLOEXEC, 0);

	if (fd != -1)
		(void)setsockopt(fd, IPPROTO_TCP, TCP_CONGESTION,
		    CONGESTION_CONTROL, strlen(CONGESTION_CONTROL));
	return fd;
}

static bool
is_same_address(const struct sockaddr_in *a, const struct sockaddr_in *b)
{
	return a->sin_port == b->sin_port &&
	    a->sin_addr.s_addr == b->sin_addr.s_addr;
}

/* A connection of this process to itself.  Over loopback connect is done as
 * soon as the listener's queue has it, so nothing here waits; whoever else
 * comes to the port meanwhile is refused. */
static int
connect_pair(struct reference *reference, int listener, struct error *err)
{
	struct sockaddr_in at = { .sin_family = AF_INET,
	    .sin_addr.s_addr = htonl(INADDR_LOOPBACK) };
	struct sockaddr_in ours = { 0 }, theirs = { 0 };
	socklen_t size = sizeof(at), ours_size = size, theirs_size = size;

	if (bind(listener, (struct sockaddr *)&at, size) == -1 ||
	    listen(listener, 1) == -1 ||
	    getsockname(listener, (struct sockaddr *)&at, &size) == -1)
		return error_errno(err, ERROR_INTERNAL, "listen on loopback");
	reference->sender.fd = new_socket();
	if (reference->sender.fd == -1 || connect(reference->sender.fd,
	    (struct sockaddr *)&at, size) == -1)
		return error_errno(err, ERROR_INTERNAL, "connect to loopback");
	reference->receiver.fd = accept4(listener,
	    (struct sockaddr *)&theirs, &theirs_size, SOCK_CLOEXEC);
	if (reference->receiver.fd == -1 || getsockname(reference->sender.fd,
	    (struct sockaddr *)&ours, &ours_size) == -1)
		return error_errno(err, ERROR_INTERNAL, "accept on loopback");
	if (!is_same_address(&ours, &theirs))
		return error_set(err, ERROR_INTERNAL,
		    "another process came to the loopback reference");
	return 0;
}

static int
open_pair(struct reference *reference, struct error *err)
{
	int listener = new_socket();
	int rc;

	if (listener == -1)
		return error_errno(err, ERROR_INTERNAL, "socket");
	rc = connect_pair(reference, listener, err);
	(void)close(listener);
	return rc;
}

static int
start_half(struct half *half, void *(*body)(void *), struct error *err)
{
	sigset_t all, old;

	atomic_fetch_add(&half->reference->running, 1);
	(void)sigfillset(&all);
	(void)pthread_sigmask(SIG_SETMASK, &all, &old);
	errno = pthread_create(&half->thread, NULL, body, half);
	half->has_thread = errno == 0;
	(void)pthread_sigmask(SIG_SETMASK, &old, NULL);
	if (!half->has_thread)
		return error_errno(err, ERROR_INTERNAL, "thread");
	return 0;
}

static int
start_loop(struct reference *reference, struct event_base *base,
    struct error *err)
{
	reference->wake_fd = eventfd(0, EFD_CLOEXEC | EFD_NONBLOCK);
	if (reference->wake_fd == -1)
		return error_errno(err, ERROR_INTERNAL, "eventfd");
	reference->wake = event_new(base, reference->wake_fd, EV_READ,
	    on_wake, reference);
	if (reference->wake == NULL || event_add(reference->wake, NULL) == -1)
		return error_set(err, ERROR_INTERNAL, "event");
	return 0;
}

int
reference_start(struct event_base *base, uint64_t duration_ns,
    void (*done)(struct reference *reference, uint64_t payload_bps,
	uint64_t cpu_ns, const struct error *why, void *arg),
    void *arg, struct reference **out, struct error *err)
{
	struct reference *reference = calloc(1, sizeof(*reference));

	if (reference == NULL)
		return error_set(err, ERROR_INTERNAL, "no memory");
	reference->sender = (struct half){ .reference = reference, .fd = -1 };
	reference->receiver = reference->sender;
	reference->wake_fd = -1;
	reference->duration_ns = duration_ns;
	reference->done = done;
	reference->arg = arg;
	if (payload_init(&reference->payload, CALL_BYTES, err) == -1 ||
	    start_loop(reference, base, err) == -1 ||
	    open_pair(reference, err) == -1 ||
	    start_half(&reference->receiver, run_receiver, err) == -1 ||
	    start_half(&reference->sender, run_sender, err) == -1) {
		reference_free(reference);
		return -1;
	}
	*out = reference;
	return 0;
}

static void
shut_half(struct half *half)
{
	if (half->fd != -1)
		(void)shutdown(half->fd, SHUT_RDWR);
}

void
reference_free(struct reference *reference)
{
	if (reference == NULL)
		return;
	shut_half(&reference->sender);
	shut_half(&reference->receiver);
	(void)join_half(&reference->sender);
	(void)join_half(&reference->receiver);
	if (reference->sender.fd != -1)
		(void)close(reference->sender.fd);
	if (reference->receiver.fd != -1)
		(void)close(reference->receiver.fd);
	if (reference->wake != NULL)
		event_free(reference->wake);
	if (reference->wake_fd != -1)
		(void)close(reference->wake_fd);
	payload_fini(&reference->payload);
	free(reference);
}
