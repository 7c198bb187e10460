/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "medium_air.h"

#define OPEN "{ wlan: { qos: no, encryption: none } }, ipv4, tcp"
#define CCMP "{ wlan: { qos: yes, encryption: ccmp } }, ipv4, tcp"
#define AC "kind: wlan, generation: 802.11ac, channel-width: 80 MHz, "	\
	"guard-interval: 400 ns, mcs: 9"
#define AX "kind: wlan, generation: 802.11ax, band: 5 GHz, "		\
	"channel-width: 80 MHz, mcs: 11, streams: 2"
#define G54 "kind: wlan, generation: 802.11g, phy-rate: 54 Mbit/s"

/* F12 to F20: UDP of 1472 and TCP of 1448 octets with one acknowledgement for
 * two segments, mean backoff 67.5 us, block acknowledgement at 24 Mbit/s; UDP
 * = n * 1472 * 8 / cycle, worked out by hand from the model of the published
 * timing.  IEEE 802.11-2020, 802.11ax, 802.11be. */
static const struct {
	const char *id, *medium, *layers;
	double phy_mbps, udp_mbps, tcp_mbps;
	const char *frames;	/* in the notes */
} cycles[] = {
	{ "F12", "kind: wlan, generation: 802.11a, phy-rate: "
	  "54 Mbit/s", OPEN, 54, 29.93, 0,
	  "1 of 1536 octets, 248.0 us of a cycle of 393.5 us" },
	{ "F13", "kind: wlan, generation: 802.11n, band: 5 GHz, "
	  "channel-width: 20 MHz, mcs: 7", CCMP, 65, 59.15, 54.38,
	  "28 of 1554 octets, 5416.0 us of a cycle of 5574.5 us" },
	{ "F14", "kind: wlan, generation: 802.11n, band: 5 GHz, "
	  "channel-width: 40 MHz, mcs: 15, guard-interval: 400 ns",
	  CCMP, 300, 253.57, 219.45,
	  "42 of 1554 octets, 1792.0 us of a cycle of 1950.5 us" },
	{ "F15", AC, CCMP, 433.333, 368.27, 319.97,
	  "64 of 1554 octets, 1888.0 us of a cycle of 2046.5 us" },
	{ "F16", AC ", streams: 2", CCMP, 866.666, 666.66, 541.55,
	  "64 of 1554 octets, 972.0 us of a cycle of 1130.5 us" },
	{ "F17", AX ", block-ack-window: 64", CCMP, 1200.980, 861.04,
	  667.06, "64 of 1554 octets, 716.8 us of a cycle of "
	  "875.3 us" },
	{ "F17", AX, CCMP, 1200.980, 1045.85, 924.35,
	  "256 of 1554 octets, 2716.0 us of a cycle of 2882.5 us" },
	{ "F18", "kind: wlan, generation: 802.11ax, band: 6 GHz, "
	  "channel-width: 160 MHz, mcs: 11, streams: 2", CCMP,
	  2401.960, 1945.32, 1628.50,
	  "256 of 1554 octets, 1383.2 us of a cycle of 1549.7 us" },
	{ "F19", "kind: wlan, generation: 802.11be, band: 6 GHz, "
	  "channel-width: 320 MHz, mcs: 13, streams: 2", CCMP,
	  5764.705, 4855.89, 4209.67,
	  "1024 of 1554 octets, 2284.8 us of a cycle of 2483.3 us" },
	/* an A-MPDU of one, answered by a block acknowledgement */
	{ "F20", AC ", streams: 2, block-ack-window: 1", CCMP,
	  866.666, 52.93, 0,
	  "1 of 1554 octets, 64.0 us of a cycle of 222.5 us" },
};
static void
the_model_gives_the_published_cycles(void **state)
{
	struct ceiling ceiling;
	size_t i, n;
	bool found;

	(void)state;
	for (i = 0; i < COUNT(cycles); i++) {
		air_ceiling(cycles[i].medium, cycles[i].layers,
		    PROTOCOL_UDP, DIRECTION_A_TO_B, &ceiling);
		assert_near((double)ceiling.line_rate_bps / 1e6,
		    cycles[i].phy_mbps, 0.00101, cycles[i].id);
		assert_near((double)ceiling.rate_bps[LEVEL_PAYLOAD] / 1e6,
		    cycles[i].udp_mbps, 0.00501, cycles[i].id);
		found = false;
		for (n = 0; n < ceiling.notes_count; n++)
			found = found || strstr(ceiling.notes[n],
			    cycles[i].frames) != NULL;
		if (!found)
			fail_msg("%s: no note '%s'", cycles[i].id,
			    cycles[i].frames);
		assert_int_equal(strstr(ceiling.notes[ceiling.notes_count -
		    2], "without aggregation") != NULL,
		    strncmp(cycles[i].frames, "1 of", 4) == 0);
		if (cycles[i].tcp_mbps > 0) {
			air_ceiling(cycles[i].medium, cycles[i].layers,
			    PROTOCOL_TCP, DIRECTION_A_TO_B, &ceiling);
			assert_near((double)ceiling.rate_bps[LEVEL_PAYLOAD] /
			    1e6, cycles[i].tcp_mbps, 0.00501, cycles[i].id);
			assert_true(ceiling.shared);
			assert_near(ceiling.segments_per_ack, 2, 1e-9, "d");
		}
	}
	/* F12 counting packets of 1500 octets */
	air_ceiling(cycles[0].medium, OPEN, PROTOCOL_UDP, DIRECTION_A_TO_B,
	    &ceiling);
	assert_near((double)ceiling.rate_bps[LEVEL_PACKET] / 1e6, 30.50,
	    0.00501, "F12");
}

