/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How namespaces end, by what /proc and the kernel's own limits show. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "clock.h"
#include "netspace_fixture.h"

#include <dirent.h>
#include <errno.h>
#include <sched.h>
#include <signal.h>
#include <stdlib.h>
#include <string.h>
#include <sys/prctl.h>
#include <sys/stat.h>
#include <sys/wait.h>

#define CYCLES 20
#define GONE_WITHIN_MS 1000	/* what a rehearsal may take to disappear */
#define FDS_MAX 1024

static size_t
count_open_fds(void)
{
	size_t count = 0;

	for (int fd = 0; fd < FDS_MAX; fd++)
		count += fcntl(fd, F_GETFD) != -1;
	return count;
}

/* Inodes of the network namespaces that descriptors of ours hold. */
static size_t
list_held(ino_t held[], size_t max)
{
	char path[64], target[64];
	struct stat at;
	ssize_t length;
	size_t count = 0;

	for (int fd = 0; fd < FDS_MAX && count < max; fd++) {
		(void)snprintf(path, sizeof(path), "/proc/self/fd/%d", fd);
		length = readlink(path, target, sizeof(target) - 1);
		if (length > 4 && memcmp(target, "net:", 4) == 0 &&
		    fstat(fd, &at) == 0)
			held[count++] = at.st_ino;
	}
	return count;
}

/* How many processes of this system are in one of these namespaces. */
static size_t
count_inside(const ino_t held[], size_t held_count)
{
	DIR *folder = opendir("/proc");
	struct dirent *entry;
	char path[300];
	struct stat at;
	size_t count = 0;

	assert_non_null(folder);
	while ((entry = readdir(folder)) != NULL) {
		(void)snprintf(path, sizeof(path), "/proc/%s/ns/net",
		    entry->d_name);
		if (entry->d_name[0] < '1' || entry->d_name[0] > '9' ||
		    stat(path, &at) == -1)
			continue;
		for (size_t i = 0; i < held_count; i++)
			count += at.st_ino == held[i];
	}
	(void)closedir(folder);
	return count;
}

static bool
has_child(void)
{
	siginfo_t info;

	return waitid(P_ALL, 0, &info, WEXITED | WNOHANG | WNOWAIT) == 0;
}

/* A program, and one that it started and does not wait for. */
static int
start_family(struct netspace *netspace, enum netspace_side side)
{
	char text[16];
	int out;

	(void)START(netspace, side, &out, "/bin/sh", "-c",
	    "sleep 600 & echo there; exec sleep 600");
	hear(out, true, text, sizeof(text));
	assert_string_equal(text, "there\n");
	return out;
}

static void
cycles_leave_nothing_behind(void **state)
{
	size_t fds = count_open_fds(), held_count;
	struct netspace *netspace;
	ino_t held[8];
	int out[2];

	(void)state;
	for (int cycle = 0; cycle < CYCLES; cycle++) {
		netspace = open_or_fail();
		held_count = list_held(held, 8);
		assert_int_equal(held_count, 2);
		out[0] = start_family(netspace, NETSPACE_A);
		out[1] = start_family(netspace, NETSPACE_B);
		/* Of each side: the warden, the program, its child. */
		assert_int_equal(count_inside(held, held_count), 6);
		netspace_close(netspace);
		assert_int_equal(count_inside(held, held_count), 0);
		assert_int_equal(list_held(held, 8), 0);
		assert_false(has_child());
		(void)close(out[0]);
		(void)close(out[1]);
	}
	assert_int_equal(count_open_fds(), fds);
}

/* --- a user namespace that counts what is made in it ------------------- */

static bool
write_file(const char *path, const char *text)
{
	int fd = open(path, O_WRONLY | O_CLOEXEC);
	bool done = fd != -1 && write(fd, text, strlen(text)) ==
	    (ssize_t)strlen(text);

	if (fd != -1)
		(void)close(fd);
	return done;
}

/* Into a user namespace of which at most `most` network namespaces may be at a
 * time (namespaces(7)); false: not allowed here. */
static bool
limit_namespaces(const char *most)
{
	char map[64];

	(void)snprintf(map, sizeof(map), "%u %u 1", geteuid(), geteuid());
	return unshare(CLONE_NEWUSER) == 0 &&
	    write_file("/proc/self/uid_map", map) &&
	    write_file("/proc/sys/user/max_net_namespaces", most);
}

/* The kernel takes a namespace away somewhat later than its last descriptor. */
static bool
open_soon(struct netspace **netspace)
{
	uint64_t end_ns = clock_raw_ns() + LONG_MS * NS_PER_MS;
	struct error err;

	do {
		if (netspace_open(ends, netspace, &err) == 0)
			return true;
		(void)poll(NULL, 0, 20);
	} while (clock_raw_ns() < end_ns && err.sys_errno == ENOSPC);
	(void)fprintf(stderr, "%s\n", err.cause);
	return false;
}

