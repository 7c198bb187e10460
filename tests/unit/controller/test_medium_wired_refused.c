/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the media on wires, fibres and coaxial cable refuse, with its place. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "medium_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

/* '@' stands before what the refusal must point at. */
struct refusal {
	const char *medium, *expected;
};

static void
assert_refusals(const struct refusal rows[], size_t count)
{
	size_t i;

	for (i = 0; i < count; i++)
		medium_refused(rows[i].medium, rows[i].expected);
}

static void
a_pdh_medium_refuses_what_no_signal_has(void **state)
{
	static const struct refusal rows[] = {
		{ "@{ kind: pdh }", "'signal' is missing" },
		{ "{ kind: pdh, signal: @stm-1 }", "t1, e1, e3, ds3" },
		{ "{ kind: pdh, signal: @t3 }", "signal" },
		{ "@{ kind: pdh, signal: e3 }",
		  "'framing' is missing, allowed with e3: g.751, g.832, "
		  "unframed" },
		{ "{ kind: pdh, signal: t1, framing: @signalling }",
		  "allowed with t1: framed, unframed" },
		{ "{ kind: pdh, signal: t1, framing: @c-bit }",
		  "allowed with t1: framed, unframed" },
		{ "{ kind: pdh, signal: e1, framing: @g.832 }",
		  "allowed with e1: framed, signalling, unframed" },
		{ "{ kind: pdh, signal: e3, framing: @framed }",
		  "allowed with e3" },
		{ "{ kind: pdh, signal: ds3, framing: @unframed }",
		  "allowed with ds3: c-bit" },
		{ "{ kind: pdh, signal: ds3, framing: @m23 }", "framing" },
		{ "{ kind: pdh, signal: t1, mapping: @plcp }", "'plcp' on t1" },
		{ "{ kind: pdh, signal: e1, mapping: @plcp }", "on ds3" },
		{ "{ kind: pdh, signal: e3, framing: g.832, mapping: @plcp }",
		  "e3 with framing g.751" },
		{ "{ kind: pdh, signal: ds3, mapping: @hec }", "direct, plcp" },
		{ "{ kind: pdh, signal: t1, slots: @25 }", "at most 24" },
		{ "{ kind: pdh, signal: t1, slots: @0 }", "1 to 31" },
		{ "{ kind: pdh, signal: e1, slots: @32 }", "1 to 31" },
		{ "{ kind: pdh, signal: e1, framing: signalling, slots: "
		  "@31 }", "at most 30" },
		{ "{ kind: pdh, signal: e1, framing: unframed, slots: @1 }",
		  "with framing framed or signalling" },
		{ "{ kind: pdh, signal: ds3, slots: @1 }", "slots" },
		{ "{ kind: pdh, signal: t1, framing: unframed, slots: @1 }",
		  "with framing framed" },
		{ "{ kind: pdh, signal: e3, framing: unframed, slots: @1 }",
		  "slots" },
		{ "{ kind: pdh, signal: e3, framing: g.751, slots: @1 }",
		  "slots" },
		{ "{ kind: pdh, signal: e3, framing: g.832, slots: @1 }",
		  "slots" },
		{ "{ kind: pdh, signal: t1, framing: unframed, mapping: "
		  "@plcp }", "on ds3" },
		{ "{ kind: pdh, signal: e1, framing: unframed, mapping: "
		  "@plcp }", "on ds3" },
		{ "{ kind: pdh, signal: e1, framing: signalling, mapping: "
		  "@plcp }", "on ds3" },
		{ "{ kind: pdh, signal: e3, framing: unframed, mapping: "
		  "@plcp }", "on ds3" },
		{ "{ kind: pdh, signal: e1, robbed-bits: @yes }",
		  "with signal t1" },
		{ "{ kind: pdh, signal: t1, framing: unframed, robbed-bits: "
		  "@yes }", "framing framed" },
		{ "{ kind: pdh, signal: t1, robbed-bits: @2 }", "yes or no" },
	};

	(void)state;
	assert_refusals(rows, COUNT(rows));
}

