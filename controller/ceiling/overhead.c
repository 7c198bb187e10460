/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/overhead.h"

#include <assert.h>
#include <inttypes.h>
#include <stddef.h>
#include <string.h>

#include "error.h"

/* Octets around what one layer carries. */
struct wrapping {
	struct fraction inside;		/* head, trail, tail */
	struct fraction padding;	/* to align and to min */
	struct fraction own;		/* carried, inside and padding */
	struct fraction unpadded;	/* head and carried: no trailer */
	struct fraction around;		/* before and gap */
	struct fraction coding;		/* what num/den adds */
	struct fraction total;
};

static struct wrapping
wrap(const struct layer_cost *cost, struct fraction carried, bool upstream)
{
	uint64_t head_bytes = cost->head_bytes;
	struct wrapping w;
	struct fraction min = fraction_whole(cost->min_bytes), filled, limit;

	if (upstream)
		head_bytes -= cost->upstream_less_bytes;
	w.inside = fraction_whole(head_bytes + cost->trail_bytes +
	    cost->tail_bytes);
	filled = fraction_add(carried, fraction_whole(cost->trail_bytes));
	limit = fraction_whole(cost->limit_bytes);
	if (cost->limit_bytes == 0 || fraction_compare(filled, limit) < 0) {
		filled = fraction_roundup(filled, cost->align_bytes);
		if (cost->limit_bytes != 0 &&
		    fraction_compare(filled, limit) > 0)
			filled = limit;
	}
	w.own = fraction_add(filled, fraction_whole(head_bytes +
	    cost->tail_bytes));
	if (fraction_compare(w.own, min) < 0)
		w.own = min;
	w.padding = fraction_subtract(w.own, fraction_add(carried, w.inside));
	w.unpadded = fraction_add(carried, fraction_whole(head_bytes));
	w.around = fraction_whole(cost->before_bytes + cost->gap_bytes);
	w.total = fraction_multiply(fraction_add(w.own, w.around),
	    fraction_make(cost->num, cost->den));
	w.coding = fraction_subtract(w.total, fraction_add(w.own, w.around));
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

/* The most that a layer can carry within room_bytes; -1: nothing. */
static int
largest_carried(const struct layer_cost *cost, uint64_t room_bytes,
    uint64_t *carried_bytes)
{
	uint64_t fixed_bytes = cost->head_bytes + cost->tail_bytes;

	if (room_bytes <= fixed_bytes)
		return -1;
	room_bytes -= fixed_bytes;
	if (cost->limit_bytes != 0 && cost->limit_bytes <= room_bytes)
		room_bytes = cost->limit_bytes;
	else if (cost->align_bytes > 1)
		room_bytes -= room_bytes % cost->align_bytes;
	if (room_bytes <= cost->trail_bytes)
		return -1;
	*carried_bytes = room_bytes - cost->trail_bytes;
	return 0;
}

/* From the lowest IP layer up to the first layer of records or the top. */
static int
fit(const struct layer_stack *stack, uint64_t mtu_bytes, size_t *top,
    uint64_t *carried_bytes, struct error *err)
{
	const struct layer_use *use;
	uint64_t left_bytes = mtu_bytes;
	size_t i;

	for (i = layers_lowest_packet(stack); i < stack->count; i++) {
		use = &stack->use[i];
		if (use->cost.record_bytes != 0)
			break;
		if (largest_carried(&use->cost, left_bytes, &left_bytes) == -1)
			return error_set(err, ERROR_INPUT, "mtu of %" PRIu64
			    " B: the layers up to %s leave no room for payload",
			    mtu_bytes, use->layer->name);
	}
	*top = i;
	*carried_bytes = left_bytes;
	return 0;
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
note_levels(const struct layer_stack *stack, size_t i,
    const struct wrapping *w, struct fraction octets[LEVELS])
{
	size_t frame;

	if (layers_lowest_frame(stack, &frame) && i == frame) {
		octets[LEVEL_FRAME] = w->own;
		octets[LEVEL_FRAME_WITHOUT_FCS] = w->unpadded;
	}
	if (i == layers_lowest_packet(stack))
		octets[LEVEL_PACKET] = w->own;
	if (i == layers_transport(stack))
		octets[LEVEL_SEGMENT] = w->own;
}

/* Wraps `carried` into the layers below `top`; octets[LINE] is what the lowest
 * makes.  wrappings may be NULL. */
static void
wrap_below(const struct layer_stack *stack, size_t top,
    struct fraction carried, bool upstream, struct wrapping wrappings[],
    struct fraction octets[LEVELS])
{
	struct wrapping w;
	size_t i;

	for (i = 0; i < LEVELS; i++)
		octets[i] = fraction_whole(0);
	octets[LEVEL_LINE] = carried;
	for (i = top; i > 0; i--) {
		w = wrap(&stack->use[i - 1].cost, octets[LEVEL_LINE],
		    upstream);
		octets[LEVEL_LINE] = w.total;
		note_levels(stack, i - 1, &w, octets);
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
take_off(const struct layer_stack *stack, size_t i, const struct wrapping *w,
    struct overhead *out)
{
	const struct layer_use *use = &stack->use[i];
	size_t frame;

	add_part(out, use->layer, use->layer->coding, w->coding);
	add_part(out, use->layer, use->layer->around, w->around);
	if (layers_lowest_frame(stack, &frame) && i == frame) {
		reach(out, LEVEL_FRAME);
		out->has_level[LEVEL_FRAME_WITHOUT_FCS] = true;
	}
	if (i == layers_lowest_packet(stack)) {
		reach(out, LEVEL_PACKET);
		out->packet_bytes = fraction_floor(w->own);
	}
	if (i == layers_transport(stack))
		reach(out, LEVEL_SEGMENT);
	add_part(out, use->layer, inside_name(use), w->inside);
	add_part(out, use->layer, "padding", w->padding);
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
	uint64_t carried_bytes = 0;
	size_t i, top = 0;

	if (fit(stack, mtu_bytes, &top, &carried_bytes, err) == -1)
		return -1;
	memset(out, 0, offsetof(struct overhead, parts));
	out->parts_count = 0;
	for (i = 0; i < LEVELS; i++)
		out->ack_octets[i] = fraction_whole(0);
	octets = fraction_whole(carried_bytes);
	wrap_below(stack, top, octets, upstream, wrappings, out->octets);
	reach(out, LEVEL_LINE);
	for (i = 0; i < top; i++)
		take_off(stack, i, &wrappings[i], out);
	for (i = top; i < stack->count; i++) {
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
