/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Channels between friends: opening, talking, trusting, ending. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "certificates.h"
#include "channel_ends.h"

static void
two_identities_talk_both_ways(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 }, south = { 0 };

	connect_ends(f, &north, NORTH, &south, SOUTH);
	assert_string_equal(channel_peer_digest(north.channel),
	    identity_digest(f->identities[SOUTH]));
	assert_string_equal(channel_peer_digest(south.channel),
	    identity_digest(f->identities[NORTH]));
	assert_string_equal(channel_local_address(north.channel),
	    "127.0.0.1");
	assert_memory_equal(channel_peer_address(north.channel),
	    "127.0.0.1:", 10);
	assert_int_equal(send_number(&north, 1, "to the south"), 0);
	assert_int_equal(send_number(&south, 1, "vers le nord \xc3\xa9"), 0);
	run_until(f, &north.messages, 1);
	run_until(f, &south.messages, 1);
	assert_string_equal(south.text, "to the south");
	assert_string_equal(north.text, "vers le nord \xc3\xa9");
	assert_int_equal(north.closed + south.closed, 0);
	forget(&north);
	forget(&south);
}

static void
a_name_is_looked_up_and_dialled(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 }, south = { 0 };
	char address[64], named[64];
	int listener = listen_any(address);

	(void)snprintf(named, sizeof(named), "localhost%s",
	    strchr(address, ':'));
	dial(f, &north, NORTH, named, LIMIT_NS);
	take(f, &south, SOUTH, accept_one(f, listener), LIMIT_NS);
	run_until(f, &north.opened, 1);
	forget(&north);
	run_until(f, &south.closed, 1);
	forget(&south);
	(void)close(listener);
}

static void
a_lookup_can_be_given_up(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 };

	/* RFC 6761, 6.4: there is no such name. */
	dial(f, &north, NORTH, "agent.invalid:61741", LIMIT_NS);
	run_idle(f);
	forget(&north);
	run_idle(f);
	assert_int_equal(north.opened, 0);
}

static void
only_the_pinned_key_is_trusted(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 }, south = { 0 };
	struct trust right = { .pin = "" }, wrong = { .pin = "" },
	    none = { .pin = "" };
	struct error err;

	(void)snprintf(right.pin, sizeof(right.pin), "%s",
	    identity_digest(f->identities[SOUTH]));
	(void)snprintf(wrong.pin, sizeof(wrong.pin), "%s",
	    identity_digest(f->identities[MIDDLE]));
	connect_ends(f, &north, NORTH, &south, SOUTH);
	assert_int_equal(channel_check_trust(north.channel, &right, &err), 0);
	assert_int_equal(channel_check_trust(north.channel, &wrong, &err),
	    -1);
	assert_int_equal(err.kind, ERROR_REFUSED);
	assert_non_null(strstr(err.cause, right.pin));
	assert_non_null(strstr(err.cause, wrong.pin));
	assert_int_equal(channel_check_trust(north.channel, &none, &err), -1);
	forget(&north);
	forget(&south);
}

static void
an_orderly_end_has_no_reason(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 }, south = { 0 };

	connect_ends(f, &north, NORTH, &south, SOUTH);
	forget(&north);
	run_until(f, &south.closed, 1);
	assert_int_equal(south.why.kind, ERROR_NONE);
	run_idle(f);
	assert_int_equal(south.closed, 1);
	assert_int_equal(send_number(&south, 1, "too late"), -1);
	forget(&south);
}

static void
the_largest_frame_passes_and_one_byte_more_does_not(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 }, south = { 0 };
	struct error err;

	connect_ends(f, &north, NORTH, &south, SOUTH);
	assert_int_equal(channel_send(north.channel,
	    message_of(CHANNEL_FRAME_MAX + 1), &err), -1);
	assert_int_equal(err.kind, ERROR_INTERNAL);
	assert_int_equal(channel_send(north.channel,
	    message_of(CHANNEL_FRAME_MAX), &err), 0);
	run_until(f, &south.messages, 1);
	assert_true(south.text_length > CHANNEL_FRAME_MAX - 64);
	assert_int_equal(send_number(&north, 2, "still open"), 0);
	run_until(f, &south.messages, 2);
	assert_string_equal(south.text, "still open");
	forget(&north);
	forget(&south);
}

