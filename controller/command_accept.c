/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <inttypes.h>
#include <locale.h>
#include <langinfo.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include <openssl/rand.h>

#include "ceiling/ceiling.h"
#include "ceiling/condition.h"
#include "clock.h"
#include "command.h"
#include "conduct/pair.h"
#include "conduct/plan.h"
#include "conduct/preflight.h"
#include "declare/circuit.h"
#include "error.h"
#include "judge/verdict.h"
#include "report/progress.h"
#include "report/record.h"
#include "units.h"

static const struct field options[] = {
	OPTION_FORMAT_ROW(format_text_json),
	OPTION_OUTPUT_ROW,
	OPTION_SET_ROW,
	OPTION_STATE_ROW,
	OPTION_LISTEN_ROW,
	OPTION_AGENT_ROW,
	OPTION_COMMON_ROWS
};

/* One acceptance, from the declaration to the record. */
struct acceptance {
	const struct command_options *given;	/* borrowed */
	const struct circuit *circuit;		/* borrowed */
	char folder[4200];
	char id[RECORD_ID_SIZE];
	uint64_t started_utc_ns;
	struct ceiling ceilings[DIRECTIONS_SINGLE];
	struct pair *pair;			/* owned */
	struct preflight preflight;
	struct host_facts hosts[ENDS];
	struct plan plan;
	struct trial_run *trials;		/* owned; plan.count of them */
	size_t trials_count;
	FILE *rows;				/* owned; beside the record */
	char rows_path[4400];
	bool rows_failed;
	struct error rows_error;
	struct progress progress;
	uint64_t began_ns;			/* of the trial that runs */
	uint64_t typical_ns;			/* of one trial, so far */
	struct verdict verdict;
	bool interrupted;
};

static uint64_t
target_bps(const struct acceptance *a, enum direction direction)
{
	const struct ceiling *ceiling = &a->ceilings[direction];

	if (!ceiling->reference)
		return ceiling->rate_bps[LEVEL_PAYLOAD];
	return a->preflight.ends[END_A].reference_bps == UNKNOWN_U64 ? 0 :
	    a->preflight.ends[END_A].reference_bps;
}

static void
on_progress(const struct trial *trial, const struct wire_progress *progress,
    void *arg)
{
	struct acceptance *a = arg;
	uint64_t now_ns = clock_raw_ns();
	uint64_t spent_ns = now_ns - a->began_ns;
	uint64_t to_come = a->plan.count - trial->number;
	struct progress_view view = {
		.trial = trial->number,
		.trials = a->plan.count,
		.direction = direction_name(progress->direction),
		.phase = progress->phase,
		.payload_bps = progress->rate_bps,
		.target_bps = target_bps(a, progress->direction),
		.reference = a->ceilings[0].reference,
	};

	view.left_ns = (to_come + 1) * a->typical_ns;
	view.left_ns -= spent_ns < view.left_ns ? spent_ns : view.left_ns;
	progress_show(&a->progress, &view, now_ns);
}

/* Interval series are a file beside the record: a line a frame.  Where they
 * cannot be kept the trials go on: their result is worth more. */
static void
on_rows(const struct trial *trial, enum end end, const json_t *message,
    void *arg)
{
	struct acceptance *a = arg;
	json_t *line;
	int rc;

	if (a->rows_failed)
		return;
	line = json_copy((json_t *)(uintptr_t)message);

	(void)json_object_del(line, "type");
	(void)json_object_set_new(line, "trial",
	    json_integer((json_int_t)trial->number));
	(void)json_object_set_new(line, "end", json_string(end_name(end)));
	rc = json_dumpf(line, a->rows, JSON_COMPACT);
	json_decref(line);
	if (rc == 0 && fputc('\n', a->rows) == EOF)
		rc = -1;
	if (rc == -1) {
		a->rows_failed = true;
		(void)error_errno(&a->rows_error, ERROR_WRITE, "'%s'",
		    a->rows_path);
	}
}

