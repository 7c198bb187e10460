/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "handover.h"

#include <assert.h>
#include <inttypes.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>


#include "clock.h"
#include "error.h"
#include "units.h"
#include "wire.h"

/* A frame goes out when it holds so much time or so many rows. */
#define BATCH_NS UINT64_C(500000000)
#define BATCH_ROWS 64
#define PROGRESS_NS UINT64_C(200000000)
#define RATE_SPAN_ROWS 100		/* at most, for the rate of a second */

struct handover {
	enum direction direction;
	bool is_sender;
	struct handover_counter *counter;	/* borrowed: outlives us */
	void (*send)(json_t *message, void *arg);
	void *arg;
	struct wire_rows_digest *digest;	/* owned */
	struct interval_row interval[BATCH_ROWS];
	size_t interval_count;
	struct stream_row stream[BATCH_ROWS * MEASUREMENT_STREAMS_SAMPLED];
	size_t stream_count;
	struct worker_row worker[WIRE_ROWS_MAX];
	size_t worker_count;
	bool columns_sent[WIRE_TABLES];
	uint64_t rows, stream_rows, worker_rows;
	uint64_t bytes, batch_ns, progress_ns;
	/* cumulative bytes at the ends of the last rows */
	struct { uint64_t end_ns, bytes; } history[RATE_SPAN_ROWS];
};

struct handover *
handover_new(enum direction direction, bool is_sender,
    struct handover_counter *counter, void (*send)(json_t *message, void *arg),
    void *arg)
{
	struct handover *h = calloc(1, sizeof(*h));

	if (h == NULL)
		return NULL;
	h->digest = wire_rows_digest_new();
	if (h->digest == NULL) {
		free(h);
		return NULL;
	}
	h->direction = direction;
	h->is_sender = is_sender;
	h->counter = counter;
	h->send = send;
	h->arg = arg;
	return h;
}

static void
send_frame(struct handover *h, json_t *message)
{
	wire_rows_digest_add(h->digest, message);
	h->send(message, h->arg);
}

_Static_assert(BATCH_ROWS * MEASUREMENT_STREAMS_SAMPLED <= WIRE_ROWS_MAX,
    "the streams of a batch fit into one frame");

static void
flush(struct handover *h)
{
	if (h->interval_count > 0)
		send_frame(h, wire_encode_interval_rows(++h->counter->sent,
		    h->direction, !h->columns_sent[WIRE_TABLE_INTERVAL],
		    h->interval, h->interval_count));
	h->columns_sent[WIRE_TABLE_INTERVAL] |= h->interval_count > 0;
	if (h->stream_count > 0)
		send_frame(h, wire_encode_stream_rows(++h->counter->sent,
		    h->direction, !h->columns_sent[WIRE_TABLE_STREAM],
		    h->stream, h->stream_count));
	h->columns_sent[WIRE_TABLE_STREAM] |= h->stream_count > 0;
	if (h->worker_count > 0)
		send_frame(h, wire_encode_worker_rows(++h->counter->sent,
		    h->direction, !h->columns_sent[WIRE_TABLE_WORKER],
		    h->worker, h->worker_count));
	h->columns_sent[WIRE_TABLE_WORKER] |= h->worker_count > 0;
	h->interval_count = 0;
	h->stream_count = 0;
	h->worker_count = 0;
}

/* Rate of the last second: against the oldest edge within it, be it the zero;
 * a row longer than that stands for the second. */
static uint64_t
recent_bps(const struct handover *h, uint64_t end_ns)
{
	uint64_t from_ns = 0, from_bytes = 0;
	uint64_t oldest = h->rows > RATE_SPAN_ROWS ?
	    h->rows - RATE_SPAN_ROWS : 0;

	for (uint64_t i = h->rows; i > oldest; i--) {
		const size_t at = (size_t)((i - 1) % RATE_SPAN_ROWS);

		if (h->history[at].end_ns + NS_PER_S < end_ns && i < h->rows)
			break;
		if (oldest == 0 && end_ns <= NS_PER_S)
			break;
		from_ns = h->history[at].end_ns;
		from_bytes = h->history[at].bytes;
	}
	return end_ns > from_ns ?
	    rate_bps(h->bytes - from_bytes, end_ns - from_ns) : 0;
}

