/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * circuit_inside: what circuit.c and circuit_fields.c share, nobody else.
 */
#ifndef PLAFOND_CIRCUIT_INSIDE_H
#define PLAFOND_CIRCUIT_INSIDE_H

#include "declare/circuit.h"

/* The circuit while it is read: the short form of one segment and one service
 * stands beside the lists. */
struct draft {
	struct circuit circuit;		/* first: ends_read takes the base */
	struct segment short_form;	/* medium, layers, mtu at the top */
	struct service service;		/* service at the top */
};

extern const struct field service_fields[];

/* What contradicts itself under `conditions`; node NULL: nothing is declared
 * there.  -1: placed with node_error. */
int conditions_check(const struct conditions *conditions,
    const struct node *node, struct error *err);

#endif
