/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "ceiling/capacity.h"
#include "ceiling/ceiling.h"
#include "declaration_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

/* Payload per octet of line; multiplied by the rate and rounded down it is the
 * ceiling.  The header sizes are those of the RFCs named. */
static const struct {
	const char *layers, *more;
	enum protocol protocol;
	uint64_t payload, line;
	uint64_t bps_100m, bps_1g, bps_10g;	/* 0: not printed there */
	const char *source;
} payload_vectors[] = {
#define V4 "RFC 791, 9293, 768 on IEEE 802.3"
#define V6 "RFC 8200, 9293, 768 on IEEE 802.3"
	{ "ethernet, ipv4, tcp", "", PROTOCOL_TCP, 1448, 1538, 94148244,
	  941482444, 9414824447, V4 },
	{ "ethernet, ipv4, { tcp: { timestamps: no } }", "", PROTOCOL_TCP,
	  1460, 1538, 94928478, 949284785, 9492847854,
	  "RFC 6349 s4.1.1: 949.2 Mbit/s of TCP on 1 Gbit/s" },
	{ "ethernet, ipv4, tcp", "", PROTOCOL_UDP, 1472, 1538, 95708712,
	  957087126, 9570871261, V4 },
	{ "ethernet, ipv6, tcp", "", PROTOCOL_TCP, 1428, 1538, 92847854,
	  928478543, 9284785435, V6 },
	{ "ethernet, ipv6, { tcp: { timestamps: no } }", "", PROTOCOL_TCP,
	  1440, 1538, 93628088, 936280884, 9362808842, V6 },
	{ "ethernet, ipv6, udp", "", PROTOCOL_UDP, 1452, 1538, 94408322,
	  944083224, 9440832249, V6 },
	{ "ethernet, vlan, ipv4, tcp", "", PROTOCOL_TCP, 1448, 1542, 93904020,
	  939040207, 9390402075, V4 ", 802.1Q" },
	{ "ethernet, vlan, ipv4, { tcp: { timestamps: no } }", "",
	  PROTOCOL_TCP, 1460, 1542, 94682230, 946822308, 9468223086,
	  V4 ", 802.1Q" },
	{ "ethernet, vlan, ipv4, udp", "", PROTOCOL_UDP, 1472, 1542, 95460440,
	  954604409, 9546044098, V4 ", 802.1Q" },
	{ "ethernet, vlan, ipv6, tcp", "", PROTOCOL_TCP, 1428, 1542, 92607003,
	  926070038, 9260700389, V6 ", 802.1Q" },
	{ "ethernet, vlan, ipv6, udp", "", PROTOCOL_UDP, 1452, 1542, 94163424,
	  941634241, 9416342412, V6 ", 802.1Q" },
	{ "ethernet, vlan, vlan, ipv4, tcp", "", PROTOCOL_TCP, 1448, 1546,
	  93661060, 936610608, 9366106080, V4 ", 802.1ad" },
	{ "ethernet, vlan, vlan, ipv4, udp", "", PROTOCOL_UDP, 1472, 1546,
	  95213454, 952134540, 9521345407, V4 ", 802.1ad" },
	{ "ethernet, ipv4, tcp", "mtu: 9000 B", PROTOCOL_TCP, 8948, 9038,
	  99004204, 990042044, 9900420447, V4 ", jumbo" },
	{ "ethernet, ipv4, { tcp: { timestamps: no } }", "mtu: 9000 B",
	  PROTOCOL_TCP, 8960, 9038, 99136977, 991369772, 9913697720,
	  V4 ", jumbo" },
	{ "ethernet, ipv4, udp", "mtu: 9000 B", PROTOCOL_UDP, 8972, 9038,
	  99269749, 992697499, 9926974994, V4 ", jumbo" },
	{ "ethernet, ipv6, tcp", "mtu: 9000 B", PROTOCOL_TCP, 8928, 9038,
	  98782916, 987829165, 9878291657, V6 ", jumbo" },
	{ "ethernet, ipv6, udp", "mtu: 9000 B", PROTOCOL_UDP, 8952, 9038,
	  99048462, 990484620, 9904846204, V6 ", jumbo" },
#undef V4
#undef V6
};

