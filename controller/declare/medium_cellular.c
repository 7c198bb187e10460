/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Media LTE and NR: what a cell gives to one device at its peak. */
#include <assert.h>
#include <math.h>
#include <stdio.h>

#include "declare/cellular.h"
#include "declare/medium_rows.h"
#include "error.h"

#define CARRIERS_MAX 8
#define UPLINK_LAYERS_MAX 4

/* The short form is one carrier. */
struct parameters {
	struct carrier single;
	struct carrier carriers[CARRIERS_MAX];
	size_t carriers_count;
	double block_error_ratio;
	uint64_t subscriber;		/* enum end */
	uint64_t contention;
};
static_assert(sizeof(struct parameters) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");
struct carrier_row {
	struct carrier one;
};

static const struct choice modulations[] = {
	{ "qpsk", 2 }, { "16-qam", 4 }, { "64-qam", 6 }, { "256-qam", 8 },
	{ "1024-qam", 10 }, { NULL, 0 },
};
static const struct choice spacings[] = {
	{ "15 kHz", 15 }, { "30 kHz", 30 }, { "60 kHz", 60 },
	{ "120 kHz", 120 }, { NULL, 0 },
};
static const struct choice ranges[] = {
	{ "fr1", FREQUENCY_RANGE_1 }, { "fr2", FREQUENCY_RANGE_2 },
	{ NULL, 0 },
};
/* TS 38.306 section 4.1.2 */
static const struct choice scalings[] = {
	{ "1", 100 }, { "0.8", 80 }, { "0.75", 75 }, { "0.4", 40 },
	{ NULL, 0 },
};

#define TDD_ROW(key, member, most, needed, text)			\
	{ .name = key, .kind = FIELD_COUNT,				\
	  .offset = offsetof(struct tdd, member), .max = most,		\
	  .required = needed, .help = text }
static const struct field tdd_fields[] = {
	TDD_ROW("downlink-slots", downlink_slots, 160, true,
	    "slots (LTE: subframes) of the pattern toward the subscriber"),
	TDD_ROW("uplink-slots", uplink_slots, 160, true, "away from it"),
	TDD_ROW("special-downlink-symbols", special_downlink, 14, false,
	    "of the slot between them, 14 symbols; the rest is its guard "
	    "period; default: there is no such slot"),
	TDD_ROW("special-uplink-symbols", special_uplink, 14, false,
	    "of the same slot"),
	{ .name = NULL },
};

#define WIDTH_ROW(type, member, text)					\
	{ .name = "channel-width", .kind = FIELD_REAL,			\
	  .dimension = DIMENSION_FREQUENCY,				\
	  .offset = offsetof(type, member.width_hz),			\
	  .real_min = 1.4e6, .real_max = 400e6, .help = text }
#define LAYERS_ROW(type, member)					\
	{ .name = "layers", .kind = FIELD_COUNT,			\
	  .offset = offsetof(type, member.layers), .min = 1, .max = 8,	\
	  .per_direction = true,					\
	  .help = "of MIMO; at most 4 away from the subscriber" }
#define MODULATION_ROW(type, member)					\
	{ .name = "modulation", .kind = FIELD_CHOICE,			\
	  .offset = offsetof(type, member.symbol_bits),			\
	  .choices = modulations, .per_direction = true,		\
	  .help = "the highest that both ends use" }
#define TDD_MAPPING_ROW(type, member)					\
	{ .name = "tdd", .kind = FIELD_MAPPING,				\
	  .offset = offsetof(type, member.tdd), .fields = tdd_fields,	\
	  .help = "the pattern where the directions take turns; default: " \
		  "FDD" }
#define COUNT_ROW(type, member)						\
	{ .name = "count", .kind = FIELD_COUNT,				\
	  .offset = offsetof(type, member.count), .min = 1, .max = 16,	\
	  .default_text = "1", .help = "carriers of this kind" }

#define NR_ROWS(type, member)						\
	WIDTH_ROW(type, member, "of a carrier, 5 to 400 MHz"),		\
	{ .name = "subcarrier-spacing", .kind = FIELD_CHOICE,		\
	  .offset = offsetof(type, member.spacing_khz),			\
	  .choices = spacings, .help = "kHz between subcarriers" },	\
	{ .name = "frequency-range", .kind = FIELD_CHOICE,		\
	  .offset = offsetof(type, member.range), .choices = ranges,	\
	  .help = "default: fr1 below 60 kHz of spacing, fr2 above" },	\
	LAYERS_ROW(type, member),					\
	MODULATION_ROW(type, member),					\
	{ .name = "scaling-factor", .kind = FIELD_CHOICE,		\
	  .offset = offsetof(type, member.scaling_percent),		\
	  .choices = scalings, .default_text = "1",			\
	  .help = "what the device says of itself (TS 38.306)" },	\
	TDD_MAPPING_ROW(type, member),					\
	COUNT_ROW(type, member)

#define LTE_ROWS(type, member)						\
	WIDTH_ROW(type, member, "of a carrier: 1.4, 3, 5, 10, 15, 20 MHz"), \
	LAYERS_ROW(type, member),					\
	MODULATION_ROW(type, member),					\
	{ .name = "overhead", .kind = FIELD_REAL,			\
	  .dimension = DIMENSION_RATIO,					\
	  .offset = offsetof(type, member.overhead_ratio),		\
	  .real_min = 0, .real_max = 0.9,				\
	  .help = "control, reference signals and coding; default: 25 %" }, \
	{ .name = "transport-block-bits", .kind = FIELD_COUNT,		\
	  .offset = offsetof(type, member.block_bits),			\
	  .min = 16, .max = 1000000, .per_direction = true,		\
	  .help = "in place of layers and modulation: bits of a codeword " \
		  "each millisecond (TS 36.213)" },			\
	{ .name = "codewords", .kind = FIELD_COUNT,			\
	  .offset = offsetof(type, member.codewords), .min = 1,		\
	  .max = 2, .per_direction = true,				\
	  .help = "transport blocks at once; default: 1" },		\
	TDD_MAPPING_ROW(type, member),					\
	COUNT_ROW(type, member)

#define LINK_ROWS							\
	{ .name = "block-error-target", .kind = FIELD_REAL,		\
	  .dimension = DIMENSION_RATIO,					\
	  .offset = offsetof(struct parameters, block_error_ratio),	\
	  .real_min = 0, .real_max = 0.5, .default_text = "0 %",	\
	  .help = "share of blocks that is sent again, usually 10 %" }, \
	MEDIUM_SUBSCRIBER_ROW(struct parameters, subscriber),		\
	MEDIUM_CONTENTION_ROW(struct parameters, contention)
#define CARRIERS_ROW(rows)						\
	{ .name = "carriers", .kind = FIELD_LIST,			\
	  .offset = offsetof(struct parameters, carriers),		\
	  .size = sizeof(struct carrier), .fields = rows, .min = 1,	\
	  .max = CARRIERS_MAX,						\
	  .count_offset = offsetof(struct parameters, carriers_count),	\
	  .help = "where they differ: a mapping with the same fields each" }

static const struct field nr_carrier_fields[] = {
	NR_ROWS(struct carrier_row, one),
	{ .name = NULL },
};
static const struct field nr_fields[] = {
	MEDIUM_KIND_ROW,
	NR_ROWS(struct parameters, single),
	CARRIERS_ROW(nr_carrier_fields),
	LINK_ROWS,
	{ .name = NULL },
};
static const struct field lte_carrier_fields[] = {
	LTE_ROWS(struct carrier_row, one),
	{ .name = NULL },
};
static const struct field lte_fields[] = {
	MEDIUM_KIND_ROW,
	LTE_ROWS(struct parameters, single),
	CARRIERS_ROW(lte_carrier_fields),
	LINK_ROWS,
	{ .name = NULL },
};

/* One carrier being checked. */
struct scope {
	const char *medium;		/* "nr" */
	struct carrier *carrier;
	const struct node *node;
	uint64_t subscriber;
};

static int
missing(const struct scope *scope, const char *key, const char *allowed,
    struct error *err)
{
	return node_error(medium_place(scope->node, key), err,
	    "%s: '%s' is missing, allowed: %s", scope->medium, key, allowed);
}

static int
check_tdd(const struct scope *scope, struct error *err)
{
	const struct tdd *tdd = &scope->carrier->tdd;
	const struct node *node = medium_place(scope->node, "tdd");
	uint64_t down, up;

	if (tdd->downlink_slots == FIELD_UNSET)
		return 0;
	down = tdd->special_downlink == FIELD_UNSET ? 0 :
	    tdd->special_downlink;
	up = tdd->special_uplink == FIELD_UNSET ? 0 : tdd->special_uplink;
	if (down + up > 14)
		return node_error(medium_place(node,
		    "special-downlink-symbols"), err, "tdd: found %llu "
		    "symbols in the special slot, allowed: at most 14 with "
		    "special-uplink-symbols", (unsigned long long)down + up);
	if (tdd_symbols(tdd, false) == 0 || tdd_symbols(tdd, true) == 0)
		return node_error(node, err, "tdd: a direction has no "
		    "symbols, allowed: some for each");
	return 0;
}

static int
check_layers(const struct scope *scope, struct error *err)
{
	const struct carrier *carrier = scope->carrier;

	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		if (carrier->layers[d] == FIELD_UNSET)
			return missing(scope, "layers", "1 to 8 in each "
			    "direction", err);
		if (carrier->symbol_bits[d] == FIELD_UNSET)
			return missing(scope, "modulation", "qpsk to "
			    "1024-qam in each direction", err);
		if (medium_is_upstream(scope->subscriber,
		    (enum direction)d) &&
		    carrier->layers[d] > UPLINK_LAYERS_MAX)
			return node_error(medium_place(scope->node, "layers"),
			    err, "layers: found %llu away from the "
			    "subscriber, allowed there: 1 to %d",
			    (unsigned long long)carrier->layers[d],
			    UPLINK_LAYERS_MAX);
	}
	return 0;
}

