/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "rehearse/agenda.h"
#include "rehearse/bucket.h"
#include "rehearse/serial.h"
#include "seeded.h"

#define PACKETS UINT64_C(1000000)
#define COUNT(a) (sizeof(a) / sizeof(*(a)))

static struct serial
serial_of(uint64_t rate_bps, struct octets octets)
{
	const struct serial_step step = { 0, rate_bps };
	struct serial serial;

	serial_init(&serial, &octets, &step, 1);
	return serial;
}

static struct serial_moment
send_at(struct serial *serial, uint64_t ready_ns, uint64_t bytes)
{
	struct serial_moment finish = serial_finish(serial,
	    serial_start(serial, ready_ns), bytes);

	serial_keep(serial, finish);
	return finish;
}

/* A million packets back to back end at 10^6 * octets * 8 * 10^9 / rate ns:
 * the whole part and what is left over, in 1 / (rate * den) ns. */
static const struct {
	uint64_t rate_bps;
	struct octets octets;
	uint64_t bytes;
	uint64_t end_ns, part;
	const char *source;
} millions[] = {
	{ 64000, { 0, 1, 0 }, 1500, UINT64_C(187500000000000), 0,
	    "by hand: 1.2e10 bit / 64 kbit/s = 187500 s" },
	{ 10000000, { 38, 1, 84 }, 1500, UINT64_C(1230400000000), 0,
	    "by hand: 1538 octets (IEEE 802.3), 1230.4 s" },
	{ 10000000, { 38, 1, 84 }, 28, UINT64_C(67200000000), 0,
	    "by hand: shortest frame, 84 octets, 67.2 s" },
	{ 100000000, { 38, 1, 84 }, 1500, UINT64_C(123040000000), 0,
	    "by hand: 123.04 s" },
	{ UINT64_C(10000000000), { 38, 1, 84 }, 1500, 1230400000, 0,
	    "by hand: 1.2304 s, 1230.4 ns a packet" },
	{ UINT64_C(10000000000), { 38, 1, 84 }, 28, 67200000, 0,
	    "by hand: 67.2 ms, 67.2 ns a packet" },
	{ UINT64_C(400000000000), { 38, 1, 84 }, 1500, 30760000, 0,
	    "by hand: 30.76 ns a packet" },
	{ 1536000, { 8, 1, 0 }, 1500, UINT64_C(7854166666666), 1024000,
	    "by hand: 1.2064e10 bit / 1.536 Mbit/s = 7854.16666... s, "
	    "2/3 ns over (T1 of RFC 6349)" },
	{ 7, { 0, 1, 0 }, 1, UINT64_C(1142857142857142), 6,
	    "by hand: 8e6 / 7 s; 8e15 = 7 * 1142857142857142 + 6" },
	{ 3000, { 1, 3, 0 }, 1, UINT64_C(3555555555555), 5000,
	    "by hand: 4/3 octets, 32/9000 s each; 5/9 ns of 9000 over" },
};

static void
a_million_packets_end_at_the_exact_fraction(void **state)
{
	(void)state;
	for (size_t i = 0; i < COUNT(millions); i++) {
		struct serial serial = serial_of(millions[i].rate_bps,
		    millions[i].octets);
		struct serial_moment finish = { 0 };

		for (uint64_t n = 0; n < PACKETS; n++)
			finish = send_at(&serial, 0, millions[i].bytes);
		assert_int_equal(finish.at_ns, millions[i].end_ns);
		assert_int_equal(finish.part, millions[i].part);
	}
}

static void
a_packet_on_an_idle_line_begins_when_it_comes(void **state)
{
	struct serial serial = serial_of(3000000000,
	    (struct octets){ 0, 1, 0 });
	struct serial_moment finish;

	(void)state;
	/* 8 / 3 ns: 2 and 2/3 */
	finish = send_at(&serial, 10, 1);
	assert_int_equal(finish.at_ns, 12);
	assert_int_equal(finish.part, 2000000000);
	assert_int_equal(serial_ceil_ns(finish), 13);
	/* Busy until 12 2/3: comes at 12, ends at 15 1/3. */
	finish = send_at(&serial, 12, 1);
	assert_int_equal(finish.at_ns, 15);
	assert_int_equal(finish.part, 1000000000);
	/* Idle from 15 1/3: no part of a nanosecond is carried to 16. */
	finish = send_at(&serial, 16, 1);
	assert_int_equal(finish.at_ns, 18);
	assert_int_equal(finish.part, 2000000000);
}

