/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "ceiling/ceiling.h"
#include "declaration_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define TCP "ethernet, ipv4, tcp"

/* B5: frames of 64 octets take 84 of line: 131.25 Mbit/s. */
static void
small_frames_take_more_line_than_the_contract_says(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s",
	    "ethernet, ipv4, udp", "mtu: 68 B\nservice: { committed: "
	    "100 Mbit/s, counted-at: frame }");
	struct overhead small;
	struct error err;

	(void)state;
	assert_int_equal(overhead_compute(&circuit->segments[0].layers, 46,
	    false, &small, &err), 0);
	assert_int_equal(fraction_floor(fraction_multiply(
	    fraction_whole(100000000), fraction_divide(
	    small.octets[LEVEL_LINE], small.octets[LEVEL_FRAME]))),
	    131250000);
	circuit_free(circuit);
}

#define CELLS "circuit: CELLS\nmedium: { kind: adsl2plus, downstream: " \
	"24 Mbit/s, upstream: 1 Mbit/s }\nlayers: [ aal5, ppp, ipv4, tcp ]\n" \
	"mtu: 1478 B\n"

/* 1478 + 2 + 8 octets are 31 cells, 1643 octets, without a frame among them;
 * 1426 are payload (RFC 2364, ITU-T I.363.5). */
static void
a_line_without_frames_is_counted_by_its_cells(void **state)
{
	static const struct {
		const char *counted_at;
		uint64_t payload_bps;
	} rows[] = {
		{ "line", 8679245 }, { "packet", 9648173 },
		{ "segment", 9780521 }, { "payload", 10000000 },
	};
	struct circuit *circuit;
	struct ceiling c;
	struct error err;
	char text[512];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		(void)snprintf(text, sizeof(text), CELLS "service: { "
		    "committed: { a-to-b: 10 Mbit/s }, counted-at: %s, "
		    "burst: 1 MB }\n", rows[i].counted_at);
		circuit = circuit_accepted(text);
		assert_int_equal(ceiling_compute(circuit, DIRECTION_A_TO_B,
		    PROTOCOL_TCP, &c, &err), 0);
		assert_int_equal(c.rate_bps[LEVEL_PAYLOAD],
		    rows[i].payload_bps);
		/* the burst is counted like the rate */
		assert_int_equal(c.burst_payload_bytes,
		    rows[i].payload_bps / 10);
		assert_true(c.binding_counted_ratio > 0.999999 * 1e7 /
		    (double)rows[i].payload_bps &&
		    c.binding_counted_ratio < 1.000001 * 1e7 /
		    (double)rows[i].payload_bps);
		circuit_free(circuit);
	}
	circuit_refused(CELLS "service: { committed: 10 Mbit/s, counted-at: "
	    "frame }\n", "the layers have no frames");
}

static void
packets_a_second_bind_with_small_packets(void **state)
{
	static const struct {
		const char *device, *mtu;
		enum protocol protocol;
		uint64_t payload_bps;
		const char *source;
	} rows[] = {
		{ "10000", "1500 B", PROTOCOL_TCP, 115840000, "8 * 1448" },
		{ "10000", "1500 B", PROTOCOL_UDP, 117760000, "8 * 1472" },
		{ "10000", "576 B", PROTOCOL_UDP, 43840000, "8 * 548" },
		/* RFC 2544 App. B: 1 Gbit/s has 81274 of 1518 octets */
		{ "81274", "1500 B", PROTOCOL_TCP, 941478016, "8 * 1448" },
		{ "81275", "1500 B", PROTOCOL_TCP, 941482444, "the line" },
	};
	struct circuit *circuit;
	struct ceiling c;
	char more[128];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		(void)snprintf(more, sizeof(more), "mtu: %s\ndevice: { name: "
		    "firewall, packets-per-second: %s }", rows[i].mtu,
		    rows[i].device);
		circuit = circuit_of("1 Gbit/s", TCP, more);
		ceiling_of(circuit, rows[i].protocol, &c);
		assert_int_equal(c.rate_bps[LEVEL_PAYLOAD],
		    rows[i].payload_bps);
		assert_int_equal(c.bounds_count, 2);
		assert_int_equal(c.bounds[1].class, BOUND_CONTRACT);
		(void)snprintf(more, sizeof(more), "firewall at %s packets/s",
		    rows[i].device);
		assert_string_equal(c.bounds[1].name, more);
		circuit_free(circuit);
	}
}

/* RFC 4115: a committed and an excess rate let their sum through; RFC 2697 and
 * RFC 2698 are the committed rate, or the peak rate, alone. */
static void
excess_adds_to_the_ceiling_without_a_guarantee(void **state)
{
	static const struct {
		const char *more, *name;
		uint64_t payload_bps, burst_bytes;
	} rows[] = {
		{ "service: { committed: 100 Mbit/s, excess: 50 Mbit/s, "
		  "counted-at: payload }", "committed 100 Mbit/s + excess "
		  "50 Mbit/s, not guaranteed, at payload", 150000000, 0 },
		{ "service: { committed: 100 Mbit/s, counted-at: payload }",
		  "committed 100 Mbit/s at payload", 100000000, 0 },
		{ "service: { peak: 150 Mbit/s, counted-at: payload }",
		  "peak 150 Mbit/s at payload", 150000000, 0 },
		{ "services: [ { committed: 10 Mbit/s, burst: 10 kB, "
		  "counted-at: payload }, { committed: 5 Mbit/s, excess: "
		  "7 Mbit/s, burst: 5 kB, counted-at: payload }, "
		  "{ peak: 3 Mbit/s, counted-at: payload } ]",
		  "committed 18 Mbit/s + excess 7 Mbit/s, not guaranteed, at "
		  "payload", 25000000, 15000 },
		{ "services: [ { peak: 10 Mbit/s, counted-at: payload }, "
		  "{ peak: 5 Mbit/s, counted-at: payload } ]",
		  "committed 15 Mbit/s at payload", 15000000, 0 },
	};
	struct circuit *circuit;
	struct ceiling c;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		circuit = circuit_of("1 Gbit/s", TCP, rows[i].more);
		ceiling_of(circuit, PROTOCOL_TCP, &c);
		assert_int_equal(c.rate_bps[LEVEL_PAYLOAD],
		    rows[i].payload_bps);
		assert_string_equal(c.bounds[1].name, rows[i].name);
		assert_int_equal(c.burst_bytes, rows[i].burst_bytes);
		circuit_free(circuit);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    small_frames_take_more_line_than_the_contract_says),
		cmocka_unit_test(
		    a_line_without_frames_is_counted_by_its_cells),
		cmocka_unit_test(packets_a_second_bind_with_small_packets),
		cmocka_unit_test(
		    excess_adds_to_the_ceiling_without_a_guarantee),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
