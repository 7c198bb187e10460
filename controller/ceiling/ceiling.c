/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/ceiling.h"

#include <assert.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

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
	if (index > 0 && fraction_compare(bound->payload,
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
	uint128 den = fractions_denominator(octets, LEVELS);
	int level;

	for (level = 0; level < LEVELS; level++) {
		out->has_level[level] = overhead->has_level[level];
		out->level_bytes_num[level] = octets[level].num *
		    (den / octets[level].den);
	}
	out->level_bytes_den = den;
	out->packet_bytes = overhead->packet_bytes;
}

/* A step that is of no packet and leads to a lower rate of the line. */
static struct ladder_step *
add_line_step(struct ceiling *out, const char *name, uint64_t bps,
    const char *source)
{
	struct ladder_step *step;

	assert(out->steps_count < LADDER_STEPS_MAX);
	step = &out->steps[out->steps_count++];
	memset(step, 0, sizeof(*step));
	(void)snprintf(step->name, sizeof(step->name), "%s", name);
	step->bytes_den = 1;
	step->bps = bps;
	step->reaches_level = true;
	step->level = LEVEL_LINE;
	step->source = source;
	return step;
}

void
ladder_round(const struct ladder_step *steps, size_t count,
    const struct fraction values[], const struct fraction levels[LEVELS],
    uint64_t out[])
{
	struct fraction span[LADDER_STEPS_MAX];
	size_t i, begin = 0;

	for (i = 0; i < count; i++) {
		span[i - begin] = values[i];
		if (!steps[i].reaches_level)
			continue;
		span[i - begin] = fraction_add(span[i - begin],
		    fraction_rest(levels[steps[i].level]));
		fractions_apportion(span, i - begin + 1, &out[begin]);
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
		(void)snprintf(step->name, sizeof(step->name), "%s: %s",
		    medium->name, taken->what);
	}
	octets = fraction_subtract(carried,
	    segment->overhead.octets[LEVEL_LINE]);
	if (octets.num == 0)
		return;
	step = add_packet_step(packet, octets, "RFC 9293 s3.8.6.3");
	(void)snprintf(step->name, sizeof(step->name), "acknowledgements, one "
	    "for %.4g segments", fraction_double(fraction_divide(
	    fraction_whole(1), segment->acks_per_packet)));
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
		(void)snprintf(step->name, sizeof(step->name), "%s: %s",
		    part->layer->name, part->what);
		step->reaches_level = part->reaches_level;
		step->level = part->level;
	}
}

/* Rate at each level, and the steps from one to the next. */
static void
fill_rates(const struct assembly *a, const struct path_segment *segment,
    struct ceiling *out)
{
	struct fraction rates[LADDER_STEPS_MAX], levels[LEVELS];
	struct fraction octets[LEVELS], bps_an_octet;
	struct packet_steps packet = {
		.steps = &out->steps[out->steps_count] };
	uint64_t bps[LADDER_STEPS_MAX];
	size_t i;

	memcpy(octets, segment->overhead.octets, sizeof(octets));
	octets[LEVEL_LINE] = path_line_octets(segment);
	fill_octets(segment, octets, out);
	bps_an_octet = fraction_divide(a->binding.payload,
	    octets[LEVEL_PAYLOAD]);
	for (i = 0; i < LEVELS; i++) {
		levels[i] = fraction_multiply(octets[i], bps_an_octet);
		out->rate_bps[i] = fraction_floor(levels[i]);
	}
	add_medium_steps(a->circuit->segments[out->narrow].medium.medium,
	    segment, &packet);
	add_layer_steps(&segment->overhead, &packet);
	for (i = 0; i < packet.count; i++)
		rates[i] = fraction_multiply(packet.octets[i], bps_an_octet);
	ladder_round(packet.steps, packet.count, rates, levels, bps);
	for (i = 0; i < packet.count; i++)
		packet.steps[i].bps = bps[i];
	out->steps_count += packet.count;
}

/* What others get of the narrow segment's line, and what the contract leaves
 * of the rest. */
static void
fill_unused(const struct assembly *a, const struct path_segment *segment,
    struct ceiling *out)
{
	const struct medium_capacity *capacity = &segment->capacity;
	struct fraction line = capacity->line_bps, own, used;

	out->line_rate_bps = fraction_floor(line);
	own = fraction_multiply(line, segment->share);
	out->shared_bps = out->line_rate_bps - fraction_floor(own);
	if (out->shared_bps != 0)
		(void)add_line_step(out, capacity->contention == 1 ?
		    "the other direction" : "other users", out->shared_bps,
		    "declared");
	used = fraction_multiply(a->binding.payload, fraction_divide(
	    path_line_octets(segment),
	    segment->overhead.octets[LEVEL_PAYLOAD]));
	if (fraction_compare(used, own) == 0)
		return;
	out->unused_bps = fraction_floor(own) - fraction_floor(used);
	(void)add_line_step(out, a->binding.bound.class == BOUND_MEDIUM ?
	    "beyond the channel's capacity" : "left unused by the contract",
	    out->unused_bps, out->bounds[a->binding_index].source);
}

static void
fill_binding(const struct assembly *a, const struct path_segment *segment,
    struct ceiling *out)
{
	const struct exact_bound *binding = &a->binding;
	const struct medium_capacity *capacity = &segment->capacity;

	out->payload_num = binding->payload.num;
	out->payload_den = binding->payload.den;
	out->tolerance_ppm = capacity->tolerance_ppm;
	out->accuracy = segment->accuracy;
	out->shared = capacity->duplex == DUPLEX_SHARED;
	if (segment->acks_per_packet.num != 0 && (segment->acks_on_line ||
	    segment->acks_in_contract || capacity->counts_acks))
		out->segments_per_ack = 1 /
		    fraction_double(segment->acks_per_packet);
	memcpy(out->notes, capacity->notes,
	    capacity->notes_count * sizeof(out->notes[0]));
	out->notes_count = capacity->notes_count;
	out->burst_bytes = binding->burst_bytes;
	out->binding_counted_at = binding->counted_at;
	out->binding_counted_ratio = fraction_double(fraction_divide(
	    segment->overhead.octets[binding->counted_at],
	    segment->overhead.octets[LEVEL_PAYLOAD]));
}

static void
fill_reference(const struct assembly *a, struct ceiling *out)
{
	out->reference = true;
	out->accuracy = ACCURACY_REFERENCE;
	out->payload_den = 1;
	out->binding_counted_at = LEVEL_PAYLOAD;
	out->binding_counted_ratio = 1.0;
	fill_octets(&a->segments[0], a->segments[0].overhead.octets, out);
}

static void
assemble(struct assembly *a, struct ceiling *out)
{
	const struct path_segment *segment;
	struct layer_stack stack;

	memset(out, 0, sizeof(*out));
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
	fill_unused(a, segment, out);
	fill_rates(a, segment, out);
}

int
ceiling_of_load(const struct circuit *circuit, const struct load *load,
    struct ceiling *out, struct error *err)
{
	struct assembly a = { .circuit = circuit, .load = load };
	int rc = -1;

	assert(load->direction < DIRECTIONS_SINGLE);
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
ceiling_compute(const struct circuit *circuit, enum direction direction,
    enum protocol protocol, struct ceiling *out, struct error *err)
{
	const struct load load = { .direction = direction,
		.protocol = protocol };

	return ceiling_of_load(circuit, &load, out, err);
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
