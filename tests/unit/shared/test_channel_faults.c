/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Channels with strangers, broken peers and closed ports. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "channel_ends.h"

static void
a_refused_connection_is_reported_with_its_address(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 };
	char address[64];

	(void)close(listen_any(address));
	dial(f, &north, NORTH, address, LIMIT_NS);
	run_until(f, &north.closed, 1);
	assert_int_equal(north.why.kind, ERROR_UNREACHABLE);
	assert_non_null(strstr(north.why.cause, address));
	assert_non_null(strstr(north.why.cause, "refused"));
	forget(&north);
}

static void
a_wrong_address_is_refused_at_once(void **state)
{
	struct fixture *f = *state;
	struct error err;

	assert_null(channel_dial(f->base, "198.18.0.1", f->tls[NORTH],
	    LIMIT_NS, &callbacks, NULL, &err));
	assert_int_equal(err.kind, ERROR_INPUT);
	assert_null(channel_dial(f->base, "198.18.0.1:99999", f->tls[NORTH],
	    LIMIT_NS, &callbacks, NULL, &err));
	assert_int_equal(err.kind, ERROR_INPUT);
}

static void
a_peer_that_never_answers_meets_the_limit(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 }, south = { 0 };
	char address[64];
	int listener = listen_any(address);
	int silent;

	/* The kernel connects, nobody speaks TLS. */
	dial(f, &north, NORTH, address, 100 * NS_PER_MS);
	run_until(f, &north.closed, 1);
	assert_int_equal(north.why.kind, ERROR_UNREACHABLE);
	assert_non_null(strstr(north.why.cause, "within 0.1 s"));
	assert_non_null(strstr(north.why.cause, "TLS handshake"));
	forget(&north);
	(void)close(accept_one(f, listener));
	silent = plain_connection(listener);
	take(f, &south, SOUTH, accept_one(f, listener), 100 * NS_PER_MS);
	run_until(f, &south.closed, 1);
	assert_int_equal(south.why.kind, ERROR_UNREACHABLE);
	forget(&south);
	(void)close(silent);
	(void)close(listener);
}

/* What a stranger may say to the port instead of TLS. */
static const struct {
	const char *bytes;
	const char *why;
} strangers[] = {
	{ "GET / HTTP/1.1\r\nHost: quay\r\n\r\n", "HTTP" },
	{ "\x00\x00\x00\x0f{\"type\":\"hello\"}", "TLS" },
	{ "SSH-2.0-x\r\n", "TLS" },
	/* A TLS 1.2 ClientHello without supported_versions (RFC 5246). */
	{ "\x16\x03\x01\x00\x2d\x01\x00\x00\x29\x03\x03"
	    "0123456789abcdef0123456789abcdef"
	    "\x00\x00\x02\xc0\x2f\x01\x00", "TLS 1.3" },
	{ "", "closed the connection during the TLS handshake" },
};

static size_t
stranger_size(size_t i)
{
	/* The rows with NUL bytes state their length in themselves. */
	if (i == 1)
		return 4 + 0x0f + 1;
	return i == 3 ? 5 + 0x2d : strlen(strangers[i].bytes);
}

static void
a_stranger_on_the_port_is_closed_at_once(void **state)
{
	struct fixture *f = *state;
	char address[64];
	int listener = listen_any(address);
	size_t i;

	for (i = 0; i < sizeof(strangers) / sizeof(strangers[0]); i++) {
		struct end south = { 0 };
		int fd = plain_connection(listener);
		size_t size = stranger_size(i);

		assert_int_equal(send(fd, strangers[i].bytes, size, 0), size);
		if (size == 0)
			(void)shutdown(fd, SHUT_WR);
		take(f, &south, SOUTH, accept_one(f, listener), LIMIT_NS);
		run_until(f, &south.closed, 1);
		assert_int_equal(south.why.kind, ERROR_PEER);
		if (strstr(south.why.cause, strangers[i].why) == NULL)
			fail_msg("%zu: %s", i, south.why.cause);
		assert_int_equal(south.opened, 0);
		forget(&south);
		(void)close(fd);
	}
	(void)close(listener);
}

static void
a_server_that_is_no_agent_is_named(void **state)
{
	struct fixture *f = *state;
	struct end north = { 0 };
	char address[64];
	int listener = listen_any(address), fd;

	dial(f, &north, NORTH, address, LIMIT_NS);
	fd = accept_one(f, listener);
	assert_int_equal(send(fd, "220 mail ready\r\n", 16, 0), 16);
	run_until(f, &north.closed, 1);
	assert_int_equal(north.why.kind, ERROR_PEER);
	assert_non_null(strstr(north.why.cause, "does not speak TLS"));
	forget(&north);
	(void)close(fd);
	(void)close(listener);
}

static const struct {
	const char *bytes;
	size_t size;
	const char *why;
} bad_frames[] = {
	{ "\x00\x00\x00\x00", 4, "0 bytes" },
	{ "\x00\x10\x00\x01", 4, "1048577 bytes" },
	{ "\xff\xff\xff\xff", 4, "4294967295 bytes" },
	{ "GET / HTTP/1.1\r\n", 16, "1195725856 bytes" },
	{ "\x00\x00\x00\x02[]", 6, "array" },
	{ "\x00\x00\x00\x02{x", 6, "no JSON object" },
	{ "\x00\x00\x00\x0d{\"a\":1,\"a\":2}", 17, "duplicate" },
};

