/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

/* Properties of ceilings, over stacks and rates drawn by a seeded sequence. */
#include "ceiling/ceiling.h"
#include "declaration_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

/* A sequence that is the same in every run (Lehmer, Park and Miller 1988). */
static uint64_t
next_random(uint64_t *seed, uint64_t below)
{
	*seed = *seed * 48271 % 2147483647;
	return *seed % below;
}

static void
random_declaration(uint64_t *seed, char layers[256], char more[256],
    uint64_t *rate_bps)
{
	static const char *const counted[] = { "line", "frame",
		"frame-without-fcs", "packet", "segment", "payload" };
	static const char *const tops[] = { "udp", "tcp",
		"{ tcp: { timestamps: no } }",
		"{ tcp: { options-bytes: 8 B } }", "tcp, tls",
		"tcp, { tls: { version: 1.2, record-bytes: 777 B } }" };
	uint64_t tags = next_random(seed, 4);

	*rate_bps = 1 + next_random(seed, 2000000000) *
	    (1 + next_random(seed, 700));
	(void)snprintf(layers, 256, "ethernet, %s%s%s%s, %s",
	    tags > 0 ? "vlan, " : "", tags > 1 ? "vlan, " : "",
	    tags > 2 ? "vlan, " : "", next_random(seed, 2) == 0 ? "ipv4" :
	    "ipv6", tops[next_random(seed, COUNT(tops))]);
	(void)snprintf(more, 256, "mtu: %lu B\n", (unsigned long)(1280 +
	    next_random(seed, 8000)));
	if (next_random(seed, 2) == 0)
		(void)snprintf(more + strlen(more), 256 - strlen(more),
		    "service: { committed: %lu bit/s, counted-at: %s }",
		    (unsigned long)(1 + next_random(seed, 2147483646)),
		    counted[next_random(seed, COUNT(counted))]);
}

static struct circuit *
random_circuit(uint64_t *seed, const char *first_layer, uint64_t extra_bps,
    enum protocol *protocol)
{
	char layers[256], stack[300], more[256], rate[64];
	struct circuit *circuit;
	uint64_t rate_bps;

	random_declaration(seed, layers, more, &rate_bps);
	(void)snprintf(rate, sizeof(rate), "%lu bit/s",
	    (unsigned long)(rate_bps + extra_bps));
	(void)snprintf(stack, sizeof(stack), "ethernet, %s%s", first_layer,
	    layers + strlen("ethernet, "));
	circuit = circuit_of(rate, stack, more);
	*protocol = circuit_default_protocol(circuit);
	return circuit;
}

/* What the steps print is what lies between the levels; nothing is lost. */
static void
assert_columns_add_up(const struct ceiling *c)
{
	uint64_t bps = c->line_rate_bps;
	struct fraction octets = fraction_make(c->level_bytes_num[LEVEL_LINE],
	    c->level_bytes_den);
	size_t i;

	for (i = 0; i < c->steps_count; i++) {
		assert_true(bps >= c->steps[i].bps);
		bps -= c->steps[i].bps;
		octets = fraction_subtract(octets, fraction_make(
		    c->steps[i].bytes_num, c->steps[i].bytes_den));
		if (c->steps[i].reaches_level)
			assert_int_equal(bps,
			    c->rate_bps[c->steps[i].level]);
	}
	assert_int_equal(bps, c->rate_bps[LEVEL_PAYLOAD]);
	assert_int_equal(fraction_compare(octets, fraction_make(
	    c->level_bytes_num[LEVEL_PAYLOAD], c->level_bytes_den)), 0);
}

static void
ladders_add_up_and_levels_descend(void **state)
{
	uint64_t seed = 20240917;
	struct circuit *circuit;
	enum protocol protocol;
	struct ceiling c;
	int round;

	(void)state;
	for (round = 0; round < 300; round++) {
		circuit = random_circuit(&seed, "", 0, &protocol);
		ceiling_of(circuit, protocol, &c);
		assert_columns_add_up(&c);
		assert_true(c.line_rate_bps >= c.rate_bps[LEVEL_LINE]);
		assert_true(c.rate_bps[LEVEL_LINE] >= c.rate_bps[LEVEL_FRAME]);
		assert_true(c.rate_bps[LEVEL_FRAME] >=
		    c.rate_bps[LEVEL_FRAME_WITHOUT_FCS]);
		assert_true(c.rate_bps[LEVEL_FRAME_WITHOUT_FCS] >=
		    c.rate_bps[LEVEL_PACKET]);
		assert_true(c.rate_bps[LEVEL_PACKET] >=
		    c.rate_bps[LEVEL_SEGMENT]);
		assert_true(c.rate_bps[LEVEL_SEGMENT] >=
		    c.rate_bps[LEVEL_PAYLOAD]);
		assert_int_equal((uint64_t)(c.payload_num / c.payload_den),
		    c.rate_bps[LEVEL_PAYLOAD]);
		circuit_free(circuit);
	}
}

static int
compare_payload(const struct ceiling *left, const struct ceiling *right)
{
	return fraction_compare(
	    fraction_make(left->payload_num, left->payload_den),
	    fraction_make(right->payload_num, right->payload_den));
}

static void
faster_lines_never_lower_and_tags_never_raise_it(void **state)
{
	uint64_t seed = 31415, again;
	struct circuit *plain, *faster, *tagged;
	struct ceiling c, f, t;
	enum protocol protocol;
	int round;

	(void)state;
	for (round = 0; round < 100; round++) {
		again = seed;
		plain = random_circuit(&again, "", 0, &protocol);
		again = seed;
		faster = random_circuit(&again, "", 1 + (uint64_t)round,
		    &protocol);
		again = seed;
		tagged = random_circuit(&again, "vlan, ", 0, &protocol);
		seed = again;
		ceiling_of(plain, protocol, &c);
		ceiling_of(faster, protocol, &f);
		ceiling_of(tagged, protocol, &t);
		assert_true(compare_payload(&f, &c) >= 0);
		assert_true(compare_payload(&t, &c) <= 0);
		circuit_free(plain);
		circuit_free(faster);
		circuit_free(tagged);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(ladders_add_up_and_levels_descend),
		cmocka_unit_test(
		    faster_lines_never_lower_and_tags_never_raise_it),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
