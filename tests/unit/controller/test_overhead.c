/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "ceiling/overhead.h"
#include "octets_subjects.h"
#include "stack_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

static void
assert_octets(struct fraction found, uint64_t expected, const char *source)
{
	if (fraction_compare(found, fraction_whole(expected)) != 0)
		fail_msg("found %g, expected %lu: %s", fraction_double(found),
		    (unsigned long)expected, source);
}

static void
compute(const char *layers, uint64_t mtu_bytes, struct overhead *out)
{
	struct layer_stack stack;
	struct error err;
	char why[1024];

	stack_accepted(layers, &stack);
	if (overhead_compute(&stack, mtu_bytes, false, out, &err) == -1)
		fail_msg("%s: %s", layers, error_text(&err, why, sizeof(why)));
}

static void
octets_at_each_level_equal_the_published_sums(void **state)
{
	const struct subjects *subjects = *state;
	struct overhead o;
	struct error err;
	char why[1024];
	size_t i;

	for (i = 0; i < subjects->count; i++) {
		const struct subject *subject = &subjects->subject[i];

		if (overhead_compute(&subject->stack, subject->v.mtu_bytes,
		    subject->v.upstream, &o, &err) == -1)
			fail_msg("%s: %s", subject->v.layers,
			    error_text(&err, why, sizeof(why)));
		if (!subject_agrees(subject, &o))
			fail_msg("%s: line %g, packet %g, payload %g: %s",
			    subject->v.layers,
			    fraction_double(o.octets[LEVEL_LINE]),
			    fraction_double(o.octets[LEVEL_PACKET]),
			    fraction_double(o.octets[LEVEL_PAYLOAD]),
			    subject->v.source);
	}
}

/* Exactly, whatever the coding; and each level lies within the one below. */
static void
parts_and_payload_add_up_to_the_line(void **state)
{
	const struct subjects *subjects = *state;
	struct fraction sum;
	struct overhead o;
	struct error err;
	size_t i, n;

	for (i = 0; i < subjects->count; i++) {
		const struct subject *subject = &subjects->subject[i];

		assert_int_equal(overhead_compute(&subject->stack,
		    subject->v.mtu_bytes, subject->v.upstream, &o, &err), 0);
		sum = o.octets[LEVEL_PAYLOAD];
		for (n = 0; n < o.parts_count; n++)
			sum = fraction_add(sum, o.parts[n].octets);
		if (fraction_compare(sum, o.octets[LEVEL_LINE]) != 0)
			fail_msg("%s", subject->v.layers);
		assert_true(fraction_compare(o.octets[LEVEL_PACKET],
		    o.octets[LEVEL_LINE]) <= 0);
		assert_true(fraction_compare(o.octets[LEVEL_SEGMENT],
		    o.octets[LEVEL_PACKET]) <= 0);
		assert_true(fraction_compare(o.octets[LEVEL_PAYLOAD],
		    o.octets[LEVEL_SEGMENT]) <= 0);
	}
}

/* 65536 octets make four records of 16384: RFC 8446 s5.1, OpenSSL 3.0. */
static void
a_write_of_four_records_costs_four_times_as_much(void **state)
{
	static const struct {
		const char *options;
		uint64_t added_bytes;
	} vectors[] = {
		{ "", 88 },
		{ "version: 1.2", 116 },
		{ "version: 1.2, cipher: chacha20-poly1305", 84 },
	};
	struct overhead o;
	char layers[128];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(layers, sizeof(layers), "ethernet, ipv4, tcp, "
		    "{ tls: { %s } }", vectors[i].options);
		compute(layers, 1500, &o);
		assert_int_equal(fraction_compare(o.octets[LEVEL_PAYLOAD],
		    fraction_make((uint128)1448 * 65536, 65536 +
		    vectors[i].added_bytes)), 0);
	}
}

static void
acknowledgements_cost_what_their_frames_do(void **state)
{
	struct overhead o;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(ack_vectors); i++) {
		compute(ack_vectors[i].layers, 1500, &o);
		assert_octets(o.ack_octets[LEVEL_LINE], ack_vectors[i].line,
		    ack_vectors[i].source);
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
	struct overhead o;
	size_t i;

	(void)state;
	compute("ethernet, vlan, ipv4, tcp", 1500, &o);
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

/* A medium without frames has none, and the encapsulations of ATM are none. */
static void
frames_are_those_of_the_lowest_layer_that_has_them(void **state)
{
	static const struct {
		const char *layers;
		bool has_frame;
	} vectors[] = {
		{ "ipv4, tcp", false }, { "aal5, ipv4, tcp", false },
		{ "aal5, llc-snap, ipv4, tcp", false },
		{ "aal5, llc-ppp, ppp, ipv4, tcp", false },
		{ "aal5, llc-ppp, ppp, mpls, ipv4, tcp", false },
		{ "aal5, llc-snap, ethernet, ipv4, tcp", true },
		{ "hdlc, ppp, ipv4, tcp", true },
		{ "frame-relay, ipv4, tcp", true },
		{ "wlan, ipv4, tcp", true }, { "lte, ipv4, tcp", false },
		{ "nr, ipv4, tcp", false },
		{ "ptm, ethernet, ipv4, tcp", true },
		{ "ipv4, udp, vxlan, ethernet, ipv4, tcp", false },
	};
	struct overhead o;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		compute(vectors[i].layers, 1500, &o);
		assert_int_equal(o.has_level[LEVEL_FRAME],
		    vectors[i].has_frame);
		assert_int_equal(o.has_level[LEVEL_FRAME_WITHOUT_FCS],
		    vectors[i].has_frame);
		assert_int_equal(o.octets[LEVEL_FRAME].num != 0,
		    vectors[i].has_frame);
	}
}

/* On cells a larger packet may cost a cell for little: RFC 2364, 1478 octets
 * fill 31 cells, 1500 leave the 32nd half empty. */
static void
on_cells_a_larger_packet_is_not_always_better(void **state)
{
	struct overhead small, large;

	(void)state;
	compute("aal5, ppp, ipv4, udp", 1478, &small);
	compute("aal5, ppp, ipv4, udp", 1500, &large);
	assert_true(fraction_compare(
	    fraction_divide(small.octets[LEVEL_PAYLOAD],
	    small.octets[LEVEL_LINE]),
	    fraction_divide(large.octets[LEVEL_PAYLOAD],
	    large.octets[LEVEL_LINE])) > 0);
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
	struct layer_stack stack;
	struct overhead o;
	struct error err;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		stack_accepted(vectors[i].layers, &stack);
		assert_int_equal(overhead_compute(&stack,
		    vectors[i].least_bytes, false, &o, &err), 0);
		assert_int_equal(overhead_compute(&stack,
		    vectors[i].least_bytes - 1, false, &o, &err), -1);
		assert_int_equal(err.kind, ERROR_INPUT);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(octets_at_each_level_equal_the_published_sums),
		cmocka_unit_test(parts_and_payload_add_up_to_the_line),
		cmocka_unit_test(
		    a_write_of_four_records_costs_four_times_as_much),
		cmocka_unit_test(acknowledgements_cost_what_their_frames_do),
		cmocka_unit_test(parts_lead_from_the_line_to_the_payload),
		cmocka_unit_test(
		    frames_are_those_of_the_lowest_layer_that_has_them),
		cmocka_unit_test(on_cells_a_larger_packet_is_not_always_better),
		cmocka_unit_test(layers_that_leave_no_room_are_refused),
	};

	return cmocka_run_group_tests(tests, subjects_set_up,
	    subjects_tear_down);
}
