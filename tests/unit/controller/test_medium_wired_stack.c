/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Whole stacks on wired media against published and hand-made figures. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "declaration_text.h"
#include "medium_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define DOWN DIRECTION_A_TO_B		/* the subscriber is end b */
#define UP DIRECTION_B_TO_A

static struct circuit *
circuit_on(const char *medium, const char *layers, unsigned mtu)
{
	char text[1024], size[32] = "";

	if (mtu != 0)
		(void)snprintf(size, sizeof(size), "mtu: %u B\n", mtu);
	(void)snprintf(text, sizeof(text), "circuit: TEST\nmedium: { kind: "
	    "%s }\nlayers: [ %s ]\n%s", medium, layers, size);
	return circuit_accepted(text);
}

/* Mbit/s as printed; 0: not printed. */
struct printed {
	const char *medium, *layers;
	unsigned mtu;			/* 0: by default */
	double frame, packet, tcp, udp;
	double digit;			/* of the last place */
	const char *source;
};

static double
ceiling_mbit_per_s(const struct circuit *circuit, enum protocol protocol,
    enum layer_level level)
{
	struct ceiling ceiling;

	ceiling_of(circuit, protocol, &ceiling);
	return (double)ceiling.rate_bps[level] / 1e6;
}

static void
assert_rows(const struct printed rows[], size_t count)
{
	size_t i, n;

	for (i = 0; i < count; i++) {
		const struct printed *row = &rows[i];
		struct circuit *circuit = circuit_on(row->medium, row->layers,
		    row->mtu);
		const struct {
			enum protocol protocol;
			enum layer_level level;
			double mbit_per_s;
		} columns[] = {
			{ PROTOCOL_TCP, LEVEL_FRAME, row->frame },
			{ PROTOCOL_TCP, LEVEL_PACKET, row->packet },
			{ PROTOCOL_TCP, LEVEL_PAYLOAD, row->tcp },
			{ PROTOCOL_UDP, LEVEL_PAYLOAD, row->udp },
		};

		/* rates are rounded down to 1 bit/s */
		for (n = 0; n < COUNT(columns); n++)
			if (columns[n].mbit_per_s > 0)
				assert_printed(row->layers, ceiling_mbit_per_s(
				    circuit, columns[n].protocol,
				    columns[n].level), columns[n].mbit_per_s,
				    row->digit + 2e-6, row->source);
		circuit_free(circuit);
	}
}

#define PPP16 "{ hdlc: { fcs-bytes: 2 B, stuffing: none } }, ppp, ipv4, tcp"
#define PPP32 "{ hdlc: { fcs-bytes: 4 B, stuffing: none } }, ppp, ipv4, tcp"
/* RFC 6349 counts two flags and no timestamps */
#define PPP_RFC6349 "{ hdlc: { fcs-bytes: 2 B, flags: 2, stuffing: none } }, " \
	"ppp, ipv4, { tcp: { timestamps: no } }"

static void
ppp_on_synchronous_lines(void **state)
{
	static const struct printed rows[] = {
		{ "pdh, signal: ds3", PPP_RFC6349, 1500, 0, 0, 42.8, 0, 0.1,
		  "P1; RFC 6349 s4.1.1" },
		{ "pdh, signal: t1", PPP_RFC6349, 1500, 0, 0, 1.487, 0, 0.001,
		  "P2" },
		{ "sdh, signal: sts-3c", PPP32, 1500, 0, 148.867, 143.706,
		  146.088, 0.001, "P5" },
		{ "sdh, signal: stm-1", "{ hdlc: { fcs-bytes: 4 B, stuffing: "
		  "octet } }, ppp, ipv4, tcp", 1500, 0, 147.71, 0, 0, 0.01,
		  "P5, average stuffing" },
		{ "sdh, signal: stm-1", "aal5, llc-snap, ipv4, tcp", 1500, 0,
		  132.453, 127.861, 0, 0.001, "P6" },
		{ "pdh, signal: e1", PPP16, 1500, 0, 1.9748, 1.9063, 0,
		  0.0001, "P7" },
	};

	(void)state;
	assert_rows(rows, COUNT(rows));
}

