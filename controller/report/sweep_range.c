/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The range of a sweep: KEY=FROM..TO[:STEP] and its values. */
#include <inttypes.h>
#include <math.h>
#include <string.h>

#include "declare/circuit.h"
#include "error.h"
#include "log.h"
#include "report/sweep.h"

#define FORM "KEY=FROM..TO[:STEP], such as 'mtu=64 B..1500 B:64 B'"
#define DEFAULT_PARTS 10	/* a tenth of the range */
/* A double holds 15 decimal digits; a quantity's text 18 after the point. */
#define REAL_DIGITS 15
#define DECIMALS_MAX 18
#define TEXT_SIZE 128

/* What a kind is called that is no number. */
static const char *const kinds[] = {
	[FIELD_TEXT] = "a text",
	[FIELD_QUANTITY] = NULL,
	[FIELD_REAL] = NULL,
	[FIELD_COUNT] = NULL,
	[FIELD_YES_NO] = "yes or no",
	[FIELD_CHOICE] = "a choice",
	[FIELD_MAPPING] = "a mapping",
	[FIELD_LIST] = "a list",
	[FIELD_CUSTOM] = "no number",
};

/* The words of the text. */
struct words {
	char key[SWEEP_KEY_SIZE];
	char from[TEXT_SIZE], to[TEXT_SIZE], step[TEXT_SIZE];	/* step "" */
};

static int
copy_word(char *out, size_t size, const char *text, size_t length)
{
	while (length > 0 && text[length - 1] == ' ')
		length--;
	while (length > 0 && *text == ' ') {
		text++;
		length--;
	}
	if (length >= size)
		return -1;
	memcpy(out, text, length);
	out[length] = '\0';
	return 0;
}

static int
split(const char *text, struct words *out, struct error *err)
{
	const char *equals = strchr(text, '='), *dots, *colon, *end;
	char found[TEXT_SIZE];

	dots = equals != NULL ? strstr(equals, "..") : NULL;
	if (dots == NULL)
		goto refused;
	end = dots + strlen(dots);
	colon = strchr(dots, ':');
	if (copy_word(out->key, sizeof(out->key), text,
	    (size_t)(equals - text)) == -1 ||
	    copy_word(out->from, sizeof(out->from), equals + 1,
	    (size_t)(dots - equals - 1)) == -1 ||
	    copy_word(out->to, sizeof(out->to), dots + 2,
	    (size_t)((colon != NULL ? colon : end) - dots - 2)) == -1)
		goto refused;
	out->step[0] = '\0';
	if (colon != NULL && (copy_word(out->step, sizeof(out->step),
	    colon + 1, (size_t)(end - colon - 1)) == -1 ||
	    out->step[0] == '\0'))
		goto refused;
	if (out->key[0] != '\0' && out->from[0] != '\0' &&
	    out->to[0] != '\0')
		return 0;
refused:
	return error_set(err, ERROR_USAGE, "found '%s', allowed: " FORM,
	    log_escape(text, found, sizeof(found)));
}

/* "; below it can be swept: snr, noise-figure" */
static void
append_numbers(const struct field *rows, char *buf, size_t size)
{
	const struct field *row;
	size_t used = 0;

	buf[0] = '\0';
	for (row = rows; rows != NULL && row->name != NULL; row++) {
		if (kinds[row->kind] != NULL || used >= size)
			continue;
		(void)snprintf(buf + used, size - used, "%s%s", used == 0 ?
		    "; below it can be swept: " : ", ", row->name);
		used += strlen(buf + used);
	}
}

static int
find_number(const struct node *root, const struct field *rows,
    const char *key, const struct field **out, struct error *err)
{
	const struct field *below;
	char numbers[300];

	if (field_find(root, rows, key, out, &below, err) == -1)
		return -1;
	if (kinds[(*out)->kind] == NULL)
		return 0;
	append_numbers(below, numbers, sizeof(numbers));
	return error_set(err, ERROR_USAGE, "%s is %s and cannot be swept%s",
	    key, kinds[(*out)->kind], numbers);
}

static bool
is_real(const struct field *field)
{
	return field->kind == FIELD_REAL;
}

/* One of FROM, TO, STEP; `what` names it. */
static int
read_number(const struct field *field, const char *what, const char *text,
    uint64_t *whole, double *real, struct error *err)
{
	struct field plain = *field;
	struct error why = { 0 };
	char allowed[256], found[TEXT_SIZE];
	int rc;

	if (field->kind == FIELD_COUNT)
		rc = units_parse_count(text, 0, FIELD_UNSET - 1, whole, &why);
	else if (field->kind == FIELD_QUANTITY)
		rc = units_parse(text, field->dimension, whole, &why);
	else
		rc = units_parse_real(text, field->dimension, real, &why);
	if (rc == 0)
		return 0;
	plain.per_direction = false;
	return error_set(err, ERROR_USAGE, "%s: found '%s', allowed: %s%s%s%s",
	    what, log_escape(text, found, sizeof(found)),
	    field_allowed(&plain, allowed, sizeof(allowed)),
	    field->kind == FIELD_COUNT ? "" : " (",
	    field->kind == FIELD_COUNT ? "" : why.cause,
	    field->kind == FIELD_COUNT ? "" : ")");
}

