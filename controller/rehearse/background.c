/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/background.h"

#include <math.h>

#include "units.h"

#define NS_A_S UINT64_C(1000000000)

void
background_init(struct background *background,
    const struct background_settings *settings, struct chance chance,
    uint64_t at_ns)
{
	*background = (struct background){ .settings = *settings,
		.chance = chance, .next_ns = UINT64_MAX };
	if (settings->rate_bps == 0)
		return;
	background->next_ns = at_ns;
	background_step(background);
}

static void
step_evenly(struct background *background)
{
	const struct background_settings *settings = &background->settings;
	uint128 gap = (uint128)settings->packet_bytes * 8 * NS_A_S +
	    background->part;

	background->next_ns += (uint64_t)(gap / settings->rate_bps);
	background->part = (uint64_t)(gap % settings->rate_bps);
}

/* Gaps of a Poisson process are exponential. */
static void
step_poisson(struct background *background)
{
	const struct background_settings *settings = &background->settings;
	double mean_ns = (double)settings->packet_bytes * 8e9 /
	    (double)settings->rate_bps;
	double gap_ns = background->rest_ns - mean_ns *
	    log(1 - chance_uniform(background->chance, background->number));

	background->next_ns += (uint64_t)gap_ns;
	background->rest_ns = gap_ns - floor(gap_ns);
}

void
background_step(struct background *background)
{
	if (background->settings.poisson)
		step_poisson(background);
	else
		step_evenly(background);
	background->number++;
}
