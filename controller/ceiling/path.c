/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/path.h"

#include <string.h>

#include "error.h"

void
path_stack(const struct circuit *circuit, size_t i, const struct load *load,
    struct layer_stack *out)
{
	const struct layer_stack *stack = &circuit->segments[i].layers;

	if (load->declared)
		*out = *stack;
	else
		layers_with_protocol(stack, load->protocol, out);
}

static struct fraction
acks_per_packet(const struct layer_stack *stack, const struct load *load)
{
	const struct layer_use *transport;

	transport = &stack->use[layers_transport(stack)];
	if (!transport->layer->acknowledged)
		return fraction_whole(0);
	if (load->segments_per_ack.num != 0)
		return fraction_divide(fraction_whole(1),
		    load->segments_per_ack);
	return fraction_make(1, transport->options.segments_per_ack);
}

static int
make_capacity(const struct medium_use *use, const struct load *load,
    struct path_segment *out, struct error *err)
{
	struct medium_load medium_load = { .direction = load->direction };
	uint64_t users;

	memcpy(medium_load.octets, out->overhead.octets,
	    sizeof(medium_load.octets));
	medium_load.ack_octets = fraction_whole(0);
	medium_load.segments_per_ack = fraction_whole(1);
	if (out->acks_per_packet.num != 0) {
		medium_load.ack_octets = out->overhead.ack_octets[LEVEL_LINE];
		medium_load.segments_per_ack = fraction_divide(
		    fraction_whole(1), out->acks_per_packet);
	}
	if (capacity_compute(use, &medium_load, &out->capacity, err) == -1)
		return -1;
	users = out->capacity.contention;
	if (load->both && out->capacity.duplex == DUPLEX_SHARED)
		users *= 2;
	out->share = fraction_make(1, users);
	out->acks_in_contract = load->both;
	out->acks_on_line = !out->capacity.counts_acks &&
	    (load->both || out->capacity.duplex == DUPLEX_SHARED);
	if (fraction_floor(path_offered_bps(out)) == 0)
		return error_set(err, ERROR_INPUT, "medium %s: less than "
		    "1 bit/s is left for this circuit", use->medium->name);
	return 0;
}

int
path_segment_make(const struct circuit *circuit, size_t i,
    const struct load *load, struct path_segment *out, struct error *err)
{
	const struct medium_use *use = &circuit->segments[i].medium;
	struct layer_stack stack;

	path_stack(circuit, i, load, &stack);
	if (overhead_compute(&stack, circuit_mtu(circuit),
	    medium_upstream(use, load->direction), &out->overhead,
	    err) == -1)
		return -1;
	out->acks_per_packet = acks_per_packet(&stack, load);
	out->acks_on_line = out->acks_in_contract = false;
	out->share = fraction_whole(1);
	out->accuracy = layers_accuracy(&stack);
	if (use->medium->accuracy > out->accuracy)
		out->accuracy = use->medium->accuracy;
	out->reference = medium_is_reference(use->medium);
	if (out->reference)
		return 0;
	return make_capacity(use, load, out, err);
}

struct fraction
path_offered_bps(const struct path_segment *segment)
{
	return fraction_multiply(capacity_offered(&segment->capacity),
	    segment->share);
}

static struct fraction
with_acks(const struct path_segment *segment, bool counted,
    enum layer_level level)
{
	struct fraction octets = segment->overhead.octets[level];

	if (!counted || segment->acks_per_packet.num == 0)
		return octets;
	return fraction_add(octets, fraction_multiply(
	    segment->overhead.ack_octets[level], segment->acks_per_packet));
}

struct fraction
path_octets_on_line(const struct path_segment *segment, enum layer_level level)
{
	return with_acks(segment, segment->acks_on_line, level);
}

struct fraction
path_octets_in_contract(const struct path_segment *segment,
    enum layer_level level)
{
	return with_acks(segment, segment->acks_in_contract, level);
}

struct fraction
path_line_octets(const struct path_segment *segment)
{
	return fraction_multiply(path_octets_on_line(segment, LEVEL_LINE),
	    fraction_divide(segment->capacity.line_bps,
	    capacity_offered(&segment->capacity)));
}
