/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * transfer_fixture: one end of a real transfer over loopback as the session
 * would see it, on a loop in this process.
 */
#ifndef PLAFOND_TESTS_TRANSFER_FIXTURE_H
#define PLAFOND_TESTS_TRANSFER_FIXTURE_H

#include <errno.h>
#include <event2/event.h>
#include <fcntl.h>
#include <netinet/in.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

#include "clock.h"
#include "error.h"
#include "transfer.h"

#define MS NS_PER_MS
#define GUARD_S 30

/* One end as the session would see it. */
struct side {
	struct event_base *base;	/* borrowed */
	struct transfer *transfer;	/* owned until done */
	unsigned *open;			/* borrowed; ends still to come */
	uint64_t stop_at_row;		/* 0: never */
	uint64_t rows, stream_rows, bytes, counted_bytes, cpu_ns;
	uint64_t row_ns, stream_bytes;
	uint64_t started_ns;		/* raw clock; the session's zero */
	size_t streams_sampled;
	unsigned done;
	enum measurement_end end;
	enum error_kind why;
	struct measurement totals;
};

static void
on_row(struct transfer *transfer, const struct transfer_row *row, void *arg)
{
	const struct interval_row *interval = row->interval;
	struct side *side = arg;
	uint64_t cpu_ns = 0;

	assert_int_equal(side->done, 0);
	assert_int_equal(interval->number, side->rows);
	side->rows++;
	assert_int_equal(interval->end_ns, side->rows * side->row_ns);
	side->bytes += interval->bytes;
	side->cpu_ns += interval->cpu_ns;
	if (row->phase == TRANSFER_COUNTING)
		side->counted_bytes += interval->bytes;
	else
		assert_int_equal(row->phase, TRANSFER_SETTLING);
	side->streams_sampled = row->streams_count;
	side->stream_rows += row->streams_count;
	for (size_t i = 0; i < row->streams_count; i++) {
		assert_int_equal(row->streams[i].number, interval->number);
		if (i > 0)
			assert_true(row->streams[i].stream >
			    row->streams[i - 1].stream);
		assert_true(row->streams[i].bytes <= interval->bytes);
		assert_in_range(row->streams[i].tcp.value[
		    TCP_SAMPLE_snd_mss_bytes], 500, 65535);
		side->stream_bytes += row->streams[i].bytes;
	}
	if (side->rows == side->stop_at_row)
		transfer_stop(transfer);
	for (size_t i = 0; i < row->workers_count; i++) {
		assert_int_equal(row->workers[i].number, interval->number);
		assert_int_equal(row->workers[i].worker, i);
		cpu_ns += row->workers[i].cpu_ns;
	}
	assert_int_equal(cpu_ns, interval->cpu_ns);
}

static void
on_done(struct transfer *transfer, enum measurement_end end,
    const struct error *why, void *arg)
{
	struct side *side = arg;

	side->done++;
	side->end = end;
	side->why = why != NULL ? why->kind : ERROR_NONE;
	transfer_totals(transfer, &side->totals);
	transfer_free(transfer);
	side->transfer = NULL;
	if (--*side->open == 0)
		(void)event_base_loopbreak(side->base);
}

static const struct transfer_callbacks callbacks = { on_row, on_done };

static inline struct trial
short_trial(uint64_t streams)
{
	struct trial trial = { .number = 1, .protocol = PROTOCOL_TCP,
	    .direction = DIRECTION_A_TO_B, .streams = streams,
	    .settle_ns = 100 * MS, .duration_ns = 200 * MS,
	    .row_ns = 20 * MS, .payload_period_bytes = 1048576 };

	return trial;
}

/* Connected pairs over loopback, the connecting ends in ours. */
static inline void
connect_pairs(uint64_t count, int *ours, int *theirs)
{
	struct sockaddr_in at = { .sin_family = AF_INET,
	    .sin_addr.s_addr = htonl(INADDR_LOOPBACK) };
	socklen_t size = sizeof(at);
	int listener = socket(AF_INET, SOCK_STREAM, 0);

	assert_int_equal(bind(listener, (struct sockaddr *)&at, size), 0);
	assert_int_equal(listen(listener, TRIAL_STREAMS_MAX), 0);
	assert_int_equal(getsockname(listener, (struct sockaddr *)&at, &size),
	    0);
	for (uint64_t i = 0; i < count; i++) {
		ours[i] = socket(AF_INET, SOCK_STREAM, 0);
		assert_int_equal(connect(ours[i], (struct sockaddr *)&at,
		    size), 0);
		theirs[i] = accept(listener, NULL, NULL);
		assert_true(theirs[i] != -1);
		assert_int_equal(fcntl(ours[i], F_SETFL, O_NONBLOCK), 0);
		assert_int_equal(fcntl(theirs[i], F_SETFL, O_NONBLOCK), 0);
	}
	(void)close(listener);
}

static inline void
start_side(struct side *side, const struct trial *trial, bool is_sender,
    const int *fds, unsigned workers)
{
	struct transfer_config config = { .trial = trial,
	    .direction = DIRECTION_A_TO_B, .is_sender = is_sender,
	    .fds = fds, .session_zero_ns = clock_raw_ns(),
	    .workers = workers };
	struct error err;

	side->started_ns = config.session_zero_ns;
	side->row_ns = trial->row_ns;
	assert_int_equal(transfer_start(side->base, &config, &callbacks, side,
	    &side->transfer, &err), 0);
}

static inline void
run_loop(struct event_base *base)
{
	const struct timeval guard = { .tv_sec = GUARD_S };

	(void)event_base_loopexit(base, &guard);
	(void)event_base_dispatch(base);
}

/* A pair of transfers to its end. */

#endif
