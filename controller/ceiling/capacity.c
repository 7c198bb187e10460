/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/capacity.h"

#include <assert.h>
#include <string.h>

#include "error.h"

struct fraction
capacity_offered(const struct medium_capacity *capacity)
{
	return capacity->steps_count == 0 ? capacity->line_bps :
	    capacity->steps[capacity->steps_count - 1].left_bps;
}

int
capacity_compute(const struct medium_use *use, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct medium *medium = use->medium;

	assert(!medium_is_reference(medium));
	memset(out, 0, offsetof(struct medium_capacity, notes));
	out->notes_count = 0;
	out->contention = 1;
	out->duplex = medium->duplex;
	out->tolerance_ppm = medium->tolerance_ppm;
	if (medium->capacity(&use->parameters, load, out, err) == -1)
		return -1;
	if (fraction_floor(capacity_offered(out)) == 0 ||
	    fraction_floor(out->line_bps) > RATE_MAX_BPS)
		return error_set(err, ERROR_INPUT, "medium %s: its parameters "
		    "make no rate from 1 bit/s to 1.6 Tbit/s", medium->name);
	return 0;
}
