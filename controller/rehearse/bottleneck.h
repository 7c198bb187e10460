/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * bottleneck: drop-tail queue, shaper, serialisation and outages, first in
 * first out.
 *
 * When a packet comes, all that will become of it here is known.  Pure.
 */
#ifndef PLAFOND_BOTTLENECK_H
#define PLAFOND_BOTTLENECK_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "rehearse/bucket.h"
#include "rehearse/line_settings.h"
#include "rehearse/serial.h"
#include "rehearse/truth.h"
#include "rehearse/waiting.h"

struct bottleneck {
	const struct line_settings *settings;	/* borrowed: outlives us */
	uint64_t origin_ns;
	struct bucket shaper;
	struct serial serial;
	struct waiting waiting;
	size_t outage;		/* the first that may still matter */
};

/* -1: no memory; bottleneck_fini is then still fine. */
int bottleneck_init(struct bottleneck *bottleneck,
    const struct line_settings *settings, uint64_t origin_ns,
    uint32_t packets_max);
void bottleneck_fini(struct bottleneck *bottleneck);
/* Whether one more packet can wait, whatever the queue's own limits. */
bool bottleneck_has_room(struct bottleneck *bottleneck, uint64_t now_ns);
/* A packet comes and there is room.  LINE_DROPS: its last bit is out at
 * *finish_ns, rounded up.  Else LINE_DROP_QUEUE, or LINE_DROP_OUTAGE after it
 * has used its time.  Times do not go back. */
enum line_drop bottleneck_pass(struct bottleneck *bottleneck, uint64_t now_ns,
    uint32_t bytes, uint64_t *finish_ns);

#endif