/* By hand.  Unaggregated VHT: a delimiter (a PPDU of VHT is an A-MPDU) and an
 * ACK: 43 + 67.5 + 64 + 16 + 28 = 218.5 us.  Protected 802.11g: DIFS of two
 * long slots 50 + backoff 150 + CTS 203 + 10 + data 248 + 6 + 10 + ACK 28 + 6
 * = 711 us.  At 2.4 GHz without protection: 28 + 67.5 + 254 + 10 + 34 = 393.5.
 * 802.11b: 50 + 310 + 1310 + 10 + 203. */
static void
the_model_by_hand_at_other_settings(void **state)
{
	static const struct {
		const char *medium, *layers;
		double us;
	} vectors[] = {
		{ AC ", streams: 2, aggregation: no", CCMP, 218.5 },
		{ G54, OPEN, 393.5 },
		{ G54 ", protection: cts-to-self", OPEN, 711 },
		{ G54 ", protection: rts-cts", OPEN, 711 + 207 + 10 },
		{ G54 ", protection: rts-cts, preamble: short", OPEN,
		  711 + 207 + 10 - 2 * 96 },
		{ G54 ", protection: cts-to-self, protection-rate: "
		  "24 Mbit/s", OPEN, 393.5 + 28 + 6 + 10 },
		{ G54 ", control-rate: 6 Mbit/s", OPEN, 393.5 + 44 - 28 },
		{ "kind: wlan, generation: 802.11a, phy-rate: 9 Mbit/s", OPEN,
		  34 + 67.5 + 20 + 342 * 4 + 16 + 44 },
		{ "kind: wlan, generation: 802.11a, phy-rate: 12 Mbit/s",
		  OPEN, 34 + 67.5 + 20 + 257 * 4 + 16 + 32 },
		{ "kind: wlan, generation: 802.11a, phy-rate: 24 Mbit/s",
		  OPEN, 34 + 67.5 + 20 + 129 * 4 + 16 + 28 },
		{ "kind: wlan, generation: 802.11a, phy-rate: 18 Mbit/s",
		  OPEN, 34 + 67.5 + 20 + 171 * 4 + 16 + 32 },
		{ "kind: wlan, generation: 802.11a, phy-rate: 54 Mbit/s, "
		  "protection: rts-cts", OPEN, 393.5 + 2 * (28 + 16) },
		{ "kind: wlan, generation: 802.11b, phy-rate: 11 Mbit/s",
		  OPEN, 1883 },
		{ "kind: wlan, generation: 802.11b, phy-rate: 11 Mbit/s, "
		  "preamble: short, control-rate: 2 Mbit/s", OPEN,
		  50 + 310 + 96 + 1118 + 10 + 96 + 56 },
		/* 802.11n, one frame in one go, no delimiter, an ACK */
		{ "kind: wlan, generation: 802.11n, band: 5 GHz, "
		  "channel-width: 20 MHz, mcs: 7, aggregation: no", CCMP,
		  43 + 67.5 + 36 + 192 + 16 + 28 },
		{ "kind: wlan, generation: 802.11n, band: 2.4 GHz, "
		  "channel-width: 20 MHz, mcs: 7, aggregation: no", CCMP,
		  37 + 67.5 + 36 + 192 + 6 + 10 + 28 + 6 },
	};
	struct ceiling ceiling;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		air_ceiling(vectors[i].medium, vectors[i].layers,
		    PROTOCOL_UDP, DIRECTION_B_TO_A, &ceiling);
		assert_near(1472 * 8e6 /
		    (double)ceiling.rate_bps[LEVEL_PAYLOAD], vectors[i].us,
		    0.001, vectors[i].medium);
	}
}

