/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Medium leased IP service: a rate that somebody promised at some level. */
#include <assert.h>
#include <string.h>

#include "declare/medium_rows.h"
#include "error.h"

struct parameters {
	uint64_t rate_bps[DIRECTIONS_SINGLE];
	uint64_t counted_at;		/* enum layer_level */
};
static_assert(sizeof(struct parameters) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");

static const struct choice counted_at_choices[] = {
	{ "frame", LEVEL_FRAME },
	{ "packet", LEVEL_PACKET },
	{ "segment", LEVEL_SEGMENT },
	{ "payload", LEVEL_PAYLOAD },
	{ NULL, 0 },
};

static const struct field fields[] = {
	MEDIUM_KIND_ROW,
	{ .name = "rate", .kind = FIELD_QUANTITY,
	  .dimension = DIMENSION_RATE,
	  .offset = offsetof(struct parameters, rate_bps),
	  .min = 1, .max = RATE_MAX_BPS, .required = true,
	  .per_direction = true,
	  .help = "what the service carries" },
	{ .name = "counted-at", .kind = FIELD_CHOICE,
	  .offset = offsetof(struct parameters, counted_at),
	  .choices = counted_at_choices, .default_text = "packet",
	  .help = "the level whose octets the rate counts" },
	{ .name = NULL },
};

static int
capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct parameters *p = base;
	struct fraction counted = load->octets[p->counted_at];

	if (counted.num == 0)
		return error_set(err, ERROR_INPUT, "medium ip-service: its "
		    "rate is counted at %s, which packets without a transport "
		    "do not have", level_name((enum layer_level)p->counted_at));
	out->line_bps = fraction_multiply(
	    fraction_whole(p->rate_bps[load->direction]),
	    fraction_divide(load->octets[LEVEL_LINE], counted));
	medium_add_note(out, "the rate is counted at %s; what lies below it "
	    "is not limited and only shown",
	    level_name((enum layer_level)p->counted_at));
	return 0;
}

/* Frames are counted where there are frames. */
static bool
suits(const void *base, const char *layer_name)
{
	const struct parameters *p = base;

	return p->counted_at != LEVEL_FRAME ||
	    strcmp(layer_name, "ethernet") == 0;
}

const struct medium medium_ip = {
	.name = "ip-service",
	.title = "leased IP service: a rate at a level",
	.fields = fields,
	.suits = suits,
	.capacity = capacity,
	.carries = (const char *const[]){ "ipv4", "ipv6", "ethernet", NULL },
	.default_mtu_bytes = 1500,
	.duplex = DUPLEX_FULL,
	.accuracy = ACCURACY_EXACT,
	.accuracy_note = "exact arithmetic from what is declared; how well "
	    "the provider keeps to it is what a trial shows",
	.formula = "line = rate * octets at line / octets at counted-at",
	.source = "declared; RFC 5136 s2.3.1",
};
