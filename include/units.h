/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * units: text to quantity and back, and the arithmetic of rates.
 *
 * Symbols follow IEC 80000-13 and IEEE 1541: bit, B, o (octet, input only),
 * SI prefixes (k = 1000) and IEC prefixes (Ki = 1024).  No locale, no
 * exponent, no sign but for levels in decibels.  Pure.
 */
#ifndef PLAFOND_UNITS_H
#define PLAFOND_UNITS_H

#include <stddef.h>
#include <stdint.h>

struct error;

__extension__ typedef unsigned __int128 uint128;

/* A dimension fixes the unit in which a quantity is kept. */
enum dimension {
	DIMENSION_RATE,		/* uint64_t, bit/s */
	DIMENSION_SIZE,		/* uint64_t, B */
	DIMENSION_TIME,		/* uint64_t, ns */
	DIMENSION_FREQUENCY,	/* double, Hz */
	DIMENSION_DECIBEL,	/* double, dB */
	DIMENSION_LEVEL,	/* double, dBm */
	DIMENSION_POWER,	/* double, W */
	DIMENSION_RATIO,	/* double, 1; written "97 %" or "0.97" */
	DIMENSIONS
};

/* Exact text to RATE, SIZE or TIME.  "1 Gbit/s", "1 Mo/s" (8 000 000 bit/s),
 * "64 kB", "1500 B", "12 kbit" (as a size: 1500 B), "3 s", "100 ms", "2 h".
 * The space before the symbol may be left out.
 * -1 (ERROR_INPUT): missing or unknown unit, sign, trailing text, overflow, or
 * finer than one bit/s, B or ns; the cause says which, and what is allowed. */
int units_parse(const char *text, enum dimension dimension, uint64_t *out,
    struct error *err);

/* Text to any dimension as a double in its unit: "-95 dBm", "28 MHz", "9 %". */
int units_parse_real(const char *text, enum dimension dimension, double *out,
    struct error *err);

/* A whole number without a unit, within [min, max]. */
int units_parse_count(const char *text, uint64_t min, uint64_t max,
    uint64_t *out, struct error *err);

/* Value to text with at most `digits` digits after the point in the largest SI
 * prefix not above the value, rounded down: 941482444 -> "941.482 Mbit/s".
 * Returns buf. */
const char *units_format(uint64_t value, enum dimension dimension,
    unsigned digits, char *buf, size_t size);
/* The shortest text, of one or more of its unit, that units_parse turns back
 * into exactly this value: "100 ms", not "0.1 s"; sizes may be binary. */
const char *units_format_exact(uint64_t value, enum dimension dimension,
    char *buf, size_t size);
/* Rounded to the nearest; NAN is "not given". */
const char *units_format_real(double value, enum dimension dimension,
    unsigned digits, char *buf, size_t size);

/* What a dimension accepts, for help and messages: "bit/s, B/s, ...". */
const char *units_allowed(enum dimension dimension);

/* floor(bytes * 8 / elapsed), bit/s, through 128 bits; elapsed_ns > 0.
 * Saturates at UINT64_MAX. */
uint64_t rate_bps(uint64_t bytes, uint64_t elapsed_ns);
/* floor(value * num / den) through 128 bits; den > 0; saturates. */
uint64_t scale_u64(uint64_t value, uint64_t num, uint64_t den);

#endif
