/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

/* The table of frame sizes against the published frame rates. */
#include <stdlib.h>

#include <jansson.h>

#include "declaration_text.h"
#include "report/packet_sizes.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define ANSWER_SIZE 16384

static struct packet_sizes *
sizes_of(const struct circuit *circuit)
{
	struct packet_sizes *sizes = NULL;
	struct error err;
	char why[1024];

	if (packet_sizes_make(circuit, &sizes, &err) == -1)
		fail_msg("%s", error_text(&err, why, sizeof(why)));
	return sizes;
}

static const struct packet_size *
size_of(const struct packet_sizes *sizes, enum direction direction,
    uint64_t bytes)
{
	const struct packet_sizes_direction *d =
	    &sizes->directions[direction];

	for (size_t i = 0; i < d->count; i++)
		if (d->sizes[i].bytes == bytes)
			return &d->sizes[i];
	return NULL;
}

static uint64_t
packets(const struct packet_sizes *sizes, uint64_t bytes)
{
	const struct packet_size *size = size_of(sizes, DIRECTION_A_TO_B,
	    bytes);

	if (size == NULL)
		fail_msg("no row of %llu B", (unsigned long long)bytes);
	return fraction_floor(size->rate.packets_per_s);
}

static void
ethernet_has_the_frame_rates_of_rfc_2544_and_rfc_5180(void **state)
{
	static const struct {
		uint64_t frame_bytes;
		uint64_t rates[4];	/* 10 M, 100 M, 1 G, 10 Gbit/s */
		const char *source;
	} vectors[] = {
		{ 64, { 14880, 148809, 1488095, 14880952 },
		  "RFC 2544 appendix B, RFC 5180 A.1" },
		{ 128, { 8445, 84459, 844594, 8445945 }, "RFC 5180 A.1" },
		{ 256, { 4528, 45289, 452898, 4528985 }, "RFC 5180 A.1" },
		{ 512, { 2349, 23496, 234962, 2349624 }, "RFC 5180 A.1" },
		{ 1024, { 1197, 11973, 119731, 1197318 }, "RFC 5180 A.1" },
		{ 1280, { 961, 9615, 96153, 961538 }, "RFC 5180 A.1" },
		{ 1518, { 812, 8127, 81274, 812743 }, "RFC 5180 A.1" },
	};
	static const char *const rates[] = { "10 Mbit/s", "100 Mbit/s",
		"1 Gbit/s", "10 Gbit/s" };
	struct packet_sizes *sizes;
	struct circuit *circuit;
	size_t i, r;

	(void)state;
	for (r = 0; r < COUNT(rates); r++) {
		circuit = circuit_of(rates[r], "ethernet, ipv4, udp", "");
		sizes = sizes_of(circuit);
		assert_int_equal(sizes->directions[0].count, COUNT(vectors));
		for (i = 0; i < COUNT(vectors); i++)
			if (packets(sizes, vectors[i].frame_bytes) !=
			    vectors[i].rates[r])
				fail_msg("%s, %s: not %llu", rates[r],
				    vectors[i].source, (unsigned long long)
				    vectors[i].rates[r]);
		free(sizes);
		circuit_free(circuit);
	}
}

/* RFC 5180 A.1 lists 4096, 8192 and 9216 too: as the largest of an MTU. */
static void
the_largest_frame_is_that_of_the_mtu(void **state)
{
	static const struct {
		const char *mtu;
		uint64_t frame_bytes, rate;
		const char *source;
	} vectors[] = {
		{ "mtu: 750 B", 768, 158629,
		  "RFC 2544 appendix B prints 1586 at 10 Mbit/s" },
		{ "mtu: 2030 B", 2048, 60444, "RFC 5180 A.1" },
		{ "mtu: 4078 B", 4096, 30369,
		  "RFC 5180 A.1 prints 30396, its digits exchanged" },
		{ "mtu: 8174 B", 8192, 15221, "RFC 5180 A.1" },
		{ "mtu: 9198 B", 9216, 13533,
		  "RFC 5180 A.1 prints 13534, rounded up" },
	};
	struct packet_sizes *sizes;
	struct circuit *circuit;

	(void)state;
	for (size_t i = 0; i < COUNT(vectors); i++) {
		circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
		    vectors[i].mtu);
		sizes = sizes_of(circuit);
		if (packets(sizes, vectors[i].frame_bytes) != vectors[i].rate)
			fail_msg("%s: %s", vectors[i].mtu, vectors[i].source);
		free(sizes);
		circuit_free(circuit);
	}
}

