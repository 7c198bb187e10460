/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "conduct/pair.h"

#include <arpa/inet.h>
#include <libgen.h>
#include <limits.h>
#include <netinet/in.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include <event2/event.h>
#include <openssl/ssl.h>

#include "clock.h"
#include "conduct/pair_inside.h"
#include "identity.h"
#include "log.h"

#define OPEN_EXCHANGES 4			/* before the first trial */

/* --- the loop ---------------------------------------------------------- */

static void
on_signal(evutil_socket_t number, short what, void *arg)
{
	struct pair *pair = arg;

	(void)number;
	(void)what;
	pair->interrupted = true;
}

static void
on_waking(evutil_socket_t fd, short what, void *arg)
{
	struct pair *pair = arg;

	(void)fd;
	(void)what;
	pair->woken = true;
}

int
pair_interrupted(struct error *err)
{
	return error_set(err, ERROR_INTERRUPTED, "stopped by a signal");
}

int
pair_wait_until(struct pair *pair, bool (*done)(struct pair *pair),
    uint64_t limit_ns, struct error *err)
{
	struct timeval limit = clock_timeval(limit_ns);

	pair->woken = false;
	if (limit_ns != 0)
		(void)event_add(pair->waking, &limit);
	while (!done(pair) && !pair->interrupted && !pair->woken)
		if (event_base_loop(pair->base, EVLOOP_ONCE) == -1)
			break;
	(void)event_del(pair->waking);
	if (pair->interrupted)
		return pair_interrupted(err);
	return done(pair) ? 0 : 1;
}

bool
pair_both_in(const struct pair *pair, enum link_state state)
{
	return pair->links[END_A].state == state &&
	    pair->links[END_B].state == state;
}

bool
pair_any_gone(const struct pair *pair)
{
	return pair->links[END_A].state == LINK_GONE ||
	    pair->links[END_B].state == LINK_GONE;
}

int
pair_gone_error(const struct pair *pair, struct error *err)
{
	*err = pair->links[END_A].state == LINK_GONE ?
	    pair->links[END_A].why : pair->links[END_B].why;
	return -1;
}

/* --- opening ----------------------------------------------------------- */

static int
find_agent_program(const struct pair *pair, char *buf, size_t size,
    struct error *err)
{
	char self[PATH_MAX];
	ssize_t length;

	if (pair->config.agent_program[0] != '\0') {
		(void)snprintf(buf, size, "%s", pair->config.agent_program);
		return 0;
	}
	length = readlink("/proc/self/exe", self, sizeof(self) - 1);
	if (length == -1)
		return error_errno(err, ERROR_INTERNAL, "this program's path");
	self[length] = '\0';
	(void)snprintf(buf, size, "%s/plafond-agent", dirname(self));
	return 0;
}

static int
reach(struct pair *pair, enum end end, struct error *err)
{
	const struct end_declaration *declared =
	    &pair->config.circuit->ends[end];
	const struct end_declaration *other =
	    &pair->config.circuit->ends[end == END_A ? END_B : END_A];
	struct link *link = &pair->links[end];
	char program[PATH_MAX + 16];

	switch (declared->reach) {
	case REACH_DIAL:
		return link_dial(link, declared->control, err);
	case REACH_RELAYED:
		if (other->reach != REACH_DIAL)
			return error_set(err, ERROR_INPUT, "end %s is "
			    "relayed, so the other end's control must be an "
			    "address", end_name(end));
		return link_dial_relay(link, other, err);
	case REACH_CALLED:
		return pair->accepting == NULL ?
		    pair_listen_for_calls(pair, err) : 0;
	case REACH_EMBEDDED:
		if (find_agent_program(pair, program, sizeof(program), err) ==
		    -1)
			return -1;
		return link_spawn(link, program, err);
	}
	return -1;
}

static bool
all_reached(struct pair *pair)
{
	if (pair_any_gone(pair))
		return true;
	for (int e = 0; e < ENDS; e++)
		if (pair->links[e].state != LINK_IDLE ||
		    pair->links[e].relaying)
			return false;
	return true;
}

static bool
needs_identity(const struct circuit *circuit)
{
	return circuit->ends[END_A].reach != REACH_EMBEDDED ||
	    circuit->ends[END_B].reach != REACH_EMBEDDED;
}

/* The event loop's own words, a name server that fails, say. */
static void
on_event_log(int severity, const char *text)
{
	(void)severity;
	log_debug("event_loop", "text=\"%s\"", text);
}

static int
pair_init(struct pair *pair, struct error *err)
{
	static const struct link_callbacks callbacks = {
		pair_on_progress, pair_on_rows,
		pair_on_measurement
	};
	const struct circuit *circuit = pair->config.circuit;
	uint64_t zero_ns = clock_raw_ns();

	(void)signal(SIGPIPE, SIG_IGN);
	event_set_log_callback(on_event_log);
	pair->base = event_base_new();
	if (pair->base == NULL)
		return error_set(err, ERROR_INTERNAL, "no event loop");
	pair->signals[0] = evsignal_new(pair->base, SIGINT, on_signal, pair);
	pair->signals[1] = evsignal_new(pair->base, SIGTERM, on_signal, pair);
	pair->waking = event_new(pair->base, -1, 0, on_waking, pair);
	if (pair->signals[0] == NULL || pair->signals[1] == NULL ||
	    pair->waking == NULL || event_add(pair->signals[0], NULL) == -1 ||
	    event_add(pair->signals[1], NULL) == -1)
		return error_set(err, ERROR_INTERNAL, "no signal events");
	if (needs_identity(circuit)) {
		if (identity_open(pair->config.state_folder,
		    "plafond controller", &pair->identity, err) == -1)
			return -1;
		pair->tls = identity_tls_context(pair->identity, err);
		if (pair->tls == NULL)
			return -1;
	}
	for (int e = 0; e < ENDS; e++)
		if (link_init(&pair->links[e], pair->base, (enum end)e,
		    &circuit->ends[e], pair->tls, zero_ns, &callbacks, pair,
		    err) == -1)
			return -1;
	return 0;
}

