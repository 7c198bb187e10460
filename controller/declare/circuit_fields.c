/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The fields of a declaration: one table a mapping. */
#include "declare/circuit_inside.h"
#include "declare/end.h"
#include "error.h"
#include "log.h"

static int
shared_read(const struct node *node, const struct field *field, void *base,
    struct error *err)
{
	static const struct field name = { .name = "shared-with",
		.kind = FIELD_TEXT, .size = CIRCUIT_NAME_SIZE,
		.required = true };
	struct segment *segment = base;
	const struct node *item;
	struct shared_circuit *shared;

	(void)field;
	segment->shared_with_count = 0;
	if (node == NULL)
		return 0;
	if (node->kind == NODE_MAPPING)
		return node_error(node, err, "shared-with: found a mapping, "
		    "allowed: a list of names of circuits");
	item = node->kind == NODE_SCALAR ? node : node->children;
	for (; item != NULL; item = item == node ? NULL : item->next) {
		if (item->kind != NODE_SCALAR)
			return node_error(item, err, "shared-with: allowed: a "
			    "list of names of circuits");
		if (segment->shared_with_count == SHARED_MAX)
			return node_error(item, err, "shared-with: more than "
			    "%d", SHARED_MAX);
		shared = &segment->shared_with[segment->shared_with_count++];
		if (field_set_text(&name, item->text, item, shared->name,
		    err) == -1)
			return -1;
	}
	return 0;
}

static int
directions_read(const struct node *node, const struct field *field,
    void *base, struct error *err)
{
	struct plan_declaration *plan = base;
	const struct node *item;
	enum direction direction;
	char found[64];

	(void)field;
	plan->directions = 1U << DIRECTION_A_TO_B | 1U << DIRECTION_B_TO_A;
	if (node == NULL)
		return 0;
	if (node->kind == NODE_MAPPING)
		return node_error(node, err, "directions: found a mapping, "
		    "allowed: a-to-b, b-to-a, both, or a list of these");
	plan->directions = 0;
	item = node->kind == NODE_SCALAR ? node : node->children;
	for (; item != NULL; item = item == node ? NULL : item->next) {
		if (item->kind != NODE_SCALAR ||
		    direction_from_name(item->text, &direction) == -1)
			return node_error(item, err, "directions: found '%s', "
			    "allowed: a-to-b, b-to-a, both",
			    item->kind == NODE_SCALAR ? log_escape(item->text,
			    found, sizeof(found)) : "a list");
		plan->directions |= UINT64_C(1) << direction;
	}
	if (plan->directions == 0)
		return node_error(node, err, "directions: found none, allowed: "
		    "a-to-b, b-to-a, both");
	return 0;
}

#define DSCP_MAX 63		/* RFC 2474: six bits */
#define PRIORITY_MAX 7		/* IEEE 802.1Q: three bits */

#define ROW(type, key, of_kind, member)					\
	.name = key, .kind = of_kind, .offset = offsetof(type, member)
#define ROW_TEXT(type, key, member)					\
	ROW(type, key, FIELD_TEXT, member),				\
	.size = sizeof(((type *)0)->member)
#define ROW_QUANTITY(type, key, of_dimension, member)			\
	ROW(type, key, FIELD_QUANTITY, member),				\
	.dimension = DIMENSION_##of_dimension
#define ROW_RATIO(type, key, member)					\
	ROW(type, key, FIELD_REAL, member),				\
	.dimension = DIMENSION_RATIO, .real_max = 1.0,			\
	.per_direction = true