static void
a_tag_adds_four_octets_to_every_size(void **state)
{
	/* RFC 5180 section 5.1.1 and A.1: a tagged frame of 1522 octets */
	static const uint64_t tagged[] = { 68, 132, 260, 516, 1028, 1284,
		1522 };
	struct circuit *circuit = circuit_of("1 Gbit/s",
	    "ethernet, vlan, ipv4, tcp", "");
	struct packet_sizes *sizes = sizes_of(circuit);
	const struct packet_size *size;

	(void)state;
	assert_int_equal(sizes->directions[0].count, COUNT(tagged));
	for (size_t i = 0; i < COUNT(tagged); i++) {
		size = size_of(sizes, DIRECTION_A_TO_B, tagged[i]);
		assert_non_null(size);
		assert_int_equal(size->rate.packet_bytes, tagged[i] - 22);
	}
	assert_int_equal(packets(sizes, 1522), 81063);
	free(sizes);
	circuit_free(circuit);
}

/* RFC 5180 A.2: floor(149.76 Mbit/s / (8 * (X + 1))), one flag between. */
static void
packet_over_sonet_has_the_rates_of_rfc_5180(void **state)
{
	static const struct {
		uint64_t frame_bytes, rate;
	} vectors[] = { { 64, 288000 }, { 256, 72840 }, { 1024, 18263 },
		{ 2048, 9136 } };
	struct circuit *circuit = circuit_accepted("circuit: X\nmedium: "
	    "{ kind: sdh, signal: sts-3c }\nlayers: [ { hdlc: { stuffing: "
	    "none } }, ppp, ipv4, udp ]\nmtu: 2042 B\n");
	struct packet_sizes *sizes = sizes_of(circuit);

	(void)state;
	for (size_t i = 0; i < COUNT(vectors); i++)
		assert_int_equal(packets(sizes, vectors[i].frame_bytes),
		    vectors[i].rate);
	free(sizes);
	circuit_free(circuit);
}

/* 46 octets of packet hold no TCP with timestamps (20 + 32) and 18 of UDP. */
static void
payload_stands_where_there_is_room(void **state)
{
	struct circuit *four = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    ""), *six = circuit_of("1 Gbit/s", "ethernet, ipv6, udp", "");
	struct packet_sizes *sizes = sizes_of(four);
	const struct packet_size *size = size_of(sizes, DIRECTION_A_TO_B, 64);

	(void)state;
	assert_non_null(size);
	assert_true(size->declared_bps == FIELD_UNSET);
	assert_int_equal(size->udp_bps, 214285714);	/* 18 of 84 octets */
	assert_int_equal(size->rate.rate_bps[LEVEL_FRAME], 761904761);
	assert_int_equal(size->rate.rate_bps[LEVEL_PACKET], 547619047);
	size = size_of(sizes, DIRECTION_A_TO_B, 1518);
	assert_int_equal(size->declared_bps, 941482444);
	assert_int_equal(size->udp_bps, 957087126);
	free(sizes);
	sizes = sizes_of(six);			/* 40 + 8 do not fit into 46 */
	size = size_of(sizes, DIRECTION_A_TO_B, 64);
	assert_true(size->udp_bps == FIELD_UNSET);
	assert_string_equal(sizes->top, "udp");
	free(sizes);
	circuit_free(four);
	circuit_free(six);
}

static void
sizes_that_cannot_be_are_left_out_with_the_reason(void **state)
{
	struct circuit *small = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    "mtu: 600 B"), *jumbo = circuit_of("1 Gbit/s",
	    "ethernet, ipv4, tcp", "mtu: 9100 B");
	struct packet_sizes *sizes = sizes_of(small);
	const struct packet_sizes_direction *d = &sizes->directions[0];

	(void)state;
	assert_int_equal(d->count, 5);		/* 64 to 512, 618 */
	assert_non_null(size_of(sizes, DIRECTION_A_TO_B, 618));
	assert_int_equal(d->left_count, 3);
	assert_int_equal(d->left[0].bytes, 1024);
	assert_string_equal(d->left[0].why, "above the MTU of 600 B");
	free(sizes);
	sizes = sizes_of(jumbo);		/* 9018 and the largest */
	assert_int_equal(sizes->directions[0].count, 9);
	assert_int_equal(packets(sizes, 9018), 13830);	/* 1e9 / 8 / 9038 */
	assert_non_null(size_of(sizes, DIRECTION_A_TO_B, 9118));
	free(sizes);
	circuit_free(small);
	circuit_free(jumbo);
}

static void
contract_device_and_line_bind_where_they_are_lowest(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, udp",
	    "service: { committed: { a-to-b: 500 Mbit/s }, counted-at: "
	    "packet }\ndevice: { name: box, packets-per-second: 400000 }");
	struct packet_sizes *sizes = sizes_of(circuit);

	(void)state;
	assert_int_equal(packets(sizes, 64), 400000);	/* the device */
	assert_int_equal(packets(sizes, 512), 126518);	/* 5e8 / 8 / 494 */
	assert_int_equal(fraction_floor(size_of(sizes, DIRECTION_B_TO_A,
	    512)->rate.packets_per_s), 234962);		/* RFC 5180 A.1 */
	assert_string_equal(size_of(sizes, DIRECTION_A_TO_B,
	    64)->rate.binding, "box at 400000 packets/s");
	free(sizes);
	circuit_free(circuit);
}

