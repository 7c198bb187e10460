/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * run: collects what both agents say of one trial and counts it.
 *
 * One direction alone counts the receiver's own window.  With both directions
 * at once only the overlap of the two windows counts, set against each other by
 * the clock exchange.  Pure but for the digest.
 */
#ifndef PLAFOND_RUN_H
#define PLAFOND_RUN_H

#include <stdbool.h>
#include <stdint.h>

#include <jansson.h>

#include "conduct/exchange.h"
#include "conduct/overlap.h"
#include "conduct/trial_run.h"
#include "error.h"
#include "wire.h"

struct run {
	struct trial_run *out;			/* borrowed */
	struct overlap *overlaps[DIRECTIONS_SINGLE];	/* owned */
	/* owned; of the rows as they came, by direction and end */
	struct wire_rows_digest *digests[DIRECTIONS_SINGLE][ENDS];
};

int run_begin(struct run *run, const struct trial *trial,
    struct trial_run *out, struct error *err);
void run_rows(struct run *run, enum end end, const struct wire_rows *rows,
    const json_t *message);
void run_measurement(struct run *run, enum end end,
    const struct measurement *measurement);
/* Fill what is counted; clocks[end] is that agent's clock against ours. */
void run_finish(struct run *run, const struct exchange_sample clocks[ENDS]);
void run_fini(struct run *run);

#endif
