/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <inttypes.h>
#include <math.h>
#include <stdbool.h>
#include <stdio.h>
#include <string.h>

#include "error.h"
#include "units.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

#define IEC "IEC 80000-13:2008, 13-9 and clause 4"
#define IEEE "IEEE 1541-2002, bit, octet and byte"
#define SI "SI brochure, 9th edition, tables 7 and 8"
#define NUMFMT "GNU coreutils 9.1, numfmt --from=si or --from=iec-i"

static const struct {
	const char *text;
	enum dimension dimension;
	uint64_t value;
	const char *source;
} whole_vectors[] = {
	{ "1 bit/s", DIMENSION_RATE, 1, IEC },
	{ "1 Gbit/s", DIMENSION_RATE, 1000000000, IEC },
	{ "1Gbit/s", DIMENSION_RATE, 1000000000, IEC },
	{ "1  Gbit/s", DIMENSION_RATE, 1000000000, IEC },
	{ "1 Gb/s", DIMENSION_RATE, 1000000000, IEEE },
	{ "1 Gbps", DIMENSION_RATE, 1000000000, "trade usage of b/s" },
	{ "1 B/s", DIMENSION_RATE, 8, IEEE },
	{ "1 MB/s", DIMENSION_RATE, 8000000, IEEE },
	{ "1 Mo/s", DIMENSION_RATE, 8000000, IEEE },
	{ "1 Mibit/s", DIMENSION_RATE, 1048576, NUMFMT },
	{ "1 KiB/s", DIMENSION_RATE, 8192, IEC },
	{ "149.76 Mbit/s", DIMENSION_RATE, 149760000,
	    "ITU-T G.707, C-4 in STM-1" },
	{ "0.5 kbit/s", DIMENSION_RATE, 500, SI },
	{ "0.125 B/s", DIMENSION_RATE, 1, IEEE },
	{ "0.000000000000001 Pbit/s", DIMENSION_RATE, 1, SI },
	{ "0.000000000000000125 PB/s", DIMENSION_RATE, 1, SI },
	{ "0 bit/s", DIMENSION_RATE, 0, SI },
	{ "007 bit/s", DIMENSION_RATE, 7, "leading zeros count nothing" },
	{ "18446744073709551615 bit/s", DIMENSION_RATE, UINT64_MAX,
	    "2^64 - 1" },
	{ "18446.744073709551615 Pbit/s", DIMENSION_RATE, UINT64_MAX,
	    "2^64 - 1" },
	{ "2305843009213693951.875 B/s", DIMENSION_RATE, UINT64_MAX,
	    "(2^64 - 1) / 8" },
	{ "1500 B", DIMENSION_SIZE, 1500, IEEE },
	{ "1.5 kB", DIMENSION_SIZE, 1500, IEEE },
	{ "1.5 ko", DIMENSION_SIZE, 1500, IEEE },
	{ "12 kbit", DIMENSION_SIZE, 1500, IEEE },
	{ "12000 bit", DIMENSION_SIZE, 1500, IEEE },
	{ "64 KiB", DIMENSION_SIZE, 65536, IEC },
	{ "8 Kibit", DIMENSION_SIZE, 1024, IEC },
	{ "1.5 MB", DIMENSION_SIZE, 1500000, NUMFMT },
	{ "999 GB", DIMENSION_SIZE, 999000000000, NUMFMT },
	{ "18 PB", DIMENSION_SIZE, 18000000000000000, NUMFMT },
	{ "1 KiB", DIMENSION_SIZE, 1024, NUMFMT },
	{ "1.5 MiB", DIMENSION_SIZE, 1572864, NUMFMT },
	{ "3 GiB", DIMENSION_SIZE, 3221225472, NUMFMT },
	{ "1 TiB", DIMENSION_SIZE, 1099511627776, NUMFMT },
	{ "1 PiB", DIMENSION_SIZE, 1125899906842624, NUMFMT },
	{ "16383 PiB", DIMENSION_SIZE, UINT64_C(16383) << 50, IEC },
	{ "147573952589676412920 bit", DIMENSION_SIZE, UINT64_MAX,
	    "(2^64 - 1) * 8" },
	{ "1 ns", DIMENSION_TIME, 1, SI },
	{ "250 us", DIMENSION_TIME, 250000, SI },
	{ "250 \302\265s", DIMENSION_TIME, 250000, SI },
	{ "250 \316\274s", DIMENSION_TIME, 250000, SI },
	{ "100 ms", DIMENSION_TIME, 100000000, SI },
	{ "3 s", DIMENSION_TIME, 3000000000, SI },
	{ "0.000000001 s", DIMENSION_TIME, 1, SI },
	{ "1.5 min", DIMENSION_TIME, 90000000000, SI },
	{ "2 h", DIMENSION_TIME, 7200000000000, SI },
	{ "1 d", DIMENSION_TIME, 86400000000000, SI },
};