static void
an_sdh_medium_refuses_what_does_not_fit(void **state)
{
	static const struct refusal rows[] = {
		{ "@{ kind: sdh }", "'signal' is missing" },
		{ "{ kind: sdh, signal: @stm-2 }", "sts-3c, stm-1" },
		{ "{ kind: sdh, signal: stm-1, container: @vc-2 }",
		  "vc-11, vc-12, vc-3, vc-4" },
		{ "{ kind: sdh, signal: stm-1, members: @3 }",
		  "beside 'container'" },
		{ "{ kind: sdh, signal: sts-1, container: @vc-4 }",
		  "allowed in an STS-1: vc-11, vc-12, vc-3" },
		{ "{ kind: sdh, signal: stm-1, container: vc-4, members: "
		  "@0 }", "1 to 256" },
		{ "{ kind: sdh, signal: stm-1, container: vc-4, members: "
		  "@257 }", "1 to 256" },
		{ "{ kind: sdh, signal: stm-1, container: vc-4, members: "
		  "@2 }", "at most 1" },
		{ "{ kind: sdh, signal: stm-1, container: vc-3, members: "
		  "@4 }", "at most 3" },
		{ "{ kind: sdh, signal: stm-1, container: vc-12, members: "
		  "@64 }", "at most 63" },
		{ "{ kind: sdh, signal: stm-1, container: vc-11, members: "
		  "@65 }", "at most 64" },
		{ "{ kind: sdh, signal: stm-4, container: vc-12, members: "
		  "@65 }", "at most 64" },
		{ "{ kind: sdh, signal: sts-1, container: vc-11, members: "
		  "@29 }", "at most 28" },
		{ "{ kind: sdh, signal: sts-1, container: vc-12, members: "
		  "@22 }", "at most 21" },
		{ "{ kind: sdh, signal: sts-1, container: vc-3, members: "
		  "@2 }", "at most 1" },
		{ "@{ kind: otn }", "'signal' is missing" },
		{ "{ kind: otn, signal: @odu5 }", "odu0, odu1, odu2, odu2e, "
		  "odu3, odu4" },
		{ "{ kind: otn, signal: @[ odu1 ] }", "signal" },
	};

	(void)state;
	assert_refusals(rows, COUNT(rows));
}

/* The largest containers of the largest signals are accepted. */
static void
as_many_members_as_can_be_concatenated_are_accepted(void **state)
{
	struct medium_use use;

	(void)state;
	medium_accepted("{ kind: sdh, signal: stm-256, container: vc-4, "
	    "members: 256 }", &use);
	medium_accepted("{ kind: sdh, signal: stm-256, container: vc-3, "
	    "members: 256 }", &use);
	medium_accepted("{ kind: sdh, signal: stm-4, container: vc-12, "
	    "members: 64 }", &use);
}

/* Tones * bits * symbols a second: 480 * 15 * 4000 = 28.8 Mbit/s and so on;
 * a rate of exactly that is let through. */
