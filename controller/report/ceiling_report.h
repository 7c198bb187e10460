/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * ceiling_report: the ceilings of a circuit as text, JSON and CSV.
 *
 * Borrows what ceiling_compute made.  JSON: whole bit/s; CSV: RFC 4180.
 */
#ifndef PLAFOND_CEILING_REPORT_H
#define PLAFOND_CEILING_REPORT_H

#include <stdio.h>

#include "ceiling/ceiling.h"

/* Both directions, and what every protocol would have. */
struct ceiling_report {
	const struct circuit *circuit;
	enum protocol protocol;		/* that of `ceilings` */
	struct ceiling ceilings[DIRECTIONS_SINGLE];
	uint64_t payload_bps[DIRECTIONS_SINGLE][PROTOCOLS];
};

int ceiling_report_make(const struct circuit *circuit,
    struct ceiling_report *out, struct error *err);
void ceiling_report_text(const struct ceiling_report *report, FILE *out);
/* -1: no memory. */
int ceiling_report_json(const struct ceiling_report *report, FILE *out);
void ceiling_report_csv(const struct ceiling_report *report, FILE *out);

#endif