static void
tell_progress(struct handover *h, const struct interval_row *row,
    enum transfer_phase phase)
{
	struct wire_progress progress = {
		.direction = h->direction,
		.elapsed_ns = row->end_ns,
		.bytes = h->bytes,
		.rate_bps = recent_bps(h, row->end_ns),
	};

	if (h->is_sender || (row->end_ns < h->progress_ns + PROGRESS_NS &&
	    phase != TRANSFER_CLOSED))
		return;
	h->progress_ns = row->end_ns;
	(void)snprintf(progress.phase, sizeof(progress.phase), "%s",
	    transfer_phase_name(phase));
	h->send(wire_encode(WIRE_PROGRESS, &progress), h->arg);
}

/* Does this row end a batch? */
static bool
ends_batch(const struct handover *h, const struct transfer_row *row)
{
	return h->interval_count + 1 >= BATCH_ROWS ||
	    h->worker_count + 2 * row->workers_count > WIRE_ROWS_MAX ||
	    row->interval->end_ns >= h->batch_ns + BATCH_NS;
}

/* Frames that go out when the batch ends with this row: one a table. */
static uint64_t
frames_of(const struct handover *h, const struct transfer_row *row)
{
	return UINT64_C(1) + (h->stream_count + row->streams_count > 0) +
	    (h->worker_count + row->workers_count > 0);
}

static void
keep_row(struct handover *h, const struct transfer_row *row)
{
	assert(row->streams_count <= MEASUREMENT_STREAMS_SAMPLED);
	assert(h->worker_count + row->workers_count <= WIRE_ROWS_MAX);
	h->bytes += row->interval->bytes;
	h->interval[h->interval_count++] = *row->interval;
	if (row->streams_count > 0)
		memcpy(h->stream + h->stream_count, row->streams,
		    row->streams_count * sizeof(row->streams[0]));
	h->stream_count += row->streams_count;
	h->stream_rows += row->streams_count;
	if (row->workers_count > 0)
		memcpy(h->worker + h->worker_count, row->workers,
		    row->workers_count * sizeof(row->workers[0]));
	h->worker_count += row->workers_count;
	h->worker_rows += row->workers_count;
}

static void
note_edge(struct handover *h, const struct interval_row *row)
{
	size_t at = (size_t)(h->rows % RATE_SPAN_ROWS);

	h->history[at].end_ns = row->end_ns;
	h->history[at].bytes = h->bytes;
	h->rows++;
}

int
handover_row(struct handover *h, const struct transfer_row *row,
    struct error *err)
{
	const struct handover_counter *counter = h->counter;
	bool ends = ends_batch(h, row);

	if (ends && counter->sent + frames_of(h, row) > counter->received +
	    WIRE_ROWS_UNACKNOWLEDGED_MAX)
		return error_set(err, ERROR_PEER, "the controller has not "
		    "acknowledged %" PRIu64 " frames of rows",
		    counter->sent - counter->received);
	keep_row(h, row);
	tell_progress(h, row->interval, row->phase);
	note_edge(h, row->interval);
	if (!ends)
		return 0;
	h->batch_ns = row->interval->end_ns;
	flush(h);
	return 0;
}

void
handover_finish(struct handover *h, struct measurement *measurement)
{
	flush(h);
	measurement->rows = h->rows;
	measurement->stream_rows = h->stream_rows;
	measurement->worker_rows = h->worker_rows;
	wire_rows_digest_end(h->digest, measurement->sha256);
	h->send(wire_encode(WIRE_MEASUREMENT, measurement), h->arg);
}

void
handover_received(struct handover_counter *counter, uint64_t number)
{
	if (number > counter->received && number <= counter->sent)
		counter->received = number;
}

void
handover_free(struct handover *h)
{
	if (h == NULL)
		return;
	wire_rows_digest_free(h->digest);
	free(h);
}
