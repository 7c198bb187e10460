/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "declaration_text.h"
#include "stack_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

struct refusal {
	const char *layers, *expected;
};

static const struct refusal stack_refusals[] = {
	{ "ethernet, tcp, ipv4", "tcp lies on ipv4, ipv6 or esp" },
	{ "ethernet, tcp, ipv4", "test:1:21" },
	{ "ethernet, ipv4, tcp, udp", "found udp on tcp" },
	{ "vlan, ipv4, tcp", "vlan lies on ethernet, vlan or macsec" },
	{ "ethernet, ipv4, vlan, tcp", "found vlan on ipv4" },
	{ "ethernet, ethernet, ipv4, tcp", "found ethernet on "
	  "ethernet; ethernet lies on a medium, ptm, gem" },
	{ "ethernet, ipv4, udp, tls", "tls lies on tcp" },
	{ "ethernet, ipv4, tcp, dtls", "dtls lies on udp" },
	{ "ethernet, ipv4, tcp, quic", "quic lies on udp" },
	{ "ethernet, ipv4, tls", "tls lies on tcp" },
	{ "ethernet, ipv4, tcp, tls, tls", "found tls on tls" },
	{ "ethernet, pppoe, ipv4, tcp", "found ipv4 on pppoe" },
	{ "ethernet, ppp, ipv4, tcp", "ppp lies on pppoe, hdlc, aal5, "
	  "llc-ppp or l2tp" },
	{ "hdlc, ipv4, tcp", "found ipv4 on hdlc" },
	{ "ptm, ipv4, tcp", "found ipv4 on ptm" },
	{ "llc-snap, ipv4, tcp", "llc-snap lies on aal5" },
	{ "aal5, llc-ppp, ipv4, tcp", "found ipv4 on llc-ppp" },
	{ "aal5, llc-snap, ppp, ipv4, tcp", "found ppp on llc-snap" },
	{ "wlan, ethernet, ipv4, tcp", "found ethernet on wlan" },
	{ "ethernet, mpls, mpls, ipv4, tcp", "found mpls on mpls" },
	{ "ethernet, pseudowire, ethernet, ipv4, tcp",
	  "pseudowire lies on mpls" },
	{ "ethernet, ipv4, vxlan, ethernet, ipv4, tcp",
	  "vxlan lies on udp" },
	{ "ethernet, ipv4, udp, gre, ipv4, tcp",
	  "gre lies on ipv4, ipv6 or esp" },
	{ "ethernet, ipv4, udp, vxlan, ipv4, tcp",
	  "found ipv4 on vxlan" },
	{ "ethernet, ipv4, wireguard, ipv4, tcp",
	  "wireguard lies on udp" },
	{ "ethernet, ipv4, udp, wireguard, tcp",
	  "found tcp on wireguard" },
	{ "ethernet, esp, ipv4, tcp", "esp lies on ipv4, ipv6 or udp" },
	{ "ethernet, ipv4, esp, esp, tcp", "found esp on esp" },
	{ "ethernet, ipv4, l2tp, ppp, ipv4, tcp", "l2tp lies on udp" },
	{ "ethernet, ipv4, udp, l2tp, ipv4, tcp",
	  "found ipv4 on l2tp" },
	{ "ethernet, ipv4, udp, l2tpv3, ppp, ipv4, tcp",
	  "found ppp on l2tpv3" },
	{ "ethernet, ipv4", "tcp" },
	{ "ethernet, ipv4, udp, esp, ipv4", "no transport above ipv4" },
	{ "ethernet, ipv4, udp, wireguard",
	  "no transport above wireguard" },
	{ "ethernet", "transport" },
	{ "", "transport" },
	{ "ethernet, ipv5, tcp", "did you mean 'ipv4'" },
	{ "ethernet, token-ring, tcp", "allowed: ethernet, vlan" },
	{ "ethernet, bare, tcp", "allowed: ethernet, vlan" },
	{ "ethernet, ipv4, [ tcp ]", "a name, or" },
	{ "ethernet, ipv4, { }", "a name, or" },
	{ "ethernet, ipv4, { tcp: { }, udp: { } }", "a name, or" },
	{ "ethernet, vlan, vlan, vlan, vlan, vlan, vlan, vlan, vlan, "
	  "vlan, vlan, vlan, vlan, vlan, ipv4, tcp", "more than 15" },
};

