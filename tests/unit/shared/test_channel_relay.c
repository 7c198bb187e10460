/* SPDX-License-Identifier: GPL-3.0-or-later */
/* TLS inside TLS through a relay: north <-> middle <-> south. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "channel_ends.h"

/* north <-> middle <-> south, the middle joined into a pipe. */
struct relayed {
	struct end north, south;		/* the inner channels */
	struct end outer_north, outer_south;
	struct end middle_north, middle_south;
	struct channel_relay *relay;
	unsigned ended;
};

static void
on_relay_ended(struct channel_relay *relay, void *arg)
{
	struct relayed *r = arg;

	assert_ptr_equal(relay, r->relay);
	r->ended++;
	channel_relay_free(relay);
	r->relay = NULL;
}

static void
wrap(struct fixture *f, struct end *inner, struct end *outer, enum who who,
    bool as_server)
{
	struct error err;

	inner->f = f;
	inner->channel = channel_inside(f->base, outer->channel, f->tls[who],
	    as_server, LIMIT_NS, &callbacks, inner, &err);
	assert_non_null(inner->channel);
	outer->channel = NULL;
}

/* The middle tells the called end and joins: what follows is raw. */
static void
join(struct relayed *r)
{
	struct error err;

	assert_int_equal(send_number(&r->middle_south, 1, "joined"), 0);
	r->relay = channel_join(r->middle_north.channel,
	    r->middle_south.channel, on_relay_ended, r, &err);
	assert_non_null(r->relay);
}

static void
answer_inside(struct relayed *r)
{
	wrap(r->south.f, &r->south, &r->outer_south, SOUTH, true);
}

/* As in a conversation: the caller asks for the pipe and goes on with raw
 * bytes at once; those that follow a message belong to the pipe. */
static void
build_relayed(struct fixture *f, struct relayed *r)
{
	connect_ends(f, &r->outer_north, NORTH, &r->middle_north, MIDDLE);
	connect_ends(f, &r->outer_south, SOUTH, &r->middle_south, MIDDLE);
	r->south.f = f;
	r->middle_north.relayed = r->outer_south.relayed = r;
	r->middle_north.act_at_message = join;
	r->outer_south.act_at_message = answer_inside;
	assert_int_equal(send_number(&r->outer_north, 1, "join"), 0);
	wrap(f, &r->north, &r->outer_north, NORTH, false);
	run_until(f, &r->north.opened, 1);
	run_until(f, &r->south.opened, 1);
}

static void
a_relay_carries_what_it_cannot_read(void **state)
{
	struct fixture *f = *state;
	struct relayed r = { 0 };
	struct error err;
	unsigned i;

	build_relayed(f, &r);
	assert_string_equal(channel_peer_digest(r.north.channel),
	    identity_digest(f->identities[SOUTH]));
	assert_string_equal(channel_peer_digest(r.south.channel),
	    identity_digest(f->identities[NORTH]));
	for (i = 1; i <= 500; i++) {
		assert_int_equal(send_number(&r.north, i, "southwards"), 0);
		assert_int_equal(send_number(&r.south, i, "northwards"), 0);
	}
	run_until(f, &r.south.messages, 500);
	run_until(f, &r.north.messages, 500);
	assert_true(r.north.in_order && r.south.in_order);
	for (i = 0; i < 6; i++)
		assert_int_equal(channel_send(r.south.channel,
		    message_of(CHANNEL_FRAME_MAX), &err), 0);
	run_until(f, &r.north.messages, 506);
	assert_int_equal(r.middle_north.messages + r.middle_south.messages,
	    1);
	assert_int_equal(r.outer_south.messages, 1);
	forget(&r.north);
	run_until(f, &r.ended, 1);
	run_until(f, &r.south.closed, 1);
	assert_int_equal(r.south.why.kind, ERROR_NONE);
	forget(&r.south);
	assert_int_equal(r.outer_north.closed + r.outer_south.closed +
	    r.middle_north.closed + r.middle_south.closed, 0);
}

