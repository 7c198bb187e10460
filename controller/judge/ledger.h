/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * ledger: the account of the shortfall of one direction.
 *
 * ceiling - achieved = the sum of the entries, exactly, in whole bit/s of
 * payload.  An entry stands for one cause and names its evidence; what no
 * evidence explains is the last entry, `unexplained`, which is negative where
 * the causes found claim more than is missing.  Pure.
 */
#ifndef PLAFOND_LEDGER_H
#define PLAFOND_LEDGER_H

#include <stddef.h>
#include <stdint.h>

#include "ceiling/ceiling.h"
#include "conduct/trial_run.h"
#include "judge/statistic.h"

#define LEDGER_ENTRIES_MAX 32

struct ledger_entry {
	enum direction direction;
	char name[48];		/* "unexplained" */
	int64_t bps;
	uint64_t uncertainty_bps;
	char evidence[256];
};

/* Entries of one direction from its counted one-way trials; achieved is the
 * estimate over them, its median rounded down to whole bit/s.  Returns the
 * number of entries written: 0 where the ceiling is a reference or max is 0. */
size_t ledger_make(const struct ceiling *ceiling,
    const struct trial_run trials[], size_t trials_count,
    const struct median_estimate *achieved_bps, struct ledger_entry out[],
    size_t max);

#endif
