/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/variation.h"

#include <math.h>

#define SQRT_HALF 0.70710678118654752440

void
variation_init(struct variation *variation,
    const struct variation_settings *settings, struct chance chance)
{
	*variation = (struct variation){ .settings = *settings,
		.chance = chance };
}

/* The delay in spreads. */
static double
quantile(enum variation_kind kind, double score)
{
	switch (kind) {
	case VARIATION_UNIFORM:
		return 0.5 * erfc(-score * SQRT_HALF);
	case VARIATION_NORMAL:
		return fmin(fmax(VARIATION_NORMAL_MEAN + score, 0),
		    2 * VARIATION_NORMAL_MEAN);
	case VARIATION_EXPONENTIAL:
		return -log(0.5 * erfc(score * SQRT_HALF));
	case VARIATION_NONE:
	case VARIATION_KINDS:
		break;
	}
	return 0;
}

uint64_t
variation_next_ns(struct variation *variation, uint64_t number)
{
	const struct variation_settings *settings = &variation->settings;
	double c = settings->correlation;
	double fresh;

	if (settings->kind == VARIATION_NONE)
		return 0;
	fresh = chance_normal(variation->chance, number);
	variation->score = number == 0 ? fresh :
	    c * variation->score + sqrt(1 - c * c) * fresh;
	return (uint64_t)llround(quantile(settings->kind, variation->score) *
	    (double)settings->spread_ns);
}
