/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * chance: random numbers by number, from a seed.
 *
 * The n-th number of a stream is a function of seed, stream and n alone: which
 * packets a feature hits never depends on other features or on the time.  The
 * generator is SplitMix64 (Steele, Lea and Flood 2014, from memory), whose n-th
 * output needs no state.  Not for secrets.  Pure.
 */
#ifndef PLAFOND_CHANCE_H
#define PLAFOND_CHANCE_H

#include <stdint.h>

struct chance {
	uint64_t key;
};

/* Streams of a seed do not depend on each other. */
struct chance chance_stream(uint64_t seed, uint64_t stream);
uint64_t chance_u64(struct chance chance, uint64_t n);
/* In [0, 1), in steps of 2^-53: below 1 always, below 0 never. */
double chance_uniform(struct chance chance, uint64_t n);
/* Mean 0, deviation 1. */
double chance_normal(struct chance chance, uint64_t n);

#endif
