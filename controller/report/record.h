/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * record: one finished task, as JSON (format "plafond-record/1") and as text.
 *
 * The struct borrows what the stages before made.  The JSON names are fixed by
 * record.schema.json (JSON Schema, draft 2020-12); rates are whole bit/s, times
 * whole ns, ratios decimals.
 */
#ifndef PLAFOND_RECORD_H
#define PLAFOND_RECORD_H

#include <stdbool.h>
#include <stdint.h>
#include <stdio.h>

#include <jansson.h>

#include "ceiling/ceiling.h"
#include "conduct/trial_run.h"
#include "declare/circuit.h"
#include "judge/verdict.h"
#include "wire.h"

struct error;

#define RECORD_ID_SIZE 37

struct record {
	char id[RECORD_ID_SIZE];	/* UUID version 7, RFC 9562 */
	const char *task;		/* "acceptance" */
	uint64_t started_utc_ns, finished_utc_ns;
	const struct circuit *circuit;
	const struct ceiling *ceilings;	/* DIRECTIONS_SINGLE of them */
	const struct host_facts *hosts;	/* ENDS of them */
	uint64_t reference_bps[ENDS];	/* UNKNOWN_U64 */
	const struct trial_run *trials;
	size_t trials_count, trials_planned;
	const struct verdict *verdict;
};

/* RFC 9562 section 5.7: 48 bits of UTC milliseconds, the rest random. */
void record_make_id(uint64_t utc_ns, const unsigned char random[10],
    char out[RECORD_ID_SIZE]);

/* Owned object; never holds NaN, infinity or text that is not UTF-8; what
 * nobody knows is null. */
json_t *record_to_json(const struct record *record);
/* How a record is written, to a file or to standard output. */
#define RECORD_DUMP_FLAGS (JSON_INDENT(1) | JSON_REAL_PRECISION(12))

/* For a person: 80 columns, UTF-8 or ASCII, colour only where asked.  The
 * first line holds circuit, outcome and the attained share a direction. */
struct text_style {
	bool colour, ascii;
	unsigned columns;		/* 0: 80 */
};
void report_text(const struct record *record, const struct text_style *style,
    FILE *out);
/* Keep the record in FOLDER/records/ID.json (FOLDER exists, records/ is made
 * with mode 0700): written whole or not at all (temporary file, fsync, rename).
 * -1: ERROR_WRITE; path_out is set to the file's name either way. */
int record_keep(const json_t *record, const char *folder, const char *id,
    char *path_out, size_t path_size, struct error *err);

#endif