static uint64_t
payload_at(const char *rate, size_t i, struct ceiling *ceiling)
{
	struct circuit *circuit = circuit_of(rate, payload_vectors[i].layers,
	    payload_vectors[i].more);

	ceiling_of(circuit, payload_vectors[i].protocol, ceiling);
	circuit_free(circuit);
	return ceiling->rate_bps[LEVEL_PAYLOAD];
}

static void
payload_rates_equal_the_known_figures(void **state)
{
	struct ceiling c;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(payload_vectors); i++) {
		assert_int_equal(payload_at("100 Mbit/s", i, &c),
		    payload_vectors[i].bps_100m);
		assert_int_equal(payload_at("1 Gbit/s", i, &c),
		    payload_vectors[i].bps_1g);
		assert_int_equal(payload_at("10 Gbit/s", i, &c),
		    payload_vectors[i].bps_10g);
		assert_int_equal(c.level_bytes_num[LEVEL_LINE],
		    payload_vectors[i].line * c.level_bytes_den);
		assert_int_equal(c.level_bytes_num[LEVEL_PAYLOAD],
		    payload_vectors[i].payload * c.level_bytes_den);
	}
}

/* Frames of this length, FCS included, in a second on a saturated line. */
static const struct {
	uint64_t frame_bytes, per_second[4];	/* 10M, 100M, 1G, 10G */
	const char *source;
} frame_rate_vectors[] = {
#define BOTH "RFC 2544 App. B, RFC 5180 A.1"
	{ 64, { 14880, 148809, 1488095, 14880952 }, BOTH },
	{ 128, { 8445, 84459, 844594, 8445945 }, BOTH },
	{ 256, { 4528, 45289, 452898, 4528985 }, BOTH },
	{ 512, { 2349, 23496, 234962, 2349624 }, BOTH },
	{ 768, { 1586, 0, 0, 0 }, "RFC 2544 App. B" },
	{ 1024, { 1197, 11973, 119731, 1197318 }, BOTH },
	{ 1280, { 961, 9615, 96153, 961538 }, BOTH },
	{ 1518, { 812, 8127, 81274, 812743 }, BOTH },
	{ 1522, { 810, 8106, 81063, 810635 }, "RFC 5180 A.1" },
	{ 2048, { 604, 6044, 60444, 604448 }, "RFC 5180 A.1" },
	{ 4096, { 303, 3036, 30369, 303692 }, "RFC 5180 A.1 by its own formula;"
	  " printed there as 30,396 and 303,691" },
	{ 8192, { 152, 1522, 15221, 152216 }, "RFC 5180 A.1" },
	{ 9216, { 135, 1353, 13533, 135339 }, "RFC 5180 A.1 by its own formula;"
	  " printed there as 13,534" },
#undef BOTH
};

static void
frame_rates_equal_rfc_2544_and_rfc_5180(void **state)
{
	static const char *const rates[] = { "10 Mbit/s", "100 Mbit/s",
		"1 Gbit/s", "10 Gbit/s" };
	struct circuit *circuit;
	struct path_segment segment;
	struct overhead o;
	struct error err;
	size_t i, n;

	(void)state;
	for (n = 0; n < COUNT(rates); n++) {
		circuit = circuit_of(rates[n], "ethernet, ipv4, udp", "");
		segment_of(circuit, DIRECTION_B_TO_A, &segment);
		for (i = 0; i < COUNT(frame_rate_vectors); i++) {
			if (frame_rate_vectors[i].per_second[n] == 0)
				continue;
			assert_int_equal(overhead_compute(
			    &circuit->segments[0].layers,
			    frame_rate_vectors[i].frame_bytes - 18, false,
			    &o, &err), 0);
			assert_int_equal(fraction_floor(fraction_divide(
			    fraction_divide(path_offered_bps(&segment),
			    fraction_whole(8)),
			    o.octets[LEVEL_LINE])),
			    frame_rate_vectors[i].per_second[n]);
		}
		circuit_free(circuit);
	}
}