/* Without aggregation two data frames share one acknowledgement's exchange:
 * 2 * 393.5 + (34 + 67.5 + 20 + 4 * ceil((22 + 8 * 88) / 216) + 16 + 28). */
static void
acknowledgements_take_exchanges_of_their_own(void **state)
{
	struct ceiling ceiling;

	(void)state;
	air_ceiling("kind: wlan, generation: 802.11a, phy-rate: 54 Mbit/s",
	    OPEN, PROTOCOL_TCP, DIRECTION_A_TO_B, &ceiling);
	assert_near((double)ceiling.rate_bps[LEVEL_PAYLOAD] / 1e6,
	    2 * 1448 * 8 / (2 * 393.5 + 34 + 67.5 + 20 + 16 + 16 + 28),
	    0.0005, "d = 2");
	/* 3 frames, 2 acknowledgements in one go: 25 symbols, 2 symbols */
	air_ceiling(AC ", block-ack-window: 3", CCMP, PROTOCOL_TCP,
	    DIRECTION_A_TO_B, &ceiling);
	assert_near((double)ceiling.rate_bps[LEVEL_PAYLOAD] / 1e6,
	    3 * 1448 * 8 / (2 * (43 + 67.5 + 16 + 32) + 40 + 92 + 40 + 8),
	    0.0005, "n = 3");
	/* 640 of 64 frames: a tenth of an exchange in each cycle */
	air_ceiling(AC, "wlan, ipv4, { tcp: { segments-per-acknowledgement: "
	    "640 } }", PROTOCOL_TCP, DIRECTION_A_TO_B, &ceiling);
	assert_near((double)ceiling.rate_bps[LEVEL_PAYLOAD] / 1e6,
	    64 * 1448 * 8 / (2046.5 + (43 + 67.5 + 40 + 4 + 16 + 32) / 10),
	    0.0005, "d = 640");
}

static void
the_channel_is_shared(void **state)
{
	struct load load = { .protocol = PROTOCOL_UDP };
	struct ceiling alone, shared, both;
	struct circuit *circuit;
	struct error err;

	(void)state;
	air_ceiling(AC, CCMP, PROTOCOL_UDP, DIRECTION_A_TO_B, &alone);
	air_ceiling(AC ", contention: 4", CCMP, PROTOCOL_UDP,
	    DIRECTION_A_TO_B, &shared);
	assert_near((double)shared.rate_bps[LEVEL_PAYLOAD] * 4,
	    (double)alone.rate_bps[LEVEL_PAYLOAD], 4, "contention");
	circuit = circuit_accepted("circuit: X\nmedium: { " AC " }\nlayers: "
	    "[ " CCMP " ]\n");
	load.both = true;
	assert_int_equal(ceiling_of_load(circuit, &load, &both, &err), 0);
	assert_near((double)both.rate_bps[LEVEL_PAYLOAD] * 2,
	    (double)alone.rate_bps[LEVEL_PAYLOAD], 2, "both");
	circuit_free(circuit);
}

static void
a_rate_that_the_station_shows_finds_its_mcs(void **state)
{
	static const char *const texts[] = {
		"kind: wlan, generation: 802.11ac, channel-width: 80 MHz, "
		"guard-interval: 400 ns, streams: 2, phy-rate: 866.7 Mbit/s",
		"kind: wlan, generation: 802.11ac, channel-width: 80 MHz, "
		"guard-interval: 400 ns, streams: 2, phy-rate: 866.6 Mbit/s",
	};
	struct ceiling ceiling;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(texts); i++) {
		air_ceiling(texts[i], CCMP, PROTOCOL_UDP, DIRECTION_A_TO_B,
		    &ceiling);
		assert_int_equal(ceiling.line_rate_bps, 866666666);
		assert_non_null(strstr(ceiling.notes[0], "256-QAM 5/6"));
	}
	assert_non_null(strstr(ceiling.notes[ceiling.notes_count - 1],
	    "520.0 to 650.0 Mbit/s"));
}

