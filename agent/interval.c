/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "interval.h"

#include <assert.h>
#include <string.h>

#include "clock.h"
#include "units.h"

#define SETTLED_PERCENT 1

uint64_t
interval_edge_ns(const struct interval_grid *grid)
{
	return grid->zero_ns + grid->next * grid->row_ns;
}

uint64_t
interval_patience_ns(const struct interval_grid *grid)
{
	return interval_edge_ns(grid) + grid->row_ns / 2;
}

void
interval_stream_init(struct interval_stream *stream, uint64_t now_ns)
{
	memset(stream, 0, sizeof(*stream));
	stream->before_ns = now_ns;
	stream->now_ns = now_ns;
}

void
interval_observe(struct interval_stream *stream, uint64_t now_ns,
    uint64_t bytes)
{
	stream->before_ns = stream->now_ns;
	stream->before_bytes = stream->now_bytes;
	stream->now_ns = now_ns;
	stream->now_bytes += bytes;
}

uint64_t
interval_bytes_at(const struct interval_stream *stream, uint64_t at_ns)
{
	if (at_ns >= stream->now_ns)
		return stream->now_bytes;
	if (at_ns <= stream->before_ns)
		return stream->before_bytes;
	/* here before_ns < at_ns < now_ns, so the divisor is not 0 */
	return stream->before_bytes +
	    scale_u64(stream->now_bytes - stream->before_bytes,
		at_ns - stream->before_ns,
		stream->now_ns - stream->before_ns);
}

bool
interval_hold(struct interval_stream *stream, uint64_t edge_ns)
{
	if (stream->held || stream->now_ns < edge_ns)
		return false;
	stream->held_bytes = interval_bytes_at(stream, edge_ns);
	stream->held = true;
	return true;
}

void
interval_force(struct interval_stream *stream, uint64_t now_ns)
{
	if (stream->held)
		return;
	stream->held_bytes = stream->now_bytes;
	stream->held = true;
	interval_observe(stream, now_ns, 0);
}

uint64_t
interval_cut(struct interval_stream *stream)
{
	uint64_t bytes = stream->held_bytes - stream->cut_bytes;

	assert(stream->held && stream->held_bytes >= stream->cut_bytes);
	stream->cut_bytes = stream->held_bytes;
	stream->held = false;
	return bytes;
}

size_t
interval_part_bytes(size_t streams_count)
{
	return sizeof(struct interval_part) +
	    streams_count * sizeof(struct stream_row);
}

/* Put one stream in its place among those before it. */
static void
insert_stream(struct stream_row *streams, size_t count,
    const struct stream_row *one)
{
	size_t i = count;

	for (; i > 0 && streams[i - 1].stream > one->stream; i--)
		streams[i] = streams[i - 1];
	streams[i] = *one;
}

bool
interval_merge(const struct interval_part *const parts[], size_t count,
    uint64_t row_ns, struct interval_row *row, struct stream_row *streams,
    size_t *streams_count)
{
	struct interval_row sum = { .steal_ns = UNKNOWN_U64 };
	size_t sampled = 0;

	for (size_t i = 0; i < count; i++)
		if (parts[i] == NULL)
			return false;
	for (size_t i = 0; i < count; i++) {
		assert(parts[i]->number == parts[0]->number);
		sum.bytes += parts[i]->bytes;
		sum.cpu_ns += parts[i]->cpu_ns;
		for (size_t j = 0; j < parts[i]->streams_count; j++) {
			assert(sampled < MEASUREMENT_STREAMS_SAMPLED);
			insert_stream(streams, sampled++,
			    &parts[i]->streams[j]);
		}
	}
	sum.number = parts[0]->number;
	sum.end_ns = (sum.number + 1) * row_ns;
	*row = sum;
	*streams_count = sampled;
	return true;
}

uint64_t
interval_sampled_count(uint64_t streams)
{
	return streams < MEASUREMENT_STREAMS_SAMPLED ?
	    streams : MEASUREMENT_STREAMS_SAMPLED;
}

bool
interval_sampled(uint64_t stream, uint64_t streams)
{
	uint64_t count = interval_sampled_count(streams);

	for (uint64_t i = 0; i < count; i++)
		if (i * streams / count == stream)
			return true;
	return false;
}

static uint64_t
rows_up(uint64_t length_ns, uint64_t row_ns)
{
	return length_ns / row_ns + (length_ns % row_ns != 0);
}

void
interval_window_init(struct interval_window *window, const struct trial *trial)
{
	assert(trial->row_ns >= INTERVAL_ROW_NS_MIN);
	assert(trial->duration_ns % trial->row_ns == 0);
	memset(window, 0, sizeof(*window));
	window->row_ns = trial->row_ns;
	window->settle_rows_min = rows_up(trial->settle_ns, trial->row_ns);
	window->settle_rows_max = rows_up(TRIAL_SETTLE_MAX_NS, trial->row_ns);
	window->duration_rows = trial->duration_ns / trial->row_ns;
	window->extends = trial->settle_extends;
	window->counting = window->settle_rows_min == 0 && !window->extends;
}

/* Bytes of `count` rows, the last of which was `ago` rows before the next. */
static uint64_t
recent_bytes(const struct interval_window *window, uint64_t ago,
    uint64_t count)
{
	uint64_t bytes = 0;

	for (uint64_t i = 1; i <= count; i++)
		bytes += window->recent[(window->rows - ago - i) %
		    INTERVAL_SETTLE_ROWS_MAX];
	return bytes;
}

/* Two successive 1 s means differ by less than 1 % of the larger.  Sums of
 * equal numbers of rows stand for the means. */
static bool
means_agree(const struct interval_window *window)
{
	uint64_t second = rows_up(NS_PER_S, window->row_ns);
	uint64_t last, before, larger, difference;

	if (window->rows < 2 * second)
		return false;
	last = recent_bytes(window, 0, second);
	before = recent_bytes(window, second, second);
	larger = last > before ? last : before;
	difference = last > before ? last - before : before - last;
	return (uint128)difference * 100 < (uint128)larger * SETTLED_PERCENT;
}

static bool
settle_over(struct interval_window *window)
{
	if (window->rows < window->settle_rows_min)
		return false;
	window->settled = means_agree(window);
	return !window->extends || window->settled ||
	    window->rows >= window->settle_rows_max;
}

enum interval_place
interval_window_add(struct interval_window *window, uint64_t bytes)
{
	if (interval_window_closed(window))
		return INTERVAL_AFTER;
	window->recent[window->rows % INTERVAL_SETTLE_ROWS_MAX] = bytes;
	window->rows++;
	if (window->counting) {
		if (window->counted_rows == 0 || bytes < window->row_min_bytes)
			window->row_min_bytes = bytes;
		if (bytes > window->row_max_bytes)
			window->row_max_bytes = bytes;
		window->counted_rows++;
		window->bytes += bytes;
		return INTERVAL_COUNTED;
	}
	window->settle_rows++;
	window->counting = settle_over(window);
	return INTERVAL_SETTLE;
}

bool
interval_window_closed(const struct interval_window *window)
{
	return window->counting &&
	    window->counted_rows >= window->duration_rows;
}
