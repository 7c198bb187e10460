/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Transfers whose other end is played by hand, and those that cannot be. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <netinet/tcp.h>
#include <sys/time.h>

#include "agent/transfer_fixture.h"

/* A peer played by hand. */
struct script {
	struct side side;
	struct event *timer, *readable;	/* owned */
	int fds[2];			/* owned; -1: closed */
	uint64_t acted_ns;		/* raw clock */
	unsigned open;
};

static void
start_script(struct script *script, const struct trial *trial,
    bool we_send, event_callback_fn act, unsigned after_ms)
{
	const struct timeval tv = { .tv_usec = 1000 * (time_t)after_ms };
	int theirs[2];

	memset(script, 0, sizeof(*script));
	script->side.base = event_base_new();
	script->side.open = &script->open;
	script->open = 1;
	connect_pairs(trial->streams, script->fds, theirs);
	start_side(&script->side, trial, !we_send, theirs, 0);
	script->timer = evtimer_new(script->side.base, act, script);
	(void)evtimer_add(script->timer, &tv);
}

static void
end_script(struct script *script)
{
	run_loop(script->side.base);
	assert_int_equal(script->side.done, 1);
	event_free(script->timer);
	if (script->readable != NULL)
		event_free(script->readable);
	for (unsigned i = 0; i < 2; i++)
		if (script->fds[i] > 0)
			(void)close(script->fds[i]);
	event_base_free(script->side.base);
}

static void
close_first(evutil_socket_t fd, short what, void *arg)
{
	struct script *script = arg;

	(void)fd;
	(void)what;
	(void)close(script->fds[0]);
	script->fds[0] = -1;
}

static void
a_sender_that_closes_early_is_lost(void **state)
{
	struct trial trial = short_trial(2);
	struct script script;

	(void)state;
	start_script(&script, &trial, true, close_first, 10);
	end_script(&script);
	assert_int_equal(script.side.end, MEASUREMENT_PEER_LOST);
	assert_int_equal(script.side.why, ERROR_PEER);
	assert_int_equal(script.side.rows, 0);
	assert_int_equal(script.side.totals.zero_ns, 0);
}

static void
a_receiver_that_closes_early_is_lost(void **state)
{
	struct trial trial = short_trial(2);
	struct script script;

	(void)state;
	start_script(&script, &trial, false, close_first, 50);
	end_script(&script);
	assert_int_equal(script.side.end, MEASUREMENT_PEER_LOST);
	assert_int_equal(script.side.why, ERROR_PEER);
}

static void
shut_first(evutil_socket_t fd, short what, void *arg)
{
	struct script *script = arg;

	(void)fd;
	(void)what;
	assert_int_equal(shutdown(script->fds[0], SHUT_WR), 0);
}

static void
an_end_of_file_before_settle_and_duration_is_a_loss(void **state)
{
	struct trial trial = short_trial(2);
	struct script script;

	(void)state;
	start_script(&script, &trial, false, shut_first, 50);
	end_script(&script);
	assert_int_equal(script.side.end, MEASUREMENT_PEER_LOST);
	assert_int_equal(script.side.why, ERROR_PEER);
}

static void
send_one_byte(evutil_socket_t fd, short what, void *arg)
{
	struct script *script = arg;

	(void)fd;
	(void)what;
	script->acted_ns = clock_raw_ns();
	assert_int_equal(send(script->fds[0], "x", 1, MSG_NOSIGNAL), 1);
}

static void
a_receiver_that_sends_payload_is_refused(void **state)
{
	struct trial trial = short_trial(2);
	struct script script;

	(void)state;
	start_script(&script, &trial, false, send_one_byte, 20);
	end_script(&script);
	assert_int_equal(script.side.end, MEASUREMENT_PEER_LOST);
	assert_int_equal(script.side.why, ERROR_PEER);
}

/* The receiver has said that it has enough. */
static void
close_on_end_of_file(evutil_socket_t fd, short what, void *arg)
{
	struct script *script = arg;
	char byte;

	(void)what;
	assert_int_equal(recv(fd, &byte, 1, 0), 0);
	(void)close(script->fds[0]);
	(void)close(script->fds[1]);
	script->fds[0] = script->fds[1] = -1;
	(void)event_del(script->readable);
}

static void
idle_streams_close_their_intervals_on_the_grid(void **state)
{
	struct trial trial = short_trial(2);
	struct script script;

	(void)state;
	/* nine bytes at once on one stream, one byte 60 ms later on the
	 * other: that is the zero, and then nothing comes */
	start_script(&script, &trial, true, send_one_byte, 60);
	script.readable = event_new(script.side.base, script.fds[0], EV_READ,
	    close_on_end_of_file, &script);
	(void)event_add(script.readable, NULL);
	assert_int_equal(send(script.fds[1], "123456789", 9, MSG_NOSIGNAL), 9);
	end_script(&script);
	assert_int_equal(script.side.end, MEASUREMENT_COMPLETE);
	/* 100 ms of settle and 200 ms of window in rows of 20 ms */
	assert_int_equal(script.side.rows, 15);
	assert_int_equal(script.side.bytes, 1);
	assert_int_equal(script.side.totals.bytes, 0);
	assert_true(script.side.started_ns + script.side.totals.zero_ns >=
	    script.acted_ns);
}

