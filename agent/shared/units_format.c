/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "units.h"

#include <assert.h>
#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "scale.h"

#define REAL_DIGITS_MAX 9

/* How many of the dimension's whole units one of the scale is. */
static uint64_t
whole_size(struct scale scale)
{
	return scale.prefix->num * scale.unit->num;
}

/* Decimals of value / size, at most `digits`, rounded down, no zero at the
 * end.  Returns their number, and in *rest what they leave out. */
static unsigned
write_decimals(uint64_t value, uint64_t size, unsigned digits,
    char out[DECIMALS_MAX + 1], uint64_t *rest)
{
	uint128 left = value % size;
	unsigned count = 0;

	assert(digits <= DECIMALS_MAX);
	while (count < digits && left != 0) {
		left *= 10;
		out[count++] = (char)('0' + (char)(left / size));
		left %= size;
	}
	while (count > 0 && out[count - 1] == '0')
		count--;
	out[count] = '\0';
	*rest = (uint64_t)left;
	return count;
}

static const char *
write_scaled(uint64_t whole, const char *decimals, struct scale scale,
    char *buf, size_t size)
{
	(void)snprintf(buf, size, "%" PRIu64 "%s%s %s%s", whole,
	    decimals[0] != '\0' ? "." : "", decimals, scale.prefix->symbol,
	    scale.unit->symbol);
	return buf;
}

const char *
units_format(uint64_t value, enum dimension dimension, unsigned digits,
    char *buf, size_t size)
{
	struct scale scales[SCALES_MAX];
	char decimals[DECIMALS_MAX + 1];
	size_t count = scale_collect(dimension, false, scales);
	size_t best = 0;
	uint64_t rest;

	assert(scale_words[dimension].whole != NULL);
	if (value == 0) {
		(void)snprintf(buf, size, "%s", scale_words[dimension].zero);
		return buf;
	}
	while (best + 1 < count && whole_size(scales[best + 1]) <= value)
		best++;
	(void)write_decimals(value, whole_size(scales[best]),
	    digits < DECIMALS_MAX ? digits : DECIMALS_MAX, decimals, &rest);
	return write_scaled(value / whole_size(scales[best]), decimals,
	    scales[best], buf, size);
}

/* Length of what write_scaled writes. */
static size_t
scaled_length(uint64_t whole, unsigned decimals, struct scale scale)
{
	size_t length = 1;

	for (; whole > 9; whole /= 10)
		length++;
	return length + (decimals > 0 ? 1 + decimals : 0) + 1 +
	    strlen(scale.prefix->symbol) + strlen(scale.unit->symbol);
}

const char *
units_format_exact(uint64_t value, enum dimension dimension, char *buf,
    size_t size)
{
	struct scale scales[SCALES_MAX];
	size_t count = scale_collect(dimension, true, scales);
	size_t best = count, best_length = SIZE_MAX;
	char decimals[DECIMALS_MAX + 1];
	unsigned used, best_used = 0;
	uint64_t rest;

	assert(scale_words[dimension].whole != NULL);
	for (size_t i = 0; i < count; i++) {
		uint64_t step = whole_size(scales[i]);
		size_t length;

		if (step > value)
			continue;
		used = write_decimals(value, step, DECIMALS_MAX, decimals,
		    &rest);
		length = scaled_length(value / step, used, scales[i]);
		if (rest != 0 || length > best_length ||
		    (length == best_length && used > best_used))
			continue;
		best = i;
		best_length = length;
		best_used = used;
	}
	if (best == count) {
		(void)snprintf(buf, size, "%s", scale_words[dimension].zero);
		return buf;
	}
	(void)write_decimals(value, whole_size(scales[best]), DECIMALS_MAX,
	    decimals, &rest);
	return write_scaled(value / whole_size(scales[best]), decimals,
	    scales[best], buf, size);
}

static long double
real_size(struct scale scale)
{
	return (long double)scale.prefix->num * (long double)scale.unit->num /
	    ((long double)scale.prefix->den * (long double)scale.unit->den);
}

/* value in the scale, times 10^digits, rounded to the nearest; saturates. */
static uint64_t
value_in(double value, struct scale scale, uint64_t tens)
{
	long double scaled = (long double)value / real_size(scale) *
	    (long double)tens + 0.5L;

	return scaled < 0x1p64L ? (uint64_t)scaled : UINT64_MAX;
}

const char *
units_format_real(double value, enum dimension dimension, unsigned digits,
    char *buf, size_t size)
{
	struct scale scales[SCALES_MAX];
	size_t count = scale_collect(dimension, false, scales), best = 0;
	double magnitude = value < 0 ? -value : value;
	char decimals[DECIMALS_MAX + 1];
	uint64_t scaled, rest, tens;

	if (isnan(value) || isinf(value)) {
		(void)snprintf(buf, size, "%s",
		    isnan(value) ? "not given" : "not finite");
		return buf;
	}
	tens = scale_power_of_ten(digits < REAL_DIGITS_MAX ? digits :
	    REAL_DIGITS_MAX);
	scaled = value_in(magnitude, scales[best], tens);
	/* up while what would be written reaches one of the next scale */
	while (best + 1 < count && (long double)scaled / (long double)tens >=
	    real_size(scales[best + 1]) / real_size(scales[best]))
		scaled = value_in(magnitude, scales[++best], tens);
	if (scaled == 0) {
		(void)snprintf(buf, size, "%s", scale_words[dimension].zero);
		return buf;
	}
	(void)write_decimals(scaled, tens, REAL_DIGITS_MAX, decimals, &rest);
	if (value < 0 && size > 1)
		*buf = '-';
	(void)write_scaled(scaled / tens, decimals, scales[best],
	    buf + (value < 0), size - (value < 0));
	return buf;
}
