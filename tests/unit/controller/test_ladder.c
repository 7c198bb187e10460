/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

/* Properties of ceilings, over stacks of the whole table, rates and contracts
 * drawn by a seeded sequence. */
#include "ladder_checks.h"
#include "random_stack.h"

#define ROUNDS 400
#define SEGMENTS 4

/* What is drawn for one round. */
struct drawn {
	struct random_stack written;
	struct layer_stack layers;
	uint64_t mtu_bytes;
	struct awkward medium;		/* a line without steps */
};

static void
draw(uint64_t *seed, size_t most, struct drawn *out)
{
	random_layers(seed, most, &out->written, &out->layers);
	out->mtu_bytes = 1280 + next_random(seed, 8000);
	memset(&out->medium, 0, sizeof(out->medium));
	out->medium.den = 1 + next_random(seed, 66);
	out->medium.line_bps = 1000 + next_random(seed, 2000000000) *
	    (1 + next_random(seed, 700));
	out->medium.contention = 1 + next_random(seed, 3);
	out->medium.duplex = next_random(seed, 2);
}

/* A contract at a level that the layers have, in half the rounds. */
static void
draw_contract(uint64_t *seed, struct circuit *circuit)
{
	struct service *service = &circuit->services[0];

	if (next_random(seed, 2) == 0)
		return;
	circuit->services_count = 1;
	service->counted_at = next_random(seed, LEVELS);
	if (!layers_have_level(&circuit->segments[0].layers,
	    (enum layer_level)service->counted_at))
		service->counted_at = LEVEL_PACKET;
	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		service->committed_bps[d] = 1 + next_random(seed, 2147483646);
		service->peak_bps[d] = service->burst_bytes[d] = FIELD_UNSET;
	}
}

/* The declared stack's, from a to b.  False: it does not fit. */
static bool
ceiling_made(const struct circuit *circuit, struct ceiling *out)
{
	const struct load load = { .declared = true };
	struct error err;

	return ceiling_of_load(circuit, &load, out, &err) == 0;
}

static void
ladders_add_up_and_levels_descend(void **state)
{
	uint64_t seed = 20240917;
	struct circuit *circuit;
	struct drawn drawn;
	struct ceiling c;
	int round, made = 0;

	(void)state;
	for (round = 0; round < ROUNDS; round++) {
		draw(&seed, LAYERS_DECLARED_MAX, &drawn);
		circuit = awkward_circuit(&drawn.layers, drawn.mtu_bytes,
		    &drawn.medium);
		draw_contract(&seed, circuit);
		if (ceiling_made(circuit, &c)) {
			made++;
			assert_columns_add_up(&c);
			assert_levels_descend(&c);
		}
		circuit_free(circuit);
	}
	assert_true(made > ROUNDS / 2);
}

static void
a_faster_line_never_lowers_it(void **state)
{
	uint64_t seed = 31415;
	struct circuit *circuit;
	struct drawn drawn;
	struct ceiling c, faster;
	struct awkward more;

	(void)state;
	for (int round = 0; round < ROUNDS; round++) {
		draw(&seed, LAYERS_DECLARED_MAX, &drawn);
		circuit = awkward_circuit(&drawn.layers, drawn.mtu_bytes,
		    &drawn.medium);
		draw_contract(&seed, circuit);
		if (ceiling_made(circuit, &c)) {
			more = drawn.medium;
			more.line_bps += 1 + next_random(&seed, 1000000);
			memcpy(&circuit->segments[0].medium.parameters, &more,
			    sizeof(more));
			assert_true(ceiling_made(circuit, &faster));
			assert_true(mixed_compare(faster.payload,
			    c.payload) >= 0);
		}
		circuit_free(circuit);
	}
}

/* Fixed cells pay for a tunnel that makes the packet a little shorter: there it
 * can rise, as it can fall with a larger MTU. */
static bool
pads_below_ip(const struct layer_stack *layers)
{
	for (size_t i = 0; i < layers_lowest_packet(layers); i++)
		if (layers->use[i].cost.align_bytes > 1)
			return true;
	return false;
}

