/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "ceiling/overhead.h"
#include "declaration_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

/* Octets of one packet at each level, by hand from the header sizes that the
 * source names. */
struct octets_vector {
	const char *layers, *more;
	uint64_t mtu_bytes;
	uint64_t line, frame, frame_without_fcs, packet, segment, payload;
	const char *source;
};
static const struct octets_vector octets_vectors[] = {
	{ "ethernet, ipv4, tcp", "", 1500, 1538, 1518, 1514, 1500, 1480, 1448,
	  "RFC 5180 A.1: frame + 20; RFC 7323: 12; RFC 6349 s4.1.1" },
	{ "ethernet, ipv4, { tcp: { timestamps: no } }", "", 1500, 1538, 1518,
	  1514, 1500, 1480, 1460, "RFC 9293 s3.7.1: MTU - 40" },
	{ "ethernet, ipv4, { tcp: { timestamps: no, options-bytes: 20 B } }",
	  "", 1500, 1538, 1518, 1514, 1500, 1480, 1440,
	  "RFC 9293 s3.1: options count as header" },
	{ "ethernet, { ipv4: { options-bytes: 4 B } }, udp", "", 1500, 1538,
	  1518, 1514, 1500, 1476, 1468, "RFC 791 s3.1, router alert RFC 2113" },
	{ "ethernet, ipv4, udp", "", 1500, 1538, 1518, 1514, 1500, 1480, 1472,
	  "RFC 768: 8" },
	{ "ethernet, ipv6, tcp", "", 1500, 1538, 1518, 1514, 1500, 1460, 1428,
	  "RFC 8200 s3: 40" },
	{ "ethernet, ipv6, udp", "", 1500, 1538, 1518, 1514, 1500, 1460, 1452,
	  "RFC 8200 s3: 40; RFC 768: 8" },
	{ "ethernet, vlan, ipv4, tcp", "", 1500, 1542, 1522, 1518, 1500, 1480,
	  1448, "RFC 5180 s5.1.1: tagged frame of 1522" },
	{ "ethernet, vlan, vlan, ipv4, tcp", "", 1500, 1546, 1526, 1522, 1500,
	  1480, 1448, "IEEE 802.1ad: second tag of 4, from memory" },
	{ "ethernet, ipv4, tcp", "", 9000, 9038, 9018, 9014, 9000, 8980, 8948,
	  "RFC 5180 A.1 with a frame of 9018" },
	/* RFC 2544 section 9.1: the smallest frame is full with 46 octets */
	{ "ethernet, ipv4, udp", "", 46, 84, 64, 60, 46, 26, 18,
	  "RFC 2544 App. B: 64-octet frame, 84 with preamble and gap" },
	/* an acknowledgement is padded; counted without FCS it is not */
	{ "ethernet, ipv4, udp", "", 40, 84, 64, 54, 40, 20, 12,
	  "W. R. Stevens, TCP/IP Illustrated 1, ch. 24.8: ACK of 84 octets" },
	{ "ethernet, vlan, ipv4, udp", "", 42, 84, 64, 60, 42, 22, 14,
	  "IEEE 802.3: least frame 64 with its tag, from memory" },
	{ "ethernet, vlan, ipv4, udp", "", 43, 85, 65, 61, 43, 23, 15,
	  "IEEE 802.3: least frame 64 with its tag, from memory" },
};

static void
compute(const struct octets_vector *v, struct overhead *out)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", v->layers, v->more);
	struct error err;
	char why[1024];

	if (overhead_compute(&circuit->segments[0].layers, v->mtu_bytes, false,
	    out, &err) == -1)
		fail_msg("%s", error_text(&err, why, sizeof(why)));
	circuit_free(circuit);
}

static void
assert_octets(struct fraction found, uint64_t expected, const char *source)
{
	if (fraction_compare(found, fraction_whole(expected)) != 0)
		fail_msg("found %g, expected %lu: %s", fraction_double(found),
		    (unsigned long)expected, source);
}

