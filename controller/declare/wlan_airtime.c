/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/wlan_airtime.h"

#include <assert.h>

#define US 1000		/* ns */

/* aPPDUMaxTime of VHT, HE and EHT; in HT's mixed format what the length in
 * L-SIG can say, 4095 octets at 6 Mbit/s. */
#define PPDU_MAX_NS (5484 * US)

/* Linux net/mac80211/util.c; IEEE 802.11-2020 section 9.3.1 */
#define RTS_OCTETS 20
#define CTS_OCTETS 14
#define ACK_OCTETS 14
/* Without its bitmap: control 2, duration 2, addresses 12, BA control 2,
 * sequence control 2, FCS 4 (from memory) */
#define BLOCK_ACK_OCTETS 24

#define DELIMITER_OCTETS 4	/* before each MPDU, each ends on 4 */

/* Slot, SIFS and CWmin: Linux net/mac80211/util.c, AIFSN of best effort:
 * ieee80211_set_wmm_default(). */
struct wlan_access
wlan_access_of(enum wlan_generation generation, enum wlan_band band,
    bool long_slot)
{
	struct wlan_access access = { .slot_ns = 9 * US, .sifs_ns = 16 * US,
		.contention_slots = 15, .wait_slots = 3 };

	if (band == WLAN_2_4_GHZ) {
		access.sifs_ns = 10 * US;
		access.extension_ns = 6 * US;
	}
	if (generation == WLAN_B)
		access.contention_slots = 31;
	if (generation == WLAN_B || long_slot)
		access.slot_ns = 20 * US;
	if (generation < WLAN_N)	/* DIFS: without QoS */
		access.wait_slots = 2;
	access.delimited = generation >= WLAN_AC;
	return access;
}

uint64_t
wlan_block_ack_octets(uint64_t window_frames)
{
	static const uint64_t bitmaps[] = { 64, 256, 512, 1024 };
	unsigned i = 0;

	assert(window_frames <= 1024);
	while (bitmaps[i] < window_frames)
		i++;
	return BLOCK_ACK_OCTETS + bitmaps[i] / 8;
}

static uint64_t
extension_ns(const struct wlan_phy *phy, const struct wlan_access *access)
{
	return phy->dsss ? 0 : access->extension_ns;
}

static uint64_t
protection_ns(const struct wlan_access *access)
{
	uint64_t ns = 0;

	if (access->protection == WLAN_PROTECTION_NONE)
		return 0;
	if (access->protection == WLAN_PROTECTION_RTS)
		ns = wlan_frame_ns(&access->guard, RTS_OCTETS) +
		    extension_ns(&access->guard, access) + access->sifs_ns;
	return ns + wlan_frame_ns(&access->guard, CTS_OCTETS) +
	    extension_ns(&access->guard, access) + access->sifs_ns;
}

/* Frames that fit into one A-MPDU by count, length and time. */
static uint64_t
frames_that_fit(const struct wlan_phy *phy, const struct wlan_access *access,
    uint64_t subframe_octets, uint64_t frames_max)
{
	uint64_t low = 1, high = frames_max, middle;

	if (!access->aggregated)
		return 1;
	if (high > access->window_frames)
		high = access->window_frames;
	if (high > access->ampdu_octets / subframe_octets)
		high = access->ampdu_octets / subframe_octets;
	while (low < high) {
		middle = (low + high + 1) / 2;
		if (wlan_frame_ns(phy, middle * subframe_octets) > PPDU_MAX_NS)
			high = middle - 1;
		else
			low = middle;
	}
	return low;
}

void
wlan_exchange_make(const struct wlan_phy *phy,
    const struct wlan_access *access, uint64_t mpdu_octets,
    uint64_t frames_max, struct wlan_exchange *out)
{
	uint64_t answer_octets = ACK_OCTETS;

	assert(mpdu_octets > 0 && frames_max > 0);
	out->mpdu_octets = out->subframe_octets = mpdu_octets;
	if (access->aggregated || access->delimited)
		out->subframe_octets = DELIMITER_OCTETS +
		    (mpdu_octets + 3) / 4 * 4;
	out->frames = frames_that_fit(phy, access, out->subframe_octets,
	    frames_max);
	if (access->aggregated)
		answer_octets = wlan_block_ack_octets(access->window_frames);
	out->data_ns = wlan_data_ns(phy, out->frames * out->subframe_octets);
	out->preamble_ns = phy->preamble_ns;
	out->spaces_ns = 2 * access->sifs_ns +
	    access->wait_slots * access->slot_ns + extension_ns(phy, access) +
	    extension_ns(&access->answer, access);
	out->backoff_ns = access->contention_slots * access->slot_ns / 2;
	out->answer_ns = wlan_frame_ns(&access->answer, answer_octets);
	out->protection_ns = protection_ns(access);
}

uint64_t
wlan_exchange_ns(const struct wlan_exchange *exchange)
{
	return exchange->data_ns + exchange->preamble_ns +
	    exchange->spaces_ns + exchange->backoff_ns + exchange->answer_ns +
	    exchange->protection_ns;
}
