/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * truth: what became of every packet of one direction of an emulated line.
 *
 * Exact counts by interval and class.  What enters or is dropped counts in the
 * interval in which it came, what leaves in the one in which it was due at the
 * far end, however late the driver fetched it.  Always, over all rows:
 *
 *   entered + duplicated = left + dropped + pending
 *
 * where duplicated must have the pending copies added.  Pure.
 */
#ifndef PLAFOND_TRUTH_H
#define PLAFOND_TRUTH_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

enum line_class {
	LINE_CLASS_LOAD,	/* a trial's flows */
	LINE_CLASS_CONTROL,	/* the controller's and the agents' own */
	LINE_CLASS_OTHER,	/* neighbour discovery and the like */
	LINE_CLASS_BACKGROUND,	/* made by the line itself */
	LINE_CLASSES
};

/* Why a packet does not arrive, in the order of the way. */
enum line_drop {
	LINE_DROP_MTU,
	LINE_DROP_POLICER,
	LINE_DROP_QUEUE,
	LINE_DROP_OUTAGE,
	LINE_DROP_LOSS,		/* random */
	LINE_DROP_BURSTS,	/* in runs */
	LINE_DROP_MEMORY,	/* the emulation's own limit: no circuit's */
	LINE_DROPS
};

extern const char *const line_class_names[LINE_CLASSES];
extern const char *const line_drop_names[LINE_DROPS];

/* Bytes are those of the packets at the lowest IP layer. */
struct truth_count {
	uint64_t packets, bytes;
};

struct truth_counts {
	struct truth_count entered;
	struct truth_count left;	/* copies too */
	struct truth_count dropped[LINE_DROPS];
	/* Left, not a copy, and behind one of its class that had come later:
	 * RFC 4737 s3.3. */
	struct truth_count reordered;
	struct truth_count duplicated;	/* copies, when they leave */
};

struct truth_row {
	struct truth_counts classes[LINE_CLASSES];
};

/* A packet that left, of those whose number is a multiple of sample_every. */
struct truth_sample {
	uint64_t number;	/* from 0, of all that were offered */
	uint64_t entered_ns, due_ns;
	uint32_t bytes;
	enum line_class class;
};

#define TRUTH_INTERVALS_MAX 65536
#define TRUTH_SAMPLES_MAX 65536

struct truth {
	uint64_t origin_ns;	/* of the first row */
	uint64_t interval_ns;
	/* The last row, number `intervals`, holds all that came later. */
	struct truth_row *rows;	/* owned; intervals + 1 */
	size_t intervals;
	uint64_t sample_every;	/* 0: no samples */
	struct truth_sample *samples;	/* owned */
	size_t sample_count;
	uint64_t samples_missed;	/* no room */
	uint64_t highest[LINE_CLASSES];	/* number + 1 of those that left */
};

/* -1: no memory; truth_fini is then still fine. */
int truth_init(struct truth *truth, uint64_t origin_ns, uint64_t interval_ns,
    size_t intervals, uint64_t sample_every);
void truth_fini(struct truth *truth);

void truth_entered(struct truth *truth, uint64_t now_ns,
    enum line_class class, uint32_t bytes);
void truth_dropped(struct truth *truth, uint64_t now_ns,
    enum line_class class, uint32_t bytes, enum line_drop drop);
void truth_left(struct truth *truth, const struct truth_sample *packet,
    bool copy);

/* Sum of all rows. */
void truth_total(const struct truth *truth, struct truth_row *total);
/* Dropped for any cause. */
struct truth_count truth_dropped_all(const struct truth_counts *counts);

#endif
