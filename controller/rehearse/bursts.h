/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * bursts: loss that comes in runs, the model of Gilbert (1960) and Elliott
 * (1963); RFC 6534 s7.1 is the case h = 0, k = 1.
 *
 * The line is in a good or in a bad state and may change before each packet.
 * Pure.
 */
#ifndef PLAFOND_BURSTS_H
#define PLAFOND_BURSTS_H

#include <stdbool.h>
#include <stdint.h>

#include "rehearse/chance.h"

struct bursts_settings {
	double p;	/* ratio: good to bad; 0 turns the whole off */
	double r;	/* ratio: bad to good */
	double h;	/* ratio of packets delivered in the bad state */
	double k;	/* the same in the good state */
};

struct bursts {
	struct bursts_settings settings;
	struct chance moves, losses;
	bool bad;
};

/* The first packet finds each state as often as any packet does: a burst may
 * be under way. */
void bursts_init(struct bursts *bursts, const struct bursts_settings *settings,
    struct chance moves, struct chance losses);
/* Whether this packet is lost.  To be asked once for every number from 0. */
bool bursts_lose(struct bursts *bursts, uint64_t number);
/* Long-run share lost: (p (1 - h) + r (1 - k)) / (p + r). */
double bursts_loss_ratio(const struct bursts_settings *settings);

#endif
