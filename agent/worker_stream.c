/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The data path of a worker: calls, observations, intervals. */
#include "worker_stream.h"

#include <time.h>

#include "clock.h"
#include "payload.h"
#include "ring.h"
#include "transport.h"
#include "units.h"

/* Bytes a call: measured over loopback, where 256 KiB to 1 MiB carry the
 * most. */
#define CALL_BYTES ((size_t)1024 * 1024)
/* A stream that has not passed an edge yet is read for so much. */
#define SWEEP_BYTES ((size_t)64 * 1024)
/* Wake-ups of a fast stream cost both ends more than its bytes do: it is
 * read every 100 us rather than at each segment.  256 KiB a wake-up instead
 * of some 90 KiB saved a fifth of the CPU time at 45 Gbit/s. */
#define COALESCE_NS UINT64_C(100000)
#define COALESCE_BYTES_MIN UINT64_C(65536)
#define COALESCE_BYTES_MAX UINT64_C(262144)
/* The sender's zero comes before the receiver's, so the end of file comes
 * after settle and duration; the two clocks may differ by this much. */
#define EARLY_PERCENT 99

static bool
is_running(const struct worker *worker)
{
	return !worker->over && !worker->finishing &&
	    atomic_load_explicit(&worker->order, memory_order_relaxed) ==
	    WORKER_RUN;
}

/* The first byte of a stream; at_ns: before the call that carried it. */
static void
start_stream(struct worker *worker, struct stream *stream, uint64_t at_ns)
{
	struct worker_common *common = worker->common;

	stream->started = true;
	interval_observe(&stream->interval, at_ns, 0);
	if (atomic_fetch_add(&common->started, 1) + 1 != common->zero_streams)
		return;
	atomic_store(&common->zero_ns, at_ns);
	worker_wake(common->main_fd);
}

/* The stream carried this by now; is the open edge passed? */
static void
observe(struct worker *worker, struct stream *stream, uint64_t bytes)
{
	interval_observe(&stream->interval, worker->now_ns, bytes);
	if (worker->grid.zero_ns != 0 && interval_hold(&stream->interval,
	    interval_edge_ns(&worker->grid)))
		worker->held++;
}

static enum io_result
receive_once(struct worker *worker, struct stream *stream, size_t size,
    size_t *bytes, int *sys_errno)
{
	uint64_t before_ns = stream->started ? 0 : clock_raw_ns();
	enum io_result result = worker->common->transport->receive(stream->fd,
	    size, bytes, sys_errno);

	worker->now_ns = clock_raw_ns();
	if (*bytes == 0)
		return result;
	if (!stream->started)
		start_stream(worker, stream, before_ns);
	observe(worker, stream, *bytes);
	return result;
}

static enum io_result
send_once(struct worker *worker, struct stream *stream, size_t *bytes,
    size_t *asked, int *sys_errno)
{
	const struct worker_common *common = worker->common;
	const struct payload *payload = common->payload;
	uint64_t before_ns = stream->started ? 0 : clock_raw_ns();
	/* the streams begin at places of their own */
	uint64_t position = stream->interval.now_bytes +
	    payload->period_bytes / common->trial->streams * stream->number;
	const unsigned char *from;
	enum io_result result;

	*asked = CALL_BYTES;
	from = payload_at(payload, position, asked);
	result = common->transport->send(stream->fd, from, *asked, bytes,
	    sys_errno);
	worker->now_ns = clock_raw_ns();
	if (*bytes == 0)
		return result;
	if (!stream->started)
		start_stream(worker, stream, before_ns);
	observe(worker, stream, *bytes);
	return result;
}

/* What a receiver does about a stream that cannot be read any more. */
static void
lose_stream(struct worker *worker, struct stream *stream,
    enum io_result result, int sys_errno)
{
	if (worker->finishing)
		worker_end_stream(worker, stream);
	else
		worker_end(worker, result == IO_CLOSED ? WORKER_CLOSED :
		    WORKER_FAILED, stream, sys_errno);
}

