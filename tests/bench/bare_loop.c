/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * bare_loop: what blocking send and receive calls reach over loopback.
 *
 * One TCP stream, two threads, nothing else: the yardstick for a trial on the
 * same machine.  Prints one line of JSON.
 */
#include <arpa/inet.h>
#include <errno.h>
#include <getopt.h>
#include <inttypes.h>
#include <netinet/in.h>
#include <netinet/tcp.h>
#include <pthread.h>
#include <stdbool.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <sys/socket.h>
#include <time.h>
#include <unistd.h>

#define NS_PER_S UINT64_C(1000000000)
#define CALL_BYTES_MAX (64 * 1024 * 1024)
#define SPAN_BYTES_MAX (256 * 1024 * 1024)

struct loop {
	size_t call_bytes;
	size_t span_bytes;		/* payload repeats after so many */
	bool discard;			/* the kernel drops what it received */
	uint64_t settle_ns, duration_ns;
	int fd_send, fd_receive;
	unsigned char *payload;		/* owned: span_bytes + call_bytes */
	unsigned char *sink;		/* owned: call_bytes */
	uint64_t cpu_at_zero_ns;	/* filled by the receiver */
	uint64_t cpu_ns, bytes, elapsed_ns;
};

static uint64_t
clock_ns(clockid_t clock)
{
	struct timespec ts;

	clock_gettime(clock, &ts);
	return (uint64_t)ts.tv_sec * NS_PER_S + (uint64_t)ts.tv_nsec;
}

static void
die(const char *what)
{
	fprintf(stderr, "bare_loop: %s: %s\n", what, strerror(errno));
	exit(71);			/* EX_OSERR of sysexits.h */
}

static void *
run_sender(void *arg)
{
	struct loop *loop = arg;
	size_t at = 0;
	ssize_t sent;

	for (;;) {
		sent = send(loop->fd_send, loop->payload + at,
		    loop->call_bytes, MSG_NOSIGNAL);
		if (sent <= 0)
			return NULL;	/* the receiver has had enough */
		at = (at + (size_t)sent) % loop->span_bytes;
	}
}

/* Counts between settle and settle + duration since the first byte. */
static void
receive_all(struct loop *loop)
{
	int flags = loop->discard ? MSG_TRUNC : 0;
	uint64_t zero_ns = 0, from_ns = 0, now_ns;
	ssize_t got;

	for (;;) {
		got = recv(loop->fd_receive, loop->sink, loop->call_bytes,
		    flags);
		if (got <= 0)
			die("recv");
		now_ns = clock_ns(CLOCK_MONOTONIC_RAW);
		if (zero_ns == 0)
			zero_ns = now_ns;
		if (from_ns != 0)
			loop->bytes += (uint64_t)got;
		if (from_ns == 0 && now_ns - zero_ns >= loop->settle_ns) {
			from_ns = now_ns;
			loop->cpu_at_zero_ns =
			    clock_ns(CLOCK_PROCESS_CPUTIME_ID);
		}
		if (from_ns != 0 && now_ns - from_ns >= loop->duration_ns)
			break;
	}
	loop->elapsed_ns = now_ns - from_ns;
	loop->cpu_ns = clock_ns(CLOCK_PROCESS_CPUTIME_ID) -
	    loop->cpu_at_zero_ns;
}

static void
connect_pair(struct loop *loop)
{
	struct sockaddr_in address = {
		.sin_family = AF_INET,
		.sin_addr.s_addr = htonl(INADDR_LOOPBACK),
	};
	socklen_t size = sizeof(address);
	int listener;

	listener = socket(AF_INET, SOCK_STREAM | SOCK_CLOEXEC, 0);
	loop->fd_send = socket(AF_INET, SOCK_STREAM | SOCK_CLOEXEC, 0);
	if (listener == -1 || loop->fd_send == -1)
		die("socket");
	if (setsockopt(loop->fd_send, IPPROTO_TCP, TCP_CONGESTION, "cubic",
	    sizeof("cubic") - 1) == -1)
		die("cubic");
	if (bind(listener, (struct sockaddr *)&address, size) == -1 ||
	    listen(listener, 1) == -1 ||
	    getsockname(listener, (struct sockaddr *)&address, &size) == -1 ||
	    connect(loop->fd_send, (struct sockaddr *)&address, size) == -1)
		die("connect");
	loop->fd_receive = accept(listener, NULL, NULL);
	if (loop->fd_receive == -1)
		die("accept");
	close(listener);
}

