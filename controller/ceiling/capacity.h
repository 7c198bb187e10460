/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * capacity: the rate that a medium offers to the layers above it.
 *
 * Calls the row's formula and holds it to what a row may answer.  Pure.
 */
#ifndef PLAFOND_CAPACITY_H
#define PLAFOND_CAPACITY_H

#include "declare/medium.h"

struct error;

/* One single direction of a medium under a load.  -1 (ERROR_INPUT): the
 * parameters make no rate.  The medium must not be a reference. */
int capacity_compute(const struct medium_use *use,
    const struct medium_load *load, struct medium_capacity *out,
    struct error *err);
/* What the layers get: the line without the medium's own steps, before it is
 * shared with other users. */
struct fraction capacity_offered(const struct medium_capacity *capacity);

#endif
