/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "error.h"
#include "units.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

#define IEC "IEC 80000-13:2008, 13-9 and clause 4"
#define IEEE "IEEE 1541-2002, bit, octet and byte"
#define SI "SI brochure, 9th edition, tables 7 and 8"

#define ROUND_DOWN "GNU coreutils 9.1, numfmt --to=si --round=down"

static void
quantities_are_written_rounded_down(void **state)
{
	static const struct {
		uint64_t value;
		enum dimension dimension;
		unsigned digits;
		const char *text;
		const char *source;
	} table[] = {
		{ 941482444, DIMENSION_RATE, 3, "941.482 Mbit/s", ROUND_DOWN },
		{ 941482444, DIMENSION_RATE, 1, "941.4 Mbit/s", ROUND_DOWN },
		{ 941482444, DIMENSION_RATE, 0, "941 Mbit/s", ROUND_DOWN },
		{ 999999, DIMENSION_RATE, 1, "999.9 kbit/s", ROUND_DOWN },
		{ 999999, DIMENSION_RATE, 0, "999 kbit/s", ROUND_DOWN },
		{ 123456789012, DIMENSION_RATE, 3, "123.456 Gbit/s",
		    ROUND_DOWN },
		{ 1999999999, DIMENSION_RATE, 1, "1.9 Gbit/s", ROUND_DOWN },
		{ 1000000, DIMENSION_RATE, 3, "1 Mbit/s", "no idle zeros" },
		{ 1000, DIMENSION_RATE, 3, "1 kbit/s", SI },
		{ 999, DIMENSION_RATE, 3, "999 bit/s", SI },
		{ 1, DIMENSION_RATE, 3, "1 bit/s", SI },
		{ 0, DIMENSION_RATE, 3, "0 bit/s", SI },
		{ 1050, DIMENSION_RATE, 2, "1.05 kbit/s", SI },
		{ 1050, DIMENSION_RATE, 1, "1 kbit/s", SI },
		{ UINT64_MAX, DIMENSION_RATE, 3, "18446.744 Pbit/s",
		    "2^64 - 1" },
		{ UINT64_MAX, DIMENSION_RATE, 99,
		    "18446.744073709551615 Pbit/s", "2^64 - 1" },
		{ 1500000000, DIMENSION_SIZE, 3, "1.5 GB", IEEE },
		{ 1500, DIMENSION_SIZE, 3, "1.5 kB", IEEE },
		{ 0, DIMENSION_SIZE, 3, "0 B", IEEE },
		{ 100000000, DIMENSION_TIME, 3, "100 ms", SI },
		{ 3000000000, DIMENSION_TIME, 3, "3 s", SI },
		{ 250000, DIMENSION_TIME, 3, "250 us", SI },
		{ 12, DIMENSION_TIME, 3, "12 ns", SI },
		{ 1234567, DIMENSION_TIME, 2, "1.23 ms", SI },
		{ 86400000000000, DIMENSION_TIME, 3, "86400 s", SI },
		{ 0, DIMENSION_TIME, 3, "0 s", SI },
	};
	char buf[64];

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++)
		assert_string_equal(units_format(table[i].value,
		    table[i].dimension, table[i].digits, buf, sizeof(buf)),
		    table[i].text);
}

static void
the_exact_text_is_the_shortest(void **state)
{
	static const struct {
		uint64_t value;
		enum dimension dimension;
		const char *text;
	} table[] = {
		{ 0, DIMENSION_RATE, "0 bit/s" },
		{ 1, DIMENSION_RATE, "1 bit/s" },
		{ 1000000000000, DIMENSION_RATE, "1 Tbit/s" },
		{ 149760000, DIMENSION_RATE, "149760 kbit/s" },
		{ 941482444, DIMENSION_RATE, "941482444 bit/s" },
		{ 1500, DIMENSION_SIZE, "1500 B" },
		{ 9000, DIMENSION_SIZE, "9 kB" },
		{ 65536, DIMENSION_SIZE, "64 KiB" },
		{ 64000, DIMENSION_SIZE, "64 kB" },
		{ 1500000000, DIMENSION_SIZE, "1.5 GB" },
		{ 100000000, DIMENSION_TIME, "100 ms" },
		{ 1500000000, DIMENSION_TIME, "1.5 s" },
		{ 60000000000, DIMENSION_TIME, "60 s" },
		{ 3600000000000, DIMENSION_TIME, "1 h" },
		{ 86400000000000, DIMENSION_TIME, "1 d" },
	};
	char buf[64];

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++)
		assert_string_equal(units_format_exact(table[i].value,
		    table[i].dimension, buf, sizeof(buf)), table[i].text);
}

/* xorshift64, Marsaglia 2003 */
static uint64_t
next_random(uint64_t *seed)
{
	*seed ^= *seed << 13;
	*seed ^= *seed >> 7;
	*seed ^= *seed << 17;
	return *seed;
}

static void
check_round_trip(uint64_t value, enum dimension dimension)
{
	struct error err = { 0 };
	uint64_t found = 0;
	char text[64], full[64];

	(void)units_format_exact(value, dimension, text, sizeof(text));
	if (units_parse(text, dimension, &found, &err) == -1)
		fail_msg("%" PRIu64 " -> '%s': %s", value, text, err.cause);
	if (found != value)
		fail_msg("%" PRIu64 " -> '%s' -> %" PRIu64, value, text,
		    found);
	/* eighteen digits leave nothing to round */
	(void)units_format(value, dimension, 18, full, sizeof(full));
	if (units_parse(full, dimension, &found, &err) == -1 || found != value)
		fail_msg("%" PRIu64 " -> '%s'", value, full);
	if (strlen(text) > strlen(full))
		fail_msg("'%s' is longer than '%s'", text, full);
}

