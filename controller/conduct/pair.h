/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * pair: the two agents of a circuit under one controller.
 *
 * Owns the event loop, both links and what they need.  Each function runs the
 * loop until its work is done, so a command reads from top to bottom; SIGINT
 * and SIGTERM end any of them with ERROR_INTERRUPTED after the agents were
 * told to stop.
 */
#ifndef PLAFOND_PAIR_H
#define PLAFOND_PAIR_H

#include <stdbool.h>
#include <stdint.h>

#include <jansson.h>

#include "conduct/exchange.h"
#include "conduct/trial_run.h"
#include "declare/circuit.h"
#include "trial.h"
#include "wire.h"

struct error;
struct pair;

struct pair_config {
	const struct circuit *circuit;	/* borrowed: outlives the pair */
	const char *state_folder;	/* for the controller's identity */
	const char *listen;		/* for agents that call */
	const char *agent_program;	/* "" = beside this program */
	/* Seen while a trial runs; may be NULL. */
	void (*progress)(const struct trial *trial,
	    const struct wire_progress *progress, void *arg);
	/* Every rows frame of the trial that runs; may be NULL. */
	void (*rows)(const struct trial *trial, enum end end,
	    const json_t *message, void *arg);
	void *arg;
};

/* Reach and greet both agents and exchange clocks.  Returns owned.
 * -1: ERROR_UNREACHABLE, ERROR_REFUSED, ERROR_PEER, ERROR_INTERRUPTED... */
int pair_open(const struct pair_config *config, struct pair **out,
    struct error *err);
void pair_close(struct pair *pair);	/* NULL is fine */

/* Borrowed, until pair_close. */
const struct wire_capability *pair_capability(const struct pair *pair,
    enum end end);
/* Best sample so far: the agent's clock against ours. */
bool pair_clock(const struct pair *pair, enum end end,
    struct exchange_sample *out);
/* Run the loop until both have so many exchanges, or time_ns has passed. */
int pair_exchange(struct pair *pair, uint64_t samples, uint64_t time_ns,
    struct error *err);

/* Bare copy loop of an end's host, bit/s of payload. */
int pair_reference(struct pair *pair, enum end end, uint64_t duration_ns,
    uint64_t *payload_bps, struct error *err);

/* Conduct one trial.  out is filled as far as it went: out->failed says that
 * it did not come to its end, and why.  -1 only where the pair is of no use
 * any more: an agent is lost, or ERROR_INTERRUPTED (out is still filled). */
int pair_run(struct pair *pair, const struct trial *trial,
    struct trial_run *out, struct error *err);

/* The address that data to this end goes to: declared, else the host of its
 * control address, else loopback for an embedded agent. */
int pair_data_address(const struct circuit *circuit, enum end end, char *buf,
    size_t size, struct error *err);

#endif
