/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "judge/validity.h"

#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "error.h"
#include "wire.h"

/* From this share of one core on a worker is taken to be the limit: what is
 * left goes to interrupts and to the reading of the clocks (our own figure). */
#define WORKER_BUSY_PPM 970000
/* A hypervisor that takes so much of a trial's time is worth a word (ours). */
#define STOLEN_RATIO 0.01

#define RATE_TEXT_SIZE 32

static const char *
rate_text(uint64_t bps, char buf[RATE_TEXT_SIZE])
{
	return units_format(bps, DIMENSION_RATE, 3, buf, RATE_TEXT_SIZE);
}

bool
validity_planned(const struct verdict_input *input, enum direction direction)
{
	return (input->circuit->plan.directions >> direction & 1) != 0;
}

/* The next counted trial of one direction alone from *at on; NULL: no more. */
static const struct direction_run *
next_counted(const struct verdict_input *input, enum direction direction,
    size_t *at, const struct trial **trial)
{
	while (*at < input->trials_count) {
		const struct trial_run *run = &input->trials[(*at)++];

		if (run->trial.direction != direction ||
		    !trial_run_counts(run, direction))
			continue;
		if (trial != NULL)
			*trial = &run->trial;
		return &run->directions[direction];
	}
	return NULL;
}

static void
check_interrupted(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	(void)direction;
	if (input->interrupted)
		verdict_add_reason(verdict, "interrupted", "the task was "
		    "stopped after %zu of %zu trials", input->trials_count,
		    input->trials_planned);
}

static bool
run_is_sound(const struct trial_run *run)
{
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++)
		if (direction_has(run->trial.direction, (enum direction)d) &&
		    !trial_run_counts(run, (enum direction)d))
			return false;
	return true;
}

static void
check_failed(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	const struct trial_run *first = NULL;
	char text[sizeof(first->why.where) + sizeof(first->why.cause) + 4];
	size_t count = 0;

	(void)direction;
	for (size_t i = 0; i < input->trials_count; i++) {
		if (run_is_sound(&input->trials[i]))
			continue;
		if (count++ == 0)
			first = &input->trials[i];
	}
	/* The trial that an interrupt cuts short is not a second reason. */
	if (count == 0 || (input->interrupted && count == 1))
		return;
	if (first->failed && first->why.kind != ERROR_NONE)
		(void)error_text(&first->why, text, sizeof(text));
	else
		(void)snprintf(text, sizeof(text),
		    "the receiver's window did not close");
	verdict_add_reason(verdict, "trial-failed", "%zu of %zu trials failed;"
	    " trial %" PRIu64 ": %s", count, input->trials_planned,
	    first->trial.number, text);
}

static void
check_missing(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	(void)direction;
	if (input->trials_count < input->trials_planned &&
	    !input->interrupted && verdict_void_reason(verdict) == NULL)
		verdict_add_reason(verdict, "trials-missing", "only %zu of %zu "
		    "planned trials were run", input->trials_count,
		    input->trials_planned);
}

static void
check_no_trial(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	if (validity_planned(input, direction) &&
	    !verdict->has_achieved[direction])
		verdict_add_reason(verdict, "no-valid-trial",
		    "%s has no valid trial", direction_name(direction));
}

static void
check_reference(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	(void)direction;
	if (input->ceilings[DIRECTION_A_TO_B].reference &&
	    verdict_target_bps(input, DIRECTION_A_TO_B) == 0)
		verdict_add_reason(verdict, "no-reference",
		    "the host reference was not measured");
}

