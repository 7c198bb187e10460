/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * wlan_airtime: how long one exchange of IEEE 802.11 frames holds the channel.
 *
 * One station in clean air: it waits, sends a frame or an A-MPDU of equal
 * frames, and is answered.  Collisions, retransmissions and rate adaptation
 * are not counted: they only lower what this gives.  Pure.
 */
#ifndef PLAFOND_WLAN_AIRTIME_H
#define PLAFOND_WLAN_AIRTIME_H

#include <stdbool.h>
#include <stdint.h>

#include "declare/wlan_phy.h"

enum wlan_protection {
	WLAN_PROTECTION_NONE, WLAN_PROTECTION_CTS, WLAN_PROTECTION_RTS
};

/* The rules by which the channel is taken. */
struct wlan_access {
	uint64_t slot_ns, sifs_ns;
	uint64_t extension_ns;		/* after each OFDM frame at 2.4 GHz */
	uint64_t wait_slots;		/* DIFS or AIFS = SIFS + these */
	uint64_t contention_slots;	/* CWmin; half of it on average */
	struct wlan_phy answer;		/* of (block) acknowledgements */
	struct wlan_phy guard;		/* of what protects */
	enum wlan_protection protection;
	bool aggregated;		/* A-MPDU and block acknowledgement */
	bool delimited;			/* a lone frame has a delimiter too */
	uint64_t ampdu_octets;		/* longest A-MPDU */
	uint64_t window_frames;		/* of block acknowledgement */
};

/* Rules of a generation in a band; answer, guard and what is aggregated are
 * for the caller.  long_slot: of 20 us, where stations of 802.11b listen. */
struct wlan_access wlan_access_of(enum wlan_generation generation,
    enum wlan_band band, bool long_slot);

struct wlan_exchange {
	uint64_t frames;		/* in one go */
	uint64_t mpdu_octets, subframe_octets;	/* of each */
	uint64_t data_ns, preamble_ns;
	uint64_t spaces_ns;		/* AIFS, SIFS, signal extensions */
	uint64_t backoff_ns;
	uint64_t answer_ns;
	uint64_t protection_ns;
};

/* As many frames of mpdu_octets as the rules allow, at most frames_max; one at
 * least. */
void wlan_exchange_make(const struct wlan_phy *phy,
    const struct wlan_access *access, uint64_t mpdu_octets,
    uint64_t frames_max, struct wlan_exchange *out);
uint64_t wlan_exchange_ns(const struct wlan_exchange *exchange);
/* Octets of the frame that acknowledges a window of so many. */
uint64_t wlan_block_ack_octets(uint64_t window_frames);

#endif
