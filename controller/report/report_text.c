/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <inttypes.h>
#include <math.h>
#include <string.h>

#include "clock.h"
#include "report/record.h"
#include "report/text_ladder.h"
#include "report/text_page.h"
#include "report/text_tables.h"
#include "utf8.h"

/* Circuit, outcome, attained a direction: the whole answer in one line. */
static void
print_headline(struct text_page *page, const struct record *record,
    const bool shown[DIRECTIONS_SINGLE])
{
	const struct verdict *verdict = record->verdict;
	const char *outcome = outcome_name(verdict->outcome);
	char rest[128] = "", buf[TEXT_CELL_SIZE];
	size_t used = 0;

	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++)
		if (shown[d])
			used += (size_t)snprintf(rest + used,
			    sizeof(rest) - used, "   %s %s",
			    direction_name((enum direction)d),
			    text_attained(verdict, (enum direction)d, page,
			    buf));
	if (page->colour)
		(void)fputs("\033[1m", page->out);
	text_cut(page, 0, page->columns - (unsigned)(utf8_columns(rest) +
	    strlen(outcome) + 2), record->circuit->name);
	if (page->colour)
		(void)fputs("\033[0m", page->out);
	text_put(page, "   ");
	text_paint(page, text_outcome_paint(verdict->outcome), outcome);
	text_put(page, rest);
	text_end(page);
}

static const struct criterion_outcome *
first_criterion(const struct verdict *verdict, enum outcome outcome)
{
	for (size_t i = 0; i < verdict->criteria_count; i++)
		if (verdict->criteria[i].judged &&
		    verdict->criteria[i].outcome == outcome)
			return &verdict->criteria[i];
	return NULL;
}

static size_t
count_judged(const struct verdict *verdict, bool judged)
{
	size_t count = 0;

	for (size_t i = 0; i < verdict->criteria_count; i++)
		count += verdict->criteria[i].judged == judged;
	return count;
}

static size_t
count_voids(const struct verdict *verdict)
{
	size_t count = 0;

	for (size_t i = 0; i < verdict->reasons_count; i++)
		count += verdict->reasons[i].voids;
	return count;
}

static void
answer_meets(const struct verdict *verdict, char *buf, size_t size)
{
	size_t judged = count_judged(verdict, true);
	size_t left = count_judged(verdict, false);
	size_t used;

	if (judged == 0) {
		(void)snprintf(buf, size, "The trials were sound; nothing was "
		    "required.");
		return;
	}
	used = (size_t)snprintf(buf, size, "%s met, with 99 %% confidence",
	    judged == 1 ? "The criterion judged is"
	    : judged == 2 ? "Both criteria judged are"
	    : "All criteria judged are");
	if (left > 0)
		used += (size_t)snprintf(buf + used, size - used,
		    "; %zu more %s not judged", left, left == 1 ?
		    "was" : "were");
	(void)snprintf(buf + used, size - used, ".");
}

/* The reason for the outcome in one sentence. */
static void
print_answer(struct text_page *page, const struct verdict *verdict)
{
	const struct criterion_outcome *row =
	    first_criterion(verdict, verdict->outcome);
	const struct reason *reason = verdict_void_reason(verdict);
	char text[512], wanted[TEXT_CELL_SIZE], found[TEXT_CELL_SIZE];

	switch (verdict->outcome) {
	case OUTCOME_MEETS:
		answer_meets(verdict, text, sizeof(text));
		break;
	case OUTCOME_FALLS_SHORT:
		(void)snprintf(text, sizeof(text), "%s %s: %s attained "
		    "(median), %s required: missed, with 99 %% confidence.",
		    direction_name(row->direction), row->name,
		    text_percent(row->found, found),
		    text_required(row, wanted));
		break;
	case OUTCOME_UNDECIDED:
		if (row == NULL)
			(void)snprintf(text, sizeof(text),
			    "No criterion was judged.");
		else
			(void)snprintf(text, sizeof(text), "%s %s: %s.",
			    direction_name(row->direction), row->name,
			    row->note);
		break;
	case OUTCOME_VOID:
		if (count_voids(verdict) > 1)
			(void)snprintf(text, sizeof(text), "Not to be trusted,"
			    " for %zu reasons.", count_voids(verdict));
		else
			(void)snprintf(text, sizeof(text),
			    "Not to be trusted: %s.", reason != NULL
			    ? reason->text : "no reason was kept");
		break;
	case OUTCOMES:
		return;
	}
	text_wrap(page, 0, text);
}

