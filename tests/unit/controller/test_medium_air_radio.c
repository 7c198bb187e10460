/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "ceiling/capacity.h"
#include "medium_air.h"

#define IP "ipv4, udp"

static double
net_mbps(const char *medium)
{
	struct medium_capacity capacity;

	air_capacity(medium, IP, DIRECTION_A_TO_B, &capacity);
	return fraction_double(capacity_offered(&capacity)) / 1e6;
}

#define R28 "kind: radio, channel-width: 28 MHz, symbol-rate: 25 MHz, "
#define R56 "kind: radio, channel-width: 56 MHz, symbol-rate: 49.5 MHz, "

/* One vendor's data sheet (RAy17): gross = symbols a second * bits, the share
 * that reaches users, and Shannon's limit at its sensitivity. */
static void
gross_rates_are_those_of_a_data_sheet(void **state)
{
	static const char *const modulations[] = { "qpsk", "16-qam", "32-qam",
		"64-qam", "128-qam", "256-qam" };
	static const double gross[2][6] = {
		{ 50, 100, 125, 150, 175, 200 },
		{ 99, 198, 247.5, 297, 346.5, 396 } };
	static const double user[2][6] = {
		{ 36.8, 80.9, 102.4, 129.8, 155.5, 170.7 },
		{ 85.8, 169.9, 206.2, 268.1, 309.0, 358.9 } };
	static const double snr_db[] = { 10, 16, 19, 22.5, 25.5, 27.5 };
	struct medium_capacity capacity;
	char text[256];
	size_t w, i;
	double found;

	(void)state;
	for (w = 0; w < 2; w++)
		for (i = 0; i < 6; i++) {
			(void)snprintf(text, sizeof(text), "%smodulation: %s, "
			    "snr: %.1f dB", w == 0 ? R28 : R56,
			    modulations[i], snr_db[i]);
			air_capacity(text, IP, DIRECTION_A_TO_B, &capacity);
			found = fraction_double(capacity.line_bps) / 1e6;
			assert_near(found, gross[w][i], 1e-9, text);
			assert_true(user[w][i] / found > 0.735 &&
			    user[w][i] / found < 0.91);
			assert_true(user[w][i] * 1e6 <
			    (double)capacity.channel_bps);
		}
	assert_int_equal(capacity.steps_count, 0);
	assert_true(air_noted(&capacity, "S/N 27.50 dB: Shannon's limit is "
	    "511.7"));
	assert_near((double)capacity.channel_bps / 1e6, 511.7, 0.0501,
	    "56 MHz at 27.5 dB");
	assert_near(user[1][5] / ((double)capacity.channel_bps / 1e6), 0.70,
	    0.005, "of the bound");
}

/* By hand. */
static void
radio_steps_lead_from_symbols_to_packets(void **state)
{
	struct medium_capacity capacity;

	(void)state;
	/* 28 MHz / 1.12 = 25 MBd, * 8 * 2, * 0.9, * 0.95 */
	air_capacity("kind: radio, channel-width: 28 MHz, roll-off: 0.12, "
	    "modulation: 256-qam, streams: 2, code-rate: 0.9, framing-share: "
	    "5 %", IP, DIRECTION_B_TO_A, &capacity);
	assert_int_equal(fraction_floor(capacity.line_bps), 400000000);
	assert_int_equal(capacity.steps_count, 2);
	assert_int_equal(fraction_floor(capacity.steps[0].left_bps),
	    360000000);
	assert_int_equal(fraction_floor(capacity.steps[1].left_bps),
	    342000000);
	assert_int_equal(capacity.channel_bps, 0);
	assert_int_equal(capacity.duplex, DUPLEX_FULL);
	/* 56 MHz / 1.13 * 8 is no whole number: rounded down once */
	assert_near(net_mbps("kind: radio, channel-width: 56 MHz, roll-off: "
	    "13 %, modulation: 256-qam"), 396.460176, 1e-9, "1.13");
	assert_near(net_mbps("kind: radio, channel-width: 1 MHz, roll-off: "
	    "0, modulation: bpsk"), 1, 1e-9, "bpsk");
	assert_near(net_mbps(R28 "modulation: 8-psk, code-rate: 1 %"), 0.75,
	    1e-9, "1 %");
	assert_near(net_mbps(R28 "steps: [ { modulation: qpsk, least-snr: "
	    "1 dB } ], reference: 1"), 50, 1e-9, "a step without a code");
	assert_near(net_mbps(R28 "modulation: 8-psk"), 75, 1e-9, "8-psk");
	assert_near(net_mbps(R28 "modulation: 4-qam"), 50, 1e-9, "4-qam");
	assert_near(net_mbps(R28 "modulation: 512-qam"), 225, 1e-9, "512");
	assert_near(net_mbps(R28 "modulation: 1024-qam"), 250, 1e-9, "1024");
	assert_near(net_mbps(R28 "modulation: 2048-qam"), 275, 1e-9, "2048");
	assert_near(net_mbps(R28 "modulation: 4096-qam"), 300, 1e-9, "4096");
}

