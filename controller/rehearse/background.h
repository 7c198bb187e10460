/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * background: when others' packets come to a line that is shared.
 *
 * Packets of one size, evenly spaced (exactly, with no error that adds up) or
 * as a Poisson process.  Pure.
 */
#ifndef PLAFOND_BACKGROUND_H
#define PLAFOND_BACKGROUND_H

#include <stdbool.h>
#include <stdint.h>

#include "rehearse/chance.h"

struct background_settings {
	uint64_t rate_bps;	/* of the packets' bytes; 0 turns it off */
	uint64_t packet_bytes;
	bool poisson;
};

struct background {
	struct background_settings settings;
	struct chance chance;
	uint64_t number;
	uint64_t next_ns;	/* the next packet comes; UINT64_MAX: none */
	uint64_t part;		/* 1 / rate_bps ns, evenly spaced */
	double rest_ns;		/* below 1, Poisson */
};

/* The first packet comes a gap after at_ns. */
void background_init(struct background *background,
    const struct background_settings *settings, struct chance chance,
    uint64_t at_ns);
/* The packet at next_ns has come. */
void background_step(struct background *background);

#endif
