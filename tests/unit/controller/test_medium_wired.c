/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the media on wires and fibres offer their layers, against published
 * figures. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "medium_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define CELL 53
#define DOWN DIRECTION_A_TO_B		/* the subscriber is end b */
#define UP DIRECTION_B_TO_A

#define G704 "ITU-T G.704 as E1 and T1 manuals quote it"

static void
a_pdh_signal_offers_its_payload(void **state)
{
	static const struct {
		const char *medium;
		uint64_t line_bps, offered_bps;	/* rounded down */
		uint64_t tolerance_ppm;
		const char *source;
	} vectors[] = {
		{ "signal: t1", 1544000, 1536000, 32, "RFC 6349 s3.3.1" },
		{ "signal: t1, framing: framed", 1544000, 1536000, 32,
		  "RFC 6349 s3.3.1" },
		{ "signal: t1, framing: unframed", 1544000, 1544000, 32,
		  G704 },
		{ "signal: t1, slots: 1", 1544000, 64000, 32, G704 },
		{ "signal: t1, slots: 1, robbed-bits: yes", 1544000, 56000,
		  32, "7 of 8 bits, from memory" },
		{ "signal: t1, robbed-bits: yes", 1544000, 24 * 56000, 32,
		  "7 of 8 bits, from memory" },
		{ "signal: t1, slots: 24", 1544000, 1536000, 32, G704 },
		{ "signal: e1", 2048000, 1984000, 50, G704 },
		{ "signal: e1, framing: signalling", 2048000, 1920000, 50,
		  G704 },
		{ "signal: e1, framing: unframed", 2048000, 2048000, 50,
		  G704 },
		{ "signal: e1, slots: 31", 2048000, 1984000, 50, G704 },
		{ "signal: e1, slots: 8", 2048000, 512000, 50, G704 },
		{ "signal: e1, framing: signalling, slots: 30", 2048000,
		  1920000, 50, G704 },
		{ "signal: e3, framing: unframed", 34368000, 34368000, 20,
		  "ITU-T G.702" },
		{ "signal: e3, framing: g.832", 34368000, 33920000, 20,
		  "ITU-T G.832, ATM media table" },
		/* 22375 frames a second, 1536 bits, 12 of overhead */
		{ "signal: e3, framing: g.751", 34368000, 22375 * 1524, 20,
		  "ITU-T G.751" },
		{ "signal: ds3", 44736000, 44209694, 20,
		  "DS3 frame: 44736 * 4704/4760 kbit/s" },
		{ "signal: ds3, framing: c-bit", 44736000, 44209694, 20,
		  "RFC 6349 rounds to 44.21" },
		{ "signal: ds3, mapping: plcp", 44736000, 40704000, 20,
		  "ATM media table" },
		{ "signal: e3, framing: g.751, mapping: plcp", 34368000,
		  30528000, 20, "ATM media table" },
	};
	struct medium_capacity capacity;
	char text[160];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ kind: pdh, %s }",
		    vectors[i].medium);
		capacity_of(text, i % 2 == 0 ? DOWN : UP, CELL, &capacity);
		assert_int_equal(fraction_floor(capacity.line_bps),
		    vectors[i].line_bps);
		assert_int_equal(fraction_floor(capacity_offered(&capacity)),
		    vectors[i].offered_bps);
		assert_int_equal(capacity.tolerance_ppm,
		    vectors[i].tolerance_ppm);
	}
}

static void
all_slots_of_a_frame_leave_none_to_others(void **state)
{
	struct medium_capacity capacity;

	(void)state;
	capacity_of("{ kind: pdh, signal: e1, slots: 31 }", DOWN, CELL,
	    &capacity);
	assert_int_equal(capacity.steps_count, 1);
}