/* A declaration that asks for more than the channel holds is bound by it:
 * 1 MHz at 0 dB holds 1 Mbit/s, qpsk would make 2. */
static void
shannon_binds_where_the_link_asks_for_more(void **state)
{
	struct ceiling ceiling;

	(void)state;
	air_ceiling("kind: radio, channel-width: 1 MHz, roll-off: 0, "
	    "modulation: qpsk, snr: 0 dB", IP, PROTOCOL_UDP,
	    DIRECTION_A_TO_B, &ceiling);
	assert_int_equal(ceiling.line_rate_bps, 2000000);
	assert_int_equal(ceiling.packet_bytes, 1500);
	assert_int_equal(ceiling.rate_bps[LEVEL_PACKET], 1000000);
	assert_string_equal(ceiling.bounds[1].name, "channel capacity");
	assert_true(ceiling.bounds[1].binding);
}

#define STEPS "steps: [ "						\
	"{ modulation: qpsk, code-rate: 0.8, least-snr: 10 dB }, "	\
	"{ modulation: 16-qam, code-rate: 0.8, least-snr: 16 dB }, "	\
	"{ modulation: 64-qam, least-snr: 22.5 dB } ]"
static void
adaptive_modulation_takes_the_step_of_the_declared_state(void **state)
{
	static const struct {
		const char *more;
		double rate_mbps;
	} vectors[] = {
		{ ", snr: 10 dB", 40 },
		{ ", snr: 10 dB, framing-share: 10 %", 36 },
		{ ", snr: 15.99 dB", 40 },
		{ ", snr: 16 dB", 80 },
		{ ", snr: 22.5 dB", 150 },
		{ ", snr: 40 dB", 150 },
		{ ", reference: 2", 80 },
		{ ", reference: 1, snr: 30 dB", 40 },
		/* 28 MHz: kTB -99.503 dBm + 5 dB */
		{ ", received-level: -78.0 dBm, noise-figure: 5 dB", 80 },
	};
	struct medium_capacity capacity;
	char text[512];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), R28 STEPS "%s",
		    vectors[i].more);
		assert_near(net_mbps(text), vectors[i].rate_mbps, 1e-9,
		    vectors[i].more);
	}
	air_capacity(R28 STEPS ", snr: { a-to-b: 10 dB, b-to-a: 30 dB }", IP,
	    DIRECTION_B_TO_A, &capacity);
	assert_int_equal(fraction_floor(capacity_offered(&capacity)),
	    150000000);
	assert_true(air_noted(&capacity, "1 qpsk 40 Mbit/s from 10.0 dB; "
	    "2 16-qam 80 Mbit/s from 16.0 dB"));
	assert_true(air_noted(&capacity, "3 64-qam 150 Mbit/s from 22.5 dB"));
}

