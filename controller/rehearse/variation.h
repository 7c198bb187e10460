/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * variation: a delay that differs from packet to packet.
 *
 * Each packet has a normal score; neighbours' scores have the correlation
 * asked for (an autoregression of order 1).  The delay is the quantile of the
 * distribution at the score's place in the normal one, so that the
 * distribution is exact whatever the correlation.  Pure.
 */
#ifndef PLAFOND_VARIATION_H
#define PLAFOND_VARIATION_H

#include <stdbool.h>
#include <stdint.h>

#include "rehearse/chance.h"

enum variation_kind {
	VARIATION_NONE,
	VARIATION_UNIFORM,	/* from 0 to the spread */
	/* Deviation is the spread, mean VARIATION_NORMAL_MEAN spreads; what is
	 * as far from it again is cut off at 0 or at the double. */
	VARIATION_NORMAL,
	VARIATION_EXPONENTIAL,	/* mean is the spread, from 0 */
	VARIATION_KINDS
};

#define VARIATION_NORMAL_MEAN 4

struct variation_settings {
	enum variation_kind kind;
	uint64_t spread_ns;
	double correlation;	/* of neighbours' scores, 0 <= c < 1 */
	/* A packet may overtake; else it waits for the one before it, which
	 * lengthens delays where packets are closer than the spread. */
	bool reorders;
};

struct variation {
	struct variation_settings settings;
	struct chance chance;
	double score;
};

void variation_init(struct variation *variation,
    const struct variation_settings *settings, struct chance chance);
/* Delay of this packet.  To be asked once for every number from 0. */
uint64_t variation_next_ns(struct variation *variation, uint64_t number);

#endif
