/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "scale.h"

#include <assert.h>
#include <stdio.h>

#include "clock.h"

#define PREFIX_BITS (PREFIX_NONE | PREFIX_LARGE | PREFIX_BINARY)
#define PREFIX_SI (PREFIX_NONE | PREFIX_LARGE | PREFIX_SMALL)

/* In order of size within a kind. */
const struct prefix scale_prefixes[] = {
	{ "p", 1, 1000000000000, PREFIX_SMALL },
	{ "n", 1, 1000000000, PREFIX_SMALL },
	{ "u", 1, 1000000, PREFIX_SMALL },
	{ "m", 1, 1000, PREFIX_SMALL },
	{ "", 1, 1, PREFIX_NONE },
	{ "k", 1000, 1, PREFIX_LARGE },
	{ "M", 1000000, 1, PREFIX_LARGE },
	{ "G", 1000000000, 1, PREFIX_LARGE },
	{ "T", 1000000000000, 1, PREFIX_LARGE },
	{ "P", 1000000000000000, 1, PREFIX_LARGE },
	{ "Ki", UINT64_C(1) << 10, 1, PREFIX_BINARY },
	{ "Mi", UINT64_C(1) << 20, 1, PREFIX_BINARY },
	{ "Gi", UINT64_C(1) << 30, 1, PREFIX_BINARY },
	{ "Ti", UINT64_C(1) << 40, 1, PREFIX_BINARY },
	{ "Pi", UINT64_C(1) << 50, 1, PREFIX_BINARY },
};
const size_t scale_prefixes_count =
    sizeof(scale_prefixes) / sizeof(scale_prefixes[0]);

#define IEC_PREFIXES "each with k, M, G, T, P or Ki, Mi, Gi, Ti, Pi"
#define NS_PER_MIN (60 * NS_PER_S)
#define NS_PER_H (60 * NS_PER_MIN)
#define NS_PER_D (24 * NS_PER_H)

/* The rows of a dimension that are written ascend. */
const struct unit scale_units[] = {
	{ DIMENSION_RATE, "bit/s", 1, 1, PREFIX_BITS,
	    PREFIX_NONE | PREFIX_LARGE, PREFIX_NONE | PREFIX_LARGE },
	{ DIMENSION_RATE, "b/s", 1, 1, PREFIX_BITS, 0, 0 },
	{ DIMENSION_RATE, "bps", 1, 1, PREFIX_BITS, 0, 0 },
	{ DIMENSION_RATE, "B/s", 8, 1, PREFIX_BITS, 0, 0 },
	{ DIMENSION_RATE, "o/s", 8, 1, PREFIX_BITS, 0, 0 },
	{ DIMENSION_SIZE, "B", 1, 1, PREFIX_BITS,
	    PREFIX_NONE | PREFIX_LARGE, PREFIX_BITS },
	{ DIMENSION_SIZE, "o", 1, 1, PREFIX_BITS, 0, 0 },
	{ DIMENSION_SIZE, "bit", 1, 8, PREFIX_BITS, 0, 0 },
	{ DIMENSION_TIME, "ns", 1, 1, PREFIX_NONE, PREFIX_NONE, PREFIX_NONE },
	{ DIMENSION_TIME, "us", 1000, 1, PREFIX_NONE, PREFIX_NONE,
	    PREFIX_NONE },
	/* micro sign U+00B5, Greek mu U+03BC */
	{ DIMENSION_TIME, "\302\265s", 1000, 1, PREFIX_NONE, 0, 0 },
	{ DIMENSION_TIME, "\316\274s", 1000, 1, PREFIX_NONE, 0, 0 },
	{ DIMENSION_TIME, "ms", NS_PER_MS, 1, PREFIX_NONE, PREFIX_NONE,
	    PREFIX_NONE },
	{ DIMENSION_TIME, "s", NS_PER_S, 1, PREFIX_NONE, PREFIX_NONE,
	    PREFIX_NONE },
	{ DIMENSION_TIME, "min", NS_PER_MIN, 1, PREFIX_NONE, 0, PREFIX_NONE },
	{ DIMENSION_TIME, "h", NS_PER_H, 1, PREFIX_NONE, 0, PREFIX_NONE },
	{ DIMENSION_TIME, "d", NS_PER_D, 1, PREFIX_NONE, 0, PREFIX_NONE },
	{ DIMENSION_FREQUENCY, "Hz", 1, 1, PREFIX_NONE | PREFIX_LARGE,
	    PREFIX_NONE | PREFIX_LARGE, 0 },
	{ DIMENSION_DECIBEL, "dB", 1, 1, PREFIX_NONE, PREFIX_NONE, 0 },
	{ DIMENSION_LEVEL, "dBm", 1, 1, PREFIX_NONE, PREFIX_NONE, 0 },
	{ DIMENSION_POWER, "W", 1, 1, PREFIX_SI, PREFIX_SI, 0 },
	{ DIMENSION_POWER, "\302\265W", 1, 1000000, PREFIX_NONE, 0, 0 },
	{ DIMENSION_POWER, "\316\274W", 1, 1000000, PREFIX_NONE, 0, 0 },
	{ DIMENSION_RATIO, "%", 1, 100, PREFIX_NONE, PREFIX_NONE, 0 },
	{ DIMENSION_RATIO, "", 1, 1, PREFIX_NONE, 0, 0 },
};
const size_t scale_units_count = sizeof(scale_units) / sizeof(scale_units[0]);

