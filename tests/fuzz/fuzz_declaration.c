/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Any text as a declaration: what is accepted has ceilings that add up, finite
 * in every number, under every load; conditions and packet sizes too. */
#include <assert.h>
#include <math.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "ceiling/ceiling.h"
#include "ceiling/condition.h"
#include "ceiling/packet_rate.h"
#include "declare/circuit.h"
#include "error.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

/* What the steps take off leads from the line to each level, in bit/s and in
 * octets. */
static void
check_steps(const struct ceiling *c)
{
	uint64_t bps = c->line_rate_bps;
	struct fraction octets = fraction_make(c->level_bytes_num[LEVEL_LINE],
	    c->level_bytes_den);
	size_t i;

	for (i = 0; i < c->steps_count; i++) {
		assert(c->steps[i].bps <= bps);
		assert(memchr(c->steps[i].name, '\0',
		    sizeof(c->steps[i].name)) != NULL);
		bps -= c->steps[i].bps;
		octets = fraction_subtract(octets, fraction_make(
		    c->steps[i].bytes_num, c->steps[i].bytes_den));
		if (c->steps[i].reaches_level)
			assert(bps == c->rate_bps[c->steps[i].level]);
	}
	assert(bps == c->rate_bps[LEVEL_PAYLOAD]);
	assert(fraction_compare(octets, fraction_make(
	    c->level_bytes_num[LEVEL_PAYLOAD], c->level_bytes_den)) == 0);
}

static void
check(const struct ceiling *c)
{
	uint64_t above_bps = c->line_rate_bps;
	size_t i;

	assert(isfinite(c->segments_per_ack) && c->segments_per_ack >= 0);
	assert(isfinite(c->binding_counted_ratio));
	if (c->reference)
		return;
	assert(c->line_rate_bps >= 1 && c->line_rate_bps <= RATE_MAX_BPS);
	for (i = 0; i < LEVELS; i++) {
		if (!c->has_level[i])
			continue;
		assert(c->rate_bps[i] <= above_bps);
		above_bps = c->rate_bps[i];
	}
	assert(c->payload.whole == c->rate_bps[LEVEL_PAYLOAD]);
	for (i = 0; i < c->bounds_count; i++)
		assert(c->bounds[i].class == BOUND_CONDITION ||
		    c->bounds[i].payload_bps >= c->payload.whole);
	for (i = 0; i < c->notes_count; i++)
		assert(strstr(c->notes[i], "nan") == NULL &&
		    strstr(c->notes[i], "inf ") == NULL);
	check_steps(c);
}

static void
check_conditions(const struct circuit *circuit, const struct load *load,
    struct ceiling *c)
{
	struct condition_figures figures;
	struct error err;

	if (condition_add_declared(circuit, load, c, &err) == -1)
		return;
	check(c);
	condition_figures(circuit, c, &figures);
	assert(isnan(figures.loss_ratio) ||	/* not declared */
	    (figures.loss_ratio >= 0 && figures.loss_ratio <= 1));
}

static void
check_loads(const struct circuit *circuit, enum direction direction)
{
	static struct ceiling ceiling;
	struct load load = { .direction = direction, .declared = true };
	struct error err;
	enum protocol p;

	if (ceiling_of_load(circuit, &load, &ceiling, &err) == 0) {
		check(&ceiling);
		check_conditions(circuit, &load, &ceiling);
	}
	load.both = true;
	if (ceiling_of_load(circuit, &load, &ceiling, &err) == 0)
		check(&ceiling);
	load.declared = load.both = false;
	for (p = 0; p < PROTOCOLS; p++) {
		load.protocol = p;
		if (ceiling_of_load(circuit, &load, &ceiling, &err) == 0)
			check(&ceiling);
	}
}

/* The least packet, the largest and one between. */
static void
check_packets(const struct circuit *circuit, enum direction direction)
{
	const uint64_t sizes[] = { 46, circuit_mtu(circuit) / 2 + 1,
		circuit_mtu(circuit) };
	struct packet_rate rate;
	struct error err;
	size_t i;

	for (i = 0; i < sizeof(sizes) / sizeof(sizes[0]); i++)
		if (packet_rate_compute(circuit, direction, sizes[i], &rate,
		    &err) == 0)
			assert(rate.rate_bps[LEVEL_PACKET] <=
			    rate.rate_bps[LEVEL_LINE]);
}

int
LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
	struct circuit *circuit = NULL;
	enum direction d;
	struct error err;

	memset(&err, 0, sizeof(err));
	if (circuit_read_text((const char *)data, size, "fuzz", NULL, 0,
	    &circuit, &err) == -1) {
		assert(err.kind == ERROR_INPUT && err.cause[0] != '\0');
		return 0;
	}
	for (d = 0; d < DIRECTIONS_SINGLE; d++) {
		check_loads(circuit, d);
		if (!circuit_is_reference(circuit))
			check_packets(circuit, d);
	}
	circuit_free(circuit);
	return 0;
}
