/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * netspace_inside: the parts of a netspace.
 *
 * The first two run in a child made for them, which enters the new namespaces
 * in the caller's stead.  Nobody's globals change in the caller.
 */
#ifndef PLAFOND_REHEARSE_NETSPACE_INSIDE_H
#define PLAFOND_REHEARSE_NETSPACE_INSIDE_H

#include <signal.h>
#include <stdint.h>
#include <sys/types.h>

#include "rehearse/netspace.h"

#define NETSPACE_LIMIT_MS 10000		/* to open, to start; ends a hang */

struct netspace_running {
	pid_t pid;			/* 0: free */
	int pidfd;			/* owned */
};

struct netspace {
	pid_t owner;
	int user;			/* owned; -1: no user namespace */
	int net[NETSPACE_SIDES];	/* owned */
	int tun[NETSPACE_SIDES];	/* owned */
	struct netspace_running running[NETSPACE_PROGRAMS_MAX];
};

/* ERROR_INPUT: what no namespace can or may have.  Pure. */
int netspace_check(const struct netspace_end ends[NETSPACE_SIDES],
    struct error *err);

/* Enter new namespaces, and return descriptors of them in `made`. */
int netspace_make(const struct netspace_end ends[NETSPACE_SIDES],
    struct netspace *made, struct error *err);

/* Loopback, device, addresses and routes of the namespace that the calling
 * process is in. */
int netspace_link_set_up(const struct netspace_end *end,
    const struct netspace_end *other, struct error *err);

/* Why the kernel gives no namespace, by errno. */
int netspace_refuse(struct error *err);

/* Fork with all signals blocked in the child (the caller's handlers are none
 * of its business), which is killed when the calling thread ends.  `mask` is
 * what was blocked before. */
pid_t netspace_fork(sigset_t *mask);

/* Wait until fd is ready or deadline_ns of the raw clock is over.  0: ready */
int netspace_poll(int fd, uint64_t deadline_ns);
uint64_t netspace_deadline(int timeout_ms);

#endif