const struct field service_fields[] = {
	{ ROW_TEXT(struct service, "name", name), .help = "its name" },
	{ ROW_QUANTITY(struct service, "committed", RATE, committed_bps),
	  .min = 1, .max = RATE_MAX_BPS, .per_direction = true,
	  .help = "the rate that the contract guarantees" },
	{ ROW_QUANTITY(struct service, "excess", RATE, excess_bps),
	  .min = 1, .max = RATE_MAX_BPS, .per_direction = true,
	  .help = "what the contract lets through beside the committed rate "
		  "without a guarantee (RFC 4115)" },
	{ ROW_QUANTITY(struct service, "peak", RATE, peak_bps),
	  .min = 1, .max = RATE_MAX_BPS, .per_direction = true,
	  .help = "the rate that the contract allows at most; a bound only "
		  "where no committed rate is declared" },
	{ ROW(struct service, "counted-at", FIELD_CHOICE, counted_at),
	  .choices = level_choices,
	  .help = "the layer whose octets the contract counts; default: "
		  "frame, or packet where there are no frames" },
	{ ROW_QUANTITY(struct service, "burst", SIZE, burst_bytes),
	  .max = UINT64_C(1) << 40, .per_direction = true,
	  .help = "burst allowance, counted like the rate" },
	{ ROW(struct service, "dscp", FIELD_COUNT, dscp),
	  .max = DSCP_MAX, .help = "its code point (RFC 2474)" },
	{ ROW(struct service, "priority", FIELD_COUNT, priority),
	  .max = PRIORITY_MAX, .help = "its priority (IEEE 802.1Q)" },
	{ .name = NULL },
};

/* Beyond what 1.6 Tbit/s can carry of frames of 64 octets. */
#define PACKETS_PER_S_MAX UINT64_C(10000000000)

static const struct field device_fields[] = {
	{ ROW_TEXT(struct device, "name", name), .help = "its name" },
	{ ROW(struct device, "packets-per-second", FIELD_COUNT,
	  packets_per_s), .min = 1, .max = PACKETS_PER_S_MAX,
	  .required = true,
	  .help = "packets that it forwards in each direction" },
	{ .name = NULL },
};

#define DEVICE_ROW(type, member)					\
	{ ROW(type, "device", FIELD_MAPPING, member),			\
	  .fields = device_fields,					\
	  .help = "a box on the way that limits packets, not bits" }

#define MTU_MAX_BYTES 65536	/* IPv4's and IPv6's length fields, loopback */
#define MTU_ROW(type, member)						\
	{ ROW_QUANTITY(type, "mtu", SIZE, member), .min = 1,		\
	  .max = MTU_MAX_BYTES,						\
	  .help = "largest packet of the lowest IP layer, its header "	\
		  "included; default: what the layers below allow" }

static const struct field segment_fields[] = {
	{ ROW_TEXT(struct segment, "name", name), .required = true,
	  .help = "its name" },
	{ ROW(struct segment, "medium", FIELD_CUSTOM, medium),
	  .read = medium_read, .rows_of = medium_rows_of,
	  .help = "{ kind: NAME, ... }: see `plafond media`" },
	{ ROW(struct segment, "layers", FIELD_CUSTOM, layers),
	  .read = layers_read, .rows_of = layers_rows_of,
	  .help = "its layers, lowest first; default: those of the circuit" },
	MTU_ROW(struct segment, mtu_bytes),
	{ ROW(struct segment, "service", FIELD_MAPPING, service),
	  .fields = service_fields, .help = "a contract of this segment" },
	DEVICE_ROW(struct segment, device),
	{ ROW(struct segment, "shared-with", FIELD_CUSTOM, shared_with),
	  .read = shared_read, .help = "list of other circuits it carries" },
	{ ROW(struct segment, "exclusive", FIELD_YES_NO, exclusive),
	  .help = "yes: it carries no other circuit" },
	{ .name = NULL },
};

