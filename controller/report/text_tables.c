/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/text_tables.h"

#include <inttypes.h>
#include <math.h>
#include <string.h>

#include "error.h"
#include "judge/two_way.h"
#include "units.h"

/* Columns that trials and medians share; numbers end before theirs. */
#define AT_NAME 2
#define AT_DIRECTION 7
#define AT_ATTAINED 30
#define AT_ACHIEVED 43
#define AT_TARGET 56
#define AT_LAST 78

/* Columns of the criteria. */
#define AT_CRITERION_DIRECTION 19
#define AT_REQUIRED 37
#define AT_NOT_JUDGED 39
#define AT_FOUND 48
#define AT_BOUNDS 66
#define AT_OUTCOME 68

enum text_paint
text_outcome_paint(enum outcome outcome)
{
	static const enum text_paint paints[OUTCOMES] = {
		[OUTCOME_MEETS] = PAINT_GOOD,
		[OUTCOME_FALLS_SHORT] = PAINT_BAD,
		[OUTCOME_UNDECIDED] = PAINT_OPEN,
		[OUTCOME_VOID] = PAINT_VOID,
	};

	return paints[outcome];
}

const char *
text_attained(const struct verdict *verdict, enum direction direction,
    const struct text_page *page, char buf[TEXT_CELL_SIZE])
{
	if (!isfinite(verdict->attained[direction]))
		return page->signs->none;
	return text_percent(verdict->attained[direction], buf);
}

/* "97 %", "0.1 %", "20 ms": as it was declared. */
const char *
text_required(const struct criterion_outcome *row, char buf[TEXT_CELL_SIZE])
{
	if (row->is_time)
		return units_format((uint64_t)row->required, DIMENSION_TIME, 3,
		    buf, TEXT_CELL_SIZE);
	(void)snprintf(buf, TEXT_CELL_SIZE, "%.7g %%", 100 * row->required);
	return buf;
}

static void
print_spread(struct text_page *page, uint64_t low_bps, uint64_t high_bps,
    unsigned column)
{
	char low[TEXT_CELL_SIZE], high[TEXT_CELL_SIZE];
	char both[2 * TEXT_CELL_SIZE + 8];

	(void)snprintf(both, sizeof(both), "%s %s %s",
	    text_rate(page, low_bps, low), page->signs->to,
	    text_rate(page, high_bps, high));
	text_right(page, column, both);
}

static void
print_way(struct text_page *page, const struct record *record,
    const struct trial_run *run, enum direction direction)
{
	const struct direction_run *way = &run->directions[direction];
	uint64_t target_bps = two_way_target_bps(record->circuit, run,
	    direction, record->verdict->target_bps[direction]);
	char buf[TEXT_CELL_SIZE];

	text_left(page, AT_DIRECTION, direction_name(direction));
	if (run->trial.direction == DIRECTION_BOTH)
		text_put(page, ", both");
	if (!trial_run_counts(run, direction)) {
		char why[1024];

		text_left(page, AT_ATTAINED - 8, "failed");
		if (run->failed)
			text_cut(page, AT_ATTAINED + 2, page->columns + 1,
			    error_text(&run->why, why, sizeof(why)));
		text_end(page);
		return;
	}
	if (target_bps > 0)
		text_right(page, AT_ATTAINED, text_percent(
		    (double)way->payload_bps / (double)target_bps, buf));
	text_right(page, AT_ACHIEVED, text_rate(page, way->payload_bps, buf));
	if (target_bps > 0)
		text_right(page, AT_TARGET, text_rate(page, target_bps, buf));
	if (way->row_max_bps != UNKNOWN_U64 && way->row_max_bps > 0)
		print_spread(page, way->row_min_bps, way->row_max_bps,
		    AT_LAST);
	text_end(page);
}

void
text_trials(struct text_page *page, const struct record *record)
{
	char rows[TEXT_CELL_SIZE], buf[TEXT_CELL_SIZE];

	if (record->trials_count == 0)
		return;
	text_heading(page, "Trials, ");
	text_paint(page, PAINT_BOLD, page->rate_unit);
	text_right(page, AT_ATTAINED, "attained");
	text_right(page, AT_ACHIEVED, "achieved");
	text_right(page, AT_TARGET,
	    record->ceilings[DIRECTION_A_TO_B].reference ? "reference"
	    : "ceiling");
	(void)snprintf(rows, sizeof(rows), "rows of %s", units_format(
	    record->trials[0].trial.row_ns, DIMENSION_TIME, 3, buf,
	    sizeof(buf)));
	text_right(page, AT_LAST, rows);
	text_end(page);
	for (size_t i = 0; i < record->trials_count; i++) {
		const struct trial_run *run = &record->trials[i];
		bool first = true;

		for (size_t d = 0; d < DIRECTIONS_SINGLE; d++) {
			if (!direction_has(run->trial.direction,
			    (enum direction)d))
				continue;
			(void)snprintf(buf, sizeof(buf), "%" PRIu64,
			    run->trial.number);
			text_right(page, AT_DIRECTION - 2, first ? buf : "");
			print_way(page, record, run, (enum direction)d);
			first = false;
		}
	}
}

