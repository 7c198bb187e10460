/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * worker: one thread that carries some of the streams of one transfer.
 *
 * Has an event base of its own with plain events; lives for one transfer.
 * Closes its intervals itself and hands its parts of the rows to the main
 * thread through a ring; takes one order, through an atomic and an eventfd.
 * On the data path: no lock, no allocation, no text, bounded work a callback.
 *
 *     running --FINISH--> finishing (a receiver: discards until the end of
 *        |                 |         file or WORKER_FINISH_NS)
 *        |  its last stream ended    |
 *        +-------------------------->+--> ended (all its sockets are closed)
 *           STOP, a broken stream
 */
#ifndef PLAFOND_WORKER_H
#define PLAFOND_WORKER_H

#include <stdatomic.h>
#include <stdbool.h>
#include <stdint.h>

#include "interval.h"
#include "measurement.h"

#define WORKER_RING_ROWS 256		/* 2.56 s of the shortest rows */
#define WORKER_FINISH_NS UINT64_C(1000000000)
/* How long a worker waits for the main thread to take rows. */
#define WORKER_STALL_NS UINT64_C(2000000000)

struct error;
struct payload;
struct transport;
struct worker;

/* What all workers of one transfer share; outlives them. */
struct worker_common {
	const struct trial *trial;		/* borrowed */
	const struct transport *transport;	/* borrowed */
	const struct payload *payload;		/* borrowed; sender only */
	int *fds;		/* borrowed; -1 once a worker has closed it */
	int main_fd;		/* eventfd that wakes the main thread */
	bool is_sender;
	unsigned workers;
	/* The zero is where stream number `zero_streams` to start starts: the
	 * last one of a receiver, the first one of a sender. */
	uint64_t zero_streams;
	_Atomic uint64_t started;
	_Atomic uint64_t zero_ns;		/* raw clock; 0: not yet */
};

enum worker_order { WORKER_RUN, WORKER_FINISH, WORKER_STOP };

enum worker_end {
	WORKER_FINISHED,	/* in good order */
	WORKER_STOPPED,		/* told to */
	WORKER_CLOSED,		/* the peer closed a stream too early */
	WORKER_FAILED,		/* a stream failed, by sys_errno */
	WORKER_UNASKED,		/* payload came from a receiver */
	WORKER_STALLED		/* the main thread took no rows */
};

struct worker_result {
	enum worker_end end;
	uint64_t stream;	/* the one that broke */
	int sys_errno;
	uint64_t bytes;		/* all of its streams, to the end */
	bool has_last;		/* it carried stream 0 */
	struct tcp_sample last;	/* of stream 0 */
};

/* Start worker `index` of common->workers, with the streams index,
 * index + workers, and so on.  Returns owned. */
int worker_start(struct worker_common *common, unsigned index,
    struct worker **out, struct error *err);
/* Orders only go up; safe at any time from the main thread. */
void worker_order(struct worker *worker, enum worker_order order);
/* The next part of a row, NULL: none yet; until it is popped. */
const struct interval_part *worker_front(struct worker *worker);
void worker_pop(struct worker *worker);
/* NULL while it runs; when it has ended, no part follows that is not yet in
 * the ring. */
const struct worker_result *worker_result(const struct worker *worker);
void worker_free(struct worker *worker);	/* stops, joins; NULL is fine */

#endif
