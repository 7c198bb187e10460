/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * verdict: trials against criteria by a rule stated beforehand.
 *
 * The rule: throughput of a direction `meets` when the one-sided 99 % lower
 * bound of the median attained (order statistics) is at or above the
 * requirement, less the tolerance of the medium's clock; `falls-short` when
 * the upper bound is below it; else `undecided`.  Fewer than seven valid
 * trials decide nothing.  Anything that makes a number untrustworthy makes the
 * whole `void`.  The whole is the first of void, falls-short, undecided,
 * meets that any part is; with nothing to judge, a reference (medium host)
 * whose trials are sound meets, a circuit is undecided.  Pure.
 */
#ifndef PLAFOND_VERDICT_H
#define PLAFOND_VERDICT_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "ceiling/ceiling.h"
#include "conduct/trial_run.h"
#include "judge/ledger.h"
#include "judge/statistic.h"

struct error;
struct host_facts;

enum outcome { OUTCOME_MEETS, OUTCOME_FALLS_SHORT, OUTCOME_UNDECIDED,
	OUTCOME_VOID, OUTCOMES };
const char *outcome_name(enum outcome outcome);
int outcome_exit_status(enum outcome outcome);	/* 0, 1, 2, 3 */

#define REASONS_MAX 32
#define CRITERIA_OUTCOMES_MAX 16
#define VERDICT_TRIALS_LEAST 7	/* 2^-7 < 1 %: bounds at 99 % exist */

struct reason {
	bool voids;		/* false: a note, which changes no outcome */
	char code[32];		/* "host-limit", fixed words */
	char text[384];		/* one sentence with place, found, allowed */
};

struct criterion_outcome {
	char name[32];		/* "throughput" */
	enum direction direction;
	bool judged;		/* false: "not judged" */
	bool at_least;		/* else at most */
	bool is_time;		/* required and found in ns, else ratios */
	double required;
	double found;		/* median; NAN where nothing was found */
	struct median_estimate estimate;	/* of attained */
	enum outcome outcome;
	char note[160];
};

struct verdict {
	enum outcome outcome;
	struct reason reasons[REASONS_MAX];
	size_t reasons_count;
	struct criterion_outcome criteria[CRITERIA_OUTCOMES_MAX];
	size_t criteria_count;
	struct ledger_entry ledger[LEDGER_ENTRIES_MAX];
	size_t ledger_count;
	/* Per single direction: what it was set against (verdict_target_bps),
	 * and what its counted one-way trials say. */
	uint64_t target_bps[DIRECTIONS_SINGLE];
	struct median_estimate achieved_bps[DIRECTIONS_SINGLE];
	bool has_achieved[DIRECTIONS_SINGLE];
	double attained[DIRECTIONS_SINGLE];	/* median; NAN without */
};

struct verdict_input {
	const struct circuit *circuit;
	const struct ceiling *ceilings;		/* DIRECTIONS_SINGLE */
	const struct trial_run *trials;
	size_t trials_count;
	size_t trials_planned;
	uint64_t reference_bps[ENDS];	/* host reference; UNKNOWN_U64 */
	uint64_t rate_limit_bps[ENDS];	/* policy of that end's agent; 0 none */
	const struct host_facts *hosts;	/* ENDS of them, or NULL */
	bool interrupted;
};

/* What one trial is set against: the ceiling's payload rate, or for medium
 * host the larger host reference.  0: nothing to set against. */
uint64_t verdict_target_bps(const struct verdict_input *input,
    enum direction direction);

void verdict_judge(const struct verdict_input *input, struct verdict *out);
/* A reason makes the outcome void; a note only stands beside it. */
void verdict_add_reason(struct verdict *verdict, const char *code,
    const char *fmt, ...) __attribute__((format(printf, 3, 4)));
void verdict_add_note(struct verdict *verdict, const char *code,
    const char *fmt, ...) __attribute__((format(printf, 3, 4)));
/* The first reason that voids, NULL where there is none. */
const struct reason *verdict_void_reason(const struct verdict *verdict);

#endif
