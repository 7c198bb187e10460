/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transfer.h"

#include <errno.h>
#include <event2/event.h>
#include <inttypes.h>
#include <stdlib.h>
#include <string.h>
#include <sys/eventfd.h>
#include <sys/sysinfo.h>
#include <unistd.h>

#include "clock.h"
#include "error.h"
#include "interval.h"
#include "payload.h"
#include "transport.h"
#include "units.h"
#include "worker.h"

struct transfer {
	struct trial trial;
	struct worker_common common;
	struct payload payload;
	struct transfer_callbacks callbacks;
	void *arg;			/* borrowed */
	struct event *wake;		/* owned */
	int *fds;			/* owned, with the sockets in it */
	struct worker **workers;	/* owned */
	uint64_t *cpu_ns;		/* owned; of each worker, this phase */
	unsigned workers_count;		/* started */
	uint64_t session_zero_ns;
	struct interval_window window;
	enum transfer_phase phase;
	uint64_t steal_ns;		/* the last reading */
	uint64_t phase_rows;		/* over which cpu_ns counts */
	bool stopped;			/* by transfer_stop */
	bool broken;			/* why is set */
	struct error why;
	struct measurement totals;
};

static const char *const phase_names[] = {
	[TRANSFER_WAITING] = "waiting",
	[TRANSFER_SETTLING] = "settling",
	[TRANSFER_COUNTING] = "counting",
	[TRANSFER_CLOSED] = "closed",
};

const char *
transfer_phase_name(enum transfer_phase phase)
{
	return phase_names[phase];
}

int
transfer_prepare_socket(int fd, int family, const struct trial *trial,
    bool is_sender, struct error *err)
{
	const struct transport *transport;

	(void)is_sender;	/* the limit is set once it is connected */
	if (transport_find(trial->protocol, &transport, err) == -1)
		return -1;
	return transport->prepare(fd, family, trial, err);
}

static void
order_all(struct transfer *transfer, enum worker_order order)
{
	for (unsigned i = 0; i < transfer->workers_count; i++)
		worker_order(transfer->workers[i], order);
}

/* Time stolen since the reading before. */
static uint64_t
steal_since(struct transfer *transfer)
{
	uint64_t before_ns = transfer->steal_ns;

	transfer->steal_ns = clock_steal_ns();
	if (before_ns == UNKNOWN_U64 || transfer->steal_ns == UNKNOWN_U64)
		return UNKNOWN_U64;
	return transfer->steal_ns > before_ns ?
	    transfer->steal_ns - before_ns : 0;
}

static uint64_t
add_known(uint64_t a, uint64_t b)
{
	return a == UNKNOWN_U64 || b == UNKNOWN_U64 ? UNKNOWN_U64 : a + b;
}

/* Where a row lies; a sender's clock has no window, so its phase is what its
 * receiver's would be without an extended settle time. */
static enum transfer_phase
place_row(struct transfer *transfer, const struct interval_row *row)
{
	if (transfer->common.is_sender)
		return row->end_ns <= transfer->trial.settle_ns ?
		    TRANSFER_SETTLING : TRANSFER_COUNTING;
	return interval_window_add(&transfer->window, row->bytes) ==
	    INTERVAL_COUNTED ? TRANSFER_COUNTING : TRANSFER_SETTLING;
}

static void
enter_phase(struct transfer *transfer, enum transfer_phase phase)
{
	if (transfer->phase == phase)
		return;
	transfer->phase = phase;
	transfer->phase_rows = 0;
	memset(transfer->cpu_ns, 0,
	    transfer->workers_count * sizeof(*transfer->cpu_ns));
}

/* The busiest worker's share of one core, over the rows of this phase. */
static void
add_cpu(struct transfer *transfer, const struct interval_part *const parts[])
{
	uint64_t busiest_ns = 0;

	transfer->phase_rows++;
	for (unsigned i = 0; i < transfer->workers_count; i++) {
		transfer->cpu_ns[i] += parts[i]->cpu_ns;
		if (transfer->cpu_ns[i] > busiest_ns)
			busiest_ns = transfer->cpu_ns[i];
	}
	transfer->totals.cpu_busiest_ratio_ppm = scale_u64(busiest_ns, 1000000,
	    transfer->phase_rows * transfer->trial.row_ns);
}