static void
a_signal_carries_the_published_cell_rate(void **state)
{
	static const struct {
		const char *medium;
		uint64_t cells_per_s;
		const char *source;
	} vectors[] = {
		{ "{ kind: sdh, signal: sts-3c }", 353207, "ATM media table" },
		{ "{ kind: pdh, signal: ds3, mapping: plcp }", 96000,
		  "ATM media table" },
		{ "{ kind: pdh, signal: ds3 }", 104268, "44209.7/424" },
		{ "{ kind: pdh, signal: e3, framing: g.832 }", 80000,
		  "ATM media table" },
		{ "{ kind: pdh, signal: e3, framing: g.751, mapping: plcp }",
		  72000, "ATM media table" },
		{ "{ kind: pdh, signal: e1, framing: signalling }", 4528,
		  "1920/424" },
		{ "{ kind: pdh, signal: t1 }", 3622, "DS1: 1536/424" },
	};
	struct medium_capacity capacity;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		capacity_of(vectors[i].medium, DOWN, CELL, &capacity);
		assert_int_equal(fraction_floor(capacity_offered(&capacity)) /
		    (8 * CELL), vectors[i].cells_per_s);
	}
	/* OC-3c: 48/53 of it is the user's, 135 631.7 kbit/s */
	capacity_of(vectors[0].medium, DOWN, CELL, &capacity);
	assert_printed("OC-3c, user's part", offered(&capacity) * 48 / CELL,
	    135631700, 100, "ATM page: 135.63 Mbit/s");
}

static void
sonet_and_sdh_have_the_same_payload(void **state)
{
	static const struct {
		const char *names[2];
		uint64_t line_bps, payload_bps;
		const char *source;
	} vectors[] = {
		{ { "sts-1", "stm-0" }, 51840000, 48384000, "SDH manuals" },
		{ { "sts-3c", "stm-1" }, 155520000, 149760000, "RFC 1619" },
		{ { "sts-12c", "stm-4" }, 622080000, 599040000,
		  "RFC 5180 A.2" },
		{ { "sts-48c", "stm-16" }, 2488320000, 2396160000,
		  "RFC 5180 A.2" },
		{ { "sts-192c", "stm-64" }, 9953280000, 9584640000,
		  "RFC 5180 A.2" },
		{ { "sts-768c", "stm-256" }, 39813120000, 38338560000,
		  "RFC 5180 A.2" },
	};
	struct medium_capacity capacity;
	char text[64];
	size_t i, n;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++)
		for (n = 0; n < 2; n++) {
			(void)snprintf(text, sizeof(text), "{ kind: sdh, "
			    "signal: %s }", vectors[i].names[n]);
			capacity_of(text, DOWN, 100, &capacity);
			assert_int_equal(capacity.line_bps.num,
			    vectors[i].line_bps);
			assert_int_equal(capacity.line_bps.den, 1);
			assert_int_equal(capacity_offered(&capacity).num,
			    vectors[i].payload_bps);
			assert_int_equal(capacity_offered(&capacity).den, 1);
			assert_int_equal(capacity.tolerance_ppm, 20);
		}
}

/* SPE and VC as SONET and SDH rate tables print them. */
static void
sdh_steps_stop_at_the_published_envelopes(void **state)
{
	static const char section[] = "section and line overhead";
	static const char path[] = "path overhead";
	static const char members[] = "containers of others, pointers, stuff";
	static const struct {
		const char *medium, *step;
		double left_bps;
	} vectors[] = {
		{ "signal: sts-1", section, 50112000 },
		/* 86 and 84 columns of 576 kbit/s */
		{ "signal: sts-1", path, 86 * 576000 },
		{ "signal: sts-1", "fixed stuff", 48384000 },
		{ "signal: stm-1", section, 150336000 },
		{ "signal: stm-1", path, 149760000 },
		/* 4 * 261 columns less one, less three of stuff */
		{ "signal: stm-4", section, 601344000 },
		{ "signal: stm-4", path, 1043 * 576000 },
		{ "signal: stm-4", "fixed stuff", 599040000 },
		{ "signal: stm-1, container: vc-11", members, 1664000 },
		{ "signal: stm-1, container: vc-12", members, 2240000 },
		{ "signal: stm-1, container: vc-3", members, 48960000 },
		{ "signal: stm-1, container: vc-4", members, 150336000 },
	};
	struct medium_capacity capacity;
	char text[96];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ kind: sdh, %s }",
		    vectors[i].medium);
		capacity_of(text, DOWN, 100, &capacity);
		assert_printed(text, left_after(&capacity, vectors[i].step),
		    vectors[i].left_bps, 0, "VC table");
	}
}

