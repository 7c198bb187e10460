/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/rate_unit.h"

#include <inttypes.h>
#include <stdio.h>

#define DIGITS 3
#define LEAST_DIGITS 100	/* of the least rate: three of them */

static const struct rate_unit units[] = {
	{ UINT64_C(100000000000), 1000000, "Gbit/s" },
	{ 10000000, 1000, "Mbit/s" },
	{ 0, 1, "kbit/s" },
};
#define UNITS (sizeof(units) / sizeof(units[0]))

const struct rate_unit *
rate_unit_for(uint64_t largest_bps, uint64_t least_bps)
{
	const struct rate_unit *unit = units;

	while (largest_bps < unit->least_bps)
		unit++;
	while (least_bps != 0 && least_bps / unit->digit_bps < LEAST_DIGITS &&
	    unit < &units[UNITS - 1])
		unit++;
	return unit;
}

const char *
rate_digits(uint64_t value, unsigned digits, const char *sign,
    char buf[RATE_CELL_SIZE])
{
	uint64_t unit = 1;
	unsigned i;

	for (i = 0; i < digits; i++)
		unit *= 10;
	if (digits == 0)
		(void)snprintf(buf, RATE_CELL_SIZE, "%s%" PRIu64, sign, value);
	else
		(void)snprintf(buf, RATE_CELL_SIZE, "%s%" PRIu64 ".%0*" PRIu64,
		    sign, value / unit, (int)digits, value % unit);
	return buf;
}

const char *
rate_unit_text(const struct rate_unit *unit, uint64_t bps,
    char buf[RATE_CELL_SIZE])
{
	return rate_digits(bps / unit->digit_bps, DIGITS, "", buf);
}
