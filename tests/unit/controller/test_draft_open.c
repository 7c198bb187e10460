/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "declaration_text.h"
#include "draft_facts.h"

#define GBIT UINT64_C(1000000000)

/* Kinds whose medium or layers cannot be known are left to a person, who is
 * told which. */
static const struct {
	enum interface_kind kind;
	enum interface_below below;
	unsigned outer_version;
	bool frames;
	const char *layers, *mtu, *why;
} open_rows[] = {
	{ INTERFACE_DUMMY, INTERFACE_BELOW_NOTHING, 0, true,
	    "layers: [ ethernet, ipv4, tcp ]", "mtu: 1420 B",
	    "leads nowhere" },
	{ INTERFACE_TUN, INTERFACE_BELOW_NOTHING, 0, false,
	    "# layers: [ ..., ipv4, tcp ]", "mtu: 1420 B",
	    "a program" },
	{ INTERFACE_TAP, INTERFACE_BELOW_NOTHING, 0, true,
	    "layers: [ ethernet, ipv4, tcp ]", "mtu: 1420 B",
	    "a program" },
	{ INTERFACE_BRIDGE, INTERFACE_BELOW_PORTS, 0, true,
	    "layers: [ ethernet, ipv4, tcp ]", "mtu: 1420 B",
	    "it has no ports" },
	{ INTERFACE_VLAN, INTERFACE_BELOW_ELSEWHERE, 0, true,
	    "layers: [ ethernet, vlan, ipv4, tcp ]", "mtu: 1420 B",
	    "another network namespace" },
	{ INTERFACE_VXLAN, INTERFACE_BELOW_UNTOLD, 4, true,
	    "# layers: [ ..., ipv4, udp, vxlan, ethernet, ipv4, tcp ]",
	    "mtu: 1470 B  # confirm:", "no way to its far end" },
	{ INTERFACE_GENEVE, INTERFACE_BELOW_UNTOLD, 0, true,
	    "# layers: [ ..., ipv4 or ipv6, udp, geneve, ethernet, "
	    "ipv4, tcp ]", "# mtu: SIZE  # fill in:",
	    "no way to its far end" },
	{ INTERFACE_WIREGUARD, INTERFACE_BELOW_UNTOLD, 0, false,
	    "# layers: [ ..., ipv4 or ipv6, udp, { wireguard: { mtu: "
	    "1420 B } }, ipv4, tcp ]", "# mtu: SIZE  # fill in:",
	    "root alone" },
	{ INTERFACE_ESP, INTERFACE_BELOW_UNTOLD, 4, false,
	    "# layers: [ ..., ipv4, esp, ipv4, tcp ]",
	    "# mtu: SIZE  # fill in:", "no way to its far end" },
	{ INTERFACE_PPP, INTERFACE_BELOW_UNTOLD, 0, false,
	    "# layers: [ ..., ppp, ipv4, tcp ]", "mtu: 1420 B",
	    "runs over" },
	{ INTERFACE_WWAN, INTERFACE_BELOW_NOTHING, 0, false,
	    "# layers: [ ..., ipv4, tcp ]", "mtu: 1420 B",
	    "which mobile network" },
	{ INTERFACE_OTHER, INTERFACE_BELOW_NOTHING, 0, false,
	    "# layers: [ ..., ipv4, tcp ]", "mtu: 1420 B",
	    "does not tell what it is" },
};

static void
what_is_not_known_is_left_open(void **state)
{
	(void)state;
	for (size_t i = 0; i < sizeof(open_rows) /
	    sizeof(open_rows[0]); i++) {
		struct interface_device device =
		    device_of(open_rows[i].kind, 1420);
		struct interface_facts facts;
		char *text, line[512];

		device.below = open_rows[i].below;
		device.outer_version = open_rows[i].outer_version;
		device.frames = open_rows[i].frames;
		/* What Linux names for tun and tap, drivers/net/tun.c. */
		device.line_bps = 10 * GBIT;
		facts = facts_of(device);
		text = draft_of(&facts);
		assert_has(line_of(text, "# medium: { kind: NAME }  # fill in: "
		    "top0: ", line, sizeof(line)), open_rows[i].why);
		(void)line_of(text, open_rows[i].layers, line, sizeof(line));
		(void)line_of(text, open_rows[i].mtu, line, sizeof(line));
		assert_has_not(text, "10 Gbit/s");
		circuit_refused(text, "medium: missing");
		free(text);
	}
}

static void
open_medium_is_chosen_from_the_table(void **state)
{
	struct interface_device device = device_of(INTERFACE_PPP, 1492);
	struct interface_facts facts;
	char *text;

	(void)state;
	device.below = INTERFACE_BELOW_UNTOLD;
	facts = facts_of(device);
	text = draft_of(&facts);
	for (size_t i = 0; media[i] != NULL; i++)
		if (medium_is_reference(media[i]))
			assert_has_not(text, media[i]->name);
		else
			assert_has(text, media[i]->name);
	free(text);
}

static void
modem_is_of_a_mobile_network(void **state)
{
	struct interface_facts facts = facts_of(device_of(INTERFACE_WWAN,
	    1500));
	char *text = draft_of(&facts), line[256];

	(void)state;
	(void)line_of(text, "#   NAME: ", line, sizeof(line));
	assert_has_not(line, "ethernet");
	if (medium_find("lte") != NULL)
		assert_has(line, "lte");
	free(text);
}