/* Widths are multiples of 100 kHz; 0 where it is none. */
static uint64_t
width_khz(const struct carrier *carrier)
{
	double khz = carrier->width_hz / 1e3;

	return khz > floor(khz) ? 0 : (uint64_t)khz;
}

static int
check_nr_carrier(const struct scope *scope, struct error *err)
{
	struct carrier *carrier = scope->carrier;
	char widths[128];

	if (isnan(carrier->width_hz))
		return missing(scope, "channel-width", "5 to 400 MHz", err);
	if (carrier->spacing_khz == FIELD_UNSET)
		return missing(scope, "subcarrier-spacing", "15 kHz, 30 kHz, "
		    "60 kHz, 120 kHz", err);
	if (carrier->range == FIELD_UNSET && carrier->spacing_khz == 60)
		return missing(scope, "frequency-range", "fr1, fr2 with "
		    "60 kHz", err);
	if (carrier->range == FIELD_UNSET)
		carrier->range = carrier->spacing_khz < 60 ?
		    FREQUENCY_RANGE_1 : FREQUENCY_RANGE_2;
	carrier->blocks = nr_blocks((enum frequency_range)carrier->range,
	    carrier->spacing_khz, width_khz(carrier));
	if (carrier->blocks == 0)
		return node_error(medium_place(scope->node, "channel-width"),
		    err, "channel-width: found %g MHz, allowed with a spacing "
		    "of %llu kHz in %s: %s MHz",
		    carrier->width_hz / 1e6,
		    (unsigned long long)carrier->spacing_khz,
		    ranges[carrier->range].name, nr_widths(
		    (enum frequency_range)carrier->range,
		    carrier->spacing_khz, widths, sizeof(widths)));
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		carrier->block_bits[d] = FIELD_UNSET;
	return check_layers(scope, err);
}