static const struct bound *
binding_bound(const struct ceiling *ceiling)
{
	for (size_t i = 0; i < ceiling->bounds_count; i++)
		if (ceiling->bounds[i].binding &&
		    ceiling->bounds[i].class != BOUND_CONDITION)
			return &ceiling->bounds[i];
	return NULL;
}

static void
print_target(struct text_page *page, const struct record *record,
    const bool shown[DIRECTIONS_SINGLE])
{
	char buf[TEXT_CELL_SIZE], binding[128];
	uint64_t target_bps = record->verdict->target_bps[DIRECTION_A_TO_B];

	text_heading(page, "Set against");
	if (record->ceilings[DIRECTION_A_TO_B].reference) {
		if (target_bps == 0)
			text_left(page, 14, page->signs->none);
		else
			text_left(page, 14, text_rate(page, target_bps, buf));
		text_putf(page, " %s   the host's own bare copy loop:",
		    page->rate_unit);
		text_end(page);
		text_left(page, 14, "a reference, not a ceiling");
		text_end(page);
		return;
	}
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++) {
		const struct bound *bound =
		    binding_bound(&record->ceilings[d]);

		if (!shown[d])
			continue;
		text_left(page, 14, direction_name((enum direction)d));
		text_right(page, 31, text_rate(page,
		    record->verdict->target_bps[d], buf));
		text_putf(page, " %s", page->rate_unit);
		if (bound != NULL) {
			(void)snprintf(binding, sizeof(binding), "%s: %s",
			    bound_class_name(bound->class), bound->name);
			text_left(page, 40, "");
			text_wrap(page, 40, binding);
		} else {
			text_end(page);
		}
	}
}

/* Entries of the ledger with their evidence; the figures stand above. */
static void
print_evidence(struct text_page *page, const struct verdict *verdict)
{
	bool any = false;

	for (size_t i = 0; i < verdict->ledger_count; i++) {
		const struct ledger_entry *entry = &verdict->ledger[i];

		/* The rest is explained by nothing: nothing to say. */
		if (strcmp(entry->name, "unexplained") == 0)
			continue;
		if (!any) {
			text_heading(page, "Evidence");
			text_end(page);
		}
		any = true;
		text_left(page, 2, direction_name(entry->direction));
		text_left(page, 10, entry->name);
		text_left(page, 26, "");
		text_wrap(page, 26, entry->evidence);
	}
}

static void
print_reasons(struct text_page *page, const struct verdict *verdict,
    bool voids, const char *heading)
{
	bool any = false;

	for (size_t i = 0; i < verdict->reasons_count; i++) {
		const struct reason *reason = &verdict->reasons[i];

		if (reason->voids != voids)
			continue;
		if (!any) {
			text_heading(page, heading);
			text_end(page);
		}
		any = true;
		text_left(page, 2, reason->code);
		text_left(page, 22, "");
		text_wrap(page, 22, reason->text);
	}
}

static void
add_words(char *buf, size_t size, const char *before, const char *text)
{
	size_t used = strlen(buf);

	if (text[0] != '\0')
		(void)snprintf(buf + used, size - used, "%s%s%s",
		    used > 0 ? ", " : "", before, text);
}

static void
add_rate(char *buf, size_t size, const char *before, uint64_t bps)
{
	char text[TEXT_CELL_SIZE];

	if (bps != UNKNOWN_U64 && bps != 0)
		add_words(buf, size, before, units_format(bps, DIMENSION_RATE,
		    2, text, sizeof(text)));
}