static void
impossible_stacks_are_refused_with_the_reason(void **state)
{
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(stack_refusals); i++)
		stack_refused(stack_refusals[i].layers,
		    stack_refusals[i].expected);
	circuit_refused("circuit: X\nmedium: { kind: ethernet, line-rate: "
	    "1 Gbit/s }\nlayers: ethernet\n", "a list, lowest first");
	circuit_refused("circuit: X\nmedium: { kind: ethernet, line-rate: "
	    "1 Gbit/s }\nlayers: { ethernet: 1 }\n", "a list, lowest first");
}

#define CUT "ethernet, ipv4, tcp, "

static const struct refusal option_refusals[] = {
	{ "ethernet, ipv4, udp, { vxlan: { vni: 5 } }, ethernet, ipv4, "
	  "tcp", "vxlan has no options" },
	{ "ethernet, ipv4, { tcp: { timestamp: no } }",
	  "did you mean 'timestamps'" },
	{ "ethernet, ipv4, { tcp: { timestamps: 3 } }", "yes" },
	{ "ethernet, ipv4, { tcp: no }", "tcp" },
	{ "ethernet, ipv4, { tcp: { options-bytes: 6 B } }",
	  "a multiple of 4 B" },
	{ "ethernet, ipv4, { tcp: { options-bytes: 32 B } }",
	  "at most 40 B" },
	{ "ethernet, ipv4, { tcp: { options-bytes: 44 B } }", "40 B" },
	{ "ethernet, ipv4, { tcp: { mss: 12 B } }",
	  "more than the 12 B of options" },
	{ "ethernet, ipv4, { tcp: { mss: 0 B } }", "mss" },
	{ "ethernet, { ipv4: { options-bytes: 44 B } }, tcp", "40 B" },
	{ "ethernet, { ipv4: { options-bytes: 2 B } }, tcp",
	  "a multiple of 4 B" },
	{ "ethernet, { ipv6: { extension-bytes: 12 B } }, tcp",
	  "a multiple of 8 B" },
	{ "ethernet, { ipv6: { options-bytes: 8 B } }, tcp",
	  "unknown" },
	{ "ethernet, { ipv4: { mtu: 1400 B } }, tcp",
	  "the mtu of the circuit" },
	{ "ethernet, { ipv4: { mtu: 1400 B } }, tcp", "test:1:36" },
	{ "ethernet, ipv4, { ipv4: { mtu: 67 B } }, tcp", "68 B" },
	{ "ethernet, ipv4, { ipv6: { mtu: 1279 B } }, tcp", "1280 B" },
	{ "ethernet, ipv4, { udp: { checksum: no } }", "unknown" },
	{ "ethernet, ipv4, { udp: { datagram-bytes: 0 B } }",
	  "datagram-bytes" },
	{ CUT "{ tls: { version: 1.1 } }", "1.2, 1.3" },
	{ CUT "{ tls: { record-bytes: 0 B } }", "record-bytes" },
	{ CUT "{ tls: { record-bytes: 16385 B } }", "to 16 KiB" },
	{ CUT "{ tls: { record-bytes: 17 kB } }", "to 16 KiB" },
	{ CUT "{ tls: { cipher: rc4 } }", "aes-gcm" },
	{ CUT "{ tls: { cipher: aes-cbc, integrity: hmac-sha1 } }",
	  "allowed in 1.3: aes-gcm" },
	{ CUT "{ tls: { version: 1.2, cipher: aes-cbc } }",
	  "hmac-sha1 or hmac-sha256" },
	{ CUT "{ tls: { integrity: hmac-sha1 } }",
	  "aes-gcm has its own" },
	{ CUT "{ tls: { encrypt-then-mac: yes } }",
	  "aes-gcm has its own" },
	{ "ethernet, ipv4, udp, { dtls: { cipher: aes-cbc } }",
	  "aes-ccm-8" },
	{ "ethernet, ipv4, udp, { dtls: { sequence-bytes: 1 B } }",
	  "version 1.2 has them fixed" },
	{ "ethernet, ipv4, udp, { dtls: { length: no } }",
	  "version 1.2 has them fixed" },
	{ "ethernet, ipv4, udp, { dtls: { version: 1.3, "
	  "sequence-bytes: 3 B } }", "2 B" },
	{ "ethernet, ipv4, udp, { quic: { connection-id-bytes: 21 B } "
	  "}", "20 B" },
	{ "ethernet, ipv4, udp, { quic: { packet-number-bytes: 5 B } "
	  "}", "4 B" },
	{ "ethernet, ipv4, udp, { quic: { offset-bytes: 3 B } }",
	  "1 B, 2 B, 4 B or 8 B" },
	{ "ethernet, ipv4, udp, { quic: { stream-id-bytes: 3 B } }",
	  "1 B, 2 B, 4 B or 8 B" },
	{ "ethernet, ipv4, udp, { quic: { length-bytes: 5 B } }",
	  "1 B, 2 B, 4 B or 8 B" },
	{ "ethernet, ipv4, { esp: { cipher: aes-cbc } }, tcp",
	  "integrity: missing, allowed with aes-cbc" },
	{ "ethernet, ipv4, { esp: { cipher: \"null\" } }, tcp",
	  "integrity: missing, allowed with null" },
	{ "ethernet, ipv4, { esp: { integrity: hmac-sha1-96 } }, tcp",
	  "allowed with aes-gcm-16: none" },
	{ "ethernet, ipv4, { esp: { cipher: des } }, tcp",
	  "aes-gcm-16" },
	{ "ethernet, { macsec: { icv-bytes: 7 B } }, ipv4, tcp",
	  "8 B" },
	{ "ethernet, { macsec: { icv-bytes: 17 B } }, ipv4, tcp",
	  "16 B" },
	{ "ethernet, { mpls: { labels: 0 } }, ipv4, tcp", "labels" },
	{ "ethernet, { mpls: { labels: 17 } }, ipv4, tcp", "16" },
	{ "{ hdlc: { fcs-bytes: 3 B } }, ppp, ipv4, tcp",
	  "2 B or 4 B" },
	{ "{ hdlc: { stuffing: byte } }, ppp, ipv4, tcp",
	  "none, bit, octet" },
	{ "{ hdlc: { flags: 0 } }, ppp, ipv4, tcp", "flags" },
	{ "{ frame-relay: { fcs-bytes: 3 B } }, ipv4, tcp",
	  "2 B or 4 B" },
	{ "{ docsis: { upstream-header-bytes: 12 B } }, ethernet, "
	  "ipv4, tcp", "at most downstream-header-bytes, 11 B" },
	{ "{ wlan: { encryption: wep } }, ipv4, tcp",
	  "none, ccmp, gcmp" },
	{ "ethernet, ipv4, udp, { geneve: { options-bytes: 6 B } }, "
	  "ethernet, ipv4, tcp", "a multiple of 4 B" },
	{ "ethernet, ipv4, udp, { geneve: { options-bytes: 256 B } }, "
	  "ethernet, ipv4, tcp", "252 B" },
	{ "ethernet, ipv4, { l2tpv3: { cookie-bytes: 6 B } }, "
	  "ethernet, ipv4, tcp", "0 B, 4 B or 8 B" },
	{ "ethernet, ipv4, { l2tpv3: { cookie-bytes: 12 B } }, "
	  "ethernet, ipv4, tcp", "8 B" },
};

