/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * agent: the daemon at one end of a circuit.
 *
 * Owns the policy, the identity, the control port, the sessions and the calls
 * that it makes.  Everything happens on one event loop; only a transfer has
 * threads of its own.
 */
#ifndef PLAFOND_AGENT_H
#define PLAFOND_AGENT_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "policy.h"

struct error;
struct event;
struct event_base;
struct identity;
struct relay;
struct session;
struct ssl_ctx_st;

#define AGENT_SESSIONS_MAX 32

/* A place this agent calls, again and again. */
struct call {
	struct agent *agent;			/* borrowed: outlives us */
	const struct policy_call *policy;	/* borrowed: outlives us */
	struct event *again;			/* owned */
	struct session *session;		/* borrowed; NULL between */
};

struct agent {
	struct event_base *base;	/* borrowed: outlives us */
	struct policy policy;
	bool embedded;			/* one session on a socket pair */
	struct identity *identity;	/* owned; NULL where embedded */
	struct ssl_ctx_st *tls;		/* owned; NULL where embedded */
	int control_fd;
	uint16_t control_port;
	struct event *accepting;	/* owned */
	struct session *sessions;	/* owned list */
	size_t sessions_count;
	unsigned trials;		/* running at this moment */
	struct relay *relays;		/* owned list */
	struct call calls[POLICY_CALLS_MAX];
	bool ended;		/* an embedded agent's session is over */
};

/* Borrow base; take identity.  policy is copied.  -1: ERROR_BUSY (port in
 * use), ERROR_INTERNAL; nothing is left open. */
int agent_open(struct agent *agent, struct event_base *base,
    const struct policy *policy, struct identity *identity,
    struct error *err);
/* Serve the one controller at the other end of a socket pair. */
int agent_open_embedded(struct agent *agent, struct event_base *base, int fd,
    struct error *err);
void agent_close(struct agent *agent);

#endif