static const struct field criteria_fields[] = {
	{ ROW_RATIO(struct criteria, "throughput", throughput_ratio),
	  .help = "least share of the ceiling; 97 % where no criterion is "
		  "declared, but none for medium host" },
	{ ROW_RATIO(struct criteria, "single-stream", single_stream_ratio),
	  .help = "the same for one stream alone" },
	{ ROW_RATIO(struct criteria, "loss", loss_ratio),
	  .help = "largest share of lost packets" },
	{ ROW_QUANTITY(struct criteria, "delay", TIME, delay_ns),
	  .per_direction = true, .help = "largest one-way delay" },
	{ ROW_QUANTITY(struct criteria, "delay-variation", TIME,
	  delay_variation_ns), .per_direction = true,
	  .help = "largest variation of the delay (RFC 5481)" },
	{ .name = NULL },
};

#define ROUND_TRIP_MAX_NS UINT64_C(60000000000)	/* a minute */
#define TEST_LENGTH_MAX_NS UINT64_C(2592000000000000)	/* 30 days */
/* 65535 << 14, the largest window of RFC 7323 s2.3. */
#define WINDOW_MAX_BYTES (UINT64_C(65535) << 14)

static const struct field conditions_fields[] = {
	{ ROW_QUANTITY(struct conditions, "round-trip", TIME, round_trip_ns),
	  .min = 1000, .max = ROUND_TRIP_MAX_NS,
	  .help = "round-trip time of the idle circuit" },
	{ ROW_RATIO(struct conditions, "loss", loss_ratio),
	  .help = "share of packets lost; needs round-trip" },
	{ ROW_RATIO(struct conditions, "bit-error-ratio", bit_error_ratio),
	  .help = "share of bits received wrong, in place of loss: a frame "
		  "with one is lost (RFC 3819 s8.5.3)" },
	{ ROW_QUANTITY(struct conditions, "window", SIZE, window_bytes),
	  .min = 1, .max = WINDOW_MAX_BYTES, .per_direction = true,
	  .help = "the smaller of send buffer and receive window of one "
		  "stream; needs round-trip" },
	{ ROW_QUANTITY(struct conditions, "host", RATE, host_bps), .min = 1,
	  .max = RATE_MAX_BPS, .per_direction = true,
	  .help = "payload that the hosts at the ends can do" },
	{ ROW_QUANTITY(struct conditions, "test-length", TIME,
	  test_length_ns), .min = 1000000, .max = TEST_LENGTH_MAX_NS,
	  .help = "length of a test that begins cold and with a full bucket" },
	{ ROW_QUANTITY(struct conditions, "transfer-size", SIZE,
	  transfer_bytes), .min = 1, .max = UINT64_C(1) << 50,
	  .help = "size of a file whose transfer time is wanted" },
	{ .name = NULL },
};

static const struct choice end_choices[] = {
	{ "a", END_A },
	{ "b", END_B },
	{ NULL, 0 },
};

