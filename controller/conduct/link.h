/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * link: the controller's connection to the agent of one end.
 *
 * Reaches it however the declaration says (dial, wait for its call, through the
 * other agent's relay, as a child process), greets it, beats all the time, and
 * turns its messages into the state and the answers below.  The machine is in
 * link_state.c.  Owned and driven by the pair, which runs the loop.
 */
#ifndef PLAFOND_LINK_H
#define PLAFOND_LINK_H

#include <stdbool.h>
#include <stdint.h>
#include <sys/types.h>

#include <jansson.h>

#include "conduct/exchange.h"
#include "conduct/link_state.h"
#include "declare/circuit.h"
#include "error.h"
#include "wire.h"

struct channel;
struct event;
struct event_base;
struct link;
struct ssl_ctx_st;

/* What the pair wants to hear at once; borrowed for the call. */
struct link_callbacks {
	void (*progress)(struct link *link,
	    const struct wire_progress *progress, void *arg);
	/* Decoded, and as it came for the digest and the file. */
	void (*rows)(struct link *link, const struct wire_rows *rows,
	    const json_t *message, void *arg);
	void (*measurement)(struct link *link,
	    const struct measurement *measurement, void *arg);
};

struct link {
	struct event_base *base;		/* borrowed: outlives us */
	const struct end_declaration *declared;	/* borrowed: outlives us */
	struct ssl_ctx_st *tls;			/* borrowed; NULL: embedded */
	enum end end;
	enum link_state state;
	struct channel *channel;	/* owned */
	pid_t child;			/* owned; 0: none */
	bool relaying;		/* an outer connection, not the agent's */
	const struct trust *outer_identity;	/* borrowed: outlives us */
	char relay_name[64];		/* whom to ask the outer agent for */
	struct event *deadline;		/* owned */
	struct event *silence;		/* owned */
	struct event *beating;		/* owned */
	uint64_t zero_ns;		/* raw clock, of our time stamps */
	uint64_t beats;
	struct exchange exchange;
	struct wire_hello hello;
	struct wire_capability capability;
	struct wire_ready ready;
	struct wire_reference_result reference;
	unsigned measurements_due;
	struct wire_rows *rows;		/* owned; room for decoding */
	struct error why;		/* of the last abort, refusal or loss */
	struct link_callbacks callbacks;
	void *arg;
};

/* zero_ns is shared by both links so that their offsets compare. */
int link_init(struct link *link, struct event_base *base, enum end end,
    const struct end_declaration *declared, struct ssl_ctx_st *tls,
    uint64_t zero_ns, const struct link_callbacks *callbacks, void *arg,
    struct error *err);
void link_fini(struct link *link);	/* closes, ends the child */

/* Ways to reach it; then wait for state IDLE or GONE. */
int link_dial(struct link *link, const char *address, struct error *err);
int link_spawn(struct link *link, const char *agent_program,
    struct error *err);
/* Dial the agent at `address`, which `outer` is the declared end of, and ask it
 * to be joined with the agent named as this link's end. */
int link_dial_relay(struct link *link, const struct end_declaration *outer,
    struct error *err);
/* Take an accepted connection, whose identity the pair has checked. */
void link_take_called(struct link *link, struct channel *channel);

/* Requests; each needs the state that link_state.h draws. */
int link_prepare(struct link *link, const struct wire_prepare *prepare,
    struct error *err);
int link_start(struct link *link, const struct wire_start *start,
    unsigned measurements, struct error *err);
int link_ask_reference(struct link *link, uint64_t duration_ns,
    struct error *err);
void link_abort(struct link *link, const char *reason);

#endif
