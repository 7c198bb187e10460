/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "conduct/run.h"

#include <inttypes.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>


#include "clock.h"
#include "log.h"
#include "units.h"

int
run_begin(struct run *run, const struct trial *trial, struct trial_run *out,
    struct error *err)
{
	memset(out, 0, sizeof(*out));
	out->trial = *trial;
	out->started_utc_ns = clock_utc_ns();
	run_fini(run);
	run->out = out;
	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		struct direction_run *direction = &out->directions[d];

		direction->round_trip_ns = UNKNOWN_U64;
		direction->interface_bytes = UNKNOWN_U64;
		direction->series.spacing_ns = trial->row_ns;
		direction->present = direction_has(trial->direction,
		    (enum direction)d);
		if (!direction->present)
			continue;
		run->overlaps[d] = calloc(1, sizeof(*run->overlaps[d]));
		if (run->overlaps[d] == NULL)
			return error_errno(err, ERROR_INTERNAL, "a trial");
		for (int e = 0; e < ENDS; e++) {
			run->digests[d][e] = wire_rows_digest_new();
			if (run->digests[d][e] == NULL)
				return error_set(err, ERROR_INTERNAL,
				    "no digest");
		}
	}
	return 0;
}

/* The least round trip that the kernel saw on the sender's streams. */
static void
note_round_trip(struct direction_run *direction, const struct wire_rows *rows)
{
	for (size_t i = 0; i < rows->count; i++) {
		uint64_t us =
		    rows->stream[i].tcp.value[TCP_SAMPLE_min_rtt_us];

		if (us != UNKNOWN_U64 && us * 1000 < direction->round_trip_ns)
			direction->round_trip_ns = us * 1000;
	}
}

/* The first fault is kept. */
__attribute__((format(printf, 3, 4)))
static void
fail(struct run *run, enum end end, const char *fmt, ...)
{
	char what[384];
	va_list ap;

	if (run->out->failed)
		return;
	run->out->failed = true;
	va_start(ap, fmt);
	(void)vsnprintf(what, sizeof(what), fmt, ap);
	va_end(ap);
	(void)error_set(&run->out->why, ERROR_PEER, "the agent of end %s: %s",
	    end_name(end), what);
}

static bool
has_reported(const struct direction_run *direction, enum direction single,
    enum end end)
{
	return end == direction_receiver(single) ?
	    direction->receiver_reported : direction->sender_reported;
}

static void
add_intervals(struct run *run, enum end end, const struct wire_rows *rows)
{
	struct direction_run *direction =
	    &run->out->directions[rows->direction];

	for (size_t i = 0; i < rows->count; i++) {
		const struct interval_row *row = &rows->interval[i];

		if (overlap_add(run->overlaps[rows->direction], row->end_ns,
		    row->bytes) == -1) {
			fail(run, end, "row %" PRIu64 " does not follow the "
			    "one before", row->number);
			return;
		}
		series_add(&direction->series, run->out->trial.row_ns,
		    row->bytes);
	}
}

void
run_rows(struct run *run, enum end end, const struct wire_rows *rows,
    const json_t *message)
{
	struct direction_run *direction =
	    &run->out->directions[rows->direction];

	if (!direction->present)
		return;
	if (has_reported(direction, rows->direction, end)) {
		fail(run, end, "rows after the measurement");
		return;
	}
	wire_rows_digest_add(run->digests[rows->direction][end], message);
	if (rows->table == WIRE_TABLE_INTERVAL &&
	    end == direction_receiver(rows->direction))
		add_intervals(run, end, rows);
	if (rows->table == WIRE_TABLE_STREAM &&
	    end == direction_sender(rows->direction))
		note_round_trip(direction, rows);
}

static void
check_digest(struct run *run, enum end end,
    const struct measurement *measurement)
{
	char hex[SHA256_HEX_SIZE];

	wire_rows_digest_end(run->digests[measurement->direction][end], hex);
	if (strcmp(hex, measurement->sha256) != 0)
		fail(run, end, "its rows do not have the digest that it "
		    "states");
}

