/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * bucket: one token bucket, as a policer or as a shaper, exact.
 *
 * The committed half of the meter of RFC 2697: the bucket holds burst_bytes
 * and starts full; a packet conforms when its octets are in it, and takes
 * them.  Which octets a packet costs is the bucket's own setting (RFC 2697 s2
 * counts the IP packet alone).  Pure.
 */
#ifndef PLAFOND_BUCKET_H
#define PLAFOND_BUCKET_H

#include <stdbool.h>
#include <stdint.h>

#include "rehearse/octets.h"

struct bucket_settings {
	uint64_t rate_bps;	/* CIR; 0 turns the bucket off */
	uint64_t burst_bytes;	/* CBS */
	struct octets octets;
};

struct bucket {
	struct octets octets;
	uint64_t work_a_ns;	/* 0: off */
	uint128 depth;		/* work */
	uint128 missing;	/* work below full at at_ns */
	uint64_t at_ns;
};

void bucket_init(struct bucket *bucket, const struct bucket_settings *settings,
    uint64_t at_ns);
/* Policer: takes the tokens if there are enough.  Times do not go back. */
bool bucket_conforms(struct bucket *bucket, uint64_t now_ns, uint64_t bytes);
/* Shaper: when the packet may leave, at now_ns or later and never before one
 * that was taken.  A packet larger than the bucket waits for a full one and
 * leaves a debt, so that a shaper passes every packet and keeps its rate. */
uint64_t bucket_release_ns(const struct bucket *bucket, uint64_t now_ns,
    uint64_t bytes);
/* The packet leaves at that time. */
void bucket_take(struct bucket *bucket, uint64_t release_ns, uint64_t bytes);

#endif