static void
a_synchronisation_rate_must_be_plausible(void **state)
{
	static const char *const accepted[] = {
		"{ kind: adsl2plus, downstream: 28.8 Mbit/s, upstream: "
		    "1.92 Mbit/s }",
		"{ kind: adsl2plus, downstream: 26.88 Mbit/s, upstream: "
		    "3.84 Mbit/s }",
		"{ kind: vdsl2, downstream: 391.52 Mbit/s, upstream: "
		    "100 Mbit/s }",
		"{ kind: vdsl2, profile: 30a, downstream: 317.48 Mbit/s, "
		    "upstream: 100 Mbit/s }",
		"{ kind: vdsl2, profile: 17a, downstream: 145.76 Mbit/s, "
		    "upstream: 100 Mbit/s }",
		"{ kind: vdsl2, profile: 12, downstream: 66.98 Mbit/s, "
		    "upstream: 100 Mbit/s }",
		"{ kind: vdsl2, profile: 8, downstream: 122.87 Mbit/s, "
		    "upstream: 10 kbit/s, lines: 32 }",
		"{ kind: gfast, profile: 106a, downstream: 1000 Mbit/s, "
		    "upstream: 179.648 Mbit/s }",
		"{ kind: gfast, profile: 212a, downstream: 2000 Mbit/s, "
		    "upstream: 359.296 Mbit/s }",
		"{ kind: vdsl2, profile: 35b, downstream: 391.52 Mbit/s, "
		    "upstream: 100 Mbit/s }",
		"{ kind: gfast, downstream: 2359.295 Mbit/s, upstream: "
		    "1 kbit/s }",
	};
	static const struct refusal rows[] = {
		{ "{ kind: adsl2plus, downstream: @28.800001 Mbit/s, "
		  "upstream: 1 Mbit/s }", "at most 28.8 Mbit/s" },
		{ "{ kind: adsl2plus, downstream: 1 Mbit/s, upstream: "
		  "@3.840001 Mbit/s }", "at most 3.84 Mbit/s" },
		{ "{ kind: adsl2plus, downstream: @28.8 Mbit/s, upstream: "
		  "1.920001 Mbit/s }", "30.720001 Mbit/s together, allowed "
		  "on one line: at most 30.72 Mbit/s" },
		{ "{ kind: vdsl2, downstream: @491.52 Mbit/s, upstream: "
		  "1 bit/s }", "at most 491.52 Mbit/s" },
		{ "{ kind: vdsl2, profile: 35b, downstream: @391.520001 "
		  "Mbit/s, upstream: 100 Mbit/s }", "at most 491.52" },
		{ "{ kind: vdsl2, profile: 30a, downstream: @317.480001 "
		  "Mbit/s, upstream: 100 Mbit/s }", "at most 417.48" },
		{ "{ kind: vdsl2, profile: 17a, downstream: @145.760001 "
		  "Mbit/s, upstream: 100 Mbit/s }", "at most 245.76" },
		{ "{ kind: vdsl2, profile: 12, downstream: @66.980001 "
		  "Mbit/s, upstream: 100 Mbit/s }", "at most 166.98" },
		{ "{ kind: vdsl2, profile: 8, downstream: @122.87 Mbit/s, "
		  "upstream: 10.001 kbit/s }", "at most 122.88" },
		{ "{ kind: gfast, profile: 106a, downstream: @1000 Mbit/s, "
		  "upstream: 179.648001 Mbit/s }", "at most 1.179648 Gbit/s" },
		{ "{ kind: gfast, downstream: @2359.296 Mbit/s, upstream: "
		  "1 kbit/s }", "at most 2.359296 Gbit/s" },
	};
	struct medium_use use;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(accepted); i++)
		medium_accepted(accepted[i], &use);
	assert_refusals(rows, COUNT(rows));
}

static void
a_telephone_pair_refuses_bad_fields(void **state)
{
	static const struct refusal rows[] = {
		{ "@{ kind: adsl2plus, upstream: 1 Mbit/s }",
		  "'downstream' is missing" },
		{ "@{ kind: vdsl2, downstream: 1 Mbit/s }",
		  "'upstream' is missing" },
		{ "@{ kind: gfast }", "is missing" },
		{ "{ kind: vdsl2, downstream: @0 bit/s, upstream: 1 Mbit/s }",
		  "downstream" },
		{ "{ kind: vdsl2, downstream: @100 MHz, upstream: 1 Mbit/s }",
		  "downstream" },
		{ "{ kind: vdsl2, downstream: @100, upstream: 1 Mbit/s }",
		  "downstream" },
		{ "{ kind: vdsl2, downstream: 1 Mbit/s, upstream: @-1 "
		  "Mbit/s }", "upstream" },
		{ "{ kind: vdsl2, downstream: 1 Mbit/s, upstream: @2 Tbit/s }",
		  "1.6 Tbit/s" },
		{ "{ kind: vdsl2, downstream: 1 Mbit/s, upstream: 1 Mbit/s, "
		  "lines: @0 }", "1 to 32" },
		{ "{ kind: adsl2plus, downstream: 1 Mbit/s, upstream: 1 "
		  "Mbit/s, lines: @33 }", "1 to 32" },
		{ "{ kind: vdsl2, downstream: 1 Mbit/s, upstream: 1 Mbit/s, "
		  "subscriber: @c }", "a, b" },
		{ "{ kind: vdsl2, downstream: 1 Mbit/s, upstream: 1 Mbit/s, "
		  "profile: @106a }", "17a" },
		{ "{ kind: gfast, downstream: 1 Mbit/s, upstream: 1 Mbit/s, "
		  "profile: @17a }", "106a, 212a" },
		{ "{ kind: gfast, downstream: 1 Mbit/s, upstream: 1 Mbit/s, "
		  "retransmission-units: @51 % }", "50 %" },
		{ "{ kind: gfast, downstream: 1 Mbit/s, upstream: 1 Mbit/s, "
		  "retransmission-units: @-1 % }", "retransmission-units" },
		{ "{ kind: gfast, downstream: 1 Mbit/s, upstream: 1 Mbit/s, "
		  "retransmission-units: @2 dB }", "retransmission-units" },
	};

	(void)state;
	assert_refusals(rows, COUNT(rows));
}