static void
a_bad_frame_closes_the_channel_at_once(void **state)
{
	struct fixture *f = *state;
	size_t i;

	for (i = 0; i < sizeof(bad_frames) / sizeof(bad_frames[0]); i++) {
		struct end end = { 0 };
		int fd = raw_pair(f, &end);
		char byte;

		assert_int_equal(write(fd, bad_frames[i].bytes,
		    bad_frames[i].size), bad_frames[i].size);
		run_until(f, &end.closed, 1);
		assert_int_equal(end.why.kind, ERROR_PEER);
		if (strstr(end.why.cause, bad_frames[i].why) == NULL)
			fail_msg("%zu: %s", i, end.why.cause);
		assert_int_equal(end.messages, 0);
		run_idle(f);
		assert_int_equal(recv(fd, &byte, 1, MSG_DONTWAIT), 0);
		forget(&end);
		(void)close(fd);
	}
}

static void
a_frame_may_come_byte_by_byte(void **state)
{
	static const char frame[] = "\x00\x00\x00\x0c{\"number\":1}";
	struct fixture *f = *state;
	struct end end = { 0 };
	int fd = raw_pair(f, &end);
	size_t i;

	for (i = 0; i < sizeof(frame) - 1; i++) {
		assert_int_equal(end.messages, 0);
		assert_int_equal(write(fd, frame + i, 1), 1);
		run_idle(f);
	}
	run_until(f, &end.messages, 1);
	assert_int_equal(end.sum, 1);
	assert_int_equal(end.closed, 0);
	forget(&end);
	(void)close(fd);
}

static void
every_truncation_of_a_frame_is_a_broken_protocol(void **state)
{
	static const char frame[] = "\x00\x00\x00\x0c{\"number\":1}";
	struct fixture *f = *state;
	size_t i;

	for (i = 0; i < sizeof(frame); i++) {
		struct end end = { 0 };
		int fd = raw_pair(f, &end);
		bool whole = i == 0 || i == sizeof(frame) - 1;

		assert_int_equal(write(fd, frame, i), i);
		(void)close(fd);
		run_until(f, &end.closed, 1);
		assert_int_equal(end.opened, 1);
		assert_int_equal(end.messages, i == sizeof(frame) - 1);
		assert_int_equal(end.why.kind, whole ? ERROR_NONE :
		    ERROR_PEER);
		forget(&end);
	}
}

static void
one_turn_delivers_a_bounded_number(void **state)
{
	struct fixture *f = *state;
	struct end left = { 0 }, right = { 0 };
	unsigned i, before;

	pair_ends(f, &left, &right);
	run_until(f, &right.opened, 1);
	for (i = 1; i <= 100; i++)
		assert_int_equal(send_number(&left, i, "numbered"), 0);
	while (right.messages < 100) {
		before = right.messages;
		(void)event_base_loop(f->base, EVLOOP_ONCE);
		assert_in_range(right.messages - before, 0, 16);
	}
	assert_true(right.in_order);
	forget(&left);
	forget(&right);
}

static void
a_peer_that_does_not_read_is_closed(void **state)
{
	struct fixture *f = *state;
	struct end end = { 0 };
	int fd = raw_pair(f, &end);
	struct error err;
	unsigned i = 0;

	run_until(f, &end.opened, 1);
	end.inside_call = true;
	while (channel_send(end.channel, message_of(1000000), &err) == 0)
		assert_in_range(++i, 1, 8);
	end.inside_call = false;
	assert_int_equal(err.kind, ERROR_PEER);
	assert_int_equal(end.closed, 0);
	run_until(f, &end.closed, 1);
	assert_int_equal(end.why.kind, ERROR_PEER);
	assert_non_null(strstr(end.why.cause, "does not read"));
	forget(&end);
	(void)close(fd);
}

static void
a_reset_connection_is_unreachable(void **state)
{
	static const struct linger reset = { .l_onoff = 1 };
	struct fixture *f = *state;
	struct end south = { 0 };
	char address[64];
	int listener = listen_any(address);
	int fd = plain_connection(listener);

	take(f, &south, SOUTH, accept_one(f, listener), LIMIT_NS);
	run_idle(f);
	(void)setsockopt(fd, SOL_SOCKET, SO_LINGER, &reset, sizeof(reset));
	(void)close(fd);
	run_until(f, &south.closed, 1);
	assert_int_equal(south.why.kind, ERROR_UNREACHABLE);
	assert_non_null(strstr(south.why.cause, "reset"));
	forget(&south);
	(void)close(listener);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		TEST(a_refused_connection_is_reported_with_its_address),
		TEST(a_wrong_address_is_refused_at_once),
		TEST(a_peer_that_never_answers_meets_the_limit),
		TEST(a_stranger_on_the_port_is_closed_at_once),
		TEST(a_server_that_is_no_agent_is_named),
		TEST(a_bad_frame_closes_the_channel_at_once),
		TEST(a_frame_may_come_byte_by_byte),
		TEST(every_truncation_of_a_frame_is_a_broken_protocol),
		TEST(one_turn_delivers_a_bounded_number),
		TEST(a_peer_that_does_not_read_is_closed),
		TEST(a_reset_connection_is_unreachable),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
