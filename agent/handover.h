/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * handover: one direction's rows on their way to the controller.
 *
 * Batches rows into numbered frames while the trial runs, keeps the digest of
 * what was sent, and tells progress.  Frames that the controller has not
 * acknowledged are counted and bounded.
 */
#ifndef PLAFOND_HANDOVER_H
#define PLAFOND_HANDOVER_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include <jansson.h>

#include "measurement.h"
#include "transfer.h"

struct error;
struct handover;

/* Frames of one trial, both directions together. */
struct handover_counter {
	uint64_t sent, received;
};

/* send takes each message.  Borrows counter.  NULL: out of memory. */
struct handover *handover_new(enum direction direction, bool is_sender,
    struct handover_counter *counter,
    void (*send)(json_t *message, void *arg), void *arg);
/* streams: at most MEASUREMENT_STREAMS_SAMPLED.  -1 (ERROR_PEER): another
 * batch would leave more than WIRE_ROWS_UNACKNOWLEDGED_MAX frames that the
 * controller has not acknowledged; this row is not taken. */
int handover_row(struct handover *handover, const struct transfer_row *row,
    struct error *err);
/* Send what is left and the measurement, completed with rows and digest. */
void handover_finish(struct handover *handover,
    struct measurement *measurement);
void handover_received(struct handover_counter *counter, uint64_t number);
void handover_free(struct handover *handover);	/* NULL is fine */

#endif
