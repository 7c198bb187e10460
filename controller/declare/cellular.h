/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * cellular: what one carrier of LTE or NR carries at its peak.
 *
 * Resource blocks of a width, and the rates from all resource elements down to
 * what is left for the user plane: 3GPP TS 36.101, 36.213, 38.101, 38.306.
 * Pure.
 */
#ifndef PLAFOND_CELLULAR_H
#define PLAFOND_CELLULAR_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "trial.h"

enum cellular_kind { CELLULAR_LTE, CELLULAR_NR };
enum frequency_range { FREQUENCY_RANGE_1, FREQUENCY_RANGE_2 };

/* Slots of a pattern (LTE: subframes); downlink_slots FIELD_UNSET: FDD. */
struct tdd {
	uint64_t downlink_slots, uplink_slots;
	/* Symbols of one special slot; both FIELD_UNSET: there is none. */
	uint64_t special_downlink, special_uplink;
};

struct carrier {
	double width_hz;
	uint64_t spacing_khz;		/* NR */
	uint64_t range;			/* enum frequency_range; NR */
	uint64_t layers[DIRECTIONS_SINGLE];
	uint64_t symbol_bits[DIRECTIONS_SINGLE];
	uint64_t scaling_percent;	/* NR */
	double overhead_ratio;		/* LTE */
	uint64_t block_bits[DIRECTIONS_SINGLE];	/* LTE; else FIELD_UNSET */
	uint64_t codewords[DIRECTIONS_SINGLE];	/* LTE */
	struct tdd tdd;
	uint64_t count;			/* carriers alike */
	uint64_t blocks;		/* once checked: resource blocks */
};

/* bit/s of a carrier and those like it; each is rounded down. */
struct carrier_rates {
	uint64_t gross_bps;		/* all resource elements */
	uint64_t coded_bps;		/* NR: R_max taken off */
	uint64_t user_bps;		/* without control and references */
	uint64_t scaled_bps;
	uint64_t shared_bps;		/* the direction's share of TDD */
	uint64_t good_bps;		/* without retransmissions */
};

/* Resource blocks; 0: the width is not defined with that spacing there. */
uint64_t nr_blocks(enum frequency_range range, uint64_t spacing_khz,
    uint64_t width_khz);
uint64_t lte_blocks(uint64_t width_khz);
/* Widths that are defined, "5, 10, 15 MHz"; returns buf. */
const char *nr_widths(enum frequency_range range, uint64_t spacing_khz,
    char *buf, size_t size);

/* Symbols of a pattern: of a direction, and of all. */
uint64_t tdd_symbols(const struct tdd *tdd, bool uplink);
uint64_t tdd_period(const struct tdd *tdd);

/* Of a carrier that was checked; block_errors: in parts of a million. */
void carrier_rates(enum cellular_kind kind, const struct carrier *carrier,
    enum direction direction, bool uplink, uint64_t block_errors_ppm,
    struct carrier_rates *out);

#endif