void
run_measurement(struct run *run, enum end end,
    const struct measurement *measurement)
{
	struct direction_run *direction =
	    &run->out->directions[measurement->direction];

	if (!direction->present)
		return;
	if (has_reported(direction, measurement->direction, end) ||
	    measurement->is_receiver !=
	    (end == direction_receiver(measurement->direction))) {
		fail(run, end, "a measurement that nobody asked for");
		return;
	}
	check_digest(run, end, measurement);
	if (measurement->is_receiver) {
		direction->receiver = *measurement;
		(void)log_escape(measurement->why, direction->receiver.why,
		    sizeof(direction->receiver.why));
		direction->receiver_reported = true;
		memcpy(direction->series.sha256, measurement->sha256,
		    sizeof(direction->series.sha256));
		return;
	}
	direction->sender = *measurement;
	(void)log_escape(measurement->why, direction->sender.why,
	    sizeof(direction->sender.why));
	direction->sender_reported = true;
	direction->interface_bytes = measurement->interface_bytes;
}

/* A direction's window on our clock. */
struct window {
	int64_t from_ns, to_ns, zero_ns;
};

static struct window
window_of(const struct measurement *m, const struct exchange_sample *clock)
{
	struct window window;

	window.zero_ns = (int64_t)m->zero_ns - clock->offset_ns;
	window.from_ns = window.zero_ns + (int64_t)m->settle_ns;
	window.to_ns = window.from_ns + (int64_t)m->duration_ns;
	return window;
}

static void
count_overlap(struct run *run, const struct exchange_sample clocks[ENDS])
{
	struct window windows[DIRECTIONS_SINGLE];
	struct direction_run *directions = run->out->directions;
	int64_t from_ns, to_ns;

	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		windows[d] = window_of(&directions[d].receiver,
		    &clocks[direction_receiver((enum direction)d)]);
	from_ns = windows[0].from_ns > windows[1].from_ns ?
	    windows[0].from_ns : windows[1].from_ns;
	to_ns = windows[0].to_ns < windows[1].to_ns ?
	    windows[0].to_ns : windows[1].to_ns;
	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		struct direction_run *direction = &directions[d];

		if (to_ns <= from_ns || overlap_bytes(run->overlaps[d],
		    (uint64_t)(from_ns - windows[d].zero_ns),
		    (uint64_t)(to_ns - windows[d].zero_ns),
		    &direction->bytes) == -1) {
			direction->counted = false;
			direction->payload_bps = 0;
			fail(run, direction_receiver((enum direction)d),
			    "its window of direction %s and that of the other "
			    "do not overlap", direction_name(
			    (enum direction)d));
			continue;
		}
		direction->duration_ns = (uint64_t)(to_ns - from_ns);
		direction->payload_bps = rate_bps(direction->bytes,
		    direction->duration_ns);
	}
}

static void
count_alone(struct direction_run *direction)
{
	const struct measurement *m = &direction->receiver;

	direction->bytes = m->bytes;
	direction->duration_ns = m->duration_ns;
	direction->row_min_bps = m->row_min_bps;
	direction->row_max_bps = m->row_max_bps;
	if (m->duration_ns == 0)
		return;
	direction->payload_bps = rate_bps(m->bytes, m->duration_ns);
	direction->counted = m->end == MEASUREMENT_COMPLETE;
}

/* The receiver's agent was lost: what it had said until then, no result. */
static void
tell_rows(struct direction_run *direction, const struct overlap *overlap)
{
	direction->bytes = overlap->bytes;
	direction->duration_ns = overlap_end_ns(overlap);
}

static bool
all_counted(const struct trial_run *out)
{
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		if (out->directions[d].present && !out->directions[d].counted)
			return false;
	return true;
}

void
run_finish(struct run *run, const struct exchange_sample clocks[ENDS])
{
	struct trial_run *out = run->out;

	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		struct direction_run *direction = &out->directions[d];

		if (!direction->present)
			continue;
		if (direction->receiver_reported)
			count_alone(direction);
		else
			tell_rows(direction, run->overlaps[d]);
		if (!direction->counted)
			fail(run, direction_receiver((enum direction)d),
			    "direction %s was not measured to its end%s%s%s%s",
			    direction_name((enum direction)d),
			    direction->sender.why[0] != '\0' ?
			    "; at the sender " : "", direction->sender.why,
			    direction->receiver.why[0] != '\0' ?
			    "; at the receiver " : "", direction->receiver.why);
	}
	if (out->trial.direction == DIRECTION_BOTH && all_counted(out))
		count_overlap(run, clocks);
}

void
run_fini(struct run *run)
{
	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		free(run->overlaps[d]);
		run->overlaps[d] = NULL;
		for (int e = 0; e < ENDS; e++) {
			wire_rows_digest_free(run->digests[d][e]);
			run->digests[d][e] = NULL;
		}
	}
}