static void
quantities_are_read_exactly(void **state)
{
	(void)state;
	for (size_t i = 0; i < COUNT(whole_vectors); i++) {
		struct error err = { 0 };
		uint64_t found = 0;

		if (units_parse(whole_vectors[i].text,
		    whole_vectors[i].dimension, &found, &err) == -1)
			fail_msg("'%s': %s", whole_vectors[i].text, err.cause);
		if (found != whole_vectors[i].value)
			fail_msg("'%s': %" PRIu64 ", not %" PRIu64 " (%s)",
			    whole_vectors[i].text, found,
			    whole_vectors[i].value, whole_vectors[i].source);
	}
}

/* Every prefix with every symbol that takes prefixes. */
static void
every_prefix_goes_with_every_symbol(void **state)
{
	static const struct {
		const char *symbol;
		uint64_t factor;
	} table[] = {	/* SI brochure; IEC 80000-13 */
		{ "", 1 }, { "k", 1000 }, { "M", 1000000 },
		{ "G", 1000000000 }, { "T", 1000000000000 },
		{ "P", 1000000000000000 }, { "Ki", 1024 },
		{ "Mi", 1048576 }, { "Gi", 1073741824 },
		{ "Ti", 1099511627776 }, { "Pi", 1125899906842624 },
	};
	static const struct {
		const char *symbol;
		enum dimension dimension;
		uint64_t bits;
	} symbols[] = {
		{ "bit/s", DIMENSION_RATE, 1 }, { "b/s", DIMENSION_RATE, 1 },
		{ "bps", DIMENSION_RATE, 1 }, { "B/s", DIMENSION_RATE, 8 },
		{ "o/s", DIMENSION_RATE, 8 }, { "B", DIMENSION_SIZE, 8 },
		{ "o", DIMENSION_SIZE, 8 }, { "bit", DIMENSION_SIZE, 1 },
	};

	(void)state;
	for (size_t i = 0; i < COUNT(table) * COUNT(symbols); i++) {
		size_t p = i / COUNT(symbols), s = i % COUNT(symbols);
		uint64_t found = 0, bits;
		struct error err = { 0 };
		char text[64];

		(void)snprintf(text, sizeof(text), "24 %s%s", table[p].symbol,
		    symbols[s].symbol);
		if (units_parse(text, symbols[s].dimension, &found, &err) ==
		    -1)
			fail_msg("'%s': %s", text, err.cause);
		bits = symbols[s].dimension == DIMENSION_SIZE ? 8 : 1;
		if (found * bits != 24 * table[p].factor * symbols[s].bits)
			fail_msg("'%s': %" PRIu64, text, found);
	}
}