static int
open_rows(struct acceptance *a, struct error *err)
{
	char folder[4300];

	(void)snprintf(folder, sizeof(folder), "%s/records", a->folder);
	(void)mkdir(folder, 0700);
	(void)snprintf(a->rows_path, sizeof(a->rows_path), "%s/%s.rows.jsonl",
	    folder, a->id);
	a->rows = fopen(a->rows_path, "wxe");
	if (a->rows == NULL)
		return error_errno(err, ERROR_WRITE, "'%s'", a->rows_path);
	return 0;
}

/* Largest window in a direction: Linux keeps half of a buffer for its own
 * bookkeeping (tcp(7), tcp_adv_win_scale). */
static uint64_t
window_bytes(const struct acceptance *a, enum direction direction)
{
	uint64_t send = a->hosts[direction_sender(direction)]
	    .tcp_send_max_bytes;
	uint64_t receive = a->hosts[direction_receiver(direction)]
	    .tcp_receive_max_bytes;
	uint64_t least = send < receive ? send : receive;

	if (a->circuit->plan.receive_buffer_bytes != 0 &&
	    a->circuit->plan.receive_buffer_bytes < least)
		least = a->circuit->plan.receive_buffer_bytes;
	if (a->circuit->plan.send_buffer_bytes != 0 &&
	    a->circuit->plan.send_buffer_bytes < least)
		least = a->circuit->plan.send_buffer_bytes;
	return least == UNKNOWN_U64 ? 0 : least / 2;
}

static void
make_plan(struct acceptance *a)
{
	struct plan_facts facts = { 0 };

	/* between the ends at most what both are away from us */
	for (int e = 0; e < ENDS; e++)
		if (a->preflight.ends[e].has_clock)
			facts.round_trip_ns +=
			    a->preflight.ends[e].clock.delay_ns;
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		facts.window_bytes[d] = window_bytes(a, (enum direction)d);
	plan_make(a->circuit, a->ceilings, &facts, &a->plan);
	a->typical_ns = a->plan.trials[0].settle_ns +
	    (a->plan.trials[0].settle_extends ? NS_PER_S : 0) +
	    a->plan.trials[0].duration_ns;
}

static int
measure_references(struct acceptance *a, struct error *err)
{
	progress_say(&a->progress, "bare copy loop on the host ...");
	return preflight_reference(a->pair, &a->preflight, err);
}

/* Said once on a terminal, before the load begins. */
static void
announce(struct acceptance *a)
{
	char time[32];

	if (!a->progress.shown)
		return;
	progress_say(&a->progress, "");
	(void)fprintf(stderr, "%zu trials that fill the circuit, at most %s\n",
	    a->plan.count, units_format(plan_duration_ns(&a->plan),
	    DIMENSION_TIME, 0, time, sizeof(time)));
}

/* A request that the agents refuse before anything was measured is an error of
 * the request, not a verdict on the circuit. */
static bool
is_refusal(const struct acceptance *a, const struct trial_run *run)
{
	return a->trials_count == 1 && run->failed &&
	    (run->why.kind == ERROR_REFUSED || run->why.kind == ERROR_BUSY ||
	    run->why.kind == ERROR_INPUT);
}

/* Run the plan as far as it goes.  -1: nothing to judge. */
static int
run_plan(struct acceptance *a, struct error *err)
{
	for (size_t i = 0; i < a->plan.count; i++) {
		struct trial_run *run = &a->trials[i];
		int rc;

		a->began_ns = clock_raw_ns();
		rc = pair_run(a->pair, &a->plan.trials[i], run, err);
		a->trials_count = i + 1;
		if (is_refusal(a, run)) {
			*err = run->why;
			return -1;
		}
		if (rc == -1) {
			a->interrupted = err->kind == ERROR_INTERRUPTED;
			return 0;
		}
		a->typical_ns = clock_raw_ns() - a->began_ns;
	}
	return 0;
}

