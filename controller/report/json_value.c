/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/json_value.h"

#include <math.h>
#include <string.h>

#include "clock.h"
#include "utf8.h"
#include "wire.h"

json_t *
json_value_u64(uint64_t value)
{
	return value > WIRE_INTEGER_MAX ? json_null()
	    : json_integer((json_int_t)value);
}

json_t *
json_value_i64(int64_t value)
{
	int64_t most = (int64_t)WIRE_INTEGER_MAX;

	return value > most || value < -most ? json_null()
	    : json_integer(value);
}

json_t *
json_value_real(double value)
{
	return isfinite(value) ? json_real(value) : json_null();
}

json_t *
json_value_text(const char *text)
{
	/* The longest text of any struct is an error's place and cause. */
	char clean[4096];

	if (text[0] == '\0')
		return json_null();
	return json_string(utf8_clean(text, clean, sizeof(clean)));
}

json_t *
json_value_utc(uint64_t utc_ns)
{
	char text[25];

	if (utc_ns == 0 || utc_ns == UNKNOWN_U64)
		return json_null();
	clock_utc_text(utc_ns, text);
	return json_string(text);
}

void
json_put(json_t *object, const char *name, json_t *value)
{
	(void)json_object_set_new(object, name,
	    value != NULL ? value : json_null());
}

void
json_push(json_t *array, json_t *value)
{
	(void)json_array_append_new(array,
	    value != NULL ? value : json_null());
}