static const struct {
	const char *text;
	enum dimension dimension;
	const char *cause;	/* part of it */
} refusals[] = {
	{ "", DIMENSION_RATE, "empty; known: bit/s" },
	{ " ", DIMENSION_RATE, "does not begin with a digit" },
	{ " 1 Gbit/s", DIMENSION_RATE, "does not begin with a digit" },
	{ "Gbit/s", DIMENSION_RATE, "does not begin with a digit" },
	{ ".5 Gbit/s", DIMENSION_RATE, "does not begin with a digit" },
	{ "1. Gbit/s", DIMENSION_RATE, "no digit after the point" },
	{ "1", DIMENSION_RATE, "no unit; known: bit/s" },
	{ "1000", DIMENSION_RATE, "no unit; known: bit/s" },
	{ "1000 ", DIMENSION_SIZE, "no unit; known: B, o" },
	{ "1 M", DIMENSION_RATE, "prefix 'M' without a unit" },
	{ "1M", DIMENSION_SIZE, "prefix 'M' without a unit" },
	{ "1 Ki", DIMENSION_SIZE, "prefix 'Ki' without a unit" },
	{ "1 Kbit/s", DIMENSION_RATE, "kilo is k, kibi is Ki" },
	{ "1 KB", DIMENSION_SIZE, "kilo is k, kibi is Ki" },
	{ "1 K", DIMENSION_SIZE, "kilo is k, kibi is Ki" },
	{ "1 Gbps/s", DIMENSION_RATE, "unknown unit 'Gbps/s'; known: bit/s" },
	{ "1 kibit/s", DIMENSION_RATE, "did you mean 'Kibit/s'?" },
	{ "1 gbit/s", DIMENSION_RATE, "did you mean 'Gbit/s'?" },
	{ "1 S", DIMENSION_TIME, "did you mean 's'?" },
	{ "1 kkbit/s", DIMENSION_RATE, "unknown unit 'kkbit/s'" },
	{ "1 mbit", DIMENSION_RATE, "unknown unit 'mbit'" },
	{ "1 Ebit/s", DIMENSION_RATE, "unknown unit 'Ebit/s'" },
	{ "1 GB", DIMENSION_RATE, "'GB' is the unit of a size, not of a rate" },
	{ "1 Mbit", DIMENSION_RATE, "unit of a size, not of a rate" },
	{ "1 ms", DIMENSION_RATE, "unit of a time, not of a rate" },
	{ "1 Gbit/s", DIMENSION_SIZE, "unit of a rate, not of a size" },
	{ "1 Gbit/s x", DIMENSION_RATE, "trailing text 'x'" },
	{ "1 Gbit/s ", DIMENSION_RATE, "trailing text ''" },
	{ "1 Gbit/s\n", DIMENSION_RATE, "unknown unit 'Gbit/s?'" },
	{ "1\tGbit/s", DIMENSION_RATE, "unknown unit '?Gbit/s'" },
	{ "1,5 Gbit/s", DIMENSION_RATE, "point, not a comma" },
	{ "1e9 bit/s", DIMENSION_RATE, "unknown unit 'e9 bit/s'" },
	{ "0x10 bit/s", DIMENSION_RATE, "unknown unit 'x10 bit/s'" },
	{ "1 000 bit/s", DIMENSION_RATE, "unknown unit '000 bit/s'" },
	{ "1.2.3 bit/s", DIMENSION_RATE, "unknown unit '.3 bit/s'" },
	{ "-1 Gbit/s", DIMENSION_RATE, "sign '-' is not allowed" },
	{ "+1 Gbit/s", DIMENSION_RATE, "sign '+' is not allowed" },
	{ "-1 B", DIMENSION_SIZE, "sign '-' is not allowed" },
	{ "-1 s", DIMENSION_TIME, "sign '-' is not allowed" },
	{ "0.5 bit/s", DIMENSION_RATE, "finer than 1 bit/s" },
	{ "0.1 B/s", DIMENSION_RATE, "finer than 1 bit/s" },
	{ "0.0001 kbit/s", DIMENSION_RATE, "finer than 1 bit/s" },
	{ "12 bit", DIMENSION_SIZE, "finer than 1 B" },
	{ "1.0001 kB", DIMENSION_SIZE, "finer than 1 B" },
	{ "0.5 ns", DIMENSION_TIME, "finer than 1 ns" },
	{ "18446744073709551615.5 bit/s", DIMENSION_RATE,
	    "finer than 1 bit/s" },
	{ "1.0000000000000000001 Gbit/s", DIMENSION_RATE,
	    "more than 18 digits after the point" },
	{ "18446744073709551616 bit/s", DIMENSION_RATE,
	    "too large, at most 18446744073709551615 bit/s" },
	{ "18446.744073709551616 Pbit/s", DIMENSION_RATE, "too large" },
	{ "2305843009213693952 B/s", DIMENSION_RATE, "too large" },
	{ "20000 PB/s", DIMENSION_RATE, "too large" },
	{ "16384 PiB", DIMENSION_SIZE, "too large" },
	{ "213504 d", DIMENSION_TIME, "too large" },
	{ "340282366920938463463374607431768211456 bit/s", DIMENSION_RATE,
	    "too large" },
	{ "340282366920938463463374607431768211455 Pbit/s", DIMENSION_RATE,
	    "too large" },
	{ "34028236692093846346337.460743176821145600 bit/s", DIMENSION_RATE,
	    "too large" },
	{ "99999999999999999999999999999999999999999999999 B",
	    DIMENSION_SIZE, "too large" },
};