#define D30 "{ kind: docsis-3.0, downstream-channels: 1, upstream-rate: 1 " \
	"Mbit/s, "
#define D31 "{ kind: docsis-3.1, upstream-rate: 1 Mbit/s, "
#define BLOCK "occupied: 96 MHz, bits-per-subcarrier: 10, "

static void
a_cable_refuses_bad_fields(void **state)
{
	static const struct refusal rows[] = {
		{ "@{ kind: docsis-3.0, upstream-rate: 1 Mbit/s }",
		  "'downstream-channels' is missing" },
		{ "@{ kind: docsis-3.0, downstream-channels: 1 }",
		  "'upstream-rate' is missing" },
		{ "{ kind: docsis-3.0, downstream-channels: @0, "
		  "upstream-rate: 1 Mbit/s }", "1 to 32" },
		{ "{ kind: docsis-3.0, downstream-channels: @33, "
		  "upstream-rate: 1 Mbit/s }", "1 to 32" },
		{ "{ kind: docsis-3.0, downstream-channels: 1, "
		  "upstream-rate: @30.720001 Mbit/s }", "30720 kbit/s" },
		{ "{ kind: docsis-3.0, downstream-channels: 1, "
		  "upstream-rate: @0 bit/s }", "upstream-rate" },
		{ "{ kind: docsis-3.0, downstream-channels: 1, "
		  "upstream-rate: @27 MB }", "upstream-rate" },
		{ D30 "upstream-channels: @0 }", "1 to 8" },
		{ D30 "upstream-channels: @9 }", "1 to 8" },
		{ D30 "modulation: @1024-qam }", "64-qam, 256-qam" },
		{ D30 "annex: @c }", "a, b" },
		{ D30 "contention: @0 }", "1 to 100000" },
		{ D30 "contention: @100001 }", "1 to 100000" },
		{ D30 "subscriber: @x }", "a, b" },
		{ "@{ kind: docsis-3.1, upstream-rate: 1 Mbit/s, "
		  "bits-per-subcarrier: 10 }", "'occupied' is missing" },
		{ "@" D31 "occupied: 96 MHz }",
		  "'bits-per-subcarrier' is missing" },
		{ "@{ kind: docsis-3.1, " BLOCK "guard: 2 MHz }",
		  "'upstream-rate' is missing" },
		{ D31 "bits-per-subcarrier: 10, occupied: @23.9 MHz }",
		  "24 MHz to 192 MHz" },
		{ D31 "bits-per-subcarrier: 10, occupied: @192.1 MHz }",
		  "24 MHz to 192 MHz" },
		{ D31 "bits-per-subcarrier: 10, occupied: @96 Mbit/s }",
		  "occupied" },
		{ D31 "occupied: 96 MHz, bits-per-subcarrier: @0.9 }",
		  "found 0.9, allowed: 1 to 14" },
		{ D31 "occupied: 96 MHz, bits-per-subcarrier: @14.1 }",
		  "found 14.1, allowed: 1 to 14" },
		{ D31 "occupied: 96 MHz, bits-per-subcarrier: @many }",
		  "bits-per-subcarrier" },
		{ D31 BLOCK "blocks: @0 }", "1 to 8" },
		{ D31 BLOCK "blocks: @9 }", "1 to 8" },
		{ D31 BLOCK "guard: @11 MHz }", "10 MHz" },
		{ D31 BLOCK "guard: @-1 MHz }", "guard" },
		{ D31 BLOCK "spacing: @100 kHz }", "25 kHz, 50 kHz" },
		{ D31 BLOCK "cyclic-prefix: @1 us }", "1.25 us, 2.5 us" },
		{ D31 BLOCK "pilot-density: @47 }", "48 to 120" },
		{ D31 BLOCK "pilot-density: @121 }", "48 to 120" },
		{ D31 BLOCK "control-modulation: @256-qam }", "qpsk" },
		{ D31 BLOCK "downstream-channels: @33 }", "0 to 32" },
		{ D31 BLOCK "modulation: @8-qam }", "64-qam, 256-qam" },
		{ D31 BLOCK "contention: @0 }", "1 to 100000" },
	};

	(void)state;
	assert_refusals(rows, COUNT(rows));
}

