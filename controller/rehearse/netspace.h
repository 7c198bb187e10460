/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * netspace: two private network namespaces with a TUN device in each.
 *
 * What a namespace sends comes out of the descriptor of its TUN device, and
 * what is written there arrives in it: bare IP packets, nothing before them.
 * Nothing else leads in or out.  Carrying packets is somebody else's work.
 *
 * Where the caller may not make network namespaces, they belong to a user
 * namespace in which the caller's own user and group are the only ones.
 *
 * Namespaces and devices live by our descriptors and processes alone: nothing
 * is mounted for them, nothing gets a name.  When the caller ends, in whatever
 * way, the kernel ends what was started inside and takes everything away.  A
 * process that the caller forks without exec shares the descriptors and must
 * end (or call netspace_close) for that.
 *
 * Never touches interfaces, addresses and routes of the host; refuses addresses
 * outside 198.18.0.0/15 (RFC 2544) and 2001:2::/48 (RFC 5180).  Linux alone.
 */
#ifndef PLAFOND_REHEARSE_NETSPACE_H
#define PLAFOND_REHEARSE_NETSPACE_H

#include <stdint.h>
#include <sys/types.h>

struct error;
struct netspace;

enum netspace_side { NETSPACE_A, NETSPACE_B, NETSPACE_SIDES };

#define NETSPACE_PROGRAMS_MAX 16	/* running at once */
#define NETSPACE_FDS 4			/* that a program is given */

/* What one namespace has beside its loopback.  Both sides have the same IP
 * versions; each has a route to the other and a default route. */
struct netspace_end {
	const char *device;		/* name of the TUN device */
	const char *ipv4, *ipv6;	/* NULL: none; one at least */
	uint32_t mtu_bytes;
	/* How many packets wait for the reader of the descriptor; the kernel
	 * drops, and counts, what comes beyond.  0: the kernel's default. */
	uint32_t queue_packets;
};

struct netspace_program {
	const char *path;		/* no search */
	char *const *argv;		/* ends with NULL */
	char *const *envp;		/* NULL: the caller's */
	/* Descriptors of the caller that become 0, 1, 2, 3.  -1: /dev/null,
	 * and 3 is closed.  The program has no others. */
	int fds[NETSPACE_FDS];
};

/* Blocks, 10 s at most.  *out is owned.
 * -1: ERROR_INPUT (what is asked for), ERROR_UNREACHABLE (this machine or this
 * user cannot have it; the cause says what is missing and how to get it),
 * ERROR_INTERNAL. */
int netspace_open(const struct netspace_end ends[NETSPACE_SIDES],
    struct netspace **out, struct error *err);

/* Descriptor of the TUN device: non-blocking, closed on exec.  Borrowed. */
int netspace_tun(const struct netspace *netspace, enum netspace_side side);

/* Run a program in a namespace, in a session and a process namespace of its own
 * and, where the system allows that, with a /proc and a /sys that fit.
 * Returns when it is executing, 10 s at most.
 *
 * *pid is a child of the caller that passes on each signal it gets, but SIGKILL
 * and SIGSTOP, and has the program's exit status, 128 + N where signal N ended
 * it.  Once it has ended, nothing that the program started is left.  It is
 * killed when the calling thread ends.  *pidfd (may be NULL) is readable then;
 * borrowed, until netspace_wait or netspace_close.
 * -1: ERROR_ABSENT (no such program), ERROR_UNREACHABLE, ERROR_INTERNAL. */
int netspace_start(struct netspace *netspace, enum netspace_side side,
    const struct netspace_program *program, pid_t *pid, int *pidfd,
    struct error *err);

/* 0: has ended, *status as above (-1: somebody else took it).
 * -1: still runs after timeout_ms, or is none of ours. */
int netspace_wait(struct netspace *netspace, pid_t pid, int timeout_ms,
    int *status);

/* Kill what was started, with all its children, and wait for that, 2 s at most;
 * then close.  In a process that the caller forked: close alone. */
void netspace_close(struct netspace *netspace);

#endif