static void
many_messages_arrive_whole_and_in_order(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 }, south = { 0 };
	unsigned i;

	connect_ends(f, &north, NORTH, &south, SOUTH);
	for (i = 1; i <= 5000; i++) {
		assert_int_equal(send_number(&north, i, "numbered"), 0);
		assert_int_equal(send_number(&south, i, "numbered"), 0);
	}
	run_until(f, &south.messages, 5000);
	run_until(f, &north.messages, 5000);
	assert_true(north.in_order);
	assert_true(south.in_order);
	forget(&north);
	forget(&south);
}

static void
a_socket_pair_is_a_channel_without_identity(void **state)
{
	struct fixture *f = *state;
	struct end left = { 0 }, right = { 0 };
	struct trust none = { .pin = "" };
	struct error err;

	pair_ends(f, &left, &right);
	assert_int_equal(left.opened, 0);
	/* Sent before it is open: waits until it is. */
	assert_int_equal(send_number(&left, 1, "early"), 0);
	run_until(f, &right.messages, 1);
	assert_string_equal(right.text, "early");
	assert_string_equal(channel_peer_digest(left.channel), "");
	assert_string_equal(channel_peer_address(left.channel),
	    "socket pair");
	assert_string_equal(channel_local_address(left.channel), "");
	assert_int_equal(channel_check_trust(left.channel, &none, &err), 0);
	forget(&left);
	run_until(f, &right.closed, 1);
	assert_int_equal(right.why.kind, ERROR_NONE);
	forget(&right);
}

static void
a_message_before_the_dial_is_through_is_sent_once_it_is(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 }, south = { 0 };
	char address[64];
	int listener = listen_any(address);

	dial(f, &north, NORTH, address, LIMIT_NS);
	assert_int_equal(send_number(&north, 1, "first"), 0);
	take(f, &south, SOUTH, accept_one(f, listener), LIMIT_NS);
	run_until(f, &south.messages, 1);
	assert_string_equal(south.text, "first");
	forget(&north);
	forget(&south);
	(void)close(listener);
}

static void
finishing_sends_all_that_is_queued(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 }, south = { 0 };
	struct error err;
	unsigned i;

	connect_ends(f, &north, NORTH, &south, SOUTH);
	for (i = 0; i < 7; i++) {
		assert_int_equal(channel_send(north.channel,
		    message_of(CHANNEL_FRAME_MAX), &err), 0);
		/* What the other side says meanwhile is no obstacle. */
		assert_int_equal(send_number(&south, i, "beat"), 0);
	}
	channel_finish(north.channel);
	run_until(f, &south.closed, 1);
	assert_int_equal(south.messages, 7);
	assert_int_equal(south.why.kind, ERROR_NONE);
	assert_int_equal(north.closed, 0);
	forget(&south);
	run_idle(f);
}

static void
finishing_does_not_wait_for_ever(void **state)
{
	struct fixture *f = *state;
	struct end end = { 0 };
	int fd = raw_pair(f, &end);
	struct error err;
	uint64_t began_ns;

	run_until(f, &end.opened, 1);
	assert_int_equal(channel_send(end.channel, message_of(1000000), &err),
	    0);
	channel_finish(end.channel);
	began_ns = clock_raw_ns();
	/* The loop ends by itself when the channel has gone. */
	(void)event_base_loop(f->base, 0);
	assert_in_range(clock_raw_ns() - began_ns, 1900 * NS_PER_MS,
	    6 * NS_PER_S);
	(void)close(fd);
}

static void
both_may_finish_at_once(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 }, south = { 0 };
	uint64_t began_ns;

	connect_ends(f, &north, NORTH, &south, SOUTH);
	assert_int_equal(send_number(&north, 1, "goodbye"), 0);
	channel_finish(north.channel);
	channel_finish(south.channel);
	began_ns = clock_raw_ns();
	(void)event_base_loop(f->base, 0);
	assert_true(clock_raw_ns() - began_ns < NS_PER_S);
}