/* Rounded down, as published. */
static void
frames_a_second_on_synchronous_lines(void **state)
{
	static const struct {
		const char *medium, *layers;
		unsigned mtu;
		double per_s;
		const char *source;
	} rows[] = {
		{ "pdh, signal: ds3", PPP_RFC6349, 1500, 3664,
		  "P1: RFC 6349 s4.1.1" },
		{ "pdh, signal: t1", PPP_RFC6349, 1500, 127, "P2: 127.32" },
		/* RFC 5180 A.2: frame of X = packet + 4 + FCS 4 */
		{ "sdh, signal: sts-3c", PPP32, 256 - 8, 72840, "P3" },
		{ "sdh, signal: sts-3c", PPP32, 1024 - 8, 18263, "P3" },
		{ "sdh, signal: stm-1", PPP32, 4096 - 8, 4569, "P3" },
		{ "sdh, signal: sts-192c", PPP32, 1024 - 8, 1168858, "P4" },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		struct circuit *circuit = circuit_on(rows[i].medium,
		    rows[i].layers, rows[i].mtu);
		struct path_segment segment;

		segment_of(circuit, DOWN, &segment);
		if (fraction_floor(fraction_divide(path_offered_bps(&segment),
		    fraction_multiply(fraction_whole(8),
		    path_octets_on_line(&segment, LEVEL_LINE)))) !=
		    (uint64_t)rows[i].per_s)
			fail_msg("%s", rows[i].source);
		circuit_free(circuit);
	}
}

#define BRIDGED "ethernet, ipv4, tcp"
#define PPPOE "ethernet, pppoe, ppp, ipv4, tcp"

/* Cells of one packet; 53 octets each: confirmed with the kernel's arithmetic
 * (tc stab linklayer atm). */
static void
packets_take_whole_cells(void **state)
{
	static const struct {
		const char *layers;
		unsigned packet_bytes, cells;
		const char *source;
	} rows[] = {
		{ "aal5, ipv4, tcp", 1500, 32, "C1, e + 8 = 8" },
		{ "aal5, llc-snap, ipv4, tcp", 1500, 32, "C1, 16" },
		{ "aal5, ppp, ipv4, tcp", 1500, 32, "C1, 10" },
		{ "aal5, llc-ppp, ppp, ipv4, tcp", 1500, 32, "C1, 14" },
		{ "aal5, " BRIDGED, 1500, 32, "C1, 24" },
		{ "aal5, llc-snap, " BRIDGED, 1500, 32, "C1, 32" },
		{ "aal5, llc-snap, " PPPOE, 1492, 32, "C2, 40" },
		{ "aal5, llc-snap, " PPPOE, 1500, 33, "C3" },
		{ "aal5, ppp, ipv4, tcp", 40, 2, "C4" },
		{ "aal5, ppp, ipv4, tcp", 1478, 31, "C5" },
		{ "aal5, ppp, ipv4, tcp", 1479, 32, "C5" },
		{ "aal5, " BRIDGED, 1464, 31, "C5, e + 8 = 24" },
		{ "aal5, " BRIDGED, 1465, 32, "C5, e + 8 = 24" },
		{ "aal5, llc-snap, " BRIDGED, 1456, 31, "C5, e + 8 = 32" },
		{ "aal5, " PPPOE, 1456, 31, "C5, e + 8 = 32" },
		{ "aal5, llc-snap, " PPPOE, 1448, 31, "C5, e + 8 = 40" },
		{ "aal5, llc-snap, " PPPOE, 1449, 32, "C5, e + 8 = 40" },
		/* 100 octets in all with nothing around: 92 and the trailer */
		{ "aal5, ipv4, tcp", 92, 3, "C6: tc-stab manual" },
	};
	struct fraction octets[LEVELS];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		struct circuit *circuit = circuit_on("sdh, signal: stm-1",
		    rows[i].layers, 0);

		overhead_of_packet(&circuit->segments[0].layers,
		    rows[i].packet_bytes, false, octets);
		assert_int_equal(octets[LEVEL_LINE].den, 1);
		if (octets[LEVEL_LINE].num != 53 * rows[i].cells)
			fail_msg("%s", rows[i].source);
		circuit_free(circuit);
	}
}