static void
a_tag_label_or_tunnel_more_never_raises_it(void **state)
{
	uint64_t seed = 27182;
	struct random_stack more;
	struct layer_stack layers;
	struct circuit *circuit;
	struct ceiling c, longer;
	struct drawn drawn;
	int tried = 0;

	(void)state;
	for (int round = 0; round < 8 * ROUNDS; round++) {
		draw(&seed, 8, &drawn);
		if (pads_below_ip(&drawn.layers) ||
		    !random_insert(&seed, &drawn.written, &more) ||
		    !random_stack_read(&more, &layers) ||
		    pads_below_ip(&layers))
			continue;
		circuit = awkward_circuit(&drawn.layers, drawn.mtu_bytes,
		    &drawn.medium);
		if (ceiling_made(circuit, &c)) {
			circuit->segments[0].layers = layers;
			if (ceiling_made(circuit, &longer)) {
				tried++;
				if (mixed_compare(longer.payload,
				    c.payload) > 0)
					fail_msg("round %d raises it", round);
			}
		}
		circuit_free(circuit);
	}
	assert_true(tried > ROUNDS / 4);
}

static void
a_larger_mtu_lowers_it_on_cells_alone(void **state)
{
	uint64_t seed = 16180;
	struct circuit *circuit;
	struct drawn drawn;
	struct ceiling c, larger;
	int lower = 0;

	(void)state;
	for (int round = 0; round < ROUNDS; round++) {
		draw(&seed, LAYERS_DECLARED_MAX, &drawn);
		circuit = awkward_circuit(&drawn.layers, drawn.mtu_bytes,
		    &drawn.medium);
		if (ceiling_made(circuit, &c)) {
			circuit->segments[0].mtu_bytes++;
			assert_true(ceiling_made(circuit, &larger));
			if (mixed_compare(larger.payload, c.payload) < 0) {
				lower++;
				assert_true(pads_below_ip(&drawn.layers));
			}
		}
		circuit_free(circuit);
	}
	assert_true(lower > 0);
}

/* The same layers on several media, each with a contract of its own or none. */
static void
draw_segments(uint64_t *seed, struct circuit *circuit)
{
	struct segment *segment;
	struct drawn drawn;

	circuit->segments_count = SEGMENTS;
	for (size_t i = 1; i < SEGMENTS; i++) {
		segment = &circuit->segments[i];
		*segment = circuit->segments[0];
		draw(seed, 3, &drawn);
		memcpy(&segment->medium.parameters, &drawn.medium,
		    sizeof(drawn.medium));
		if (next_random(seed, 3) != 0)
			continue;
		segment->service.committed_bps[0] =
		    1 + next_random(seed, 2147483646);
		segment->service.counted_at = LEVEL_PACKET;
	}
}

static void
the_order_of_segments_does_not_matter(void **state)
{
	uint64_t seed = 14142;
	struct segment first;
	struct circuit *circuit;
	struct drawn drawn;
	struct ceiling c, turned;

	(void)state;
	for (int round = 0; round < ROUNDS / 2; round++) {
		draw(&seed, LAYERS_DECLARED_MAX, &drawn);
		circuit = awkward_circuit(&drawn.layers, drawn.mtu_bytes,
		    &drawn.medium);
		draw_segments(&seed, circuit);
		if (ceiling_made(circuit, &c)) {
			first = circuit->segments[0];
			memmove(&circuit->segments[0], &circuit->segments[1],
			    (SEGMENTS - 1) * sizeof(first));
			circuit->segments[SEGMENTS - 1] = first;
			assert_true(ceiling_made(circuit, &turned));
			assert_int_equal(mixed_compare(turned.payload,
			    c.payload), 0);
		}
		circuit_free(circuit);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(ladders_add_up_and_levels_descend),
		cmocka_unit_test(a_faster_line_never_lowers_it),
		cmocka_unit_test(a_tag_label_or_tunnel_more_never_raises_it),
		cmocka_unit_test(a_larger_mtu_lowers_it_on_cells_alone),
		cmocka_unit_test(the_order_of_segments_does_not_matter),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