/* The least rate that can be declared. */
static void
a_cable_may_have_almost_no_upstream(void **state)
{
	struct medium_capacity capacity;

	(void)state;
	capacity_of("{ kind: docsis-3.0, downstream-channels: 1, "
	    "upstream-rate: 1 bit/s }", DIRECTION_B_TO_A, 1528, &capacity);
	assert_int_equal(capacity.line_bps.num, 1);
}

static void
a_tree_refuses_bad_fields(void **state)
{
	static const struct refusal rows[] = {
		{ "{ kind: gpon, fec: @maybe }", "yes or no" },
		{ "{ kind: gpon, allocations: @0 }", "1 to 1024" },
		{ "{ kind: xg-pon, allocations: @1025 }", "1 to 1024" },
		{ "{ kind: gpon, bursts: @0 }", "1 to 1024" },
		{ "{ kind: xgs-pon, bursts: @1025 }", "1 to 1024" },
		{ "{ kind: gpon, burst-overhead: @4097 B }", "4 KiB" },
		{ "{ kind: gpon, burst-overhead: @17 }", "burst-overhead" },
		{ "{ kind: gpon, burst-overhead: @1 ms }", "burst-overhead" },
		{ "{ kind: xg-pon, ploam-messages: @129 }", "0 to 128" },
		{ "{ kind: xgs-pon, ploam-messages: @-1 }",
		  "ploam-messages" },
		{ "{ kind: xgs-pon, contention: @0 }", "1 to 100000" },
		{ "{ kind: gpon, subscriber: @n }", "a, b" },
		/* 20, 40, 160 times 972 octets are a whole frame */
		{ "{ kind: gpon, bursts: @20, burst-overhead: 972 B }",
		  "less than a frame of 19440 B" },
		{ "{ kind: xg-pon, bursts: @40, burst-overhead: 972 B }",
		  "less than a frame of 38880 B" },
		{ "{ kind: xgs-pon, bursts: @160, burst-overhead: 972 B }",
		  "less than a frame of 155520 B" },
	};
	struct medium_use use;

	(void)state;
	assert_refusals(rows, COUNT(rows));
	medium_accepted("{ kind: gpon, bursts: 20, burst-overhead: 971 B }",
	    &use);
	medium_accepted("{ kind: xg-pon, bursts: 40, burst-overhead: 971 B }",
	    &use);
	medium_accepted("{ kind: xgs-pon, bursts: 160, burst-overhead: "
	    "971 B }", &use);
}