/* Rates at the levels of a saturated 1 Gbit/s, by the frame's length: RFC 5180
 * A.1's formula, the IP packet being 18 octets shorter than the frame. */
static void
levels_stand_in_the_ratio_of_their_octets(void **state)
{
	static const struct {
		uint64_t mtu_bytes, frame_bps, packet_bps;
	} vectors[] = {
		{ 110, 864864864, 743243243 },	/* 128/148, 110/148 */
		{ 494, 962406015, 928571428 },	/* 512/532, 494/532 */
		{ 1500, 986996098, 975292587 },	/* 1518/1538, 1500/1538 */
		{ 9000, 997787121, 995795529 },	/* 9018/9038, 9000/9038 */
	};
	struct circuit *circuit;
	struct ceiling c;
	char more[32];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(more, sizeof(more), "mtu: %lu B",
		    (unsigned long)vectors[i].mtu_bytes);
		circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp", more);
		ceiling_of(circuit, PROTOCOL_TCP, &c);
		assert_int_equal(c.rate_bps[LEVEL_LINE], 1000000000);
		assert_int_equal(c.rate_bps[LEVEL_FRAME],
		    vectors[i].frame_bps);
		assert_int_equal(c.rate_bps[LEVEL_PACKET],
		    vectors[i].packet_bps);
		assert_int_equal(c.packet_bytes, vectors[i].mtu_bytes);
		circuit_free(circuit);
	}
}

static void
tls_lowers_the_ceiling_by_its_record_ratio(void **state)
{
	static const struct {
		const char *tls;
		uint64_t payload_bps;	/* floor(1e9 * 1448/1538 * P/(P+X)) */
		const char *source;
	} vectors[] = {
		{ "tls", 940219942, "RFC 8446 s5.2: 16384/16406" },
		{ "{ tls: { version: 1.2 } }", 939818946,
		  "RFC 5288: 16384/16413" },
		{ "{ tls: { record-bytes: 4096 B } }", 936452669,
		  "RFC 8446 s5.2: 4096/4118" },
		{ "{ tls: { record-bytes: 1400 B } }", 926916612,
		  "RFC 8446 s5.2: 1400/1422" },
	};
	struct circuit *circuit;
	struct ceiling c;
	char layers[128];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(layers, sizeof(layers), "ethernet, ipv4, tcp, "
		    "%s", vectors[i].tls);
		circuit = circuit_of("1 Gbit/s", layers, "");
		assert_int_equal(circuit_default_protocol(circuit),
		    PROTOCOL_TCP_TLS);
		ceiling_of(circuit, PROTOCOL_TCP_TLS, &c);
		assert_int_equal(c.rate_bps[LEVEL_PAYLOAD],
		    vectors[i].payload_bps);
		assert_int_equal(c.rate_bps[LEVEL_SEGMENT], 962288686);
		circuit_free(circuit);
	}
}

