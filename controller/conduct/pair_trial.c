/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One trial with both agents, and the reference of a host. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "clock.h"
#include "conduct/pair_inside.h"
/* --- the host's reference ---------------------------------------------- */

static bool
nobody_asking(struct pair *pair)
{
	return pair->links[END_A].state != LINK_ASKING &&
	    pair->links[END_B].state != LINK_ASKING;
}

int
pair_reference(struct pair *pair, enum end end, uint64_t duration_ns,
    uint64_t *payload_bps, struct error *err)
{
	struct link *link = &pair->links[end];

	if (link_ask_reference(link, duration_ns, err) == -1 ||
	    pair_wait_until(pair, nobody_asking, 0, err) == -1)
		return -1;
	if (link->state == LINK_GONE || link->why.kind != ERROR_NONE) {
		*err = link->why;
		return -1;
	}
	*payload_bps = link->reference.payload_bps;
	return 0;
}

/* --- a trial ----------------------------------------------------------- */

void
pair_on_progress(struct link *link, const struct wire_progress *progress,
    void *arg)
{
	struct pair *pair = arg;

	(void)link;
	if (pair->config.progress != NULL)
		pair->config.progress(&pair->run.out->trial, progress,
		    pair->config.arg);
}

void
pair_on_rows(struct link *link, const struct wire_rows *rows,
    const json_t *message, void *arg)
{
	struct pair *pair = arg;
	struct run *run = &pair->run;

	run_rows(run, link->end, rows, message);
	if (pair->config.rows != NULL)
		pair->config.rows(&run->out->trial, link->end, message,
		    pair->config.arg);
}

void
pair_on_measurement(struct link *link, const struct measurement *measurement,
    void *arg)
{
	struct pair *pair = arg;

	run_measurement(&pair->run, link->end, measurement);
}

static bool
none_preparing(struct pair *pair)
{
	for (int e = 0; e < ENDS; e++)
		if (pair->links[e].state == LINK_PREPARING)
			return false;
	return true;
}

static bool
none_starting(struct pair *pair)
{
	for (int e = 0; e < ENDS; e++)
		if (pair->links[e].state == LINK_STARTING)
			return false;
	return true;
}

/* One of them is lost: the other notices and reports, but not for ever. */
static bool
none_running(struct pair *pair)
{
	for (int e = 0; e < ENDS; e++)
		if (pair->links[e].state == LINK_RUNNING)
			return false;
	return true;
}

static bool
settled_or_lost(struct pair *pair)
{
	return none_running(pair) || pair_any_gone(pair) ||
	    pair->links[END_A].why.kind != ERROR_NONE ||
	    pair->links[END_B].why.kind != ERROR_NONE;
}

static int
prepare_both(struct pair *pair, const struct trial *trial, struct error *err)
{
	const struct circuit *circuit = pair->config.circuit;

	for (int e = 0; e < ENDS; e++) {
		struct wire_prepare prepare;

		memset(&prepare, 0, sizeof(prepare));
		prepare.trial = *trial;
		prepare.end = (enum end)e;
		/* behind address translation only the interface may bind */
		if (pair_data_address(circuit, (enum end)e, prepare.local,
		    sizeof(prepare.local), err) == -1)
			return -1;
		(void)snprintf(prepare.interface, sizeof(prepare.interface),
		    "%s", circuit->ends[e].interface);
		if (link_prepare(&pair->links[e], &prepare, err) == -1)
			return -1;
	}
	if (pair_wait_until(pair, none_preparing, 0, err) == -1)
		return -1;
	for (int e = 0; e < ENDS; e++)
		if (pair->links[e].state != LINK_READY) {
			*err = pair->links[e].why;
			return -1;
		}
	return 0;
}

/* Tokens go from the end that receives to the end that sends. */
static void
fill_start(const struct pair *pair, const struct trial *trial, enum end end,
    struct wire_start *start)
{
	enum end peer = end == END_A ? END_B : END_A;
	const struct wire_ready *ready = &pair->links[peer].ready;
	struct error why;

	memset(start, 0, sizeof(*start));
	(void)pair_data_address(pair->config.circuit, peer, start->peer,
	    sizeof(start->peer), &why);
	start->peer_port = ready->data_port;
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		if (direction_has(trial->direction, (enum direction)d) &&
		    direction_sender((enum direction)d) == end) {
			start->tokens_count = ready->tokens_count;
			memcpy(start->tokens, ready->tokens,
			    sizeof(start->tokens));
		}
}

static int
start_end(struct pair *pair, const struct trial *trial, enum end end,
    struct error *err)
{
	struct wire_start *start = malloc(sizeof(*start));
	unsigned measurements = trial->direction == DIRECTION_BOTH ? 2 : 1;

	if (start == NULL)
		return error_errno(err, ERROR_INTERNAL, "a trial");
	fill_start(pair, trial, end, start);
	(void)link_start(&pair->links[end], start, measurements, err);
	free(start);
	if (pair_wait_until(pair, none_starting, 0, err) == -1)
		return -1;
	/* a short trial may be over already */
	if (pair->links[end].state != LINK_RUNNING &&
	    pair->links[end].why.kind != ERROR_NONE) {
		*err = pair->links[end].why;
		return -1;
	}
	return 0;
}

static int
await_end(struct pair *pair, const struct trial *trial, struct error *err)
{
	uint64_t limit_ns = TRIAL_SETTLE_MAX_NS + trial->duration_ns +
	    2 * WIRE_LIMIT_MAX_NS;
	int rc = pair_wait_until(pair, settled_or_lost, limit_ns, err);

	if (rc == -1)
		return -1;
	if (rc == 1)
		return error_set(err, ERROR_PEER,
		    "the trial did not end in time");
	for (int e = 0; e < ENDS; e++)
		if (pair->links[e].why.kind != ERROR_NONE) {
			*err = pair->links[e].why;
			/* the surviving end says what it saw */
			if (pair_wait_until(pair, none_running, 2 * NS_PER_S,
			    &pair->links[e].why) == -1)
				return pair_interrupted(err);
			return -1;
		}
	return 0;
}

static int
conduct(struct pair *pair, const struct trial *trial, struct error *err)
{
	enum end opener = trial->opens;
	enum end listener = opener == END_A ? END_B : END_A;

	if (prepare_both(pair, trial, err) == -1 ||
	    start_end(pair, trial, listener, err) == -1 ||
	    start_end(pair, trial, opener, err) == -1)
		return -1;
	return await_end(pair, trial, err);
}

int
pair_run(struct pair *pair, const struct trial *trial, struct trial_run *out,
    struct error *err)
{
	struct exchange_sample clocks[ENDS];
	struct error why;

	if (!pair_both_in(pair, LINK_IDLE))
		return pair_any_gone(pair) ? pair_gone_error(pair, err) :
		    error_set(err, ERROR_INTERNAL, "a trial is running");
	if (run_begin(&pair->run, trial, out, err) == -1)
		return -1;
	if (conduct(pair, trial, &why) == -1) {
		out->failed = true;
		out->why = why;
		for (int e = 0; e < ENDS; e++)
			link_abort(&pair->links[e], why.cause);
	}
	for (int e = 0; e < ENDS; e++)
		if (!pair_clock(pair, (enum end)e, &clocks[e]))
			memset(&clocks[e], 0, sizeof(clocks[e]));
	run_finish(&pair->run, clocks);
	if (pair->interrupted)
		return pair_interrupted(err);
	return pair_any_gone(pair) ? pair_gone_error(pair, err) : 0;
}

