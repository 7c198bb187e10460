/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * end: the two ends of a circuit, and how their agents are reached.
 *
 * Reads `ends: { a: {...}, b: {...} }` into struct end_declaration.  Looks up
 * no names and opens nothing.  Pure.
 */
#ifndef PLAFOND_END_H
#define PLAFOND_END_H

#include "declare/circuit.h"
#include "field.h"

struct error;

/* For help and tests: the two ends, and one of them. */
extern const struct field ends_fields[];
extern const struct field end_fields[];

/* CUSTOM reader of `ends` into struct circuit's ends and ends_declared (base
 * is the circuit).  Absent: none declared. */
int ends_read(const struct node *node, const struct field *field, void *base,
    struct error *err);
/* The addresses of data must be of the IP version that carries the transport;
 * `ends` is the node that was read. */
int ends_check_version(const struct circuit *circuit, const struct node *ends,
    struct error *err);

#endif