/* 100 Mbit/s, counted at one level or another. */
static void
a_contract_binds_at_the_level_where_it_counts(void **state)
{
	static const struct {
		const char *layers, *counted_at;
		enum protocol protocol;
		uint64_t payload_bps, line_bps;
		const char *source;
	} vectors[] = {
		{ "ethernet, ipv4, tcp", "line", PROTOCOL_TCP, 94148244,
		  100000000, "1448/1538" },
		{ "ethernet, ipv4, tcp", "line", PROTOCOL_UDP, 95708712,
		  100000000, "1472/1538" },
		{ "ethernet, ipv4, tcp", "frame", PROTOCOL_TCP, 95388669,
		  101317523, "MEF frame, from memory: 1448/1518, 1538/1518" },
		{ "ethernet, ipv4, tcp", "frame", PROTOCOL_UDP, 96969696,
		  101317523, "1472/1518" },
		{ "ethernet, vlan, ipv4, tcp", "frame", PROTOCOL_TCP, 95137976,
		  101314060, "1448/1522, 1542/1522" },
		{ "ethernet, vlan, ipv4, tcp", "frame", PROTOCOL_UDP, 96714848,
		  101314060, "1472/1522" },
		{ "ethernet, ipv4, tcp", "packet", PROTOCOL_TCP, 96533333,
		  102533333, "RFC 2697 s2: IP octets, 1448/1500, 1538/1500" },
		{ "ethernet, ipv4, tcp", "packet", PROTOCOL_UDP, 98133333,
		  102533333, "RFC 2697 s2: 1472/1500" },
		{ "ethernet, ipv4, tcp", "frame-without-fcs", PROTOCOL_TCP,
		  95640686, 101585204, "Linux counts 1514: 1448/1514" },
		{ "ethernet, ipv4, tcp", "segment", PROTOCOL_TCP, 97837837,
		  103918918, "1448/1480, 1538/1480" },
		{ "ethernet, ipv4, tcp", "payload", PROTOCOL_TCP, 100000000,
		  106215469, "1538/1448" },
	};
	struct circuit *circuit;
	struct ceiling c;
	char more[128];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(more, sizeof(more), "service: { committed: "
		    "100 Mbit/s, counted-at: %s, burst: 64 kB }",
		    vectors[i].counted_at);
		circuit = circuit_of("1 Gbit/s", vectors[i].layers, more);
		ceiling_of(circuit, vectors[i].protocol, &c);
		assert_int_equal(c.rate_bps[LEVEL_PAYLOAD],
		    vectors[i].payload_bps);
		assert_int_equal(c.rate_bps[LEVEL_LINE], vectors[i].line_bps);
		assert_int_equal(c.unused_bps, 1000000000 -
		    vectors[i].line_bps);
		assert_string_equal(level_name((enum layer_level)
		    c.binding_counted_at), vectors[i].counted_at);
		assert_true(c.binding_counted_ratio * 100 >= 99.999999 *
		    100e6 / (double)vectors[i].payload_bps &&
		    c.binding_counted_ratio * 100 <= 100.000001 *
		    100e6 / (double)vectors[i].payload_bps);
		assert_int_equal(c.burst_bytes, 64000);
		assert_int_equal(c.bounds_count, 2);
		assert_false(c.bounds[0].binding);
		assert_true(c.bounds[1].binding);
		assert_int_equal(c.bounds[1].class, BOUND_CONTRACT);
		circuit_free(circuit);
	}
}

/* 64-octet frames at 100 Mbit/s of frames ask for 131.25 Mbit/s of line. */
static void
a_contract_that_the_line_cannot_carry_does_not_bind(void **state)
{
	struct circuit *circuit = circuit_of("100 Mbit/s",
	    "ethernet, ipv4, udp", "mtu: 68 B\n"
	    "service: { committed: 100 Mbit/s, counted-at: frame }");
	struct ceiling c;

	(void)state;
	ceiling_of(circuit, PROTOCOL_UDP, &c);
	assert_true(c.bounds[0].binding);
	assert_int_equal(c.bounds[0].class, BOUND_MEDIUM);
	assert_int_equal(c.unused_bps, 0);
	assert_int_equal(c.rate_bps[LEVEL_LINE], 100000000);
	assert_int_equal(c.binding_counted_at, LEVEL_PAYLOAD);
	circuit_free(circuit);
}