static void
wrong_trials_are_refused_and_their_sockets_closed(void **state)
{
	static const struct {
		const char *source;
		uint64_t streams, row_ns, duration_ns, period_bytes;
		enum protocol protocol;
		enum error_kind kind;
	} rows[] = {
		{ "no stream", 0, 20 * MS, 200 * MS, 0, PROTOCOL_TCP,
		    ERROR_INPUT },
		{ "more streams than TRIAL_STREAMS_MAX", 257, 20 * MS,
		    200 * MS, 0, PROTOCOL_TCP, ERROR_INPUT },
		{ "rows below 10 ms", 1, 10 * MS - 1, 200 * MS, 0,
		    PROTOCOL_TCP, ERROR_INPUT },
		{ "duration of no whole rows", 1, 30 * MS, 200 * MS, 0,
		    PROTOCOL_TCP, ERROR_INPUT },
		{ "no duration", 1, 20 * MS, 0, 0, PROTOCOL_TCP,
		    ERROR_INPUT },
		{ "longer than a day", 1, 20 * MS, TRIAL_DURATION_MAX_NS +
		    20 * MS, 0, PROTOCOL_TCP, ERROR_INPUT },
		{ "a period of 1 B", 1, 20 * MS, 200 * MS, 1, PROTOCOL_TCP,
		    ERROR_INPUT },
		{ "a protocol without a transport", 1, 20 * MS, 200 * MS, 0,
		    PROTOCOL_TCP_TLS, ERROR_REFUSED },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(*rows); i++) {
		struct trial trial = short_trial(rows[i].streams);
		struct event_base *base = event_base_new();
		int fds[TRIAL_STREAMS_MAX + 1];
		struct transfer_config config = { .trial = &trial,
		    .is_sender = true, .fds = fds };
		struct transfer *transfer;
		struct error err;

		for (unsigned j = 0; j <= TRIAL_STREAMS_MAX; j++)
			fds[j] = -1;
		fds[0] = socket(AF_INET, SOCK_STREAM, 0);
		trial.row_ns = rows[i].row_ns;
		trial.duration_ns = rows[i].duration_ns;
		trial.payload_period_bytes = rows[i].period_bytes;
		trial.protocol = rows[i].protocol;
		assert_int_equal(transfer_start(base, &config, &callbacks,
		    NULL, &transfer, &err), -1);
		if (err.kind != rows[i].kind)
			fail_msg("%s: %s", rows[i].source, err.cause);
		if (rows[i].streams > 0)
			assert_int_equal(fcntl(fds[0], F_GETFD), -1);
		else
			(void)close(fds[0]);
		event_base_free(base);
	}
}

static int
option_of(int fd, int level, int option)
{
	int value = -1;
	socklen_t size = sizeof(value);

	assert_int_equal(getsockopt(fd, level, option, &value, &size), 0);
	return value;
}

static void
options_are_set_before_connecting(void **state)
{
	struct trial trial = short_trial(1);
	int v4 = socket(AF_INET, SOCK_STREAM, 0);
	int v6 = socket(AF_INET6, SOCK_STREAM, 0);
	struct error err;

	(void)state;
	trial.dscp = 46;	/* EF, RFC 3246; 184 in the octet */
	trial.mss_bytes = 1200;
	trial.send_buffer_bytes = 65536;
	trial.receive_buffer_bytes = 32768;
	(void)strcpy(trial.congestion_control, "reno");
	assert_int_equal(transfer_prepare_socket(v4, AF_INET, &trial, true,
	    &err), 0);
	assert_int_equal(option_of(v4, IPPROTO_IP, IP_TOS), 184);
	assert_int_equal(option_of(v4, IPPROTO_TCP, TCP_MAXSEG), 1200);
	assert_int_equal(option_of(v4, IPPROTO_TCP, TCP_NODELAY), 1);
	/* the kernel doubles both for its own use: socket(7) */
	assert_int_equal(option_of(v4, SOL_SOCKET, SO_SNDBUF), 131072);
	assert_int_equal(option_of(v4, SOL_SOCKET, SO_RCVBUF), 65536);
	if (v6 != -1) {
		assert_int_equal(transfer_prepare_socket(v6, AF_INET6, &trial,
		    false, &err), 0);
		assert_int_equal(option_of(v6, IPPROTO_IPV6, IPV6_TCLASS),
		    184);
		(void)close(v6);
	}
	(void)close(v4);
}

static void
a_refused_congestion_control_is_named_with_what_there_is(void **state)
{
	struct trial trial = short_trial(1);
	int fd = socket(AF_INET, SOCK_STREAM, 0);
	struct error err;

	(void)state;
	(void)strcpy(trial.congestion_control, "no-such-one");
	assert_int_equal(transfer_prepare_socket(fd, AF_INET, &trial, true,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_REFUSED);
	assert_non_null(strstr(err.cause, "no-such-one"));
	/* every kernel has Reno: net/ipv4/tcp_cong.c */
	assert_non_null(strstr(err.cause, "reno"));
	trial.congestion_control[0] = '\0';
	trial.dscp = 64;
	assert_int_equal(transfer_prepare_socket(fd, AF_INET, &trial, true,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_INPUT);
	(void)close(fd);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_sender_that_closes_early_is_lost),
		cmocka_unit_test(a_receiver_that_closes_early_is_lost),
		cmocka_unit_test(
		    an_end_of_file_before_settle_and_duration_is_a_loss),
		cmocka_unit_test(a_receiver_that_sends_payload_is_refused),
		cmocka_unit_test(
		    idle_streams_close_their_intervals_on_the_grid),
		cmocka_unit_test(
		    wrong_trials_are_refused_and_their_sockets_closed),
		cmocka_unit_test(options_are_set_before_connecting),
		cmocka_unit_test(
		    a_refused_congestion_control_is_named_with_what_there_is),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
