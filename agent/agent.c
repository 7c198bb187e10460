/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "agent.h"

#include <errno.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

#include <event2/event.h>
#include <openssl/ssl.h>

#include "channel.h"
#include "clock.h"
#include "door.h"
#include "error.h"
#include "identity.h"
#include "log.h"
#include "relay.h"
#include "session.h"

#define CALL_AGAIN_S 1		/* between two attempts to call */

static void
on_accept_again(evutil_socket_t fd, short what, void *arg)
{
	struct agent *agent = arg;

	(void)fd;
	(void)what;
	if (agent->accepting != NULL)
		(void)event_add(agent->accepting, NULL);
}

/* No descriptor is left for whoever waits: look again after a second. */
static void
pause_accepting(struct agent *agent)
{
	static const struct timeval again = { .tv_sec = 1 };

	log_warning("accept_paused", "reason=descriptors");
	(void)event_del(agent->accepting);
	(void)event_base_once(agent->base, -1, EV_TIMEOUT, on_accept_again,
	    agent, &again);
}

static void
on_accept(evutil_socket_t listener, short what, void *arg)
{
	struct agent *agent = arg;
	struct error why;
	int fd;

	(void)what;
	fd = accept4((int)listener, NULL, NULL, SOCK_NONBLOCK | SOCK_CLOEXEC);
	if (fd == -1 && (errno == EMFILE || errno == ENFILE))
		pause_accepting(agent);
	if (fd == -1)
		return;
	if (agent->sessions_count >= AGENT_SESSIONS_MAX) {
		log_warning("session_refused", "reason=too-many allowed=%d",
		    AGENT_SESSIONS_MAX);
		(void)close(fd);
		return;
	}
	if (session_accept(agent, fd, &why) == -1)
		log_warning("session_refused", "reason=\"%s\"", why.cause);
}

static void
on_call(evutil_socket_t fd, short what, void *arg)
{
	struct call *call = arg;
	struct error why;

	(void)fd;
	(void)what;
	if (session_dial(call->agent, call, &why) == -1) {
		log_warning("call_failed", "address=%s reason=\"%s\"",
		    call->policy->address, why.cause);
		call_ended(call);
	}
}

void
call_ended(struct call *call)
{
	static const struct timeval again = { .tv_sec = CALL_AGAIN_S };

	call->session = NULL;
	if (call->again != NULL)
		(void)event_add(call->again, &again);
}

static int
start_calls(struct agent *agent, struct error *err)
{
	for (size_t i = 0; i < agent->policy.calls_count; i++) {
		struct call *call = &agent->calls[i];

		call->agent = agent;
		call->policy = &agent->policy.calls[i];
		call->again = event_new(agent->base, -1, 0, on_call, call);
		if (call->again == NULL)
			return error_set(err, ERROR_INTERNAL, "a call");
		event_active(call->again, EV_TIMEOUT, 0);
	}
	return 0;
}

/* A data port that somebody else holds should be known at start, not when the
 * first trial fails. */
static int
try_data_port(const struct policy *policy, struct error *err)
{
	struct sockaddr_storage address;
	unsigned length;
	int fd, rc, yes = 1, no = 0;

	if (address_make("::", (uint16_t)policy->data_port, &address, &length,
	    err) == -1)
		return -1;
	fd = socket(AF_INET6, SOCK_STREAM | SOCK_CLOEXEC, 0);
	if (fd == -1)		/* no IPv6 here: the trial will tell */
		return 0;
	(void)setsockopt(fd, SOL_SOCKET, SO_REUSEADDR, &yes, sizeof(yes));
	(void)setsockopt(fd, IPPROTO_IPV6, IPV6_V6ONLY, &no, sizeof(no));
	rc = bind(fd, (struct sockaddr *)&address, length);
	if (rc == 0)
		rc = listen(fd, 1);
	if (rc == -1 && errno == EADDRINUSE)
		(void)error_errno(err, ERROR_BUSY, "data port %u",
		    (unsigned)policy->data_port);
	else
		rc = 0;
	(void)close(fd);
	return rc;
}

int
agent_open(struct agent *agent, struct event_base *base,
    const struct policy *policy, struct identity *identity, struct error *err)
{
	memset(agent, 0, sizeof(*agent));
	agent->base = base;
	agent->policy = *policy;
	agent->identity = identity;
	agent->control_fd = -1;
	agent->tls = identity_tls_context(identity, err);
	if (agent->tls == NULL || try_data_port(policy, err) == -1)
		goto fail;
	agent->control_fd = listen_on(policy->listen, &agent->control_port,
	    err);
	if (agent->control_fd == -1)
		goto fail;
	agent->accepting = event_new(base, agent->control_fd,
	    EV_READ | EV_PERSIST, on_accept, agent);
	if (agent->accepting == NULL ||
	    event_add(agent->accepting, NULL) == -1) {
		(void)error_set(err, ERROR_INTERNAL, "the control port");
		goto fail;
	}
	if (start_calls(agent, err) == -1)
		goto fail;
	return 0;
fail:
	agent_close(agent);
	return -1;
}

int
agent_open_embedded(struct agent *agent, struct event_base *base, int fd,
    struct error *err)
{
	memset(agent, 0, sizeof(*agent));
	agent->base = base;
	agent->embedded = true;
	agent->control_fd = -1;
	policy_init_embedded(&agent->policy);
	return session_embed(agent, fd, err);
}

void
agent_close(struct agent *agent)
{
	for (size_t i = 0; i < POLICY_CALLS_MAX; i++)
		if (agent->calls[i].again != NULL) {
			event_free(agent->calls[i].again);
			agent->calls[i].again = NULL;
		}
	while (agent->sessions != NULL)
		session_free(agent->sessions);
	relay_free_all(&agent->relays);
	if (agent->accepting != NULL)
		event_free(agent->accepting);
	if (agent->control_fd != -1)
		(void)close(agent->control_fd);
	SSL_CTX_free(agent->tls);
	identity_free(agent->identity);
	memset(agent, 0, sizeof(*agent));
	agent->control_fd = -1;
}
