/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Two namespaces and the programs of a test in them.  Where they are not
 * permitted that is said and skipped.  Limits of time end a hang. */
#ifndef PLAFOND_TEST_NETSPACE_FIXTURE_H
#define PLAFOND_TEST_NETSPACE_FIXTURE_H

#include "error.h"
#include "rehearse/netspace.h"

#include <fcntl.h>
#include <poll.h>
#include <stdbool.h>
#include <stdio.h>
#include <unistd.h>

#define LONG_MS 30000

static const struct netspace_end ends[NETSPACE_SIDES] = {
	{ "quay0", "198.18.0.1", "2001:2::1", 1400, 1000 },
	{ "mast0", "198.19.255.2", "2001:2::ffff:2", 9000, 0 },
};

/* Said before the tests that need it. */
static inline bool
permitted(void)
{
	struct netspace *netspace = NULL;
	struct error err = { .kind = ERROR_NONE };
	char text[800];

	if (netspace_open(ends, &netspace, &err) == 0) {
		netspace_close(netspace);
		return true;
	}
	(void)fprintf(stderr, "SKIPPED: %s\n",
	    error_text(&err, text, sizeof(text)));
	/* Anything else is a fault of ours, which the tests will show. */
	return err.kind != ERROR_UNREACHABLE;
}

static inline struct netspace *
open_or_fail(void)
{
	struct netspace *netspace = NULL;
	struct error err = { .kind = ERROR_NONE };

	if (netspace_open(ends, &netspace, &err) == -1)
		fail_msg("%s", err.cause);
	return netspace;
}

/* With its standard output in a pipe. */
static inline pid_t
start(struct netspace *netspace, enum netspace_side side, char *const *argv,
    int *out)
{
	struct netspace_program program = { .path = argv[0], .argv = argv,
		.fds = { -1, -1, 2, -1 } };
	struct error err = { .kind = ERROR_NONE };
	int pair[2];
	pid_t pid = 0;

	assert_int_equal(pipe2(pair, O_CLOEXEC), 0);
	program.fds[1] = pair[1];
	if (netspace_start(netspace, side, &program, &pid, NULL, &err) == -1)
		fail_msg("%s", err.cause);
	(void)close(pair[1]);
	*out = pair[0];
	return pid;
}

#define START(netspace, side, out, ...)					\
	start(netspace, side, (char *[]){ __VA_ARGS__, NULL }, out)

/* Up to its end, or up to a line feed. */
static inline void
hear(int from, bool line, char *text, size_t size)
{
	struct pollfd one = { .fd = from, .events = POLLIN };
	size_t used = 0;
	ssize_t got = 1;

	while (got > 0 && used + 1 < size &&
	    !(line && used > 0 && text[used - 1] == '\n')) {
		assert_int_equal(poll(&one, 1, LONG_MS), 1);
		got = read(from, text + used, line ? 1 : size - 1 - used);
		used += got > 0 ? (size_t)got : 0;
	}
	text[used] = '\0';
}

static inline int
finish(struct netspace *netspace, pid_t pid)
{
	int status = -2;

	assert_int_equal(netspace_wait(netspace, pid, LONG_MS, &status), 0);
	return status;
}

#endif
