/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "worker.h"

#include <assert.h>
#include <errno.h>
#include <signal.h>
#include <stdlib.h>
#include <string.h>
#include <sys/eventfd.h>
#include <unistd.h>

#include "clock.h"
#include "error.h"
#include "ring.h"
#include "transport.h"
#include "worker_stream.h"

void
worker_wake(int fd)
{
	const uint64_t one = 1;
	ssize_t written = write(fd, &one, sizeof(one));

	(void)written;		/* a full counter wakes as well */
}

void
worker_end(struct worker *worker, enum worker_end end,
    const struct stream *stream, int sys_errno)
{
	if (worker->over)
		return;
	worker->over = true;
	worker->result.end = end;
	worker->result.stream = stream != NULL ? stream->number : 0;
	worker->result.sys_errno = sys_errno;
	(void)event_base_loopbreak(worker->base);
}

void
worker_take_last_sample(struct worker *worker, const struct stream *stream)
{
	if (stream->number != 0 || worker->result.has_last)
		return;
	worker->common->transport->sample(stream->fd, &worker->result.last);
	worker->result.has_last = true;
}

void
worker_end_stream(struct worker *worker, struct stream *stream)
{
	if (stream->ended)
		return;
	worker_take_last_sample(worker, stream);
	(void)event_del(stream->data);
	if (stream->end != NULL)
		(void)event_del(stream->end);
	worker->common->transport->reset(stream->fd);
	worker->common->fds[stream->number] = -1;
	stream->ended = true;
	if (--worker->streams_open == 0)
		worker_end(worker, WORKER_FINISHED, NULL, 0);
}

static void
arm_timer(struct worker *worker, uint64_t in_ns)
{
	struct timeval tv = clock_timeval(in_ns);

	(void)event_add(worker->timer, &tv);
}

/* Streams that carry nothing are made to pass the edges here.  A late timer
 * moves no edge: they lie on the grid. */
static void
on_timer(evutil_socket_t fd, short what, void *arg)
{
	struct worker *worker = arg;
	uint64_t patience_ns;

	(void)fd;
	(void)what;
	if (worker->finishing) {
		worker_end(worker, WORKER_FINISHED, NULL, 0);
		return;
	}
	worker->now_ns = clock_raw_ns();
	worker_close_intervals(worker);
	if (worker->grid.zero_ns == 0) {
		arm_timer(worker, worker->common->trial->row_ns);
		return;
	}
	patience_ns = interval_patience_ns(&worker->grid);
	arm_timer(worker, patience_ns > worker->now_ns ?
	    patience_ns - worker->now_ns : 0);
}

/* The window is closed.  The streams are read on, uncounted, so that the
 * senders' ends come through. */
static void
finish(struct worker *worker)
{
	worker->finishing = true;
	for (size_t i = 0; i < worker->streams_count; i++) {
		worker_take_last_sample(worker, &worker->streams[i]);
		worker->common->transport->finish(worker->streams[i].fd);
	}
	arm_timer(worker, WORKER_FINISH_NS);
}

static void
on_wake(evutil_socket_t fd, short what, void *arg)
{
	struct worker *worker = arg;
	int order = atomic_load(&worker->order);
	uint64_t count;
	ssize_t got = read(fd, &count, sizeof(count));

	(void)got;
	(void)what;
	if (order == WORKER_STOP)
		worker_end(worker, WORKER_STOPPED, NULL, 0);
	else if (order == WORKER_FINISH && !worker->finishing)
		finish(worker);
}

static void *
run(void *arg)
{
	struct worker *worker = arg;
	struct worker_common *common = worker->common;

	worker->now_ns = clock_raw_ns();
	for (size_t i = 0; i < worker->streams_count; i++)
		interval_stream_init(&worker->streams[i].interval,
		    worker->now_ns);
	arm_timer(worker, common->trial->row_ns);
	(void)event_base_dispatch(worker->base);
	for (size_t i = 0; i < worker->streams_count; i++) {
		struct stream *stream = &worker->streams[i];

		worker->result.bytes += stream->interval.now_bytes;
		worker_end_stream(worker, stream);
	}
	atomic_store_explicit(&worker->ended, true, memory_order_release);
	worker_wake(common->main_fd);
	return NULL;
}

/* One stream with its events; -1: what was made is the worker's to free. */
static int
add_stream(struct worker *worker, struct stream *stream, uint64_t number,
    struct error *err)
{
	const struct worker_common *common = worker->common;
	short what = common->is_sender ? EV_WRITE : EV_READ;

	stream->worker = worker;
	stream->number = number;
	stream->coalesced_bytes = 1;
	stream->fd = common->fds[number];
	stream->sampled = interval_sampled(number, common->trial->streams);
	stream->data = event_new(worker->base, stream->fd,
	    (short)(what | EV_PERSIST), common->is_sender ?
	    worker_on_writable : worker_on_payload, stream);
	if (stream->data == NULL || event_add(stream->data, NULL) == -1)
		return error_set(err, ERROR_INTERNAL, "event of a stream");
	if (!common->is_sender)
		return 0;
	stream->end = event_new(worker->base, stream->fd,
	    EV_READ | EV_PERSIST, worker_on_sender_readable, stream);
	if (stream->end == NULL || event_add(stream->end, NULL) == -1)
		return error_set(err, ERROR_INTERNAL, "event of a stream");
	return 0;
}