static void
impossible_options_are_refused_with_what_is_allowed(void **state)
{
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(option_refusals); i++)
		stack_refused(option_refusals[i].layers,
		    option_refusals[i].expected);
}

/* What the layers let through where no mtu is declared. */
static void
the_default_mtu_is_the_least_below_ip(void **state)
{
	static const struct {
		const char *layers;
		uint64_t mtu_bytes;
		const char *source;
	} vectors[] = {
		{ "ethernet, ipv4, tcp", 1500, "IEEE 802.3" },
		{ "ethernet, vlan, vlan, ipv4, tcp", 1500, "IEEE 802.1ad" },
		{ "ethernet, macsec, ipv4, tcp", 1500, "IEEE 802.1AE" },
		{ "ptm, ethernet, ipv4, tcp", 1500, "IEEE 802.3" },
		{ "ethernet, pppoe, ppp, ipv4, tcp", 1492, "RFC 2516 s7" },
		{ "hdlc, ppp, ipv4, tcp", 1500, "RFC 1661 s6.1" },
		{ "frame-relay, ipv4, tcp", 1500, "common practice" },
		{ "aal5, ipv4, tcp", 9180, "RFC 2225 s7" },
		{ "aal5, llc-snap, ipv4, tcp", 9180, "RFC 2225 s7" },
		{ "aal5, ppp, ipv4, tcp", 1500, "RFC 1661 s6.1" },
		{ "aal5, llc-snap, ethernet, ipv4, tcp", 1500, "IEEE 802.3" },
		{ "aal5, llc-snap, ethernet, pppoe, ppp, ipv4, tcp", 1492,
		  "RFC 2516 s7" },
		{ "wlan, ipv4, tcp", 1500, "common practice" },
		{ "lte, ipv4, tcp", 1500, "common practice" },
		{ "nr, ipv4, tcp", 1500, "common practice" },
		{ "ipv4, tcp", 0, "no layer has a say" },
		{ "ipv4, udp, l2tp, ppp, ipv4, tcp", 0,
		  "what is inside a packet has no say" },
		{ "ethernet, mpls, pseudowire, ethernet, ipv4, tcp", 1500,
		  "RFC 4448: the core carries what the frame needs" },
	};
	struct layer_stack stack;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		stack_accepted(vectors[i].layers, &stack);
		if (layers_default_mtu(&stack) != vectors[i].mtu_bytes)
			fail_msg("%s: found %lu: %s", vectors[i].layers,
			    (unsigned long)layers_default_mtu(&stack),
			    vectors[i].source);
	}
}

