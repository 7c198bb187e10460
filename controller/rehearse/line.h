/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * line: one direction of an emulated line, as a model.
 *
 * A packet that comes is asked, in this order: MTU, policer, queue (drop-tail,
 * before shaper and serialisation), then on the line outage, random loss, loss
 * in runs; what is lost on the line has used its time there.  What gets through
 * arrives when its last bit is out, later by propagation and variation; it may
 * be held back or doubled at the far end, where a copy costs the line nothing.
 *
 * Random choices go by the packet's number (from 0, all that were offered) and
 * by the seed, each feature for itself: the same numbers are lost whatever else
 * happens to them.  A packet that two features would drop counts once, for the
 * first.  Background traffic shares queue, shaper, serialisation and outages,
 * has no numbers and is not delivered.
 *
 * Sizes are bytes at the lowest IP layer; payload stays with the driver, under
 * the handles.  Owns its queue and its truth.  No clock, no I/O: pure.
 */
#ifndef PLAFOND_LINE_H
#define PLAFOND_LINE_H

#include <stdbool.h>
#include <stdint.h>

#include "rehearse/line_settings.h"
#include "rehearse/truth.h"

struct error;
struct line;

/* Packets and copies under way in one direction; handles are below it.  At
 * 1500 B it is 157 ms of 10 Gbit/s. */
#define LINE_PACKETS_MAX 131072
/* Times must be below; 146 years. */
#define LINE_NOW_MAX_NS (UINT64_C(1) << 62)
#define LINE_NEVER_NS UINT64_MAX

struct line_verdict {
	uint64_t number;
	bool accepted;
	enum line_drop drop;	/* if not accepted */
	bool answer;		/* dropped by MTU: the sender is to be told */
	/* If accepted: each is delivered once.  A packet that waits for others
	 * to pass has its latest time here. */
	unsigned copies;	/* 1 or 2 */
	uint32_t handles[2];
	uint64_t due_ns[2];
};

struct line_delivery {
	uint32_t handle;	/* may be given anew from now on */
	bool copy;
	/* due_ns is when it should have been delivered. */
	struct truth_sample packet;
};

/* Copies the settings.  NULL: ERROR_INPUT of line_check, ERROR_INTERNAL for
 * memory. */
struct line *line_new(const struct line_settings *settings,
    uint64_t origin_ns, struct error *err);
void line_free(struct line *line);

/* A packet comes.  Times do not go back, nor before the origin. */
void line_offer(struct line *line, uint64_t now_ns, uint32_t packet_bytes,
    enum line_class class, struct line_verdict *verdict);
/* Background traffic up to now; also done by every offer. */
void line_advance(struct line *line, uint64_t now_ns);

/* When the next delivery is due; LINE_NEVER_NS: none. */
uint64_t line_next_due_ns(const struct line *line);
/* The next delivery that is due by now; false: none. */
bool line_take(struct line *line, uint64_t now_ns,
    struct line_delivery *delivery);

/* Packets and copies that are under way. */
uint32_t line_pending(const struct line *line);
/* Copies among them. */
uint32_t line_pending_copies(const struct line *line);
/* Valid until line_free. */
const struct truth *line_truth(const struct line *line);

#endif