static void
what_is_not_a_quantity_is_refused_with_its_reason(void **state)
{
	(void)state;
	for (size_t i = 0; i < COUNT(refusals); i++) {
		struct error err = { 0 };
		uint64_t found = 77;

		if (units_parse(refusals[i].text, refusals[i].dimension,
		    &found, &err) == 0)
			fail_msg("'%s' was read as %" PRIu64,
			    refusals[i].text, found);
		if (strstr(err.cause, refusals[i].cause) == NULL)
			fail_msg("'%s': '%s' lacks '%s'", refusals[i].text,
			    err.cause, refusals[i].cause);
		assert_int_equal(err.kind, ERROR_INPUT);
		assert_int_equal(found, 77);
	}
}

static void
every_truncation_of_a_quantity_is_refused(void **state)
{
	static const struct {
		const char *text;
		enum dimension dimension;
	} table[] = {
		{ "12.5 Gbit/s", DIMENSION_RATE },
		{ "1.5 KiB/s", DIMENSION_RATE },
		{ "64 kB", DIMENSION_SIZE },
		{ "250 us", DIMENSION_TIME },
	};

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++) {
		for (size_t n = 0; n < strlen(table[i].text); n++) {
			struct error err = { 0 };
			uint64_t found;
			char text[32];

			memcpy(text, table[i].text, n);
			text[n] = '\0';
			if (units_parse(text, table[i].dimension, &found,
			    &err) == 0)
				fail_msg("'%s' was read", text);
		}
	}
}

