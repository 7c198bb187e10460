/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/bound.h"

#include <assert.h>
#include <inttypes.h>
#include <stdio.h>
#include <string.h>

#include "error.h"

static const char *const class_names[] = {
	[BOUND_MEDIUM] = "medium",
	[BOUND_CONTRACT] = "contract",
	[BOUND_CONDITION] = "condition",
};

const char *
bound_class_name(enum bound_class class)
{
	assert(class <= BOUND_CONDITION);
	return class_names[class];
}

/* " of segment 'access'", or nothing where there is only one. */
static const char *
segment_text(const struct circuit *circuit, size_t i, char *buf, size_t size)
{
	const char *name = circuit->segments[i].name;

	buf[0] = '\0';
	if (name[0] != '\0')
		(void)snprintf(buf, size, " of segment '%s'", name);
	return buf;
}

static void
start(enum bound_class class, size_t i, struct exact_bound *out)
{
	memset(out, 0, sizeof(*out));
	out->bound.class = class;
	out->segment = i;
	out->counted_at = LEVEL_PAYLOAD;
}

/* A rate over the octets that it counts for one packet. */
static void
set_payload(const struct path_segment *segment, struct fraction rate_bps,
    struct fraction counted_octets, struct exact_bound *out)
{
	out->payload = fraction_multiply(rate_bps, fraction_divide(
	    segment->overhead.octets[LEVEL_PAYLOAD], counted_octets));
	out->bound.payload_bps = fraction_floor(out->payload);
}

void
bound_medium(const struct circuit *circuit, size_t i,
    const struct path_segment *segment, struct exact_bound *out)
{
	const struct medium *medium = circuit->segments[i].medium.medium;
	char where[CIRCUIT_NAME_SIZE + 16];

	start(BOUND_MEDIUM, i, out);
	set_payload(segment, path_offered_bps(segment),
	    path_octets_on_line(segment, LEVEL_LINE), out);
	(void)snprintf(out->bound.name, sizeof(out->bound.name),
	    "%s line%s", medium->name,
	    segment_text(circuit, i, where, sizeof(where)));
	(void)snprintf(out->bound.source, sizeof(out->bound.source), "%s",
	    medium->source);
}

bool
bound_channel(const struct circuit *circuit, size_t i,
    const struct path_segment *segment, struct exact_bound *out)
{
	uint64_t channel_bps = segment->capacity.channel_bps;
	char where[CIRCUIT_NAME_SIZE + 16];

	if (channel_bps == 0)
		return false;
	start(BOUND_MEDIUM, i, out);
	set_payload(segment, fraction_multiply(fraction_whole(channel_bps),
	    segment->share), path_octets_on_line(segment, LEVEL_LINE), out);
	(void)snprintf(out->bound.name, sizeof(out->bound.name),
	    "channel capacity%s", segment_text(circuit, i, where,
	    sizeof(where)));
	(void)snprintf(out->bound.source, sizeof(out->bound.source),
	    "Shannon 1949: C = B log2(1 + S/N)");
	return true;
}

/* "committed 100 Mbit/s at frame" */
static void
name_contract(const struct service *service, enum direction direction,
    const char *where, struct bound *out)
{
	char rate[32];
	bool committed = service->committed_bps[direction] != FIELD_UNSET;

	(void)snprintf(out->name, sizeof(out->name), "%s %s at %s%s",
	    committed ? "committed" : "peak",
	    units_format_exact(service_rate(service, direction),
	    DIMENSION_RATE, rate, sizeof(rate)),
	    level_name((enum layer_level)service->counted_at), where);
	(void)snprintf(out->source, sizeof(out->source), "declared");
}

static void
contract_of(const struct service *service, enum direction direction, size_t i,
    const struct path_segment *segment, struct exact_bound *out)
{
	enum layer_level level = (enum layer_level)service->counted_at;

	assert(segment->overhead.has_level[level]);
	start(BOUND_CONTRACT, i, out);
	set_payload(segment, fraction_whole(service_rate(service, direction)),
	    level == LEVEL_LINE && !segment->reference ?
	    path_line_octets(segment) :
	    path_octets_in_contract(segment, level), out);
	out->counted_at = level;
	if (service->burst_bytes[direction] != FIELD_UNSET)
		out->burst_bytes = service->burst_bytes[direction];
}

bool
bound_segment_contract(const struct circuit *circuit, size_t i,
    enum direction direction, const struct path_segment *segment,
    struct exact_bound *out)
{
	const struct service *service = &circuit->segments[i].service;
	char where[CIRCUIT_NAME_SIZE + 16];

	if (!service_has_rate(service, direction))
		return false;
	contract_of(service, direction, i, segment, out);
	name_contract(service, direction, segment_text(circuit, i, where,
	    sizeof(where)), &out->bound);
	return true;
}

/* All services are counted at the same level, so rates and bursts add up. */
static void
add_service(struct service *sum, const struct service *one,
    enum direction direction)
{
	sum->committed_bps[direction] = service_rate(sum, direction) +
	    service_rate(one, direction);
	if (one->burst_bytes[direction] == FIELD_UNSET)
		return;
	if (sum->burst_bytes[direction] == FIELD_UNSET)
		sum->burst_bytes[direction] = 0;
	sum->burst_bytes[direction] += one->burst_bytes[direction];
}

bool
bound_circuit_contract(const struct circuit *circuit, size_t i,
    enum direction direction, const struct path_segment *segment,
    struct exact_bound *out)
{
	const struct service *services = circuit->services;
	struct service sum;
	size_t n;

	if (circuit->services_count == 0)
		return false;
	for (n = 0; n < circuit->services_count; n++)
		if (!service_has_rate(&services[n], direction))
			return false;
	sum = services[0];
	for (n = 1; n < circuit->services_count; n++)
		add_service(&sum, &services[n], direction);
	contract_of(&sum, direction, i, segment, out);
	name_contract(&sum, direction, "", &out->bound);
	if (circuit->services_count > 1)
		(void)snprintf(out->bound.source, sizeof(out->bound.source),
		    "declared: %zu services together",
		    circuit->services_count);
	return true;
}

bool
bound_device(const struct circuit *circuit, size_t i,
    const struct path_segment *segment, struct exact_bound *out)
{
	const struct device *device = &circuit->segments[i].device;
	char where[CIRCUIT_NAME_SIZE + 16];
	struct fraction packets = fraction_whole(1);

	if (device->packets_per_s == FIELD_UNSET)
		return false;
	if (segment->acks_in_contract)
		packets = fraction_add(packets, segment->acks_per_packet);
	start(BOUND_CONTRACT, i, out);
	out->payload = fraction_divide(fraction_multiply(fraction_whole(
	    8 * device->packets_per_s),
	    segment->overhead.octets[LEVEL_PAYLOAD]), packets);
	out->bound.payload_bps = fraction_floor(out->payload);
	(void)snprintf(out->bound.name, sizeof(out->bound.name),
	    "%s at %" PRIu64 " packets/s%s", device->name[0] != '\0' ?
	    device->name : "device", device->packets_per_s,
	    segment_text(circuit, i, where, sizeof(where)));
	(void)snprintf(out->bound.source, sizeof(out->bound.source),
	    "declared");
	return true;
}
