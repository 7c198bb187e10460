/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/path.h"

#include <string.h>

#include "error.h"
#include "measurement.h"

/* What a receiver's host can merge: the largest packet of IPv4, RFC 791. */
#define OFFLOAD_BYTES 65535
#define THOUSANDTHS 1000

void
path_stack(const struct circuit *circuit, size_t i, const struct load *load,
    struct layer_stack *out)
{
	const struct layer_stack *stack = &circuit->segments[i].layers;

	if (load->declared) {
		out->count = stack->count;
		memcpy(out->use, stack->use,
		    stack->count * sizeof(out->use[0]));
	} else {
		layers_with_protocol(stack, load->protocol, out);
	}
}

static void
count_acks(const struct layer_stack *stack, const struct load *load,
    struct path_segment *out)
{
	const struct layer_use *transport;

	out->segments_per_ack = out->acks_per_packet = fraction_whole(0);
	transport = &stack->use[layers_transport(stack)];
	if (!transport->layer->acknowledged)
		return;
	out->segments_per_ack = load->segments_per_ack.num != 0 ?
	    load->segments_per_ack :
	    fraction_whole(transport->options.segments_per_ack);
	out->acks_per_packet = fraction_divide(load->both &&
	    load->other_packets.num != 0 ? load->other_packets :
	    fraction_whole(1), out->segments_per_ack);
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
	count_acks(&stack, load, out);
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
path_stream_octets(const struct path_segment *segment)
{
	const struct overhead *overhead = &segment->overhead;
	struct fraction octets = overhead->octets[LEVEL_PAYLOAD];
	size_t i;

	if (segment->segments_per_ack.num == 0)
		return fraction_whole(0);
	for (i = 0; i < overhead->parts_count; i++)
		if (overhead->parts[i].layer->level == LEVEL_PAYLOAD)
			octets = fraction_add(octets,
			    overhead->parts[i].octets);
	return octets;
}

struct fraction
path_offload_segments(const struct path_segment *segment)
{
	struct fraction octets = path_stream_octets(segment), merged;

	if (octets.num == 0)
		return segment->segments_per_ack;
	merged = fraction_whole(fraction_floor(fraction_divide(
	    fraction_whole(OFFLOAD_BYTES), octets)));
	if (fraction_compare(merged,
	    fraction_whole(SEGMENTS_PER_ACK_MOST)) > 0)
		merged = fraction_whole(SEGMENTS_PER_ACK_MOST);
	return fraction_compare(merged, segment->segments_per_ack) > 0 ?
	    merged : segment->segments_per_ack;
}

bool
path_counted_segments(uint64_t data_segments, uint64_t acks,
    struct fraction *segments_per_ack)
{
	uint64_t thousandths;

	if (data_segments == 0 || data_segments == UNKNOWN_U64 || acks == 0 ||
	    acks == UNKNOWN_U64)
		return false;
	thousandths = scale_u64(data_segments, THOUSANDTHS, acks);
	if (thousandths == 0)
		thousandths = 1;
	if (thousandths > SEGMENTS_PER_ACK_MOST * THOUSANDTHS)
		thousandths = SEGMENTS_PER_ACK_MOST * THOUSANDTHS;
	*segments_per_ack = fraction_make(thousandths, THOUSANDTHS);
	return true;
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
