/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Payload over a plain TCP connection.  The receiver discards in the kernel:
 * MSG_TRUNC on a stream socket, tcp(7). */
#include "transport.h"

#include <errno.h>
#include <inttypes.h>
#include <limits.h>
#include <netinet/in.h>
#include <netinet/tcp.h>
#include <stdio.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

#include "error.h"
#include "sampler.h"

#define AVAILABLE_FILE "/proc/sys/net/ipv4/tcp_available_congestion_control"
#define BUFFER_SHARE 8

/* A socket option of a trial that is a plain int; 0: leave the kernel's. */
struct option {
	const char *name;
	int level, option;
	uint64_t value;
};

static int
set_option(int fd, const struct option *option, struct error *err)
{
	int value;

	if (option->value == 0)
		return 0;
	if (option->value > INT_MAX)
		return error_set(err, ERROR_INPUT, "%s %" PRIu64
		    " is out of range", option->name, option->value);
	value = (int)option->value;
	if (setsockopt(fd, option->level, option->option, &value,
	    sizeof(value)) == -1)
		return error_errno(err, ERROR_REFUSED, "%s %d", option->name,
		    value);
	return 0;
}

/* What the kernel has, for a message; "unknown" where it does not say. */
static void
read_available(char *out, size_t size)
{
	FILE *f = fopen(AVAILABLE_FILE, "re");

	if (f == NULL || fgets(out, (int)size, f) == NULL)
		(void)snprintf(out, size, "unknown");
	if (f != NULL)
		(void)fclose(f);
	out[strcspn(out, "\n")] = '\0';
}

static int
set_congestion_control(int fd, const char *name, struct error *err)
{
	char available[256];
	int saved;

	if (name[0] == '\0')
		return 0;
	if (setsockopt(fd, IPPROTO_TCP, TCP_CONGESTION, name,
	    (socklen_t)strlen(name)) == 0)
		return 0;
	saved = errno;
	read_available(available, sizeof(available));
	errno = saved;
	return error_errno(err, ERROR_REFUSED, "congestion control '%.*s' "
	    "(this kernel has: %s)", TRIAL_CONGESTION_CONTROL_SIZE, name,
	    available);
}

static int
prepare(int fd, int family, const struct trial *trial, struct error *err)
{
	bool is_ipv6 = family == AF_INET6;
	/* RFC 2474: the DSCP is the upper six bits of the octet */
	const struct option options[] = {
		{ "no delay", IPPROTO_TCP, TCP_NODELAY, 1 },
		{ "send buffer", SOL_SOCKET, SO_SNDBUF,
		    trial->send_buffer_bytes },
		{ "receive buffer", SOL_SOCKET, SO_RCVBUF,
		    trial->receive_buffer_bytes },
		{ "MSS", IPPROTO_TCP, TCP_MAXSEG, trial->mss_bytes },
		{ "traffic class", is_ipv6 ? IPPROTO_IPV6 : IPPROTO_IP,
		    is_ipv6 ? IPV6_TCLASS : IP_TOS, trial->dscp << 2 },
	};

	if (trial->dscp > 63)
		return error_set(err, ERROR_INPUT, "DSCP %" PRIu64
		    ", allowed 0 to 63", trial->dscp);
	for (size_t i = 0; i < sizeof(options) / sizeof(*options); i++)
		if (set_option(fd, &options[i], err) == -1)
			return -1;
	return set_congestion_control(fd, trial->congestion_control, err);
}

/* Each stream paces itself to its share; the kernel wants bytes a second. */
static int
limit(int fd, const struct trial *trial, struct error *err)
{
	unsigned long share = trial->rate_limit_bps / 8 / trial->streams;

	if (trial->rate_limit_bps == 0)
		return 0;
	if (share == 0)
		share = 1;
	if (setsockopt(fd, SOL_SOCKET, SO_MAX_PACING_RATE, &share,
	    sizeof(share)) == -1)
		return error_errno(err, ERROR_INTERNAL,
		    "pacing rate %lu B/s", share);
	return 0;
}

/* Linux says EPIPE of a reset that came after the peer's end of file, and
 * ECONNRESET of one that came before it (tcp_reset in net/ipv4). */
static enum io_result
failed(int *sys_errno)
{
	if (errno == EAGAIN || errno == EINTR)
		return IO_AGAIN;
	if (errno == EPIPE)
		return IO_CLOSED;
	*sys_errno = errno;
	return IO_FAILED;
}

static enum io_result
receive(int fd, size_t size, size_t *bytes, int *sys_errno)
{
	ssize_t got = recv(fd, NULL, size, MSG_TRUNC | MSG_DONTWAIT);

	*bytes = got > 0 ? (size_t)got : 0;
	if (got > 0)
		return IO_DONE;
	return got == 0 ? IO_CLOSED : failed(sys_errno);
}

static enum io_result
send_payload(int fd, const unsigned char *payload, size_t size, size_t *bytes,
    int *sys_errno)
{
	ssize_t sent = send(fd, payload, size, MSG_NOSIGNAL | MSG_DONTWAIT);

	*bytes = sent > 0 ? (size_t)sent : 0;
	return sent >= 0 ? IO_DONE : failed(sys_errno);
}

/* SO_RCVLOWAT, kept so far below the receive buffer that the kernel's own
 * tuning of it and of the window is left alone (tcp_set_rcvlowat raises the
 * buffer where the mark would not fit). */
static uint64_t
coalesce(int fd, uint64_t bytes)
{
	int mark = (int)bytes, buffer_bytes = 0;
	socklen_t size = sizeof(buffer_bytes);

	if (getsockopt(fd, SOL_SOCKET, SO_RCVBUF, &buffer_bytes,
	    &size) == -1 || mark > buffer_bytes / BUFFER_SHARE)
		mark = 1;
	if (setsockopt(fd, SOL_SOCKET, SO_RCVLOWAT, &mark, sizeof(mark)) == -1)
		return 0;
	return (uint64_t)mark;
}

static void
finish(int fd)
{
	(void)shutdown(fd, SHUT_WR);
}

static void
reset(int fd)
{
	const struct linger none = { .l_onoff = 1, .l_linger = 0 };

	(void)setsockopt(fd, SOL_SOCKET, SO_LINGER, &none, sizeof(none));
	(void)close(fd);
}

static void
congestion_control(int fd, char name[TRIAL_CONGESTION_CONTROL_SIZE])
{
	socklen_t size = TRIAL_CONGESTION_CONTROL_SIZE - 1;

	memset(name, 0, TRIAL_CONGESTION_CONTROL_SIZE);
	if (getsockopt(fd, IPPROTO_TCP, TCP_CONGESTION, name, &size) == -1)
		name[0] = '\0';
}

const struct transport transport_tcp = {
	.protocol = PROTOCOL_TCP,
	.prepare = prepare,
	.limit = limit,
	.receive = receive,
	.send = send_payload,
	.coalesce = coalesce,
	.finish = finish,
	.reset = reset,
	.sample = sampler_read,
	.congestion_control = congestion_control,
};