static void
committed_goes_before_peak_and_services_add_up(void **state)
{
	static const struct {
		const char *more;
		uint64_t committed_bps;		/* counted at payload */
	} vectors[] = {
		{ "service: { committed: 10 Mbit/s, peak: 20 Mbit/s, "
		  "counted-at: payload }", 10000000 },
		{ "service: { peak: 20 Mbit/s, counted-at: payload }",
		  20000000 },
		{ "services: [ { committed: 10 Mbit/s, counted-at: payload }, "
		  "{ committed: 5 Mbit/s, counted-at: payload } ]", 15000000 },
		{ "services: [ { committed: 10 Mbit/s, counted-at: payload }, "
		  "{ peak: 7 Mbit/s, counted-at: payload } ]", 17000000 },
	};
	struct circuit *circuit;
	struct ceiling c;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
		    vectors[i].more);
		ceiling_of(circuit, PROTOCOL_TCP, &c);
		assert_int_equal(c.rate_bps[LEVEL_PAYLOAD],
		    vectors[i].committed_bps);
		circuit_free(circuit);
	}
}

/* A class without a rate may take what the line leaves. */
static void
one_service_without_a_rate_leaves_the_line_to_bind(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    "services: [ { name: voice, committed: 10 Mbit/s }, "
	    "{ name: rest } ]");
	struct ceiling c;

	(void)state;
	ceiling_of(circuit, PROTOCOL_TCP, &c);
	assert_int_equal(c.rate_bps[LEVEL_PAYLOAD], 941482444);
	assert_int_equal(c.bounds_count, 1);
	circuit_free(circuit);
}

static void
each_direction_has_its_own_contract(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    "service: { committed: { a-to-b: 500 Mbit/s, b-to-a: 50 Mbit/s }, "
	    "counted-at: payload }");
	struct ceiling c;
	struct error err;

	(void)state;
	assert_int_equal(ceiling_compute(circuit, DIRECTION_A_TO_B,
	    PROTOCOL_TCP, &c, &err), 0);
	assert_int_equal(c.rate_bps[LEVEL_PAYLOAD], 500000000);
	assert_int_equal(ceiling_compute(circuit, DIRECTION_B_TO_A,
	    PROTOCOL_TCP, &c, &err), 0);
	assert_int_equal(c.rate_bps[LEVEL_PAYLOAD], 50000000);
	circuit_free(circuit);
}

#define ACCESS "{ name: access, medium: { kind: ethernet, " \
	"line-rate: 1 Gbit/s } }"
#define BACKBONE "{ name: backbone, medium: { kind: ethernet, " \
	"line-rate: 2 Gbit/s }, layers: [ ethernet, vlan, vlan, ipv4, tcp ], " \
	"mtu: 1400 B }"

/* At the smaller MTU: 1348 of payload in 1438 of line. */
static void
the_narrow_segment_counts_at_the_smallest_mtu(void **state)
{
	static const char *const orders[] = {
		"[ " ACCESS ", " BACKBONE " ]", "[ " BACKBONE ", " ACCESS " ]",
	};
	struct circuit *circuit;
	struct ceiling c;
	char text[1024];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(orders); i++) {
		(void)snprintf(text, sizeof(text), "circuit: TWO\nlayers: "
		    "[ ethernet, ipv4, tcp ]\nsegments: %s\n", orders[i]);
		circuit = circuit_accepted(text);
		ceiling_of(circuit, PROTOCOL_TCP, &c);
		assert_int_equal(c.rate_bps[LEVEL_PAYLOAD], 937413073);
		assert_int_equal(c.line_rate_bps, 1000000000);
		assert_string_equal(circuit->segments[c.narrow].name,
		    "access");
		assert_int_equal(c.packet_bytes, 1400);
		circuit_free(circuit);
	}
}

