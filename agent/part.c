/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "part.h"

#include <assert.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include <openssl/crypto.h>
#include <openssl/rand.h>

#include "clock.h"
#include "door.h"
#include "error.h"
#include "handover.h"
#include "hex.h"
#include "host.h"
#include "log.h"
#include "policy.h"
#include "transfer.h"

#define RUN_MARGIN_NS UINT64_C(20000000000)

/* One direction that this agent sends or receives. */
struct flow {
	struct part *part;		/* borrowed: outlives us */
	bool present;
	bool is_sender;
	enum direction direction;
	int fds[TRIAL_STREAMS_MAX];	/* owned until a transfer takes them */
	size_t open;
	struct transfer *transfer;	/* owned */
	struct handover *handover;	/* owned; rows on their way */
	uint64_t interface_bytes;	/* at the start */
	bool over;
};

struct part {
	struct event_base *base;	/* borrowed: outlives us */
	const struct policy *policy;	/* borrowed: outlives us */
	struct wire_prepare prepare;
	struct host_facts host;		/* for the interface's name */
	uint64_t session_zero_ns;
	struct flow flows[DIRECTIONS_SINGLE];
	unsigned char tokens[TRIAL_STREAMS_MAX][TRIAL_TOKEN_BYTES];
	struct door *door;		/* owned; NULL where this end opens */
	struct knock *knock;		/* owned */
	struct handover_counter counter;	/* frames of this trial */
	struct part_callbacks callbacks;
	void *arg;
};

static bool
all_over(const struct part *part)
{
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		if (part->flows[d].present && !part->flows[d].over)
			return false;
	return true;
}

static void
on_row(struct transfer *transfer, const struct transfer_row *row, void *arg)
{
	struct flow *flow = arg;
	struct part *part = flow->part;
	struct error why;

	(void)transfer;
	if (handover_row(flow->handover, row, &why) == -1)
		part->callbacks.failed(&why, part->arg);
}

/* What the kernel counted at the interface of this flow, or UNKNOWN_U64. */
static uint64_t
count_interface(const struct flow *flow)
{
	return host_interface_bytes(flow->part->host.interface,
	    flow->is_sender);
}

/* Say why, to the log and to the controller. */
static void
lose(const struct flow *flow, const struct error *why,
    struct measurement *measurement)
{
	char text[1024];

	(void)snprintf(measurement->why, sizeof(measurement->why), "%s",
	    error_text(why, text, sizeof(text)));
	log_warning("transfer_lost", "direction=%s reason=\"%s\"",
	    direction_name(flow->direction), measurement->why);
}

static void
on_done(struct transfer *transfer, enum measurement_end end,
    const struct error *why, void *arg)
{
	struct flow *flow = arg;
	struct part *part = flow->part;
	struct measurement measurement;
	uint64_t now_bytes = count_interface(flow);

	transfer_totals(transfer, &measurement);
	measurement.end = end;
	memset(measurement.why, 0, sizeof(measurement.why));
	if (end == MEASUREMENT_PEER_LOST)
		lose(flow, why, &measurement);
	measurement.interface_bytes = UNKNOWN_U64;
	if (now_bytes != UNKNOWN_U64 && flow->interface_bytes != UNKNOWN_U64)
		measurement.interface_bytes = now_bytes -
		    flow->interface_bytes;
	handover_finish(flow->handover, &measurement);
	flow->over = true;
	if (all_over(part))
		part->callbacks.finished(part->arg);
}

static int
flow_run(struct flow *flow, struct error *err)
{
	static const struct transfer_callbacks callbacks = { on_row, on_done };
	struct part *part = flow->part;
	struct trial trial = part->prepare.trial;
	struct transfer_config config = {
		.trial = &trial,
		.direction = flow->direction,
		.is_sender = flow->is_sender,
		.fds = flow->fds,
		.session_zero_ns = part->session_zero_ns,
	};

	if (part->policy->highest_rate_bps != 0 &&
	    (trial.rate_limit_bps == 0 ||
	    trial.rate_limit_bps > part->policy->highest_rate_bps))
		trial.rate_limit_bps = part->policy->highest_rate_bps;
	flow->interface_bytes = count_interface(flow);
	flow->open = 0;		/* the transfer takes them, also on failure */
	return transfer_start(part->base, &config, &callbacks, flow,
	    &flow->transfer, err);
}

static void
on_opened(enum direction direction, size_t stream, int fd, void *arg)
{
	struct part *part = arg;
	struct flow *flow = &part->flows[direction];
	struct error why;

	flow->fds[stream] = fd;
	flow->open++;
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		if (part->flows[d].present &&
		    part->flows[d].open < part->prepare.trial.streams)
			return;
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		if (part->flows[d].present &&
		    flow_run(&part->flows[d], &why) == -1) {
			part->callbacks.failed(&why, part->arg);
			return;
		}
	part->callbacks.opened(part->arg);
}

static void
on_knock_failed(const struct error *why, void *arg)
{
	struct part *part = arg;

	part->callbacks.failed(why, part->arg);
}

static bool
opens_here(const struct part *part)
{
	return part->prepare.trial.opens == part->prepare.end;
}

static int
make_flow(struct part *part, enum direction direction, struct wire_ready *ready,
    struct error *err)
{
	struct flow *flow = &part->flows[direction];
	const struct trial *trial = &part->prepare.trial;

