/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "declaration_text.h"
#include "draft_facts.h"

#define GBIT UINT64_C(1000000000)

/* Devices on a port that has negotiated 1 Gbit/s and lets 1500 B through; what
 * a draft makes of them, and its ceiling as octets of payload in octets of the
 * line.  TCP has timestamps: 52 octets of an IPv4 packet and 72 of an IPv6 one
 * are no payload (RFC 791, RFC 8200, RFC 9293, RFC 7323); the line has 38 of
 * Ethernet about the packet (IEEE 802.3). */
static const struct chain {
	struct interface_device device[2];
	size_t count;
	const char *layers;
	uint64_t mtu_bytes, payload_bytes, line_bytes;
	const char *source;
} chains[] = {
	{ .layers = "[ ethernet, ipv4, tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1448, .line_bytes = 1538,
	  .source = "IEEE 802.3: 1500 + 18 + 20" },
	{ .device = { { .kind = INTERFACE_VLAN, .mtu_bytes = 1500,
	    .frames = true } }, .count = 1,
	  .layers = "[ ethernet, vlan, ipv4, tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1448, .line_bytes = 1542,
	  .source = "IEEE 802.1Q: 4" },
	{ .device = { { .kind = INTERFACE_VLAN, .mtu_bytes = 1500,
	    .frames = true }, { .kind = INTERFACE_VLAN, .mtu_bytes = 1500,
	    .frames = true, .service_tag = true } }, .count = 2,
	  .layers = "[ ethernet, vlan, vlan, ipv4, tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1448, .line_bytes = 1546,
	  .source = "IEEE 802.1Q: 4 twice" },
	{ .device = { { .kind = INTERFACE_MACVLAN, .mtu_bytes = 1400,
	    .frames = true } }, .count = 1,
	  .layers = "[ ethernet, ipv4, tcp ]", .mtu_bytes = 1400,
	  .payload_bytes = 1348, .line_bytes = 1438,
	  .source = "IEEE 802.3: 1400 + 18 + 20" },
	{ .device = { { .kind = INTERFACE_BRIDGE, .mtu_bytes = 1500,
	    .frames = true, .ports_count = 1 } }, .count = 1,
	  .layers = "[ ethernet, ipv4, tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1448, .line_bytes = 1538,
	  .source = "IEEE 802.3: 1500 + 18 + 20" },
	{ .device = { { .kind = INTERFACE_MACSEC, .mtu_bytes = 1468,
	    .frames = true, .macsec_sci = true, .macsec_icv_bytes = 16 } },
	  .count = 1,
	  .layers = "[ ethernet, { macsec: { sci: yes, icv-bytes: 16 B } }, "
	    "ipv4, tcp ]", .mtu_bytes = 1468,
	  .payload_bytes = 1416, .line_bytes = 1538,
	  .source = "IEEE 802.1AE: SecTAG 16 with SCI, ICV 16" },
	{ .device = { { .kind = INTERFACE_MACSEC, .mtu_bytes = 1468,
	    .frames = true, .macsec_icv_bytes = 16 } }, .count = 1,
	  .layers = "[ ethernet, { macsec: { sci: no, icv-bytes: 16 B } }, "
	    "ipv4, tcp ]", .mtu_bytes = 1468,
	  .payload_bytes = 1416, .line_bytes = 1530,
	  .source = "IEEE 802.1AE: SecTAG 8 without SCI, ICV 16" },
	{ .device = { { .kind = INTERFACE_GRE, .mtu_bytes = 1476,
	    .outer_version = 4 } }, .count = 1,
	  .layers = "[ ethernet, ipv4, gre, ipv4, tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1424, .line_bytes = 1538,
	  .source = "RFC 2784 section 2: 4" },
	{ .device = { { .kind = INTERFACE_GRE, .mtu_bytes = 1472,
	    .outer_version = 4, .gre_key = true } }, .count = 1,
	  .layers = "[ ethernet, ipv4, { gre: { checksum: no, key: yes, "
	    "sequence: no } }, ipv4, tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1420, .line_bytes = 1538,
	  .source = "RFC 2890 section 2: 4 more" },
	{ .device = { { .kind = INTERFACE_GRE, .mtu_bytes = 1464,
	    .outer_version = 4, .gre_key = true, .gre_checksum = true,
	    .gre_sequence = true } }, .count = 1,
	  .layers = "[ ethernet, ipv4, { gre: { checksum: yes, key: yes, "
	    "sequence: yes } }, ipv4, tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1412, .line_bytes = 1538,
	  .source = "RFC 2784, RFC 2890: 4, and 4 for each field" },
	{ .device = { { .kind = INTERFACE_GRE, .mtu_bytes = 1462,
	    .frames = true, .outer_version = 4 } }, .count = 1,
	  .layers = "[ ethernet, ipv4, gre, ethernet, ipv4, tcp ]",
	  .mtu_bytes = 1500, .payload_bytes = 1410, .line_bytes = 1538,
	  .source = "RFC 2784, RFC 1701: a frame without FCS, 14 more" },
	{ .device = { { .kind = INTERFACE_GRE, .mtu_bytes = 1448,
	    .outer_version = 6, .encapsulation_limit = true } }, .count = 1,
	  .layers = "[ ethernet, { ipv6: { extension-bytes: 8 B } }, gre, "
	    "ipv4, tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1396, .line_bytes = 1538,
	  .source = "RFC 2473 section 4.1.1: 8" },
	{ .device = { { .kind = INTERFACE_IPIP, .mtu_bytes = 1480,
	    .outer_version = 4, .inner_version = 4 } }, .count = 1,
	  .layers = "[ ethernet, ipv4, ipv4, tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1428, .line_bytes = 1538, .source = "RFC 2003" },
	{ .device = { { .kind = INTERFACE_IPIP, .mtu_bytes = 1480,
	    .outer_version = 4, .inner_version = 6 } }, .count = 1,
	  .layers = "[ ethernet, ipv4, ipv6, tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1408, .line_bytes = 1538, .source = "RFC 4213" },
	{ .device = { { .kind = INTERFACE_IPIP, .mtu_bytes = 1452,
	    .outer_version = 6, .inner_version = 4,
	    .encapsulation_limit = true } }, .count = 1,
	  .layers = "[ ethernet, { ipv6: { extension-bytes: 8 B } }, ipv4, "
	    "tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1400, .line_bytes = 1538,
	  .source = "RFC 2473 section 4.1.1: 8" },
	{ .device = { { .kind = INTERFACE_IPIP, .mtu_bytes = 1460,
	    .outer_version = 6, .inner_version = 6 } }, .count = 1,
	  .layers = "[ ethernet, ipv6, ipv6, tcp ]", .mtu_bytes = 1500,
	  .payload_bytes = 1388, .line_bytes = 1538, .source = "RFC 2473" },
	{ .device = { { .kind = INTERFACE_VXLAN, .mtu_bytes = 1450,
	    .frames = true, .outer_version = 4 } }, .count = 1,
	  .layers = "[ ethernet, ipv4, udp, vxlan, ethernet, ipv4, tcp ]",
	  .mtu_bytes = 1500, .payload_bytes = 1398, .line_bytes = 1538,
	  .source = "RFC 7348 section 5: 14 + 8 + 8 + 20" },
	{ .device = { { .kind = INTERFACE_VXLAN, .mtu_bytes = 1430,
	    .frames = true, .outer_version = 6 } }, .count = 1,
	  .layers = "[ ethernet, ipv6, udp, vxlan, ethernet, ipv4, tcp ]",
	  .mtu_bytes = 1500, .payload_bytes = 1378, .line_bytes = 1538,
	  .source = "RFC 7348 section 5: 14 + 8 + 8 + 40" },
	{ .device = { { .kind = INTERFACE_GENEVE, .mtu_bytes = 1400,
	    .frames = true, .outer_version = 4 } }, .count = 1,
	  .layers = "[ ethernet, ipv4, udp, geneve, ethernet, ipv4, tcp ]",
	  .mtu_bytes = 1450, .payload_bytes = 1348, .line_bytes = 1488,
	  .source = "RFC 8926 section 3: 14 + 8 + 8 + 20" },
	{ .device = { { .kind = INTERFACE_VLAN, .mtu_bytes = 1446,
	    .frames = true }, { .kind = INTERFACE_VXLAN, .mtu_bytes = 1450,
	    .frames = true, .outer_version = 4 } }, .count = 2,
	  .layers = "[ ethernet, ipv4, udp, vxlan, ethernet, vlan, ipv4, "
	    "tcp ]", .mtu_bytes = 1500, .payload_bytes = 1394,
	  .line_bytes = 1538,
	  .source = "RFC 7348 section 5, IEEE 802.1Q: 50 and 4" },
	{ .device = { { .kind = INTERFACE_VXLAN, .mtu_bytes = 1450,
	    .frames = true, .outer_version = 4 }, { .kind = INTERFACE_VLAN,
	    .mtu_bytes = 1500, .frames = true } }, .count = 2,
	  .layers = "[ ethernet, vlan, ipv4, udp, vxlan, ethernet, ipv4, "
	    "tcp ]", .mtu_bytes = 1500, .payload_bytes = 1398,
	  .line_bytes = 1542,
	  .source = "RFC 7348 section 5, IEEE 802.1Q: 50 and 4" },
};

static void
each_kind_on_a_port_has_the_ceiling_of_its_layers(void **state)
{
	(void)state;
	for (size_t i = 0; i < sizeof(chains) / sizeof(chains[0]); i++) {
		const struct chain *row = &chains[i];
		struct interface_facts facts = { .count = 0 };
		struct circuit *circuit;
		struct ceiling ceiling;
		char *text, line[512], expected[256];

		for (size_t n = 0; n < row->count; n++) {
			facts.device[n] = row->device[n];
			facts.device[n].below = INTERFACE_BELOW_DEVICE;
			facts.device[n].line_bps = INTERFACE_UNKNOWN;
			(void)strcpy(facts.device[n].name, "top0");
			facts.device[n].up = facts.device[n].carrier = true;
		}
		facts.device[facts.count = row->count] =
		    port_of("eth0", 1500);
		facts.count++;
		facts.device[0].ipv4 = true;
		text = draft_of(&facts);
		(void)snprintf(expected, sizeof(expected), "layers: %s",
		    row->layers);
		assert_string_equal(line_of(text, "layers: ", line,
		    sizeof(line)), expected);
		circuit = circuit_accepted(text);
		assert_int_equal(circuit_mtu(circuit), row->mtu_bytes);
		ceiling_of(circuit, PROTOCOL_TCP, &ceiling);
		if (ceiling.rate_bps[LEVEL_PAYLOAD] !=
		    GBIT * row->payload_bytes / row->line_bytes)
			fail_msg("%s: %llu bit/s\n%s", row->source,
			    (unsigned long long)
			    ceiling.rate_bps[LEVEL_PAYLOAD], text);
		circuit_free(circuit);
		free(text);
	}
}

static void
port_that_has_negotiated_is_complete(void **state)
{
	struct interface_facts facts = facts_of(port_of("eth0", 1500));
	char *text = draft_of(&facts), line[256];
	struct circuit *circuit = circuit_accepted(text);

	(void)state;
	assert_string_equal(line_of(text, "  line-rate:", line, sizeof(line)),
	    "  line-rate: 1 Gbit/s  # negotiated by eth0");
	assert_has(text, "\n  duplex: full\n");
	assert_has(text, "circuit: DRAFT  # confirm:");
	assert_has(text, "  kind: ethernet  # confirm:");
	assert_has(text, "\nlayers: [ ethernet, ipv4, tcp ]\n");
	assert_has(text, "\nmtu: 1500 B\n");
	circuit_free(circuit);
	free(text);
}

static void
rate_that_was_set_is_to_be_confirmed(void **state)
{
	struct interface_device port = port_of("eth0", 1500);
	struct interface_facts facts;
	char *text, line[256];

	(void)state;
	port.negotiated = false;
	port.duplex = INTERFACE_DUPLEX_HALF;
	facts = facts_of(port);
	text = draft_of(&facts);
	assert_has(line_of(text, "  line-rate: 1 Gbit/s", line, sizeof(line)),
	    "# confirm: set on eth0");
	assert_has(line_of(text, "  duplex: half", line, sizeof(line)),
	    "# confirm:");
	circuit_free(circuit_accepted(text));
	free(text);
}

/* As filled in by a person with --set. */
static struct circuit *
filled(const char *text, const char *assignment)
{
	const char *const overrides[] = { assignment };
	struct circuit *circuit;
	struct error err;

	if (circuit_read_text(text, strlen(text), "test", overrides, 1,
	    &circuit, &err) == -1)
		fail_msg("%s: %s", err.cause, text);
	return circuit;
}

/* The draft leaves the rate open for a person and accepts a person's. */
static void
assert_rate_is_open(struct interface_device device, const char *why)
{
	struct interface_facts facts = facts_of(device);
	char *text = draft_of(&facts), line[256];
	struct ceiling ceiling;
	struct circuit *circuit;

	assert_has(line_of(text, "  # line-rate: RATE", line, sizeof(line)),
	    "# fill in: ");
	assert_has(line, why);
	assert_has_not(text, "\n  line-rate");
	circuit_refused(text, "line-rate");
	circuit = filled(text, "medium.line-rate=1 Gbit/s");
	ceiling_of(circuit, PROTOCOL_TCP, &ceiling);
	/* IEEE 802.3, RFC 7323: 1448 octets in 1538 */
	assert_int_equal(ceiling.rate_bps[LEVEL_PAYLOAD], GBIT * 1448 / 1538);
	circuit_free(circuit);
	free(text);
}

static void
rate_that_nothing_enforces_is_left_open(void **state)
{
	struct interface_device device = device_of(INTERFACE_VETH, 1500);

	(void)state;
	/* drivers/net/veth.c: SPEED_10000, whatever it moves */
	device.line_bps = 10 * GBIT;
	device.duplex = INTERFACE_DUPLEX_FULL;
	assert_rate_is_open(device, "Linux names 10 Gbit/s for top0, but "
	    "nothing limits it to that");
	device = port_of("eth0", 1500);
	(void)strcpy(device.driver, "vmxnet3");
	assert_rate_is_open(device, "hypervisor");
	device.line_bps = INTERFACE_UNKNOWN;
	assert_rate_is_open(device, "does not know");
	device.carrier = false;
	assert_rate_is_open(device, "no link");
}

static void
bond_has_the_rate_of_its_ports_where_they_are_known(void **state)
{
	struct interface_device bond = device_of(INTERFACE_BOND, 1500);
	struct interface_facts facts;
	char *text, line[256];

	(void)state;
	bond.line_bps = 2 * GBIT;
	bond.duplex = INTERFACE_DUPLEX_FULL;
	bond.ports_count = 2;
	for (size_t i = 0; i < 2; i++) {
		(void)snprintf(bond.ports[i].name, INTERFACE_NAME_SIZE,
		    "eth%zu", i);
		bond.ports[i].real = true;
		bond.ports[i].line_bps = GBIT;
	}
	facts = facts_of(bond);
	text = draft_of(&facts);
	assert_has(line_of(text, "  line-rate: 2 Gbit/s", line, sizeof(line)),
	    "# confirm: the ports of top0 together");
	assert_has(text, "ports eth0 (1 Gbit/s), eth1 (1");
	circuit_free(circuit_accepted(text));
	free(text);
	bond.ports[1].real = false;
	assert_rate_is_open(bond, "that of a port of top0 is not known");
	bond.ports_count = 0;
	assert_rate_is_open(bond, "that of a port of top0 is not known");
	bond.ports_count = INTERFACE_PORTS_MAX + 1;
	assert_rate_is_open(bond, "that of a port of top0 is not known");
}

static void
loopback_is_a_reference(void **state)
{
	struct interface_device device = device_of(INTERFACE_LOOPBACK, 65536);
	struct interface_facts facts;
	struct circuit *circuit;
	char *text;

	(void)state;
	device.frames = false;
	facts = facts_of(device);
	text = draft_of(&facts);
	circuit = circuit_accepted(text);
	assert_true(circuit_is_reference(circuit));
	circuit_free(circuit);
	free(text);
}

static void
version_of_the_load_follows_the_addresses(void **state)
{
	static const struct {
		bool ipv4, ipv6;
		const char *line;
	} rows[] = {
		{ true, false, "layers: [ ethernet, ipv4, tcp ]\n" },
		{ false, true, "layers: [ ethernet, ipv6, tcp ]\n" },
		{ true, true, "layers: [ ethernet, ipv4, tcp ]  # confirm: "
		    "IPv6 is configured too\n" },
		{ false, false, "layers: [ ethernet, ipv4, tcp ]  # confirm: "
		    "no address is configured\n" },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++) {
		struct interface_device port = port_of("eth0", 1500);
		struct interface_facts facts;
		char *text;

		port.ipv4 = rows[i].ipv4;
		port.ipv6 = rows[i].ipv6;
		facts = facts_of(port);
		text = draft_of(&facts);
		assert_has(text, rows[i].line);
		circuit_free(circuit_accepted(text));
		free(text);
	}
}

static void
tunnel_that_does_not_fit_is_said(void **state)
{
	struct interface_device device = device_of(INTERFACE_VXLAN, 1500);
	struct interface_facts facts;
	char *text, line[256];

	(void)state;
	device.outer_version = 4;
	facts = facts_of(device);
	facts_add(&facts, port_of("eth0", 1500));
	text = draft_of(&facts);
	/* RFC 7348 section 5: 50 octets more */
	assert_string_equal(line_of(text, "mtu:", line, sizeof(line)),
	    "mtu: 1500 B  # confirm: a full packet of top0, 1550 B, does not "
	    "fit");
	circuit_free(circuit_accepted(text));
	free(text);
}

static void
options_that_differ_are_to_be_confirmed(void **state)
{
	struct interface_device device = device_of(INTERFACE_GRE, 1476);
	struct interface_facts facts;
	char *text, line[512];

	(void)state;
	device.frames = false;
	device.outer_version = 4;
	device.gre_differs = true;
	facts = facts_of(device);
	facts_add(&facts, port_of("eth0", 1500));
	text = draft_of(&facts);
	assert_has(line_of(text, "layers:", line, sizeof(line)),
	    "# confirm: GRE sends other fields than it expects");
	free(text);
	device = device_of(INTERFACE_MACSEC, 1468);
	device.macsec_icv_bytes = 16;
	device.macsec_sci_if_peers = true;
	facts = facts_of(device);
	facts_add(&facts, port_of("eth0", 1500));
	text = draft_of(&facts);
	assert_has(line_of(text, "layers:", line, sizeof(line)),
	    "# confirm: MACsec sends its SCI too");
	free(text);
}

static void
value_that_the_reader_refuses_is_said(void **state)
{
	struct interface_facts facts = facts_of(port_of("eth0", 1000000));
	char *text = draft_of(&facts);

	(void)state;
	assert_has(text, "# As it stands it is refused: mtu: found");
	circuit_refused(text, "mtu");
	free(text);
}

/* Everything but NUL, '/', ':' and white space can be in a name: dev_valid_name
 * of net/core/dev.c.  U+2028 and NEL break lines in YAML 1.1. */
static void
no_name_leaves_its_comment(void **state)
{
	static const char *const names[] = { "\"}", "'", "\\x0a", "# a", "[{,",
		"\xe2\x80\xa8mtu", "\xc2\x85mtu", "\xff\xfe", "\x1b[2Jx",
		"&a", "*a", "%TAG", "---", "...", "@`", "!!x", "\x7f\x01",
		"fifteen-letters" };
	struct interface_facts facts = facts_of(port_of("eth0", 1500));
	struct circuit *plain, *odd;
	char *text = draft_of(&facts);

	(void)state;
	plain = circuit_accepted(text);
	free(text);
	for (size_t i = 0; i < sizeof(names) / sizeof(names[0]); i++) {
		struct interface_device *device = &facts.device[0];

		(void)snprintf(device->name, sizeof(device->name), "%s",
		    names[i]);
		(void)snprintf(device->master, sizeof(device->master), "%s",
		    names[i]);
		(void)snprintf(device->driver, sizeof(device->driver), "%s",
		    names[i]);
		(void)snprintf(device->kernel_kind,
		    sizeof(device->kernel_kind), "%s", names[i]);
		text = draft_of(&facts);
		for (const char *c = text; *c != '\0'; c++)
			assert_true(*c == '\n' || (*c >= ' ' && *c <= '~'));
		odd = circuit_accepted(text);
		assert_memory_equal(odd, plain, sizeof(*odd));
		circuit_free(odd);
		free(text);
	}
	circuit_free(plain);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    each_kind_on_a_port_has_the_ceiling_of_its_layers),
		cmocka_unit_test(port_that_has_negotiated_is_complete),
		cmocka_unit_test(rate_that_was_set_is_to_be_confirmed),
		cmocka_unit_test(rate_that_nothing_enforces_is_left_open),
		cmocka_unit_test(
		    bond_has_the_rate_of_its_ports_where_they_are_known),
		cmocka_unit_test(loopback_is_a_reference),
		cmocka_unit_test(version_of_the_load_follows_the_addresses),
		cmocka_unit_test(tunnel_that_does_not_fit_is_said),
		cmocka_unit_test(options_that_differ_are_to_be_confirmed),
		cmocka_unit_test(value_that_the_reader_refuses_is_said),
		cmocka_unit_test(no_name_leaves_its_comment),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
