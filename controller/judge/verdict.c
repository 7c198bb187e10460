/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "judge/verdict.h"

#include <assert.h>
#include <inttypes.h>
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "declare/circuit.h"
#include "error.h"
#include "judge/validity.h"

/* Confidence of the interval that is shown, and of the bounds that judge. */
#define INTERVAL_CONFIDENCE 0.95
#define BOUND_CONFIDENCE 0.99

static const struct {
	const char *name;
	int exit_status;
} outcomes[OUTCOMES] = {
	[OUTCOME_MEETS] = { "meets", 0 },
	[OUTCOME_FALLS_SHORT] = { "falls-short", 1 },
	[OUTCOME_UNDECIDED] = { "undecided", 2 },
	[OUTCOME_VOID] = { "void", 3 },
};

const char *
outcome_name(enum outcome outcome)
{
	assert(outcome < OUTCOMES);
	return outcomes[outcome].name;
}

int
outcome_exit_status(enum outcome outcome)
{
	assert(outcome < OUTCOMES);
	return outcomes[outcome].exit_status;
}

static void __attribute__((format(printf, 4, 0)))
add_reason(struct verdict *verdict, bool voids, const char *code,
    const char *fmt, va_list ap)
{
	struct reason *reason;

	if (voids)
		verdict->outcome = OUTCOME_VOID;
	if (verdict->reasons_count == REASONS_MAX)
		return;
	reason = &verdict->reasons[verdict->reasons_count++];
	reason->voids = voids;
	(void)snprintf(reason->code, sizeof(reason->code), "%s", code);
	(void)vsnprintf(reason->text, sizeof(reason->text), fmt, ap);
}

void
verdict_add_reason(struct verdict *verdict, const char *code, const char *fmt,
    ...)
{
	va_list ap;

	va_start(ap, fmt);
	add_reason(verdict, true, code, fmt, ap);
	va_end(ap);
}

void
verdict_add_note(struct verdict *verdict, const char *code, const char *fmt,
    ...)
{
	va_list ap;

	va_start(ap, fmt);
	add_reason(verdict, false, code, fmt, ap);
	va_end(ap);
}

const struct reason *
verdict_void_reason(const struct verdict *verdict)
{
	for (size_t i = 0; i < verdict->reasons_count; i++)
		if (verdict->reasons[i].voids)
			return &verdict->reasons[i];
	return NULL;
}

uint64_t
verdict_target_bps(const struct verdict_input *input, enum direction direction)
{
	uint64_t largest = 0;

	if (!input->ceilings[direction].reference)
		return input->ceilings[direction].rate_bps[LEVEL_PAYLOAD];
	for (size_t end = 0; end < ENDS; end++)
		if (input->reference_bps[end] != UNKNOWN_U64 &&
		    input->reference_bps[end] > largest)
			largest = input->reference_bps[end];
	return largest;
}

/* True where every counted one-way trial had a single stream. */
static bool
single_stream_only(const struct verdict_input *input, enum direction direction)
{
	bool any = false;

	for (size_t i = 0; i < input->trials_count; i++) {
		const struct trial_run *run = &input->trials[i];

		if (run->trial.direction != direction ||
		    !trial_run_counts(run, direction))
			continue;
		if (run->trial.streams != 1)
			return false;
		any = true;
	}
	return any;
}

/* Payload rates of the counted one-way trials, each divided by `unit`. */
static int
estimate_rate(const struct verdict_input *input, enum direction direction,
    double unit, struct median_estimate *out)
{
	double *values = calloc(input->trials_count + 1, sizeof(*values));
	struct error err;
	size_t count = 0;
	int rc = -1;

	if (values == NULL)
		return -1;
	for (size_t i = 0; i < input->trials_count; i++) {
		const struct trial_run *run = &input->trials[i];

		if (run->trial.direction == direction &&
		    trial_run_counts(run, direction))
			values[count++] =
			    (double)run->directions[direction].payload_bps /
			    unit;
	}
	if (count > 0)
		rc = statistic_median(values, count, INTERVAL_CONFIDENCE,
		    BOUND_CONFIDENCE, out, &err);
	free(values);
	return rc;
}

