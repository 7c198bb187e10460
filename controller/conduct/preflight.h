/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * preflight: what both agents say of themselves before any load, put together.
 * Pure, but for asking the pair for each host's reference.
 */
#ifndef PLAFOND_PREFLIGHT_H
#define PLAFOND_PREFLIGHT_H

#include <stdbool.h>
#include <stdint.h>
#include <stdio.h>

#include <jansson.h>

#include "conduct/exchange.h"
#include "declare/circuit.h"
#include "wire.h"

struct error;
struct pair;

#define REFERENCE_NS UINT64_C(1000000000)	/* length of the bare loop */

struct preflight_end {
	const struct host_facts *host;		/* borrowed from the pair */
	const struct wire_capability *capability;	/* likewise */
	const char *name;
	bool has_clock;
	struct exchange_sample clock;
	uint64_t reference_bps;			/* UNKNOWN_U64 */
};
struct preflight {
	struct preflight_end ends[ENDS];
	bool same_host;			/* both agents are our children */
};

void preflight_look(const struct pair *pair, const struct circuit *circuit,
    struct preflight *out);
/* Bare copy loop on each host (once where both are the same); the larger of
 * this and what is known already is kept. */
int preflight_reference(struct pair *pair, struct preflight *preflight,
    struct error *err);
void preflight_print(const struct preflight *preflight,
    const struct circuit *circuit, FILE *out);
json_t *preflight_to_json(const struct preflight *preflight);

#endif