static void
every_value_survives_the_way_to_text_and_back(void **state)
{
	uint64_t seed = UINT64_C(0x9e3779b97f4a7c15);

	(void)state;
	for (unsigned d = DIMENSION_RATE; d <= DIMENSION_TIME; d++) {
		uint64_t power = 1;

		check_round_trip(UINT64_MAX, (enum dimension)d);
		for (unsigned i = 0; i < 64; i++) {
			check_round_trip(UINT64_C(1) << i, (enum dimension)d);
			check_round_trip((UINT64_C(1) << i) - 1,
			    (enum dimension)d);
		}
		for (unsigned i = 0; i < 20; i++, power *= 10) {
			check_round_trip(power, (enum dimension)d);
			check_round_trip(power - 1, (enum dimension)d);
			check_round_trip(power + 1, (enum dimension)d);
		}
		for (unsigned i = 0; i < 3000; i++) {
			uint64_t value = next_random(&seed);

			check_round_trip(value >> (value & 63),
			    (enum dimension)d);
			check_round_trip((value & 0xfff) * 1000000,
			    (enum dimension)d);
		}
	}
}

/* floor, so the text never claims more than the value */
static void
the_written_rate_is_never_above_the_value(void **state)
{
	uint64_t seed = 20260101;

	(void)state;
	for (unsigned i = 0; i < 3000; i++) {
		uint64_t value = next_random(&seed), found = 0;
		struct error err = { 0 };
		char text[64];

		value >>= value & 63;
		(void)units_format(value, DIMENSION_RATE, 3, text,
		    sizeof(text));
		assert_int_equal(units_parse(text, DIMENSION_RATE, &found,
		    &err), 0);
		assert_true(found <= value);
		assert_true(value - found <= value / 1000);
	}
}

static void
reals_are_written_to_the_nearest(void **state)
{
	static const struct {
		double value;
		enum dimension dimension;
		unsigned digits;
		const char *text;
	} table[] = {
		{ 0.97, DIMENSION_RATIO, 2, "97 %" },
		{ 0.9725, DIMENSION_RATIO, 2, "97.25 %" },
		{ 0.97256, DIMENSION_RATIO, 2, "97.26 %" },
		{ 0.001, DIMENSION_RATIO, 2, "0.1 %" },
		{ 1, DIMENSION_RATIO, 2, "100 %" },
		{ 0, DIMENSION_RATIO, 2, "0 %" },
		{ -0.0125, DIMENSION_RATIO, 2, "-1.25 %" },
		{ -0.00001, DIMENSION_RATIO, 2, "0 %" },
		{ 10, DIMENSION_DECIBEL, 1, "10 dB" },
		{ -3.25, DIMENSION_DECIBEL, 2, "-3.25 dB" },
		{ 0.5, DIMENSION_DECIBEL, 1, "0.5 dB" },
		{ -95.5, DIMENSION_LEVEL, 1, "-95.5 dBm" },
		{ 0, DIMENSION_LEVEL, 1, "0 dBm" },
		{ 28e6, DIMENSION_FREQUENCY, 3, "28 MHz" },
		{ 5.785e9, DIMENSION_FREQUENCY, 3, "5.785 GHz" },
		{ 999.4, DIMENSION_FREQUENCY, 1, "999.4 Hz" },
		{ 999999.9996, DIMENSION_FREQUENCY, 3, "1 MHz" },
		{ 0.5, DIMENSION_FREQUENCY, 1, "0.5 Hz" },
		{ 0.02, DIMENSION_POWER, 3, "20 mW" },
		{ 2, DIMENSION_POWER, 3, "2 W" },
		{ 3e-12, DIMENSION_POWER, 3, "3 pW" },
		{ 1e-13, DIMENSION_POWER, 3, "0.1 pW" },
		{ 2500, DIMENSION_POWER, 3, "2.5 kW" },
		{ 1e9, DIMENSION_RATE, 3, "1 Gbit/s" },
		{ 0.25e9, DIMENSION_TIME, 3, "250 ms" },
		{ (double)NAN, DIMENSION_RATIO, 3, "not given" },
		{ (double)INFINITY, DIMENSION_DECIBEL, 3, "not finite" },
	};
	char buf[64];

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++)
		assert_string_equal(units_format_real(table[i].value,
		    table[i].dimension, table[i].digits, buf, sizeof(buf)),
		    table[i].text);
}

static void
a_short_buffer_is_never_overrun(void **state)
{
	(void)state;
	for (size_t size = 1; size < 20; size++) {
		char buf[32];

		memset(buf, '#', sizeof(buf));
		(void)units_format(941482444, DIMENSION_RATE, 3, buf, size);
		assert_int_equal(buf[size], '#');
		assert_true(strlen(buf) < size);
		(void)units_format_exact(941482444, DIMENSION_RATE, buf, size);
		assert_int_equal(buf[size], '#');
		(void)units_format_real(-941.5, DIMENSION_DECIBEL, 3, buf,
		    size);
		assert_int_equal(buf[size], '#');
		assert_true(strlen(buf) < size);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(quantities_are_written_rounded_down),
		cmocka_unit_test(the_exact_text_is_the_shortest),
		cmocka_unit_test(every_value_survives_the_way_to_text_and_back),
		cmocka_unit_test(the_written_rate_is_never_above_the_value),
		cmocka_unit_test(reals_are_written_to_the_nearest),
		cmocka_unit_test(a_short_buffer_is_never_overrun),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