static const struct {
	const char *text;
	enum dimension dimension;
	double value;
	const char *source;
} real_vectors[] = {
	{ "28 MHz", DIMENSION_FREQUENCY, 28e6, SI },
	{ "5.785 GHz", DIMENSION_FREQUENCY, 5.785e9, SI },
	{ "0.1 Hz", DIMENSION_FREQUENCY, 0.1, SI },
	{ "123456789012345678.5 Hz", DIMENSION_FREQUENCY,
	    123456789012345678.5, "beyond 2^53" },
	{ "10 dB", DIMENSION_DECIBEL, 10, IEC },
	{ "-3.5 dB", DIMENSION_DECIBEL, -3.5, IEC },
	{ "-0 dB", DIMENSION_DECIBEL, 0, IEC },
	{ "-95 dBm", DIMENSION_LEVEL, -95, "ITU-R V.574" },
	{ "20.25 dBm", DIMENSION_LEVEL, 20.25, "ITU-R V.574" },
	{ "20 mW", DIMENSION_POWER, 0.02, SI },
	{ "1.5 uW", DIMENSION_POWER, 1.5e-6, SI },
	{ "1.5 \302\265W", DIMENSION_POWER, 1.5e-6, SI },
	{ "1.5 \316\274W", DIMENSION_POWER, 1.5e-6, SI },
	{ "3 nW", DIMENSION_POWER, 3e-9, SI },
	{ "3 pW", DIMENSION_POWER, 3e-12, SI },
	{ "2 kW", DIMENSION_POWER, 2000, SI },
	{ "97 %", DIMENSION_RATIO, 0.97, "ISO 80000-1, 6.5.5" },
	{ "97%", DIMENSION_RATIO, 0.97, "ISO 80000-1, 6.5.5" },
	{ "0.97", DIMENSION_RATIO, 0.97, "ISO 80000-1, 6.5.5" },
	{ "0.1 %", DIMENSION_RATIO, 0.001, "ISO 80000-1, 6.5.5" },
	{ "0.0001 %", DIMENSION_RATIO, 1e-6, "ISO 80000-1, 6.5.5" },
	{ "100 %", DIMENSION_RATIO, 1, "ISO 80000-1, 6.5.5" },
	{ "1.000000000000000000", DIMENSION_RATIO, 1, "18 decimals" },
	{ "150 %", DIMENSION_RATIO, 1.5, "ISO 80000-1, 6.5.5" },
	{ "1 Gbit/s", DIMENSION_RATE, 1e9, IEC },
	{ "0.5 bit/s", DIMENSION_RATE, 0.5, IEC },
	{ "1.5 kB", DIMENSION_SIZE, 1500, IEEE },
	{ "3 ms", DIMENSION_TIME, 3e6, SI },
};

/* The nearest double is what the compiler makes of the same decimal. */
static void
reals_are_the_nearest_double(void **state)
{
	(void)state;
	for (size_t i = 0; i < COUNT(real_vectors); i++) {
		struct error err = { 0 };
		double found = 0;

		if (units_parse_real(real_vectors[i].text,
		    real_vectors[i].dimension, &found, &err) == -1)
			fail_msg("'%s': %s", real_vectors[i].text, err.cause);
		if (memcmp(&found, &real_vectors[i].value, sizeof(found)) != 0)
			fail_msg("'%s': %.17g, not %.17g",
			    real_vectors[i].text, found,
			    real_vectors[i].value);
	}
}

static const struct {
	const char *text;
	enum dimension dimension;
	const char *cause;
} real_refusals[] = {
	{ "28", DIMENSION_FREQUENCY, "no unit; known: Hz" },
	{ "28 M", DIMENSION_FREQUENCY, "prefix 'M' without a unit" },
	{ "28 KHz", DIMENSION_FREQUENCY, "kilo is k" },
	{ "28 MiHz", DIMENSION_FREQUENCY, "unknown unit 'MiHz'" },
	{ "28 mHz", DIMENSION_FREQUENCY, "did you mean 'MHz'?" },
	{ "-28 MHz", DIMENSION_FREQUENCY, "sign '-'" },
	{ "+3 dB", DIMENSION_DECIBEL, "sign '+'" },
	{ "--3 dB", DIMENSION_DECIBEL, "sign '-'" },
	{ "-", DIMENSION_DECIBEL, "does not begin with a digit" },
	{ "- 3 dB", DIMENSION_DECIBEL, "does not begin with a digit" },
	{ "3", DIMENSION_DECIBEL, "no unit; known: dB" },
	{ "3 kdB", DIMENSION_DECIBEL, "unknown unit 'kdB'" },
	{ "3 dBm", DIMENSION_DECIBEL,
	    "unit of a level, not of a ratio in decibels" },
	{ "-60 dB", DIMENSION_LEVEL, "not of a level" },
	{ "20 dBm", DIMENSION_POWER, "unit of a level, not of a power" },
	{ "-1 W", DIMENSION_POWER, "sign '-'" },
	{ "-1 %", DIMENSION_RATIO, "sign '-'" },
	{ "97 %%", DIMENSION_RATIO, "unknown unit '%%'" },
	{ "97 percent", DIMENSION_RATIO, "unknown unit 'percent'" },
	{ "97 % of it", DIMENSION_RATIO, "trailing text 'of it'" },
	{ "0,97", DIMENSION_RATIO, "comma" },
	{ "", DIMENSION_RATIO, "empty" },
	{ "nan", DIMENSION_RATIO, "does not begin with a digit" },
	{ "inf dB", DIMENSION_DECIBEL, "does not begin with a digit" },
	{ "9999999999999999999999999999999999999 GHz",
	    DIMENSION_FREQUENCY, "too large" },
};

