/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/truth.h"

#include <assert.h>
#include <stdlib.h>

const char *const line_class_names[LINE_CLASSES] = {
	[LINE_CLASS_LOAD] = "load",
	[LINE_CLASS_CONTROL] = "control",
	[LINE_CLASS_OTHER] = "other",
	[LINE_CLASS_BACKGROUND] = "background",
};

const char *const line_drop_names[LINE_DROPS] = {
	[LINE_DROP_MTU] = "mtu",
	[LINE_DROP_POLICER] = "policer",
	[LINE_DROP_QUEUE] = "queue",
	[LINE_DROP_OUTAGE] = "outage",
	[LINE_DROP_LOSS] = "loss",
	[LINE_DROP_BURSTS] = "bursts",
	[LINE_DROP_MEMORY] = "memory",
};

int
truth_init(struct truth *truth, uint64_t origin_ns, uint64_t interval_ns,
    size_t intervals, uint64_t sample_every)
{
	assert(interval_ns > 0);
	*truth = (struct truth){
		.origin_ns = origin_ns,
		.interval_ns = interval_ns,
		.rows = calloc(intervals + 1, sizeof(*truth->rows)),
		.intervals = intervals,
		.sample_every = sample_every,
	};
	if (sample_every > 0)
		truth->samples = calloc(TRUTH_SAMPLES_MAX,
		    sizeof(*truth->samples));
	if (truth->rows == NULL ||
	    (sample_every > 0 && truth->samples == NULL))
		return -1;
	return 0;
}

void
truth_fini(struct truth *truth)
{
	free(truth->rows);
	free(truth->samples);
	truth->rows = NULL;
	truth->samples = NULL;
}

static struct truth_counts *
counts_at(struct truth *truth, uint64_t now_ns, enum line_class class)
{
	uint64_t row;

	assert(now_ns >= truth->origin_ns);
	row = (now_ns - truth->origin_ns) / truth->interval_ns;
	if (row > truth->intervals)
		row = truth->intervals;
	return &truth->rows[row].classes[class];
}

static void
count(struct truth_count *to, uint32_t bytes)
{
	to->packets++;
	to->bytes += bytes;
}

void
truth_entered(struct truth *truth, uint64_t now_ns, enum line_class class,
    uint32_t bytes)
{
	count(&counts_at(truth, now_ns, class)->entered, bytes);
}

void
truth_dropped(struct truth *truth, uint64_t now_ns, enum line_class class,
    uint32_t bytes, enum line_drop drop)
{
	count(&counts_at(truth, now_ns, class)->dropped[drop], bytes);
}

static void
keep_sample(struct truth *truth, const struct truth_sample *packet)
{
	if (truth->sample_every == 0 ||
	    packet->number % truth->sample_every != 0)
		return;
	if (truth->sample_count == TRUTH_SAMPLES_MAX)
		truth->samples_missed++;
	else
		truth->samples[truth->sample_count++] = *packet;
}

void
truth_left(struct truth *truth, const struct truth_sample *packet, bool copy)
{
	struct truth_counts *counts = counts_at(truth, packet->due_ns,
	    packet->class);
	uint64_t *highest = &truth->highest[packet->class];

	count(&counts->left, packet->bytes);
	if (copy) {
		count(&counts->duplicated, packet->bytes);
		return;
	}
	if (packet->number + 1 < *highest)
		count(&counts->reordered, packet->bytes);
	else
		*highest = packet->number + 1;
	if (packet->class != LINE_CLASS_BACKGROUND)
		keep_sample(truth, packet);
}

static void
add(struct truth_count *to, const struct truth_count *more)
{
	to->packets += more->packets;
	to->bytes += more->bytes;
}

static void
add_counts(struct truth_counts *to, const struct truth_counts *more)
{
	add(&to->entered, &more->entered);
	add(&to->left, &more->left);
	add(&to->reordered, &more->reordered);
	add(&to->duplicated, &more->duplicated);
	for (size_t i = 0; i < LINE_DROPS; i++)
		add(&to->dropped[i], &more->dropped[i]);
}

void
truth_total(const struct truth *truth, struct truth_row *total)
{
	*total = (struct truth_row){ 0 };
	for (size_t i = 0; i <= truth->intervals; i++)
		for (size_t j = 0; j < LINE_CLASSES; j++)
			add_counts(&total->classes[j],
			    &truth->rows[i].classes[j]);
}

struct truth_count
truth_dropped_all(const struct truth_counts *counts)
{
	struct truth_count all = { 0, 0 };

	for (size_t i = 0; i < LINE_DROPS; i++)
		add(&all, &counts->dropped[i]);
	return all;
}
