/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * ceiling_report: the ceilings of a circuit as text, JSON and CSV.
 *
 * Of the declared stack as it stands, with what both directions at once have,
 * the declared conditions and the figures that follow from them, beside the
 * payload of the transports that a trial can use.  JSON: whole bit/s; CSV: RFC
 * 4180.
 */
#ifndef PLAFOND_CEILING_REPORT_H
#define PLAFOND_CEILING_REPORT_H

#include <stdio.h>

#include "ceiling/ceiling.h"
#include "ceiling/condition.h"
#include "ceiling/path.h"

/* What the ceiling of one direction is while the other has the same load. */
struct both_report {
	uint64_t low_bps, high_bps;	/* payload, each way */
	/* Segments an acknowledgement, of low and of high; 0: they take
	 * nothing. */
	double low_segments, high_segments;
};

/* Of a segment in the direction a-to-b. */
struct segment_report {
	enum duplex duplex;
	uint64_t tolerance_ppm;
	enum accuracy accuracy;		/* the worst of medium and layers */
};

struct ceiling_report {
	const struct circuit *circuit;	/* borrowed */
	/* Of the declared stack, conditions included. */
	struct ceiling ceilings[DIRECTIONS_SINGLE];
	struct both_report both[DIRECTIONS_SINGLE];
	struct condition_figures figures[DIRECTIONS_SINGLE];
	struct segment_report segments[SEGMENTS_MAX];
	uint64_t payload_bps[DIRECTIONS_SINGLE][PROTOCOLS];
};

/* -1 (ERROR_INPUT): as ceiling_of_load. */
int ceiling_report_make(const struct circuit *circuit,
    struct ceiling_report *out, struct error *err);
void ceiling_report_text(const struct ceiling_report *report, FILE *out);
/* -1: no memory. */
int ceiling_report_json(const struct ceiling_report *report, FILE *out);
void ceiling_report_csv(const struct ceiling_report *report, FILE *out);

/* The parts of the text that stand below the ladder (ceiling_notes.c). */
struct rate_unit;
void ceiling_text_both(const struct ceiling_report *report,
    enum direction direction, const char *way, const struct rate_unit *unit,
    FILE *out);
void ceiling_text_figures(const struct ceiling_report *report,
    enum direction direction, const struct rate_unit *unit, FILE *out);
void ceiling_text_accuracy(const struct ceiling_report *report, FILE *out);

#endif