static void
what_is_not_a_real_is_refused_with_its_reason(void **state)
{
	(void)state;
	for (size_t i = 0; i < COUNT(real_refusals); i++) {
		struct error err = { 0 };
		double found = 77;

		if (units_parse_real(real_refusals[i].text,
		    real_refusals[i].dimension, &found, &err) == 0)
			fail_msg("'%s' was read as %g", real_refusals[i].text,
			    found);
		if (strstr(err.cause, real_refusals[i].cause) == NULL)
			fail_msg("'%s': '%s' lacks '%s'",
			    real_refusals[i].text, err.cause,
			    real_refusals[i].cause);
		assert_int_equal(err.kind, ERROR_INPUT);
		assert_true(found >= 77 && found <= 77);
	}
}

static void
a_long_unit_does_not_fill_the_message(void **state)
{
	struct error err = { 0 };
	char text[5000];
	uint64_t found;

	(void)state;
	memset(text, 'x', sizeof(text));
	text[0] = '1';
	text[sizeof(text) - 1] = '\0';
	assert_int_equal(units_parse(text, DIMENSION_RATE, &found, &err), -1);
	assert_non_null(strstr(err.cause, "xxx...'; known: bit/s"));
}

static void
counts_keep_their_limits(void **state)
{
	static const struct {
		const char *text;
		uint64_t min, max;
		bool good;
		uint64_t value;
	} table[] = {
		{ "1", 1, 64, true, 1 },
		{ "64", 1, 64, true, 64 },
		{ "0", 1, 64, false, 0 },
		{ "65", 1, 64, false, 0 },
		{ "0", 0, 0, true, 0 },
		{ "18446744073709551615", 0, UINT64_MAX, true, UINT64_MAX },
		{ "18446744073709551616", 0, UINT64_MAX, false, 0 },
		{ "999999999999999999999999999999999999999999", 0,
		    UINT64_MAX, false, 0 },
		{ "", 0, 9, false, 0 },
		{ "-1", 0, 9, false, 0 },
		{ "+1", 0, 9, false, 0 },
		{ "1.0", 0, 9, false, 0 },
		{ "1 ", 0, 9, false, 0 },
		{ " 1", 0, 9, false, 0 },
		{ "1k", 0, 9, false, 0 },
		{ "0x1", 0, 9, false, 0 },
	};

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++) {
		struct error err = { 0 };
		uint64_t found = 0;
		int rc = units_parse_count(table[i].text, table[i].min,
		    table[i].max, &found, &err);

		if (rc != (table[i].good ? 0 : -1) || found != table[i].value)
			fail_msg("'%s': %d, %" PRIu64, table[i].text, rc,
			    found);
		if (rc == -1)
			assert_non_null(strstr(err.cause,
			    "allowed: a whole number from"));
	}
}