static void
check_host(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	uint64_t ceiling_bps = verdict_target_bps(input, direction);
	enum end ends[] = { direction_sender(direction),
		direction_receiver(direction) };
	char found[RATE_TEXT_SIZE], wanted[RATE_TEXT_SIZE];

	if (input->ceilings[direction].reference ||
	    !verdict->has_achieved[direction])
		return;
	for (size_t i = 0; i < 2; i++) {
		uint64_t host_bps = input->reference_bps[ends[i]];

		if (host_bps == UNKNOWN_U64 || host_bps >= ceiling_bps)
			continue;
		verdict_add_reason(verdict, "host-limit", "the host at end %s "
		    "moves %s in memory, less than the %s ceiling of %s: our "
		    "limit, not the circuit's", end_name(ends[i]),
		    rate_text(host_bps, found), direction_name(direction),
		    rate_text(ceiling_bps, wanted));
	}
}

static void
check_rate_limit(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	uint64_t ceiling_bps = verdict_target_bps(input, direction);
	enum end sender = direction_sender(direction);
	uint64_t limit_bps = input->rate_limit_bps[sender];
	char found[RATE_TEXT_SIZE], wanted[RATE_TEXT_SIZE];

	if (input->ceilings[direction].reference || limit_bps == 0 ||
	    limit_bps == UNKNOWN_U64 || limit_bps >= ceiling_bps ||
	    !verdict->has_achieved[direction])
		return;
	verdict_add_reason(verdict, "rate-limit", "the policy of the agent at "
	    "end %s allows %s, less than the %s ceiling of %s",
	    end_name(sender), rate_text(limit_bps, found),
	    direction_name(direction), rate_text(ceiling_bps, wanted));
}

/* Highest median that clock tolerance and burst allowance explain:
 * ceiling (1 + tolerance) + 8 burst / T. */
static double
allowed_bps(const struct verdict_input *input, enum direction direction)
{
	const struct ceiling *ceiling = &input->ceilings[direction];
	const struct direction_run *way;
	uint64_t least_ns = UINT64_MAX;
	/* One more: the rate in the struct was rounded down. */
	double bps = (double)ceiling->rate_bps[LEVEL_PAYLOAD] *
	    (1 + (double)ceiling->tolerance_ppm * 1e-6) + 1;
	size_t at = 0;

	while ((way = next_counted(input, direction, &at, NULL)) != NULL)
		if (way->duration_ns > 0 && way->duration_ns < least_ns)
			least_ns = way->duration_ns;
	if (least_ns != UINT64_MAX)
		bps += (double)rate_bps(ceiling->burst_bytes, least_ns);
	return bps;
}

/* A medium's ceiling that is not exact can be too low by its own error, or by
 * acknowledgements that the receiver left out. */
static bool
is_estimate(const struct ceiling *ceiling)
{
	const struct bound *bound = ceiling_binding(ceiling);

	return bound != NULL && bound->class == BOUND_MEDIUM &&
	    (ceiling->accuracy != ACCURACY_EXACT ||
	    ceiling->segments_per_ack > 0);
}

static void
check_above(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	double achieved_bps = verdict->achieved_bps[direction].median;
	char found[RATE_TEXT_SIZE], wanted[RATE_TEXT_SIZE];

	if (input->ceilings[direction].reference ||
	    !verdict->has_achieved[direction] ||
	    achieved_bps <= allowed_bps(input, direction))
		return;
	if (is_estimate(&input->ceilings[direction])) {
		verdict_add_note(verdict, "above-estimate", "%s achieved %s, "
		    "above its ceiling of %s, which is %s: the medium's "
		    "parameters or the estimate are too low",
		    direction_name(direction),
		    rate_text((uint64_t)achieved_bps, found),
		    rate_text(verdict_target_bps(input, direction), wanted),
		    accuracy_name(input->ceilings[direction].accuracy));
		return;
	}
	verdict_add_reason(verdict, "above-ceiling", "%s achieved %s, above "
	    "its ceiling of %s by more than clock and burst allow: the "
	    "declaration is wrong; usual reasons: a token bucket (`burst`), "
	    "the layer where the rate is counted (`counted-at`), the start "
	    "of the clock", direction_name(direction),
	    rate_text((uint64_t)achieved_bps, found),
	    rate_text(verdict_target_bps(input, direction), wanted));
}