/* Of a forked child: 0 done, 1 failed, 77 not allowed here. */
static int
cycle_within_limit(void)
{
	struct netspace *netspace;

	if (!limit_namespaces("6"))
		return 77;
	for (int cycle = 0; cycle < CYCLES; cycle++) {
		if (!open_soon(&netspace))
			return 1;
		netspace_close(netspace);
	}
	return 0;
}

static int
meet_the_limit(void)
{
	struct netspace *netspace;
	struct error err;

	if (!limit_namespaces("0"))
		return 77;
	if (netspace_open(ends, &netspace, &err) == 0 ||
	    err.kind != ERROR_UNREACHABLE || strstr(err.cause,
	    "'sysctl -w user.max_net_namespaces=10000'") == NULL) {
		(void)fprintf(stderr, "%s\n", err.cause);
		return 1;
	}
	return error_exit_status(err.kind) == 69 ? 0 : 1;
}

static void
run_in_child(int (*run)(void))
{
	int status;
	pid_t child;

	(void)fflush(NULL);
	child = fork();
	if (child == 0)
		_exit(run());
	assert_int_equal(waitpid(child, &status, 0), child);
	assert_true(WIFEXITED(status));
	if (WEXITSTATUS(status) == 77) {
		(void)fprintf(stderr, "SKIPPED: no user namespaces here\n");
		skip();
	}
	assert_int_equal(WEXITSTATUS(status), 0);
}

static void
closed_namespaces_no_longer_count(void **state)
{
	(void)state;
	run_in_child(cycle_within_limit);
}

static void
forbidden_namespaces_are_named_with_their_setting(void **state)
{
	(void)state;
	run_in_child(meet_the_limit);
}

/* --- the owner dies ---------------------------------------------------- */

/* How long what a killed owner had made is still there. */
static uint64_t
outlive_owner(void)
{
	ino_t held[8] = { 0 };
	uint64_t from_ns, end_ns;
	int pair[2], status;
	pid_t owner;
	struct netspace *netspace;

	assert_int_equal(pipe2(pair, O_CLOEXEC), 0);
	owner = fork();
	if (owner == 0) {
		/* where this test fails before it kills us */
		(void)prctl(PR_SET_PDEATHSIG, SIGKILL);
		netspace = open_or_fail();
		(void)start_family(netspace, NETSPACE_A);
		(void)start_family(netspace, NETSPACE_B);
		(void)list_held(held, 8);
		if (write(pair[1], held, sizeof(held)) != sizeof(held))
			_exit(1);
		(void)pause();
	}
	(void)close(pair[1]);
	assert_int_equal(read(pair[0], held, sizeof(held)), sizeof(held));
	(void)close(pair[0]);
	assert_int_equal(count_inside(held, 2), 6);
	from_ns = clock_raw_ns();
	assert_int_equal(kill(owner, SIGKILL), 0);
	assert_int_equal(waitpid(owner, &status, 0), owner);
	end_ns = from_ns + LONG_MS * NS_PER_MS;
	while (count_inside(held, 2) > 0 && clock_raw_ns() < end_ns)
		(void)poll(NULL, 0, 2);
	assert_int_equal(count_inside(held, 2), 0);
	return clock_raw_ns() - from_ns;
}

static void
killed_owner_leaves_nothing(void **state)
{
	uint64_t best_ns = UINT64_MAX, took_ns;

	(void)state;
	/* The time is a requirement, but not that the machine is idle. */
	for (int attempt = 0; attempt < 5 &&
	    best_ns > GONE_WITHIN_MS * NS_PER_MS; attempt++) {
		took_ns = outlive_owner();
		best_ns = took_ns < best_ns ? took_ns : best_ns;
	}
	(void)fprintf(stderr, "gone after %u ms\n",
	    (unsigned)(best_ns / NS_PER_MS));
	assert_true(best_ns <= GONE_WITHIN_MS * NS_PER_MS);
}

int
main(void)
{
	const struct CMUnitTest everywhere[] = {
		cmocka_unit_test(
		    forbidden_namespaces_are_named_with_their_setting),
	};
	const struct CMUnitTest where_permitted[] = {
		cmocka_unit_test(cycles_leave_nothing_behind),
		cmocka_unit_test(closed_namespaces_no_longer_count),
		cmocka_unit_test(killed_owner_leaves_nothing),
	};
	int failed = cmocka_run_group_tests(everywhere, NULL, NULL);

	if (permitted())
		failed += cmocka_run_group_tests(where_permitted, NULL, NULL);
	return failed;
}
