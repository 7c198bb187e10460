/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * octets: what a packet of so many bytes costs on an emulated line.
 *
 * A packet costs max(least, its bytes + num / den) octets.  The numbers are
 * the line's own and never come from the tables of layers: else the line
 * would share their mistakes.  Work is counted in units in which everything
 * is whole: 1 / (den * 10^9) bit, of which a line of R bit/s does R * den in
 * a nanosecond.  Pure.
 */
#ifndef PLAFOND_OCTETS_H
#define PLAFOND_OCTETS_H

#include <stdint.h>

#include "units.h"

struct octets {
	uint64_t added_num, added_den;	/* octets below IP; den > 0 */
	uint64_t least;			/* octets of the shortest packet */
};

#define OCTETS_DEN_MAX UINT64_C(1000000)
#define OCTETS_ADDED_MAX UINT64_C(10000)	/* num / den and least */

static inline uint128
octets_work(const struct octets *octets, uint64_t bytes)
{
	uint64_t parts = bytes * octets->added_den + octets->added_num;
	uint64_t least = octets->least * octets->added_den;

	return (uint128)(parts < least ? least : parts) *
	    (8 * UINT64_C(1000000000));
}

/* Work of whole bytes alone. */
static inline uint128
octets_bytes_work(const struct octets *octets, uint64_t bytes)
{
	return (uint128)bytes * octets->added_den *
	    (8 * UINT64_C(1000000000));
}

#endif