	flow->part = part;
	flow->direction = direction;
	flow->present = direction_has(trial->direction, direction);
	if (!flow->present)
		return 0;
	flow->is_sender = direction_sender(direction) == part->prepare.end;
	flow->handover = handover_new(direction, flow->is_sender,
	    &part->counter, part->callbacks.send, part->arg);
	if (flow->handover == NULL)
		return error_errno(err, ERROR_INTERNAL, "a trial");
	for (size_t i = 0; i < trial->streams; i++)
		flow->fds[i] = -1;
	if (flow->is_sender)
		return 0;
	/* the receiving agent makes a token per stream: its consent */
	if (RAND_bytes(part->tokens[0], (int)(trial->streams *
	    TRIAL_TOKEN_BYTES)) != 1)
		return error_set(err, ERROR_INTERNAL, "no random numbers");
	ready->tokens_count = trial->streams;
	for (size_t i = 0; i < trial->streams; i++)
		hex_text(part->tokens[i], TRIAL_TOKEN_BYTES, ready->tokens[i]);
	return 0;
}

int
part_prepare(struct event_base *base, const struct policy *policy,
    const struct wire_prepare *prepare, uint64_t session_zero_ns,
    const struct part_callbacks *callbacks, void *arg,
    struct wire_ready *ready, struct part **out, struct error *err)
{
	struct part *part;
	uint16_t port = (uint16_t)policy->data_port;

	if (policy_check_trial(policy, &prepare->trial, err) == -1)
		return -1;
	part = calloc(1, sizeof(*part));
	if (part == NULL)
		return error_errno(err, ERROR_INTERNAL, "a trial");
	part->base = base;
	part->policy = policy;
	part->prepare = *prepare;
	part->session_zero_ns = session_zero_ns;
	part->callbacks = *callbacks;
	part->arg = arg;
	host_read_facts(prepare->local, prepare->interface, &part->host);
	memset(ready, 0, sizeof(*ready));
	if (make_flow(part, DIRECTION_A_TO_B, ready, err) == -1 ||
	    make_flow(part, DIRECTION_B_TO_A, ready, err) == -1)
		goto fail;
	if (!opens_here(part) && door_open(base, policy, &prepare->trial,
	    prepare->local, prepare->interface,
	    (unsigned)policy->trials_at_once, &port, &part->door, err) == -1)
		goto fail;
	ready->data_port = port != 0 ? port : 1;
	(void)snprintf(ready->local, sizeof(ready->local), "%s",
	    prepare->local);
	*out = part;
	return 0;
fail:
	part_free(part);
	return -1;
}

/* All streams of both directions with their tokens, at the opening end. */
static size_t
list_openings(const struct part *part, const struct wire_start *start,
    struct opening out[])
{
	size_t count = 0;

	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		const struct flow *flow = &part->flows[d];

		for (size_t i = 0; flow->present &&
		    i < part->prepare.trial.streams; i++) {
			struct opening *opening = &out[count++];

			opening->direction = flow->direction;
			opening->stream = i;
			if (flow->is_sender)
				/* the wire has checked the digits */
				(void)hex_octets(start->tokens[i],
				    TRIAL_TOKEN_BYTES, opening->token);
			else
				memcpy(opening->token, part->tokens[i],
				    TRIAL_TOKEN_BYTES);
		}
	}
	return count;
}

int
part_start(struct part *part, const struct wire_start *start,
    struct error *err)
{
	struct opening openings[2 * TRIAL_STREAMS_MAX];
	const struct trial *trial = &part->prepare.trial;
	struct sockaddr_storage address;
	size_t count, sent = 0;
	unsigned length;
	int rc;

	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		if (part->flows[d].present && part->flows[d].is_sender)
			sent = trial->streams;
	if (start->tokens_count != sent)
		return error_set(err, ERROR_PEER, "found %zu tokens, allowed "
		    "%zu: one a stream that this agent sends",
		    start->tokens_count, sent);
	if (address_make(start->peer, (uint16_t)start->peer_port, &address,
	    &length, err) == -1)
		return -1;
	if (!policy_allows_peer(part->policy, (struct sockaddr *)&address))
		return error_set(err, ERROR_REFUSED, "this agent's policy "
		    "does not name %s among its peers", start->peer);
	count = list_openings(part, start, openings);
	if (opens_here(part))
		rc = knock_start(part->base, trial,
		    part->prepare.local, part->prepare.interface, start->peer,
		    (uint16_t)start->peer_port, openings, count, on_opened,
		    on_knock_failed, part, &part->knock, err);
	else
		rc = door_expect(part->door, openings, count, on_opened, part,
		    err);
	OPENSSL_cleanse(openings, sizeof(openings));
	return rc;
}

void
part_rows_received(struct part *part, uint64_t number)
{
	handover_received(&part->counter, number);
}

uint64_t
part_limit_ns(const struct part *part)
{
	return TRIAL_SETTLE_MAX_NS + part->prepare.trial.duration_ns +
	    RUN_MARGIN_NS;
}

unsigned
part_directions(const struct part *part)
{
	return part->prepare.trial.direction == DIRECTION_BOTH ? 2 : 1;
}

void
part_free(struct part *part)
{
	if (part == NULL)
		return;
	knock_free(part->knock);
	door_free(part->door);
	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		struct flow *flow = &part->flows[d];

		transfer_free(flow->transfer);
		handover_free(flow->handover);
		for (size_t i = 0; flow->open > 0 &&
		    i < part->prepare.trial.streams; i++)
			if (flow->fds[i] != -1)
				(void)close(flow->fds[i]);
	}
	OPENSSL_cleanse(part->tokens, sizeof(part->tokens));
	free(part);
}
