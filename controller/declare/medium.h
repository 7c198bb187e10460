/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * medium: the table of media, one row each.
 *
 * A row says which fields a declaration gives, what rate the medium carries for
 * the layers above it, how exact that is and where it is written.  Nothing
 * outside medium.c names a medium.  Pure.
 */
#ifndef PLAFOND_MEDIUM_H
#define PLAFOND_MEDIUM_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "field.h"
#include "trial.h"

struct error;

/* Largest rate that can be declared; 128 bits then never overflow. */
#define RATE_MAX_BPS UINT64_C(1600000000000)

enum medium_accuracy {
	ACCURACY_EXACT,		/* exact arithmetic from the standard */
	ACCURACY_NOMINAL,	/* the standard's nominal value */
	ACCURACY_MODEL,		/* a model, with a typical error */
	ACCURACY_REFERENCE	/* measured, never a ceiling */
};
const char *accuracy_name(enum medium_accuracy accuracy);

/* Parameters of all media; each row's fields point into this struct. */
struct medium_parameters {
	uint64_t line_rate_bps[DIRECTIONS_SINGLE];
};

/* Rate for the layers above, as a fraction bits / (den * s). */
struct medium_rate {
	uint128 num_bps, den;
};

struct medium {
	const char *name;	/* "ethernet"; NULL ends the table */
	const char *title;
	const struct field *fields;
	/* Rate offered to the first layer; NULL: a reference, no ceiling. */
	int (*rate)(const struct medium_parameters *parameters,
	    enum direction direction, struct medium_rate *out,
	    struct error *err);
	const char *const *carries;	/* what the lowest layer may be */
	uint64_t default_mtu_bytes;	/* where no layer has a say; else 0 */
	bool shared_duplex;	/* both directions share one ceiling */
	uint64_t tolerance_ppm;	/* of the medium's clock */
	enum medium_accuracy accuracy;
	const char *accuracy_note;
	const char *formula;
	const char *source;
};

extern const struct medium medium_table[];
const struct medium *medium_find(const char *name);

struct medium_use {
	const struct medium *medium;	/* borrowed from the table */
	struct medium_parameters parameters;
};

/* CUSTOM reader of `medium: { kind: ethernet, line-rate: 1 Gbit/s }`, or of a
 * bare `medium: host`, into a struct medium_use at field->offset.  Absent
 * leaves it without a medium. */
int medium_read(const struct node *node, const struct field *field, void *base,
    struct error *err);
/* May this layer be the lowest on the medium? */
bool medium_carries(const struct medium *medium, const char *layer_name);
bool medium_is_reference(const struct medium *medium);

#endif
