/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * wlan_phy: rates and durations of the physical layers of IEEE 802.11.
 *
 * Follows IEEE 802.11-2020 (b, a, g, n, ac), 802.11ax and 802.11be as far as
 * one station on the whole channel is concerned.  LDPC from n on, so no tail
 * bits; HT in its mixed format.  Pure.
 */
#ifndef PLAFOND_WLAN_PHY_H
#define PLAFOND_WLAN_PHY_H

#include <stdbool.h>
#include <stdint.h>

#include "declare/fraction.h"

enum wlan_generation {
	WLAN_B, WLAN_A, WLAN_G, WLAN_N, WLAN_AC, WLAN_AX, WLAN_BE,
	WLAN_GENERATIONS
};
enum wlan_band { WLAN_2_4_GHZ, WLAN_5_GHZ, WLAN_6_GHZ, WLAN_BANDS };

#define WLAN_WIDTHS 5		/* 20, 40, 80, 160, 320 MHz */
#define WLAN_GUARDS_MAX 3

/* What a generation defines. */
struct wlan_standard {
	const char *name;		/* "802.11ax" */
	bool bands[WLAN_BANDS];
	/* Data subcarriers of a width; 0: the width is not defined.  All 0:
	 * the rate is no product of these (b, a, g). */
	uint64_t subcarriers[WLAN_WIDTHS];
	uint64_t mcs_max, streams_max;
	uint64_t symbol_ns;		/* without its guard interval */
	uint64_t guards_ns[WLAN_GUARDS_MAX];	/* the first: by default */
	uint64_t preamble_ns;		/* without the long training fields */
	uint64_t training_ns;		/* of one; 0: symbols with guards */
	uint64_t ampdu_octets;		/* longest A-MPDU; 0: none */
	uint64_t window_frames;		/* of block acknowledgement */
};
extern const struct wlan_standard wlan_standards[WLAN_GENERATIONS];

/* A mode of n, ac, ax or be. */
struct wlan_mode {
	enum wlan_generation generation;
	uint64_t width_mhz;
	uint64_t mcs;			/* of one stream, also with n */
	uint64_t streams;
	uint64_t guard_ns;
};

struct wlan_phy {
	struct fraction rate_bps;
	uint64_t preamble_ns;		/* all before the data */
	uint64_t symbol_ns;
	struct fraction symbol_bits;
	uint64_t around_bits;		/* service and tail */
	uint64_t align_ns;		/* the data last a multiple of it */
	bool dsss;			/* DSSS or CCK, else OFDM */
};

/* Index of a width in the tables, WLAN_WIDTHS where there is none. */
unsigned wlan_width_index(uint64_t width_mhz);
/* True where the standard defines the mode; its width, MCS and streams are
 * within the generation's. */
bool wlan_mode_defined(const struct wlan_mode *mode);
/* The mode need not be within the generation's number of streams. */
struct wlan_phy wlan_phy_of_mode(const struct wlan_mode *mode);
/* "256-QAM 5/6" */
const char *wlan_modulation_name(uint64_t mcs);
/* The rate of a, b and g whose name is nearest below: control frames answer at
 * that (IEEE 802.11-2020 section 10.6.6.5). */
uint64_t wlan_reference_rate(uint64_t mcs);

/* Rates of b, a and g in kbit/s; 0 ends them. */
extern const uint64_t wlan_dsss_rates_kbps[];
extern const uint64_t wlan_ofdm_rates_kbps[];
bool wlan_rate_known(const uint64_t rates_kbps[], uint64_t bps);
/* Of a, b and g; bps is one of those. */
struct wlan_phy wlan_phy_of_rate(uint64_t bps, bool short_preamble);

uint64_t wlan_symbols(const struct wlan_phy *phy, uint64_t octets);
uint64_t wlan_data_ns(const struct wlan_phy *phy, uint64_t octets);
uint64_t wlan_frame_ns(const struct wlan_phy *phy, uint64_t octets);

#endif
