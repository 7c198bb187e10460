/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * sweep: the ceilings of a circuit while one number of its declaration goes
 * through a range.
 *
 * Any numeric field of the tables; its values are put into the tree of the
 * declaration as --set does, so that every check of the declaration holds for
 * them.  Pure but for the printing.
 */
#ifndef PLAFOND_SWEEP_H
#define PLAFOND_SWEEP_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>

#include "ceiling/ceiling.h"
#include "field.h"

struct error;

#define SWEEP_POINTS_MAX 1000
#define SWEEP_KEY_SIZE 128
#define SWEEP_VALUE_SIZE 64
#define SWEEP_UNIT_SIZE 16

/* KEY=FROM..TO[:STEP].  Whole numbers are stepped as such; reals are counted
 * from FROM in its own unit, so that no error adds up. */
struct sweep_range {
	char key[SWEEP_KEY_SIZE];
	const struct field *field;	/* borrowed from the tables */
	char unit[SWEEP_UNIT_SIZE];	/* of FROM, "" where it has none */
	size_t count;			/* of points */
	uint64_t from, to, step;	/* step 0: a tenth, to the nearest */
	long double real_from, real_to, real_step;	/* in `unit` */
	unsigned real_digits;		/* after the point */
};

/* root: the declaration, with --set already in it.
 * -1: ERROR_USAGE: not a number of the declaration, or no range; ERROR_INPUT:
 * FROM or TO is more or less than the field allows. */
int sweep_range_read(const char *text, const struct node *root,
    const struct field *rows, struct sweep_range *out, struct error *err);
/* The i-th value, as a declaration has it; returns buf. */
const char *sweep_range_value(const struct sweep_range *range, size_t i,
    char buf[SWEEP_VALUE_SIZE]);

struct sweep_direction {
	bool has_level[LEVELS];
	uint64_t rate_bps[LEVELS];
	char binding[96];		/* name of the bound */
	enum bound_class class;
	char condition[96];		/* the lowest, "": none */
	uint64_t condition_bps;
};

struct sweep_point {
	char value[SWEEP_VALUE_SIZE];
	double number;			/* in the dimension's unit */
	bool refused;
	char why[512];			/* where refused */
	struct sweep_direction directions[DIRECTIONS_SINGLE];
};

struct sweep {
	struct sweep_range range;
	char circuit[CIRCUIT_NAME_SIZE];
	char top[64];			/* "tcp": the declared transport */
	bool reference;			/* no ceilings */
	struct sweep_point points[SWEEP_POINTS_MAX];
};

/* Changes root: the last value stays in it.  Returns owned (free).
 * -1: ERROR_INPUT where no point at all is accepted. */
int sweep_make(struct node *root, const struct sweep_range *range,
    struct sweep **out, struct error *err);

void sweep_text(const struct sweep *sweep, FILE *out);
/* "plafond-sweep/1".  -1: no memory. */
int sweep_json(const struct sweep *sweep, FILE *out);
void sweep_csv(const struct sweep *sweep, FILE *out);

#endif
