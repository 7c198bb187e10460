/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/bound.h"

#include <assert.h>
#include <stdio.h>
#include <string.h>

#include "ceiling/capacity.h"
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

/* Payload rate where a rate is counted at this level:
 * rate * payload octets / octets at the level. */
static struct fraction
payload_of(struct fraction rate, const struct overhead *overhead,
    enum layer_level level)
{
	return fraction_multiply(rate, fraction_divide(
	    overhead->octets[LEVEL_PAYLOAD], overhead->octets[level]));
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

int
bound_medium(const struct circuit *circuit, size_t i,
    enum direction direction, const struct overhead *overhead,
    struct exact_bound *out, struct error *err)
{
	const struct segment *segment = &circuit->segments[i];
	const struct medium *medium = segment->medium.medium;
	char where[CIRCUIT_NAME_SIZE + 16];
	struct fraction rate;

	if (capacity_compute(&segment->medium, direction, &rate, err) == -1)
		return -1;
	memset(out, 0, sizeof(*out));
	out->bound.class = BOUND_MEDIUM;
	out->payload = payload_of(rate, overhead, LEVEL_LINE);
	out->bound.payload_bps = fraction_floor(out->payload);
	out->segment = i;
	out->counted_at = LEVEL_PAYLOAD;
	(void)snprintf(out->bound.name, sizeof(out->bound.name),
	    "%s line%s", medium->name,
	    segment_text(circuit, i, where, sizeof(where)));
	(void)snprintf(out->bound.source, sizeof(out->bound.source), "%s",
	    medium->source);
	return 0;
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
contract_of(const struct service *service, enum direction direction,
    const struct overhead *overhead, struct exact_bound *out)
{
	enum layer_level level = (enum layer_level)service->counted_at;

	assert(overhead->has_level[level]);
	memset(out, 0, sizeof(*out));
	out->bound.class = BOUND_CONTRACT;
	out->payload = payload_of(fraction_whole(service_rate(service,
	    direction)), overhead, level);
	out->bound.payload_bps = fraction_floor(out->payload);
	out->counted_at = level;
	if (service->burst_bytes[direction] != FIELD_UNSET)
		out->burst_bytes = service->burst_bytes[direction];
}

bool
bound_segment_contract(const struct circuit *circuit, size_t i,
    enum direction direction, const struct overhead *overhead,
    struct exact_bound *out)
{
	const struct service *service = &circuit->segments[i].service;
	char where[CIRCUIT_NAME_SIZE + 16];

	if (!service_has_rate(service, direction))
		return false;
	contract_of(service, direction, overhead, out);
	out->segment = i;
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
    enum direction direction, const struct overhead *overhead,
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
	contract_of(&sum, direction, overhead, out);
	out->segment = i;
	name_contract(&sum, direction, "", &out->bound);
	if (circuit->services_count > 1)
		(void)snprintf(out->bound.source, sizeof(out->bound.source),
		    "declared: %zu services together",
		    circuit->services_count);
	return true;
}
