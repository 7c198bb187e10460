/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * netspace_start: a program in a namespace.
 *
 *   caller -- fork --> porter: enters the namespaces, then
 *      \                 | clone, as a child of the caller
 *       \--------------> warden: process 1 of a process namespace
 *                          | fork
 *                        program
 *
 * The porter is there because entering a user namespace cannot be undone.  The
 * warden is there because the kernel ends all of a process namespace with its
 * process 1, and before that can be waited for; and because process 1 itself
 * would ignore the signals that it does not handle.
 *
 * All three tell the caller over one socket pair: the warden's pid, or why not.
 * It is closed when the program is executed.
 */
#include <errno.h>
#include <fcntl.h>
#include <linux/sched.h>
#include <poll.h>
#include <sched.h>
#include <stddef.h>
#include <string.h>
#include <sys/mount.h>
#include <sys/prctl.h>
#include <sys/socket.h>
#include <sys/syscall.h>
#include <sys/wait.h>
#include <unistd.h>

#include "error.h"
#include "rehearse/netspace_inside.h"

#define SPARE_FD 10		/* above those that a program is given */

enum step { STEP_STARTED, STEP_ENTER, STEP_FDS, STEP_EXECUTE };

struct word {
	enum step step;
	int sys_errno;
	pid_t pid;		/* STEP_STARTED */
};

static void
tell(int to, enum step step, pid_t pid)
{
	struct word word = { .step = step, .sys_errno = errno, .pid = pid };

	(void)send(to, &word, sizeof(word), MSG_NOSIGNAL);
}

/* --- program ----------------------------------------------------------- */

/* Descriptor i of the program is fds[i].  Takes them out of each other's way
 * first; returns what `report` has become, or -1. */
static int
place_fds(const int fds[NETSPACE_FDS], int report)
{
	int aside[NETSPACE_FDS], i;

	for (i = 0; i < NETSPACE_FDS; i++) {
		aside[i] = fds[i] != -1 || i > 2 ? fds[i] :
		    open("/dev/null", O_RDWR | O_CLOEXEC);
		if (i <= 2 && aside[i] == -1)
			return -1;
		if (aside[i] != -1)
			aside[i] = fcntl(aside[i], F_DUPFD_CLOEXEC, SPARE_FD);
		if (aside[i] == -1 && fds[i] != -1)
			return -1;
	}
	report = fcntl(report, F_DUPFD_CLOEXEC, SPARE_FD);
	for (i = 0; i < NETSPACE_FDS; i++) {
		if (aside[i] == -1)
			(void)close(i);
		else if (dup2(aside[i], i) == -1)
			return -1;
	}
	(void)close_range(NETSPACE_FDS, ~0U, CLOSE_RANGE_CLOEXEC);
	return report;
}

static void
become_program(const struct netspace_program *program, int report)
{
	sigset_t none;
	int moved = place_fds(program->fds, report);

	if (moved == -1) {
		tell(report, STEP_FDS, 0);
		_exit(127);
	}
	for (int number = 1; number < NSIG; number++)
		(void)signal(number, SIG_DFL);
	(void)sigemptyset(&none);
	(void)sigprocmask(SIG_SETMASK, &none, NULL);
	(void)execve(program->path, program->argv,
	    program->envp != NULL ? program->envp : environ);
	tell(moved, STEP_EXECUTE, 0);
	_exit(127);
}

/* --- warden ------------------------------------------------------------ */

/* /sys shows the network devices of the namespace it was mounted in, /proc the
 * process ids, so the program gets its own.  Where that is not allowed it sees
 * the host's there, as the program of any other namespace does. */
static void
mount_own(void)
{
	const unsigned long flags = MS_NOSUID | MS_NODEV | MS_NOEXEC;

	/* Never without this: the host would get our mounts. */
	if (mount(NULL, "/", NULL, MS_REC | MS_PRIVATE, NULL) == -1)
		return;
	(void)mount("proc", "/proc", "proc", flags, NULL);
	(void)mount("sysfs", "/sys", "sysfs", flags | MS_RDONLY, NULL);
}

static int
status_of(int how)
{
	return WIFSIGNALED(how) ? 128 + WTERMSIG(how) : WEXITSTATUS(how);
}

/* Pass signals on and bury whoever is left to us, until the program ends.  What
 * still runs then ends with us. */
static void
watch(pid_t program)
{
	siginfo_t info;
	sigset_t all;
	pid_t ended;
	int number, how;

	(void)sigfillset(&all);
	for (;;) {
		number = sigwaitinfo(&all, &info);
		if (number > 0 && number != SIGCHLD)
			(void)kill(program, number);
		while ((ended = waitpid(-1, &how, WNOHANG)) > 0)
			if (ended == program)
				_exit(status_of(how));
	}
}

static void
become_warden(const struct netspace_program *program, int report)
{
	struct pollfd caller = { .fd = report };
	pid_t child;

	/* From here on it ends with the caller; was that in time? */
	(void)prctl(PR_SET_PDEATHSIG, SIGKILL);
	if (poll(&caller, 1, 0) == 1 && (caller.revents & POLLHUP) != 0)
		_exit(127);
	(void)setsid();		/* the terminal's signals are the caller's */
	(void)signal(SIGCHLD, SIG_DFL);
	mount_own();
	child = fork();
	if (child == 0)
		become_program(program, report);
	if (child == -1) {
		tell(report, STEP_ENTER, 0);
		_exit(127);
	}
	/* What the caller closes must not stay open here. */
	(void)close_range(0, ~0U, 0);
	watch(child);
}