/* By the names of the rates and the standards' tables. */
static void
every_rate_can_be_declared(void **state)
{
	static const struct {
		const char *generation;
		double rates_mbps[9];
	} vectors[] = {
		{ "b", { 1, 2, 5.5, 11 } },
		{ "a", { 6, 9, 12, 18, 24, 36, 48, 54 } },
		{ "g", { 6, 9, 12, 18, 24, 36, 48, 54 } },
		/* one stream, 80 MHz, 800 ns */
		{ "ac, channel-width: 80 MHz", { 29.3, 58.5, 390 } },
		/* 1600 and 3200 ns, from memory */
		{ "ax, band: 5 GHz, channel-width: 20 MHz, guard-interval: "
		  "1600 ns", { 8.1, 135.4 } },
		{ "ax, band: 5 GHz, channel-width: 20 MHz, guard-interval: "
		  "3200 ns", { 7.3, 121.9 } },
		{ "be, band: 5 GHz, channel-width: 20 MHz, guard-interval: "
		  "1600 ns", { 8.1, 135.4 } },
		{ "be, band: 5 GHz, channel-width: 20 MHz, guard-interval: "
		  "3200 ns", { 7.3, 121.9 } },
		{ "n, band: 5 GHz, channel-width: 20 MHz", { 6.5, 65 } },
	};
	struct ceiling ceiling;
	char text[256];
	size_t i, n;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++)
		for (n = 0; vectors[i].rates_mbps[n] > 0; n++) {
			(void)snprintf(text, sizeof(text), "kind: wlan, "
			    "generation: 802.11%s, phy-rate: %.1f Mbit/s",
			    vectors[i].generation, vectors[i].rates_mbps[n]);
			air_ceiling(text, OPEN, PROTOCOL_UDP,
			    DIRECTION_A_TO_B, &ceiling);
			assert_near((double)ceiling.line_rate_bps / 1e6,
			    vectors[i].rates_mbps[n], 0.0501, text);
		}
	/* the first index of two streams of 802.11n: twice 6.5 */
	air_ceiling("kind: wlan, generation: 802.11n, band: 5 GHz, "
	    "channel-width: 20 MHz, mcs: 8, streams: 2", CCMP, PROTOCOL_UDP,
	    DIRECTION_A_TO_B, &ceiling);
	assert_int_equal(ceiling.line_rate_bps, 13000000);
}

/* Rates descend and the octets add up whatever the size. */
static void
steps_add_up_for_every_packet(void **state)
{
	static const char *const texts[] = { AC, AX, G54, AC
	    ", aggregation: no", AX ", protection: rts-cts" };
	struct ceiling ceiling;
	struct circuit *circuit;
	struct error err;
	char text[512];
	size_t i, n;
	uint64_t mtu;

	(void)state;
	for (i = 0; i < COUNT(texts); i++)
		for (mtu = 68; mtu <= 2296; mtu += 97) {
			(void)snprintf(text, sizeof(text), "circuit: X\n"
			    "medium: { %s }\nlayers: [ " CCMP " ]\nmtu: %llu "
			    "B\n", texts[i], (unsigned long long)mtu);
			circuit = circuit_accepted(text);
			assert_int_equal(ceiling_compute(circuit,
			    DIRECTION_A_TO_B, PROTOCOL_TCP, &ceiling, &err),
			    0);
			for (n = 1; n < LEVELS; n++)
				assert_true(ceiling.rate_bps[n] <=
				    ceiling.rate_bps[0] ||
				    ceiling.rate_bps[n] == 0);
			assert_true(ceiling.rate_bps[LEVEL_LINE] <=
			    ceiling.line_rate_bps);
			circuit_free(circuit);
		}
}

static void
a_packet_longer_than_an_msdu_is_refused(void **state)
{
	(void)state;
	air_refused_with(AC, CCMP, "mtu: 2297 B\n",
	    "test:4:6: mtu: found 2297 B, allowed on medium wlan: at most "
	    "2296 B");
}

