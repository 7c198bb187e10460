/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/line.h"

#include <assert.h>
#include <stdlib.h>

#include "error.h"
#include "rehearse/agenda.h"
#include "rehearse/bottleneck.h"

/* Streams of random numbers; a feature never shares one. */
enum stream {
	STREAM_LOSS,
	STREAM_BURSTS_MOVES,
	STREAM_BURSTS_LOSSES,
	STREAM_VARIATION,
	STREAM_REORDERING,
	STREAM_DUPLICATION,
	STREAM_BACKGROUND,
};

/* What chance has in store for a packet. */
struct fate {
	bool lost, lost_in_burst, held, doubled;
	uint64_t variation_ns;
};

/* A packet under way, by handle. */
struct parcel {
	struct truth_sample packet;	/* due_ns is in the agenda */
	bool copy, held;
};

/* One that waits until so many have been accepted. */
struct hold {
	uint32_t handle;
	uint64_t number;
	uint64_t until_accepted;
};

struct line {
	struct line_settings settings;
	uint64_t origin_ns, now_ns;
	uint64_t numbers;	/* packets offered */
	uint64_t accepted;
	uint64_t last_due_ns;	/* of those in order */
	struct chance loss, reordering, duplication;
	struct bursts bursts;
	struct variation variation;
	struct bucket policer;
	struct bottleneck bottleneck;
	struct background background;
	struct agenda agenda;
	struct parcel *parcels;	/* owned; by handle */
	uint32_t copies;	/* pending */
	struct hold holds[LINE_HELD_MAX + 1];	/* a ring */
	size_t hold_first, hold_count;
	struct truth truth;
};

static struct chance
stream(const struct line *line, enum stream number)
{
	return chance_stream(line->settings.seed, (uint64_t)number);
}

static void
init_chances(struct line *line)
{
	const struct line_settings *settings = &line->settings;

	line->loss = stream(line, STREAM_LOSS);
	line->reordering = stream(line, STREAM_REORDERING);
	line->duplication = stream(line, STREAM_DUPLICATION);
	bursts_init(&line->bursts, &settings->bursts,
	    stream(line, STREAM_BURSTS_MOVES),
	    stream(line, STREAM_BURSTS_LOSSES));
	variation_init(&line->variation, &settings->variation,
	    stream(line, STREAM_VARIATION));
	background_init(&line->background, &settings->background,
	    stream(line, STREAM_BACKGROUND), line->origin_ns);
}

struct line *
line_new(const struct line_settings *settings, uint64_t origin_ns,
    struct error *err)
{
	struct line *line;

	assert(origin_ns < LINE_NOW_MAX_NS);
	if (line_check(settings, err) == -1)
		return NULL;
	line = calloc(1, sizeof(*line));
	if (line == NULL)
		goto no_memory;
	line->settings = *settings;
	line->origin_ns = line->now_ns = origin_ns;
	init_chances(line);
	bucket_init(&line->policer, &settings->policer, origin_ns);
	line->parcels = calloc(LINE_PACKETS_MAX, sizeof(*line->parcels));
	if (line->parcels == NULL ||
	    bottleneck_init(&line->bottleneck, &line->settings, origin_ns,
		LINE_PACKETS_MAX) == -1 ||
	    agenda_init(&line->agenda, LINE_PACKETS_MAX) == -1 ||
	    truth_init(&line->truth, origin_ns, settings->interval_ns,
		settings->intervals, settings->sample_every) == -1)
		goto no_memory;
	return line;
no_memory:
	line_free(line);
	error_set(err, ERROR_INTERNAL, "no memory for an emulated line");
	return NULL;
}

void
line_free(struct line *line)
{
	if (line == NULL)
		return;
	bottleneck_fini(&line->bottleneck);
	agenda_fini(&line->agenda);
	truth_fini(&line->truth);
	free(line->parcels);
	free(line);
}

/* Asked for every packet, whatever becomes of it: see the header. */
static struct fate
draw(struct line *line, uint64_t number)
{
	const struct line_settings *settings = &line->settings;

	return (struct fate){
		.lost = chance_uniform(line->loss, number) <
		    settings->loss_ratio,
		.lost_in_burst = bursts_lose(&line->bursts, number),
		.held = chance_uniform(line->reordering, number) <
		    settings->reordering.ratio,
		.doubled = chance_uniform(line->duplication, number) <
		    settings->duplication.ratio,
		.variation_ns = variation_next_ns(&line->variation, number),
	};
}

static void
pass_background(struct line *line, uint64_t now_ns)
{
	struct truth_sample packet = {
		.number = line->background.number,
		.entered_ns = now_ns,
		.bytes = (uint32_t)line->settings.background.packet_bytes,
		.class = LINE_CLASS_BACKGROUND,
	};
	enum line_drop drop = LINE_DROP_MEMORY;

	truth_entered(&line->truth, now_ns, packet.class, packet.bytes);
	if (bottleneck_has_room(&line->bottleneck, now_ns))
		drop = bottleneck_pass(&line->bottleneck, now_ns,
		    packet.bytes, &packet.due_ns);
	if (drop == LINE_DROPS)
		truth_left(&line->truth, &packet, false);
	else
		truth_dropped(&line->truth, now_ns, packet.class,
		    packet.bytes, drop);
}

void
line_advance(struct line *line, uint64_t now_ns)
{
	assert(now_ns >= line->now_ns && now_ns < LINE_NOW_MAX_NS);
	line->now_ns = now_ns;
	while (line->background.next_ns <= now_ns) {
		pass_background(line, line->background.next_ns);
		background_step(&line->background);
	}
}