/* Trials that missed the requirement while a worker had no time left. */
static void
check_cpu(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	double target_bps = (double)verdict_target_bps(input, direction);
	size_t missed = 0, sender = 0, receiver = 0, at = 0;
	const struct criterion_outcome *row = NULL;
	const struct direction_run *way;

	/* Memory's own limit is the processor: nothing to find fault with. */
	if (input->ceilings[direction].reference)
		return;
	for (size_t i = 0; i < verdict->criteria_count && row == NULL; i++)
		if (verdict->criteria[i].direction == direction &&
		    verdict->criteria[i].judged &&
		    verdict->criteria[i].outcome != OUTCOME_MEETS)
			row = &verdict->criteria[i];
	if (row == NULL)
		return;
	while ((way = next_counted(input, direction, &at, NULL)) != NULL) {
		if ((double)way->payload_bps >= row->required * target_bps)
			continue;
		missed++;
		sender += way->sender_reported &&
		    way->sender.cpu_busiest_ratio_ppm != UNKNOWN_U64 &&
		    way->sender.cpu_busiest_ratio_ppm >= WORKER_BUSY_PPM;
		receiver +=
		    way->receiver.cpu_busiest_ratio_ppm != UNKNOWN_U64 &&
		    way->receiver.cpu_busiest_ratio_ppm >= WORKER_BUSY_PPM;
	}
	if (sender > 0)
		verdict_add_reason(verdict, "sender-cpu", "in %zu of %zu %s "
		    "trials below the requirement a sending worker used up "
		    "its core at end %s: our limit, not the circuit's", sender,
		    missed, direction_name(direction),
		    end_name(direction_sender(direction)));
	if (receiver > 0)
		verdict_add_reason(verdict, "receiver-cpu", "in %zu of %zu %s "
		    "trials below the requirement a receiving worker used up "
		    "its core at end %s: our limit, not the circuit's",
		    receiver, missed, direction_name(direction),
		    end_name(direction_receiver(direction)));
}

/* The interface counts at least what the receiver counted, headers and the
 * settle time besides; what was only handed to the kernel may never leave. */
static void
check_elsewhere(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	enum end sender = direction_sender(direction);
	const struct direction_run *way;
	size_t count = 0, at = 0;

	while ((way = next_counted(input, direction, &at, NULL)) != NULL)
		count += way->interface_bytes != UNKNOWN_U64 &&
		    way->interface_bytes < way->bytes;
	if (count > 0)
		verdict_add_reason(verdict, "load-elsewhere", "in %zu %s "
		    "trials the interface%s%s at end %s sent fewer bytes than "
		    "were received: the load left by another way", count,
		    direction_name(direction),
		    input->circuit->ends[sender].interface[0] != '\0' ? " "
		    : "", input->circuit->ends[sender].interface,
		    end_name(sender));
}

static void
note_both(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	size_t count = 0;

	(void)direction;
	for (size_t i = 0; i < input->trials_count; i++)
		count += input->trials[i].trial.direction == DIRECTION_BOTH;
	if (count > 0)
		verdict_add_note(verdict, "both-reported", "trials of both "
		    "directions at once are reported, not judged");
}

static void
note_congestion_control(const struct verdict_input *input,
    enum direction direction, struct verdict *verdict)
{
	enum end sender = direction_sender(direction);
	const struct direction_run *way;
	const char *own;
	size_t at = 0;

	if (input->hosts == NULL)
		return;
	own = input->hosts[sender].default_congestion_control;
	while ((way = next_counted(input, direction, &at, NULL)) != NULL) {
		const char *used = way->sender.congestion_control;

		if (!way->sender_reported || used[0] == '\0' ||
		    own[0] == '\0' || strcmp(used, own) == 0)
			continue;
		verdict_add_note(verdict, "congestion-control", "%s used "
		    "congestion control %s; the default of the host at end %s "
		    "is %s", direction_name(direction), used, end_name(sender),
		    own);
		return;
	}
}