/* Shares of the cell rate: IP and TCP with timestamps. */
static void
cells_leave_the_expected_share(void **state)
{
	static const struct {
		const char *layers;
		unsigned mtu;
		double packet, tcp;	/* 0: not printed */
		const char *source;
	} rows[] = {
		{ "aal5, ipv4, tcp", 1500, 0.884434, 0.853774, "C1" },
		{ "aal5, llc-snap, " BRIDGED, 1500, 0.884434, 0.853774,
		  "C1" },
		{ "aal5, llc-snap, " PPPOE, 1492, 0.879717, 0.849057, "C2" },
		{ "aal5, llc-snap, " PPPOE, 1500, 0.857633, 0.827902, "C3" },
		{ "aal5, ppp, ipv4, tcp", 1478, 0.899574, 0, "C5" },
		{ "aal5, " BRIDGED, 1464, 0.891053, 0, "C5" },
		{ "aal5, llc-snap, " PPPOE, 1448, 0.881315, 0, "C5" },
	};
	const double cells = 149.760;	/* of an STM-1 */
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		struct circuit *circuit = circuit_on("sdh, signal: stm-1",
		    rows[i].layers, rows[i].mtu);

		assert_printed(rows[i].layers, ceiling_mbit_per_s(circuit,
		    PROTOCOL_TCP, LEVEL_PACKET) / cells, rows[i].packet, 1e-6,
		    rows[i].source);
		if (rows[i].tcp > 0)
			assert_printed(rows[i].layers,
			    ceiling_mbit_per_s(circuit, PROTOCOL_TCP,
			    LEVEL_PAYLOAD) / cells, rows[i].tcp, 1e-6,
			    rows[i].source);
		circuit_free(circuit);
	}
}

#define ADSL24 "adsl2plus, downstream: 24 Mbit/s, upstream: 1 Mbit/s"
#define ADSL8 "adsl2plus, downstream: 8.128 Mbit/s, upstream: 640 kbit/s"
#define VDSL100 "vdsl2, downstream: 100 Mbit/s, upstream: 40 Mbit/s"

static void
stacks_on_telephone_pairs(void **state)
{
	static const struct printed rows[] = {
		{ ADSL24, "aal5, ppp, ipv4, tcp", 0, 0, 21.2264, 20.4906,
		  20.8302, 1e-4, "D1" },
		{ ADSL24, "aal5, llc-snap, " PPPOE, 0, 0, 21.1132, 20.3774,
		  20.7170, 1e-4, "D2, MTU 1492 by PPPoE" },
		{ ADSL8, "aal5, ppp, ipv4, tcp", 1500, 0, 7.1887, 6.9395,
		  7.0545, 1e-4, "D3" },
		{ VDSL100, "ptm, ethernet, ipv4, tcp", 0, 0, 97.0383, 93.6743,
		  95.2269, 1e-4, "D4" },
		{ VDSL100, "ptm, " PPPOE, 0, 0, 96.5208, 93.1568, 94.7094,
		  1e-4, "D5" },
		{ VDSL100, "ptm, ethernet, vlan, pppoe, ppp, ipv4, tcp", 0, 0,
		  0, 92.9126, 0, 1e-4, "D6" },
		{ VDSL100, "ptm, ethernet, pppoe, ppp, ipv4, { esp: { cipher: "
		  "aes-gcm-16 } }, ipv4, tcp", 0, 0, 0, 89.6634, 0, 1e-4,
		  "D7" },
	};
	struct circuit *circuit;

	(void)state;
	assert_rows(rows, COUNT(rows));
	circuit = circuit_on(VDSL100, "ptm, ethernet, pppoe, ppp, ipv4, esp, "
	    "ipv4, tcp", 0);
	assert_printed("D7, TLS", ceiling_mbit_per_s(circuit, PROTOCOL_TCP_TLS,
	    LEVEL_PAYLOAD), 89.5432, 1e-4 + 2e-6, "D7, records of 16384 B");
	circuit_free(circuit);
}

/* D4: 64/65 of the rate is the packets'. */
static void
ptm_has_its_share_as_a_step(void **state)
{
	struct circuit *circuit = circuit_on(VDSL100, "ptm, ethernet, ipv4, "
	    "tcp", 0);
	struct ceiling ceiling;

	(void)state;
	ceiling_of(circuit, PROTOCOL_TCP, &ceiling);
	assert_int_equal(ceiling.rate_bps[LEVEL_LINE], 100000000);
	assert_int_equal(ceiling.line_rate_bps, 100000000);
	assert_non_null(strstr(ceiling.steps[0].name, "64/65"));
	assert_printed("PTM payload", 100 - (double)ceiling.steps[0].bps / 1e6,
	    98.4615, 1e-4 + 2e-6, "D4");
	circuit_free(circuit);
}

