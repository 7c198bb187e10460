/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <math.h>
#include <string.h>

#include "line_fixture.h"

static void
refuse(const struct line_settings *settings, const char *name,
    const char *found)
{
	struct error err = { .kind = ERROR_NONE };

	assert_int_equal(line_check(settings, &err), -1);
	assert_int_equal(err.kind, ERROR_INPUT);
	assert_non_null(strstr(err.cause, name));
	assert_non_null(strstr(err.cause, found));
	assert_non_null(strstr(err.cause, "allowed"));
	assert_null(line_new(settings, 0, &err));
}

/* One wrong value in settings that are fine without it. */
#define REFUSED(set, name, found) do {			\
	struct line_settings s = line_plain();		\
	set;						\
	refuse(&s, name, found);			\
} while (0)

static void
settings_as_they_begin_are_accepted(void **state)
{
	const struct line_settings settings = line_plain();
	struct error err;

	(void)state;
	assert_int_equal(line_check(&settings, &err), 0);
}

static void
whole_numbers_outside_their_range_are_refused(void **state)
{
	(void)state;
	REFUSED(s.mtu_bytes = 67, "mtu_bytes", "67");
	REFUSED(s.mtu_bytes = 65536, "mtu_bytes", "65536");
	REFUSED(s.rate_bps = 999, "rate_bps", "999");
	REFUSED(s.rate_bps = LINE_RATE_MAX_BPS + 1, "rate_bps",
	    "1000000000001");
	REFUSED(s.policer.rate_bps = 1, "policer.rate_bps", "1");
	REFUSED(s.shaper.burst_bytes = UINT64_MAX, "shaper.burst_bytes",
	    "18446744073709551615");
	REFUSED(s.queue_ns = LINE_QUEUE_MAX_NS + 1, "queue_ns",
	    "60000000001");
	REFUSED(s.queue_bytes = LINE_BYTES_MAX + 1, "queue_bytes",
	    "1000000000001");
	REFUSED(s.propagation_ns = LINE_DELAY_MAX_NS + 1, "propagation_ns",
	    "10000000001");
	REFUSED(s.reordering.packets = LINE_HELD_MAX + 1,
	    "reordering.packets", "129");
	REFUSED(s.intervals = 0, "intervals", "0");
	REFUSED(s.intervals = TRUTH_INTERVALS_MAX + 1, "intervals", "65537");
	REFUSED(s.interval_ns = 999999, "interval_ns", "999999");
	REFUSED(s.octets.added_den = 0, "octets.added_den", "0");
	REFUSED(s.octets.added_num = 10001, "octets", "10001/1");
	REFUSED(s.shaper.octets.least = 10001, "shaper.octets.least",
	    "10001");
}

static void
ratios_outside_0_to_1_are_refused(void **state)
{
	(void)state;
	REFUSED(s.loss_ratio = -0.001, "loss_ratio", "-0.001");
	REFUSED(s.loss_ratio = 1.001, "loss_ratio", "1.001");
	REFUSED(s.loss_ratio = NAN, "loss_ratio", "nan");
	REFUSED(s.bursts.p = INFINITY, "bursts.p", "inf");
	REFUSED(s.bursts.k = 2, "bursts.k", "2");
	REFUSED(s.duplication.ratio = -1, "duplication.ratio", "-1");
	REFUSED(s.reordering.ratio = 3, "reordering.ratio", "3");
}

static void
contradictions_are_refused(void **state)
{
	(void)state;
	REFUSED((s.bursts.p = 0.1, s.bursts.r = 0), "bursts.r", "0");
	REFUSED(s.variation.spread_ns = 5, "variation", "5 ns");
	REFUSED(s.variation.kind = VARIATION_NORMAL, "variation", "kind 2");
	REFUSED((s.variation.kind = VARIATION_KINDS,
	    s.variation.spread_ns = 1), "variation", "kind 4");
	REFUSED(s.variation.correlation = 1, "variation.correlation", "1");
	REFUSED(s.reordering.ratio = 0.1, "reordering.extra_ns", "0");
	REFUSED((s.background.rate_bps = 1000000,
	    s.background.packet_bytes = 500), "background",
	    "without a rate");
	REFUSED((s.rate_bps = 1000000, s.background.rate_bps = 1000),
	    "background", "packets of 0 B");
	REFUSED((s.rate_bps = 1000000,
	    s.background.rate_bps = 1000000000000,
	    s.background.packet_bytes = 64), "background",
	    "1000000000000 bit/s");
}

static void
lists_out_of_order_are_refused(void **state)
{
	(void)state;
	REFUSED((s.step_count = 1, s.steps[0].at_ns = 1,
	    s.steps[0].rate_bps = 1000), "steps", "without a rate");
	REFUSED((s.rate_bps = 1000, s.step_count = 1,
	    s.steps[0].rate_bps = 1000), "steps[0].at_ns", "found 0");
	REFUSED((s.rate_bps = 1000, s.step_count = 1, s.steps[0].at_ns = 1),
	    "steps[0].rate_bps", "found 0");
	REFUSED((s.rate_bps = 1000, s.step_count = 2,
	    s.steps[0] = (struct serial_step){ 9, 1000 },
	    s.steps[1] = (struct serial_step){ 9, 2000 }),
	    "steps[1].at_ns", "found 9");
	REFUSED((s.rate_bps = 1000, s.step_count = SERIAL_STEPS_MAX + 1),
	    "step_count", "65");
	REFUSED(s.outage_count = LINE_OUTAGES_MAX + 1, "outage_count", "65");
	REFUSED(s.outage_count = 1, "outages[0]", "0 to 0");
	REFUSED((s.outage_count = 2,
	    s.outages[0] = (struct line_outage){ 5, 9 },
	    s.outages[1] = (struct line_outage){ 8, 10 }), "outages[1]",
	    "8 to 10");
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(settings_as_they_begin_are_accepted),
		cmocka_unit_test(whole_numbers_outside_their_range_are_refused),
		cmocka_unit_test(ratios_outside_0_to_1_are_refused),
		cmocka_unit_test(contradictions_are_refused),
		cmocka_unit_test(lists_out_of_order_are_refused),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