/* Time is up: which one is missing? */
static int
unreached(const struct pair *pair, struct error *err)
{
	const struct link *link = &pair->links[END_A];

	if (link->state == LINK_IDLE)
		link = &pair->links[END_B];
	return error_set(err, ERROR_UNREACHABLE, "agent '%s' of end %s %s",
	    link->declared->name, end_name(link->end),
	    link->declared->reach == REACH_CALLED ?
	    "has not called within 60 s" : "does not answer");
}

static int
pair_reach(struct pair *pair, struct error *err)
{
	const struct circuit *circuit = pair->config.circuit;
	bool called = circuit->ends[END_A].reach == REACH_CALLED ||
	    circuit->ends[END_B].reach == REACH_CALLED;
	int rc;

	for (int e = 0; e < ENDS; e++)
		if (reach(pair, (enum end)e, err) == -1) {
			error_wrap(err, "end %s", end_name((enum end)e));
			return -1;
		}
	rc = pair_wait_until(pair, all_reached, called ? PAIR_CALL_LIMIT_NS :
	    3 * link_state_limit_ms(LINK_REACHING) * NS_PER_MS, err);
	if (rc == -1)
		return -1;
	if (pair_any_gone(pair))
		return pair_gone_error(pair, err);
	if (rc == 1)
		return unreached(pair, err);
	return pair_exchange(pair, OPEN_EXCHANGES, 2 * NS_PER_S, err);
}

int
pair_open(const struct pair_config *config, struct pair **out,
    struct error *err)
{
	struct pair *pair = calloc(1, sizeof(*pair));

	if (pair == NULL)
		return error_errno(err, ERROR_INTERNAL, "the pair");
	pair->config = *config;
	pair->listen_fd = -1;
	if (pair_init(pair, err) == -1 || pair_reach(pair, err) == -1) {
		pair_close(pair);
		return -1;
	}
	*out = pair;
	return 0;
}

void
pair_close(struct pair *pair)
{
	if (pair == NULL)
		return;
	/* let what is queued (an abort, say) go out */
	if (pair->base != NULL)
		(void)event_base_loop(pair->base, EVLOOP_NONBLOCK);
	while (pair->visitors != NULL)
		visitor_leave(pair->visitors);
	for (int e = 0; e < ENDS; e++)
		link_fini(&pair->links[e]);
	run_fini(&pair->run);
	if (pair->accepting != NULL)
		event_free(pair->accepting);
	if (pair->listen_fd != -1)
		(void)close(pair->listen_fd);
	for (int i = 0; i < 2; i++)
		if (pair->signals[i] != NULL)
			event_free(pair->signals[i]);
	if (pair->waking != NULL)
		event_free(pair->waking);
	SSL_CTX_free(pair->tls);
	identity_free(pair->identity);
	if (pair->base != NULL)
		event_base_free(pair->base);
	free(pair);
}

/* --- what is known of the agents --------------------------------------- */

const struct wire_capability *
pair_capability(const struct pair *pair, enum end end)
{
	return &pair->links[end].capability;
}

bool
pair_clock(const struct pair *pair, enum end end, struct exchange_sample *out)
{
	return exchange_best(&pair->links[end].exchange, out);
}

static bool
enough_exchanges(struct pair *pair)
{
	uint64_t wanted = pair->exchanges_wanted;

	return pair_any_gone(pair) ||
	    (pair->links[END_A].exchange.count >= wanted &&
	    pair->links[END_B].exchange.count >= wanted);
}

int
pair_exchange(struct pair *pair, uint64_t samples, uint64_t time_ns,
    struct error *err)
{
	pair->exchanges_wanted = samples;
	if (pair_wait_until(pair, enough_exchanges, time_ns, err) == -1)
		return -1;
	return pair_any_gone(pair) ? pair_gone_error(pair, err) : 0;
}

/* --- addresses --------------------------------------------------------- */

int
pair_data_address(const struct circuit *circuit, enum end end, char *buf,
    size_t size, struct error *err)
{
	const struct end_declaration *declared = &circuit->ends[end];
	unsigned char numeric[sizeof(struct in6_addr)];
	char host[256];
	uint16_t port;

	if (declared->data[0] != '\0') {
		(void)snprintf(buf, size, "%s", declared->data);
		return 0;
	}
	if (declared->reach == REACH_EMBEDDED) {
		(void)snprintf(buf, size, "%s", layers_ip_version(
		    &circuit->segments[0].layers) == 6 ? "::1" : "127.0.0.1");
		return 0;
	}
	if (declared->reach == REACH_DIAL &&
	    address_split(declared->control, 0, host, sizeof(host), &port,
	    err) == 0 && (inet_pton(AF_INET, host, numeric) == 1 ||
	    inet_pton(AF_INET6, host, numeric) == 1)) {
		(void)snprintf(buf, size, "%s", host);
		return 0;
	}
	return error_set(err, ERROR_INPUT, "end %s: 'data' is missing: the "
	    "numeric address that load goes to", end_name(end));
}
