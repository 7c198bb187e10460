/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * json_value: our quantities as JSON values.
 *
 * Each returns an owned value and never NULL; what nobody knows, what no
 * I-JSON number holds (RFC 7493) and what memory cannot hold is null.
 */
#ifndef PLAFOND_JSON_VALUE_H
#define PLAFOND_JSON_VALUE_H

#include <stdint.h>

#include <jansson.h>

struct ceiling;
struct circuit;
struct record;
struct trial_run;

/* UNKNOWN_U64 (also FIELD_UNSET) and what exceeds 2^53 - 1 are null. */
json_t *json_value_u64(uint64_t value);
json_t *json_value_i64(int64_t value);
/* Not finite: null. */
json_t *json_value_real(double value);
/* "" is null; bytes that are not UTF-8 become U+FFFD. */
json_t *json_value_text(const char *text);
/* RFC 3339, UTC; 0 is null. */
json_t *json_value_utc(uint64_t utc_ns);

/* Takes value; NULL becomes null. */
void json_put(json_t *object, const char *name, json_t *value);
void json_push(json_t *array, json_t *value);

/* ceilings[] of the record and of `plafond ceiling` (json_ceiling.c). */
json_t *json_ceiling(const struct circuit *circuit,
    const struct ceiling *ceiling);
/* trials[] of the record (json_trial.c). */
json_t *json_trial(const struct record *record, const struct trial_run *run);

#endif
