/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/wlan_phy.h"

#include <assert.h>
#include <stddef.h>

#define LONG_TRAINING_MAX 8

/* Subcarriers: Linux net/mac80211/airtime.c; preambles as the fields of their
 * PPDU: L-STF 8, L-LTF 8, L-SIG 4, then HT-SIG 8 and HT-STF 4; or VHT-SIG-A 8,
 * VHT-STF 4, VHT-SIG-B 4 (from memory); RL-SIG 4, HE-SIG-A 8, HE-STF 4; RL-SIG
 * 4, U-SIG 8, EHT-SIG 4, EHT-STF 4 (durations from memory).  A-MPDU and
 * windows: Linux include/linux/ieee80211.h. */
const struct wlan_standard wlan_standards[WLAN_GENERATIONS] = {
	[WLAN_B] = { .name = "802.11b", .bands = { true, false, false } },
	[WLAN_A] = { .name = "802.11a", .bands = { false, true, false } },
	[WLAN_G] = { .name = "802.11g", .bands = { true, false, false } },
	[WLAN_N] = { .name = "802.11n", .bands = { true, true, false },
	    .subcarriers = { 52, 108 }, .mcs_max = 7, .streams_max = 4,
	    .symbol_ns = 3200, .guards_ns = { 800, 400 },
	    .preamble_ns = 32000, .training_ns = 4000,
	    .ampdu_octets = 65535, .window_frames = 64 },
	[WLAN_AC] = { .name = "802.11ac", .bands = { false, true, false },
	    .subcarriers = { 52, 108, 234, 468 }, .mcs_max = 9,
	    .streams_max = 8,
	    .symbol_ns = 3200, .guards_ns = { 800, 400 },
	    .preamble_ns = 36000, .training_ns = 4000,
	    .ampdu_octets = 1048575, .window_frames = 64 },
	[WLAN_AX] = { .name = "802.11ax", .bands = { true, true, true },
	    .subcarriers = { 234, 468, 980, 1960 }, .mcs_max = 11,
	    .streams_max = 8,
	    .symbol_ns = 12800, .guards_ns = { 800, 1600, 3200 },
	    .preamble_ns = 36000,
	    .ampdu_octets = 6500631, .window_frames = 256 },
	[WLAN_BE] = { .name = "802.11be", .bands = { true, true, true },
	    .subcarriers = { 234, 468, 980, 1960, 3920 }, .mcs_max = 13,
	    .streams_max = 8,
	    .symbol_ns = 12800, .guards_ns = { 800, 1600, 3200 },
	    .preamble_ns = 40000,
	    .ampdu_octets = 15523198, .window_frames = 1024 },
};

static const uint64_t widths_mhz[WLAN_WIDTHS] = { 20, 40, 80, 160, 320 };

/* IEEE 802.11-2020 tables 19-27 and 21-29, 802.11ax table 27-111 and 802.11be:
 * bits a subcarrier carries, and the share of them that is not coding. */
static const struct modulation {
	const char *name;
	uint64_t bits, num, den;
	uint64_t reference_kbps;	/* the same in a and g, or the nearest
					 * that they have */
} modulations[] = {
	{ "BPSK 1/2", 1, 1, 2, 6000 },
	{ "QPSK 1/2", 2, 1, 2, 12000 },
	{ "QPSK 3/4", 2, 3, 4, 18000 },
	{ "16-QAM 1/2", 4, 1, 2, 24000 },
	{ "16-QAM 3/4", 4, 3, 4, 36000 },
	{ "64-QAM 2/3", 6, 2, 3, 48000 },
	{ "64-QAM 3/4", 6, 3, 4, 54000 },
	{ "64-QAM 5/6", 6, 5, 6, 54000 },
	{ "256-QAM 3/4", 8, 3, 4, 54000 },
	{ "256-QAM 5/6", 8, 5, 6, 54000 },
	{ "1024-QAM 3/4", 10, 3, 4, 54000 },
	{ "1024-QAM 5/6", 10, 5, 6, 54000 },
	{ "4096-QAM 3/4", 12, 3, 4, 54000 },
	{ "4096-QAM 5/6", 12, 5, 6, 54000 },
};
#define MODULATIONS (sizeof(modulations) / sizeof(modulations[0]))

/* Long training fields for 1 to 8 streams (from memory). */
static const uint64_t trainings[LONG_TRAINING_MAX] = {
	1, 2, 4, 4, 6, 6, 8, 8
};

/* VHT modes whose bits a symbol and encoder are no whole number: Linux
 * net/mac80211/rc80211_minstrel_ht.c, minstrel_get_valid_vht_rates(); that of
 * 160 MHz: D. Coleman, D. Westcott, CWNA study guide. */
static const struct {
	uint64_t width_mhz, mcs, streams;
} vht_undefined[] = {
	{ 20, 9, 1 }, { 20, 9, 2 }, { 20, 9, 4 }, { 20, 9, 5 }, { 20, 9, 7 },
	{ 20, 9, 8 }, { 80, 6, 3 }, { 80, 6, 7 }, { 80, 9, 6 }, { 160, 9, 3 },
};
#define VHT_UNDEFINED (sizeof(vht_undefined) / sizeof(vht_undefined[0]))

const uint64_t wlan_dsss_rates_kbps[] = { 1000, 2000, 5500, 11000, 0 };
const uint64_t wlan_ofdm_rates_kbps[] = {
	6000, 9000, 12000, 18000, 24000, 36000, 48000, 54000, 0
};