static void
every_dimension_says_what_it_accepts(void **state)
{
	(void)state;
	for (unsigned d = 0; d < DIMENSIONS; d++) {
		const char *allowed = units_allowed((enum dimension)d);
		struct error err = { 0 };
		char symbol[32] = "", text[64];
		double found;

		/* the first symbol named is one that is read */
		assert_non_null(allowed);
		memcpy(symbol, allowed, strcspn(allowed, ","));
		(void)snprintf(text, sizeof(text), "1 %s", symbol);
		assert_int_equal(units_parse_real(text, (enum dimension)d,
		    &found, &err), 0);
	}
}

static void
a_rate_survives_400_gbit_s_for_a_day(void **state)
{
	const uint64_t second_ns = 1000000000;
	static const struct {
		uint64_t bytes, elapsed_ns, bps;
		const char *source;
	} table[] = {
		{ 0, 1, 0, "nothing" },
		{ 1, 1, 8000000000, "8 bit a ns" },
		{ 125000000, 1000000000, 1000000000, "1 Gbit/s by hand" },
		{ 1538, 12304, 1000000000,
		    "IEEE 802.3: 1538 octets take 12.304 us at 1 Gbit/s" },
		{ 1, 3000000000, 2, "8 / 3, rounded down" },
		{ UINT64_MAX, 100000000000, 1475739525896764129,
		    "(2^64 - 1) * 8 / 100, by python's integers" },
		{ UINT64_MAX, 8000000000, UINT64_MAX, "(2^64 - 1) * 8 / 8" },
		{ UINT64_MAX, 1000000000, UINT64_MAX, "saturated" },
		{ UINT64_MAX, 1, UINT64_MAX, "saturated" },
		{ UINT64_MAX, UINT64_MAX, 8000000000, "8 bit a ns" },
	};

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++)
		assert_int_equal(rate_bps(table[i].bytes, table[i].elapsed_ns),
		    table[i].bps);
	/* 400 Gbit/s are 50 GB a second */
	assert_int_equal(rate_bps(UINT64_C(50000000000) * 60,
	    60 * second_ns), UINT64_C(400000000000));
	assert_int_equal(rate_bps(UINT64_C(50000000000) * 86400,
	    86400 * second_ns), UINT64_C(400000000000));
}

static void
scaling_does_not_wrap(void **state)
{
	(void)state;
	assert_int_equal(scale_u64(1000, 3, 2), 1500);
	assert_int_equal(scale_u64(10, 1, 3), 3);
	assert_int_equal(scale_u64(0, UINT64_MAX, 1), 0);
	assert_int_equal(scale_u64(UINT64_MAX, 1, 1), UINT64_MAX);
	assert_int_equal(scale_u64(UINT64_MAX, UINT64_MAX, UINT64_MAX),
	    UINT64_MAX);
	/* python's integers: (2^64 - 1) * 3 // 7 and so on */
	assert_int_equal(scale_u64(UINT64_MAX, 3, 7),
	    UINT64_C(7905747460161236406));
	assert_int_equal(scale_u64(UINT64_C(12345678901234567890), 97, 100),
	    UINT64_C(11975308534197530853));
	assert_int_equal(scale_u64(UINT64_MAX, 2, 1), UINT64_MAX);
	assert_int_equal(scale_u64(UINT64_MAX, UINT64_MAX, 1), UINT64_MAX);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(quantities_are_read_exactly),
		cmocka_unit_test(every_prefix_goes_with_every_symbol),
		cmocka_unit_test(
		    what_is_not_a_quantity_is_refused_with_its_reason),
		cmocka_unit_test(every_truncation_of_a_quantity_is_refused),
		cmocka_unit_test(reals_are_the_nearest_double),
		cmocka_unit_test(what_is_not_a_real_is_refused_with_its_reason),
		cmocka_unit_test(a_long_unit_does_not_fill_the_message),
		cmocka_unit_test(counts_keep_their_limits),
		cmocka_unit_test(every_dimension_says_what_it_accepts),
		cmocka_unit_test(a_rate_survives_400_gbit_s_for_a_day),
		cmocka_unit_test(scaling_does_not_wrap),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