static int
add_streams(struct worker *worker, unsigned index, struct error *err)
{
	const struct worker_common *common = worker->common;
	uint64_t streams = common->trial->streams;
	size_t sampled = 0;

	worker->streams_count = (size_t)((streams - index +
	    common->workers - 1) / common->workers);
	worker->streams_open = worker->streams_count;
	worker->calls_max = worker->streams_count < WORKER_CALLS_A_TURN ?
	    WORKER_CALLS_A_TURN / worker->streams_count : 1;
	worker->streams = calloc(worker->streams_count,
	    sizeof(*worker->streams));
	if (worker->streams == NULL) {
		worker->streams_count = 0;
		return error_set(err, ERROR_INTERNAL, "no memory");
	}
	for (size_t i = 0; i < worker->streams_count; i++) {
		if (add_stream(worker, &worker->streams[i],
		    index + i * common->workers, err) == -1)
			return -1;
		sampled += worker->streams[i].sampled;
	}
	return ring_new(WORKER_RING_ROWS, interval_part_bytes(sampled),
	    &worker->ring, err);
}

/* No thread but ours uses the base: no lock in it. */
static struct event_base *
new_base(void)
{
	struct event_config *config = event_config_new();
	struct event_base *base = NULL;

	if (config != NULL &&
	    event_config_set_flag(config, EVENT_BASE_FLAG_NOLOCK) == 0)
		base = event_base_new_with_config(config);
	if (config != NULL)
		event_config_free(config);
	return base;
}

static int
add_loop(struct worker *worker, struct error *err)
{
	worker->wake_fd = eventfd(0, EFD_CLOEXEC | EFD_NONBLOCK);
	if (worker->wake_fd == -1)
		return error_errno(err, ERROR_INTERNAL, "eventfd");
	worker->base = new_base();
	if (worker->base == NULL)
		return error_set(err, ERROR_INTERNAL, "event base");
	worker->timer = evtimer_new(worker->base, on_timer, worker);
	worker->wake = event_new(worker->base, worker->wake_fd,
	    EV_READ | EV_PERSIST, on_wake, worker);
	if (worker->timer == NULL || worker->wake == NULL ||
	    event_add(worker->wake, NULL) == -1)
		return error_set(err, ERROR_INTERNAL, "events of a worker");
	return 0;
}

/* Signals are the main thread's. */
static int
start_thread(struct worker *worker, struct error *err)
{
	sigset_t all, old;

	(void)sigfillset(&all);
	(void)pthread_sigmask(SIG_SETMASK, &all, &old);
	errno = pthread_create(&worker->thread, NULL, run, worker);
	worker->has_thread = errno == 0;
	(void)pthread_sigmask(SIG_SETMASK, &old, NULL);
	if (!worker->has_thread)
		return error_errno(err, ERROR_INTERNAL, "thread");
	return 0;
}

int
worker_start(struct worker_common *common, unsigned index,
    struct worker **out, struct error *err)
{
	struct worker *worker = calloc(1, sizeof(*worker));

	assert(index < common->workers &&
	    common->workers <= common->trial->streams);
	if (worker == NULL)
		return error_set(err, ERROR_INTERNAL, "no memory");
	worker->common = common;
	worker->wake_fd = -1;
	worker->grid.row_ns = common->trial->row_ns;
	if (add_loop(worker, err) == -1 ||
	    add_streams(worker, index, err) == -1 ||
	    start_thread(worker, err) == -1) {
		worker_free(worker);
		return -1;
	}
	*out = worker;
	return 0;
}

void
worker_order(struct worker *worker, enum worker_order order)
{
	if (atomic_load(&worker->order) >= (int)order)
		return;
	atomic_store(&worker->order, (int)order);
	worker_wake(worker->wake_fd);
}

const struct interval_part *
worker_front(struct worker *worker)
{
	return ring_front(worker->ring);
}

void
worker_pop(struct worker *worker)
{
	ring_pop(worker->ring);
}

const struct worker_result *
worker_result(const struct worker *worker)
{
	return atomic_load_explicit(&worker->ended, memory_order_acquire) ?
	    &worker->result : NULL;
}

static void
free_event(struct event *event)
{
	if (event != NULL)
		event_free(event);
}

void
worker_free(struct worker *worker)
{
	if (worker == NULL)
		return;
	if (worker->has_thread) {
		worker_order(worker, WORKER_STOP);
		(void)pthread_join(worker->thread, NULL);
	}
	for (size_t i = 0; i < worker->streams_count; i++) {
		free_event(worker->streams[i].data);
		free_event(worker->streams[i].end);
	}
	free_event(worker->timer);
	free_event(worker->wake);
	if (worker->base != NULL)
		event_base_free(worker->base);
	if (worker->wake_fd != -1)
		(void)close(worker->wake_fd);
	ring_free(worker->ring);
	free(worker->streams);
	free(worker);
}