/* 1500 B at 1 Mbit/s is 12 ms.  By hand. */
static const struct {
	struct serial_step steps[3];
	size_t count;
	uint64_t finish_ns, part;
	const char *source;
} step_vectors[] = {
	{ { { 0, 1000000 }, { 6000000, 2000000 } }, 2, 9000000, 0,
	    "half out at 6 ms, the other half in 3 ms" },
	{ { { 0, 1000000 }, { 12000000, 2000000 } }, 2, 12000000, 0,
	    "a step at the very end changes nothing" },
	{ { { 0, 1000000 }, { 11999999, 1000 } }, 2, 12000999, 0,
	    "0.001 bit left at 1 kbit/s: 1000 ns from 11999999 on" },
	{ { { 0, 1000000 }, { 3000000, 500000 }, { 9000000, 3000000 } }, 3,
	    11000000, 0, "3000 bit, 3000 bit, 6000 bit in 2 ms" },
	{ { { 0, 1000000 }, { 5000000, 3000000 } }, 2, 7333333, 1000000,
	    "7000 bit at 3 Mbit/s: 2333333 1/3 ns" },
};

static void
a_step_within_a_packet_sends_the_rest_at_the_new_rate(void **state)
{
	const struct octets plain = { 0, 1, 0 };

	(void)state;
	for (size_t i = 0; i < COUNT(step_vectors); i++) {
		struct serial serial;
		struct serial_moment finish;

		serial_init(&serial, &plain, step_vectors[i].steps,
		    step_vectors[i].count);
		finish = send_at(&serial, 0, 1500);
		assert_int_equal(finish.at_ns, step_vectors[i].finish_ns);
		assert_int_equal(finish.part, step_vectors[i].part);
	}
}

static void
no_work_is_lost_over_many_steps(void **state)
{
	const struct octets octets = { 1, 3, 0 };
	struct serial_step steps[1 + SERIAL_STEPS_MAX];
	struct serial serial;
	struct serial_moment finish = { 0 };
	uint64_t seed = 4;
	uint128 done = 0;

	(void)state;
	for (size_t i = 0; i < COUNT(steps); i++)
		steps[i] = (struct serial_step){ i * 1000003,
			seeded_between(&seed, 999983, 99999989) };
	serial_init(&serial, &octets, steps, COUNT(steps));
	for (int i = 0; i < 100000 && finish.step < SERIAL_STEPS_MAX; i++) {
		finish = send_at(&serial, 0, 1 + (uint64_t)i % 97);
		done += (uint128)(3 * (1 + (uint64_t)i % 97) + 1) *
		    8000000000;
	}
	assert_int_equal(finish.step, SERIAL_STEPS_MAX);
	/* What the line can have done until then, in the same units. */
	for (size_t i = 0; i < SERIAL_STEPS_MAX; i++)
		done -= (uint128)1000003 * 3 * steps[i].rate_bps;
	done -= (uint128)(finish.at_ns - steps[SERIAL_STEPS_MAX].at_ns) * 3 *
	    steps[SERIAL_STEPS_MAX].rate_bps + finish.part;
	assert_true(done == 0);
}

/* Section 2 of RFC 2697 counts the IP packet alone. */
static const struct bucket_settings cir = { 10000000, 15000, { 0, 1, 0 } };

/* Average over T: R + 8 B / T for a sender that is always ahead. */
static void
a_policer_passes_its_rate_and_its_burst(void **state)
{
	static const struct { uint64_t burst, time_ns; } cases[] = {
		{ 15000, 1000000000 }, { 250000, 1000000000 },
		{ 250000, 4000000000 }, { 1000000, 4000000000 },
	};

	(void)state;
	for (size_t i = 0; i < COUNT(cases); i++) {
		struct bucket_settings settings = cir;
		struct bucket bucket;
		uint64_t bytes = 0, most;

		settings.burst_bytes = cases[i].burst;
		bucket_init(&bucket, &settings, 0);
		for (uint64_t t = 0; t <= cases[i].time_ns; t += 100000)
			if (bucket_conforms(&bucket, t, 1500))
				bytes += 1500;
		most = 10000000 / 8 * (cases[i].time_ns / 1000000000) +
		    cases[i].burst;
		assert_in_range(bytes, most - 1499, most);
	}
}

static void
a_policer_is_exact_to_the_octet_and_the_nanosecond(void **state)
{
	struct bucket bucket;

	(void)state;
	bucket_init(&bucket, &cir, 0);
	assert_false(bucket_conforms(&bucket, 0, 15001));
	assert_true(bucket_conforms(&bucket, 0, 15000));
	/* 1 B at 10 Mbit/s: 800 ns */
	assert_false(bucket_conforms(&bucket, 799, 1));
	assert_true(bucket_conforms(&bucket, 800, 1));
	assert_false(bucket_conforms(&bucket, 1599, 1));
	assert_true(bucket_conforms(&bucket, 1600, 1));
	/* Full again after 12 ms, and never fuller. */
	assert_false(bucket_conforms(&bucket, 12001599, 15000));
	assert_false(bucket_conforms(&bucket, 1000000000, 15001));
	assert_true(bucket_conforms(&bucket, 1000000000, 15000));
}

/* CIR 100 Mbit/s, CBS 125 kB, offered 125 Mbit/s: nothing is lost for 8 CBS /
 * (R - CIR) = 40 ms, then 20 %.  By hand. */
