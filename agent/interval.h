/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * interval: the arithmetic of rows: edges, cuts, merging, the window.  Pure.
 *
 * Edges lie on a grid: edge 0 is the zero, edge k + 1 ends row k.  What a
 * stream had carried at an edge is linearly interpolated between the two calls
 * that carried something on either side of it, and held until every stream has
 * passed the edge; a stream that carries nothing for a while after it had
 * carried by then what it has now.  So a shaper that hands on 64 KiB at a time
 * does not show in a row.  A cut gives the bytes since the cut before: the rows
 * add up to the difference of the cumulative counts exactly, whatever the calls
 * were.
 */
#ifndef PLAFOND_INTERVAL_H
#define PLAFOND_INTERVAL_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "measurement.h"
#include "trial.h"

#define INTERVAL_ROW_NS_MIN UINT64_C(10000000)

struct interval_grid {
	uint64_t zero_ns;
	uint64_t row_ns;
	uint64_t next;		/* the next edge to cut at */
};

/* When the next edge is, and until when a stream may be waited for there. */
uint64_t interval_edge_ns(const struct interval_grid *grid);
uint64_t interval_patience_ns(const struct interval_grid *grid);

/* The last two observations of one stream, the last cut, and what is held for
 * the next one. */
struct interval_stream {
	uint64_t before_ns, before_bytes;
	uint64_t now_ns, now_bytes;	/* cumulative */
	uint64_t cut_bytes;		/* cumulative at the last cut */
	uint64_t held_bytes;		/* cumulative at the next edge */
	bool held;
};

void interval_stream_init(struct interval_stream *stream, uint64_t now_ns);
/* `bytes` more were carried by now_ns.  Edges up to the observation before
 * must be held or cut already: it is forgotten. */
void interval_observe(struct interval_stream *stream, uint64_t now_ns,
    uint64_t bytes);
/* Cumulative bytes at a time, rounded down; a time outside of the two last
 * observations counts as the nearer one. */
uint64_t interval_bytes_at(const struct interval_stream *stream,
    uint64_t at_ns);
/* Hold what the stream had carried at the edge, if it has passed it.  True:
 * newly held. */
bool interval_hold(struct interval_stream *stream, uint64_t edge_ns);
/* The stream has been waited for long enough: it carried nothing up to now. */
void interval_force(struct interval_stream *stream, uint64_t now_ns);
/* Bytes from the cut before up to what is held, which becomes the cut. */
uint64_t interval_cut(struct interval_stream *stream);

/* One worker's share of a row; `streams` are those of it that are sampled. */
struct interval_part {
	uint64_t number;
	uint64_t bytes;
	uint64_t cpu_ns;
	uint64_t streams_count;
	struct stream_row streams[];
};
size_t interval_part_bytes(size_t streams_count);

/* Add the workers' parts of one row, if every worker has handed over its own
 * (a part that is NULL is late).  All parts have the same number.  The sampled
 * streams come out by ascending stream, at most MEASUREMENT_STREAMS_SAMPLED.
 * Fills number, end_ns, bytes, cpu_ns.  False: one is late, nothing is set. */
bool interval_merge(const struct interval_part *const parts[], size_t count,
    uint64_t row_ns, struct interval_row *row, struct stream_row *streams,
    size_t *streams_count);

/* How many streams are sampled, and whether this one is: all of up to
 * MEASUREMENT_STREAMS_SAMPLED, beyond that so many, evenly spaced, the same
 * in every row (so that counters can be differenced). */
uint64_t interval_sampled_count(uint64_t streams);
bool interval_sampled(uint64_t stream, uint64_t streams);

/*
 * The window is [settle, settle + duration).  Settle is at least the trial's
 * settle_ns, rounded up to a row; if it extends, until the last 1 s and the
 * 1 s before it carried amounts that differ by less than 1 % of the larger
 * (looked at after every row), or until TRIAL_SETTLE_MAX_NS.  Rows longer
 * than 1 s stand for the second.
 */
#define INTERVAL_SETTLE_ROWS_MAX (2 * 1000 / 10)	/* 2 s of 10 ms rows */

enum interval_place { INTERVAL_SETTLE, INTERVAL_COUNTED, INTERVAL_AFTER };

struct interval_window {
	uint64_t row_ns;
	uint64_t settle_rows_min, settle_rows_max;	/* max: if it extends */
	uint64_t duration_rows;
	bool extends;
	uint64_t rows;			/* given so far */
	uint64_t settle_rows;		/* so far, or as it came out */
	bool settled;			/* two means agreed at the end of it */
	bool counting;			/* settle is over */
	uint64_t counted_rows;
	uint64_t bytes;			/* in the window so far */
	uint64_t row_min_bytes, row_max_bytes;	/* of its rows */
	uint64_t recent[INTERVAL_SETTLE_ROWS_MAX];	/* last rows' bytes */
};

/* Borrows nothing.  The trial's duration_ns is a multiple of its row_ns. */
void interval_window_init(struct interval_window *window,
    const struct trial *trial);
/* Give the next row; returns where it lies. */
enum interval_place interval_window_add(struct interval_window *window,
    uint64_t bytes);
/* The last row of the window has been given. */
bool interval_window_closed(const struct interval_window *window);

#endif