static void
deliver_row(struct transfer *transfer, struct interval_row *row,
    const struct stream_row *streams, size_t streams_count,
    const struct worker_row *workers)
{
	struct measurement *totals = &transfer->totals;
	const struct transfer_row delivered = {
		.interval = row,
		.streams = streams,
		.streams_count = streams_count,
		.workers = workers,
		.workers_count = transfer->workers_count,
		.phase = transfer->phase,
	};

	row->steal_ns = steal_since(transfer);
	totals->rows++;
	totals->stream_rows += streams_count;
	totals->worker_rows += transfer->workers_count;
	totals->cpu_ns += row->cpu_ns;
	totals->steal_ns = add_known(totals->steal_ns, row->steal_ns);
	totals->elapsed_ns = row->end_ns;
	if (transfer->common.is_sender)
		totals->bytes += row->bytes;
	transfer->callbacks.row(transfer, &delivered, transfer->arg);
}

/* The next row, if every worker has handed over its part. */
static bool
take_row(struct transfer *transfer)
{
	const struct interval_part *parts[TRIAL_STREAMS_MAX];
	struct stream_row streams[MEASUREMENT_STREAMS_SAMPLED];
	struct worker_row workers[TRIAL_STREAMS_MAX];
	struct interval_row row;
	size_t streams_count;

	for (unsigned i = 0; i < transfer->workers_count; i++)
		parts[i] = worker_front(transfer->workers[i]);
	if (!interval_merge(parts, transfer->workers_count,
	    transfer->trial.row_ns, &row, streams, &streams_count))
		return false;
	enter_phase(transfer, place_row(transfer, &row));
	add_cpu(transfer, parts);
	for (unsigned i = 0; i < transfer->workers_count; i++) {
		workers[i] = (struct worker_row){ row.number, i,
			parts[i]->cpu_ns };
		worker_pop(transfer->workers[i]);
	}
	deliver_row(transfer, &row, streams, streams_count, workers);
	return true;
}

static bool
window_closed(const struct transfer *transfer)
{
	return !transfer->common.is_sender &&
	    interval_window_closed(&transfer->window);
}

static void
take_rows(struct transfer *transfer)
{
	if (transfer->phase == TRANSFER_WAITING &&
	    atomic_load(&transfer->common.zero_ns) != 0) {
		transfer->totals.zero_ns = atomic_load(
		    &transfer->common.zero_ns) - transfer->session_zero_ns;
		(void)steal_since(transfer);
		enter_phase(transfer, TRANSFER_SETTLING);
	}
	while (!window_closed(transfer) && take_row(transfer))
		continue;
	if (window_closed(transfer) && transfer->phase != TRANSFER_CLOSED) {
		transfer->phase = TRANSFER_CLOSED;
		order_all(transfer, WORKER_FINISH);
	}
}

/* Keep the first reason why a worker ended that was not told to. */
static void
keep_reason(struct transfer *transfer, const struct worker_result *result)
{
	struct error *why = &transfer->why;

	if (transfer->broken || transfer->stopped || window_closed(transfer))
		return;
	switch (result->end) {
	case WORKER_FINISHED:
	case WORKER_STOPPED:
		return;
	case WORKER_CLOSED:
		(void)error_set(why, ERROR_PEER, "the peer closed stream %"
		    PRIu64 " before the window had closed", result->stream);
		break;
	case WORKER_FAILED:
		errno = result->sys_errno;
		(void)error_errno(why, ERROR_PEER, "stream %" PRIu64,
		    result->stream);
		break;
	case WORKER_UNASKED:
		(void)error_set(why, ERROR_PEER, "the receiver sent payload "
		    "on stream %" PRIu64, result->stream);
		break;
	case WORKER_STALLED:
		(void)error_set(why, ERROR_INTERNAL, "the main thread took no "
		    "rows for %" PRIu64 " ms", WORKER_STALL_NS / NS_PER_MS);
		break;
	}
	transfer->broken = true;
	order_all(transfer, WORKER_STOP);
}

/* Whether all have ended; one that broke ends the others. */
static bool
all_ended(struct transfer *transfer)
{
	bool all = true;

	for (unsigned i = 0; i < transfer->workers_count; i++) {
		const struct worker_result *result =
		    worker_result(transfer->workers[i]);

		if (result != NULL)
			keep_reason(transfer, result);
		else
			all = false;
	}
	return all;
}

