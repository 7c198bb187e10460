/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Pseudo-random numbers for tests that must fail the same way twice:
 * SplitMix64, public domain, Steele, Lea and Flood 2014 (from memory). */
#ifndef PLAFOND_TEST_SEEDED_H
#define PLAFOND_TEST_SEEDED_H

#include <stdint.h>

static inline uint64_t
seeded_u64(uint64_t *state)
{
	uint64_t z = *state += UINT64_C(0x9e3779b97f4a7c15);

	z = (z ^ (z >> 30)) * UINT64_C(0xbf58476d1ce4e5b9);
	z = (z ^ (z >> 27)) * UINT64_C(0x94d049bb133111eb);
	return z ^ (z >> 31);
}

/* Within [min, max]; max - min < UINT64_MAX. */
static inline uint64_t
seeded_between(uint64_t *state, uint64_t min, uint64_t max)
{
	return min + seeded_u64(state) % (max - min + 1);
}

#endif