static void
virtual_concatenation_multiplies_the_container(void **state)
{
	static const struct {
		const char *medium;
		uint64_t payload_bps;
		const char *source;
	} vectors[] = {
		{ "signal: stm-1, container: vc-11", 1600000, "VC table" },
		{ "signal: stm-1, container: vc-12", 2176000, "VC table" },
		{ "signal: stm-1, container: vc-3", 48384000, "VC table" },
		{ "signal: sts-1, container: vc-3", 48384000, "VC table" },
		{ "signal: stm-1, container: vc-4", 149760000, "VC table" },
		{ "signal: stm-1, container: vc-12, members: 46", 100096000,
		  "VC-12-46v" },
		{ "signal: stm-1, container: vc-3, members: 2", 96768000,
		  "VC-3-2v" },
		{ "signal: stm-16, container: vc-4, members: 7", 1048320000,
		  "VC-4-7v" },
		/* the most that fit, by the multiplexing of G.707 */
		{ "signal: sts-1, container: vc-11, members: 28",
		  28 * 1600000, "28 in an STS-1" },
		{ "signal: sts-1, container: vc-12, members: 21",
		  21 * 2176000, "21 in an STS-1" },
		{ "signal: stm-1, container: vc-11, members: 64",
		  64 * 1600000, "84 in an STM-1, 64 concatenated" },
		{ "signal: stm-1, container: vc-12, members: 63",
		  63 * 2176000, "63 in an STM-1" },
		{ "signal: stm-1, container: vc-3, members: 3", 3 * 48384000,
		  "3 in an STM-1" },
		{ "signal: stm-4, container: vc-4, members: 4",
		  4 * 149760000, "4 in an STM-4" },
	};
	struct medium_capacity capacity;
	char text[128];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ kind: sdh, %s }",
		    vectors[i].medium);
		capacity_of(text, UP, 100, &capacity);
		assert_int_equal(capacity_offered(&capacity).num,
		    vectors[i].payload_bps);
		assert_int_equal(capacity_offered(&capacity).den, 1);
		assert_int_equal(capacity.notes_count, 1);
	}
	capacity_of("{ kind: sdh, signal: stm-16, container: vc-4, members: "
	    "7 }", UP, 100, &capacity);
	assert_string_equal(capacity.notes[0], "vc-4-7v: 7 members of 149760 "
	    "kbit/s");
}

/* RFC 5180 A.2: frames of X octets, rounded down: payload/8/(X + 1). */
static void
packet_over_sonet_has_the_frame_rates_of_rfc_5180(void **state)
{
	static const struct {
		const char *signal;
		uint64_t frame_bytes, per_s;
	} vectors[] = {
		{ "sts-3c", 47, 390000 }, { "sts-3c", 64, 288000 },
		{ "sts-3c", 256, 72840 }, { "sts-3c", 1024, 18263 },
		{ "sts-3c", 4096, 4569 }, { "sts-192c", 64, 18432000 },
		{ "sts-192c", 1024, 1168858 },
	};
	struct medium_capacity capacity;
	char text[64];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ kind: sdh, signal: %s }",
		    vectors[i].signal);
		capacity_of(text, DOWN, vectors[i].frame_bytes + 1,
		    &capacity);
		assert_int_equal(fraction_floor(fraction_divide(
		    capacity_offered(&capacity), fraction_whole(8 *
		    (vectors[i].frame_bytes + 1)))), vectors[i].per_s);
	}
}