static void
filling_in_what_is_open_makes_a_declaration(void **state)
{
	static const char *const overrides[] = {
		"medium={ kind: ethernet, line-rate: 1 Gbit/s }",
		"layers=[ ethernet, pppoe, ppp, ipv4, tcp ]",
	};
	struct interface_device device = device_of(INTERFACE_PPP, 1492);
	struct interface_facts facts;
	struct circuit *circuit;
	struct ceiling ceiling;
	struct error err;
	char *text;

	(void)state;
	device.below = INTERFACE_BELOW_UNTOLD;
	facts = facts_of(device);
	text = draft_of(&facts);
	if (circuit_read_text(text, strlen(text), "test", overrides, 2,
	    &circuit, &err) == -1)
		fail_msg("%s", err.cause);
	ceiling_of(circuit, PROTOCOL_TCP, &ceiling);
	/* RFC 2516 section 7: 1492 in a full frame */
	assert_int_equal(ceiling.rate_bps[LEVEL_PAYLOAD], GBIT * 1440 / 1538);
	circuit_free(circuit);
	free(text);
}

static void
radio_lists_the_fields_of_its_medium(void **state)
{
	struct interface_device device = device_of(INTERFACE_WLAN, 1500);
	static const char *const overrides[] = {
		"medium.generation=802.11ac", "medium.channel-width=80 MHz",
		"medium.mcs=9" };
	struct interface_facts facts = facts_of(device);
	const struct medium *medium = medium_find("wlan");
	char *text = draft_of(&facts), expected[128], line[512];
	struct circuit *circuit;
	struct ceiling ceiling;
	struct error err;

	(void)state;
	assert_non_null(medium);
	(void)line_of(text, "  kind: wlan  # confirm:", line, sizeof(line));
	(void)line_of(text, "layers: [ wlan, ipv4, tcp ]", line, sizeof(line));
	for (const struct field *row = medium->fields; row->name != NULL;
	    row++) {
		if (row->default_text != NULL || strcmp(row->name, "kind") == 0)
			continue;
		(void)snprintf(expected, sizeof(expected), "  # %s: VALUE  # "
		    "fill in:", row->name);
		(void)line_of(text, expected, line, sizeof(line));
	}
	circuit_refused(text, "wlan");
	if (circuit_read_text(text, strlen(text), "test", overrides, 3,
	    &circuit, &err) == -1)
		fail_msg("%s", err.cause);
	ceiling_of(circuit, PROTOCOL_TCP, &ceiling);
	assert_true(ceiling.rate_bps[LEVEL_PAYLOAD] > 0);
	circuit_free(circuit);
	free(text);
}

static void
oddities_leave_the_layers_open(void **state)
{
	static const enum interface_oddity oddities[] = {
		INTERFACE_PER_PACKET, INTERFACE_IN_UDP, INTERFACE_GPE,
		INTERFACE_MPLS };

	(void)state;
	for (size_t i = 0; i < sizeof(oddities) / sizeof(oddities[0]); i++) {
		struct interface_device device = device_of(INTERFACE_GRE,
		    1400);
		struct interface_facts facts;
		char *text, line[256];

		device.outer_version = 4;
		device.frames = false;
		device.oddity = oddities[i];
		facts = facts_of(device);
		facts_add(&facts, port_of("eth0", 1500));
		text = draft_of(&facts);
		(void)line_of(text, "# layers: [", line, sizeof(line));
		circuit_refused(text, "layers: missing");
		free(text);
	}
}

static void
stack_that_the_reader_refuses_is_left_open(void **state)
{
	struct interface_device device = device_of(INTERFACE_VLAN, 1500);
	struct interface_device radio = device_of(INTERFACE_WLAN, 1500);
	struct interface_facts facts = facts_of(device);
	char *text, line[256];

	(void)state;
	facts_add(&facts, radio);
	text = draft_of(&facts);
	(void)line_of(text, "# layers: [ wlan, vlan, ipv4, tcp ]", line,
	    sizeof(line));
	assert_has(text, "#   fill in: layers: found vlan on wlan");
	free(text);
}

/* Whatever is known or not, a draft is accepted, or it is refused and says
 * where a person comes in. */
static void
every_kind_makes_a_draft(void **state)
{
	enum interface_kind kind;
	unsigned bits;

	(void)state;
	for (kind = 0; kind < INTERFACE_KINDS; kind++) {
		for (bits = 0; bits < 64; bits++) {
			struct interface_device device = device_of(kind,
			    (bits & 1) != 0 ? 1500 : 0);
			struct interface_facts facts;
			struct circuit *circuit = NULL;
			struct error err;
			char *text;

			device.frames = (bits & 2) != 0;
			device.ipv6 = (bits & 4) != 0;
			device.outer_version = (bits & 8) != 0 ? 6 : 0;
			if ((bits & 16) != 0)
				device.line_bps = UINT64_C(1000000000);
			facts = facts_of(device);
			for (size_t i = 1; (bits & 32) != 0 &&
			    i < INTERFACE_DEPTH_MAX; i++)
				facts_add(&facts, device);
			text = draft_of(&facts);
			assert_has(text, "# confirm:");
			if (circuit_read_text(text, strlen(text), "test", NULL,
			    0, &circuit, &err) == -1 &&
			    strstr(text, "fill in: ") == NULL)
				assert_has(text, "it is refused: ");
			circuit_free(circuit);
			free(text);
		}
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(what_is_not_known_is_left_open),
		cmocka_unit_test(open_medium_is_chosen_from_the_table),
		cmocka_unit_test(modem_is_of_a_mobile_network),
		cmocka_unit_test(filling_in_what_is_open_makes_a_declaration),
		cmocka_unit_test(radio_lists_the_fields_of_its_medium),
		cmocka_unit_test(oddities_leave_the_layers_open),
		cmocka_unit_test(stack_that_the_reader_refuses_is_left_open),
		cmocka_unit_test(every_kind_makes_a_draft),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
