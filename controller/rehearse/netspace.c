/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * netspace: a child makes everything, hands its descriptors back over a socket
 * pair and ends.  From then on the descriptors keep the namespaces alive.
 */
#include "rehearse/netspace.h"

#include <assert.h>
#include <errno.h>
#include <poll.h>
#include <stdlib.h>
#include <string.h>
#include <sys/prctl.h>
#include <sys/socket.h>
#include <sys/syscall.h>
#include <sys/wait.h>
#include <unistd.h>

#include "clock.h"
#include "error.h"
#include "rehearse/netspace_inside.h"

#define CLOSE_LIMIT_MS 2000
#define FDS_MAX (2 * NETSPACE_SIDES + 1)

/* Room for the descriptors, aligned as a control message must be. */
union fds_room {
	struct cmsghdr head;
	char bytes[CMSG_SPACE(FDS_MAX * sizeof(int))];
};

uint64_t
netspace_deadline(int timeout_ms)
{
	return clock_raw_ns() + (uint64_t)timeout_ms * NS_PER_MS;
}

int
netspace_poll(int fd, uint64_t deadline_ns)
{
	struct pollfd one = { .fd = fd, .events = POLLIN };
	uint64_t now_ns;
	int rc;

	do {
		now_ns = clock_raw_ns();
		/* Rounded up, so that a rest is not spun away. */
		rc = poll(&one, 1, now_ns >= deadline_ns ? 0 :
		    (int)((deadline_ns - now_ns) / NS_PER_MS) + 1);
	} while (rc == -1 && errno == EINTR);
	return rc > 0 ? 0 : -1;
}

pid_t
netspace_fork(sigset_t *mask)
{
	sigset_t all;
	pid_t child;

	(void)sigfillset(&all);
	(void)pthread_sigmask(SIG_SETMASK, &all, mask);
	child = fork();
	if (child == 0)
		(void)prctl(PR_SET_PDEATHSIG, SIGKILL);
	else
		(void)pthread_sigmask(SIG_SETMASK, mask, NULL);
	return child;
}

/* --- open -------------------------------------------------------------- */

/* The descriptors in the order in which they travel; how many. */
static size_t
list_fds(struct netspace *netspace, int *fds[FDS_MAX])
{
	size_t count = 0;

	for (int side = 0; side < NETSPACE_SIDES; side++) {
		fds[count++] = &netspace->net[side];
		fds[count++] = &netspace->tun[side];
	}
	fds[count++] = &netspace->user;
	return count;
}

static struct netspace *
netspace_new(void)
{
	struct netspace *netspace = calloc(1, sizeof(*netspace));
	int *fds[FDS_MAX];

	if (netspace == NULL)
		return NULL;
	netspace->owner = getpid();
	for (size_t i = list_fds(netspace, fds); i > 0; i--)
		*fds[i - 1] = -1;
	return netspace;
}

/* The maker: what it says is an error, and without one the descriptors. */
static void
make_and_tell(const struct netspace_end ends[NETSPACE_SIDES],
    struct netspace *made, int to)
{
	struct error err = { .kind = ERROR_NONE };
	union fds_room room = { .bytes = { 0 } };
	struct iovec part = { .iov_base = &err, .iov_len = sizeof(err) };
	struct msghdr message = { .msg_iov = &part, .msg_iovlen = 1 };
	int *fds[FDS_MAX], sent[FDS_MAX] = { 0 };
	size_t count = 0;

	if (netspace_make(ends, made, &err) == 0) {
		count = list_fds(made, fds) - (made->user == -1 ? 1 : 0);
		for (size_t i = 0; i < count; i++)
			sent[i] = *fds[i];
		message.msg_control = room.bytes;
		message.msg_controllen = CMSG_SPACE(count * sizeof(int));
		room.head.cmsg_level = SOL_SOCKET;
		room.head.cmsg_type = SCM_RIGHTS;
		room.head.cmsg_len = CMSG_LEN(count * sizeof(int));
		memcpy(CMSG_DATA(&room.head), sent, count * sizeof(int));
	}
	_exit(sendmsg(to, &message, MSG_NOSIGNAL) == -1);
}

