/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/ceiling.h"

#include <assert.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ceiling/both.h"
#include "ceiling/name.h"
#include "error.h"

/* What is worked out before it is rounded. */
struct assembly {
	const struct circuit *circuit;
	const struct load *load;
	struct path_segment *segments;
	struct exact_bound binding;	/* the lowest so far */
	size_t binding_index;		/* of it in the ceiling's bounds */
};

enum protocol
circuit_default_protocol(const struct circuit *circuit)
{
	return layers_protocol(&circuit->segments[0].layers);
}

/* Segment where traffic of this direction enters the circuit. */
static size_t
entry_segment(const struct circuit *circuit, enum direction direction)
{
	return direction_sender(direction) == END_A ? 0 :
	    circuit->segments_count - 1;
}

static int
make_segments(struct assembly *a, struct error *err)
{
	const struct circuit *circuit = a->circuit;
	size_t i;

	for (i = 0; i < circuit->segments_count; i++)
		if (path_segment_make(circuit, i, a->load, &a->segments[i],
		    err) == -1) {
			error_wrap(err, "circuit '%s'", circuit->name);
			return -1;
		}
	return 0;
}

/* Keep a bound of the ceiling; the first of equals binds. */
static void
keep_bound(struct assembly *a, const struct exact_bound *bound,
    struct ceiling *out)
{
	size_t index = out->bounds_count++;

	assert(index < BOUNDS_MAX);
	out->bounds[index] = bound->bound;
	if (index > 0 && mixed_compare(bound->payload,
	    a->binding.payload) >= 0)
		return;
	a->binding = *bound;
	a->binding_index = index;
}

static void
collect_bounds(struct assembly *a, struct ceiling *out)
{
	const struct circuit *circuit = a->circuit;
	enum direction direction = a->load->direction;
	struct exact_bound bound;
	size_t i, entry = entry_segment(circuit, direction);

	for (i = 0; i < circuit->segments_count; i++) {
		bound_medium(circuit, i, &a->segments[i], &bound);
		keep_bound(a, &bound, out);
		if (bound_channel(circuit, i, &a->segments[i], &bound))
			keep_bound(a, &bound, out);
	}
	for (i = 0; i < circuit->segments_count; i++) {
		if (bound_segment_contract(circuit, i, direction,
		    &a->segments[i], &bound))
			keep_bound(a, &bound, out);
		if (bound_device(circuit, i, &a->segments[i], &bound))
			keep_bound(a, &bound, out);
	}
	if (bound_circuit_contract(circuit, entry, direction,
	    &a->segments[entry], &bound))
		keep_bound(a, &bound, out);
	out->bounds[a->binding_index].binding = true;
}

/* Octets of all levels over one denominator. */
static void
fill_octets(const struct path_segment *segment,
    const struct fraction octets[LEVELS], struct ceiling *out)
{
	const struct overhead *overhead = &segment->overhead;
	struct fraction stream = path_stream_octets(segment);
	uint128 den = fractions_denominator(octets, LEVELS);
	int level;

	/* Whole: it fills the packet. */
	assert(stream.den == 1);
	out->stream_bytes_num = stream.num * den;
	for (level = 0; level < LEVELS; level++) {
		out->has_level[level] = overhead->has_level[level];
		out->level_bytes_num[level] = octets[level].num *
		    (den / octets[level].den);
	}
	out->level_bytes_den = den;
	out->packet_bytes = overhead->packet_bytes;
}

/* A step that is of no packet and leads to a lower rate of the line; only the
 * last of them is at its end. */
static struct ladder_step *
add_line_step(struct ceiling *out, const char *name, uint64_t bps,
    const char *source)
{
	struct ladder_step *step;

	assert(out->steps_count < LADDER_STEPS_MAX);
	if (out->steps_count > 0)
		out->steps[out->steps_count - 1].reaches_level = false;
	step = &out->steps[out->steps_count++];
	memset(step, 0, sizeof(*step));
	name_join(step->name, sizeof(step->name), name, "", "");
	step->bytes_den = 1;
	step->bps = bps;
	step->reaches_level = true;
	step->level = LEVEL_LINE;
	step->source = source;
	return step;
}

void
ladder_round(const struct ladder_step *steps, size_t count,
    const struct mixed values[], const struct mixed levels[LEVELS],
    uint64_t top, uint64_t out[])
{
	struct mixed span[LADDER_STEPS_MAX], level;
	size_t i, begin = 0;

	for (i = 0; i < count; i++) {
		span[i - begin] = values[i];
		if (!steps[i].reaches_level)
			continue;
		level = levels[steps[i].level];
		span[i - begin] = mixed_split(fraction_add(values[i].rest,
		    level.rest));
		span[i - begin].whole += values[i].whole;
		assert(top >= level.whole);
		apportion(span, i - begin + 1, top - level.whole,
		    &out[begin]);
		top = level.whole;
		begin = i + 1;
	}
	assert(begin == count);
}

/* The steps from the line to the payload while they are exact. */
struct packet_steps {
	struct ladder_step *steps;
	struct fraction octets[LADDER_STEPS_MAX];
	size_t count;
};

