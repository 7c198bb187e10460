/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/overhead.h"

#include <assert.h>
#include <inttypes.h>
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
wrap(const struct layer_cost *cost, struct fraction carried)
{
	struct wrapping w;
	struct fraction min = fraction_whole(cost->min_bytes), filled;

	w.inside = fraction_whole(cost->head_bytes + cost->trail_bytes +
	    cost->tail_bytes);
	filled = fraction_roundup(fraction_add(carried,
	    fraction_whole(cost->trail_bytes)), cost->align_bytes);
	w.own = fraction_add(filled, fraction_whole(cost->head_bytes +
	    cost->tail_bytes));
	if (fraction_compare(w.own, min) < 0)
		w.own = min;
	w.padding = fraction_subtract(w.own, fraction_add(carried, w.inside));
	w.unpadded = fraction_add(carried, fraction_whole(cost->head_bytes));
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
	    wrap(cost, record).total);
}

/* The most that a layer can carry within limit_bytes; -1: nothing. */
static int
largest_carried(const struct layer_cost *cost, uint64_t limit_bytes,
    uint64_t *carried_bytes)
{
	uint64_t fixed_bytes = cost->head_bytes + cost->tail_bytes;
	uint64_t room_bytes;

	if (limit_bytes <= fixed_bytes)
		return -1;
	room_bytes = limit_bytes - fixed_bytes;
	if (cost->align_bytes > 1)
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
reach(struct overhead *out, enum layer_level level, struct fraction octets)
{
	out->has_level[level] = true;
	out->octets[level] = octets;
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
		reach(out, LEVEL_FRAME, w->own);
		out->has_level[LEVEL_FRAME_WITHOUT_FCS] = true;
		out->octets[LEVEL_FRAME_WITHOUT_FCS] = w->unpadded;
	}
	if (i == layers_lowest_packet(stack)) {
		reach(out, LEVEL_PACKET, w->own);
		out->packet_bytes = fraction_floor(w->own);
	}
	if (i == layers_transport(stack))
		reach(out, LEVEL_SEGMENT, w->own);
	add_part(out, use->layer, inside_name(use), w->inside);
	add_part(out, use->layer, "padding", w->padding);
}

int
overhead_compute(const struct layer_stack *stack, uint64_t mtu_bytes,
    struct overhead *out, struct error *err)
{
	struct wrapping wrappings[LAYERS_MAX];
	struct fraction octets, inner;
	uint64_t carried_bytes = 0;
	size_t i, top = 0;

	if (fit(stack, mtu_bytes, &top, &carried_bytes, err) == -1)
		return -1;
	memset(out, 0, sizeof(*out));
	octets = fraction_whole(carried_bytes);
	for (i = top; i > 0; i--) {
		wrappings[i - 1] = wrap(&stack->use[i - 1].cost, octets);
		octets = wrappings[i - 1].total;
	}
	reach(out, LEVEL_LINE, octets);
	for (i = 0; i < top; i++)
		take_off(stack, i, &wrappings[i], out);
	octets = fraction_whole(carried_bytes);
	for (i = top; i < stack->count; i++) {
		inner = unwrap_records(&stack->use[i].cost, octets);
		add_part(out, stack->use[i].layer, inside_name(&stack->use[i]),
		    fraction_subtract(octets, inner));
		octets = inner;
	}
	reach(out, LEVEL_PAYLOAD, octets);
	for (i = 0; i < LEVELS; i++)
		if (!out->has_level[i])
			out->octets[i] = fraction_whole(0);
	return 0;
}
