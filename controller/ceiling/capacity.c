/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/capacity.h"

#include <assert.h>

#include "error.h"

int
capacity_compute(const struct medium_use *use, enum direction direction,
    struct fraction *out, struct error *err)
{
	struct medium_rate rate;

	assert(!medium_is_reference(use->medium));
	if (use->medium->rate(&use->parameters, direction, &rate, err) == -1)
		return -1;
	if (rate.num_bps == 0 || rate.den == 0 ||
	    rate.num_bps / rate.den > RATE_MAX_BPS)
		return error_set(err, ERROR_INPUT, "medium %s: its parameters "
		    "make no rate from 1 bit/s to 1.6 Tbit/s",
		    use->medium->name);
	*out = fraction_make(rate.num_bps, rate.den);
	return 0;
}