/* Fields of one family are unknown to another. */
static void
a_field_of_another_medium_is_refused(void **state)
{
	static const struct refusal rows[] = {
		{ "{ kind: gpon, @ploam-messages: 1 }", "ploam-messages" },
		{ "{ kind: adsl2plus, downstream: 1 Mbit/s, upstream: 1 "
		  "Mbit/s, @profile: 17a }", "profile" },
		{ "{ kind: pdh, signal: e1, @line-rate: 2048 kbit/s }",
		  "line-rate" },
		{ "{ kind: sdh, signal: stm-1, @contention: 2 }",
		  "contention" },
		{ D30 "@occupied: 96 MHz }", "occupied" },
	};
	struct medium_use use;
	struct error err;
	char text[256], why[1024], place[32];
	const char *mark;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		mark = strchr(rows[i].medium, '@');
		(void)snprintf(text, sizeof(text), "%.*s%s",
		    (int)(mark - rows[i].medium), rows[i].medium, mark + 1);
		(void)snprintf(place, sizeof(place), "test:1:%d",
		    (int)(mark - rows[i].medium) + 1);
		assert_int_equal(medium_from(text, &use, &err), -1);
		(void)error_text(&err, why, sizeof(why));
		assert_non_null(strstr(why, place));
		assert_non_null(strstr(why, rows[i].expected));
	}
}

/* What `plafond media` lists, and how far each row can be relied on. */
static void
every_row_says_how_exact_it_is(void **state)
{
	static const struct {
		const char *name;
		enum accuracy accuracy;
		uint64_t tolerance_ppm;
		bool memory, subscriber;
		const char *carries;
	} rows[] = {
		{ "pdh", ACCURACY_NOMINAL, 50, true, false,
		  "hdlc aal5 frame-relay " },
		{ "sdh", ACCURACY_EXACT, 20, false, false, "hdlc aal5 gfp " },
		{ "otn", ACCURACY_EXACT, 20, false, false, "gfp " },
		{ "adsl2plus", ACCURACY_NOMINAL, 50, true, true,
		  "aal5 ptm " },
		{ "vdsl2", ACCURACY_NOMINAL, 50, true, true, "ptm aal5 " },
		{ "gfast", ACCURACY_MODEL, 50, true, true, "ptm " },
		{ "docsis-3.0", ACCURACY_NOMINAL, 5, true, true, "docsis " },
		{ "docsis-3.1", ACCURACY_MODEL, 5, true, true, "docsis " },
		{ "gpon", ACCURACY_NOMINAL, 32, true, true, "gem " },
		{ "xg-pon", ACCURACY_NOMINAL, 32, true, true, "xgem " },
		{ "xgs-pon", ACCURACY_NOMINAL, 32, true, true, "xgem " },
	};
	const struct medium *medium;
	char carries[64];
	size_t i, n;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		medium = medium_find(rows[i].name);
		assert_non_null(medium);
		assert_int_equal(medium->accuracy, rows[i].accuracy);
		assert_int_equal(medium->tolerance_ppm,
		    rows[i].tolerance_ppm);
		assert_int_equal(medium->memory != NULL, rows[i].memory);
		assert_int_equal(medium->subscriber_offset != 0,
		    rows[i].subscriber);
		assert_int_equal(medium->duplex, DUPLEX_FULL);
		carries[0] = '\0';
		for (n = 0; medium->carries[n] != NULL; n++)
			(void)snprintf(carries + strlen(carries),
			    sizeof(carries) - strlen(carries), "%s ",
			    medium->carries[n]);
		assert_string_equal(carries, rows[i].carries);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_pdh_medium_refuses_what_no_signal_has),
		cmocka_unit_test(an_sdh_medium_refuses_what_does_not_fit),
		cmocka_unit_test(
		    as_many_members_as_can_be_concatenated_are_accepted),
		cmocka_unit_test(a_synchronisation_rate_must_be_plausible),
		cmocka_unit_test(a_telephone_pair_refuses_bad_fields),
		cmocka_unit_test(a_cable_refuses_bad_fields),
		cmocka_unit_test(a_cable_may_have_almost_no_upstream),
		cmocka_unit_test(a_tree_refuses_bad_fields),
		cmocka_unit_test(a_field_of_another_medium_is_refused),
		cmocka_unit_test(every_row_says_how_exact_it_is),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
