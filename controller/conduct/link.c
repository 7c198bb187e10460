/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "conduct/link.h"

#include <assert.h>
#include <fcntl.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/prctl.h>
#include <sys/socket.h>
#include <sys/wait.h>
#include <unistd.h>

#include <event2/event.h>

#include "clock.h"
#include "conduct/link_inside.h"
#include "log.h"

#define EMBEDDED_FD 3		/* where the child finds its socket */

/* The only place that changes the state; it sets the timers too. */
static void
enter(struct link *link, enum link_state state)
{
	uint64_t limit_ns = wire_limit_ns(link_state_limit_ms(state) *
	    NS_PER_MS, link->exchange.largest_delay_ns, WIRE_BEAT_NS);
	struct timeval limit = clock_timeval(limit_ns);

	log_debug("link", "end=%s state=%s next=%s", end_name(link->end),
	    link_state_name(link->state), link_state_name(state));
	link->state = state;
	(void)event_del(link->deadline);
	if (link_state_limit_ms(state) != 0)
		(void)event_add(link->deadline, &limit);
	if (state == LINK_GONE) {
		(void)event_del(link->silence);
		(void)event_del(link->beating);
		channel_free(link->channel);
		link->channel = NULL;
	}
}

void
link_step(struct link *link, enum link_event event)
{
	enum link_state next = link_next(link->state, event);

	if (next == LINK_GONE && link->why.kind == ERROR_NONE)
		(void)error_set(&link->why, ERROR_PEER,
		    "the agent's message is out of turn (%s in %s)",
		    link_event_name(event), link_state_name(link->state));
	enter(link, next);
}

void
link_lose(struct link *link, const struct error *why)
{
	if (link->state == LINK_GONE)
		return;
	link->why = *why;
	if (why->kind == ERROR_NONE)
		(void)error_set(&link->why, ERROR_UNREACHABLE,
		    "the agent closed the connection");
	error_wrap(&link->why, "agent '%s' of end %s", link->declared->name,
	    end_name(link->end));
	link_step(link, LINK_EV_LOST);
}

static void
on_deadline(evutil_socket_t fd, short what, void *arg)
{
	struct link *link = arg;
	struct error why;

	(void)fd;
	(void)what;
	(void)error_set(&why, ERROR_UNREACHABLE,
	    "no answer in time (state %s)", link_state_name(link->state));
	link_lose(link, &why);
}

static void
on_silence(evutil_socket_t fd, short what, void *arg)
{
	struct link *link = arg;
	struct error why;

	(void)fd;
	(void)what;
	(void)error_set(&why, ERROR_UNREACHABLE, "nothing heard for too long");
	link_lose(link, &why);
}

void
link_send(struct link *link, json_t *message)
{
	struct error why;

	if (link->channel == NULL)
		json_decref(message);
	else if (channel_send(link->channel, message, &why) == -1)
		link_lose(link, &why);
}

static void
on_beating(evutil_socket_t fd, short what, void *arg)
{
	struct link *link = arg;
	struct timeval spacing = clock_timeval(WIRE_BEAT_NS);
	struct wire_beat beat = {
		.number = ++link->beats,
		.t1_ns = clock_raw_ns() - link->zero_ns,
		.largest_round_trip_ns = link->exchange.largest_delay_ns,
	};

	(void)fd;
	(void)what;
	if (link->state == LINK_GONE || link->state == LINK_RELAYING)
		return;
	(void)event_add(link->beating, &spacing);
	link_send(link, wire_encode(WIRE_BEAT, &beat));
}

void
link_watch_silence(struct link *link)
{
	struct timeval limit = clock_timeval(wire_limit_ns(NS_PER_S,
	    link->exchange.largest_delay_ns, WIRE_BEAT_NS));

	if (link->state != LINK_GONE && link->state != LINK_GREETING &&
	    link->state != LINK_REACHING)
		(void)event_add(link->silence, &limit);
}

/* --- reaching ---------------------------------------------------------- */

static int
link_use(struct link *link, struct channel *channel)
{
	if (channel == NULL)
		return -1;
	link->channel = channel;
	enter(link, LINK_REACHING);
	return 0;
}

int
link_dial(struct link *link, const char *address, struct error *err)
{
	return link_use(link, channel_dial(link->base, address, link->tls,
	    link_state_limit_ms(LINK_REACHING) * NS_PER_MS,
	    &link_channel_callbacks, link, err));
}

int
link_dial_relay(struct link *link, const struct end_declaration *outer,
    struct error *err)
{
	link->relaying = true;
	link->outer_identity = &outer->identity;
	(void)snprintf(link->relay_name, sizeof(link->relay_name), "%s",
	    link->declared->name);
	return link_dial(link, outer->control, err);
}

void
link_take_called(struct link *link, struct channel *channel)
{
	channel_set_callbacks(channel, &link_channel_callbacks, link);
	(void)link_use(link, channel);
	link_step(link, LINK_EV_OPEN);
	link_say_hello(link);
}