/* kbit/s to three places: ITU-T G.709 Tables 7-1 to 7-3. */
static void
otn_has_the_rates_of_g709(void **state)
{
	static const struct {
		const char *name;
		/* otu 0: none */
		double otu_kbit_per_s, odu_kbit_per_s, opu_kbit_per_s;
		uint64_t tolerance_ppm;
	} vectors[] = {
		{ "odu0", 0, 1244160, 1238954.310, 20 },
		{ "odu1", 2666057.143, 2498775.126, 2488320.000, 20 },
		{ "odu2", 10709225.316, 10037273.924, 9995276.962, 20 },
		{ "odu2e", 11095727.848, 10399525.316, 10356012.658, 100 },
		{ "odu3", 43018413.559, 40319218.983, 40150519.322, 20 },
		{ "odu4", 111809973.568, 104794445.815, 104355975.330, 20 },
	};
	static const char g709[] = "ITU-T G.709";
	struct medium_capacity capacity;
	char text[64];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ kind: otn, signal: %s }",
		    vectors[i].name);
		capacity_of(text, DOWN, 1518, &capacity);
		assert_printed(text, offered(&capacity),
		    vectors[i].opu_kbit_per_s * 1e3, 1, g709);
		if (vectors[i].otu_kbit_per_s > 0)
			assert_printed(text, left_after(&capacity,
			    "FEC of the OTU"), vectors[i].odu_kbit_per_s * 1e3,
			    1, g709);
		assert_printed(text, fraction_double(capacity.line_bps),
		    (vectors[i].otu_kbit_per_s > 0 ? vectors[i].otu_kbit_per_s :
		    vectors[i].odu_kbit_per_s) * 1e3, 1, g709);
		assert_int_equal(capacity.tolerance_ppm,
		    vectors[i].tolerance_ppm);
	}
}

/* Not an Ethernet's nor a clock's: what a modem shows is what it offers. */
static void
a_modem_offers_its_synchronisation_rate(void **state)
{
	static const struct {
		const char *medium;
		uint64_t down_bps, up_bps;
	} vectors[] = {
		{ "{ kind: adsl2plus, downstream: 24 Mbit/s, upstream: "
		  "1 Mbit/s }", 24000000, 1000000 },
		{ "{ kind: adsl2plus, downstream: 8.128 Mbit/s, upstream: "
		  "640 kbit/s, lines: 2 }", 16256000, 1280000 },
		{ "{ kind: vdsl2, downstream: 100 Mbit/s, upstream: "
		  "40 Mbit/s }", 100000000, 40000000 },
		{ "{ kind: vdsl2, downstream: 50 Mbit/s, upstream: "
		  "10 Mbit/s, lines: 32 }", 1600000000, 320000000 },
		/* 2 % by default for retransmission units */
		{ "{ kind: gfast, downstream: 500 Mbit/s, upstream: "
		  "100 Mbit/s }", 490000000, 98000000 },
		{ "{ kind: gfast, downstream: 500 Mbit/s, upstream: "
		  "100 Mbit/s, retransmission-units: 0 % }", 500000000,
		  100000000 },
		{ "{ kind: gfast, downstream: 500 Mbit/s, upstream: "
		  "100 Mbit/s, retransmission-units: 3.5 %, lines: 2 }",
		  965000000, 193000000 },
		{ "{ kind: gfast, downstream: 7 bit/s, upstream: 1 Mbit/s, "
		  "retransmission-units: 50 % }", 3, 500000 },
	};
	struct medium_capacity capacity;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		capacity_of(vectors[i].medium, DOWN, CELL, &capacity);
		assert_int_equal(capacity_offered(&capacity).num,
		    vectors[i].down_bps);
		capacity_of(vectors[i].medium, UP, CELL, &capacity);
		assert_int_equal(capacity_offered(&capacity).num,
		    vectors[i].up_bps);
		assert_int_equal(capacity_offered(&capacity).den, 1);
		assert_int_equal(capacity.tolerance_ppm, 50);
		assert_int_equal(capacity.duplex, DUPLEX_FULL);
		/* bonding, and the turns of G.fast, are said */
		assert_int_equal(capacity.notes_count,
		    (strstr(vectors[i].medium, "lines") != NULL) +
		    (strstr(vectors[i].medium, "gfast") != NULL));
	}
}