#define CABLE(channels) "docsis-3.0, downstream-channels: " channels ", " \
	"upstream-rate: 27 Mbit/s"

static void
stacks_on_coaxial_cable(void **state)
{
	static const char layers[] = "docsis, ethernet, ipv4, tcp";
	static const struct printed rows[] = {
		{ CABLE("1"), layers, 0, 37.540, 37.095, 35.809, 36.402,
		  0.001, "K1" },
		{ CABLE("4"), layers, 0, 0, 0, 143.23, 0, 0.01, "K3" },
		{ CABLE("8"), layers, 0, 0, 0, 286.47, 0, 0.01, "K3" },
		{ CABLE("16"), layers, 0, 0, 0, 572.94, 0, 0.01, "K3" },
		{ CABLE("24"), layers, 0, 0, 0, 859.41, 0, 0.01, "K3" },
		{ CABLE("32"), layers, 0, 0, 0, 1145.88, 0, 0.01, "K3" },
	};

	(void)state;
	assert_rows(rows, COUNT(rows));
}

/* CableLabs on a public list: 17 octets down and 10 up over the frame, hence
 * 35 and 28 over IP. */
static void
a_cable_costs_less_upstream(void **state)
{
	struct circuit *circuit = circuit_on(CABLE("4"), "docsis, ethernet, "
	    "ipv4, tcp", 0);
	struct path_segment segment;

	(void)state;
	segment_of(circuit, DOWN, &segment);
	assert_int_equal(segment.overhead.octets[LEVEL_LINE].num, 1535);
	segment_of(circuit, UP, &segment);
	assert_int_equal(segment.overhead.octets[LEVEL_LINE].num, 1528);
	/* 27 Mbit/s, 1500 of 1528 */
	assert_int_equal(fraction_floor(fraction_multiply(
	    path_offered_bps(&segment), fraction_make(1500, 1528))),
	    26505235);
	circuit_free(circuit);
}

static void
stacks_on_optical_trees(void **state)
{
	static const char gem[] = "gem, ethernet, ipv4, tcp";
	static const char xgem[] = "xgem, ethernet, ipv4, tcp";
	static const struct printed rows[] = {
		{ "gpon", gem, 0, 2477.727, 2448.347, 2363.471, 2402.644,
		  0.001, "G1" },
		{ "gpon, fec: yes", gem, 0, 2321.569, 2294.041, 2214.514,
		  2251.219, 0.001, "G2" },
		{ "gpon, fec: yes, allocations: 32", gem, 0, 2305.749,
		  2278.408, 2199.424, 2235.878, 0.001, "G3" },
		{ "xgs-pon", xgem, 0, 8609.905, 8507.812, 8212.874, 8348.999,
		  0.001, "G6" },
		{ "xgs-pon, allocations: 64", xgem, 0, 8577.860, 8476.147,
		  8182.307, 8317.925, 0.001, "G7" },
		{ "xg-pon, allocations: 64", xgem, 0, 8577.860, 8476.147,
		  8182.307, 8317.925, 0.001, "G7: same downstream" },
	};

	(void)state;
	assert_rows(rows, COUNT(rows));
}

/* Frames of 64 octets: what the line offers, by the frame's share of it. */
static void
short_frames_on_optical_trees(void **state)
{
	static const struct {
		const char *medium;
		double frame_mbit_per_s;
		const char *source;
	} rows[] = {
		{ "xgs-pon", 7703.666, "G6" },
		{ "xgs-pon, allocations: 64", 7674.994, "G7" },
	};
	struct path_segment segment;
	struct fraction octets[LEVELS];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		struct circuit *circuit = circuit_on(rows[i].medium, "xgem, "
		    "ethernet, ipv4, tcp", 0);

		segment_of(circuit, DOWN, &segment);
		overhead_of_packet(&circuit->segments[0].layers, 46, false,
		    octets);
		assert_printed(rows[i].medium, fraction_double(
		    fraction_multiply(path_offered_bps(&segment),
		    fraction_divide(octets[LEVEL_FRAME],
		    octets[LEVEL_LINE]))), rows[i].frame_mbit_per_s * 1e6, 1e3,
		    rows[i].source);
		circuit_free(circuit);
	}
}