static const struct air_refusal link_refusals[] = {
	{ "kind: radio, roll-off: 0.2, modulation: qpsk",
	  "'channel-width' is missing" },
	{ "kind: radio, channel-width: 999 Hz, roll-off: 0, "
	  "modulation: qpsk", "from 1 kHz" },
	{ "kind: radio, channel-width: 28 Mbit/s, roll-off: 0, "
	  "modulation: qpsk", "is the unit of a rate" },
	{ "kind: radio, channel-width: 28 MHz, modulation: qpsk",
	  "'roll-off' is missing" },
	{ R28 "roll-off: 0.2, modulation: qpsk",
	  "symbol-rate is given too" },
	{ "kind: radio, channel-width: 28 MHz, symbol-rate: 29 MHz, "
	  "modulation: qpsk", "(Nyquist)" },
	{ "kind: radio, channel-width: 28 MHz, roll-off: 101 %, "
	  "modulation: qpsk", "to 100 %" },
	{ "kind: radio, channel-width: 28 MHz, roll-off: 0.2",
	  "'modulation' is missing" },
	{ "kind: radio, channel-width: 100.1 GHz, roll-off: 0, "
	  "modulation: qpsk", "to 100 GHz" },
	{ "kind: radio, channel-width: 28 MHz, symbol-rate: 0.9 Hz, "
	  "modulation: qpsk", "from 1 Hz to 100 GHz" },
	{ R28 "modulation: qpsk, code-rate: 0.99 %", "from 1 % to 100 %" },
	{ R28 "steps: [ { modulation: qpsk, least-snr: 151 dB } ], "
	  "reference: 1", "from -100 dB to 150 dB" },
	{ R28 "steps: [ { modulation: qpsk, least-snr: -101 dB } ], "
	  "reference: 1", "from -100 dB to 150 dB" },
	{ R28 "modulation: 96-qam", "4096-qam" },
	{ R28 "modulation: qpsk, code-rate: 0", "code-rate" },
	{ R28 "modulation: qpsk, code-rate: 1.1", "to 100 %" },
	{ R28 "modulation: qpsk, code-rate: 3/4", "code-rate" },
	{ R28 "modulation: qpsk, framing-share: 91 %", "to 90 %" },
	{ R28 "modulation: qpsk, streams: 17", "streams" },
	{ R28 "modulation: qpsk, reference: 1", "without steps" },
	{ R28 "modulation: qpsk, duplex: simplex", "full, half" },
	{ R28 "modulation: qpsk, contention: 0", "contention" },
	{ R28 "modulation: qpsk, snr: 20 dB, received-level: -60 "
	  "dBm, noise-figure: 5 dB", "S/N is declared twice" },
	{ R28 "modulation: qpsk, received-level: -60 dBm",
	  "'noise-figure' is missing" },
	{ R28 "modulation: qpsk, snr: { b-to-a: 20 dB }",
	  "a direction is missing" },
	{ R28 STEPS, "'reference' is missing" },
	{ R28 STEPS ", modulation: qpsk, reference: 1",
	  "modulation: steps are given too" },
	{ R28 STEPS ", code-rate: 0.9, reference: 1",
	  "code-rate: steps are given too" },
	{ R28 STEPS ", reference: 4", "allowed: 1 to 3" },
	{ R28 STEPS ", reference: 17", "from 1 to 16" },
	{ R28 STEPS ", snr: 9.9 dB", "allowed: at least 10.00 dB" },
	{ R28 STEPS ", snr: 20 dB, reference: 3",
	  "the step needs 22.50 dB" },
	{ R28 "steps: [], reference: 1", "found a list of 0" },
	{ R28 "steps: [ { modulation: qpsk } ], reference: 1",
	  "required field 'least-snr'" },
	{ R28 "steps: [ { least-snr: 1 dB } ], reference: 1",
	  "required field 'modulation'" },
	{ R28 "steps: [ { modulation: qpsk, least-snr: 1 dBm } ], "
	  "reference: 1", "is the unit of a level" },
	{ R28 "steps: [ { modulation: qpsk, least-snr: 1 dB, snr: 1 "
	  "dB } ], reference: 1", "unknown field 'snr'" },
};

static void
what_makes_no_link_is_refused_with_its_place(void **state)
{
	(void)state;
	air_refused_all(link_refusals, COUNT(link_refusals), IP);
	air_impossible("kind: radio, channel-width: 100 GHz, roll-off: 0, "
	    "modulation: 4096-qam, streams: 16", IP, "", "1.6 Tbit/s");
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(gross_rates_are_those_of_a_data_sheet),
		cmocka_unit_test(radio_steps_lead_from_symbols_to_packets),
		cmocka_unit_test(shannon_binds_where_the_link_asks_for_more),
		cmocka_unit_test(
		    adaptive_modulation_takes_the_step_of_the_declared_state),
		cmocka_unit_test(what_makes_no_link_is_refused_with_its_place),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
