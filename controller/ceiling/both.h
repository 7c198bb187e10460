/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * both: the load of one direction while the other carries data too.
 *
 * The acknowledgements on a line answer the data of the other direction, so
 * the two ceilings depend on each other.  Pure.
 */
#ifndef PLAFOND_BOTH_H
#define PLAFOND_BOTH_H

#include "ceiling/path.h"
#include "declare/circuit.h"

struct error;

/* Sets load->other_packets, which is unset: the packets of the other direction
 * for one of this when both carry as much as they can.  1 exactly where both
 * ceilings are alike, else in thousandths, 0.001 to BOTH_PACKETS_MOST.
 * -1 (ERROR_INPUT): as ceiling_of_load. */
int both_settle(const struct circuit *circuit, struct load *load,
    struct error *err);
#define BOTH_PACKETS_MOST 1000

#endif