/* STEP of a level in dBm is a ratio in dB. */
static int
read_step(const struct field *field, const char *text, uint64_t *whole,
    double *real, struct error *err)
{
	struct field ratio = *field;
	struct error ignored;

	if (is_real(field) && field->dimension == DIMENSION_LEVEL) {
		ratio.dimension = DIMENSION_DECIBEL;
		ratio.real_min = ratio.real_max = 0;
		if (read_number(&ratio, "STEP", text, whole, real,
		    &ignored) == 0)
			return 0;
	}
	return read_number(field, "STEP", text, whole, real, err);
}

/* The symbol after the number. */
static void
take_unit(const char *text, char unit[SWEEP_UNIT_SIZE])
{
	text += strspn(text, "-0123456789. ");
	(void)snprintf(unit, SWEEP_UNIT_SIZE, "%s", text);
}

static int
refuse_empty(const struct words *words, struct error *err)
{
	return error_set(err, ERROR_USAGE, "FROM '%s' is above TO '%s', "
	    "allowed: from low to high", words->from, words->to);
}

static int
refuse_step(const struct words *words, struct error *err)
{
	return error_set(err, ERROR_USAGE, "STEP: found '%s', allowed: more "
	    "than 0", words->step);
}

static int
check_count(double points, struct sweep_range *out, struct error *err)
{
	if (points > SWEEP_POINTS_MAX)
		return error_set(err, ERROR_USAGE, "found %.0f points, "
		    "allowed: 1 to %d; a larger STEP or a smaller range makes "
		    "fewer", points, SWEEP_POINTS_MAX);
	out->count = (size_t)points;
	return 0;
}

static int
read_whole(const struct words *words, struct sweep_range *out,
    struct error *err)
{
	uint64_t range;

	if (read_number(out->field, "FROM", words->from, &out->from, NULL,
	    err) == -1 || read_number(out->field, "TO", words->to, &out->to,
	    NULL, err) == -1)
		return -1;
	if (out->from > out->to)
		return refuse_empty(words, err);
	range = out->to - out->from;
	if (words->step[0] == '\0' && range >= DEFAULT_PARTS &&
	    out->field->kind == FIELD_QUANTITY) {
		out->count = DEFAULT_PARTS + 1;
		return 0;
	}
	if (words->step[0] == '\0')	/* what is counted has even steps */
		out->step = range < DEFAULT_PARTS ? 1 : range / DEFAULT_PARTS;
	else if (read_step(out->field, words->step, &out->step, NULL,
	    err) == -1)
		return -1;
	if (out->step == 0)
		return refuse_step(words, err);
	range /= out->step;
	return check_count((double)range + 1.0, out, err);
}

/* How large one of the unit is. */
static long double
unit_size(const struct sweep_range *range)
{
	char one[SWEEP_UNIT_SIZE + 4];
	struct error ignored;
	double size = 1;

	(void)snprintf(one, sizeof(one), "1 %s", range->unit);
	if (range->unit[0] == '\0' || units_parse_real(one,
	    range->field->dimension, &size, &ignored) == -1)
		return 1;
	/* The nearest double of 0.01 is none of the digits of 1 %. */
	return size < 1 ? 1 / roundl(1 / (long double)size) : size;
}

/* Digits after the point that a double of this size can be sure of. */
static unsigned
sure_digits(long double largest)
{
	int before = largest > 0 ? (int)floorl(log10l(largest)) + 1 : 0;

	if (REAL_DIGITS - before > DECIMALS_MAX)
		return DECIMALS_MAX;
	return before < REAL_DIGITS ? (unsigned)(REAL_DIGITS - before) : 0;
}

static int
read_reals(const struct words *words, struct sweep_range *out,
    struct error *err)
{
	double from = 0, to = 0, step = 0;
	long double size = unit_size(out);