static void
judge(struct acceptance *a)
{
	struct verdict_input input = {
		.circuit = a->circuit,
		.ceilings = a->ceilings,
		.trials = a->trials,
		.trials_count = a->trials_count,
		.trials_planned = a->plan.count,
		.hosts = a->hosts,
		.interrupted = a->interrupted,
	};

	for (int e = 0; e < ENDS; e++) {
		const struct preflight_end *end = &a->preflight.ends[e];

		input.reference_bps[e] = end->reference_bps;
		input.rate_limit_bps[e] = end->capability->highest_rate_bps;
	}
	verdict_judge(&input, &a->verdict);
}

static struct text_style
style_of(FILE *out)
{
	struct text_style style = { .columns = 80 };

	(void)setlocale(LC_CTYPE, "");
	style.ascii = strcmp(nl_langinfo(CODESET), "UTF-8") != 0;
	style.colour = isatty(fileno(out)) == 1 && getenv("NO_COLOR") == NULL;
	return style;
}

static int
print(const struct acceptance *a, const struct record *record,
    const json_t *json, struct error *err)
{
	struct text_style style;
	FILE *out;

	if (command_output_open(a->given, &out, err) == -1)
		return -1;
	style = style_of(out);
	if (a->given->format == FORMAT_JSON) {
		(void)json_dumpf(json, out, RECORD_DUMP_FLAGS);
		(void)fputc('\n', out);
	} else
		report_text(record, &style, out);
	return command_output_close(a->given, out, err);
}

/* What was buffered may fail only now. */
static void
close_rows(struct acceptance *a)
{
	if (a->rows == NULL)
		return;
	if (fclose(a->rows) == EOF && !a->rows_failed) {
		a->rows_failed = true;
		(void)error_errno(&a->rows_error, ERROR_WRITE, "'%s'",
		    a->rows_path);
	}
	a->rows = NULL;
}

/* The report is shown even where the record cannot be kept: nothing that was
 * measured is lost to the person who waited for it. */
static int
report(struct acceptance *a, struct error *err)
{
	struct record record = {
		.task = "acceptance",
		.started_utc_ns = a->started_utc_ns,
		.finished_utc_ns = clock_utc_ns(),
		.circuit = a->circuit,
		.ceilings = a->ceilings,
		.hosts = a->hosts,
		.trials = a->trials,
		.trials_count = a->trials_count,
		.trials_planned = a->plan.count,
		.verdict = &a->verdict,
	};
	struct error not_kept;
	char path[4400];
	json_t *json;
	int kept, shown;

	memcpy(record.id, a->id, sizeof(record.id));
	for (int e = 0; e < ENDS; e++)
		record.reference_bps[e] = a->preflight.ends[e].reference_bps;
	json = record_to_json(&record);
	close_rows(a);
	kept = record_keep(json, a->folder, a->id, path, sizeof(path),
	    &not_kept);
	shown = print(a, &record, json, err);
	json_decref(json);
	if (shown == 0 && kept == 0 && a->given->quiet == 0)
		(void)fprintf(stderr, "record kept as %s\n", path);
	if (shown == -1)
		return -1;
	if (kept == -1)
		*err = not_kept;
	else if (a->rows_failed)
		*err = a->rows_error;
	return kept == -1 || a->rows_failed ? -1 : 0;
}

static int
conduct(struct acceptance *a, struct error *err)
{
	if (measure_references(a, err) == -1)
		return -1;
	make_plan(a);
	announce(a);
	a->trials = calloc(a->plan.count, sizeof(*a->trials));
	if (a->trials == NULL)
		return error_errno(err, ERROR_INTERNAL, "trials");
	if (run_plan(a, err) == -1)
		return -1;
	/* a reference is the larger of before and after */
	if (a->ceilings[0].reference && !a->interrupted &&
	    a->trials_count == a->plan.count &&
	    measure_references(a, err) == -1)
		return -1;
	return 0;
}

