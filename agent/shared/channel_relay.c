/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * channel_relay: two channels joined into a pipe of raw bytes.
 *
 * Bytes move from one side's input to the other side's output while less than
 * RELAY_UNSENT_MAX waits there; beyond that nothing more is read, and the
 * sender has to wait.  (Not by a read watermark: libevent calls back without
 * pause while a buffer stays above it.)
 */
#include "channel_parts.h"

#include <stdlib.h>

#include <event2/buffer.h>
#include <event2/bufferevent.h>
#include <event2/event.h>

#define RELAY_UNSENT_MAX (256 * 1024)
#define RELAY_STALL_S 10	/* without a byte taken: that side is dead */

struct side {
	struct channel_relay *relay;	/* borrowed: holds us */
	struct side *other;		/* borrowed: beside us */
	struct channel *channel;	/* owned; NULL once the pipe ended */
	struct evbuffer_cb_entry *watch;	/* of what the socket takes */
	struct event *stall;		/* owned: bytes wait for this side */
	bool over;			/* no more bytes from it, or to it */
};

struct channel_relay {
	struct side sides[2];
	struct event *turn;		/* owned */
	void (*ended)(struct channel_relay *relay, void *arg);
	void *arg;
};

static struct evbuffer *
bottom_output(const struct side *side)
{
	return bufferevent_get_output(channel_bottom(side->channel->bev));
}

/* At most `room` bytes of what came from `side` to the other side. */
static void
forward(struct side *side, size_t room)
{
	struct evbuffer *from = bufferevent_get_input(side->channel->bev);
	struct evbuffer *to =
	    bufferevent_get_output(side->other->channel->bev);

	while (room > 0) {
		int moved = evbuffer_remove_buffer(from, to, room);

		if (moved <= 0)
			break;
		room -= (size_t)moved;
	}
}

static void
forward_some(struct side *side)
{
	static const struct timeval limit = { .tv_sec = RELAY_STALL_S };
	struct bufferevent *bev = side->channel->bev;
	struct event *stall = side->other->stall;
	size_t unsent = channel_unsent(side->other->channel->bev);

	if (unsent < RELAY_UNSENT_MAX)
		forward(side, RELAY_UNSENT_MAX - unsent);
	if (evbuffer_get_length(bufferevent_get_input(bev)) == 0) {
		(void)bufferevent_enable(bev, EV_READ);
		return;
	}
	(void)bufferevent_disable(bev, EV_READ);
	if (!event_pending(stall, EV_TIMEOUT, NULL))
		(void)event_add(stall, &limit);
}

static void
wake(struct channel_relay *relay)
{
	static const struct timeval at_once;

	if (!event_pending(relay->turn, EV_TIMEOUT, NULL))
		(void)event_add(relay->turn, &at_once);
}

/* These three may come from deep inside libevent: they only leave word. */
static void
on_sent(struct evbuffer *output, const struct evbuffer_cb_info *info,
    void *arg)
{
	struct side *side = arg;

	(void)output;
	if (info->n_deleted == 0)
		return;
	(void)event_del(side->stall);
	wake(side->relay);
}

static void
on_read(struct bufferevent *bev, void *arg)
{
	struct side *side = arg;

	(void)bev;
	wake(side->relay);
}

static void
on_event(struct bufferevent *bev, short what, void *arg)
{
	struct side *side = arg;

	(void)bev;
	(void)what;
	side->over = true;
	wake(side->relay);
}

static void
on_stall(evutil_socket_t fd, short what, void *arg)
{
	struct side *side = arg;

	(void)fd;
	(void)what;
	side->over = true;
	wake(side->relay);
}

/* The channel is whole again: to be freed, or to send what it has. */
static struct channel *
take_back(struct side *side)
{
	struct channel *c = side->channel;

	if (side->watch != NULL)
		(void)evbuffer_remove_cb_entry(bottom_output(side),
		    side->watch);
	side->watch = NULL;
	side->channel = NULL;
	(void)event_del(side->stall);
	channel_attach(c, c->bev);
	c->state = CHANNEL_OPEN;
	return c;
}

/* What one side has sent before its end still reaches the other. */
static void
end(struct side *over)
{
	struct channel_relay *relay = over->relay;

	forward(over, SIZE_MAX);
	channel_free(take_back(over));
	channel_finish(take_back(over->other));
	(void)event_del(relay->turn);
	relay->ended(relay, relay->arg);
}

static void
on_turn(evutil_socket_t fd, short what, void *arg)
{
	struct channel_relay *relay = arg;

	(void)fd;
	(void)what;
	if (relay->sides[0].over)
		end(&relay->sides[0]);
	else if (relay->sides[1].over)
		end(&relay->sides[1]);
	else {
		forward_some(&relay->sides[0]);
		forward_some(&relay->sides[1]);
	}
}

static void
take(struct side *side, struct channel *c)
{
	side->channel = c;
	channel_lend(c);
	side->watch = evbuffer_add_cb(bottom_output(side), on_sent, side);
	bufferevent_setcb(c->bev, on_read, NULL, on_event, side);
	bufferevent_setwatermark(c->bev, EV_READ, 0, 0);
}

static struct channel_relay *
relay_new(struct event_base *base, struct error *err)
{
	struct channel_relay *relay = calloc(1, sizeof(*relay));
	size_t i;

	if (relay != NULL) {
		relay->turn = evtimer_new(base, on_turn, relay);
		for (i = 0; i < 2; i++) {
			relay->sides[i].relay = relay;
			relay->sides[i].other = &relay->sides[1 - i];
			relay->sides[i].stall = evtimer_new(base, on_stall,
			    &relay->sides[i]);
		}
	}
	if (relay == NULL || relay->turn == NULL ||
	    relay->sides[0].stall == NULL || relay->sides[1].stall == NULL) {
		channel_relay_free(relay);
		(void)error_set(err, ERROR_INTERNAL, "out of memory");
		return NULL;
	}
	return relay;
}

struct channel_relay *
channel_join(struct channel *left, struct channel *right,
    void (*ended)(struct channel_relay *relay, void *arg), void *arg,
    struct error *err)
{
	struct channel_relay *relay;

	if (left->state != CHANNEL_OPEN || left->over ||
	    right->state != CHANNEL_OPEN || right->over) {
		(void)error_set(err, ERROR_UNREACHABLE,
		    "one of the two connections to join is closed");
		return NULL;
	}
	relay = relay_new(left->base, err);
	if (relay == NULL)
		return NULL;
	relay->ended = ended;
	relay->arg = arg;
	take(&relay->sides[0], left);
	take(&relay->sides[1], right);
	/* What arrived before goes on its way too. */
	wake(relay);
	return relay;
}

void
channel_relay_free(struct channel_relay *relay)
{
	size_t i;

	if (relay == NULL)
		return;
	for (i = 0; i < 2; i++) {
		if (relay->sides[i].channel != NULL)
			channel_free(take_back(&relay->sides[i]));
		if (relay->sides[i].stall != NULL)
			event_free(relay->sides[i].stall);
	}
	if (relay->turn != NULL)
		event_free(relay->turn);
	free(relay);
}
