/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/bound.h"

#include <assert.h>
#include <inttypes.h>
#include <stdio.h>
#include <string.h>

#include "ceiling/name.h"
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
		name_join(buf, size, " of segment '", name, "'");
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

/* A rate over what it counts of one packet. */
static void
set_payload(const struct path_segment *segment, struct fraction rate_bps,
    struct fraction counted_octets, struct exact_bound *out)
{
	out->bps_an_octet = fraction_divide(rate_bps, counted_octets);
	out->payload = mixed_product(out->bps_an_octet,
	    segment->overhead.octets[LEVEL_PAYLOAD]);
	out->bound.payload_bps = out->payload.whole;
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
	name_join(out->bound.name, sizeof(out->bound.name), medium->name,
	    " line", segment_text(circuit, i, where, sizeof(where)));
	name_join(out->bound.source, sizeof(out->bound.source),
	    medium->source, "", "");
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
	name_join(out->bound.name, sizeof(out->bound.name),
	    "channel capacity", segment_text(circuit, i, where,
	    sizeof(where)), "");
	name_join(out->bound.source, sizeof(out->bound.source),
	    "Shannon 1949: C = B log2(1 + S/N)", "", "");
	return true;
}

/* "committed 100 Mbit/s at frame", "committed 10 Mbit/s + excess 5 Mbit/s, not
 * guaranteed, at frame" */
static void
name_contract(const struct service *service, enum direction direction,
    const char *where, struct bound *out)
{
	const char *level = level_name((enum layer_level)service->counted_at);
	uint64_t committed_bps = service->committed_bps[direction];
	bool committed = committed_bps != FIELD_UNSET;
	char rate[32], excess[32];

	(void)units_format_exact(committed ? committed_bps :
	    service_rate(service, direction), DIMENSION_RATE, rate,
	    sizeof(rate));
	(void)snprintf(out->source, sizeof(out->source), "declared");
	if (service->excess_bps[direction] == FIELD_UNSET) {
		(void)snprintf(out->name, sizeof(out->name), "%s %s at %s%s",
		    committed ? "committed" : "peak", rate, level, where);
		return;
	}
	(void)snprintf(out->name, sizeof(out->name), "committed %s + excess "
	    "%s, not guaranteed, at %s%s", rate, units_format_exact(
	    service->excess_bps[direction], DIMENSION_RATE, excess,
	    sizeof(excess)), level, where);
	(void)snprintf(out->source, sizeof(out->source), "declared; RFC 4115: "
	    "only the committed rate is guaranteed");
}

static void
contract_of(const struct service *service, enum direction direction, size_t i,
    const struct path_segment *segment, struct exact_bound *out)
{
	enum layer_level level = (enum layer_level)service->counted_at;
	struct fraction rate_bps, counted;

	assert(segment->overhead.has_level[level]);
	start(BOUND_CONTRACT, i, out);
	rate_bps = fraction_whole(service_rate(service, direction));
	counted = level == LEVEL_LINE && !segment->reference ?
	    path_line_octets(segment) :
	    path_octets_in_contract(segment, level);
	set_payload(segment, rate_bps, counted, out);
	out->counted_at = level;
	if (service->burst_bytes[direction] == FIELD_UNSET)
		return;
	out->burst_bytes = service->burst_bytes[direction];
	out->burst_payload_bytes = mixed_product(fraction_divide(
	    fraction_whole(out->burst_bytes), counted),
	    segment->overhead.octets[LEVEL_PAYLOAD]).whole;
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

static void
add_declared(uint64_t *sum, uint64_t value)
{
	if (value != FIELD_UNSET)
		*sum = *sum == FIELD_UNSET ? value : *sum + value;
}

/* All services are counted at the same level, so rates and bursts add up; a
 * peak rate alone stands for a committed one. */
static void
add_service(struct service *sum, const struct service *one, enum direction d)
{
	if (sum->committed_bps[d] == FIELD_UNSET)
		sum->committed_bps[d] = sum->peak_bps[d];
	add_declared(&sum->committed_bps[d],
	    one->committed_bps[d] != FIELD_UNSET ? one->committed_bps[d] :
	    one->peak_bps[d]);
	add_declared(&sum->excess_bps[d], one->excess_bps[d]);
	add_declared(&sum->burst_bytes[d], one->burst_bytes[d]);
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
	set_payload(segment, fraction_whole(8 * device->packets_per_s),
	    packets, out);
	(void)snprintf(out->bound.name, sizeof(out->bound.name),
	    "%s at %" PRIu64 " packets/s%s", device->name[0] != '\0' ?
	    device->name : "device", device->packets_per_s,
	    segment_text(circuit, i, where, sizeof(where)));
	(void)snprintf(out->bound.source, sizeof(out->bound.source),
	    "declared");
	return true;
}
