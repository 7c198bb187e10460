/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * part: this agent's part in one trial: the streams it opens or accepts, the
 * transfers on them, the rows and measurements it hands over.
 *
 * Owns the door or the knock, the transfers and the tokens.  Speaks through
 * its callbacks only, which come from the loop; any of them may free it.
 */
#ifndef PLAFOND_PART_H
#define PLAFOND_PART_H

#include <jansson.h>
#include <stdint.h>

#include "wire.h"

struct error;
struct event_base;
struct part;
struct policy;

struct part_callbacks {
	void (*send)(json_t *message, void *arg);	/* takes message */
	void (*opened)(void *arg);	/* all streams open, load begins */
	void (*finished)(void *arg);	/* every measurement has been sent */
	void (*failed)(const struct error *why, void *arg);
};

/* Make tokens for what this end receives and, unless it opens the connections,
 * bind the data port.  *ready is what to answer.  -1: ERROR_REFUSED by the
 * policy, ERROR_BUSY (port), ERROR_INTERNAL. */
int part_prepare(struct event_base *base, const struct policy *policy,
    const struct wire_prepare *prepare, uint64_t session_zero_ns,
    const struct part_callbacks *callbacks, void *arg,
    struct wire_ready *ready, struct part **out, struct error *err);
/* Accept or open the streams; the transfers start when all are there. */
int part_start(struct part *part, const struct wire_start *start,
    struct error *err);
/* The controller keeps rows frames up to this one. */
void part_rows_received(struct part *part, uint64_t number);
/* Longest time that a run of this trial may take. */
uint64_t part_limit_ns(const struct part *part);
/* How many directions report a measurement. */
unsigned part_directions(const struct part *part);
void part_free(struct part *part);	/* NULL is fine */

#endif
