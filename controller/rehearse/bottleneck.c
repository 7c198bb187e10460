/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/bottleneck.h"

/* When a packet is on the line. */
struct passage {
	uint64_t release_ns;	/* by the shaper */
	struct serial_moment start, finish;
	uint64_t start_ceil_ns, finish_ceil_ns;
};

static void
init_serial(struct bottleneck *bottleneck)
{
	const struct line_settings *settings = bottleneck->settings;
	struct serial_step steps[1 + SERIAL_STEPS_MAX];

	steps[0] = (struct serial_step){ 0, settings->rate_bps };
	for (size_t i = 0; i < settings->step_count; i++) {
		steps[1 + i] = settings->steps[i];
		steps[1 + i].at_ns += bottleneck->origin_ns;
	}
	serial_init(&bottleneck->serial, &settings->octets, steps,
	    settings->rate_bps == 0 ? 0 : 1 + settings->step_count);
}

int
bottleneck_init(struct bottleneck *bottleneck,
    const struct line_settings *settings, uint64_t origin_ns,
    uint32_t packets_max)
{
	*bottleneck = (struct bottleneck){ .settings = settings,
		.origin_ns = origin_ns };
	bucket_init(&bottleneck->shaper, &settings->shaper, origin_ns);
	init_serial(bottleneck);
	return waiting_init(&bottleneck->waiting, packets_max);
}

void
bottleneck_fini(struct bottleneck *bottleneck)
{
	waiting_fini(&bottleneck->waiting);
}

static struct passage
plan_passage(const struct bottleneck *bottleneck, uint64_t now_ns,
    uint32_t bytes)
{
	struct passage passage;

	passage.release_ns = bucket_release_ns(&bottleneck->shaper, now_ns,
	    bytes);
	passage.start = serial_start(&bottleneck->serial, passage.release_ns);
	passage.finish = serial_finish(&bottleneck->serial, passage.start,
	    bytes);
	passage.start_ceil_ns = serial_ceil_ns(passage.start);
	passage.finish_ceil_ns = serial_ceil_ns(passage.finish);
	return passage;
}

static bool
queue_refuses(const struct bottleneck *bottleneck,
    const struct passage *passage, uint64_t now_ns, uint32_t bytes)
{
	const struct line_settings *settings = bottleneck->settings;

	if (passage->start_ceil_ns <= now_ns)
		return false;
	if (settings->queue_bytes > 0 &&
	    bottleneck->waiting.bytes + bytes > settings->queue_bytes)
		return true;
	return settings->queue_ns > 0 &&
	    passage->start_ceil_ns - now_ns > settings->queue_ns;
}

static void
keep_passage(struct bottleneck *bottleneck, const struct passage *passage,
    uint32_t bytes)
{
	bucket_take(&bottleneck->shaper, passage->release_ns, bytes);
	serial_keep(&bottleneck->serial, passage->finish);
	waiting_add(&bottleneck->waiting, passage->start_ceil_ns, bytes);
}

/* Bits in [start, finish) and an outage in [from, to) meet; a packet without
 * length is a point.  Passages and outages both rise in time. */
static bool
outage_hits(struct bottleneck *bottleneck, const struct passage *passage)
{
	uint64_t start_ns = passage->start.at_ns - bottleneck->origin_ns;
	uint64_t finish_ns = passage->finish_ceil_ns - bottleneck->origin_ns;
	const struct line_outage *outage;

	while (bottleneck->outage < bottleneck->settings->outage_count) {
		outage =
		    &bottleneck->settings->outages[bottleneck->outage];
		if (start_ns < outage->to_ns)
			return finish_ns > outage->from_ns ||
			    (bottleneck->serial.step_count == 0 &&
			    finish_ns == outage->from_ns);
		bottleneck->outage++;
	}
	return false;
}

bool
bottleneck_has_room(struct bottleneck *bottleneck, uint64_t now_ns)
{
	waiting_release(&bottleneck->waiting, now_ns);
	return !waiting_is_full(&bottleneck->waiting);
}

enum line_drop
bottleneck_pass(struct bottleneck *bottleneck, uint64_t now_ns,
    uint32_t bytes, uint64_t *finish_ns)
{
	struct passage passage = plan_passage(bottleneck, now_ns, bytes);

	waiting_release(&bottleneck->waiting, now_ns);
	if (queue_refuses(bottleneck, &passage, now_ns, bytes))
		return LINE_DROP_QUEUE;
	keep_passage(bottleneck, &passage, bytes);
	if (outage_hits(bottleneck, &passage))
		return LINE_DROP_OUTAGE;
	*finish_ns = passage.finish_ceil_ns;
	return LINE_DROPS;
}
