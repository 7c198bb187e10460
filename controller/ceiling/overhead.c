/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/overhead.h"

#include <assert.h>
#include <stddef.h>
#include <string.h>

#include "error.h"

/* What one layer makes of what it carries, in octets. */
struct wrapping {
	struct fraction carried;
	struct fraction own;		/* with head, trail, tail, padding */
	struct fraction total;		/* with before and gap, coded */
};

/* Where in a stack the levels below the payload begin. */
struct places {
	size_t frame;			/* SIZE_MAX: nowhere */
	size_t packet, transport;
};

static struct places
find_places(const struct layer_stack *stack)
{
	struct places places = { .frame = SIZE_MAX };

	(void)layers_lowest_frame(stack, &places.frame);
	places.packet = layers_lowest_packet(stack);
	places.transport = layers_transport(stack);
	return places;
}

static uint64_t
head_bytes(const struct layer_cost *cost, bool upstream)
{
	return cost->head_bytes - (upstream ? cost->upstream_less_bytes : 0);
}

static struct wrapping
wrap(const struct layer_cost *cost, struct fraction carried, bool upstream)
{
	struct wrapping w = { .carried = carried };
	struct fraction min = fraction_whole(cost->min_bytes), filled, limit;

	filled = fraction_add(carried, fraction_whole(cost->trail_bytes));
	limit = fraction_whole(cost->limit_bytes);
	if (cost->limit_bytes == 0 || fraction_compare(filled, limit) < 0) {
		filled = fraction_roundup(filled, cost->align_bytes);
		if (cost->limit_bytes != 0 &&
		    fraction_compare(filled, limit) > 0)
			filled = limit;
	}
	w.own = fraction_add(filled, fraction_whole(
	    head_bytes(cost, upstream) + cost->tail_bytes));
	if (fraction_compare(w.own, min) < 0)
		w.own = min;
	w.total = fraction_multiply(fraction_add(w.own, fraction_whole(
	    cost->before_bytes + cost->gap_bytes)),
	    fraction_make(cost->num, cost->den));
	return w;
}

/* Octets of payload in `octets` that a layer of records has made. */
static struct fraction
unwrap_records(const struct layer_cost *cost, struct fraction octets)
{
	struct fraction record = fraction_whole(cost->record_bytes);

	return fraction_divide(fraction_multiply(octets, record),
	    wrap(cost, record, false).total);
}

static void
add_part(struct overhead *out, const struct layer *layer, const char *what,
    struct fraction octets)
{
	struct overhead_part *part;

	if (octets.num == 0)
		return;
	assert(out->parts_count < OVERHEAD_PARTS_MAX);
	part = &out->parts[out->parts_count++];
	memset(part, 0, sizeof(*part));
	part->layer = layer;
	part->what = what != NULL ? what : "overhead";
	part->octets = octets;
}

static void
reach(struct overhead *out, enum layer_level level)
{
	out->has_level[level] = true;
	if (out->parts_count > 0) {
		out->parts[out->parts_count - 1].reaches_level = true;
		out->parts[out->parts_count - 1].level = level;
	}
}

static const char *
inside_name(const struct layer_use *use)
{
	const struct layer *layer = use->layer;

	if (use->cost.head_bytes != layer->cost.head_bytes &&
	    layer->inside_with_options != NULL)
		return layer->inside_with_options;
	return layer->inside;
}

/* Octets at the levels that the i-th layer of the stack makes. */
static void
note_levels(const struct places *places, size_t i, const struct wrapping *w,
    uint64_t without_tail_bytes, struct fraction octets[LEVELS])
{
	if (i == places->frame) {
		octets[LEVEL_FRAME] = w->own;
		octets[LEVEL_FRAME_WITHOUT_FCS] = fraction_add(w->carried,
		    fraction_whole(without_tail_bytes));
	}
	if (i == places->packet)
		octets[LEVEL_PACKET] = w->own;
	if (i == places->transport)
		octets[LEVEL_SEGMENT] = w->own;
}

/* Wraps `carried` into the layers below `top`; octets[LINE] is what the lowest
 * makes.  wrappings may be NULL. */
