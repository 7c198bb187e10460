/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/answers.h"

#include <stdio.h>
#include <string.h>

#include "error.h"

/* The lowest so far, as acknowledgements times 8 bits a second. */
struct answers {
	const struct circuit *circuit;
	bool found;
	struct fraction octet_bps;
	const char *what;
	size_t segment;
};

/* rate_bps over the octets that it counts for one acknowledgement. */
static void
keep(struct answers *a, size_t i, const char *what, struct fraction rate_bps,
    struct fraction octets)
{
	struct fraction bps;

	if (octets.num == 0)
		return;
	bps = fraction_divide(rate_bps, octets);
	if (a->found && fraction_compare(bps, a->octet_bps) >= 0)
		return;
	a->found = true;
	a->octet_bps = bps;
	a->what = what;
	a->segment = i;
}

static void
keep_contract(struct answers *a, size_t i, const struct service *service,
    enum direction back, const struct path_segment *segment)
{
	enum layer_level level = (enum layer_level)service->counted_at;
	struct fraction octets = segment->overhead.ack_octets[level];

	if (!service_has_rate(service, back))
		return;
	if (level == LEVEL_LINE)
		octets = fraction_multiply(octets, fraction_divide(
		    segment->capacity.line_bps,
		    capacity_offered(&segment->capacity)));
	keep(a, i, "contract", fraction_whole(service_rate(service, back)),
	    octets);
}

/* A contract of the circuit with one class; how several share it is theirs. */
static void
keep_circuit_contract(struct answers *a, size_t i, enum direction back,
    const struct path_segment *segment)
{
	size_t entry = direction_sender(back) == END_A ? 0 :
	    a->circuit->segments_count - 1;

	if (a->circuit->services_count == 1 && i == entry)
		keep_contract(a, i, &a->circuit->services[0], back, segment);
}

static int
keep_segment(struct answers *a, size_t i, const struct load *back,
    struct error *err)
{
	const struct segment *declared = &a->circuit->segments[i];
	struct path_segment segment;

	if (path_segment_make(a->circuit, i, back, &segment, err) == -1)
		return -1;
	if (!segment.acks_on_line && !segment.capacity.counts_acks)
		keep(a, i, "line", path_offered_bps(&segment),
		    segment.overhead.ack_octets[LEVEL_LINE]);
	keep_contract(a, i, &declared->service, back->direction, &segment);
	keep_circuit_contract(a, i, back->direction, &segment);
	if (declared->device.packets_per_s != FIELD_UNSET)
		keep(a, i, "device", fraction_whole(
		    declared->device.packets_per_s), fraction_make(1, 8));
	return 0;
}

int
answers_add(const struct circuit *circuit, const struct load *load,
    struct ceiling *ceiling, struct error *err)
{
	struct answers a = { .circuit = circuit };
	struct load back = *load;
	struct path_segment segment;
	const char *place;
	char name[96], source[160];
	size_t i;

	if (load->both)
		return 0;
	back.direction = load->direction == DIRECTION_A_TO_B ?
	    DIRECTION_B_TO_A : DIRECTION_A_TO_B;
	for (i = 0; i < circuit->segments_count; i++)
		if (keep_segment(&a, i, &back, err) == -1)
			return -1;
	if (!a.found)
		return 0;
	if (path_segment_make(circuit, a.segment, load, &segment, err) == -1)
		return -1;
	place = circuit->segments[a.segment].name;
	(void)snprintf(name, sizeof(name), "acknowledgements, one for %.4g "
	    "segments", fraction_double(segment.segments_per_ack));
	(void)snprintf(source, sizeof(source), "RFC 9293 s3.8.6.3; the %s "
	    "%s%s%s%s", a.what, direction_name(back.direction),
	    place[0] != '\0' ? " of segment '" : "", place,
	    place[0] != '\0' ? "'" : "");
	return ceiling_add_condition(ceiling, name, mixed_product(a.octet_bps,
	    fraction_multiply(segment.segments_per_ack,
	    segment.overhead.octets[LEVEL_PAYLOAD])).whole, source, err);
}