#define W "kind: wlan, "
static const struct air_refusal wlan_refusals[] = {
	{ W "mcs: 9", "'generation' is missing" },
	{ W "generation: 802.11ay", "allowed: one of 802.11b" },
	{ W "generation: 802.11ax, channel-width: 80 MHz, mcs: 1",
	  "'band' is missing" },
	{ W "generation: 802.11ac, band: 2.4 GHz", "test:2:51" },
	{ W "generation: 802.11ac, band: 2.4 GHz",
	  "allowed: 5 GHz" },
	{ W "generation: 802.11n, band: 6 GHz",
	  "allowed: 2.4 GHz, 5 GHz" },
	{ W "generation: 802.11ac, mcs: 9", "channel-width: missing, "
	  "allowed with 802.11ac at 5 GHz: 20, 40, 80, 160 MHz" },
	{ W "generation: 802.11n, band: 5 GHz, channel-width: 80 MHz",
	  "allowed with 802.11n at 5 GHz: 20, 40 MHz" },
	{ W "generation: 802.11ax, band: 2.4 GHz, channel-width: "
	  "80 MHz, mcs: 1", "20, 40 MHz" },
	{ W "generation: 802.11be, band: 5 GHz, channel-width: "
	  "320 MHz, mcs: 1", "20, 40, 80, 160 MHz" },
	{ W "generation: 802.11be, band: 6 GHz, channel-width: "
	  "60 MHz, mcs: 1", "20, 40, 80, 160, 320 MHz" },
	{ W "generation: 802.11ac, channel-width: 80.5 MHz, mcs: 1",
	  "found another" },
	{ W "generation: 802.11ac, channel-width: 19 MHz, mcs: 1",
	  "from 20 MHz to 320 MHz" },
	{ W "generation: 802.11ac, channel-width: 80, mcs: 1",
	  "no unit" },
	{ W "generation: 802.11ac, channel-width: 80 Mbit/s, mcs: 1",
	  "'Mbit/s' is the unit of a rate" },
	{ W "generation: 802.11ac, channel-width: 80 MHz",
	  "'mcs' is missing" },
	{ W "generation: 802.11ac, channel-width: 80 MHz, mcs: 9, "
	  "phy-rate: 390 Mbit/s", "mcs is given beside phy-rate" },
	{ W "generation: 802.11ac, channel-width: 80 MHz, mcs: 10",
	  "allowed with 802.11ac: 0 to 9" },
	{ W "generation: 802.11ax, band: 5 GHz, channel-width: "
	  "80 MHz, mcs: 12", "0 to 11" },
	{ W "generation: 802.11be, band: 5 GHz, channel-width: "
	  "80 MHz, mcs: 14", "0 to 13" },
	{ W "generation: 802.11n, band: 5 GHz, channel-width: "
	  "40 MHz, mcs: 32", "from 0 to 31" },
	{ W "generation: 802.11n, band: 5 GHz, channel-width: "
	  "40 MHz, mcs: 15, streams: 1", "mcs 15 of 802.11n has 2" },
	{ W "generation: 802.11ac, channel-width: 20 MHz, mcs: 9",
	  "9 with 3 or 6 streams" },
	{ W "generation: 802.11ac, channel-width: 20 MHz, mcs: 9, "
	  "streams: 2", "does not define 9 at 20 MHz with 2 streams" },
	{ W "generation: 802.11ac, channel-width: 80 MHz, mcs: 6, "
	  "streams: 3", "does not define 6 at 80 MHz" },
	{ W "generation: 802.11ac, channel-width: 160 MHz, mcs: 9, "
	  "streams: 3", "does not define 9 at 160 MHz" },
	{ AX ", guard-interval: 400 ns", "800 ns, 1600 ns, 3200 ns" },
	{ W "generation: 802.11ac, channel-width: 80 MHz, mcs: 1, "
	  "guard-interval: 1600 ns", "800 ns, 400 ns" },
	{ W "generation: 802.11ac, channel-width: 80 MHz, mcs: 1, "
	  "guard-interval: 3201 ns", "from 400 ns to 3.2 us" },
	{ W "generation: 802.11ac, channel-width: 80 MHz, mcs: 1, "
	  "streams: 9", "from 1 to 8" },
	{ W "generation: 802.11n, band: 5 GHz, channel-width: "
	  "40 MHz, phy-rate: 150 Mbit/s, streams: 5", "1 to 4" },
	{ W "generation: 802.11ac, channel-width: 80 MHz, phy-rate: "
	  "434 Mbit/s", "no mcs of 802.11ac has it at 80 MHz" },
	{ W "generation: 802.11ac, channel-width: 80 MHz, phy-rate: "
	  "390.1 Mbit/s", "no mcs of 802.11ac has it at 80 MHz" },
	{ W "generation: 802.11ac, channel-width: 80 MHz, phy-rate: "
	  "390 Mbit", "'Mbit' is the unit of a size" },
	{ W "generation: 802.11n, band: 5 GHz, channel-width: 20 MHz, "
	  "phy-rate: 78 Mbit/s", "no mcs of 802.11n has it at 20 MHz" },
	{ W "generation: 802.11a", "phy-rate: missing" },
	{ W "generation: 802.11a, phy-rate: 11 Mbit/s",
	  "6, 9, 12, 18, 24, 36, 48, 54 Mbit/s" },
	{ W "generation: 802.11b, phy-rate: 54 Mbit/s",
	  "1, 2, 5.5, 11 Mbit/s" },
	{ G54 ", mcs: 7", "802.11g has none" },
	{ G54 ", streams: 1", "streams: 802.11g has none" },
	{ G54 ", guard-interval: 800 ns", "802.11g has none" },
	{ G54 ", a-mpdu-limit: 65535 B", "802.11g has none" },
	{ G54 ", block-ack-window: 64", "802.11g has none" },
	{ G54 ", aggregation: yes", "aggregation: 802.11g has none" },
	{ G54 ", channel-width: 40 MHz", "allowed with 802.11g: "
	  "20 MHz" },
	{ G54 ", channel-width: 20.1 MHz", "allowed with 802.11g" },
	{ G54 ", band: 5 GHz", "allowed: 2.4 GHz" },
	{ G54 ", control-rate: 11 Mbit/s", "control-rate: allowed" },
	{ W "generation: 802.11b, phy-rate: 11 Mbit/s, control-rate: "
	  "6 Mbit/s", "1, 2, 5.5, 11 Mbit/s" },
	{ G54 ", protection-rate: 11 Mbit/s", "protection is none" },
	{ G54 ", protection: rts-cts, protection-rate: 10 Mbit/s",
	  "1, 2, 5.5, 11, 6, 9" },
	{ AC ", protection: rts-cts, protection-rate: 11 Mbit/s",
	  "allowed: 6, 9" },
	{ W "generation: 802.11b, phy-rate: 11 Mbit/s, protection: "
	  "cts-to-self, protection-rate: 6 Mbit/s",
	  "allowed: 1, 2, 5.5, 11 Mbit/s" },
	{ AC ", protection: yes", "none, cts-to-self, rts-cts" },
	{ AC ", preamble: none", "long, short" },
	{ AC ", aggregation: no, a-mpdu-limit: 65535 B",
	  "aggregation is off" },
	{ AC ", aggregation: no, block-ack-window: 64",
	  "aggregation is off" },
	{ AC ", aggregation: 1", "yes or no" },
	{ AC ", a-mpdu-limit: 1048576 B", "at most 1048575 B" },
	{ AC ", a-mpdu-limit: 15523199 B", "a-mpdu-limit" },
	{ AC ", a-mpdu-limit: 0 B", "a-mpdu-limit" },
	{ AC ", block-ack-window: 65", "at most 64" },
	{ AX ", block-ack-window: 257", "at most 256" },
	{ AX ", block-ack-window: 1025", "from 1 to 1024" },
	{ AC ", block-ack-window: 0", "from 1 to 1024" },
	{ AC ", contention: 0", "contention" },
	{ AC ", contention: 100001", "contention" },
	{ AC ", snr: 30 dB", "unknown field 'snr'" },
};

static void
what_is_not_defined_is_refused_with_its_place(void **state)
{
	(void)state;
	air_refused_all(wlan_refusals, COUNT(wlan_refusals), CCMP);
	circuit_refused("circuit: X\nmedium: { " AC " }\nlayers: [ ethernet, "
	    "ipv4, tcp ]\n", "ethernet on medium wlan");
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(the_model_gives_the_published_cycles),
		cmocka_unit_test(the_model_by_hand_at_other_settings),
		cmocka_unit_test(acknowledgements_take_exchanges_of_their_own),
		cmocka_unit_test(the_channel_is_shared),
		cmocka_unit_test(a_rate_that_the_station_shows_finds_its_mcs),
		cmocka_unit_test(every_rate_can_be_declared),
		cmocka_unit_test(steps_add_up_for_every_packet),
		cmocka_unit_test(a_packet_longer_than_an_msdu_is_refused),
		cmocka_unit_test(what_is_not_defined_is_refused_with_its_place),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