static void
wrap_below(const struct layer_stack *stack, size_t top,
    struct fraction carried, bool upstream, struct wrapping wrappings[],
    struct fraction octets[LEVELS])
{
	struct places places = find_places(stack);
	struct wrapping w;
	size_t i;

	for (i = 0; i < LEVELS; i++)
		octets[i] = fraction_whole(0);
	octets[LEVEL_LINE] = carried;
	for (i = top; i > 0; i--) {
		const struct layer_cost *cost = &stack->use[i - 1].cost;

		w = wrap(cost, octets[LEVEL_LINE], upstream);
		octets[LEVEL_LINE] = w.total;
		note_levels(&places, i - 1, &w, head_bytes(cost, upstream) +
		    cost->trail_bytes, octets);
		if (wrappings != NULL)
			wrappings[i - 1] = w;
	}
}

void
overhead_of_packet(const struct layer_stack *stack, uint64_t packet_bytes,
    bool upstream, struct fraction octets[LEVELS])
{
	wrap_below(stack, layers_lowest_packet(stack),
	    fraction_whole(packet_bytes), upstream, NULL, octets);
	octets[LEVEL_PACKET] = fraction_whole(packet_bytes);
}

/* Takes one layer off, from outside in. */
static void
take_off(const struct layer_use *use, const struct places *places, size_t i,
    const struct wrapping *w, bool upstream, struct overhead *out)
{
	const struct layer_cost *cost = &use->cost;
	struct fraction around = fraction_whole(cost->before_bytes +
	    cost->gap_bytes);
	struct fraction inside = fraction_whole(head_bytes(cost, upstream) +
	    cost->trail_bytes + cost->tail_bytes);

	add_part(out, use->layer, use->layer->coding,
	    fraction_subtract(w->total, fraction_add(w->own, around)));
	add_part(out, use->layer, use->layer->around, around);
	if (i == places->frame) {
		reach(out, LEVEL_FRAME);
		out->has_level[LEVEL_FRAME_WITHOUT_FCS] = true;
	}
	if (i == places->packet) {
		reach(out, LEVEL_PACKET);
		out->packet_bytes = fraction_floor(w->own);
	}
	if (i == places->transport)
		reach(out, LEVEL_SEGMENT);
	add_part(out, use->layer, inside_name(use), inside);
	add_part(out, use->layer, "padding", fraction_subtract(w->own,
	    fraction_add(w->carried, inside)));
}

static void
add_acknowledgement(const struct layer_stack *stack, bool upstream,
    struct overhead *out)
{
	size_t transport = layers_transport(stack);

	if (!stack->use[transport].layer->acknowledged)
		return;
	wrap_below(stack, transport + 1, fraction_whole(0), upstream, NULL,
	    out->ack_octets);
}

int
overhead_compute(const struct layer_stack *stack, uint64_t mtu_bytes,
    bool upstream, struct overhead *out, struct error *err)
{
	struct wrapping wrappings[LAYERS_MAX];
	struct fraction octets, inner;
	struct places places = find_places(stack);
	struct layers_room room;
	size_t i;

	if (layers_fit(stack, mtu_bytes, &room, err) == -1)
		return -1;
	memset(out, 0, offsetof(struct overhead, parts));
	out->parts_count = 0;
	for (i = 0; i < LEVELS; i++)
		out->ack_octets[i] = fraction_whole(0);
	octets = fraction_whole(room.carried_bytes);
	wrap_below(stack, room.top, octets, upstream, wrappings, out->octets);
	reach(out, LEVEL_LINE);
	for (i = 0; i < room.top; i++)
		take_off(&stack->use[i], &places, i, &wrappings[i], upstream,
		    out);
	for (i = room.top; i < stack->count; i++) {
		inner = unwrap_records(&stack->use[i].cost, octets);
		add_part(out, stack->use[i].layer, inside_name(&stack->use[i]),
		    fraction_subtract(octets, inner));
		octets = inner;
	}
	out->octets[LEVEL_PAYLOAD] = octets;
	reach(out, LEVEL_PAYLOAD);
	add_acknowledgement(stack, upstream, out);
	return 0;
}