/* -1 with err: the maker failed, or it said nothing. */
static int
hear_maker(int from, struct netspace *netspace, struct error *err)
{
	struct error told = { .kind = ERROR_NONE };
	union fds_room room = { .bytes = { 0 } };
	struct iovec part = { .iov_base = &told, .iov_len = sizeof(told) };
	struct msghdr message = { .msg_iov = &part, .msg_iovlen = 1,
		.msg_control = room.bytes, .msg_controllen = sizeof(room) };
	int *fds[FDS_MAX], got[FDS_MAX];
	size_t count = list_fds(netspace, fds), bytes;
	struct cmsghdr *head;

	if (netspace_poll(from, netspace_deadline(NETSPACE_LIMIT_MS)) == -1 ||
	    recvmsg(from, &message, MSG_CMSG_CLOEXEC) != sizeof(told))
		return error_set(err, ERROR_INTERNAL,
		    "no network namespaces within %d s",
		    NETSPACE_LIMIT_MS / 1000);
	if (told.kind != ERROR_NONE) {
		*err = told;
		return -1;
	}
	head = CMSG_FIRSTHDR(&message);
	bytes = head == NULL ? 0 : head->cmsg_len - CMSG_LEN(0);
	assert(bytes <= count * sizeof(int));
	if (head != NULL)
		memcpy(got, CMSG_DATA(head), bytes);
	/* Those that came are ours even where not all of them could. */
	for (size_t i = 0; i < bytes / sizeof(int); i++)
		*fds[i] = got[i];
	if ((message.msg_flags & MSG_CTRUNC) != 0 || head == NULL)
		return error_set(err, ERROR_INTERNAL, "no room for the "
		    "descriptors of the network namespaces: raise the limit "
		    "of open files (ulimit -n)");
	return 0;
}

int
netspace_open(const struct netspace_end ends[NETSPACE_SIDES],
    struct netspace **out, struct error *err)
{
	struct netspace *netspace;
	sigset_t mask;
	int pair[2], rc;
	pid_t maker;

	if (netspace_check(ends, err) == -1)
		return -1;
	netspace = netspace_new();
	if (netspace == NULL || socketpair(AF_UNIX,
	    SOCK_SEQPACKET | SOCK_CLOEXEC, 0, pair) == -1) {
		free(netspace);
		return error_errno(err, ERROR_INTERNAL, "a socket pair");
	}
	maker = netspace_fork(&mask);
	if (maker == 0)
		make_and_tell(ends, netspace, pair[1]);
	(void)close(pair[1]);
	if (maker == -1)
		rc = error_errno(err, ERROR_INTERNAL, "a process");
	else {
		rc = hear_maker(pair[0], netspace, err);
		(void)kill(maker, SIGKILL);	/* it has nothing more to do */
		while (waitpid(maker, NULL, 0) == -1 && errno == EINTR)
			continue;
	}
	(void)close(pair[0]);
	if (rc == -1)
		netspace_close(netspace);
	else
		*out = netspace;
	return rc;
}

int
netspace_tun(const struct netspace *netspace, enum netspace_side side)
{
	return netspace->tun[side];
}

/* --- end --------------------------------------------------------------- */

/* As netspace_wait; the place of a program that has ended is free again. */
static int
reap(struct netspace_running *running, uint64_t deadline_ns, int *status)
{
	siginfo_t info = { .si_pid = 0 };
	int rc;

	if (netspace_poll(running->pidfd, deadline_ns) == -1)
		return -1;
	do
		rc = waitid(P_PIDFD, (id_t)running->pidfd, &info, WEXITED);
	while (rc == -1 && errno == EINTR);
	if (rc == -1)
		*status = -1;
	else
		*status = info.si_code == CLD_EXITED ? info.si_status :
		    128 + info.si_status;
	(void)close(running->pidfd);
	running->pidfd = -1;
	running->pid = 0;
	return 0;
}

int
netspace_wait(struct netspace *netspace, pid_t pid, int timeout_ms,
    int *status)
{
	for (size_t i = 0; i < NETSPACE_PROGRAMS_MAX; i++)
		if (pid > 0 && netspace->running[i].pid == pid)
			return reap(&netspace->running[i],
			    netspace_deadline(timeout_ms), status);
	return -1;
}

static void
end_programs(struct netspace *netspace)
{
	uint64_t deadline_ns = netspace_deadline(CLOSE_LIMIT_MS);
	struct netspace_running *running;
	int status;

	for (size_t i = 0; i < NETSPACE_PROGRAMS_MAX; i++)
		if (netspace->running[i].pid != 0)
			(void)syscall(SYS_pidfd_send_signal,
			    netspace->running[i].pidfd, SIGKILL, NULL, 0);
	for (size_t i = 0; i < NETSPACE_PROGRAMS_MAX; i++) {
		running = &netspace->running[i];
		if (running->pid != 0 &&
		    reap(running, deadline_ns, &status) == -1)
			(void)close(running->pidfd);
	}
}

void
netspace_close(struct netspace *netspace)
{
	int *fds[FDS_MAX];

	if (netspace == NULL)
		return;
	if (netspace->owner == getpid())
		end_programs(netspace);
	else
		for (size_t i = 0; i < NETSPACE_PROGRAMS_MAX; i++)
			if (netspace->running[i].pid != 0)
				(void)close(netspace->running[i].pidfd);
	for (size_t i = list_fds(netspace, fds); i > 0; i--)
		if (*fds[i - 1] != -1)
			(void)close(*fds[i - 1]);
	free(netspace);
}
