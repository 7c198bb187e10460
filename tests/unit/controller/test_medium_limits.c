/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

/* Both sides of limits of media's fields that no other test comes near, and
 * rates of lines that other vectors hold to fewer digits. */
#include "medium_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define ANALOGUE "kind: analogue, bandwidth: 1 MHz, snr: 10 dB"
#define RADIO "kind: radio, channel-width: 28 MHz, roll-off: 12 %, " \
	"modulation: qpsk"
#define LTE "kind: lte, channel-width: 20 MHz, layers: 2, modulation: 64-qam"
#define WLAN "kind: wlan, generation: 802.11ac, channel-width: 80 MHz, mcs: 9"
#define WLAN_BE "kind: wlan, generation: 802.11be, band: 6 GHz, " \
	"channel-width: 320 MHz, mcs: 13"

/* The last value on each side that is taken, and the first that is not; the
 * ranges are those of `plafond media`. */
static const struct {
	const char *taken, *refused;	/* '@' before the refused value */
} limits[] = {
	{ "{ " ANALOGUE ", streams: 64 }",
	  "{ " ANALOGUE ", streams: @65 }" },
	{ "{ " ANALOGUE ", streams: 1 }",
	  "{ " ANALOGUE ", streams: @0 }" },
	{ "{ " RADIO ", streams: 1 }",
	  "{ " RADIO ", streams: @0 }" },
	{ "{ " RADIO ", streams: 16 }",
	  "{ " RADIO ", streams: @17 }" },
	{ "{ " LTE ", count: 1 }",
	  "{ " LTE ", count: @0 }" },
	{ "{ " LTE ", count: 16 }",
	  "{ " LTE ", count: @17 }" },
	{ "{ " LTE ", overhead: 90 % }",
	  "{ " LTE ", overhead: @90.1 % }" },
	{ "{ " LTE ", block-error-target: 50 % }",
	  "{ " LTE ", block-error-target: @50.1 % }" },
	{ "{ " WLAN ", control-rate: 6 Mbit/s }",
	  "{ " WLAN ", control-rate: @0 bit/s }" },
	{ "{ " WLAN_BE ", a-mpdu-limit: 15523198 B }",
	  "{ " WLAN_BE ", a-mpdu-limit: @15523199 B }" },
	{ "{ " WLAN ", a-mpdu-limit: 1 B }",
	  "{ " WLAN ", a-mpdu-limit: @0 B }" },
};

static void
each_limit_takes_its_end_and_refuses_the_next(void **state)
{
	struct medium_use use;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(limits); i++) {
		medium_accepted(limits[i].taken, &use);
		medium_refused(limits[i].refused, "allowed");
	}
}

/* Symbols a second times bits a symbol, ITU-T J.83 annexes A and B. */
static void
lines_of_a_cable_channel_are_exact(void **state)
{
	static const struct {
		const char *annex, *modulation;
		uint64_t line_bps;
	} vectors[] = {
		{ "b", "64-qam", UINT64_C(5056941) * 6 },
		{ "b", "256-qam", UINT64_C(5360537) * 8 },
		{ "a", "64-qam", UINT64_C(6952000) * 6 },
		{ "a", "256-qam", UINT64_C(6952000) * 8 },
	};
	struct medium_capacity capacity;
	char text[256];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), "{ kind: docsis-3.0, "
		    "downstream-channels: 1, annex: %s, modulation: %s, "
		    "upstream-rate: 27 Mbit/s }", vectors[i].annex,
		    vectors[i].modulation);
		capacity_of(text, DIRECTION_A_TO_B, 1535, &capacity);
		assert_int_equal(fraction_floor(capacity.line_bps),
		    vectors[i].line_bps);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    each_limit_takes_its_end_and_refuses_the_next),
		cmocka_unit_test(lines_of_a_cable_channel_are_exact),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