static struct ladder_step *
add_packet_step(struct packet_steps *packet, struct fraction octets,
    const char *source)
{
	struct ladder_step *step = &packet->steps[packet->count];

	memset(step, 0, sizeof(*step));
	step->bytes_num = octets.num;
	step->bytes_den = octets.den;
	step->source = source;
	packet->octets[packet->count++] = octets;
	return step;
}

/* What the medium takes of its line, as octets of the packet that it carries;
 * then what acknowledgements take. */
static void
add_medium_steps(const struct medium *medium,
    const struct path_segment *segment, struct packet_steps *packet)
{
	const struct medium_capacity *capacity = &segment->capacity;
	struct fraction before = capacity->line_bps, octets, an_octet;
	struct fraction carried = path_octets_on_line(segment, LEVEL_LINE);
	struct ladder_step *step;
	size_t i;

	an_octet = fraction_divide(carried, capacity_offered(capacity));
	for (i = 0; i < capacity->steps_count; i++) {
		const struct medium_step *taken = &capacity->steps[i];

		octets = fraction_multiply(an_octet,
		    fraction_subtract(before, taken->left_bps));
		before = taken->left_bps;
		if (octets.num == 0)
			continue;
		step = add_packet_step(packet, octets, taken->source);
		name_join(step->name, sizeof(step->name), medium->name, ": ",
		    taken->what);
	}
	octets = fraction_subtract(carried,
	    segment->overhead.octets[LEVEL_LINE]);
	if (octets.num == 0)
		return;
	step = add_packet_step(packet, octets, "RFC 9293 s3.8.6.3");
	(void)snprintf(step->name, sizeof(step->name), "acknowledgements, one "
	    "for %.4g segments", fraction_double(segment->segments_per_ack));
}

static void
add_layer_steps(const struct overhead *overhead, struct packet_steps *packet)
{
	struct ladder_step *step;
	size_t i;

	for (i = 0; i < overhead->parts_count; i++) {
		const struct overhead_part *part = &overhead->parts[i];

		step = add_packet_step(packet, part->octets,
		    part->layer->source);
		name_join(step->name, sizeof(step->name), part->layer->name,
		    ": ", part->what);
		step->reaches_level = part->reaches_level;
		step->level = part->level;
	}
}

/* What others get of the narrow segment's line, and what the contract leaves
 * of the rest. */
static void
fill_unused(const struct assembly *a, const struct path_segment *segment,
    struct mixed used, struct ceiling *out)
{
	const struct medium_capacity *capacity = &segment->capacity;
	struct mixed own = mixed_product(capacity->line_bps, segment->share);

	out->line_rate_bps = fraction_floor(capacity->line_bps);
	out->shared_bps = out->line_rate_bps - own.whole;
	if (out->shared_bps != 0)
		(void)add_line_step(out, capacity->contention == 1 ?
		    "the other direction" : "other users", out->shared_bps,
		    "declared");
	if (mixed_compare(used, own) == 0)
		return;
	out->unused_bps = own.whole - used.whole;
	(void)add_line_step(out, a->binding.bound.class == BOUND_MEDIUM ?
	    "beyond the channel's capacity" : "left unused by the contract",
	    out->unused_bps, out->bounds[a->binding_index].source);
}

/* Rate at each level, and the steps from one to the next. */
static void
fill_rates(const struct assembly *a, const struct path_segment *segment,
    struct ceiling *out)
{
	struct mixed rates[LADDER_STEPS_MAX] = { { 0 } }, levels[LEVELS];
	struct fraction octets[LEVELS];
	struct packet_steps packet;
	uint64_t bps[LADDER_STEPS_MAX];
	size_t i;

	memcpy(octets, segment->overhead.octets, sizeof(octets));
	octets[LEVEL_LINE] = path_line_octets(segment);
	fill_octets(segment, octets, out);
	for (i = 0; i < LEVELS; i++) {
		levels[i] = mixed_product(octets[i],
		    a->binding.bps_an_octet);
		out->rate_bps[i] = levels[i].whole;
	}
	fill_unused(a, segment, levels[LEVEL_LINE], out);
	packet.steps = &out->steps[out->steps_count];
	packet.count = 0;
	add_medium_steps(a->circuit->segments[out->narrow].medium.medium,
	    segment, &packet);
	add_layer_steps(&segment->overhead, &packet);
	for (i = 0; i < packet.count; i++)
		rates[i] = mixed_product(packet.octets[i],
		    a->binding.bps_an_octet);
	ladder_round(packet.steps, packet.count, rates, levels,
	    levels[LEVEL_LINE].whole, bps);
	for (i = 0; i < packet.count; i++)
		packet.steps[i].bps = bps[i];
	out->steps_count += packet.count;
}

static void
fill_binding(const struct assembly *a, const struct path_segment *segment,
    struct ceiling *out)
{
	const struct exact_bound *binding = &a->binding;
	const struct medium_capacity *capacity = &segment->capacity;

