/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "declaration_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

static void
every_row_is_complete_and_found_by_its_name(void **state)
{
	const struct layer *layer;
	size_t i, row;

	(void)state;
	for (row = 0; layer_table[row] != NULL; row++) {
		layer = layer_table[row];
		for (i = 0; layer->below[i] != NULL; i++)
			assert_ptr_equal(layer_find_on(layer->name,
			    layer->below[i]), layer);
		for (i = row + 1; layer_table[i] != NULL; i++)
			if (strcmp(layer->name, layer_table[i]->name) == 0)
				assert_int_equal(layer->level,
				    layer_table[i]->level);
		assert_true(layer->memory == NULL ||
		    layer->accuracy != ACCURACY_EXACT);
		assert_non_null(layer->title);
		assert_non_null(layer->inside);
		assert_non_null(layer->formula);
		assert_non_null(layer->source);
		assert_true(layer->cost.num >= layer->cost.den);
		assert_true(layer->cost.den > 0);
		assert_true(layer->cost.align_bytes > 0);
		assert_int_equal(layer->fields == NULL, layer->adjust == NULL);
		assert_int_equal(layer->level == LEVEL_PACKET,
		    layer->ip_version != 0);
		assert_non_null(layer->below[0]);
		for (i = 0; layer->below[i] != NULL; i++)
			if (layer->below[i][0] != '\0' &&
			    strcmp(layer->below[i], "bare") != 0)
				assert_non_null(layer_find(layer->below[i]));
		for (i = 0; layer->fields != NULL &&
		    layer->fields[i].name != NULL; i++)
			assert_non_null(layer->fields[i].help);
		if (layer->cost.before_bytes + layer->cost.gap_bytes > 0)
			assert_non_null(layer->around);
		if (layer->cost.num != layer->cost.den)
			assert_non_null(layer->coding);
	}
	assert_null(layer_find("nothing"));
}

/* Least and most of every number that an option can be. */
static const struct {
	const char *layer, *option;
	uint64_t min, max;
	const char *source;
} number_limits[] = {
	{ "macsec", "icv-bytes", 8, 16, "IEEE 802.1AE s9.11, from memory" },
	{ "mpls", "labels", 1, 16, "our own" },
	{ "hdlc", "fcs-bytes", 2, 4, "RFC 1662 s3.1" },
	{ "hdlc", "flags", 1, 64, "RFC 1662 s3.1; the most is our own" },
	{ "frame-relay", "fcs-bytes", 2, 4, "RFC 1662 s3.1" },
	{ "frame-relay", "flags", 1, 64, "RFC 1662 s3.1" },
	{ "docsis", "downstream-header-bytes", 0, 240, "MULPI, from memory" },
	{ "docsis", "upstream-header-bytes", 0, 240, "MULPI, from memory" },
	{ "lte", "mac-bytes", 2, 3, "TS 36.321 s6.1.2, from memory" },
	{ "lte", "rlc-bytes", 1, 5, "TS 36.322 s6.2.1, from memory" },
	{ "lte", "pdcp-bytes", 1, 3, "TS 36.323 s6.2, from memory" },
	{ "nr", "mac-bytes", 2, 3, "TS 38.321 s6.1.2, from memory" },
	{ "nr", "rlc-bytes", 1, 5, "TS 38.322 s6.2.2, from memory" },
	{ "nr", "pdcp-bytes", 2, 3, "TS 38.323 s6.2.2, from memory" },
	{ "ipv4", "options-bytes", 0, 40, "RFC 791 s3.1: 60 - 20" },
	{ "ipv4", "mtu", 68, 65535, "RFC 791 s3.2, s3.1" },
	{ "ipv6", "extension-bytes", 0, 1024, "our own" },
	{ "ipv6", "mtu", 1280, 65535, "RFC 8200 s5" },
	{ "udp", "datagram-bytes", 1, 65535, "RFC 768" },
	{ "tcp", "options-bytes", 0, 40, "RFC 9293 s3.1: 60 - 20" },
	{ "tcp", "mss", 1, 65535, "RFC 9293 s3.2: 16 bits" },
	{ "tcp", "segments-per-acknowledgement", 1, 1000, "our own" },
	{ "geneve", "options-bytes", 0, 252, "RFC 8926 s3.4: 260 - 8" },
	{ "l2tp", "offset-bytes", 0, 1024, "our own" },
	{ "l2tpv3", "cookie-bytes", 0, 8, "RFC 3931 s4.1" },
	{ "wireguard", "mtu", 68, 65535, "RFC 791 s3.2, s3.1" },
	{ "tls", "record-bytes", 1, 16384, "RFC 8446 s5.1" },
	{ "dtls", "connection-id-bytes", 0, 255, "RFC 9146 s3" },
	{ "dtls", "sequence-bytes", 1, 2, "RFC 9147 s4" },
	{ "quic", "connection-id-bytes", 0, 20, "RFC 9000 s17.2" },
	{ "quic", "packet-number-bytes", 1, 4, "RFC 9000 s17.1" },
	{ "quic", "stream-id-bytes", 1, 8, "RFC 9000 s16" },
	{ "quic", "offset-bytes", 0, 8, "RFC 9000 s16, s19.8" },
	{ "quic", "length-bytes", 0, 8, "RFC 9000 s16, s19.8" },
};

