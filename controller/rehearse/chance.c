/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/chance.h"

#include <math.h>

#define GAMMA UINT64_C(0x9e3779b97f4a7c15)
#define TURN 6.283185307179586476925	/* 2 pi */

static uint64_t
mix(uint64_t z)
{
	z = (z ^ (z >> 30)) * UINT64_C(0xbf58476d1ce4e5b9);
	z = (z ^ (z >> 27)) * UINT64_C(0x94d049bb133111eb);
	return z ^ (z >> 31);
}

struct chance
chance_stream(uint64_t seed, uint64_t stream)
{
	/* Twice, so that streams do not begin a fixed step apart. */
	return (struct chance){ mix(mix(seed + GAMMA) + (stream + 1) * GAMMA) };
}

uint64_t
chance_u64(struct chance chance, uint64_t n)
{
	return mix(chance.key + (n + 1) * GAMMA);
}

double
chance_uniform(struct chance chance, uint64_t n)
{
	return (double)(chance_u64(chance, n) >> 11) * 0x1p-53;
}

/* Box and Muller 1958: two uniform numbers make one. */
double
chance_normal(struct chance chance, uint64_t n)
{
	double radius = sqrt(-2 * log(1 - chance_uniform(chance, 2 * n)));

	return radius * cos(TURN * chance_uniform(chance, 2 * n + 1));
}
