/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * capacity: the rate that a medium offers to the layers above it.
 *
 * Calls the row's formula and keeps the result exact.  Pure.
 */
#ifndef PLAFOND_CAPACITY_H
#define PLAFOND_CAPACITY_H

#include "ceiling/fraction.h"
#include "declare/medium.h"
#include "trial.h"

struct error;

/* bit/s in one single direction.  -1 (ERROR_INPUT): the parameters make no
 * rate.  The medium must not be a reference. */
int capacity_compute(const struct medium_use *use, enum direction direction,
    struct fraction *out, struct error *err);

#endif