static void
the_subscriber_turns_the_line_round(void **state)
{
	struct medium_capacity capacity;

	(void)state;
	capacity_of("{ kind: vdsl2, downstream: 100 Mbit/s, upstream: "
	    "40 Mbit/s, subscriber: a }", DIRECTION_A_TO_B, CELL, &capacity);
	assert_int_equal(capacity.line_bps.num, 40000000);
	capacity_of("{ kind: docsis-3.0, downstream-channels: 1, "
	    "upstream-rate: 9 Mbit/s, subscriber: a }", DIRECTION_A_TO_B,
	    1535, &capacity);
	assert_int_equal(capacity.line_bps.num, 9000000);
	capacity_of("{ kind: gpon, subscriber: a }", DIRECTION_A_TO_B, 1523,
	    &capacity);
	assert_int_equal(capacity.line_bps.num, 1244160000);
}

#define FRAMING "framing of a published walk through the octets"

static void
a_tree_offers_what_its_frame_leaves(void **state)
{
	static const struct {
		const char *medium;
		enum direction direction;
		double line_mbit_per_s, offered_mbit_per_s, digit_mbit_per_s;
		const char *source;
	} vectors[] = {
		{ "kind: gpon", DOWN, 2488.32, 2485.888, 0.001, "G1; "
		  FRAMING ": 38842 octets" },
		{ "kind: gpon, fec: no, allocations: 1", DOWN, 2488.32,
		  2485.888, 0.001, "G1" },
		{ "kind: gpon, fec: yes", DOWN, 2488.32, 2329.216, 0.001,
		  "G2" },
		{ "kind: gpon, fec: yes, allocations: 32", DOWN, 2488.32,
		  2313.344, 0.001, "G3" },
		{ "kind: gpon", UP, 1244.16, 1243.072, 0.001, "G4" },
		{ "kind: gpon, fec: yes", UP, 1244.16, 1165, 1, "G4" },
		{ "kind: gpon, bursts: 32", UP, 1244.16, 1209.344, 0.001,
		  "G5" },
		{ "kind: gpon, fec: yes, bursts: 32", UP, 1244.16, 1133, 1,
		  "G5" },
		{ "kind: xgs-pon", DOWN, 9953.28, 8666.624, 0.001, "G6" },
		{ "kind: xgs-pon, allocations: 64", DOWN, 9953.28, 8634.368,
		  0.001, "G7" },
		{ "kind: xg-pon", DOWN, 9953.28, 8666.624, 0.001, "G6" },
		/* 48 octets a message: 8666.624 - 2 * 48 * 0.064 */
		{ "kind: xg-pon, ploam-messages: 2", DOWN, 9953.28, 8660.480,
		  0.001, "G.987.3" },
		{ "kind: xgs-pon, ploam-messages: 2", DOWN, 9953.28, 8660.480,
		  0.001, "G.9807.1" },
		{ "kind: xgs-pon, burst-overhead: 0 B", UP, 9953.28, 9311.13,
		  0.01, "232/248, from memory" },
		{ "kind: xg-pon, burst-overhead: 0 B", UP, 2488.32, 2327.78,
		  0.01, "232/248, from memory" },
		/* 44 and 268 octets a burst of 64 kbit/s each */
		{ "kind: xg-pon, fec: no", UP, 2488.32, 2485.504, 0.001,
		  "from memory" },
		{ "kind: xgs-pon, fec: no", UP, 9953.28, 9936.128, 0.001,
		  "from memory" },
		{ "kind: xgs-pon, fec: no, bursts: 3, burst-overhead: 100 B",
		  UP, 9953.28, 9934.08, 0.001, "from memory" },
	};
	struct medium_capacity capacity;
	char text[96];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ %s }",
		    vectors[i].medium);
		capacity_of(text, vectors[i].direction, 1523, &capacity);
		assert_printed(text, fraction_double(capacity.line_bps),
		    vectors[i].line_mbit_per_s * 1e6, 0, vectors[i].source);
		assert_printed(text, offered(&capacity),
		    vectors[i].offered_mbit_per_s * 1e6,
		    vectors[i].digit_mbit_per_s * 1e6, vectors[i].source);
		assert_int_equal(capacity.tolerance_ppm, 32);
		assert_int_equal(capacity.contention, 1);
	}
}

