/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * name: the names of steps and bounds, put together from the tables' words.
 *
 * printf would take longer than the arithmetic that is named.  Pure.
 */
#ifndef PLAFOND_NAME_H
#define PLAFOND_NAME_H

#include <stddef.h>

/* first, then second, then third; what does not fit into size is cut. */
void name_join(char *buf, size_t size, const char *first, const char *second,
    const char *third);

#endif
