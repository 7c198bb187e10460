/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/bursts.h"

void
bursts_init(struct bursts *bursts, const struct bursts_settings *settings,
    struct chance moves, struct chance losses)
{
	*bursts = (struct bursts){ .settings = *settings, .moves = moves,
		.losses = losses };
}

/* Share of packets that find the bad state. */
static double
bad_ratio(const struct bursts_settings *settings)
{
	return settings->p == 0 ? 0 : settings->p / (settings->p + settings->r);
}

bool
bursts_lose(struct bursts *bursts, uint64_t number)
{
	const struct bursts_settings *settings = &bursts->settings;
	double move = chance_uniform(bursts->moves, number);
	double kept;

	if (settings->p == 0)
		return false;
	if (number == 0)
		bursts->bad = move < bad_ratio(settings);
	else if (bursts->bad)
		bursts->bad = move >= settings->r;
	else
		bursts->bad = move < settings->p;
	kept = bursts->bad ? settings->h : settings->k;
	return chance_uniform(bursts->losses, number) >= kept;
}

double
bursts_loss_ratio(const struct bursts_settings *settings)
{
	double bad = bad_ratio(settings);

	if (settings->p == 0)
		return 0;
	return bad * (1 - settings->h) + (1 - bad) * (1 - settings->k);
}
