/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/packet_rate.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ceiling/capacity.h"
#include "error.h"

static size_t
entry_segment(const struct circuit *circuit, enum direction direction)
{
	return direction_sender(direction) == END_A ? 0 :
	    circuit->segments_count - 1;
}

static const struct segment *
entry_of(const struct circuit *circuit, enum direction direction)
{
	return &circuit->segments[entry_segment(circuit, direction)];
}

/* A segment that carries bare packets: they are the payload. */
static int
make_segment(const struct segment *segment, enum direction direction,
    uint64_t packet_bytes, struct path_segment *out, struct error *err)
{
	struct medium_load load = { .direction = direction };
	enum layer_level level;

	memset(out, 0, sizeof(*out));
	overhead_of_packet(&segment->layers, packet_bytes,
	    medium_upstream(&segment->medium, direction),
	    out->overhead.octets);
	for (level = LEVEL_LINE; level <= LEVEL_PACKET; level++)
		out->overhead.has_level[level] = level == LEVEL_LINE ||
		    layers_have_level(&segment->layers, level);
	out->overhead.octets[LEVEL_PAYLOAD] = fraction_whole(packet_bytes);
	out->overhead.packet_bytes = packet_bytes;
	out->segments_per_ack = out->acks_per_packet = fraction_whole(0);
	memcpy(load.octets, out->overhead.octets, sizeof(load.octets));
	load.octets[LEVEL_SEGMENT] = load.octets[LEVEL_PAYLOAD] =
	    fraction_whole(0);
	load.ack_octets = fraction_whole(0);
	load.segments_per_ack = fraction_whole(1);
	if (capacity_compute(&segment->medium, &load, &out->capacity,
	    err) == -1)
		return -1;
	out->share = fraction_make(1, out->capacity.contention);
	return 0;
}

struct search {
	struct exact_bound lowest;
	bool found;
};

static void
keep_lowest(struct search *search, const struct exact_bound *bound)
{
	if (search->found && mixed_compare(bound->payload,
	    search->lowest.payload) >= 0)
		return;
	search->lowest = *bound;
	search->found = true;
}

/* Does the service count what a bare packet has?  With a rate, that is. */
static bool
counts_packets(const struct service *service, enum direction direction,
    struct packet_rate *out)
{
	if (service->counted_at <= LEVEL_PACKET)
		return true;
	if (service_has_rate(service, direction))
		out->contract_ignored = true;
	return false;
}

static void
collect(const struct circuit *circuit, enum direction direction,
    const struct path_segment segments[], struct search *search,
    struct packet_rate *out)
{
	size_t i, entry = entry_segment(circuit, direction);
	struct exact_bound bound;

	for (i = 0; i < circuit->segments_count; i++) {
		bound_medium(circuit, i, &segments[i], &bound);
		keep_lowest(search, &bound);
		if (bound_channel(circuit, i, &segments[i], &bound))
			keep_lowest(search, &bound);
		if (counts_packets(&circuit->segments[i].service, direction,
		    out) && bound_segment_contract(circuit, i, direction,
		    &segments[i], &bound))
			keep_lowest(search, &bound);
		if (bound_device(circuit, i, &segments[i], &bound))
			keep_lowest(search, &bound);
	}
	if (circuit->services_count > 0 &&
	    counts_packets(&circuit->services[0], direction, out) &&
	    bound_circuit_contract(circuit, entry, direction,
	    &segments[entry], &bound))
		keep_lowest(search, &bound);
}

static void
fill(const struct path_segment *segment, const struct exact_bound *bound,
    struct packet_rate *out)
{
	struct fraction octets;
	enum layer_level level;

	out->packet_bytes = segment->overhead.packet_bytes;
	out->packets_per_s = fraction_divide(bound->bps_an_octet,
	    fraction_whole(8));
	out->frame_bytes = segment->overhead.octets[LEVEL_FRAME];
	out->has_frame = segment->overhead.has_level[LEVEL_FRAME];
	(void)snprintf(out->binding, sizeof(out->binding), "%s",
	    bound->bound.name);
	for (level = LEVEL_LINE; level <= LEVEL_PACKET; level++) {
		out->has_level[level] = segment->overhead.has_level[level];
		octets = level == LEVEL_LINE ? path_line_octets(segment) :
		    segment->overhead.octets[level];
		out->rate_bps[level] = mixed_product(octets,
		    bound->bps_an_octet).whole;
	}
}

int
packet_rate_compute(const struct circuit *circuit, enum direction direction,
    uint64_t packet_bytes, struct packet_rate *out, struct error *err)
{
	struct path_segment *segments;
	struct search search = { .found = false };
	size_t i;
	int rc = -1;

	segments = calloc(circuit->segments_count, sizeof(*segments));
	if (segments == NULL)
		return error_errno(err, ERROR_INTERNAL, "packet rate");
	for (i = 0; i < circuit->segments_count; i++)
		if (make_segment(&circuit->segments[i], direction,
		    packet_bytes, &segments[i], err) == -1)
			goto out;
	memset(out, 0, sizeof(*out));
	collect(circuit, direction, segments, &search, out);
	fill(&segments[entry_segment(circuit, direction)], &search.lowest,
	    out);
	rc = 0;
out:
	free(segments);
	return rc;
}

static struct fraction
frame_of(const struct segment *segment, enum direction direction,
    uint64_t packet_bytes)
{
	struct fraction octets[LEVELS];

	overhead_of_packet(&segment->layers, packet_bytes,
	    medium_upstream(&segment->medium, direction), octets);
	return octets[LEVEL_FRAME];
}

uint64_t
packet_of_frame(const struct circuit *circuit, enum direction direction,
    uint64_t frame_bytes)
{
	const struct segment *segment = entry_of(circuit, direction);
	struct fraction wanted = fraction_whole(frame_bytes);
	uint64_t low = 0, high = circuit_mtu(circuit), middle;

	/* Frames never shrink while packets grow. */
	while (low < high) {
		middle = low + (high - low + 1) / 2;
		if (fraction_compare(frame_of(segment, direction, middle),
		    wanted) <= 0)
			low = middle;
		else
			high = middle - 1;
	}
	if (low == 0 || fraction_compare(frame_of(segment, direction, low),
	    wanted) != 0)
		return 0;
	return low;
}

uint64_t
packet_tags_bytes(const struct circuit *circuit, enum direction direction)
{
	const struct layer_stack *stack =
	    &entry_of(circuit, direction)->layers;
	size_t i, packet = layers_lowest_packet(stack);
	uint64_t bytes = 0;

	for (i = 0; i < packet; i++)
		if (strcmp(stack->use[i].layer->name, "vlan") == 0)
			bytes += stack->use[i].cost.head_bytes;
	return bytes;
}

bool
packet_has_frames(const struct circuit *circuit, enum direction direction)
{
	return layers_have_level(&entry_of(circuit, direction)->layers,
	    LEVEL_FRAME);
}