static void
a_channel_may_be_freed_in_any_callback(void **state)
{
	struct fixture *f = *state;
	unsigned which;

	for (which = 0; which < 4; which++) {
		struct end left = { 0 }, right = { 0 };
		unsigned i;

		pair_ends(f, &left, &right);
		right.free_at_open = which == 0;
		right.free_at_message = which == 1 ? 3 : 0;
		right.finish_at_message = which == 2 ? 3 : 0;
		right.free_at_closed = true;
		for (i = 1; i <= 10; i++)
			assert_int_equal(send_number(&left, i, "numbered"),
			    0);
		if (which == 3)
			channel_finish(left.channel);
		else
			run_until(f, &left.closed, 1);
		if (which == 3)
			run_until(f, &right.closed, 1);
		assert_int_equal(right.messages, which == 0 ? 0 :
		    which == 3 ? 10 : 3);
		assert_int_equal(right.closed, which == 3);
		assert_null(right.channel);
		if (which != 3)
			forget(&left);
		run_idle(f);
	}
}

static void
a_dialling_channel_may_be_freed_at_any_time(void **state)
{
	struct fixture *f = *state;
	char address[64];
	int listener = listen_any(address);
	unsigned turns, i;

	for (turns = 0; turns < 12; turns++) {
		struct end north = { 0 }, south = { 0 };

		dial(f, &north, NORTH, address, LIMIT_NS);
		take(f, &south, SOUTH, accept_one(f, listener), LIMIT_NS);
		for (i = 0; i < turns; i++)
			(void)event_base_loop(f->base, EVLOOP_NONBLOCK);
		forget(&north);
		run_until(f, &south.closed, 1);
		forget(&south);
	}
	(void)close(listener);
}

static void
an_authority_may_sign_through_an_intermediate(void **state)
{
	static const struct request top = { .common_name = "Harbour authority",
	    .authority = true };
	static const struct request below = { .common_name = "Pier authority",
	    .authority = true };
	static const struct request asked = { .common_name = "mast",
	    .dns_name = "mast.example" };
	struct fixture *f = *state;
	struct holder root = issue(&top, NULL);
	struct holder pier = issue(&below, &root);
	struct holder mast = issue(&asked, &pier);
	struct end north = { 0 }, south = { 0 };
	struct trust trust = { .name = "mast.example" };
	char certificate[64], key[64];
	struct error err;

	(void)snprintf(certificate, sizeof(certificate), "%s/c", f->folder);
	(void)snprintf(key, sizeof(key), "%s/k", f->folder);
	(void)snprintf(trust.authority, sizeof(trust.authority), "%s/ca",
	    f->folder);
	write_certificates(certificate, mast.certificate, pier.certificate);
	write_key(key, mast.key, NULL);
	write_certificates(trust.authority, root.certificate, NULL);
	SSL_CTX_free(f->tls[SOUTH]);
	identity_free(f->identities[SOUTH]);
	assert_int_equal(identity_open_files(certificate, key,
	    &f->identities[SOUTH], &err), 0);
	f->tls[SOUTH] = identity_tls_context(f->identities[SOUTH], &err);
	connect_ends(f, &north, NORTH, &south, SOUTH);
	assert_int_equal(channel_check_trust(north.channel, &trust, &err), 0);
	/* The other way round, a self-made certificate does not pass. */
	assert_int_equal(channel_check_trust(south.channel, &trust, &err),
	    -1);
	assert_non_null(strstr(err.cause, "does not stand"));
	forget(&north);
	forget(&south);
	holder_free(&root);
	holder_free(&pier);
	holder_free(&mast);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		TEST(two_identities_talk_both_ways),
		TEST(a_name_is_looked_up_and_dialled),
		TEST(a_lookup_can_be_given_up),
		TEST(only_the_pinned_key_is_trusted),
		TEST(an_orderly_end_has_no_reason),
		TEST(the_largest_frame_passes_and_one_byte_more_does_not),
		TEST(many_messages_arrive_whole_and_in_order),
		TEST(a_socket_pair_is_a_channel_without_identity),
		TEST(a_message_before_the_dial_is_through_is_sent_once_it_is),
		TEST(finishing_sends_all_that_is_queued),
		TEST(finishing_does_not_wait_for_ever),
		TEST(both_may_finish_at_once),
		TEST(a_channel_may_be_freed_in_any_callback),
		TEST(a_dialling_channel_may_be_freed_at_any_time),
		TEST(an_authority_may_sign_through_an_intermediate),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
