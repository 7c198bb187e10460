/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * worker_stream: what the two halves of a worker share: worker.c (its life)
 * and worker_stream.c (its data path).  Nobody else includes this.
 */
#ifndef PLAFOND_WORKER_STREAM_H
#define PLAFOND_WORKER_STREAM_H

#include <event2/event.h>
#include <pthread.h>
#include <stdatomic.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "interval.h"
#include "worker.h"

struct ring;

struct stream {
	struct worker *worker;		/* borrowed */
	struct event *data;		/* owned; readable or writable */
	struct event *end;		/* owned; sender: readable */
	struct interval_stream interval;
	uint64_t number;
	uint64_t coalesced_bytes;	/* receiver: a wake-up's, 1: any */
	int fd;				/* closed by the worker */
	bool started, ended, sampled;
};

struct worker {
	struct worker_common *common;	/* borrowed: outlives us */
	struct event_base *base;	/* owned */
	struct event *timer, *wake;	/* owned */
	struct ring *ring;		/* owned */
	struct stream *streams;		/* owned */
	size_t streams_count, streams_open;
	size_t calls_max;		/* a callback */
	struct interval_grid grid;
	size_t held;			/* streams that have passed its edge */
	uint64_t now_ns;		/* the last reading of the clock */
	uint64_t cpu_ns;		/* at the last cut */
	pthread_t thread;
	bool has_thread, finishing, over;
	int wake_fd;			/* owned */
	struct worker_result result;
	_Atomic int order;
	_Atomic bool ended;
};

/* Calls on payload, shared by the streams of a worker, so that a turn over
 * all of them stays short; each has one. */
#define WORKER_CALLS_A_TURN 8

/* Wake whoever reads an eventfd. */
void worker_wake(int fd);
/* Leave the loop for this reason; the first call wins. */
void worker_end(struct worker *worker, enum worker_end end,
    const struct stream *stream, int sys_errno);
void worker_take_last_sample(struct worker *worker,
    const struct stream *stream);
/* The stream is over in good order, and with the last one the worker. */
void worker_end_stream(struct worker *worker, struct stream *stream);

/* Close every interval whose edge all streams have passed, or have had time to
 * pass.  Called after every observation, so that no stream passes a second edge
 * while the first is open. */
void worker_close_intervals(struct worker *worker);
/* Callbacks of a stream's events; arg: the stream. */
void worker_on_payload(evutil_socket_t fd, short what, void *arg);
void worker_on_writable(evutil_socket_t fd, short what, void *arg);
void worker_on_sender_readable(evutil_socket_t fd, short what, void *arg);

#endif