/* A frame of 1518 in GFP has 8 octets more (ITU-T G.7041, from memory). */
static void
frames_on_transport_networks(void **state)
{
	static const struct {
		const char *medium;
		double offered_mbit_per_s;
	} rows[] = {
		{ "otn, signal: odu1", 2488.320 },
		{ "sdh, signal: stm-16, container: vc-4, members: 7",
		  1048.320 },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		struct circuit *circuit = circuit_on(rows[i].medium, "gfp, "
		    "ethernet, ipv4, tcp", 1500);

		assert_printed(rows[i].medium, ceiling_mbit_per_s(circuit,
		    PROTOCOL_TCP, LEVEL_FRAME),
		    rows[i].offered_mbit_per_s * 1518 / 1526, 2e-6,
		    "GFP-F without FCS");
		circuit_free(circuit);
	}
}

/* A tree of 2313.344 Mbit/s between 32 (G3: TCP 2199.424). */
static void
contention_divides_the_tree(void **state)
{
	struct circuit *circuit = circuit_on("gpon, fec: yes, allocations: "
	    "32, contention: 32", "gem, ethernet, ipv4, tcp", 0);

	(void)state;
	assert_printed("one of 32", ceiling_mbit_per_s(circuit, PROTOCOL_TCP,
	    LEVEL_PAYLOAD), 2199.424 / 32, 0.001 / 32 + 2e-6, "G3");
	circuit_free(circuit);
}

/* PLCP is a way to carry cells; a tree carries its own frames. */
static void
a_medium_refuses_what_it_does_not_carry(void **state)
{
	static const struct {
		const char *medium, *layers, *expected;
	} rows[] = {
		{ "pdh, signal: ds3, mapping: plcp", "hdlc, ppp, ipv4, tcp",
		  "hdlc on medium pdh, allowed there: aal5" },
		{ "pdh, signal: ds3", "gfp, ethernet, ipv4, tcp",
		  "gfp on medium pdh, allowed there: hdlc, aal5 or "
		  "frame-relay" },
		{ "sdh, signal: stm-1", "ethernet, ipv4, tcp",
		  "ethernet on medium sdh, allowed there: hdlc, aal5 or gfp" },
		{ "sdh, signal: stm-1", "frame-relay, ipv4, tcp",
		  "frame-relay on medium sdh" },
		{ "otn, signal: odu1", "ethernet, ipv4, tcp",
		  "ethernet on medium otn, allowed there: gfp" },
		{ ADSL24, "gem, ethernet, ipv4, tcp", "allowed there: aal5 or "
		  "ptm" },
		{ VDSL100, "docsis, ethernet, ipv4, tcp", "allowed there: ptm "
		  "or aal5" },
		{ "gfast, downstream: 500 Mbit/s, upstream: 1 Mbit/s",
		  "aal5, ipv4, tcp", "aal5 on medium gfast, allowed there: "
		  "ptm" },
		{ CABLE("1"), "ptm, ethernet, ipv4, tcp",
		  "allowed there: docsis" },
		{ "docsis-3.1, occupied: 96 MHz, bits-per-subcarrier: 10, "
		  "upstream-rate: 1 Mbit/s", "gem, ethernet, ipv4, tcp",
		  "allowed there: docsis" },
		{ "gpon", "xgem, ethernet, ipv4, tcp", "allowed there: gem" },
		{ "xg-pon", "gem, ethernet, ipv4, tcp", "allowed there: "
		  "xgem" },
		{ "xgs-pon", "gem, ethernet, ipv4, tcp", "allowed there: "
		  "xgem" },
	};
	char text[512];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		(void)snprintf(text, sizeof(text), "circuit: X\nmedium: "
		    "{ kind: %s }\nlayers: [ %s ]\n", rows[i].medium,
		    rows[i].layers);
		circuit_refused(text, rows[i].expected);
		circuit_refused(text, "test:3:11");
	}
}