static enum measurement_end
end_of(const struct transfer *transfer)
{
	bool finished = transfer->common.is_sender;

	for (unsigned i = 0; i < transfer->workers_count; i++)
		if (worker_result(transfer->workers[i])->end !=
		    WORKER_FINISHED)
			finished = false;
	if (finished || window_closed(transfer))
		return MEASUREMENT_COMPLETE;
	return transfer->stopped ? MEASUREMENT_STOPPED :
	    MEASUREMENT_PEER_LOST;
}

/* All workers have ended and all rows are taken. */
static void
finish(struct transfer *transfer)
{
	struct measurement *totals = &transfer->totals;
	uint64_t bytes = 0;

	for (unsigned i = 0; i < transfer->workers_count; i++) {
		const struct worker_result *result =
		    worker_result(transfer->workers[i]);

		bytes += result->bytes;
		if (result->has_last)
			totals->last = result->last;
	}
	if (transfer->common.is_sender)
		totals->bytes = bytes;
	totals->end = end_of(transfer);
	(void)event_del(transfer->wake);
	/* the callback may free the transfer */
	transfer->callbacks.done(transfer, totals->end,
	    totals->end == MEASUREMENT_PEER_LOST ? &transfer->why : NULL,
	    transfer->arg);
}

static void
on_wake(evutil_socket_t fd, short what, void *arg)
{
	struct transfer *transfer = arg;
	uint64_t count;
	ssize_t got = read(fd, &count, sizeof(count));
	bool ended;

	(void)got;
	(void)what;
	take_rows(transfer);
	/* a worker that has ended hands over no more rows, so the rows are
	 * taken again after that is known */
	ended = all_ended(transfer);
	take_rows(transfer);
	if (ended)
		finish(transfer);
}

static int
check_trial(const struct trial *trial, struct error *err)
{
	if (trial->streams == 0 || trial->streams > TRIAL_STREAMS_MAX)
		return error_set(err, ERROR_INPUT, "%" PRIu64 " streams, "
		    "allowed 1 to %d", trial->streams, TRIAL_STREAMS_MAX);
	if (trial->row_ns < INTERVAL_ROW_NS_MIN)
		return error_set(err, ERROR_INPUT, "rows of %" PRIu64 " ns, "
		    "allowed from %" PRIu64 " ns", trial->row_ns,
		    INTERVAL_ROW_NS_MIN);
	if (trial->duration_ns == 0 ||
	    trial->duration_ns > TRIAL_DURATION_MAX_NS ||
	    trial->duration_ns % trial->row_ns != 0)
		return error_set(err, ERROR_INPUT, "duration of %" PRIu64
		    " ns, allowed up to %" PRIu64 " ns in whole rows of %"
		    PRIu64 " ns", trial->duration_ns, TRIAL_DURATION_MAX_NS,
		    trial->row_ns);
	if (trial->settle_ns > TRIAL_DURATION_MAX_NS)
		return error_set(err, ERROR_INPUT, "settle time of %" PRIu64
		    " ns, allowed up to %" PRIu64 " ns", trial->settle_ns,
		    TRIAL_DURATION_MAX_NS);
	return 0;
}

static void
fill_known_totals(struct transfer *transfer,
    const struct transfer_config *config)
{
	struct measurement *totals = &transfer->totals;

	totals->direction = config->direction;
	totals->is_receiver = !config->is_sender;
	totals->streams = transfer->trial.streams;
	totals->end = MEASUREMENT_STOPPED;
	for (unsigned i = 0; i < TCP_SAMPLE_COUNT; i++)
		totals->last.value[i] = UNKNOWN_U64;
	transfer->common.transport->congestion_control(transfer->fds[0],
	    totals->congestion_control);
}

static unsigned
count_workers(const struct transfer_config *config)
{
	uint64_t wanted = config->workers != 0 ? config->workers :
	    (uint64_t)get_nprocs();

	return (unsigned)(wanted < config->trial->streams ? wanted :
	    config->trial->streams);
}

/* What needs the sockets: options, congestion control, payload. */
static int
set_up_load(struct transfer *transfer, const struct transfer_config *config,
    struct error *err)
{
	struct worker_common *common = &transfer->common;
	const struct trial *trial = &transfer->trial;

	if (check_trial(trial, err) == -1 ||
	    transport_find(trial->protocol, &common->transport, err) == -1)
		return -1;
	interval_window_init(&transfer->window, trial);
	fill_known_totals(transfer, config);
	if (!config->is_sender)
		return 0;
	for (uint64_t i = 0; i < trial->streams; i++)
		if (common->transport->limit(transfer->fds[i], trial,
		    err) == -1)
			return -1;
	return payload_init(&transfer->payload, trial->payload_period_bytes,
	    err);
}

