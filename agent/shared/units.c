/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "units.h"

#include <assert.h>
#include <inttypes.h>
#include <string.h>
#include <strings.h>

#include "clock.h"
#include "error.h"
#include "scale.h"
#include "text.h"

/* A text as it was read: num / den of the dimension's unit. */
struct fraction {
	uint128 num, den;
	bool negative;
};

const char *
units_allowed(enum dimension dimension)
{
	assert(dimension < DIMENSIONS);
	return scale_words[dimension].allowed;
}

static bool
is_symbol(const char *text, struct scale scale, bool any_case)
{
	const char *prefix = scale.prefix->symbol, *unit = scale.unit->symbol;
	size_t length = strlen(prefix);

	if (any_case)
		return strncasecmp(text, prefix, length) == 0 &&
		    strcasecmp(text + length, unit) == 0;
	return strncmp(text, prefix, length) == 0 &&
	    strcmp(text + length, unit) == 0;
}

static bool
find_symbol(const char *text, enum dimension dimension, bool any_case,
    struct scale *out)
{
	for (size_t u = 0; u < scale_units_count; u++) {
		if (scale_units[u].dimension != dimension)
			continue;
		for (size_t p = 0; p < scale_prefixes_count; p++) {
			struct scale scale = { &scale_prefixes[p],
				&scale_units[u] };

			if ((scale.unit->accepted & scale.prefix->kind) == 0 ||
			    !is_symbol(text, scale, any_case))
				continue;
			*out = scale;
			return true;
		}
	}
	return false;
}

static bool
is_prefix(const char *symbol)
{
	for (size_t p = 0; p < scale_prefixes_count; p++) {
		if (strcmp(symbol, scale_prefixes[p].symbol) == 0)
			return true;
	}
	return false;
}

/* Text that follows a good symbol, NULL where the symbol is not good. */
static const char *
trailing_text(const char *symbol, enum dimension dimension)
{
	const char *space = strchr(symbol, ' ');
	char head[SYMBOL_SIZE];
	struct scale scale;

	if (space == NULL || (size_t)(space - symbol) >= sizeof(head))
		return NULL;
	memcpy(head, symbol, (size_t)(space - symbol));
	head[space - symbol] = '\0';
	return find_symbol(head, dimension, false, &scale) ? space + 1 : NULL;
}

/* Why a symbol is none of the dimension's. */
static int
refuse_symbol(const char *symbol, enum dimension dimension, struct error *err)
{
	const char *noun = scale_words[dimension].noun;
	const char *allowed = scale_words[dimension].allowed;
	const char *trailing = trailing_text(symbol, dimension);
	char quoted[TEXT_QUOTE_SIZE], near[SYMBOL_SIZE];
	struct scale scale;

	if (trailing != NULL)
		return error_set(err, ERROR_INPUT, "trailing text '%s'",
		    text_quote(trailing, quoted, sizeof(quoted)));
	(void)text_quote(symbol, quoted, sizeof(quoted));
	if (symbol[0] == '\0')
		return error_set(err, ERROR_INPUT, "no unit; known: %s",
		    allowed);
	if (symbol[0] == ',')
		return error_set(err, ERROR_INPUT,
		    "decimals follow a point, not a comma");
	if (is_prefix(symbol))
		return error_set(err, ERROR_INPUT,
		    "prefix '%s' without a unit; known: %s", quoted, allowed);
	if (symbol[0] == 'K' && symbol[1] != 'i')
		return error_set(err, ERROR_INPUT, "unknown unit '%s': "
		    "kilo is k, kibi is Ki; known: %s", quoted, allowed);
	for (unsigned d = 0; d < DIMENSIONS; d++) {
		if (find_symbol(symbol, (enum dimension)d, false, &scale))
			return error_set(err, ERROR_INPUT,
			    "'%s' is the unit of %s, not of %s; known: %s",
			    quoted, scale_words[d].noun, noun, allowed);
	}
	if (find_symbol(symbol, dimension, true, &scale))
		return error_set(err, ERROR_INPUT,
		    "unknown unit '%s', did you mean '%s'?", quoted,
		    scale_symbol(scale, near));
	return error_set(err, ERROR_INPUT, "unknown unit '%s'; known: %s",
	    quoted, allowed);
}

/* -1: the digits do not fit; so does no quantity that they could begin. */
static int
take_digits(const char **p, uint128 *digits, unsigned *count)
{
	*count = 0;
	for (; **p >= '0' && **p <= '9'; (*p)++, (*count)++) {
		if (__builtin_mul_overflow(*digits, (uint128)10, digits) ||
		    __builtin_add_overflow(*digits, (uint128)(**p - '0'),
		    digits))
			return -1;
	}
	return 0;
}

static int
refuse_large(enum dimension dimension, struct error *err)
{
	if (scale_words[dimension].whole == NULL)
		return error_set(err, ERROR_INPUT, "too large");
	return error_set(err, ERROR_INPUT, "too large, at most %" PRIu64 " %s",
	    UINT64_MAX, scale_words[dimension].whole);
}