	if (read_number(out->field, "FROM", words->from, NULL, &from,
	    err) == -1 ||
	    read_number(out->field, "TO", words->to, NULL, &to, err) == -1)
		return -1;
	if (from > to)
		return refuse_empty(words, err);
	out->real_from = from / size;
	out->real_to = to / size;
	out->real_digits = sure_digits(fmaxl(fabsl(out->real_from),
	    fabsl(out->real_to)));
	if (words->step[0] == '\0') {
		out->count = to > from ? DEFAULT_PARTS + 1 : 1;
		out->real_step = (out->real_to - out->real_from) /
		    DEFAULT_PARTS;
		return 0;
	}
	if (read_step(out->field, words->step, NULL, &step, err) == -1)
		return -1;
	if (!(step > 0))
		return refuse_step(words, err);
	out->real_step = step / size;
	/* TO belongs to the range though no double holds a tenth. */
	return check_count(floor((to - from) / step * (1 + 1e-12) + 1e-9) + 1,
	    out, err);
}

/* Whole units with decimals: 1500 kbit/s stays so where FROM was in kbit/s. */
static const char *
write_whole(const struct sweep_range *range, uint64_t value,
    char buf[SWEEP_VALUE_SIZE])
{
	enum dimension dimension = range->field->dimension;
	char one[SWEEP_UNIT_SIZE + 4], decimals[DECIMALS_MAX + 1];
	uint128 rest;
	uint64_t size = 0;
	struct error ignored;
	size_t i;

	(void)snprintf(one, sizeof(one), "1 %s", range->unit);
	if (units_parse(one, dimension, &size, &ignored) == -1 || size == 0)
		return units_format_exact(value, dimension, buf,
		    SWEEP_VALUE_SIZE);
	rest = value % size;
	for (i = 0; i < DECIMALS_MAX && rest != 0; i++) {
		rest *= 10;
		decimals[i] = (char)('0' + (char)(rest / size));
		rest %= size;
	}
	decimals[i] = '\0';
	if (rest != 0)
		return units_format_exact(value, dimension, buf,
		    SWEEP_VALUE_SIZE);
	(void)snprintf(buf, SWEEP_VALUE_SIZE, "%" PRIu64 "%s%s %s",
	    value / size, i > 0 ? "." : "", decimals, range->unit);
	return buf;
}

static const char *
write_real(const struct sweep_range *range, long double value,
    char buf[SWEEP_VALUE_SIZE])
{
	char digits[SWEEP_VALUE_SIZE - SWEEP_UNIT_SIZE - 1], *end;

	(void)snprintf(digits, sizeof(digits), "%.*Lf",
	    (int)range->real_digits, value);
	if (strchr(digits, '.') != NULL) {
		end = digits + strlen(digits);
		while (end[-1] == '0')
			*--end = '\0';
		if (end[-1] == '.')
			*--end = '\0';
	}
	(void)snprintf(buf, SWEEP_VALUE_SIZE, "%s%s%s",
	    strcmp(digits, "-0") == 0 ? "0" : digits,
	    range->unit[0] != '\0' ? " " : "", range->unit);
	return buf;
}

const char *
sweep_range_value(const struct sweep_range *range, size_t i,
    char buf[SWEEP_VALUE_SIZE])
{
	uint64_t value;

	if (is_real(range->field))
		return write_real(range, range->real_from +
		    (long double)i * range->real_step, buf);
	value = range->step != 0 ? range->from + i * range->step :
	    range->from + scale_u64(range->to - range->from, i, DEFAULT_PARTS);
	if (range->field->kind == FIELD_QUANTITY)
		return write_whole(range, value, buf);
	(void)snprintf(buf, SWEEP_VALUE_SIZE, "%" PRIu64, value);
	return buf;
}

/* The first and the last must lie within the field's own limits. */
static int
check_ends(const struct sweep_range *range, struct error *err)
{
	const size_t ends[] = { 0, range->count - 1 };
	char value[SWEEP_VALUE_SIZE];
	union {
		uint64_t whole;
		double real;
	} ignored;

	for (size_t i = 0; i < sizeof(ends) / sizeof(ends[0]); i++)
		if (field_set_text(range->field, sweep_range_value(range,
		    ends[i], value), NULL, &ignored, err) == -1)
			return -1;
	return 0;
}

int
sweep_range_read(const char *text, const struct node *root,
    const struct field *rows, struct sweep_range *out, struct error *err)
{
	struct words words;
	int rc;

	memset(out, 0, sizeof(*out));
	if (split(text, &words, err) == -1) {
		error_wrap(err, "--sweep");
		return -1;
	}
	(void)snprintf(out->key, sizeof(out->key), "%s", words.key);
	take_unit(words.from, out->unit);
	rc = find_number(root, rows, words.key, &out->field, err);
	if (rc == 0)
		rc = is_real(out->field) ? read_reals(&words, out, err) :
		    read_whole(&words, out, err);
	if (rc == 0)
		rc = check_ends(out, err);
	if (rc == -1)
		error_wrap(err, "--sweep %s", out->key);
	return rc;
}