static void
octets_at_each_level_equal_the_published_sums(void **state)
{
	struct overhead o;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(octets_vectors); i++) {
		const struct octets_vector *v = &octets_vectors[i];

		compute(v, &o);
		assert_octets(o.octets[LEVEL_LINE], v->line, v->source);
		assert_octets(o.octets[LEVEL_FRAME], v->frame, v->source);
		assert_octets(o.octets[LEVEL_FRAME_WITHOUT_FCS],
		    v->frame_without_fcs, v->source);
		assert_octets(o.octets[LEVEL_PACKET], v->packet, v->source);
		assert_octets(o.octets[LEVEL_SEGMENT], v->segment, v->source);
		assert_octets(o.octets[LEVEL_PAYLOAD], v->payload, v->source);
		assert_int_equal(o.packet_bytes, v->packet);
	}
}

/* Octets that one TLS record adds to its content. */
static const struct {
	const char *options;
	uint64_t record_bytes, added_bytes;
	const char *source;
} record_vectors[] = {
	{ "", 16384, 22, "RFC 8446 s5.2: 5 + 1 + 16" },
	{ "version: 1.3, cipher: chacha20-poly1305, ", 16384, 22,
	  "RFC 8446 s5.2: 5 + 1 + 16" },
	{ "version: 1.2, ", 16384, 29, "RFC 5288: 5 + 8 + 16" },
	{ "version: 1.2, cipher: aes-gcm, ", 1448, 29, "RFC 5288: 5 + 8 + 16" },
	{ "version: 1.2, cipher: chacha20-poly1305, ", 16384, 21,
	  "RFC 7905 s2: 5 + 0 + 16" },
	{ "", 4096, 22, "RFC 8446 s5.2" },
	{ "", 1400, 22, "RFC 8446 s5.2" },
	{ "", 1, 22, "RFC 8446 s5.2" },
};

static void
tls_takes_its_records_out_of_the_stream(void **state)
{
	struct octets_vector v = { .more = "", .mtu_bytes = 1500 };
	struct overhead o;
	char layers[256];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(record_vectors); i++) {
		uint64_t record = record_vectors[i].record_bytes;

		(void)snprintf(layers, sizeof(layers), "ethernet, ipv4, tcp, "
		    "{ tls: { %srecord-bytes: %lu B } }",
		    record_vectors[i].options, (unsigned long)record);
		v.layers = layers;
		compute(&v, &o);
		assert_octets(o.octets[LEVEL_SEGMENT], 1480, "as without TLS");
		if (fraction_compare(o.octets[LEVEL_PAYLOAD],
		    fraction_make((uint128)1448 * record, record +
		    record_vectors[i].added_bytes)) != 0)
			fail_msg("%s", record_vectors[i].source);
	}
}

static void
parts_lead_from_the_line_to_the_payload(void **state)
{
	static const struct {
		const char *name, *what;
		uint64_t octets;
		bool reaches;
		enum layer_level level;
	} expected[] = {
		{ "ethernet", "preamble, SFD, gap", 20, true, LEVEL_FRAME },
		{ "ethernet", "header and FCS", 18, false, 0 },
		{ "vlan", "tag", 4, true, LEVEL_PACKET },
		{ "ipv4", "header", 20, true, LEVEL_SEGMENT },
		{ "tcp", "header and options", 32, true, LEVEL_PAYLOAD },
	};
	struct octets_vector v = { .layers = "ethernet, vlan, ipv4, tcp",
		.more = "", .mtu_bytes = 1500 };
	struct overhead o;
	size_t i;

	(void)state;
	compute(&v, &o);
	assert_int_equal(o.parts_count, COUNT(expected));
	for (i = 0; i < COUNT(expected); i++) {
		assert_string_equal(o.parts[i].layer->name, expected[i].name);
		assert_string_equal(o.parts[i].what, expected[i].what);
		assert_octets(o.parts[i].octets, expected[i].octets, "");
		assert_int_equal(o.parts[i].reaches_level, expected[i].reaches);
		if (expected[i].reaches)
			assert_int_equal(o.parts[i].level, expected[i].level);
	}
}

/* A row that uses every member: AAL5 in ATM cells, ITU-T I.363.5: a trailer of
 * 8, rounded up to 48, and 53 octets of line for each 48. */