static void
print_end(struct text_page *page, const struct record *record, enum end end)
{
	const struct host_facts *host = &record->hosts[end];
	char text[768] = "", cpus[TEXT_CELL_SIZE] = "";
	char mtu[TEXT_CELL_SIZE] = "";

	add_words(text, sizeof(text), "", host->hostname);
	add_words(text, sizeof(text), "", host->kernel);
	if (host->cpus != UNKNOWN_U64 && host->cpus != 0)
		(void)snprintf(cpus, sizeof(cpus), "%" PRIu64 " CPU%s",
		    host->cpus, host->cpus == 1 ? "" : "s");
	add_words(text, sizeof(text), "", cpus);
	add_words(text, sizeof(text), "", host->interface);
	if (host->interface_mtu_bytes != UNKNOWN_U64 &&
	    host->interface_mtu_bytes != 0)
		(void)snprintf(mtu, sizeof(mtu), "MTU %" PRIu64 " B",
		    host->interface_mtu_bytes);
	add_words(text, sizeof(text), "", mtu);
	if (host->link_speed_bps == UNKNOWN_U64)
		add_words(text, sizeof(text), "", "link speed unknown");
	add_rate(text, sizeof(text), "link ", host->link_speed_bps);
	add_rate(text, sizeof(text), "host reference ",
	    record->reference_bps[end]);
	add_words(text, sizeof(text), "", host->software);
	text_left(page, 2, end_name(end));
	if (strcmp(record->circuit->ends[end].name, end_name(end)) != 0)
		text_cut(page, 4, 20, record->circuit->ends[end].name);
	text_left(page, 20, "");
	text_wrap(page, 20, text);
}

static void
print_ends(struct text_page *page, const struct record *record)
{
	if (record->hosts == NULL)
		return;
	text_heading(page, "Ends");
	text_end(page);
	for (size_t end = 0; end < ENDS; end++)
		print_end(page, record, (enum end)end);
}

static void
print_footer(struct text_page *page, const struct record *record)
{
	char started[25], took[TEXT_CELL_SIZE];
	uint64_t took_ns = record->finished_utc_ns > record->started_utc_ns
	    ? record->finished_utc_ns - record->started_utc_ns : 0;

	clock_utc_text(record->started_utc_ns, started);
	text_end(page);
	text_putf(page, "%s %s", record->task, record->id);
	text_end(page);
	text_putf(page, "%s, %s, plafond " PLAFOND_VERSION, started,
	    units_format(took_ns / NS_PER_MS * NS_PER_MS, DIMENSION_TIME, 1,
	    took, sizeof(took)));
	text_end(page);
}

/* Directions that the plan or a trial holds. */
static void
find_shown(const struct record *record, bool shown[DIRECTIONS_SINGLE])
{
	uint64_t directions = record->circuit->plan.directions;
	bool both = (directions >> DIRECTION_BOTH & 1) != 0;

	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++)
		shown[d] = both || (directions >> d & 1) != 0 ||
		    record->verdict->has_achieved[d];
}

void
report_text(const struct record *record, const struct text_style *style,
    FILE *out)
{
	const struct verdict *verdict = record->verdict;
	bool shown[DIRECTIONS_SINGLE];
	struct text_page page;

	find_shown(record, shown);
	text_page_init(&page, style,
	    verdict->target_bps[0] > verdict->target_bps[1]
	    ? verdict->target_bps[0] : verdict->target_bps[1], out);
	print_headline(&page, record, shown);
	print_answer(&page, verdict);
	/* A single one is the answer already. */
	if (count_voids(verdict) > 1)
		print_reasons(&page, verdict, true, "Why void");
	print_target(&page, record, shown);
	text_criteria(&page, verdict);
	text_medians(&page, record);
	if (!record->ceilings[DIRECTION_A_TO_B].reference)
		text_ladder(&page, record, shown);
	print_evidence(&page, verdict);
	text_trials(&page, record);
	print_reasons(&page, verdict, false, "Notes");
	print_ends(&page, record);
	print_footer(&page, record);
}
