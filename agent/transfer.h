/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * transfer: the load of one direction of one trial at one agent.
 *
 * Takes sockets that are connected and whose tokens have been checked, spreads
 * them over worker threads (one a core at most), runs until the window closes
 * or it is told to stop, and hands finished rows to the main thread's loop in
 * order.  Owns the sockets, the workers and the payload.  Holds no arithmetic:
 * edges and the window are in interval.c, which is pure.
 *
 *     receiver: settle -> window closes -> shutdown(SHUT_WR) on every stream
 *     sender:   end of file from the receiver -> last sample -> reset (no
 *               queue is drained into the circuit after the window)
 */
#ifndef PLAFOND_TRANSFER_H
#define PLAFOND_TRANSFER_H

#include <stdbool.h>
#include <stddef.h>

#include "measurement.h"
#include "trial.h"

struct error;
struct event_base;
struct transfer;

/* What the receiver tells while it runs; the sender's are for show only. */
enum transfer_phase { TRANSFER_WAITING, TRANSFER_SETTLING, TRANSFER_COUNTING,
	TRANSFER_CLOSED };
const char *transfer_phase_name(enum transfer_phase phase);

/* One finished interval; all borrowed for the call. */
struct transfer_row {
	const struct interval_row *interval;
	const struct stream_row *streams;	/* sampled, at its end */
	size_t streams_count;	/* at most MEASUREMENT_STREAMS_SAMPLED */
	const struct worker_row *workers;
	size_t workers_count;	/* at most TRIAL_STREAMS_MAX */
	enum transfer_phase phase;
};

struct transfer_callbacks {
	/* In order. */
	void (*row)(struct transfer *transfer, const struct transfer_row *row,
	    void *arg);
	/* Over; exactly once, from the loop, after the last row; may free.
	 * why is set for MEASUREMENT_PEER_LOST. */
	void (*done)(struct transfer *transfer, enum measurement_end end,
	    const struct error *why, void *arg);
};

struct transfer_config {
	const struct trial *trial;	/* copied */
	enum direction direction;	/* single */
	bool is_sender;
	const int *fds;			/* trial->streams of them; taken, also
					 * on failure; index = stream number */
	uint64_t session_zero_ns;	/* raw clock of the session's zero */
	unsigned workers;		/* 0: one a core, at most the streams */
};

/* Start the workers.  Returns owned.  -1: nothing is left running. */
int transfer_start(struct event_base *base,
    const struct transfer_config *config,
    const struct transfer_callbacks *callbacks, void *arg,
    struct transfer **out, struct error *err);
/* End now; `done` follows from the loop with MEASUREMENT_STOPPED. */
void transfer_stop(struct transfer *transfer);
/* Totals so far (all but sha256, which whoever sends the rows knows). */
void transfer_totals(const struct transfer *transfer, struct measurement *out);
void transfer_free(struct transfer *transfer);	/* joins; NULL is fine */

/* Options that must be set before connect or listen: buffers, congestion
 * control, MSS, DSCP.  The rate limit is not among them: transfer_start sets
 * it on a sender's sockets.  -1: ERROR_REFUSED, ERROR_INPUT. */
int transfer_prepare_socket(int fd, int family, const struct trial *trial,
    bool is_sender, struct error *err);

#endif