static void
alignment_trailer_and_coding_make_whole_cells(void **state)
{
	static const struct {
		uint64_t packet_bytes, cells;
		const char *source;
	} vectors[] = {
		{ 40, 1, "RFC 2684 VC multiplexing: 40 + 8 = 48 fills a cell" },
		{ 41, 2, "ITU-T I.363.5: one octet more needs a second cell" },
		{ 1500, 32, "RFC 2684 VC multiplexing: 1508 / 48 = 31.4" },
		{ 1528, 32, "ITU-T I.363.5: 1536 / 48 = 32" },
		{ 1529, 33, "ITU-T I.363.5" },
	};
	static const struct layer cells = {
		.name = "cells", .level = LEVEL_LINE, .source = "test",
		.cost = { .trail_bytes = 8, .align_bytes = 48, .num = 53,
		    .den = 48 },
	};
	struct circuit *circuit = circuit_of("1 Gbit/s",
	    "ethernet, ipv4, udp", "");
	struct layer_stack *stack = &circuit->segments[0].layers;
	struct overhead o;
	struct error err;
	size_t i;

	(void)state;
	stack->use[0].layer = &cells;
	stack->use[0].cost = cells.cost;
	for (i = 0; i < COUNT(vectors); i++) {
		assert_int_equal(overhead_compute(stack,
		    vectors[i].packet_bytes, false, &o, &err), 0);
		assert_octets(o.octets[LEVEL_LINE], 53 * vectors[i].cells,
		    vectors[i].source);
		assert_false(o.has_level[LEVEL_FRAME]);
		assert_false(o.has_level[LEVEL_FRAME_WITHOUT_FCS]);
	}
	circuit_free(circuit);
}

/* A layer above IP that rounds leaves less than "MTU minus what it adds to a
 * full packet": RFC 4303 with AES-CBC and HMAC-SHA1-96 (RFC 3602, RFC 2404):
 * outer IPv4, 8 + 16, 2 of trailer, blocks of 16, 12 of ICV. */
static void
alignment_above_ip_is_taken_out_of_the_packet(void **state)
{
	static const struct layer esp = {
		.name = "esp", .level = LEVEL_PACKET, .source = "test",
		.cost = { .head_bytes = 24, .trail_bytes = 2,
		    .align_bytes = 16, .tail_bytes = 12, .num = 1, .den = 1 },
	};
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    "");
	struct layer_stack *stack = &circuit->segments[0].layers;
	struct overhead o;
	struct error err;

	(void)state;
	stack->use[4] = stack->use[2];		/* tcp */
	stack->use[3] = stack->use[1];		/* inner ipv4 */
	stack->use[2].layer = &esp;
	stack->use[2].cost = esp.cost;
	stack->count = 5;
	assert_int_equal(overhead_compute(stack, 1500, false, &o, &err), 0);
	assert_octets(o.octets[LEVEL_PACKET], 1496, "1438 inside makes 1496");
	assert_octets(o.octets[LEVEL_SEGMENT], 1418, "1438 less IPv4");
	assert_octets(o.octets[LEVEL_PAYLOAD], 1386, "1438 - 20 - 32");
	circuit_free(circuit);
}

static void
layers_that_leave_no_room_are_refused(void **state)
{
	static const struct {
		const char *layers;
		uint64_t least_bytes;	/* one octet of payload */
	} vectors[] = {
		{ "ethernet, ipv4, udp", 29 },
		{ "ethernet, ipv4, tcp", 53 },
		{ "ethernet, ipv6, udp", 49 },
		{ "ethernet, vlan, ipv4, tcp, tls", 53 },
	};
	struct circuit *circuit;
	struct overhead o;
	struct error err;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		circuit = circuit_of("1 Gbit/s", vectors[i].layers, "");
		assert_int_equal(overhead_compute(&circuit->segments[0].layers,
		    vectors[i].least_bytes, false, &o, &err), 0);
		assert_int_equal(overhead_compute(&circuit->segments[0].layers,
		    vectors[i].least_bytes - 1, false, &o, &err), -1);
		assert_int_equal(err.kind, ERROR_INPUT);
		circuit_free(circuit);
	}
}