/* The way to the far end.  LINE_DROPS: it gets there. */
static enum line_drop
pass(struct line *line, const struct truth_sample *packet,
    const struct fate *fate, uint64_t *finish_ns)
{
	const struct line_settings *settings = &line->settings;
	uint64_t now_ns = packet->entered_ns;
	enum line_drop drop;

	if (settings->mtu_bytes > 0 && packet->bytes > settings->mtu_bytes)
		return LINE_DROP_MTU;
	/* Before the policer, so that its tokens are not taken in vain. */
	if (!bottleneck_has_room(&line->bottleneck, now_ns) ||
	    agenda_room(&line->agenda) < 2)
		return LINE_DROP_MEMORY;
	if (!bucket_conforms(&line->policer, now_ns, packet->bytes))
		return LINE_DROP_POLICER;
	drop = bottleneck_pass(&line->bottleneck, now_ns, packet->bytes,
	    finish_ns);
	if (drop != LINE_DROPS)
		return drop;
	if (fate->lost)
		return LINE_DROP_LOSS;
	return fate->lost_in_burst ? LINE_DROP_BURSTS : LINE_DROPS;
}

static void
add_parcel(struct line *line, const struct truth_sample *packet,
    uint64_t due_ns, struct line_verdict *verdict)
{
	uint32_t handle = agenda_add(&line->agenda, due_ns);

	line->parcels[handle] = (struct parcel){ .packet = *packet,
		.copy = verdict->copies > 0 };
	line->copies += verdict->copies > 0;
	verdict->handles[verdict->copies] = handle;
	verdict->due_ns[verdict->copies] = due_ns;
	verdict->copies++;
}

/* This one has been accepted: those that waited for it alone come next. */
static void
release_held(struct line *line, uint64_t due_ns)
{
	const struct hold *hold;

	while (line->hold_count > 0) {
		hold = &line->holds[line->hold_first];
		if (hold->until_accepted > line->accepted)
			return;
		/* Else its time was up before. */
		if (line->parcels[hold->handle].held &&
		    line->parcels[hold->handle].packet.number ==
		    hold->number &&
		    due_ns < agenda_due_ns(&line->agenda, hold->handle))
			agenda_advance(&line->agenda, hold->handle, due_ns);
		line->hold_first = (line->hold_first + 1) %
		    (LINE_HELD_MAX + 1);
		line->hold_count--;
	}
}

static void
hold(struct line *line, uint32_t handle, uint64_t number)
{
	size_t last = (line->hold_first + line->hold_count) %
	    (LINE_HELD_MAX + 1);

	assert(line->hold_count <= LINE_HELD_MAX);
	line->parcels[handle].held = true;
	line->holds[last] = (struct hold){ handle, number, line->accepted +
	    line->settings.reordering.packets };
	line->hold_count++;
}

static void
accept_packet(struct line *line, const struct truth_sample *packet,
    const struct fate *fate, uint64_t finish_ns,
    struct line_verdict *verdict)
{
	const struct line_settings *settings = &line->settings;
	uint64_t due_ns = finish_ns + settings->propagation_ns +
	    fate->variation_ns;

	if (!settings->variation.reorders && due_ns < line->last_due_ns)
		due_ns = line->last_due_ns;
	line->last_due_ns = due_ns;
	line->accepted++;
	verdict->accepted = true;
	add_parcel(line, packet, due_ns +
	    (fate->held ? settings->reordering.extra_ns : 0), verdict);
	release_held(line, due_ns);
	if (fate->held && settings->reordering.packets > 0)
		hold(line, verdict->handles[0], packet->number);
	if (fate->doubled)
		add_parcel(line, packet, verdict->due_ns[0] +
		    settings->duplication.extra_ns, verdict);
}

void
line_offer(struct line *line, uint64_t now_ns, uint32_t packet_bytes,
    enum line_class class, struct line_verdict *verdict)
{
	struct truth_sample packet = { .number = line->numbers++,
		.entered_ns = now_ns, .bytes = packet_bytes, .class = class };
	struct fate fate = draw(line, packet.number);
	uint64_t finish_ns;
	enum line_drop drop;

	assert(packet_bytes > 0 && packet_bytes <= LINE_PACKET_BYTES_MAX);
	assert(class < LINE_CLASS_BACKGROUND);
	line_advance(line, now_ns);
	*verdict = (struct line_verdict){ .number = packet.number };
	truth_entered(&line->truth, now_ns, class, packet_bytes);
	drop = pass(line, &packet, &fate, &finish_ns);
	if (drop == LINE_DROPS) {
		accept_packet(line, &packet, &fate, finish_ns, verdict);
		return;
	}
	truth_dropped(&line->truth, now_ns, class, packet_bytes, drop);
	verdict->drop = drop;
	verdict->answer = drop == LINE_DROP_MTU && line->settings.mtu_answer;
}

uint64_t
line_next_due_ns(const struct line *line)
{
	return agenda_next_ns(&line->agenda);
}

bool
line_take(struct line *line, uint64_t now_ns, struct line_delivery *delivery)
{
	uint64_t due_ns = agenda_next_ns(&line->agenda);
	struct parcel *parcel;

	if (due_ns == LINE_NEVER_NS || due_ns > now_ns)
		return false;
	delivery->handle = agenda_take(&line->agenda);
	parcel = &line->parcels[delivery->handle];
	parcel->held = false;
	delivery->copy = parcel->copy;
	delivery->packet = parcel->packet;
	delivery->packet.due_ns = due_ns;
	line->copies -= parcel->copy;
	truth_left(&line->truth, &delivery->packet, parcel->copy);
	return true;
}

uint32_t
line_pending(const struct line *line)
{
	return line->agenda.count;
}

uint32_t
line_pending_copies(const struct line *line)
{
	return line->copies;
}

const struct truth *
line_truth(const struct line *line)
{
	return &line->truth;
}