/* Sizes declared inside a tunnel must fit into the packet around them, and the
 * refusal names their place. */
static void
sizes_inside_a_tunnel_must_fit(void **state)
{
	static const struct {
		const char *layers;
		unsigned mtu_bytes;
		const char *refusal;	/* NULL: it fits */
	} vectors[] = {
		{ "ethernet, ipv4, { ipv4: { mtu: 1480 B } }, tcp", 1500,
		  NULL },
		{ "ethernet, ipv4, { ipv4: { mtu: 1481 B } }, tcp", 1500,
		  "test:3:42: mtu of 1500 B: ipv4: mtu: found 1481 B, "
		  "allowed: at most the 1480 B" },
		{ "ethernet, ipv4, ipv6, tcp", 1300, NULL },
		{ "ethernet, ipv4, ipv6, tcp", 1299,
		  "ipv6: the layers below leave 1279 B, allowed: from 1280 "
		  "B" },
		{ "ethernet, ipv4, ipv4, tcp", 88, NULL },
		{ "ethernet, ipv4, ipv4, tcp", 87, "allowed: from 68 B" },
		{ "ethernet, ipv6, udp, wireguard, ipv4, tcp", 1500, NULL },
		{ "ethernet, ipv6, udp, wireguard, ipv4, tcp", 1499,
		  "wireguard: mtu: found 1420 B, allowed: at most the 1419 "
		  "B" },
		{ "ethernet, ipv4, udp, { wireguard: { mtu: 1441 B } }, ipv4, "
		  "tcp", 1500, "at most the 1440 B" },
		{ "ethernet, ipv4, { udp: { datagram-bytes: 1472 B } }", 1500,
		  NULL },
		{ "ethernet, ipv4, { udp: { datagram-bytes: 1473 B } }", 1500,
		  "test:3:52: mtu of 1500 B: udp: datagram-bytes: found 1473 "
		  "B, allowed: at most the 1472 B" },
		{ "ethernet, ipv4, { tcp: { mss: 9000 B } }", 1500, NULL },
		{ "ethernet, { ipv4: { options-bytes: 40 B } }, tcp", 93,
		  NULL },
		{ "ethernet, { ipv4: { options-bytes: 40 B } }, tcp", 92,
		  "the layers up to tcp leave no room for payload" },
	};
	char text[512];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "circuit: X\nmedium: { "
		    "kind: ethernet, line-rate: 1 Gbit/s }\nlayers: [ %s ]\n"
		    "mtu: %u B\n", vectors[i].layers, vectors[i].mtu_bytes);
		if (vectors[i].refusal != NULL)
			circuit_refused(text, vectors[i].refusal);
		else
			circuit_free(circuit_accepted(text));
	}
}