static void
a_reference_has_octets_but_no_rates(void **state)
{
	struct circuit *circuit = circuit_accepted("circuit: HOST\n"
	    "medium: host\nlayers: [ ipv4, tcp ]\n");
	struct ceiling c;

	(void)state;
	assert_true(circuit_is_reference(circuit));
	ceiling_of(circuit, PROTOCOL_TCP, &c);
	assert_true(c.reference);
	assert_int_equal(c.rate_bps[LEVEL_PAYLOAD], 0);
	assert_int_equal(c.bounds_count, 0);
	assert_int_equal(c.packet_bytes, 65536);
	assert_false(c.has_level[LEVEL_FRAME]);
	assert_int_equal(c.accuracy, ACCURACY_REFERENCE);
	circuit_free(circuit);
}

static void
layers_that_do_not_fit_are_refused_with_the_circuit(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s",
	    "ethernet, { ipv4: { options-bytes: 40 B } }, udp", "mtu: 72 B");
	struct ceiling c;
	struct error err;

	(void)state;
	ceiling_of(circuit, PROTOCOL_UDP, &c);
	assert_int_equal(c.packet_bytes, 72);
	assert_int_equal(ceiling_compute(circuit, DIRECTION_A_TO_B,
	    PROTOCOL_TCP, &c, &err), -1);
	assert_int_equal(err.kind, ERROR_INPUT);
	assert_non_null(strstr(err.where, "TEST"));
	circuit_free(circuit);
}

static void
conditions_never_lower_the_ceiling(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    "");
	struct ceiling c;
	struct error err;
	size_t n;

	(void)state;
	ceiling_of(circuit, PROTOCOL_TCP, &c);
	assert_int_equal(ceiling_add_condition(&c, "window", 300000000, "x",
	    &err), 0);
	assert_int_equal(ceiling_add_condition(&c, "host", 200000000, "x",
	    &err), 0);
	assert_int_equal(ceiling_add_condition(&c, "loss", 250000000, "x",
	    &err), 0);
	assert_int_equal(c.rate_bps[LEVEL_PAYLOAD], 941482444);
	assert_true(c.bounds[0].binding);
	assert_false(c.bounds[1].binding);
	assert_true(c.bounds[2].binding);
	assert_false(c.bounds[3].binding);
	for (n = c.bounds_count; n < BOUNDS_MAX; n++)
		assert_int_equal(ceiling_add_condition(&c, "x", 1, "x", &err),
		    0);
	assert_int_equal(ceiling_add_condition(&c, "x", 1, "x", &err), -1);
	circuit_free(circuit);
}

static void
the_medium_says_its_clock_and_accuracy(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    "");
	struct ceiling c;

	(void)state;
	ceiling_of(circuit, PROTOCOL_TCP, &c);
	assert_int_equal(c.tolerance_ppm, 100);		/* RFC 5180 A.1 */
	assert_int_equal(c.accuracy, ACCURACY_EXACT);
	circuit_free(circuit);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(payload_rates_equal_the_known_figures),
		cmocka_unit_test(frame_rates_equal_rfc_2544_and_rfc_5180),
		cmocka_unit_test(levels_stand_in_the_ratio_of_their_octets),
		cmocka_unit_test(tls_lowers_the_ceiling_by_its_record_ratio),
		cmocka_unit_test(a_contract_binds_at_the_level_where_it_counts),
		cmocka_unit_test(
		    a_contract_that_the_line_cannot_carry_does_not_bind),
		cmocka_unit_test(
		    committed_goes_before_peak_and_services_add_up),
		cmocka_unit_test(
		    one_service_without_a_rate_leaves_the_line_to_bind),
		cmocka_unit_test(each_direction_has_its_own_contract),
		cmocka_unit_test(the_narrow_segment_counts_at_the_smallest_mtu),
		cmocka_unit_test(a_reference_has_octets_but_no_rates),
		cmocka_unit_test(
		    layers_that_do_not_fit_are_refused_with_the_circuit),
		cmocka_unit_test(conditions_never_lower_the_ceiling),
		cmocka_unit_test(the_medium_says_its_clock_and_accuracy),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
