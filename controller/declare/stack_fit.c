/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a packet of a given size leaves for each layer that it holds. */
#include <inttypes.h>

#include "declare/stack.h"
#include "error.h"

/* A size that was declared is found to be too large for the room. */
static int
refuse_limit(const struct layer_use *use, uint64_t room_bytes,
    struct error *err)
{
	const struct layer_cost *cost = &use->cost;
	uint64_t own_bytes = 0;

	/* An IP layer's MTU counts its header. */
	if (use->layer->level == LEVEL_PACKET)
		own_bytes = cost->head_bytes;
	return error_set(err, ERROR_INPUT, "%s: %s: found %" PRIu64 " B, "
	    "allowed: at most the %" PRIu64 " B that the layers below leave; "
	    "more is cut into fragments, which are not modelled",
	    use->layer->name, use->layer->limit_option,
	    cost->limit_bytes + own_bytes, room_bytes + own_bytes);
}

/* The most that a layer can carry within *bytes, which it becomes. */
static int
take_layer(const struct layer_use *use, uint64_t *bytes, struct error *err)
{
	const struct layer_cost *cost = &use->cost;
	uint64_t fixed_bytes = cost->head_bytes + cost->tail_bytes;
	uint64_t room_bytes;

	room_bytes = *bytes <= fixed_bytes ? 0 : *bytes - fixed_bytes;
	if (cost->limit_bytes != 0 && cost->limit_bytes > room_bytes &&
	    use->layer->limit_option != NULL)
		return refuse_limit(use, room_bytes, err);
	if (cost->limit_bytes != 0 && cost->limit_bytes <= room_bytes)
		room_bytes = cost->limit_bytes;
	else if (cost->align_bytes > 1)
		room_bytes -= room_bytes % cost->align_bytes;
	if (room_bytes <= cost->trail_bytes)
		return error_set(err, ERROR_INPUT, "the layers up to %s leave "
		    "no room for payload", use->layer->name);
	*bytes = room_bytes - cost->trail_bytes;
	return 0;
}

/* An IP layer inside a tunnel has a least MTU as any other: below it the
 * tunnel would have to cut packets. */
static int
check_inner(const struct layer_use *use, uint64_t bytes, struct error *err)
{
	if (bytes >= use->layer->min_mtu_bytes)
		return 0;
	return error_set(err, ERROR_INPUT, "%s: the layers below leave %"
	    PRIu64 " B, allowed: from %" PRIu64 " B", use->layer->name, bytes,
	    use->layer->min_mtu_bytes);
}

int
layers_fit(const struct layer_stack *stack, uint64_t mtu_bytes,
    struct layers_room *out, struct error *err)
{
	uint64_t bytes = mtu_bytes;
	size_t lowest = layers_lowest_packet(stack), i;

	for (i = lowest; i < stack->count; i++) {
		if (stack->use[i].cost.record_bytes != 0)
			break;
		if ((i > lowest &&
		    check_inner(&stack->use[i], bytes, err) == -1) ||
		    take_layer(&stack->use[i], &bytes, err) == -1) {
			error_wrap(err, "mtu of %" PRIu64 " B", mtu_bytes);
			out->failed = i;
			return -1;
		}
	}
	out->top = i;
	out->carried_bytes = bytes;
	return 0;
}

int
layers_check_fit(const struct layer_stack *stack, uint64_t mtu_bytes,
    struct error *err)
{
	const struct node *at, *option = NULL;
	const struct layer_use *use;
	struct layers_room room;
	struct error cause;

	if (layers_fit(stack, mtu_bytes, &room, &cause) == 0)
		return 0;
	use = &stack->use[room.failed];
	at = use->at;
	if (use->layer->limit_option != NULL)
		option = node_child(at, use->layer->limit_option);
	return node_error(option != NULL ? option : at, err, "mtu of %" PRIu64
	    " B: %s", mtu_bytes, cause.cause);
}
