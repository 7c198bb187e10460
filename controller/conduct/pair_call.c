/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Agents that call the controller. */
#include <stdio.h>
#include <stdlib.h>
#include <sys/socket.h>
#include <unistd.h>

#include <event2/event.h>

#include "clock.h"
#include "conduct/pair_inside.h"
#include "log.h"

void
visitor_leave(struct visitor *visitor)
{
	struct visitor **at = &visitor->pair->visitors;

	while (*at != visitor)
		at = &(*at)->next;
	*at = visitor->next;
	channel_free(visitor->channel);
	free(visitor);
}

static void
on_visitor_open(struct channel *channel, void *arg)
{
	struct visitor *visitor = arg;
	struct pair *pair = visitor->pair;
	struct error why;

	for (int e = 0; e < ENDS; e++) {
		struct link *link = &pair->links[e];

		if (link->declared->reach != REACH_CALLED ||
		    link->state != LINK_REACHING || link->channel != NULL ||
		    channel_check_trust(channel, &link->declared->identity,
		    &why) == -1)
			continue;
		visitor->channel = NULL;
		visitor_leave(visitor);
		link_take_called(link, channel);
		return;
	}
	log_warning("call_refused", "peer=%s identity=%s",
	    channel_peer_address(channel), channel_peer_digest(channel));
	visitor_leave(visitor);
}

static void
on_visitor_message(struct channel *channel, const json_t *message, void *arg)
{
	(void)channel;
	(void)message;
	visitor_leave(arg);	/* cannot happen before it is taken over */
}

static void
on_visitor_closed(struct channel *channel, const struct error *why, void *arg)
{
	(void)channel;
	(void)why;
	visitor_leave(arg);
}

static void
on_accept(evutil_socket_t listener, short what, void *arg)
{
	static const struct channel_callbacks callbacks = {
		on_visitor_open, on_visitor_message, on_visitor_closed
	};
	struct pair *pair = arg;
	struct visitor *visitor;
	struct error why;
	int fd = accept4((int)listener, NULL, NULL,
	    SOCK_NONBLOCK | SOCK_CLOEXEC);

	(void)what;
	if (fd == -1)
		return;
	visitor = calloc(1, sizeof(*visitor));
	if (visitor == NULL) {
		(void)close(fd);
		return;
	}
	visitor->pair = pair;
	visitor->next = pair->visitors;
	pair->visitors = visitor;
	visitor->channel = channel_accept(pair->base, fd, pair->tls,
	    link_state_limit_ms(LINK_REACHING) * NS_PER_MS, &callbacks,
	    visitor, &why);
	if (visitor->channel == NULL)
		visitor_leave(visitor);
}

int
pair_listen_for_calls(struct pair *pair, struct error *err)
{
	uint16_t port;

	pair->listen_fd = listen_on(pair->config.listen, &port, err);
	if (pair->listen_fd == -1)
		return -1;
	pair->accepting = event_new(pair->base, pair->listen_fd,
	    EV_READ | EV_PERSIST, on_accept, pair);
	if (pair->accepting == NULL || event_add(pair->accepting, NULL) == -1)
		return error_set(err, ERROR_INTERNAL, "the port for calls");
	(void)fprintf(stderr, "waiting up to %u s for an agent to call at "
	    "%s\n", (unsigned)(PAIR_CALL_LIMIT_NS / NS_PER_S),
	    pair->config.listen);
	return 0;
}