static void
a_policer_first_drops_when_its_burst_is_used_up(void **state)
{
	const struct bucket_settings settings = { 100000000, 125000,
		{ 0, 1, 0 } };
	struct bucket bucket;
	uint64_t first_ns = 0, dropped = 0, after = 0;

	(void)state;
	bucket_init(&bucket, &settings, 0);
	/* 1250 B each 80 us */
	for (uint64_t t = 0; t < 10000000000; t += 80000) {
		after += first_ns > 0;
		if (bucket_conforms(&bucket, t, 1250))
			continue;
		dropped++;
		if (first_ns == 0)
			first_ns = t;
	}
	/* The whole packet has to fit, and the first came at 0. */
	assert_in_range(first_ns, 39600000, 40400000);
	assert_in_range(dropped * 5, after - 5, after + 10);
}

static void
a_shaper_keeps_its_rate_exactly(void **state)
{
	const struct bucket_settings settings = { 30000000, 3000,
		{ 1, 3, 0 } };
	struct bucket bucket;
	uint64_t at_ns = 0;

	(void)state;
	bucket_init(&bucket, &settings, 0);
	for (uint64_t n = 0; n < PACKETS; n++) {
		at_ns = bucket_release_ns(&bucket, 0, 1500);
		bucket_take(&bucket, at_ns, 1500);
	}
	/* 10^6 * (1500 + 1/3) - 3000 octets at 30 Mbit/s, up: 1500330333.3...
	 * octets take 400088088888.88 ns.  By hand. */
	assert_int_equal(at_ns, UINT64_C(400088088889));
}

static void
a_shaper_without_a_burst_spaces_packets_evenly(void **state)
{
	const struct bucket_settings settings = { 12000000, 0, { 0, 1, 0 } };
	struct bucket bucket;

	(void)state;
	bucket_init(&bucket, &settings, 0);
	for (uint64_t n = 0; n < 10; n++) {
		assert_int_equal(bucket_release_ns(&bucket, 0, 1500),
		    n * 1000000);
		bucket_take(&bucket, n * 1000000, 1500);
	}
}

#define HANDLES 1000

static void
an_agenda_gives_back_what_is_due_in_order(void **state)
{
	struct agenda agenda;
	uint64_t seed = 9, last_ns = 0, due_ns;
	uint32_t handle;

	(void)state;
	assert_int_equal(agenda_init(&agenda, HANDLES), 0);
	for (int round = 0; round < 20; round++) {
		while (agenda_room(&agenda) > 0)
			agenda_add(&agenda, last_ns +
			    seeded_between(&seed, 0, 500));
		for (int i = 0; i < 50; i++) {
			handle = (uint32_t)seeded_between(&seed, 0,
			    HANDLES - 1);
			agenda_advance(&agenda, handle, last_ns +
			    (agenda_due_ns(&agenda, handle) - last_ns) / 2);
		}
		for (int i = 0; i < 700; i++) {
			due_ns = agenda_next_ns(&agenda);
			assert_true(due_ns >= last_ns);
			handle = agenda_take(&agenda);
			assert_int_equal(agenda_due_ns(&agenda, handle),
			    due_ns);
			last_ns = due_ns;
		}
	}
	agenda_fini(&agenda);
}

static void
an_agenda_keeps_the_order_of_equals(void **state)
{
	struct agenda agenda;
	uint32_t handles[10];

	(void)state;
	assert_int_equal(agenda_init(&agenda, 10), 0);
	assert_true(agenda_next_ns(&agenda) == UINT64_MAX);
	for (size_t i = 0; i < 10; i++)
		handles[i] = agenda_add(&agenda, i == 0 ? 9 : 7);
	agenda_advance(&agenda, handles[0], 7);
	for (size_t i = 1; i < 10; i++)
		assert_int_equal(agenda_take(&agenda), handles[i]);
	assert_int_equal(agenda_take(&agenda), handles[0]);
	agenda_fini(&agenda);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_million_packets_end_at_the_exact_fraction),
		cmocka_unit_test(a_packet_on_an_idle_line_begins_when_it_comes),
		cmocka_unit_test(
		    a_step_within_a_packet_sends_the_rest_at_the_new_rate),
		cmocka_unit_test(no_work_is_lost_over_many_steps),
		cmocka_unit_test(a_policer_passes_its_rate_and_its_burst),
		cmocka_unit_test(
		    a_policer_is_exact_to_the_octet_and_the_nanosecond),
		cmocka_unit_test(
		    a_policer_first_drops_when_its_burst_is_used_up),
		cmocka_unit_test(a_shaper_keeps_its_rate_exactly),
		cmocka_unit_test(
		    a_shaper_without_a_burst_spaces_packets_evenly),
		cmocka_unit_test(an_agenda_gives_back_what_is_due_in_order),
		cmocka_unit_test(an_agenda_keeps_the_order_of_equals),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