static void
note_unsettled(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	const struct direction_run *way;
	const struct trial *trial = NULL;
	size_t count = 0, all = 0, at = 0;

	while ((way = next_counted(input, direction, &at, &trial)) != NULL) {
		all++;
		count += trial->settle_extends && !way->receiver.settled;
	}
	if (count > 0)
		verdict_add_note(verdict, "not-settled", "in %zu of %zu %s "
		    "trials two means of 1 s still differed by 1 %% or more "
		    "after 10 s of settling", count, all,
		    direction_name(direction));
}

static void
note_segment_size(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	const struct ceiling *ceiling = &input->ceilings[direction];
	const struct direction_run *way;
	uint64_t declared;
	size_t at = 0;

	if (ceiling->reference || ceiling->protocol != PROTOCOL_TCP ||
	    ceiling->level_bytes_den == 0)
		return;
	declared = (uint64_t)(ceiling->level_bytes_num[LEVEL_PAYLOAD] /
	    ceiling->level_bytes_den);
	while ((way = next_counted(input, direction, &at, NULL)) != NULL) {
		uint64_t mss =
		    way->sender.last.value[TCP_SAMPLE_snd_mss_bytes];

		if (!way->sender_reported || mss == UNKNOWN_U64 ||
		    mss == declared)
			continue;
		verdict_add_note(verdict, "segment-size", "%s sent segments of "
		    "%" PRIu64 " B; the declared layers and MTU give %" PRIu64
		    " B", direction_name(direction), mss, declared);
		return;
	}
}

static double
stolen_ratio(const struct measurement *m)
{
	if (m->steal_ns == UNKNOWN_U64 || m->elapsed_ns == 0)
		return 0;
	return (double)m->steal_ns / (double)m->elapsed_ns;
}

static void
note_stolen(const struct verdict_input *input, enum direction direction,
    struct verdict *verdict)
{
	const struct direction_run *way;
	double most[ENDS] = { 0, 0 };
	char text[128] = "";
	size_t at = 0, used = 0;

	while ((way = next_counted(input, direction, &at, NULL)) != NULL) {
		enum end sender = direction_sender(direction);
		enum end receiver = direction_receiver(direction);

		if (way->sender_reported)
			most[sender] = fmax(most[sender],
			    stolen_ratio(&way->sender));
		most[receiver] = fmax(most[receiver],
		    stolen_ratio(&way->receiver));
	}
	for (size_t end = 0; end < ENDS; end++) {
		if (most[end] < STOLEN_RATIO)
			continue;
		used += (size_t)snprintf(text + used, sizeof(text) - used,
		    "%s %.1f %%%s at end %s", used == 0 ? "" : ",",
		    100 * most[end], used == 0 ? " of a trial's time was "
		    "stolen from the machine" : "", end_name((enum end)end));
	}
	if (used > 0)
		verdict_add_note(verdict, "stolen-time", "%s: up to%s",
		    direction_name(direction), text);
}

/* In the order in which a reader wants them: the cause before its effects. */
static const struct check {
	bool per_direction;
	void (*run)(const struct verdict_input *input,
	    enum direction direction, struct verdict *verdict);
} checks[] = {
	{ false, check_interrupted },
	{ false, check_failed },
	{ false, check_missing },
	{ true, check_no_trial },
	{ true, check_above },
	{ true, check_elsewhere },
	{ true, check_rate_limit },
	{ true, check_host },
	{ true, check_cpu },
	{ false, check_reference },
	{ false, note_both },
	{ true, note_congestion_control },
	{ true, note_segment_size },
	{ true, note_unsettled },
	{ true, note_stolen },
};

void
validity_examine(const struct verdict_input *input, struct verdict *verdict)
{
	for (size_t i = 0; i < sizeof(checks) / sizeof(*checks); i++) {
		checks[i].run(input, DIRECTION_A_TO_B, verdict);
		if (checks[i].per_direction)
			checks[i].run(input, DIRECTION_B_TO_A, verdict);
	}
}