/* xorshift64: Marsaglia 2003; the payload has only to be incompressible. */
static void
fill_payload(struct loop *loop)
{
	uint64_t state = UINT64_C(88172645463325252);
	size_t i;

	loop->payload = malloc(loop->span_bytes + loop->call_bytes);
	loop->sink = malloc(loop->call_bytes);
	if (loop->payload == NULL || loop->sink == NULL)
		die("malloc");
	for (i = 0; i < loop->span_bytes; i++) {
		state ^= state << 13;
		state ^= state >> 7;
		state ^= state << 17;
		loop->payload[i] = (unsigned char)(state >> 24);
	}
	/* A call that starts near the end of the span reads on. */
	for (i = 0; i < loop->call_bytes; i++)
		loop->payload[loop->span_bytes + i] =
		    loop->payload[i % loop->span_bytes];
}

static uint64_t
read_number(const char *text, uint64_t max)
{
	char *end;
	unsigned long long value;

	errno = 0;
	value = strtoull(text, &end, 10);
	if (errno != 0 || end == text || *end != '\0' || value == 0 ||
	    value > max) {
		fprintf(stderr, "bare_loop: '%s': allowed are 1 to %" PRIu64
		    "\n", text, max);
		exit(64);		/* EX_USAGE */
	}
	return (uint64_t)value;
}

static void
read_options(int argc, char *argv[], struct loop *loop)
{
	static const struct option options[] = {
		{ "call-bytes", required_argument, NULL, 'c' },
		{ "span-bytes", required_argument, NULL, 's' },
		{ "settle-ms", required_argument, NULL, 'w' },
		{ "duration-ms", required_argument, NULL, 'd' },
		{ "copy", no_argument, NULL, 'k' },
		{ NULL, 0, NULL, 0 },
	};
	int option;

	while ((option = getopt_long(argc, argv, "", options, NULL)) != -1) {
		if (option == 'c')
			loop->call_bytes = (size_t)read_number(optarg,
			    CALL_BYTES_MAX);
		else if (option == 's')
			loop->span_bytes = (size_t)read_number(optarg,
			    SPAN_BYTES_MAX);
		else if (option == 'w')
			loop->settle_ns = read_number(optarg, 60000) * 1000000;
		else if (option == 'd')
			loop->duration_ns = read_number(optarg, 60000) *
			    1000000;
		else if (option == 'k')
			loop->discard = false;
		else
			exit(64);	/* getopt has said why */
	}
	if (loop->span_bytes == 0)
		loop->span_bytes = loop->call_bytes;
}

int
main(int argc, char *argv[])
{
	struct loop loop = {
		.call_bytes = 256 * 1024,
		.discard = true,
		.settle_ns = NS_PER_S / 2,
		.duration_ns = 3 * NS_PER_S,
	};
	pthread_t sender;

	read_options(argc, argv, &loop);
	fill_payload(&loop);
	connect_pair(&loop);
	if (pthread_create(&sender, NULL, run_sender, &loop) != 0)
		die("thread");
	receive_all(&loop);
	shutdown(loop.fd_receive, SHUT_RDWR);
	close(loop.fd_receive);
	pthread_join(sender, NULL);
	close(loop.fd_send);
	printf("{\"call_bytes\": %zu, \"span_bytes\": %zu, \"receiver\": "
	    "\"%s\", \"payload_bps\": %.0f, \"cpu_s_per_gb\": %.6f}\n",
	    loop.call_bytes, loop.span_bytes,
	    loop.discard ? "discard" : "copy",
	    (double)loop.bytes * 8e9 / (double)loop.elapsed_ns,
	    (double)loop.cpu_ns / (double)loop.bytes);
	free(loop.payload);
	free(loop.sink);
	return 0;
}