static void
every_row_takes_its_own_defaults(void **state)
{
	struct layer_use use;
	size_t i;

	(void)state;
	for (i = 0; layer_table[i] != NULL; i++) {
		layer_use_default(&use, layer_table[i]);
		assert_ptr_equal(use.layer, layer_table[i]);
		if (use.cost.head_bytes + use.cost.trail_bytes == 0)
			fail_msg("%s costs nothing", use.layer->title);
		assert_true(use.cost.upstream_less_bytes <=
		    use.cost.head_bytes);
		assert_true(use.cost.num >= use.cost.den);
	}
}

/* RFC 9293 section 3.8.6.3: one for every second segment at least. */
static void
an_acknowledgement_answers_two_segments_by_default(void **state)
{
	struct layer_use use;

	(void)state;
	layer_use_default(&use, layer_find("tcp"));
	assert_int_equal(use.options.segments_per_ack, 2);
}

/* Rows that rest on memory and models make the whole no better than they. */
static void
the_worst_row_makes_the_accuracy(void **state)
{
	static const struct {
		const char *layers;
		enum accuracy accuracy;
	} vectors[] = {
		{ "ethernet, vlan, ipv4, tcp, tls", ACCURACY_EXACT },
		{ "aal5, llc-snap, ipv4, tcp", ACCURACY_EXACT },
		{ "ethernet, ipv4, esp, ipv4, tcp", ACCURACY_EXACT },
		{ "hdlc, ppp, ipv4, tcp", ACCURACY_NOMINAL },
		{ "wlan, ipv4, tcp", ACCURACY_NOMINAL },
		{ "xgem, ethernet, ipv4, tcp", ACCURACY_NOMINAL },
	};
	struct layer_stack stack;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		stack_accepted(vectors[i].layers, &stack);
		assert_int_equal(layers_accuracy(&stack), vectors[i].accuracy);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(impossible_stacks_are_refused_with_the_reason),
		cmocka_unit_test(
		    impossible_options_are_refused_with_what_is_allowed),
		cmocka_unit_test(the_default_mtu_is_the_least_below_ip),
		cmocka_unit_test(sizes_inside_a_tunnel_must_fit),
		cmocka_unit_test(every_row_takes_its_own_defaults),
		cmocka_unit_test(
		    an_acknowledgement_answers_two_segments_by_default),
		cmocka_unit_test(the_worst_row_makes_the_accuracy),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