const struct dimension_words scale_words[DIMENSIONS] = {
	[DIMENSION_RATE] = { "a rate", "bit/s", "0 bit/s",
	    "bit/s, b/s, bps, B/s, o/s, " IEC_PREFIXES, false },
	[DIMENSION_SIZE] = { "a size", "B", "0 B",
	    "B, o, bit, " IEC_PREFIXES, false },
	[DIMENSION_TIME] = { "a time", "ns", "0 s",
	    "ns, us, ms, s, min, h, d", false },
	[DIMENSION_FREQUENCY] = { "a frequency", NULL, "0 Hz",
	    "Hz, with k, M, G, T, P", false },
	[DIMENSION_DECIBEL] = { "a ratio in decibels", NULL, "0 dB",
	    "dB", true },
	[DIMENSION_LEVEL] = { "a level", NULL, "0 dBm", "dBm", true },
	[DIMENSION_POWER] = { "a power", NULL, "0 W",
	    "W, with p, n, u, m, k, M, G, T, P", false },
	[DIMENSION_RATIO] = { "a ratio", NULL, "0 %",
	    "%, or a plain number such as 0.97", false },
};

const char *
scale_symbol(struct scale scale, char buf[SYMBOL_SIZE])
{
	(void)snprintf(buf, SYMBOL_SIZE, "%s%s", scale.prefix->symbol,
	    scale.unit->symbol);
	return buf;
}

size_t
scale_collect(enum dimension dimension, bool exact,
    struct scale scales[SCALES_MAX])
{
	size_t count = 0;

	for (size_t u = 0; u < scale_units_count; u++) {
		const struct unit *unit = &scale_units[u];
		unsigned kinds = exact ? unit->exact : unit->shown;

		for (size_t p = 0; p < scale_prefixes_count; p++) {
			const struct prefix *prefix = &scale_prefixes[p];

			if (unit->dimension != dimension ||
			    (kinds & prefix->kind) == 0)
				continue;
			assert(count < SCALES_MAX);
			scales[count++] = (struct scale){ prefix, unit };
		}
	}
	return count;
}

uint64_t
scale_power_of_ten(unsigned exponent)
{
	uint64_t result = 1;

	assert(exponent <= 19);
	while (exponent-- > 0)
		result *= 10;
	return result;
}