void
text_medians(struct text_page *page, const struct record *record)
{
	const struct verdict *verdict = record->verdict;
	char buf[TEXT_CELL_SIZE];

	if (!verdict->has_achieved[0] && !verdict->has_achieved[1])
		return;
	text_heading(page, "Median, ");
	text_paint(page, PAINT_BOLD, page->rate_unit);
	text_right(page, AT_ATTAINED, "attained");
	text_right(page, AT_ACHIEVED, "achieved");
	text_right(page, AT_TARGET, "confidence");
	text_right(page, AT_LAST, "interval");
	text_end(page);
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++) {
		const struct median_estimate *e = &verdict->achieved_bps[d];

		if (!verdict->has_achieved[d])
			continue;
		text_left(page, AT_NAME, direction_name((enum direction)d));
		text_putf(page, ", %zu trial%s", e->n, e->n == 1 ? "" : "s");
		text_right(page, AT_ATTAINED, text_attained(verdict,
		    (enum direction)d, page, buf));
		text_right(page, AT_ACHIEVED, text_rate(page,
		    (uint64_t)e->median, buf));
		if (e->has_interval) {
			text_right(page, AT_TARGET,
			    text_percent(e->coverage, buf));
			print_spread(page, (uint64_t)e->low,
			    (uint64_t)e->high, AT_LAST);
		} else {
			text_right(page, AT_LAST, "too few trials");
		}
		text_end(page);
	}
}

/* "99.48 ... 99.52 %": where the median lies, judged at 99 %. */
static void
print_bounds(struct text_page *page, const struct median_estimate *estimate)
{
	char low[TEXT_CELL_SIZE], high[TEXT_CELL_SIZE];
	char both[2 * TEXT_CELL_SIZE + 8];

	(void)text_percent(estimate->lower, low);
	low[strcspn(low, " ")] = '\0';
	(void)snprintf(both, sizeof(both), "%s %s %s", low, page->signs->to,
	    text_percent(estimate->upper, high));
	text_right(page, AT_BOUNDS, both);
}

static void
print_criterion(struct text_page *page, const struct criterion_outcome *row)
{
	char wanted[TEXT_CELL_SIZE + 8], buf[TEXT_CELL_SIZE];

	text_left(page, AT_NAME, row->name);
	text_left(page, AT_CRITERION_DIRECTION,
	    direction_name(row->direction));
	(void)snprintf(wanted, sizeof(wanted), "%s %s", row->at_least
	    ? page->signs->at_least : page->signs->at_most,
	    text_required(row, buf));
	text_right(page, AT_REQUIRED, wanted);
	if (!row->judged) {
		text_left(page, AT_NOT_JUDGED, "");
		text_wrap(page, AT_NOT_JUDGED, row->note);
		return;
	}
	text_right(page, AT_FOUND, isfinite(row->found)
	    ? text_percent(row->found, buf) : page->signs->none);
	if (row->estimate.has_bounds)
		print_bounds(page, &row->estimate);
	text_left(page, AT_OUTCOME, "");
	text_paint(page, text_outcome_paint(row->outcome),
	    outcome_name(row->outcome));
	text_end(page);
	if (row->note[0] != '\0')
		text_wrap(page, AT_CRITERION_DIRECTION, row->note);
}

void
text_criteria(struct text_page *page, const struct verdict *verdict)
{
	if (verdict->criteria_count == 0)
		return;
	text_heading(page, "Criteria");
	text_right(page, AT_REQUIRED, "required");
	text_right(page, AT_FOUND, "found");
	text_right(page, AT_BOUNDS, "99 % bounds");
	text_left(page, AT_OUTCOME, "outcome");
	text_end(page);
	for (size_t i = 0; i < verdict->criteria_count; i++)
		print_criterion(page, &verdict->criteria[i]);
}