/* By transport blocks; the resource elements hold so many bits at most. */
static int
check_lte_blocks(const struct scope *scope, struct error *err)
{
	static const char *const others[] = { "layers", "modulation",
		"overhead" };
	struct carrier *carrier = scope->carrier;
	const struct node *node = scope->node;

	for (size_t i = 0; i < sizeof(others) / sizeof(others[0]); i++)
		if (node_child(node, others[i]) != NULL)
			return node_error(medium_place(node, others[i]), err,
			    "%s: transport-block-bits is given too, allowed: "
			    "one of them", others[i]);
	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		if (carrier->block_bits[d] == FIELD_UNSET)
			return missing(scope, "transport-block-bits", "one "
			    "for each direction", err);
		if (carrier->codewords[d] == FIELD_UNSET)
			carrier->codewords[d] = 1;
		if (carrier->block_bits[d] * carrier->codewords[d] >
		    carrier->blocks * 12 * 14 * 10 * 8)
			return node_error(medium_place(node,
			    "transport-block-bits"), err,
			    "transport-block-bits: %llu resource blocks hold "
			    "%llu bits a millisecond with 8 layers of "
			    "1024-QAM, allowed: at most those",
			    (unsigned long long)carrier->blocks,
			    (unsigned long long)carrier->blocks * 12 * 14 *
			    10 * 8);
	}
	return 0;
}