/* Bring every stream past the edge: a last look where it has not passed it.  A
 * sender hands over nothing outside of its calls. */
static void
sweep(struct worker *worker)
{
	for (size_t i = 0; i < worker->streams_count && !worker->over; i++) {
		struct stream *stream = &worker->streams[i];
		enum io_result result = IO_AGAIN;
		size_t bytes;
		int sys_errno = 0;

		if (stream->interval.held)
			continue;
		if (!worker->common->is_sender)
			result = receive_once(worker, stream, SWEEP_BYTES,
			    &bytes, &sys_errno);
		interval_force(&stream->interval, worker->now_ns);
		if (result == IO_CLOSED || result == IO_FAILED)
			lose_stream(worker, stream, result, sys_errno);
	}
}

/* The next edge is open: some streams may have passed it as well. */
static void
open_edge(struct worker *worker)
{
	uint64_t edge_ns = interval_edge_ns(&worker->grid);

	worker->held = 0;
	for (size_t i = 0; i < worker->streams_count; i++)
		worker->held += interval_hold(&worker->streams[i].interval,
		    edge_ns);
}

/* A slot of the ring; where it is full, wait: the main thread is late, and
 * the rows must stay whole.  NULL: given up, or told to stop. */
static struct interval_part *
reserve_part(struct worker *worker)
{
	const struct timespec pause = { .tv_nsec = 1000000 };
	uint64_t since_ns = clock_raw_ns();
	struct interval_part *part;

	while ((part = ring_reserve(worker->ring)) == NULL) {
		if (!is_running(worker))
			return NULL;
		if (clock_raw_ns() - since_ns > WORKER_STALL_NS) {
			worker_end(worker, WORKER_STALLED, NULL, 0);
			return NULL;
		}
		worker_wake(worker->common->main_fd);
		(void)nanosleep(&pause, NULL);
	}
	return part;
}

/* Bytes to wait for at the rate of the last row: a power of two, so that it
 * seldom changes; 1 for a stream that is not fast.  Pure. */
static uint64_t
coalesced_bytes(uint64_t row_bytes, uint64_t row_ns)
{
	uint64_t bytes = scale_u64(row_bytes, COALESCE_NS, row_ns);
	uint64_t power = COALESCE_BYTES_MIN;

	if (bytes < COALESCE_BYTES_MIN)
		return 1;
	while (power < COALESCE_BYTES_MAX && power * 2 <= bytes)
		power *= 2;
	return power;
}

static void
coalesce(struct worker *worker, struct stream *stream, uint64_t row_bytes)
{
	uint64_t bytes = coalesced_bytes(row_bytes, worker->grid.row_ns);

	if (!worker->common->is_sender && bytes != stream->coalesced_bytes)
		stream->coalesced_bytes = worker->common->transport->coalesce(
		    stream->fd, bytes);
}

static void
fill_part(struct worker *worker, struct interval_part *part)
{
	uint64_t cpu_ns = clock_thread_cpu_ns();

	part->number = worker->grid.next - 1;
	part->bytes = 0;
	part->cpu_ns = cpu_ns - worker->cpu_ns;
	part->streams_count = 0;
	worker->cpu_ns = cpu_ns;
	for (size_t i = 0; i < worker->streams_count; i++) {
		struct stream *stream = &worker->streams[i];
		uint64_t bytes = interval_cut(&stream->interval);
		struct stream_row *row;

		part->bytes += bytes;
		coalesce(worker, stream, bytes);
		if (!stream->sampled)
			continue;
		row = &part->streams[part->streams_count++];
		row->number = part->number;
		row->stream = stream->number;
		row->bytes = bytes;
		worker->common->transport->sample(stream->fd, &row->tcp);
	}
}

