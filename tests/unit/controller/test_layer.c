/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "declaration_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define HEAD "circuit: X\nmedium: { kind: ethernet, line-rate: 1 Gbit/s }\n"

static void
every_row_is_complete_and_found_by_its_name(void **state)
{
	const struct layer *layer, *other;
	size_t i;

	(void)state;
	for (layer = layer_table; layer->name != NULL; layer++) {
		for (i = 0; layer->below[i] != NULL; i++)
			assert_ptr_equal(layer_find_on(layer->name,
			    layer->below[i]), layer);
		for (other = layer + 1; other->name != NULL; other++)
			if (strcmp(layer->name, other->name) == 0)
				assert_int_equal(layer->level, other->level);
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
impossible_stacks_are_refused_with_the_reason(void **state)
{
	static const struct {
		const char *layers, *expected;
	} vectors[] = {
		{ "[ ethernet, tcp, ipv4 ]", "tcp lies on ipv4 or ipv6" },
		{ "[ ethernet, tcp, ipv4 ]", "test:3:21" },
		{ "[ ethernet, ipv4, tcp, udp ]", "found udp on tcp" },
		{ "[ ethernet, ipv4, ipv6, tcp ]", "found ipv6 on ipv4" },
		{ "[ vlan, ipv4, tcp ]", "vlan lies on ethernet or vlan" },
		{ "[ ethernet, ipv4, vlan, tcp ]", "found vlan on ipv4" },
		{ "[ ethernet, ethernet, ipv4, tcp ]",
		  "ethernet lies on a medium" },
		{ "[ ethernet, ipv4, udp, tls ]", "tls lies on tcp" },
		{ "[ ethernet, ipv4, tls ]", "tls lies on tcp" },
		{ "[ ethernet, ipv4, tcp, tls, tls ]", "found tls on tls" },
		{ "[ ethernet, ipv4 ]", "tcp or udp" },
		{ "[ ethernet ]", "transport" },
		{ "[ ]", "transport" },
		{ "ethernet", "a list, lowest first" },
		{ "{ ethernet: 1 }", "a list, lowest first" },
		{ "[ ethernet, ipv5, tcp ]", "did you mean 'ipv4'" },
		{ "[ ethernet, token-ring, tcp ]", "allowed: ethernet, vlan" },
		{ "[ ethernet, ipv4, [ tcp ] ]", "a name, or" },
		{ "[ ethernet, ipv4, { } ]", "a name, or" },
		{ "[ ethernet, ipv4, { tcp: { }, udp: { } } ]", "a name, or" },
		{ "[ ethernet, ipv4, { udp: { checksum: no } } ]",
		  "udp has no options" },
		{ "[ ethernet, ipv4, { tcp: { timestamp: no } } ]",
		  "did you mean 'timestamps'" },
		{ "[ ethernet, ipv4, { tcp: { timestamps: 3 } } ]", "yes" },
		{ "[ ethernet, ipv4, { tcp: no } ]", "tcp" },
		{ "[ ethernet, ipv4, { tcp: { options-bytes: 6 B } } ]",
		  "a multiple of 4 B" },
		{ "[ ethernet, ipv4, { tcp: { options-bytes: 32 B } } ]",
		  "at most 40 B" },
		{ "[ ethernet, { ipv4: { options-bytes: 44 B } }, tcp ]",
		  "40 B" },
		{ "[ ethernet, ipv4, tcp, { tls: { version: 1.1 } } ]",
		  "1.2, 1.3" },
		{ "[ ethernet, ipv4, tcp, { tls: { record-bytes: 0 B } } ]",
		  "record-bytes" },
		{ "[ ethernet, ipv4, tcp, { tls: { record-bytes: 16385 B } } ]",
		  "record-bytes" },
		{ "[ ethernet, vlan, vlan, vlan, vlan, vlan, vlan, vlan, vlan, "
		  "vlan, vlan, vlan, vlan, vlan, ipv4, tcp ]", "more than 15" },
	};
	char text[512];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), HEAD "layers: %s\n",
		    vectors[i].layers);
		circuit_refused(text, vectors[i].expected);
	}
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
		cmocka_unit_test(every_level_has_its_name),
		cmocka_unit_test(impossible_stacks_are_refused_with_the_reason),
		cmocka_unit_test(the_tallest_stack_still_takes_tls_on_top),
		cmocka_unit_test(the_top_of_the_stack_names_the_protocol),
		cmocka_unit_test(
		    a_trial_replaces_the_transport_and_keeps_declared_options),
		cmocka_unit_test(
		    nothing_points_into_the_tree_after_the_reading),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