	out->payload = binding->payload;
	out->tolerance_ppm = capacity->tolerance_ppm;
	out->accuracy = segment->accuracy;
	out->shared = capacity->duplex == DUPLEX_SHARED;
	if (segment->acks_per_packet.num != 0 && (segment->acks_on_line ||
	    segment->acks_in_contract || capacity->counts_acks))
		out->segments_per_ack =
		    fraction_double(segment->segments_per_ack);
	memcpy(out->notes, capacity->notes,
	    capacity->notes_count * sizeof(out->notes[0]));
	out->notes_count = capacity->notes_count;
	out->burst_bytes = binding->burst_bytes;
	out->burst_payload_bytes = binding->burst_payload_bytes;
	out->binding_counted_at = binding->counted_at;
	out->binding_counted_ratio = fraction_double(fraction_divide(
	    binding->counted_at == LEVEL_LINE ? path_line_octets(segment) :
	    segment->overhead.octets[binding->counted_at],
	    segment->overhead.octets[LEVEL_PAYLOAD]));
}

static void
fill_reference(const struct assembly *a, struct ceiling *out)
{
	out->reference = true;
	out->accuracy = ACCURACY_REFERENCE;
	out->payload.rest = fraction_whole(0);
	out->binding_counted_at = LEVEL_PAYLOAD;
	out->binding_counted_ratio = 1.0;
	fill_octets(&a->segments[0], a->segments[0].overhead.octets, out);
}

static void
assemble(struct assembly *a, struct ceiling *out)
{
	const struct path_segment *segment;
	struct layer_stack stack;

	memset(out, 0, offsetof(struct ceiling, bounds));
	out->direction = a->load->direction;
	out->both = a->load->both;
	path_stack(a->circuit, 0, a->load, &stack);
	out->protocol = layers_protocol(&stack);
	(void)layers_top_text(&stack, out->top, sizeof(out->top));
	if (circuit_is_reference(a->circuit)) {
		fill_reference(a, out);
		return;
	}
	collect_bounds(a, out);
	out->narrow = a->binding.segment;
	segment = &a->segments[out->narrow];
	fill_binding(a, segment, out);
	fill_rates(a, segment, out);
}

int
ceiling_of_load(const struct circuit *circuit, const struct load *load,
    struct ceiling *out, struct error *err)
{
	struct load settled = *load;
	struct assembly a = { .circuit = circuit, .load = &settled };
	int rc = -1;

	assert(load->direction < DIRECTIONS_SINGLE);
	if (load->both && load->other_packets.num == 0 &&
	    both_settle(circuit, &settled, err) == -1)
		return -1;
	a.segments = malloc(circuit->segments_count * sizeof(*a.segments));
	if (a.segments == NULL)
		return error_errno(err, ERROR_INTERNAL, "ceiling");
	if (make_segments(&a, err) == 0) {
		assemble(&a, out);
		rc = 0;
	}
	free(a.segments);
	return rc;
}

int
ceiling_range(const struct circuit *circuit, const struct load *load,
    struct ceiling *low, struct ceiling *high, struct error *err)
{
	struct load offload = *load;
	struct path_segment segment;

	offload.segments_per_ack = fraction_whole(0);
	if (path_segment_make(circuit, 0, &offload, &segment, err) == -1 ||
	    ceiling_of_load(circuit, &offload, low, err) == -1)
		return -1;
	offload.segments_per_ack = path_offload_segments(&segment);
	return ceiling_of_load(circuit, &offload, high, err);
}

int
ceiling_compute(const struct circuit *circuit, enum direction direction,
    enum protocol protocol, struct ceiling *out, struct error *err)
{
	const struct load load = { .direction = direction,
		.protocol = protocol };

	return ceiling_of_load(circuit, &load, out, err);
}

const struct bound *
ceiling_binding(const struct ceiling *ceiling)
{
	size_t i;

	for (i = 0; i < ceiling->bounds_count; i++)
		if (ceiling->bounds[i].binding &&
		    ceiling->bounds[i].class != BOUND_CONDITION)
			return &ceiling->bounds[i];
	return NULL;
}

int
ceiling_add_condition(struct ceiling *ceiling, const char *name,
    uint64_t payload_bps, const char *source, struct error *err)
{
	struct bound *bound, *lowest = NULL;
	size_t i;

	if (ceiling->bounds_count == BOUNDS_MAX)
		return error_set(err, ERROR_INTERNAL, "more than %d bounds",
		    BOUNDS_MAX);
	bound = &ceiling->bounds[ceiling->bounds_count++];
	memset(bound, 0, sizeof(*bound));
	bound->class = BOUND_CONDITION;
	bound->payload_bps = payload_bps;
	(void)snprintf(bound->name, sizeof(bound->name), "%s", name);
	(void)snprintf(bound->source, sizeof(bound->source), "%s", source);
	for (i = 0; i < ceiling->bounds_count; i++) {
		bound = &ceiling->bounds[i];
		if (bound->class != BOUND_CONDITION)
			continue;
		bound->binding = false;
		if (lowest == NULL || bound->payload_bps < lowest->payload_bps)
			lowest = bound;
	}
	assert(lowest != NULL);
	lowest->binding = true;
	return 0;
}