/* Edge 0 is the zero: nothing before it counts. */
static bool
cut(struct worker *worker)
{
	struct interval_part *part;

	if (worker->grid.next == 0) {
		for (size_t i = 0; i < worker->streams_count; i++)
			(void)interval_cut(&worker->streams[i].interval);
		worker->cpu_ns = clock_thread_cpu_ns();
		return true;
	}
	part = reserve_part(worker);
	if (part == NULL)
		return false;
	fill_part(worker, part);
	ring_commit(worker->ring);
	worker_wake(worker->common->main_fd);
	return true;
}

void
worker_close_intervals(struct worker *worker)
{
	if (worker->grid.zero_ns == 0) {
		worker->grid.zero_ns = atomic_load_explicit(
		    &worker->common->zero_ns, memory_order_acquire);
		if (worker->grid.zero_ns == 0)
			return;
		open_edge(worker);
	}
	while (is_running(worker) && (worker->held == worker->streams_count ||
	    worker->now_ns >= interval_patience_ns(&worker->grid))) {
		sweep(worker);
		if (worker->over || !cut(worker))
			return;
		worker->grid.next++;
		open_edge(worker);
	}
}

/* Whether the receiver's window cannot have closed yet. */
static bool
is_early(const struct worker *worker)
{
	const struct trial *trial = worker->common->trial;
	uint64_t zero_ns = atomic_load(&worker->common->zero_ns);
	uint64_t least_ns = (trial->settle_ns + trial->duration_ns) / 100 *
	    EARLY_PERCENT;

	return zero_ns == 0 || clock_raw_ns() - zero_ns < least_ns;
}

/* The receiver has enough, or is lost. */
static void
sender_closed(struct worker *worker, struct stream *stream)
{
	if (is_early(worker))
		worker_end(worker, WORKER_CLOSED, stream, 0);
	else
		worker_end_stream(worker, stream);
}

void
worker_on_payload(evutil_socket_t fd, short what, void *arg)
{
	struct stream *stream = arg;
	struct worker *worker = stream->worker;

	(void)fd;
	(void)what;
	for (size_t i = 0; i < worker->calls_max && !worker->over; i++) {
		size_t bytes;
		int sys_errno = 0;
		enum io_result result = receive_once(worker, stream,
		    CALL_BYTES, &bytes, &sys_errno);

		worker_close_intervals(worker);
		if (result == IO_CLOSED || result == IO_FAILED)
			lose_stream(worker, stream, result, sys_errno);
		if (result != IO_DONE || bytes < CALL_BYTES)
			return;
	}
}

void
worker_on_writable(evutil_socket_t fd, short what, void *arg)
{
	struct stream *stream = arg;
	struct worker *worker = stream->worker;

	(void)fd;
	(void)what;
	for (size_t i = 0; i < worker->calls_max && !worker->over; i++) {
		size_t bytes, asked;
		int sys_errno = 0;
		enum io_result result = send_once(worker, stream, &bytes,
		    &asked, &sys_errno);

		worker_close_intervals(worker);
		if (result == IO_FAILED)
			worker_end(worker, WORKER_FAILED, stream, sys_errno);
		if (result == IO_CLOSED)
			sender_closed(worker, stream);
		if (result != IO_DONE || bytes < asked)
			return;
	}
}

void
worker_on_sender_readable(evutil_socket_t fd, short what, void *arg)
{
	struct stream *stream = arg;
	struct worker *worker = stream->worker;
	size_t bytes;
	int sys_errno = 0;

	(void)fd;
	(void)what;
	if (worker->over)
		return;
	switch (worker->common->transport->receive(stream->fd, SWEEP_BYTES,
	    &bytes, &sys_errno)) {
	case IO_DONE:
		worker_end(worker, WORKER_UNASKED, stream, 0);
		break;
	case IO_AGAIN:
		break;
	case IO_CLOSED:
		sender_closed(worker, stream);
		break;
	case IO_FAILED:
		worker_end(worker, WORKER_FAILED, stream, sys_errno);
		break;
	}
}