__attribute__((noreturn)) static void
run_child(int fd, const char *program)
{
	char number[16];

	(void)prctl(PR_SET_PDEATHSIG, SIGTERM);
	/* a terminal's interrupt is the controller's to handle */
	(void)setpgid(0, 0);
	/* dup2 to itself would leave close-on-exec set */
	if (fd == EMBEDDED_FD ? fcntl(fd, F_SETFD, 0) == -1 :
	    dup2(fd, EMBEDDED_FD) == -1)
		_exit(71);
	(void)snprintf(number, sizeof(number), "%d", EMBEDDED_FD);
	(void)execl(program, program, "--embedded", number, (char *)NULL);
	_exit(71);
}

int
link_spawn(struct link *link, const char *agent_program, struct error *err)
{
	int fds[2];
	pid_t child;

	if (access(agent_program, X_OK) == -1)
		return error_errno(err, ERROR_ABSENT, "agent program '%s'",
		    agent_program);
	if (socketpair(AF_UNIX, SOCK_STREAM | SOCK_CLOEXEC, 0, fds) == -1)
		return error_errno(err, ERROR_INTERNAL, "a socket pair");
	child = fork();
	if (child == 0)
		run_child(fds[1], agent_program);
	(void)close(fds[1]);
	if (child == -1) {
		(void)close(fds[0]);
		return error_errno(err, ERROR_INTERNAL, "an embedded agent");
	}
	link->child = child;
	return link_use(link, channel_pair(link->base, fds[0],
	    &link_channel_callbacks, link, err));
}

/* --- requests ---------------------------------------------------------- */

int
link_prepare(struct link *link, const struct wire_prepare *prepare,
    struct error *err)
{
	json_t *message = wire_encode_prepare(prepare,
	    link->capability.members, err);

	if (message == NULL)
		return -1;
	assert(link->state == LINK_IDLE);
	memset(&link->why, 0, sizeof(link->why));
	link_send(link, message);
	if (link->state == LINK_IDLE)
		link_step(link, LINK_EV_PREPARE);
	return 0;
}

int
link_start(struct link *link, const struct wire_start *start,
    unsigned measurements, struct error *err)
{
	(void)err;
	assert(link->state == LINK_READY);
	link->measurements_due = measurements;
	link_send(link, wire_encode(WIRE_START, start));
	if (link->state == LINK_READY)
		link_step(link, LINK_EV_START);
	return 0;
}

int
link_ask_reference(struct link *link, uint64_t duration_ns, struct error *err)
{
	struct wire_reference request = { duration_ns };

	(void)err;
	assert(link->state == LINK_IDLE);
	memset(&link->why, 0, sizeof(link->why));
	link_send(link, wire_encode(WIRE_REFERENCE, &request));
	if (link->state == LINK_IDLE)
		link_step(link, LINK_EV_ASK);
	return 0;
}

void
link_abort(struct link *link, const char *reason)
{
	struct wire_abort abort;

	if (link->state == LINK_GONE || link->state == LINK_IDLE)
		return;
	memset(&abort, 0, sizeof(abort));
	(void)snprintf(abort.reason, sizeof(abort.reason), "%s", reason);
	link_send(link, wire_encode(WIRE_ABORT, &abort));
	if (link->state != LINK_GONE)
		link_step(link, LINK_EV_ABORT);
}

/* --- life -------------------------------------------------------------- */

int
link_init(struct link *link, struct event_base *base, enum end end,
    const struct end_declaration *declared, struct ssl_ctx_st *tls,
    uint64_t zero_ns, const struct link_callbacks *callbacks, void *arg,
    struct error *err)
{
	memset(link, 0, sizeof(*link));
	link->base = base;
	link->end = end;
	link->declared = declared;
	link->tls = tls;
	link->zero_ns = zero_ns;
	link->callbacks = *callbacks;
	link->arg = arg;
	link->rows = calloc(1, sizeof(*link->rows));
	link->deadline = event_new(base, -1, 0, on_deadline, link);
	link->silence = event_new(base, -1, 0, on_silence, link);
	link->beating = event_new(base, -1, 0, on_beating, link);
	if (link->rows == NULL || link->deadline == NULL ||
	    link->silence == NULL || link->beating == NULL)
		return error_set(err, ERROR_INTERNAL, "out of memory");
	return 0;
}

/* An embedded agent ends when its socket does; it is not waited for longer
 * than a second. */
static void
end_child(pid_t child)
{
	for (int i = 0; i < 100; i++) {
		if (waitpid(child, NULL, WNOHANG) != 0)
			return;
		(void)usleep(10000);
	}
	(void)kill(child, SIGKILL);
	(void)waitpid(child, NULL, 0);
}

void
link_fini(struct link *link)
{
	channel_free(link->channel);
	link->channel = NULL;
	if (link->child > 0)
		end_child(link->child);
	link->child = 0;
	if (link->deadline != NULL)
		event_free(link->deadline);
	if (link->silence != NULL)
		event_free(link->silence);
	if (link->beating != NULL)
		event_free(link->beating);
	link->deadline = link->silence = link->beating = NULL;
	free(link->rows);
	link->rows = NULL;
}