unsigned
wlan_width_index(uint64_t width_mhz)
{
	unsigned i;

	for (i = 0; i < WLAN_WIDTHS; i++)
		if (widths_mhz[i] == width_mhz)
			break;
	return i;
}

bool
wlan_mode_defined(const struct wlan_mode *mode)
{
	if (mode->generation != WLAN_AC)
		return true;
	for (size_t i = 0; i < VHT_UNDEFINED; i++)
		if (vht_undefined[i].width_mhz == mode->width_mhz &&
		    vht_undefined[i].mcs == mode->mcs &&
		    vht_undefined[i].streams == mode->streams)
			return false;
	return true;
}

/* What a symbol carries, coding taken off. */
static struct fraction
bits_of_mode(const struct wlan_mode *mode)
{
	const struct modulation *modulation = &modulations[mode->mcs];
	unsigned width = wlan_width_index(mode->width_mhz);

	assert(width < WLAN_WIDTHS);
	return fraction_make(
	    wlan_standards[mode->generation].subcarriers[width] *
	    modulation->bits * modulation->num * mode->streams,
	    modulation->den);
}

/* HE and EHT: a field of 6.4 us (2x) before a guard interval of 0.8 or 1.6 us,
 * of 12.8 us (4x) before 3.2 us (from memory). */
static uint64_t
training_ns(const struct wlan_standard *standard, uint64_t guard_ns)
{
	if (standard->training_ns != 0)
		return standard->training_ns;
	return (guard_ns == 3200 ? 12800 : 6400) + guard_ns;
}

struct wlan_phy
wlan_phy_of_mode(const struct wlan_mode *mode)
{
	const struct wlan_standard *standard;
	struct fraction bits = bits_of_mode(mode);
	struct wlan_phy phy = { .around_bits = 16, .align_ns = 1 };
	uint64_t streams = mode->streams;

	assert(mode->mcs < MODULATIONS);
	standard = &wlan_standards[mode->generation];
	if (streams > LONG_TRAINING_MAX)
		streams = LONG_TRAINING_MAX;
	phy.symbol_ns = standard->symbol_ns + mode->guard_ns;
	/* The name of the rate keeps the part of a bit that a symbol does not:
	 * 980 * 10 * 5/6 is 8166 bits, yet 600.5 Mbit/s. */
	phy.rate_bps = fraction_multiply(bits,
	    fraction_make(1000000000, phy.symbol_ns));
	phy.symbol_bits = fraction_whole(fraction_floor(bits));
	phy.preamble_ns = standard->preamble_ns + trainings[streams - 1] *
	    training_ns(standard, mode->guard_ns);
	/* IEEE 802.11-2020 sections 19.4.3 and 21.4.3: with a short guard
	 * interval the time is counted in symbols of 4 us */
	if (mode->guard_ns == 400)
		phy.align_ns = 4000;
	return phy;
}

const char *
wlan_modulation_name(uint64_t mcs)
{
	assert(mcs < MODULATIONS);
	return modulations[mcs].name;
}

uint64_t
wlan_reference_rate(uint64_t mcs)
{
	assert(mcs < MODULATIONS);
	return modulations[mcs].reference_kbps * 1000;
}

bool
wlan_rate_known(const uint64_t rates_kbps[], uint64_t bps)
{
	for (; *rates_kbps != 0; rates_kbps++)
		if (*rates_kbps * 1000 == bps)
			return true;
	return false;
}

/* Linux net/mac80211/util.c, ieee80211_frame_duration(): OFDM preamble 16 and
 * signal 4, symbols of 4 us with service 16 and tail 6 bits; DSSS preamble and
 * header 192 us, or 96 short, and the data end on a microsecond. */
struct wlan_phy
wlan_phy_of_rate(uint64_t bps, bool short_preamble)
{
	struct wlan_phy phy = { .rate_bps = fraction_whole(bps) };

	if (wlan_rate_known(wlan_dsss_rates_kbps, bps)) {
		phy.dsss = true;
		phy.preamble_ns = short_preamble ? 96000 : 192000;
		phy.symbol_ns = 1000;
		phy.around_bits = 0;
	} else {
		assert(wlan_rate_known(wlan_ofdm_rates_kbps, bps));
		phy.preamble_ns = 20000;
		phy.symbol_ns = 4000;
		phy.around_bits = 16 + 6;
	}
	phy.symbol_bits = fraction_make((uint128)bps * phy.symbol_ns,
	    1000000000);
	phy.align_ns = 1;
	return phy;
}

uint64_t
wlan_symbols(const struct wlan_phy *phy, uint64_t octets)
{
	uint128 bits = (uint128)phy->around_bits + (uint128)octets * 8;
	uint128 scaled = bits * phy->symbol_bits.den;

	return (uint64_t)((scaled + phy->symbol_bits.num - 1) /
	    phy->symbol_bits.num);
}

uint64_t
wlan_data_ns(const struct wlan_phy *phy, uint64_t octets)
{
	uint64_t ns = wlan_symbols(phy, octets) * phy->symbol_ns;

	return (ns + phy->align_ns - 1) / phy->align_ns * phy->align_ns;
}

uint64_t
wlan_frame_ns(const struct wlan_phy *phy, uint64_t octets)
{
	return phy->preamble_ns + wlan_data_ns(phy, octets);
}