/* --- porter ------------------------------------------------------------ */

static void
become_porter(const struct netspace *netspace, enum netspace_side side,
    const struct netspace_program *program, int report)
{
	/* Its parent is ours; with it comes our exit signal, SIGCHLD. */
	struct clone_args args = { .flags = CLONE_PARENT };
	long warden = -1;

	if ((netspace->user == -1 ||
	    setns(netspace->user, CLONE_NEWUSER) == 0) &&
	    setns(netspace->net[side], CLONE_NEWNET) == 0 &&
	    unshare(CLONE_NEWPID | CLONE_NEWNS) == 0)
		warden = syscall(SYS_clone3, &args, sizeof(args));
	if (warden == 0)
		become_warden(program, report);
	tell(report, warden == -1 ? STEP_ENTER : STEP_STARTED, (pid_t)warden);
	_exit(0);
}

/* --- caller ------------------------------------------------------------ */

static int
refuse(const struct word *word, const char *path, struct error *err)
{
	errno = word->sys_errno;
	switch (word->step) {
	case STEP_ENTER:
		return netspace_refuse(err);
	case STEP_EXECUTE:
		return error_errno(err, ERROR_ABSENT, "program '%s'", path);
	case STEP_STARTED:
	case STEP_FDS:
		break;
	}
	return error_errno(err, ERROR_INTERNAL, "descriptors of program '%s'",
	    path);
}

/* What porter, warden and program say until nobody can say more.  *pid is set
 * as soon as there is a warden. */
static int
hear(int from, const char *path, pid_t *pid, struct error *err)
{
	uint64_t deadline_ns = netspace_deadline(NETSPACE_LIMIT_MS);
	struct word word;
	ssize_t got;
	int rc = 0;

	do {
		if (netspace_poll(from, deadline_ns) == -1)
			return error_set(err, ERROR_INTERNAL, "program '%s' "
			    "has not started within %d s", path,
			    NETSPACE_LIMIT_MS / 1000);
		got = recv(from, &word, sizeof(word), 0);
		if (got == sizeof(word) && word.step == STEP_STARTED)
			*pid = word.pid;
		else if (got == sizeof(word))
			rc = refuse(&word, path, err);
	} while (got > 0 || (got == -1 && errno == EINTR));
	if (rc == 0 && *pid == 0)
		return error_set(err, ERROR_INTERNAL, "program '%s' was ended "
		    "before it started", path);
	return rc;
}

static void
end(pid_t pid)
{
	if (pid <= 0)
		return;
	(void)kill(pid, SIGKILL);
	while (waitpid(pid, NULL, 0) == -1 && errno == EINTR)
		continue;
}

static struct netspace_running *
free_place(struct netspace *netspace)
{
	for (size_t i = 0; i < NETSPACE_PROGRAMS_MAX; i++)
		if (netspace->running[i].pid == 0)
			return &netspace->running[i];
	return NULL;
}

/* *pid is 0 where there is no warden. */
static int
launch(const struct netspace *netspace, enum netspace_side side,
    const struct netspace_program *program, pid_t *pid, struct error *err)
{
	int pair[2], rc;
	sigset_t mask;
	pid_t porter;

	*pid = 0;
	if (socketpair(AF_UNIX, SOCK_SEQPACKET | SOCK_CLOEXEC, 0, pair) == -1)
		return error_errno(err, ERROR_INTERNAL, "a socket pair");
	porter = netspace_fork(&mask);
	if (porter == 0) {
		/* Its end must close with the caller. */
		(void)close(pair[0]);
		become_porter(netspace, side, program, pair[1]);
	}
	(void)close(pair[1]);
	rc = porter == -1 ? error_errno(err, ERROR_INTERNAL, "a process") :
	    hear(pair[0], program->path, pid, err);
	(void)close(pair[0]);
	end(porter);
	return rc;
}

int
netspace_start(struct netspace *netspace, enum netspace_side side,
    const struct netspace_program *program, pid_t *pid, int *pidfd,
    struct error *err)
{
	struct netspace_running *place = free_place(netspace);
	pid_t started;
	int fd = -1, rc;

	if (place == NULL)
		return error_set(err, ERROR_INTERNAL, "%d programs run in the "
		    "namespaces already", NETSPACE_PROGRAMS_MAX);
	rc = launch(netspace, side, program, &started, err);
	if (rc == 0) {
		fd = (int)syscall(SYS_pidfd_open, started, 0);
		if (fd == -1)
			rc = error_errno(err, ERROR_INTERNAL, "program '%s'",
			    program->path);
	}
	if (rc == -1) {
		end(started);
		return -1;
	}
	place->pid = started;
	place->pidfd = fd;
	*pid = started;
	if (pidfd != NULL)
		*pidfd = fd;
	return 0;
}
