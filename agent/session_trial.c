/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A trial, from prepare to the acknowledged measurement; the reference. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <event2/event.h>

#include "log.h"
#include "part.h"
#include "reference.h"
#include "session_inside.h"

bool
session_in_trial(enum session_state state)
{
	return state == SESSION_PREPARED || state == SESSION_OPENING ||
	    state == SESSION_RUNNING || state == SESSION_REPORTING;
}

/* The trial is over here, for better or worse. */
void
session_end_trial(struct session *session)
{
	if (session->part == NULL)
		return;
	part_free(session->part);
	session->part = NULL;
	session->agent->trials--;
	/* what the trial still had to say is of no interest any more */
	if (session->has_pending && session->pending != SESSION_EV_GONE) {
		session->has_pending = false;
		(void)event_del(session->deferred);
	}
}

void
session_say_abort(struct session *session)
{
	struct wire_abort abort;
	char text[1024];

	memset(&abort, 0, sizeof(abort));
	(void)snprintf(abort.reason, sizeof(abort.reason), "%s",
	    error_text(&session->why, text, sizeof(text)));
	log_warning("trial_aborted", "peer=%s reason=\"%s\"",
	    channel_peer_address(session->channel), abort.reason);
	session_send(session, wire_encode(WIRE_ABORT, &abort));
}

/* With both directions the first may be acknowledged while the second runs. */
void
session_end_report(struct session *session)
{
	if (session->state != SESSION_REPORTING ||
	    session->acknowledged < part_directions(session->part))
		return;
	log_info("trial_reported", "peer=%s",
	    channel_peer_address(session->channel));
	session_step(session, SESSION_EV_REPORTED);
}

static void
part_send(json_t *message, void *arg)
{
	session_send(arg, message);
}

static void
part_opened(void *arg)
{
	session_step(arg, SESSION_EV_OPENED);
}

static void
part_finished(void *arg)
{
	struct error none = { .kind = ERROR_NONE };

	session_defer(arg, SESSION_EV_FINISHED, &none);
}

static void
part_failed(const struct error *why, void *arg)
{
	session_defer(arg, SESSION_EV_ABORT, why);
}

int
session_on_prepare(struct session *session, const void *body, struct error *err)
{
	static const struct part_callbacks callbacks = {
		part_send, part_opened, part_finished, part_failed
	};
	struct agent *agent = session->agent;
	struct wire_ready *ready;
	int rc = -1;

	if (session->state != SESSION_IDLE) {
		session_step(session, SESSION_EV_PREPARE);
		return 0;
	}
	ready = calloc(1, sizeof(*ready));
	if (ready == NULL)
		(void)error_errno(err, ERROR_INTERNAL, "a trial");
	else if (agent->trials >= agent->policy.trials_at_once)
		(void)error_set(err, ERROR_BUSY, "busy: this agent already "
		    "runs %u of at most %u trials at once", agent->trials,
		    (unsigned)agent->policy.trials_at_once);
	else
		rc = part_prepare(agent->base, &agent->policy, body,
		    session->zero_ns, &callbacks, session, ready,
		    &session->part, err);
	if (rc == -1)
		session_refuse(session, err->kind == ERROR_BUSY ? "busy" :
		    "policy", err);
	else {
		agent->trials++;
		session->acknowledged = 0;
		session_send(session, wire_encode(WIRE_READY, ready));
		session_step(session, SESSION_EV_PREPARE);
	}
	free(ready);
	return 0;
}

int
session_on_start(struct session *session, const void *body, struct error *err)
{
	if (session->state != SESSION_PREPARED) {
		session_step(session, SESSION_EV_START);
		return 0;
	}
	if (part_start(session->part, body, err) == -1) {
		session_refuse(session, "policy", err);
		session_step(session, SESSION_EV_ABORT);
		return 0;
	}
	session_send(session, wire_encode(WIRE_STARTED, NULL));
	session_step(session, SESSION_EV_START);
	return 0;
}

int
session_on_rows_received(struct session *session, const void *body,
    struct error *err)
{
	uint64_t number;

	(void)err;
	memcpy(&number, body, sizeof(number));
	if (session->part != NULL)
		part_rows_received(session->part, number);
	return 0;
}

int
session_on_measurement_received(struct session *session, const void *body,
    struct error *err)
{
	(void)body;
	(void)err;
	session->acknowledged++;
	session_end_report(session);
	return 0;
}

int
session_on_abort(struct session *session, const void *body, struct error *err)
{
	const struct wire_abort *abort = body;
	char text[2 * WIRE_TEXT_SIZE];

	(void)err;
	log_info("trial_aborted_by_controller", "reason=\"%s\"",
	    log_escape(abort->reason, text, sizeof(text)));
	session_step(session, SESSION_EV_ABORT);
	return 0;
}

static void
on_reference_done(struct reference *reference, uint64_t payload_bps,
    uint64_t cpu_ns, const struct error *why, void *arg)
{
	struct session *session = arg;
	struct wire_reference_result result = { payload_bps, cpu_ns };

	if (why != NULL)
		session_refuse(session, "reference", why);
	else
		session_send(session, wire_encode(WIRE_REFERENCE_RESULT,
		    &result));
	reference_free(reference);
	session->reference = NULL;
}

int
session_on_reference(struct session *session, const void *body,
    struct error *err)
{
	const struct wire_reference *request = body;

	if (session->reference != NULL || session->agent->trials > 0) {
		(void)error_set(err, ERROR_BUSY,
		    "busy: a trial or a reference is running");
		session_refuse(session, "busy", err);
	} else if (reference_start(session->agent->base, request->duration_ns,
	    on_reference_done, session, &session->reference, err) == -1)
		session_refuse(session, "reference", err);
	return 0;
}

