/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/ceiling.h"

#include <assert.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ceiling/capacity.h"
#include "error.h"

/* What is worked out before it is rounded. */
struct assembly {
	const struct circuit *circuit;
	enum direction direction;
	struct overhead overheads[SEGMENTS_MAX];
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
compute_overheads(struct assembly *a, enum protocol protocol,
    struct error *err)
{
	const struct circuit *circuit = a->circuit;
	uint64_t mtu_bytes = circuit_mtu(circuit);
	struct layer_stack stack;
	size_t i;

	for (i = 0; i < circuit->segments_count; i++) {
		layers_with_protocol(&circuit->segments[i].layers, protocol,
		    &stack);
		if (overhead_compute(&stack, mtu_bytes, &a->overheads[i],
		    err) == -1) {
			error_wrap(err, "circuit '%s'", circuit->name);
			return -1;
		}
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

static int
collect_bounds(struct assembly *a, struct ceiling *out, struct error *err)
{
	const struct circuit *circuit = a->circuit;
	struct exact_bound bound;
	size_t i, entry = entry_segment(circuit, a->direction);

	for (i = 0; i < circuit->segments_count; i++) {
		if (bound_medium(circuit, i, a->direction, &a->overheads[i],
		    &bound, err) == -1)
			return -1;
		keep_bound(a, &bound, out);
	}
	for (i = 0; i < circuit->segments_count; i++)
		if (bound_segment_contract(circuit, i, a->direction,
		    &a->overheads[i], &bound))
			keep_bound(a, &bound, out);
	if (bound_circuit_contract(circuit, entry, a->direction,
	    &a->overheads[entry], &bound))
		keep_bound(a, &bound, out);
	out->bounds[a->binding_index].binding = true;
	return 0;
}

/* Octets of all levels over one denominator. */
static void
fill_octets(const struct overhead *overhead, struct ceiling *out)
{
	uint128 den = fractions_denominator(overhead->octets, LEVELS);
	int level;

	for (level = 0; level < LEVELS; level++) {
		out->has_level[level] = overhead->has_level[level];
		out->level_bytes_num[level] = fraction_floor(fraction_multiply(
		    overhead->octets[level], fraction_make(den, 1)));
	}
	out->level_bytes_den = (uint64_t)den;
	out->packet_bytes = overhead->packet_bytes;
}

static void
add_step(struct ceiling *out, const struct overhead_part *part)
{
	struct ladder_step *step;

	assert(out->steps_count < LADDER_STEPS_MAX);
	step = &out->steps[out->steps_count++];
	(void)snprintf(step->name, sizeof(step->name), "%s: %s",
	    part->layer->name, part->what);
	step->bytes_num = (uint64_t)part->octets.num;
	step->bytes_den = (uint64_t)part->octets.den;
	step->reaches_level = part->reaches_level;
	step->level = part->level;
	step->source = part->layer->source;
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

/* Rate at each level, and the steps from one to the next. */
static void
fill_rates(const struct overhead *overhead, struct fraction payload,
    struct ceiling *out)
{
	struct fraction rates[OVERHEAD_PARTS_MAX], levels[LEVELS];
	struct fraction bps_an_octet;
	struct ladder_step *steps = &out->steps[out->steps_count];
	uint64_t bps[OVERHEAD_PARTS_MAX];
	size_t i;

	bps_an_octet = fraction_divide(payload,
	    overhead->octets[LEVEL_PAYLOAD]);
	for (i = 0; i < LEVELS; i++) {
		levels[i] = fraction_multiply(overhead->octets[i],
		    bps_an_octet);
		out->rate_bps[i] = fraction_floor(levels[i]);
	}
	for (i = 0; i < overhead->parts_count; i++) {
		rates[i] = fraction_multiply(overhead->parts[i].octets,
		    bps_an_octet);
		add_step(out, &overhead->parts[i]);
	}
	ladder_round(steps, overhead->parts_count, rates, levels, bps);
	for (i = 0; i < overhead->parts_count; i++)
		steps[i].bps = bps[i];
}

/* What a contract leaves of the narrow segment's line. */
static int
fill_unused(struct assembly *a, const struct overhead *overhead,
    struct ceiling *out, struct error *err)
{
	const struct segment *segment = &a->circuit->segments[out->narrow];
	struct fraction line, used;
	struct ladder_step *step;

	if (capacity_compute(&segment->medium, a->direction, &line, err) == -1)
		return -1;
	out->line_rate_bps = fraction_floor(line);
	used = fraction_multiply(a->binding.payload, fraction_divide(
	    overhead->octets[LEVEL_LINE], overhead->octets[LEVEL_PAYLOAD]));
	if (fraction_compare(used, line) == 0)
		return 0;
	out->unused_bps = out->line_rate_bps - fraction_floor(used);
	step = &out->steps[out->steps_count++];
	(void)snprintf(step->name, sizeof(step->name),
	    "left unused by the contract");
	step->bytes_den = 1;
	step->bps = out->unused_bps;
	step->reaches_level = true;
	step->level = LEVEL_LINE;
	step->source = "declared";
	return 0;
}

static void
fill_binding(const struct assembly *a, const struct overhead *overhead,
    struct ceiling *out)
{
	const struct exact_bound *binding = &a->binding;
	const struct medium *medium;

	medium = a->circuit->segments[out->narrow].medium.medium;
	out->payload_num = binding->payload.num;
	out->payload_den = binding->payload.den;
	out->tolerance_ppm = medium->tolerance_ppm;
	out->accuracy = medium->accuracy;
	out->burst_bytes = binding->burst_bytes;
	out->binding_counted_at = binding->counted_at;
	out->binding_counted_ratio = fraction_double(fraction_divide(
	    overhead->octets[binding->counted_at],
	    overhead->octets[LEVEL_PAYLOAD]));
}

static void
fill_reference(const struct assembly *a, struct ceiling *out)
{
	out->reference = true;
	out->accuracy = ACCURACY_REFERENCE;
	out->payload_den = 1;
	out->binding_counted_at = LEVEL_PAYLOAD;
	out->binding_counted_ratio = 1.0;
	fill_octets(&a->overheads[0], out);
}

static int
assemble(struct assembly *a, enum protocol protocol, struct ceiling *out,
    struct error *err)
{
	const struct overhead *overhead;

	memset(out, 0, sizeof(*out));
	out->direction = a->direction;
	out->protocol = protocol;
	if (circuit_is_reference(a->circuit)) {
		fill_reference(a, out);
		return 0;
	}
	if (collect_bounds(a, out, err) == -1)
		return -1;
	out->narrow = a->binding.segment;
	overhead = &a->overheads[out->narrow];
	fill_octets(overhead, out);
	fill_binding(a, overhead, out);
	if (fill_unused(a, overhead, out, err) == -1)
		return -1;
	fill_rates(overhead, a->binding.payload, out);
	return 0;
}

int
ceiling_compute(const struct circuit *circuit, enum direction direction,
    enum protocol protocol, struct ceiling *out, struct error *err)
{
	struct assembly *a;
	int rc = -1;

	assert(direction < DIRECTIONS_SINGLE);
	a = calloc(1, sizeof(*a));
	if (a == NULL)
		return error_errno(err, ERROR_INTERNAL, "ceiling");
	a->circuit = circuit;
	a->direction = direction;
	if (compute_overheads(a, protocol, err) == 0)
		rc = assemble(a, protocol, out, err);
	free(a);
	return rc;
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