/* The number at the start of *p into out, and *p moved behind it. */
static int
take_number(const char **p, enum dimension dimension, struct fraction *out,
    struct error *err)
{
	unsigned count, decimals = 0;

	*out = (struct fraction){ .den = 1 };
	if (**p == '\0')
		return error_set(err, ERROR_INPUT, "empty; known: %s",
		    scale_words[dimension].allowed);
	if (strncmp(*p, "-inf", 4) == 0 && scale_words[dimension].sign)
		return error_set(err, ERROR_INPUT, "minus infinity is a "
		    "ratio of 0: no signal, at which nothing is carried");
	if (**p == '-' && scale_words[dimension].sign) {
		out->negative = true;
		(*p)++;
	}
	if (**p == '-' || **p == '+')
		return error_set(err, ERROR_INPUT,
		    "a sign '%c' is not allowed: never negative", **p);
	if (take_digits(p, &out->num, &count) == -1)
		return refuse_large(dimension, err);
	if (count == 0)
		return error_set(err, ERROR_INPUT,
		    "does not begin with a digit");
	if (**p != '.')
		return 0;
	(*p)++;
	if (take_digits(p, &out->num, &decimals) == -1 &&
	    decimals <= DECIMALS_MAX)
		return refuse_large(dimension, err);
	if (decimals > DECIMALS_MAX)
		return error_set(err, ERROR_INPUT,
		    "more than %d digits after the point", DECIMALS_MAX);
	if (decimals == 0)
		return error_set(err, ERROR_INPUT,
		    "no digit after the point");
	out->den = scale_power_of_ten(decimals);
	return 0;
}

static int
parse_fraction(const char *text, enum dimension dimension,
    struct fraction *out, struct error *err)
{
	struct scale scale;

	assert(dimension < DIMENSIONS);
	if (take_number(&text, dimension, out, err) == -1)
		return -1;
	while (*text == ' ')
		text++;
	if (!find_symbol(text, dimension, false, &scale))
		return refuse_symbol(text, dimension, err);
	/* den is at most 10^18 * 8 < 2^63: what overflows here is above 2^64 */
	if (__builtin_mul_overflow(out->num, (uint128)scale.prefix->num *
	    scale.unit->num, &out->num))
		return refuse_large(dimension, err);
	out->den *= (uint128)scale.prefix->den * scale.unit->den;
	return 0;
}

int
units_parse(const char *text, enum dimension dimension, uint64_t *out,
    struct error *err)
{
	struct fraction found;

	assert(dimension == DIMENSION_RATE || dimension == DIMENSION_SIZE ||
	    dimension == DIMENSION_TIME);
	if (parse_fraction(text, dimension, &found, err) == -1)
		return -1;
	if (found.num / found.den > UINT64_MAX)
		return refuse_large(dimension, err);
	if (found.num % found.den != 0)
		return error_set(err, ERROR_INPUT, "finer than 1 %s",
		    scale_words[dimension].whole);
	*out = (uint64_t)(found.num / found.den);
	return 0;
}

/* Exact operands of one division give the nearest double: IEEE 754. */
static double
divide(uint128 num, uint128 den)
{
	const uint128 exact_max = (uint128)1 << 53;

	while (num % 10 == 0 && den % 10 == 0) {
		num /= 10;
		den /= 10;
	}
	if (num <= exact_max && den <= exact_max)
		return (double)num / (double)den;
	return (double)((long double)num / (long double)den);
}

int
units_parse_real(const char *text, enum dimension dimension, double *out,
    struct error *err)
{
	struct fraction found;
	double value;

	if (parse_fraction(text, dimension, &found, err) == -1)
		return -1;
	value = divide(found.num, found.den);
	*out = found.negative && found.num != 0 ? -value : value;
	return 0;
}

int
units_parse_count(const char *text, uint64_t min, uint64_t max,
    uint64_t *out, struct error *err)
{
	const char *p = text;
	char quoted[TEXT_QUOTE_SIZE];
	uint128 value = 0;
	unsigned count;

	if (take_digits(&p, &value, &count) == -1 || count == 0 ||
	    *p != '\0' || value < min || value > max)
		return error_set(err, ERROR_INPUT, "found '%s', allowed: "
		    "a whole number from %" PRIu64 " to %" PRIu64,
		    text_quote(text, quoted, sizeof(quoted)), min, max);
	*out = (uint64_t)value;
	return 0;
}

uint64_t
rate_bps(uint64_t bytes, uint64_t elapsed_ns)
{
	uint128 rate = (uint128)bytes * 8 * NS_PER_S;

	assert(elapsed_ns > 0);
	rate /= elapsed_ns;
	return rate < UINT64_MAX ? (uint64_t)rate : UINT64_MAX;
}

uint64_t
scale_u64(uint64_t value, uint64_t num, uint64_t den)
{
	uint128 scaled = (uint128)value * num;

	assert(den > 0);
	scaled /= den;
	return scaled < UINT64_MAX ? (uint64_t)scaled : UINT64_MAX;
}