static int
check_lte_carrier(const struct scope *scope, struct error *err)
{
	struct carrier *carrier = scope->carrier;
	const struct node *node = scope->node;

	if (isnan(carrier->width_hz))
		return missing(scope, "channel-width", "1.4, 3, 5, 10, 15 or "
		    "20 MHz", err);
	carrier->blocks = lte_blocks(width_khz(carrier));
	if (carrier->blocks == 0)
		return node_error(medium_place(node, "channel-width"), err,
		    "channel-width: found %g MHz, allowed: 1.4, 3, 5, 10, 15, "
		    "20 MHz", carrier->width_hz / 1e6);
	if (node_child(node, "transport-block-bits") != NULL)
		return check_lte_blocks(scope, err);
	if (node_child(node, "codewords") != NULL)
		return node_error(medium_place(node, "codewords"), err,
		    "codewords: without transport-block-bits they say "
		    "nothing, allowed: leave them out");
	if (isnan(carrier->overhead_ratio))
		carrier->overhead_ratio = 0.25;
	return check_layers(scope, err);
}

/* In place of a list the fields themselves: not both. */
static int
settle_form(struct parameters *p, const struct node *node,
    const struct field *carrier_fields, struct error *err)
{
	if (p->carriers_count == 0) {
		p->carriers[0] = p->single;
		p->carriers_count = 1;
		return 0;
	}
	for (const struct field *row = carrier_fields; row->name != NULL;
	    row++)
		if (node_child(node, row->name) != NULL)
			return node_error(medium_place(node, row->name), err,
			    "%s: `carriers` is given too, allowed: in each "
			    "carrier", row->name);
	return 0;
}

static int
check_carriers(struct parameters *p, const struct node *node,
    const char *medium, const struct field *carrier_fields,
    int (*check_carrier)(const struct scope *, struct error *),
    struct error *err)
{
	const struct node *list = node_child(node, "carriers"), *item = node;

	if (settle_form(p, node, carrier_fields, err) == -1)
		return -1;
	if (list != NULL)
		item = list->children;
	for (size_t i = 0; i < p->carriers_count; i++) {
		const struct scope scope = { medium, &p->carriers[i], item,
			p->subscriber };

		if (check_carrier(&scope, err) == -1 ||
		    check_tdd(&scope, err) == -1)
			return -1;
		item = item->next;
	}
	return 0;
}

static int
check_nr(void *base, const struct node *node, struct error *err)
{
	return check_carriers(base, node, "nr", nr_carrier_fields,
	    check_nr_carrier, err);
}

static int
check_lte(void *base, const struct node *node, struct error *err)
{
	return check_carriers(base, node, "lte", lte_carrier_fields,
	    check_lte_carrier, err);
}

static void
add_rates(struct carrier_rates *sum, const struct carrier_rates *one)
{
	sum->gross_bps += one->gross_bps;
	sum->coded_bps += one->coded_bps;
	sum->user_bps += one->user_bps;
	sum->scaled_bps += one->scaled_bps;
	sum->shared_bps += one->shared_bps;
	sum->good_bps += one->good_bps;
}