/* 5e8 of payload: what is in the packets is not known. */
static void
a_contract_above_the_packet_limits_no_frames(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, udp",
	    "service: { committed: 500 Mbit/s, counted-at: payload }");
	struct packet_sizes *sizes = sizes_of(circuit);

	(void)state;
	assert_true(sizes->directions[0].contract_ignored);
	assert_int_equal(packets(sizes, 1518), 81274);
	assert_int_equal(size_of(sizes, DIRECTION_A_TO_B,
	    1518)->declared_bps, 500000000);
	free(sizes);
	circuit_free(circuit);
}

/* 53 octets a cell, 8 of AAL5's trailer: 64 octets of IP need 2 cells, 1500
 * need 32 (ITU-T I.363.5). */
static void
a_stack_without_frames_has_packets_of_those_sizes(void **state)
{
	struct circuit *circuit = circuit_accepted("circuit: X\nmedium: "
	    "{ kind: adsl2plus, downstream: 24 Mbit/s, upstream: 1 Mbit/s }\n"
	    "layers: [ aal5, ipv4, udp ]\nmtu: 1500 B\n");
	struct packet_sizes *sizes = sizes_of(circuit);

	(void)state;
	assert_false(sizes->directions[0].frames);
	assert_int_equal(packets(sizes, 64), 24000000 / (8 * 2 * 53));
	assert_int_equal(packets(sizes, 1500), 24000000 / (8 * 32 * 53));
	assert_null(size_of(sizes, DIRECTION_A_TO_B, 1518));
	free(sizes);
	circuit_free(circuit);
}

static void
every_form_holds_the_table(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    "");
	struct packet_sizes *sizes = sizes_of(circuit);
	static char answer[ANSWER_SIZE];
	json_t *root, *row;
	FILE *f = fmemopen(answer, sizeof(answer), "w");

	(void)state;
	packet_sizes_text(sizes, f);
	(void)fclose(f);
	assert_non_null(strstr(answer, "both directions alike"));
	assert_non_null(strstr(answer, "1488095  1000.000  761.904"));
	f = fmemopen(answer, sizeof(answer), "w");
	packet_sizes_csv(sizes, f);
	(void)fclose(f);
	assert_non_null(strstr(answer, "b-to-a,1518,1500,81274,1000000000,"
	    "986996098,975292587,941482444,957087126,ethernet line\r\n"));
	f = fmemopen(answer, sizeof(answer), "w");
	assert_int_equal(packet_sizes_json(sizes, f), 0);
	(void)fclose(f);
	root = json_loads(answer, JSON_REJECT_DUPLICATES, NULL);
	assert_non_null(root);
	row = json_array_get(json_object_get(json_array_get(json_object_get(
	    root, "directions"), 0), "sizes"), 0);
	assert_int_equal(json_integer_value(json_object_get(row,
	    "packets_per_s")), 1488095);
	assert_true(json_is_null(json_object_get(row, "payload_bps")));
	json_decref(root);
	free(sizes);
	circuit_free(circuit);
}

static void
a_reference_has_no_table(void **state)
{
	struct circuit *circuit = circuit_accepted("circuit: X\nmedium: host\n"
	    "layers: [ ipv4, tcp ]\n");
	struct packet_sizes *sizes = sizes_of(circuit);

	(void)state;
	assert_true(sizes->reference);
	assert_int_equal(sizes->directions[0].count, 0);
	free(sizes);
	circuit_free(circuit);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    ethernet_has_the_frame_rates_of_rfc_2544_and_rfc_5180),
		cmocka_unit_test(the_largest_frame_is_that_of_the_mtu),
		cmocka_unit_test(a_tag_adds_four_octets_to_every_size),
		cmocka_unit_test(packet_over_sonet_has_the_rates_of_rfc_5180),
		cmocka_unit_test(payload_stands_where_there_is_room),
		cmocka_unit_test(
		    sizes_that_cannot_be_are_left_out_with_the_reason),
		cmocka_unit_test(
		    contract_device_and_line_bind_where_they_are_lowest),
		cmocka_unit_test(a_contract_above_the_packet_limits_no_frames),
		cmocka_unit_test(
		    a_stack_without_frames_has_packets_of_those_sizes),
		cmocka_unit_test(every_form_holds_the_table),
		cmocka_unit_test(a_reference_has_no_table),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