/* Does any vector notice that these costs are not the table's? */
static bool
a_vector_notices(const struct layer *layer,
    size_t member, int change)
{
	struct circuit *circuit;
	struct overhead o;
	struct error err;
	bool noticed = false;
	size_t i, n;

	for (i = 0; i < COUNT(octets_vectors) && !noticed; i++) {
		const struct octets_vector *v = &octets_vectors[i];
		struct layer_stack *stack;

		circuit = circuit_of("1 Gbit/s", v->layers, v->more);
		stack = &circuit->segments[0].layers;
		for (n = 0; n < stack->count; n++) {
			uint64_t *value = (uint64_t *)(void *)
			    ((char *)&stack->use[n].cost + member);

			if (stack->use[n].layer == layer)
				*value += (uint64_t)(int64_t)change;
		}
		noticed = overhead_compute(stack, v->mtu_bytes, false, &o,
		    &err) == -1 ||
		    fraction_compare(o.octets[LEVEL_LINE],
		    fraction_whole(v->line)) != 0 ||
		    fraction_compare(o.octets[LEVEL_FRAME],
		    fraction_whole(v->frame)) != 0 ||
		    fraction_compare(o.octets[LEVEL_PACKET],
		    fraction_whole(v->packet)) != 0 ||
		    fraction_compare(o.octets[LEVEL_PAYLOAD],
		    fraction_whole(v->payload)) != 0;
		circuit_free(circuit);
	}
	return noticed;
}

static void
a_vector_notices_each_octet_of_the_table(void **state)
{
	static const struct {
		const char *name;
		size_t offset;
	} members[] = {
		{ "before", offsetof(struct layer_cost, before_bytes) },
		{ "head", offsetof(struct layer_cost, head_bytes) },
		{ "tail", offsetof(struct layer_cost, tail_bytes) },
		{ "min", offsetof(struct layer_cost, min_bytes) },
		{ "gap", offsetof(struct layer_cost, gap_bytes) },
		{ "num", offsetof(struct layer_cost, num) },
	};
	const struct layer *layer;
	size_t m;
	int change;

	(void)state;
	for (layer = layer_table; layer->name != NULL; layer++) {
		if (layer->level == LEVEL_PAYLOAD)
			continue;	/* its records have their own vectors */
		for (m = 0; m < COUNT(members); m++) {
			uint64_t value;

			memcpy(&value, (const char *)&layer->cost +
			    members[m].offset, sizeof(value));
			for (change = -1; change <= 1 && value != 0;
			    change += 2) {
				if (value == 1 && change == -1)
					continue;
				if (!a_vector_notices(layer,
				    members[m].offset, change))
					fail_msg("%s %s %+d", layer->name,
					    members[m].name, change);
			}
		}
	}
}

static void
a_vector_notices_each_octet_of_a_record(void **state)
{
	static const size_t members[] = {
		offsetof(struct layer_cost, head_bytes),
		offsetof(struct layer_cost, trail_bytes),
		offsetof(struct layer_cost, tail_bytes),
		offsetof(struct layer_cost, record_bytes),
	};
	struct circuit *circuit = circuit_of("1 Gbit/s",
	    "ethernet, ipv4, tcp, tls", "");
	struct overhead o;
	struct error err;
	size_t m;

	(void)state;
	for (m = 0; m < COUNT(members); m++) {
		struct layer_stack stack = circuit->segments[0].layers;
		uint64_t *value = (uint64_t *)(void *)((char *)
		    &stack.use[3].cost + members[m]);

		(*value)++;
		assert_int_equal(overhead_compute(&stack, 1500, false, &o,
		    &err), 0);
		assert_int_not_equal(fraction_compare(
		    o.octets[LEVEL_PAYLOAD], fraction_make((uint128)1448 *
		    16384, 16406)), 0);
	}
	circuit_free(circuit);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(octets_at_each_level_equal_the_published_sums),
		cmocka_unit_test(tls_takes_its_records_out_of_the_stream),
		cmocka_unit_test(parts_lead_from_the_line_to_the_payload),
		cmocka_unit_test(alignment_trailer_and_coding_make_whole_cells),
		cmocka_unit_test(alignment_above_ip_is_taken_out_of_the_packet),
		cmocka_unit_test(layers_that_leave_no_room_are_refused),
		cmocka_unit_test(a_vector_notices_each_octet_of_the_table),
		cmocka_unit_test(a_vector_notices_each_octet_of_a_record),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