static void
check_limits(const struct layer *layer, const struct field *field)
{
	size_t i;

	for (i = 0; i < COUNT(number_limits); i++) {
		if (strcmp(number_limits[i].layer, layer->name) != 0 ||
		    strcmp(number_limits[i].option, field->name) != 0)
			continue;
		if (field->min != number_limits[i].min ||
		    field->max != number_limits[i].max)
			fail_msg("%s: %s: %s", layer->name, field->name,
			    number_limits[i].source);
		return;
	}
	fail_msg("%s: %s has no limits here", layer->name, field->name);
}

static void
every_number_has_its_published_limits(void **state)
{
	const struct field *field;
	size_t i;

	(void)state;
	for (i = 0; layer_table[i] != NULL; i++) {
		field = layer_table[i]->fields;
		for (; field != NULL && field->name != NULL; field++)
			if (field->kind == FIELD_QUANTITY ||
			    field->kind == FIELD_COUNT)
				check_limits(layer_table[i], field);
	}
}

static void
every_level_has_its_name(void **state)
{
	enum layer_level level;

	(void)state;
	for (level = 0; level < LEVELS; level++) {
		assert_string_equal(level_choices[level].name,
		    level_name(level));
		assert_int_equal(level_choices[level].value, level);
	}
	assert_null(level_choices[LEVELS].name);
}

static void
the_tallest_stack_still_takes_tls_on_top(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, vlan, "
	    "vlan, vlan, vlan, vlan, vlan, vlan, vlan, vlan, vlan, vlan, vlan, "
	    "ipv4, tcp", "");
	struct ceiling c;

	(void)state;
	assert_int_equal(circuit->segments[0].layers.count,
	    LAYERS_DECLARED_MAX);
	ceiling_of(circuit, PROTOCOL_TCP_TLS, &c);
	assert_true(c.rate_bps[LEVEL_PAYLOAD] > 0);
	circuit_free(circuit);
}

static void
the_top_of_the_stack_names_the_protocol(void **state)
{
	static const struct {
		const char *layers;
		enum protocol protocol;
		unsigned ip_version;
	} vectors[] = {
		{ "ethernet, ipv4, tcp", PROTOCOL_TCP, 4 },
		{ "ethernet, vlan, ipv6, udp", PROTOCOL_UDP, 6 },
		{ "ethernet, ipv6, tcp, tls", PROTOCOL_TCP_TLS, 6 },
	};
	struct circuit *circuit;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		circuit = circuit_of("1 Gbit/s", vectors[i].layers, "");
		assert_int_equal(circuit_default_protocol(circuit),
		    vectors[i].protocol);
		assert_int_equal(layers_ip_version(
		    &circuit->segments[0].layers), vectors[i].ip_version);
		circuit_free(circuit);
	}
}

/* The declared options of what stays are kept, the rest takes defaults. */
static void
a_trial_replaces_the_transport_and_keeps_declared_options(void **state)
{
	static const struct {
		const char *layers;
		enum protocol protocol;
		const char *text;
		uint64_t transport_bytes, record_bytes;
	} vectors[] = {
		{ "ethernet, ipv4, { tcp: { timestamps: no } }", PROTOCOL_TCP,
		  "ethernet, ipv4, tcp", 20, 0 },
		{ "ethernet, ipv4, { tcp: { timestamps: no } }", PROTOCOL_UDP,
		  "ethernet, ipv4, udp", 8, 0 },
		{ "ethernet, ipv4, { tcp: { timestamps: no } }",
		  PROTOCOL_TCP_TLS, "ethernet, ipv4, tcp, tls", 20, 16384 },
		{ "ethernet, ipv4, udp", PROTOCOL_TCP_TLS,
		  "ethernet, ipv4, tcp, tls", 32, 16384 },
		{ "ethernet, ipv4, tcp, { tls: { record-bytes: 999 B } }",
		  PROTOCOL_TCP_TLS, "ethernet, ipv4, tcp, tls", 32, 999 },
		{ "ethernet, ipv4, tcp, tls", PROTOCOL_TCP,
		  "ethernet, ipv4, tcp", 32, 0 },
	};
	struct circuit *circuit;
	struct layer_stack stack;
	char text[128];
	size_t i, top;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		circuit = circuit_of("1 Gbit/s", vectors[i].layers, "");
		layers_with_protocol(&circuit->segments[0].layers,
		    vectors[i].protocol, &stack);
		assert_string_equal(layers_text(&stack, text, sizeof(text)),
		    vectors[i].text);
		assert_int_equal(stack.use[layers_transport(&stack)].cost
		    .head_bytes, vectors[i].transport_bytes);
		top = stack.count - 1;
		assert_int_equal(stack.use[top].cost.record_bytes,
		    vectors[i].record_bytes);
		circuit_free(circuit);
	}
}

static void
nothing_points_into_the_tree_after_the_reading(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s",
	    "ethernet, vlan, ipv4, tcp", "");
	size_t i;

	(void)state;
	for (i = 0; i < circuit->segments[0].layers.count; i++)
		assert_null(circuit->segments[0].layers.use[i].at);
	circuit_free(circuit);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(every_row_is_complete_and_found_by_its_name),
		cmocka_unit_test(every_number_has_its_published_limits),
		cmocka_unit_test(every_level_has_its_name),
		cmocka_unit_test(the_tallest_stack_still_takes_tls_on_top),
		cmocka_unit_test(the_top_of_the_stack_names_the_protocol),
		cmocka_unit_test(
		    a_trial_replaces_the_transport_and_keeps_declared_options),
		cmocka_unit_test(
		    nothing_points_into_the_tree_after_the_reading),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
