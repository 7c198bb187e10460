/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * pair_inside: the pair as its own files see it: pair.c (the loop, opening),
 * pair_call.c (agents that call) and pair_trial.c (a trial).
 */
#ifndef PLAFOND_PAIR_INSIDE_H
#define PLAFOND_PAIR_INSIDE_H

#include <stdbool.h>
#include <stdint.h>

#include "channel.h"
#include "conduct/link.h"
#include "conduct/pair.h"
#include "conduct/run.h"
#include "error.h"

/* How long an agent is waited for that calls. */
#define PAIR_CALL_LIMIT_NS UINT64_C(60000000000)

/* A caller whose identity is not known yet. */
struct visitor {
	struct pair *pair;		/* borrowed: outlives us */
	struct channel *channel;	/* owned */
	struct visitor *next;
};

struct pair {
	struct pair_config config;
	struct event_base *base;	/* owned */
	struct identity *identity;	/* owned; NULL: all embedded */
	struct ssl_ctx_st *tls;		/* owned */
	struct link links[ENDS];
	struct event *signals[2];	/* owned */
	struct event *waking;		/* owned; ends a bounded wait */
	struct event *accepting;	/* owned */
	int listen_fd;
	struct visitor *visitors;	/* owned list */
	bool interrupted;
	bool woken;
	uint64_t exchanges_wanted;
	struct run run;			/* of the trial that runs */
};


/* Run the loop until `done` says so; limit_ns 0: no limit.  0: done, 1: time
 * is up, -1: ERROR_INTERRUPTED. */
int pair_wait_until(struct pair *pair, bool (*done)(struct pair *pair),
    uint64_t limit_ns, struct error *err);
bool pair_both_in(const struct pair *pair, enum link_state state);
bool pair_any_gone(const struct pair *pair);
int pair_gone_error(const struct pair *pair, struct error *err);
int pair_interrupted(struct error *err);

/* pair_call.c */
int pair_listen_for_calls(struct pair *pair, struct error *err);
void visitor_leave(struct visitor *visitor);

/* pair_trial.c: what links tell while a trial runs */
void pair_on_progress(struct link *link,
    const struct wire_progress *progress, void *arg);
void pair_on_rows(struct link *link, const struct wire_rows *rows,
    const json_t *message, void *arg);
void pair_on_measurement(struct link *link,
    const struct measurement *measurement, void *arg);

#endif