static void
judge_bounds(struct criterion_outcome *row, double least)
{
	const struct median_estimate *estimate = &row->estimate;

	if (!estimate->has_bounds) {
		row->outcome = OUTCOME_UNDECIDED;
		(void)snprintf(row->note, sizeof(row->note),
		    "%zu valid trial%s, the rule needs at least %d",
		    estimate->n, estimate->n == 1 ? "" : "s",
		    VERDICT_TRIALS_LEAST);
	} else if (estimate->lower >= least) {
		row->outcome = OUTCOME_MEETS;
	} else if (estimate->upper < least) {
		row->outcome = OUTCOME_FALLS_SHORT;
	} else {
		row->outcome = OUTCOME_UNDECIDED;
		(void)snprintf(row->note, sizeof(row->note),
		    "the %.0f %% bounds of the median lie on both sides of "
		    "what is required; more trials may decide",
		    100 * estimate->bound_confidence);
	}
}

/* Criteria that a declaration may hold, in the order of the report. */
enum criterion_kind { BY_RATE, BY_SINGLE_STREAM, NOT_MEASURED };
static const struct criterion {
	const char *name;
	enum criterion_kind kind;
	bool is_time;			/* uint64_t ns, else double ratio */
	size_t offset;			/* in struct criteria, a direction */
} criteria[] = {
	{ "throughput", BY_RATE, false,
	    offsetof(struct criteria, throughput_ratio) },
	{ "single-stream", BY_SINGLE_STREAM, false,
	    offsetof(struct criteria, single_stream_ratio) },
	{ "loss", NOT_MEASURED, false, offsetof(struct criteria, loss_ratio) },
	{ "delay", NOT_MEASURED, true, offsetof(struct criteria, delay_ns) },
	{ "delay-variation", NOT_MEASURED, true,
	    offsetof(struct criteria, delay_variation_ns) },
};

/* False where the declaration does not hold it. */
static bool
criterion_required(const struct criterion *criterion,
    const struct criteria *declared, enum direction direction, double *out)
{
	const char *base = (const char *)declared + criterion->offset;
	uint64_t ns;

	if (!criterion->is_time) {
		memcpy(out, base + (size_t)direction * sizeof(*out),
		    sizeof(*out));
		return !isnan(*out);
	}
	memcpy(&ns, base + (size_t)direction * sizeof(ns), sizeof(ns));
	*out = (double)ns;
	return ns != FIELD_UNSET;
}

/* Why a declared criterion cannot be judged; NULL where it can. */
static const char *
criterion_obstacle(const struct criterion *criterion,
    const struct verdict_input *input, enum direction direction)
{
	switch (criterion->kind) {
	case NOT_MEASURED:
		return "not judged: no trial of this kind was run";
	case BY_SINGLE_STREAM:
		if (!single_stream_only(input, direction))
			return "not judged: no trial of one stream was run";
		break;
	case BY_RATE:
		break;
	}
	if (!validity_planned(input, direction))
		return "not judged: the plan has no trials of this direction";
	if (verdict_target_bps(input, direction) == 0)
		return "not judged: there is nothing to set it against";
	return NULL;
}

static void
judge_criterion(const struct criterion *criterion,
    const struct verdict_input *input, enum direction direction,
    struct criterion_outcome *row)
{
	const struct ceiling *ceiling = &input->ceilings[direction];
	const char *obstacle = criterion_obstacle(criterion, input, direction);

