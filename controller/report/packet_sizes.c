/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/packet_sizes.h"

#include <inttypes.h>
#include <stdlib.h>
#include <string.h>

#include "ceiling/ceiling.h"
#include "error.h"

/* RFC 2544 section 9.1; tags come on top (RFC 5180 section 5.1.1). */
static const uint64_t classic_bytes[] = { 64, 128, 256, 512, 1024, 1280,
	1518 };
#define CLASSIC (sizeof(classic_bytes) / sizeof(classic_bytes[0]))
/* What is usual, no standard: packets of 9000 octets. */
#define JUMBO_PACKET_BYTES 9000
#define JUMBO_FRAME_BYTES 9018

struct work {
	const struct circuit *circuit;
	struct circuit *shorter;	/* a copy whose MTU is changed */
	enum direction direction;
	struct packet_sizes_direction *out;
};

/* Payload under a load with packets of that size alone. */
static uint64_t
payload_of(const struct work *work, struct load load, uint64_t packet_bytes)
{
	struct ceiling ceiling;
	struct error no_room;
	size_t i;

	load.direction = work->direction;
	for (i = 0; i < work->shorter->segments_count; i++)
		work->shorter->segments[i].mtu_bytes = packet_bytes;
	if (ceiling_of_load(work->shorter, &load, &ceiling, &no_room) == -1 ||
	    ceiling.packet_bytes != packet_bytes)
		return FIELD_UNSET;
	return ceiling.rate_bps[LEVEL_PAYLOAD];
}

static int
add_packet(const struct work *work, uint64_t packet_bytes, struct error *err)
{
	struct packet_sizes_direction *out = work->out;
	struct packet_size *size = &out->sizes[out->count];

	for (size_t i = 0; i < out->count; i++)
		if (out->sizes[i].rate.packet_bytes == packet_bytes)
			return 0;
	if (packet_rate_compute(work->circuit, work->direction, packet_bytes,
	    &size->rate, err) == -1)
		return -1;
	size->bytes = out->frames ? fraction_floor(size->rate.frame_bytes) :
	    packet_bytes;
	size->declared_bps = payload_of(work, (struct load){
	    .declared = true }, packet_bytes);
	size->udp_bps = payload_of(work, (struct load){
	    .protocol = PROTOCOL_UDP }, packet_bytes);
	out->contract_ignored = out->contract_ignored ||
	    size->rate.contract_ignored;
	out->count++;
	return 0;
}

static void
leave_out(const struct work *work, uint64_t bytes, uint64_t least_bytes)
{
	struct packet_sizes_direction *out = work->out;
	struct packet_size_left *left = &out->left[out->left_count++];
	uint64_t largest_bytes = circuit_mtu(work->circuit);

	left->bytes = bytes;
	if (out->count > 0)
		largest_bytes = out->sizes[0].bytes;
	if (bytes > largest_bytes)
		(void)snprintf(left->why, sizeof(left->why), "above the MTU "
		    "of %" PRIu64 " B", circuit_mtu(work->circuit));
	else if (bytes < least_bytes)
		(void)snprintf(left->why, sizeof(left->why), "below the least "
		    "of these layers, %" PRIu64 " B", least_bytes);
	else
		(void)snprintf(left->why, sizeof(left->why), "no packet makes "
		    "it with these layers");
}

/* Octets of the lowest IP layer's header: the least packet. */
static uint64_t
header_bytes(const struct circuit *circuit)
{
	const struct layer_stack *stack = &circuit->segments[0].layers;

	return stack->use[layers_lowest_packet(stack)].cost.head_bytes;
}

static int
add_size(const struct work *work, uint64_t bytes, struct error *err)
{
	uint64_t packet_bytes = bytes, least = header_bytes(work->circuit);
	struct packet_rate rate;

	if (work->out->frames)
		packet_bytes = packet_of_frame(work->circuit, work->direction,
		    bytes);
	if (packet_bytes >= least &&
	    packet_bytes <= circuit_mtu(work->circuit))
		return add_packet(work, packet_bytes, err);
	if (work->out->frames) {
		if (packet_rate_compute(work->circuit, work->direction, least,
		    &rate, err) == -1)
			return -1;
		least = fraction_floor(rate.frame_bytes);
	}
	leave_out(work, bytes, least);
	return 0;
}

static int
compare_sizes(const void *left, const void *right)
{
	const struct packet_size *l = left, *r = right;

	return l->rate.packet_bytes < r->rate.packet_bytes ? -1 :
	    l->rate.packet_bytes > r->rate.packet_bytes;
}

/* What the layers above IP make of the MTU: padding may leave some of it. */
static uint64_t
largest_packet(const struct work *work)
{
	const struct load load = { .direction = work->direction,
		.declared = true };
	struct ceiling ceiling;
	struct error no_room;

	if (ceiling_of_load(work->circuit, &load, &ceiling, &no_room) == -1)
		return circuit_mtu(work->circuit);
	return ceiling.packet_bytes;
}

/* The largest packet first, since it says what is above the MTU. */
static int
make_direction(const struct work *work, struct error *err)
{
	const struct circuit *circuit = work->circuit;
	struct packet_sizes_direction *out = work->out;
	uint64_t mtu_bytes = circuit_mtu(circuit), tags_bytes = 0;
	size_t i;

	out->frames = packet_has_frames(circuit, work->direction);
	if (out->frames)
		tags_bytes = packet_tags_bytes(circuit, work->direction);
	if (add_packet(work, largest_packet(work), err) == -1)
		return -1;
	for (i = 0; i < CLASSIC; i++)
		if (add_size(work, classic_bytes[i] + tags_bytes, err) == -1)
			return -1;
	if (mtu_bytes >= JUMBO_PACKET_BYTES && add_size(work, out->frames ?
	    JUMBO_FRAME_BYTES + tags_bytes : JUMBO_PACKET_BYTES, err) == -1)
		return -1;
	qsort(out->sizes, out->count, sizeof(out->sizes[0]), compare_sizes);
	return 0;
}

int
packet_sizes_make(const struct circuit *circuit, struct packet_sizes **out,
    struct error *err)
{
	struct packet_sizes *sizes = calloc(1, sizeof(*sizes));
	struct circuit *shorter = malloc(sizeof(*shorter));
	struct work work = { .circuit = circuit, .shorter = shorter };
	int rc = -1;

	if (sizes == NULL || shorter == NULL) {
		(void)error_errno(err, ERROR_INTERNAL, "packet sizes");
		goto out;
	}
	*shorter = *circuit;
	(void)snprintf(sizes->circuit, sizeof(sizes->circuit), "%s",
	    circuit->name);
	(void)layers_top_text(&circuit->segments[0].layers, sizes->top,
	    sizeof(sizes->top));
	sizes->reference = circuit_is_reference(circuit);
	rc = 0;
	for (work.direction = 0; work.direction < DIRECTIONS_SINGLE &&
	    !sizes->reference && rc == 0; work.direction++) {
		work.out = &sizes->directions[work.direction];
		rc = make_direction(&work, err);
	}
	if (rc == 0) {
		*out = sizes;
		sizes = NULL;
	}
out:
	free(shorter);
	free(sizes);
	return rc;
}
