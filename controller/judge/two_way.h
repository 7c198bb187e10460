/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * two_way: what a direction of a trial is set against.
 *
 * A trial of one direction: the verdict's target.  A trial of both: the ceiling
 * with the other direction loaded too, by the acknowledgements that the two
 * hosts' TCP counted, or as declared where they did not.  Pure.
 */
#ifndef PLAFOND_TWO_WAY_H
#define PLAFOND_TWO_WAY_H

#include <stdbool.h>
#include <stdint.h>

#include "conduct/trial_run.h"
#include "declare/circuit.h"
#include "declare/fraction.h"

/* alone_bps: of the direction alone, used also for a reference. */
uint64_t two_way_target_bps(const struct circuit *circuit,
    const struct trial_run *run, enum direction direction,
    uint64_t alone_bps);
/* Data segments of this direction for one acknowledgement that went the same
 * way, answering the other direction's data.  False: not counted. */
bool two_way_counted(const struct trial_run *run, enum direction direction,
    struct fraction *segments_per_ack);

#endif