static void
finishing_works_through_a_relay(void **state)
{
	struct fixture *f = *state;
	struct relayed r = { 0 };
	struct error err;
	unsigned i;

	build_relayed(f, &r);
	for (i = 0; i < 5; i++)
		assert_int_equal(channel_send(r.north.channel,
		    message_of(CHANNEL_FRAME_MAX), &err), 0);
	channel_finish(r.north.channel);
	run_until(f, &r.south.closed, 1);
	assert_int_equal(r.south.messages, 5);
	assert_int_equal(r.south.why.kind, ERROR_NONE);
	forget(&r.south);
	run_until(f, &r.ended, 1);
	assert_int_equal(r.ended, 1);
}

static void
a_relay_that_goes_ends_both_conversations(void **state)
{
	struct fixture *f = *state;
	struct relayed r = { 0 };

	build_relayed(f, &r);
	channel_relay_free(r.relay);
	run_until(f, &r.north.closed, 1);
	run_until(f, &r.south.closed, 1);
	assert_int_equal(r.ended, 0);
	forget(&r.north);
	forget(&r.south);
}

static void
a_relay_holds_back_a_sender_whose_peer_does_not_read(void **state)
{
	struct fixture *f = *state;
	struct end left = { 0 }, right = { 0 }, middle_left = { 0 };
	struct channel_relay *relay;
	struct relayed r = { 0 };
	struct error err;
	unsigned i, sent = 0;
	int fds[2];

	pair_ends(f, &left, &middle_left);
	assert_int_equal(socketpair(AF_UNIX, SOCK_STREAM, 0, fds), 0);
	right.channel = channel_pair(f->base, fds[0], &callbacks, &right,
	    &err);
	run_until(f, &right.opened, 1);
	relay = channel_join(middle_left.channel, right.channel,
	    on_relay_ended, &r, &err);
	assert_non_null(relay);
	r.relay = relay;
	/* Nobody reads fds[1]: the bytes must pile up at the sender alone. */
	for (i = 0; i < 100; i++) {
		if (channel_send(left.channel, message_of(500000), &err) == 0)
			sent++;
		else
			break;
		run_idle(f);
	}
	/* 8 MiB at the sender, sockets and the relay hold less than 2 MB. */
	assert_in_range(sent, 16, 20);
	run_until(f, &left.closed, 1);
	forget(&left);
	/* The relay cannot wait for that reader for ever either (10 s). */
	run_until(f, &r.ended, 1);
	(void)close(fds[1]);
}

static void
a_wrong_inner_peer_is_seen_through_the_relay(void **state)
{
	struct fixture *f = *state;
	struct relayed r = { 0 };
	struct trust pin = { .pin = "" };
	struct error err;

	/* The relay cannot pose as the far end: its key is another. */
	build_relayed(f, &r);
	(void)snprintf(pin.pin, sizeof(pin.pin), "%s",
	    identity_digest(f->identities[MIDDLE]));
	assert_int_equal(channel_check_trust(r.north.channel, &pin, &err),
	    -1);
	(void)snprintf(pin.pin, sizeof(pin.pin), "%s",
	    identity_digest(f->identities[SOUTH]));
	assert_int_equal(channel_check_trust(r.north.channel, &pin, &err), 0);
	forget(&r.north);
	forget(&r.south);
	run_until(f, &r.ended, 1);
}

static void
a_closed_channel_is_neither_wrapped_nor_joined(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 }, south = { 0 };
	struct error err;

	connect_ends(f, &north, NORTH, &south, SOUTH);
	forget(&south);
	run_until(f, &north.closed, 1);
	assert_null(channel_inside(f->base, north.channel, f->tls[NORTH],
	    false, LIMIT_NS, &callbacks, NULL, &err));
	assert_int_equal(err.kind, ERROR_UNREACHABLE);
	assert_null(channel_join(north.channel, north.channel, on_relay_ended,
	    NULL, &err));
	forget(&north);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		TEST(a_relay_carries_what_it_cannot_read),
		TEST(finishing_works_through_a_relay),
		TEST(a_relay_that_goes_ends_both_conversations),
		TEST(a_relay_holds_back_a_sender_whose_peer_does_not_read),
		TEST(a_wrong_inner_peer_is_seen_through_the_relay),
		TEST(a_closed_channel_is_neither_wrapped_nor_joined),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