static const struct field plan_fields[] = {
	{ ROW(struct plan_declaration, "trials", FIELD_COUNT, trials),
	  .min = 1, .max = 1000, .default_text = "7",
	  .help = "trials a direction; fewer than 7 decide nothing" },
	{ ROW_QUANTITY(struct plan_declaration, "duration", TIME, duration_ns),
	  .min = 1, .max = TRIAL_DURATION_MAX_NS, .default_text = "3 s",
	  .help = "counted time of a trial, a multiple of row-spacing" },
	{ ROW_QUANTITY(struct plan_declaration, "settle", TIME, settle_ns),
	  .max = TRIAL_SETTLE_MAX_NS, .default_text = "1 s",
	  .help = "least time before the counted time" },
	{ ROW(struct plan_declaration, "settle-extends", FIELD_YES_NO,
	  settle_extends),
	  .help = "yes: settle until two 1 s means differ by less than 1 %, "
		  "at most 10 s; default: by the medium" },
	{ ROW_QUANTITY(struct plan_declaration, "row-spacing", TIME, row_ns),
	  .min = UINT64_C(10000000), .max = UINT64_C(10000000000),
	  .default_text = "100 ms", .help = "length of one interval" },
	{ ROW(struct plan_declaration, "streams", FIELD_COUNT, streams),
	  .min = 1, .max = TRIAL_STREAMS_MAX,
	  .help = "streams a direction; default: as the plan computes" },
	{ ROW(struct plan_declaration, "directions", FIELD_CUSTOM, directions),
	  .read = directions_read, .help = "a-to-b, b-to-a, both, or a list "
	      "of these; default: [ a-to-b, b-to-a ]" },
	{ ROW(struct plan_declaration, "opens", FIELD_CHOICE, opens),
	  .choices = end_choices, .default_text = "a",
	  .help = "the end that opens the connections" },
	{ ROW_TEXT(struct plan_declaration, "congestion-control",
	  congestion_control), .default_text = "cubic",
	  .help = "as the kernel names it" },
	{ ROW(struct plan_declaration, "dscp", FIELD_COUNT, dscp),
	  .max = DSCP_MAX, .default_text = "0",
	  .help = "code point of the load (RFC 2474)" },
	{ ROW_QUANTITY(struct plan_declaration, "mss", SIZE, mss_bytes),
	  .max = MTU_MAX_BYTES, .default_text = "0 B",
	  .help = "largest segment; 0 B: the kernel's" },
	{ ROW_QUANTITY(struct plan_declaration, "send-buffer", SIZE,
	  send_buffer_bytes), .max = UINT64_C(1) << 30, .default_text = "0 B",
	  .help = "0 B: the kernel's autotuning" },
	{ ROW_QUANTITY(struct plan_declaration, "receive-buffer", SIZE,
	  receive_buffer_bytes), .max = UINT64_C(1) << 30,
	  .default_text = "0 B", .help = "0 B: the kernel's autotuning" },
	{ .name = NULL },
};

const struct field circuit_fields[] = {
	{ ROW_TEXT(struct draft, "circuit", circuit.name), .required = true,
	  .help = "name of the circuit" },
	{ ROW(struct draft, "ends", FIELD_CUSTOM, circuit.ends),
	  .read = ends_read, .fields = ends_fields,
	  .help = "{ a: ..., b: ... }: the agents; `ceiling` needs none" },
	{ ROW(struct draft, "medium", FIELD_CUSTOM, short_form.medium),
	  .read = medium_read, .rows_of = medium_rows_of,
	  .help = "{ kind: NAME, ... }: see `plafond media`" },
	{ ROW(struct draft, "layers", FIELD_CUSTOM, short_form.layers),
	  .read = layers_read, .rows_of = layers_rows_of,
	  .help = "list of layers, lowest first: see `plafond layers`" },
	MTU_ROW(struct draft, short_form.mtu_bytes),
	DEVICE_ROW(struct draft, short_form.device),
	{ ROW(struct draft, "service", FIELD_MAPPING, service),
	  .fields = service_fields, .help = "the contract" },
	{ ROW(struct draft, "services", FIELD_LIST, circuit.services),
	  .size = sizeof(struct service), .max = SERVICES_MAX,
	  .fields = service_fields,
	  .count_offset = offsetof(struct draft, circuit.services_count),
	  .help = "list, where the contract has several classes" },
	{ ROW(struct draft, "segments", FIELD_LIST, circuit.segments),
	  .size = sizeof(struct segment), .max = SEGMENTS_MAX,
	  .fields = segment_fields,
	  .count_offset = offsetof(struct draft, circuit.segments_count),
	  .help = "list from a to b, in place of medium, mtu and service" },
	{ ROW(struct draft, "criteria", FIELD_MAPPING, circuit.criteria),
	  .fields = criteria_fields, .help = "what the circuit must meet" },
	{ ROW(struct draft, "conditions", FIELD_MAPPING, circuit.conditions),
	  .fields = conditions_fields, .help = "round trip, loss, window: what "
	      "explains a shortfall and never lowers a ceiling" },
	{ ROW(struct draft, "plan", FIELD_MAPPING, circuit.plan),
	  .fields = plan_fields, .help = "how trials are run" },
	{ .name = NULL },
};