/* Frame Relay has 4 + 2 + 1 octets (RFC 2427); plcp takes cells. */
static void
a_medium_accepts_what_it_carries(void **state)
{
	struct circuit *circuit;

	(void)state;
	circuit = circuit_on("pdh, signal: e1", "{ frame-relay: { stuffing: "
	    "none } }, ipv4, tcp", 1500);
	assert_printed("frame-relay", ceiling_mbit_per_s(circuit, PROTOCOL_TCP,
	    LEVEL_PACKET), 1.984 * 1500 / 1507, 2e-6, "RFC 2427");
	circuit_free(circuit);
	/* 96000 cells a second, 32 a packet */
	circuit = circuit_on("pdh, signal: ds3, mapping: plcp", "aal5, "
	    "llc-snap, ipv4, tcp", 1500);
	assert_printed("plcp", ceiling_mbit_per_s(circuit, PROTOCOL_TCP,
	    LEVEL_PACKET), 96000.0 / 32 * 1500 * 8 / 1e6, 2e-6,
	    "ATM media table");
	circuit_free(circuit);
}

/* Fractions stay within 128 bits under the heaviest stacks (a product that
 * does not is an assertion), and the ladder adds up to the line. */
static void
a_heavy_stack_stays_exact(void **state)
{
	static const char *const mediums[][2] = {
		{ "pdh, signal: ds3", "{ hdlc: { fcs-bytes: 4 B } }, ppp" },
		{ "sdh, signal: stm-256, container: vc-4, members: 251",
		  "aal5, llc-snap, ethernet, vlan, pppoe, ppp" },
		{ "otn, signal: odu4", "{ gfp: { fcs: yes } }, ethernet, vlan, "
		  "vlan" },
		{ "otn, signal: odu2e", "gfp, ethernet, vlan" },
		{ "gfast, downstream: 1999999999 bit/s, upstream: 1 Mbit/s, "
		  "retransmission-units: 1.9999 %, lines: 31",
		  "ptm, ethernet, vlan, pppoe, ppp" },
		{ CABLE("31") ", contention: 99991, annex: a", "docsis, "
		  "ethernet, vlan" },
		{ "gpon, fec: yes, bursts: 31, contention: 99991, subscriber: "
		  "a", "gem, ethernet, vlan, pppoe, ppp" },
		{ "xgs-pon, bursts: 31, contention: 99991, subscriber: a",
		  "xgem, ethernet, vlan, vlan" },
	};
	const struct load load = { .direction = DOWN, .declared = true,
		.both = true, .segments_per_ack = { 997, 13 } };
	struct ceiling ceiling;
	struct error err;
	char layers[256];
	uint64_t sum_bps;
	size_t i, step;

	(void)state;
	for (i = 0; i < COUNT(mediums); i++) {
		struct circuit *circuit;

		(void)snprintf(layers, sizeof(layers), "%s, ipv4, udp, esp, "
		    "ipv4, tcp, { tls: { record-bytes: 16381 B } }",
		    mediums[i][1]);
		circuit = circuit_on(mediums[i][0], layers, 1487);
		assert_int_equal(ceiling_of_load(circuit, &load, &ceiling,
		    &err), 0);
		sum_bps = ceiling.rate_bps[LEVEL_PAYLOAD];
		for (step = 0; step < ceiling.steps_count; step++)
			sum_bps += ceiling.steps[step].bps;
		assert_int_equal(sum_bps, ceiling.line_rate_bps);
		circuit_free(circuit);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(ppp_on_synchronous_lines),
		cmocka_unit_test(frames_a_second_on_synchronous_lines),
		cmocka_unit_test(packets_take_whole_cells),
		cmocka_unit_test(cells_leave_the_expected_share),
		cmocka_unit_test(stacks_on_telephone_pairs),
		cmocka_unit_test(ptm_has_its_share_as_a_step),
		cmocka_unit_test(stacks_on_coaxial_cable),
		cmocka_unit_test(a_cable_costs_less_upstream),
		cmocka_unit_test(stacks_on_optical_trees),
		cmocka_unit_test(short_frames_on_optical_trees),
		cmocka_unit_test(frames_on_transport_networks),
		cmocka_unit_test(contention_divides_the_tree),
		cmocka_unit_test(a_medium_refuses_what_it_does_not_carry),
		cmocka_unit_test(a_medium_accepts_what_it_carries),
		cmocka_unit_test(a_heavy_stack_stays_exact),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