	if (obstacle != NULL) {
		(void)snprintf(row->note, sizeof(row->note), "%s", obstacle);
		return;
	}
	row->judged = true;
	if (estimate_rate(input, direction,
	    (double)verdict_target_bps(input, direction),
	    &row->estimate) == -1) {
		(void)snprintf(row->note, sizeof(row->note),
		    "there is no valid trial");
		return;
	}
	row->found = row->estimate.median;
	judge_bounds(row, row->required *
	    (1 - (double)ceiling->tolerance_ppm * 1e-6));
}

static void
judge_criteria(const struct verdict_input *input, struct verdict *out)
{
	for (size_t i = 0; i < sizeof(criteria) / sizeof(*criteria); i++) {
		for (size_t d = 0; d < DIRECTIONS_SINGLE; d++) {
			struct criterion_outcome *row =
			    &out->criteria[out->criteria_count];
			double required;

			if (!criterion_required(&criteria[i],
			    &input->circuit->criteria, (enum direction)d,
			    &required))
				continue;
			assert(out->criteria_count < CRITERIA_OUTCOMES_MAX);
			out->criteria_count++;
			row->direction = (enum direction)d;
			row->at_least = criteria[i].kind != NOT_MEASURED;
			row->is_time = criteria[i].is_time;
			row->required = required;
			row->found = NAN;
			row->outcome = OUTCOME_UNDECIDED;
			(void)snprintf(row->name, sizeof(row->name), "%s",
			    criteria[i].name);
			judge_criterion(&criteria[i], input, (enum direction)d,
			    row);
		}
	}
}

static void
estimate_directions(const struct verdict_input *input, struct verdict *out)
{
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++) {
		out->target_bps[d] =
		    verdict_target_bps(input, (enum direction)d);
		out->attained[d] = NAN;
		out->has_achieved[d] = estimate_rate(input, (enum direction)d,
		    1, &out->achieved_bps[d]) == 0;
		if (out->has_achieved[d] && out->target_bps[d] > 0)
			out->attained[d] = out->achieved_bps[d].median /
			    (double)out->target_bps[d];
	}
}

static void
make_ledger(const struct verdict_input *input, struct verdict *out)
{
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++)
		if (out->has_achieved[d])
			out->ledger_count += ledger_make(&input->ceilings[d],
			    input->trials, input->trials_count,
			    &out->achieved_bps[d],
			    out->ledger + out->ledger_count,
			    LEDGER_ENTRIES_MAX - out->ledger_count);
}

/* Of the criteria alone; a reason that voids comes on top. */
static enum outcome
outcome_of_criteria(const struct verdict_input *input,
    const struct verdict *verdict)
{
	static const enum outcome worst_first[] = { OUTCOME_FALLS_SHORT,
		OUTCOME_UNDECIDED, OUTCOME_MEETS };

	for (size_t i = 0; i < sizeof(worst_first) / sizeof(*worst_first); i++)
		for (size_t c = 0; c < verdict->criteria_count; c++)
			if (verdict->criteria[c].judged &&
			    verdict->criteria[c].outcome == worst_first[i])
				return worst_first[i];
	return input->ceilings[DIRECTION_A_TO_B].reference ? OUTCOME_MEETS
	    : OUTCOME_UNDECIDED;
}

static bool
any_judged(const struct verdict *verdict)
{
	for (size_t i = 0; i < verdict->criteria_count; i++)
		if (verdict->criteria[i].judged)
			return true;
	return false;
}

void
verdict_judge(const struct verdict_input *input, struct verdict *out)
{
	memset(out, 0, sizeof(*out));
	estimate_directions(input, out);
	judge_criteria(input, out);
	make_ledger(input, out);
	out->outcome = outcome_of_criteria(input, out);
	validity_examine(input, out);
	/* A reference is there to be looked at; a circuit is to be judged. */
	if (!any_judged(out) && !input->ceilings[DIRECTION_A_TO_B].reference)
		verdict_add_note(out, "nothing-judged", "no criterion was "
		    "judged: this says only whether the trials were sound");
}