static int
start_workers(struct transfer *transfer, struct event_base *base,
    struct error *err)
{
	struct worker_common *common = &transfer->common;

	common->main_fd = eventfd(0, EFD_CLOEXEC | EFD_NONBLOCK);
	if (common->main_fd == -1)
		return error_errno(err, ERROR_INTERNAL, "eventfd");
	transfer->wake = event_new(base, common->main_fd,
	    EV_READ | EV_PERSIST, on_wake, transfer);
	transfer->workers = calloc(common->workers, sizeof(struct worker *));
	transfer->cpu_ns = calloc(common->workers, sizeof(uint64_t));
	if (transfer->wake == NULL || transfer->workers == NULL ||
	    transfer->cpu_ns == NULL || event_add(transfer->wake, NULL) == -1)
		return error_set(err, ERROR_INTERNAL, "no memory");
	transfer->steal_ns = clock_steal_ns();
	for (unsigned i = 0; i < common->workers; i++) {
		if (worker_start(common, i, &transfer->workers[i], err) == -1)
			return -1;
		transfer->workers_count++;
	}
	return 0;
}

static void
close_sockets(const int *fds, uint64_t count)
{
	for (uint64_t i = 0; i < count; i++)
		if (fds[i] != -1)
			(void)close(fds[i]);
}

/* Take the sockets; NULL: no memory, and they are closed. */
static struct transfer *
new_transfer(const struct transfer_config *config)
{
	uint64_t streams = config->trial->streams;
	struct transfer *transfer = calloc(1, sizeof(*transfer));
	int *fds = calloc(streams + 1, sizeof(*fds));

	if (transfer == NULL || fds == NULL) {
		free(transfer);
		free(fds);
		close_sockets(config->fds, streams);
		return NULL;
	}
	memcpy(fds, config->fds, streams * sizeof(*fds));
	transfer->fds = fds;
	transfer->trial = *config->trial;
	transfer->common = (struct worker_common){
		.trial = &transfer->trial,
		.payload = &transfer->payload,
		.fds = fds,
		.main_fd = -1,
		.is_sender = config->is_sender,
		.workers = count_workers(config),
		.zero_streams = config->is_sender ? 1 : streams,
	};
	transfer->session_zero_ns = config->session_zero_ns;
	return transfer;
}

int
transfer_start(struct event_base *base, const struct transfer_config *config,
    const struct transfer_callbacks *callbacks, void *arg,
    struct transfer **out, struct error *err)
{
	struct transfer *transfer = new_transfer(config);

	if (transfer == NULL)
		return error_set(err, ERROR_INTERNAL, "no memory");
	transfer->callbacks = *callbacks;
	transfer->arg = arg;
	if (set_up_load(transfer, config, err) == -1 ||
	    start_workers(transfer, base, err) == -1) {
		transfer_free(transfer);
		return -1;
	}
	*out = transfer;
	return 0;
}

void
transfer_stop(struct transfer *transfer)
{
	transfer->stopped = true;
	order_all(transfer, WORKER_STOP);
}

void
transfer_totals(const struct transfer *transfer, struct measurement *out)
{
	const struct interval_window *window = &transfer->window;

	*out = transfer->totals;
	if (transfer->common.is_sender)
		return;
	out->bytes = window->bytes;
	out->settle_ns = window->settle_rows * window->row_ns;
	out->duration_ns = window->counted_rows * window->row_ns;
	out->settled = window->settled;
	out->row_min_bps = rate_bps(window->row_min_bytes, window->row_ns);
	out->row_max_bps = rate_bps(window->row_max_bytes, window->row_ns);
}

void
transfer_free(struct transfer *transfer)
{
	if (transfer == NULL)
		return;
	for (unsigned i = 0; i < transfer->workers_count; i++)
		worker_order(transfer->workers[i], WORKER_STOP);
	for (unsigned i = 0; i < transfer->workers_count; i++)
		worker_free(transfer->workers[i]);
	if (transfer->wake != NULL)
		event_free(transfer->wake);
	if (transfer->common.main_fd != -1)
		(void)close(transfer->common.main_fd);
	close_sockets(transfer->fds, transfer->trial.streams);
	payload_fini(&transfer->payload);
	free(transfer->workers);
	free(transfer->cpu_ns);
	free(transfer->fds);
	free(transfer);
}