static void
add_step(struct medium_capacity *out, const char *what, uint64_t before_bps,
    uint64_t after_bps, const char *source)
{
	if (after_bps != before_bps)
		medium_add_step(out, what, fraction_whole(after_bps), source);
}

static void
capacity_of(enum cellular_kind kind, const struct parameters *p,
    enum direction direction, struct medium_capacity *out)
{
	bool uplink = medium_is_upstream(p->subscriber, direction);
	struct carrier_rates sum = { 0 }, one;
	const char *source = kind == CELLULAR_NR ? "TS 38.306 s4.1.2" :
	    "TS 36.211";

	for (size_t i = 0; i < p->carriers_count; i++) {
		const struct carrier *carrier = &p->carriers[i];

		carrier_rates(kind, carrier, direction, uplink, (uint64_t)
		    llround(p->block_error_ratio * 1e6), &one);
		add_rates(&sum, &one);
		medium_add_note(out, "%s: %llu x %.4g MHz, %llu resource "
		    "blocks each: %.3f Mbit/s", uplink ? "uplink" : "downlink",
		    (unsigned long long)carrier->count,
		    carrier->width_hz / 1e6,
		    (unsigned long long)carrier->blocks,
		    (double)one.good_bps / 1e6);
	}
	out->contention = p->contention;
	out->line_bps = fraction_whole(sum.gross_bps);
	add_step(out, "coding", sum.gross_bps, sum.coded_bps, source);
	add_step(out, kind == CELLULAR_NR ? "control and references" :
	    "control, references, coding", sum.coded_bps, sum.user_bps,
	    source);
	add_step(out, "scaling factor", sum.user_bps, sum.scaled_bps, source);
	add_step(out, "symbols of the other direction", sum.scaled_bps,
	    sum.shared_bps, "declared");
	add_step(out, "retransmissions", sum.shared_bps, sum.good_bps,
	    "declared");
}

static int
capacity_nr(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	(void)err;
	capacity_of(CELLULAR_NR, base, load->direction, out);
	return 0;
}

static int
capacity_lte(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	(void)err;
	capacity_of(CELLULAR_LTE, base, load->direction, out);
	return 0;
}

#define PEAK_NOTE "the peak that a cell gives to one device alone and close " \
	"by: blocks that are sent again take about 10 %, other devices and " \
	"distance far more"

const struct medium medium_lte = {
	.name = "lte",
	.title = "LTE, by resource blocks or transport blocks",
	.fields = lte_fields,
	.check = check_lte,
	.capacity = capacity_lte,
	.carries = (const char *const[]){ "lte", NULL },
	.duplex = DUPLEX_FULL,
	.subscriber_offset = offsetof(struct parameters, subscriber),
	.accuracy = ACCURACY_NOMINAL,
	.accuracy_note = PEAK_NOTE "; by resource blocks the share of 25 % is "
	    "a rule of thumb, within 5 % of the transport blocks",
	.memory = "resource blocks of the widths below 20 MHz",
	.formula = "line = blocks * 12 * 14 * bits * layers * 1000; * (1 - "
	    "overhead); or transport-block-bits * codewords * 1000; TDD: * "
	    "symbols / symbols of the pattern",
	.source = "3GPP TS 36.101, 36.211, 36.213",
};

const struct medium medium_nr = {
	.name = "nr",
	.title = "5G NR, by the peak rate of TS 38.306",
	.fields = nr_fields,
	.check = check_nr,
	.capacity = capacity_nr,
	.carries = (const char *const[]){ "nr", NULL },
	.duplex = DUPLEX_FULL,
	.subscriber_offset = offsetof(struct parameters, subscriber),
	.accuracy = ACCURACY_NOMINAL,
	.accuracy_note = PEAK_NOTE,
	.formula = "line = layers * bits * blocks * 12 * 14 * spacing / "
	    "15 kHz * 1000; * 948/1024 * (1 - overhead) * scaling-factor; "
	    "TDD: * symbols / symbols of the pattern",
	.source = "3GPP TS 38.306 s4.1.2, 38.101",
};