/* With the conditions that the declaration states. */
static int
make_ceilings(struct acceptance *a, struct error *err)
{
	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		const struct load load = { .direction = (enum direction)d,
			.protocol = PROTOCOL_TCP };

		if (ceiling_of_load(a->circuit, &load, &a->ceilings[d],
		    err) == -1 || condition_add_declared(a->circuit, &load,
		    &a->ceilings[d], err) == -1)
			return -1;
	}
	return 0;
}

static int
begin(struct acceptance *a, struct error *err)
{
	struct pair_config config = {
		.circuit = a->circuit,
		.state_folder = a->folder,
		.listen = a->given->listen,
		.agent_program = a->given->agent_program,
		.progress = on_progress,
		.rows = on_rows,
		.arg = a,
	};
	unsigned char random[10];

	if (make_ceilings(a, err) == -1)
		return -1;
	if (RAND_bytes(random, sizeof(random)) != 1)
		return error_set(err, ERROR_INTERNAL, "no random numbers");
	a->started_utc_ns = clock_utc_ns();
	record_make_id(a->started_utc_ns, random, a->id);
	if (command_state_folder(a->given, a->folder, sizeof(a->folder),
	    err) == -1 || pair_open(&config, &a->pair, err) == -1 ||
	    open_rows(a, err) == -1)
		return -1;
	preflight_look(a->pair, a->circuit, &a->preflight);
	for (int e = 0; e < ENDS; e++)
		a->hosts[e] = *a->preflight.ends[e].host;
	return 0;
}

/* A condition explains a shortfall and never lowers the ceiling. */
static int
add_conditions(struct acceptance *a, struct error *err)
{
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		for (int e = 0; e < ENDS; e++) {
			char name[64];
			uint64_t bps = a->preflight.ends[e].reference_bps;

			if (bps == UNKNOWN_U64)
				continue;
			(void)snprintf(name, sizeof(name),
			    "host of end %s", end_name((enum end)e));
			if (ceiling_add_condition(&a->ceilings[d], name, bps,
			    "bare copy loop through its own loopback",
			    err) == -1)
				return -1;
		}
	return 0;
}

static int
accept_circuit(const struct command_options *given,
    const struct circuit *circuit, struct error *err)
{
	struct acceptance *a = calloc(1, sizeof(*a));
	int rc;

	if (a == NULL)
		return error_errno(err, ERROR_INTERNAL, "an acceptance");
	a->given = given;
	a->circuit = circuit;
	progress_init(&a->progress, given->quiet > 0);
	rc = begin(a, err);
	if (rc == 0)
		rc = conduct(a, err);
	progress_say(&a->progress, "");
	if (rc == 0)
		rc = add_conditions(a, err);
	if (rc == 0) {
		judge(a);
		rc = report(a, err);
	} else if (a->rows != NULL)
		(void)unlink(a->rows_path);
	close_rows(a);
	if (rc == 0)
		rc = outcome_exit_status(a->verdict.outcome);
	pair_close(a->pair);
	free(a->trials);
	free(a);
	return rc;
}

static int
run(const struct command_options *given, int argc, char *const argv[],
    struct error *err)
{
	struct circuit *circuit;
	int rc;

	(void)argc;
	if (command_read_circuit(given, argv[0], &circuit, err) == -1)
		return -1;
	rc = accept_circuit(given, circuit, err);
	circuit_free(circuit);
	return rc;
}

const struct command command_accept = {
	.name = "accept",
	.arguments = "FILE",
	.arguments_min = 1,
	.arguments_max = 1,
	.summary = "measure the circuit against its ceiling, with a verdict",
	.description =
	    "Reaches both agents of the circuit declared in FILE, runs the "
	    "plan's TCP trials\n(by default 7 of 3 s in each direction), sets "
	    "the median beside the ceiling that\nmedium, contract and "
	    "overhead allow, judges it, and keeps a record.\n\n"
	    "A load test fills the circuit: everybody who uses it will "
	    "notice. Run it only\nwith the consent of those concerned, in an "
	    "agreed window.\n\n"
	    "Exit status: 0 meets, 1 falls short, 2 undecided, 3 void.",
	.options = options,
	.run = run,
};