/* 24 octets of PSBd, 627 words: 155496 and 135432 octets; GPON: 30 octets of
 * header; 153 * 16 of parity. */
static void
a_tree_shows_its_frame_as_steps(void **state)
{
	static const struct {
		const char *medium, *step;
		uint64_t octets;
	} vectors[] = {
		{ "{ kind: xgs-pon }", "synchronisation block", 155496 },
		{ "{ kind: xgs-pon }", "FEC", 135432 },
		{ "{ kind: xgs-pon }", "frame header and trailer", 135424 },
		{ "{ kind: xgs-pon }", "upstream map", 135416 },
		{ "{ kind: gpon }", "frame header", 38850 },
		{ "{ kind: gpon }", "upstream map", 38842 },
		{ "{ kind: gpon, fec: yes }", "FEC", 36432 },
	};
	struct medium_capacity capacity;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		capacity_of(vectors[i].medium, DOWN, 1523, &capacity);
		assert_printed(vectors[i].medium, left_after(&capacity,
		    vectors[i].step), (double)vectors[i].octets * 64000, 0,
		    FRAMING);
	}
}

static void
a_shared_medium_says_how_many_share_it(void **state)
{
	static const char *const mediums[] = {
		"kind: docsis-3.0, downstream-channels: 8, upstream-rate: "
		    "27 Mbit/s",
		"kind: docsis-3.1, occupied: 96 MHz, bits-per-subcarrier: 10, "
		    "upstream-rate: 100 Mbit/s",
		"kind: gpon", "kind: xg-pon", "kind: xgs-pon",
	};
	struct medium_capacity capacity;
	char text[160];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(mediums); i++) {
		(void)snprintf(text, sizeof(text), "{ %s, contention: 32 }",
		    mediums[i]);
		capacity_of(text, DOWN, 1535, &capacity);
		assert_int_equal(capacity.contention, 32);
		capacity_of(text, UP, 1528, &capacity);
		assert_int_equal(capacity.contention, 32);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_pdh_signal_offers_its_payload),
		cmocka_unit_test(all_slots_of_a_frame_leave_none_to_others),
		cmocka_unit_test(a_signal_carries_the_published_cell_rate),
		cmocka_unit_test(sonet_and_sdh_have_the_same_payload),
		cmocka_unit_test(sdh_steps_stop_at_the_published_envelopes),
		cmocka_unit_test(
		    virtual_concatenation_multiplies_the_container),
		cmocka_unit_test(
		    packet_over_sonet_has_the_frame_rates_of_rfc_5180),
		cmocka_unit_test(otn_has_the_rates_of_g709),
		cmocka_unit_test(a_modem_offers_its_synchronisation_rate),
		cmocka_unit_test(the_subscriber_turns_the_line_round),
		cmocka_unit_test(a_tree_offers_what_its_frame_leaves),
		cmocka_unit_test(a_tree_shows_its_frame_as_steps),
		cmocka_unit_test(a_shared_medium_says_how_many_share_it),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
