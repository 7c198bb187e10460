/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

/* Nothing that can be declared overflows 128 bits: every stack, rates that have
 * no factor in common, the largest of everything. */
#include "ceiling/condition.h"
#include "ceiling/packet_rate.h"
#include "ladder_checks.h"
#include "random_stack.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define ROUNDS 4000

/* The largest primes below the limits (Miller and Rabin's test with the first
 * 13 primes as bases, which is a proof below 2^81), and small ones. */
static const uint64_t primes[] = { 3, 66, 127, 16381, 99991, 1000003,
	2147483647, 68719476731, 999999999989, 1599999999979 };

static uint64_t
large_random(uint64_t *seed, uint64_t below)
{
	return (next_random(seed, UINT64_C(1) << 30) << 31 |
	    next_random(seed, UINT64_C(1) << 30)) % below;
}

static uint64_t
any_rate_bps(uint64_t *seed, uint64_t most_bps)
{
	uint64_t bps = next_random(seed, 2) == 0 ?
	    primes[next_random(seed, COUNT(primes))] :
	    (1 + large_random(seed, RATE_MAX_BPS)) >> next_random(seed, 40);

	return bps == 0 || bps > most_bps ? most_bps : bps;
}

static void
any_medium(uint64_t *seed, struct awkward *out)
{
	static const uint64_t users[] = { 1, 1, 2, 32, 99991, 100000 };
	uint64_t left_bps, i;

	memset(out, 0, sizeof(*out));
	out->den = next_random(seed, 3) == 0 ? 66 : 1;
	out->line_bps = left_bps = any_rate_bps(seed, RATE_MAX_BPS);
	out->steps = next_random(seed, 4);
	for (i = 0; i < out->steps; i++)
		out->left_bps[i] = left_bps = any_rate_bps(seed, left_bps);
	out->contention = users[next_random(seed, COUNT(users))];
	out->duplex = next_random(seed, 2);
	if (next_random(seed, 4) == 0)
		out->channel_bps = any_rate_bps(seed, RATE_MAX_BPS);
	out->counts_acks = next_random(seed, 4) == 0;
}

static void
any_contract(uint64_t *seed, struct circuit *circuit)
{
	const struct layer_stack *layers = &circuit->segments[0].layers;
	struct service *service = &circuit->services[0];
	uint64_t i, d;

	if (next_random(seed, 4) == 0)
		circuit->segments[0].device.packets_per_s =
		    1 + large_random(seed, UINT64_C(10000000000));
	circuit->services_count = next_random(seed, 3) * 8;
	for (i = 0; i < circuit->services_count; i++, service++) {
		for (d = 0; d < DIRECTIONS_SINGLE; d++) {
			service->committed_bps[d] =
			    any_rate_bps(seed, RATE_MAX_BPS);
			service->excess_bps[d] = next_random(seed, 2) == 0 ?
			    FIELD_UNSET : any_rate_bps(seed, RATE_MAX_BPS);
			service->peak_bps[d] = FIELD_UNSET;
			service->burst_bytes[d] = UINT64_C(1) << 40;
		}
		service->counted_at = i > 0 ? circuit->services[0].counted_at :
		    next_random(seed, LEVELS);
		if (!layers_have_level(layers,
		    (enum layer_level)service->counted_at))
			service->counted_at = LEVEL_LINE;
	}
}

static void
any_load(uint64_t *seed, struct load *out)
{
	static const uint64_t thousandths[] = { 0, 1, 7, 997, 1000, 2000, 1414,
		45511, 999983, 1000000 };
	uint64_t n = thousandths[next_random(seed, COUNT(thousandths))];
	uint64_t other = thousandths[next_random(seed, COUNT(thousandths))];

	memset(out, 0, sizeof(*out));
	out->declared = true;
	out->direction = (enum direction)next_random(seed, DIRECTIONS_SINGLE);
	out->both = next_random(seed, 2) == 0;
	out->segments_per_ack = fraction_make(n, 1000);
	/* Searched for in one of 40: that takes long. */
	if (out->both)
		out->other_packets = fraction_make(other == 0 &&
		    next_random(seed, 4) != 0 ? 1000003 / 3 : other, 1000);
}

/* Codings that media have, put on whatever is lowest. */
static void
any_coding(uint64_t *seed, struct layer_stack *stack)
{
	static const struct {
		uint64_t num, den;
	} codings[] = { { 65, 64 }, { 63, 62 }, { 129, 128 }, { 255, 239 },
		{ 248, 216 }, { 53, 48 } };
	uint64_t i = next_random(seed, 2 * COUNT(codings));

	if (i >= COUNT(codings))
		return;
	stack->use[0].cost.num = codings[i].num;
	stack->use[0].cost.den = codings[i].den;
}

static void
any_conditions(uint64_t *seed, struct circuit *circuit)
{
	struct conditions *conditions = &circuit->conditions;

	conditions->round_trip_ns = 1000 + large_random(seed, 60000000000);
	conditions->test_length_ns = 1 + large_random(seed, 86400000000000);
	conditions->transfer_bytes = 1 + large_random(seed, UINT64_C(1) << 50);
	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		conditions->loss_ratio[d] =
		    1 / (1.0 + (double)next_random(seed, 100000));
		conditions->window_bytes[d] = 1 + large_random(seed,
		    UINT64_C(1) << 30);
		conditions->host_bps[d] = any_rate_bps(seed, RATE_MAX_BPS);
	}
}

/* What is worked out beside a ceiling. */
static void
check_beside(const struct circuit *circuit, const struct load *load,
    struct ceiling *c)
{
	struct condition_figures figures;
	struct packet_rate rate;
	struct error err;

	assert_int_equal(condition_add_declared(circuit, load, c, &err), 0);
	condition_figures(circuit, c, &figures);
	assert_true(figures.loss_ratio >= 0 && figures.loss_ratio <= 1);
	if (packet_rate_compute(circuit, load->direction, c->packet_bytes,
	    &rate, &err) == 0)
		assert_true(rate.rate_bps[LEVEL_PACKET] <=
		    rate.rate_bps[LEVEL_LINE]);
}

/* What every ceiling holds, for a circuit of which anything may be refused. */
static bool
one_round(uint64_t *seed)
{
	static const uint64_t mtus[] = { 68, 576, 1280, 1492, 1500, 4470, 9000,
		65521, 65536 };
	struct random_stack drawn;
	struct layer_stack layers;
	struct awkward medium;
	struct circuit *circuit;
	struct ceiling c;
	struct error err;
	struct load load;
	bool made;

	random_layers(seed, LAYERS_DECLARED_MAX, &drawn, &layers);
	any_coding(seed, &layers);
	any_medium(seed, &medium);
	any_load(seed, &load);
	circuit = awkward_circuit(&layers, mtus[next_random(seed,
	    COUNT(mtus))], &medium);
	any_contract(seed, circuit);
	any_conditions(seed, circuit);
	made = ceiling_of_load(circuit, &load, &c, &err) == 0;
	if (made) {
		assert_columns_add_up(&c);
		assert_levels_descend(&c);
		check_beside(circuit, &load, &c);
	} else {
		assert_int_equal(err.kind, ERROR_INPUT);
	}
	circuit_free(circuit);
	return made;
}

static void
no_declaration_overflows_128_bits(void **state)
{
	uint64_t seed = 20240917;
	unsigned made = 0;

	(void)state;
	for (int round = 0; round < ROUNDS; round++)
		made += one_round(&seed);
	assert_true(made > ROUNDS / 3);	/* the others were refused */
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(no_declaration_overflows_128_bits),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
