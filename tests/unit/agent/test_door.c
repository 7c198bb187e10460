/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <arpa/inet.h>
#include <netinet/in.h>
#include <poll.h>
#include <sys/resource.h>
#include <sys/socket.h>

#include "door_fixture.h"
#include "greeting.h"
#include "log.h"

/* --- a guest of our own ------------------------------------------------ */

static int
visit(const struct scene *scene)
{
	struct sockaddr_storage address;
	unsigned length;
	struct error err;
	int fd = socket(AF_INET, SOCK_STREAM, 0);

	assert_int_not_equal(fd, -1);
	assert_int_equal(address_make("127.0.0.1", scene->port, &address,
	    &length, &err), 0);
	assert_int_equal(connect(fd, (struct sockaddr *)&address, length),
	    0);
	return fd;
}

static void
greet(int fd, const char *mark, const unsigned char *token)
{
	unsigned char greeting[GREETING_SIZE];

	memcpy(greeting, mark, GREETING_MARK_SIZE);
	memcpy(greeting + GREETING_MARK_SIZE, token, TRIAL_TOKEN_BYTES);
	assert_int_equal(send(fd, greeting, sizeof(greeting), MSG_NOSIGNAL),
	    sizeof(greeting));
}

/* Runs the loop until the door has said something to this guest: the octet,
 * or -1 where it closed the connection. */
static int
answer(struct scene *scene, int fd)
{
	struct pollfd polled = { .fd = fd, .events = POLLIN };
	unsigned char octet;

	while (poll(&polled, 1, 0) == 0)
		turn(scene);
	return recv(fd, &octet, 1, 0) == 1 ? octet : -1;
}

static void
assert_shown_out(struct scene *scene, int fd)
{
	unsigned before = scene->at_door.opened;

	assert_int_equal(answer(scene, fd), -1);
	assert_int_equal(scene->at_door.opened, before);
	(void)close(fd);
}

/* --- what works -------------------------------------------------------- */

static void
a_greeting_octet_by_octet_is_one(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	unsigned char greeting[GREETING_SIZE];
	int fd;

	(void)state;
	expect(scene);
	fd = visit(scene);
	memcpy(greeting, GREETING_MARK, GREETING_MARK_SIZE);
	memcpy(greeting + GREETING_MARK_SIZE, scene->openings[3].token,
	    TRIAL_TOKEN_BYTES);
	for (size_t i = 0; i < GREETING_SIZE; i++) {
		struct pollfd polled = { .fd = fd, .events = POLLIN };

		assert_int_equal(poll(&polled, 1, 0), 0);
		assert_int_equal(send(fd, greeting + i, 1, MSG_NOSIGNAL), 1);
		turn(scene);
		turn_ready(scene);
	}
	assert_int_equal(answer(scene, fd), GREETING_ANSWER);
	assert_int_equal(scene->at_door.opened, 1);
	assert_int_not_equal(scene->at_door.fds[1][1], -1);
	(void)close(fd);
	scene_free(scene);
}

static void
what_follows_the_greeting_is_left_to_the_stream(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	char payload[8];
	int fd;

	(void)state;
	expect(scene);
	fd = visit(scene);
	greet(fd, GREETING_MARK, scene->openings[0].token);
	assert_int_equal(send(fd, "payload", 7, MSG_NOSIGNAL), 7);
	assert_int_equal(answer(scene, fd), GREETING_ANSWER);
	assert_int_equal(recv(scene->at_door.fds[0][0], payload, 8, 0), 7);
	assert_memory_equal(payload, "payload", 7);
	(void)close(fd);
	scene_free(scene);
}

static void
nobody_comes_in_before_the_start(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	struct pollfd polled = { .events = POLLIN };
	int fd;

	(void)state;
	fd = visit(scene);
	greet(fd, GREETING_MARK, scene->openings[0].token);
	polled.fd = fd;
	turn_ready(scene);
	assert_int_equal(poll(&polled, 1, 0), 0);
	assert_int_equal(scene->at_door.opened, 0);
	expect(scene);
	assert_int_equal(answer(scene, fd), GREETING_ANSWER);
	assert_int_equal(scene->at_door.opened, 1);
	(void)close(fd);
	scene_free(scene);
}

/* --- who stays outside ------------------------------------------------- */

static void
a_token_that_nobody_made_is_shown_out(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	unsigned char token[TRIAL_TOKEN_BYTES];
	int fd;

	(void)state;
	expect(scene);
	for (size_t i = 0; i < TRIAL_TOKEN_BYTES; i++) {
		memcpy(token, scene->openings[0].token, sizeof(token));
		token[i] ^= 0x80;
		fd = visit(scene);
		greet(fd, GREETING_MARK, token);
		assert_shown_out(scene, fd);
	}
	memset(token, 0, sizeof(token));
	fd = visit(scene);
	greet(fd, GREETING_MARK, token);
	assert_shown_out(scene, fd);
	scene_free(scene);
}

static void
a_token_opens_one_stream_once(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	int first, second;

	(void)state;
	expect(scene);
	first = visit(scene);
	greet(first, GREETING_MARK, scene->openings[5].token);
	assert_int_equal(answer(scene, first), GREETING_ANSWER);
	second = visit(scene);
	greet(second, GREETING_MARK, scene->openings[5].token);
	assert_shown_out(scene, second);
	/* not even after the first has gone */
	(void)close(first);
	second = visit(scene);
	greet(second, GREETING_MARK, scene->openings[5].token);
	assert_shown_out(scene, second);
	assert_int_equal(scene->at_door.opened, 1);
	scene_free(scene);
}

static void
a_greeting_that_is_none_is_shown_out(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	char garbage[GREETING_SIZE];
	int fd;

	(void)state;
	expect(scene);
	fd = visit(scene);
	/* another version of the layout */
	greet(fd, "PLAFOND\2", scene->openings[0].token);
	assert_shown_out(scene, fd);
	fd = visit(scene);
	greet(fd, "plafond\1", scene->openings[0].token);
	assert_shown_out(scene, fd);
	memset(garbage, 0xff, sizeof(garbage));
	fd = visit(scene);
	assert_int_equal(send(fd, garbage, sizeof(garbage), MSG_NOSIGNAL),
	    sizeof(garbage));
	assert_shown_out(scene, fd);
	/* one that leaves in the middle */
	fd = visit(scene);
	assert_int_equal(send(fd, GREETING_MARK, 5, MSG_NOSIGNAL), 5);
	assert_int_equal(shutdown(fd, SHUT_WR), 0);
	assert_shown_out(scene, fd);
	/* none of which used the token up */
	fd = visit(scene);
	greet(fd, GREETING_MARK, scene->openings[0].token);
	assert_int_equal(answer(scene, fd), GREETING_ANSWER);
	(void)close(fd);
	scene_free(scene);
}

static void
a_peer_outside_the_policy_is_shown_out_at_once(void **state)
{
	struct scene *scene = scene_new("198.18.0.0/15");
	int fd;

	(void)state;
	expect(scene);
	fd = visit(scene);
	assert_shown_out(scene, fd);
	scene_free(scene);
}

static void
too_many_guests_are_shown_out(void **state)
{
	struct scene *scene;
	static int guests[DOOR_GUESTS_MAX];
	struct rlimit files;
	int fd;

	(void)state;
	assert_int_equal(getrlimit(RLIMIT_NOFILE, &files), 0);
	files.rlim_cur = files.rlim_max;
	(void)setrlimit(RLIMIT_NOFILE, &files);
	if (files.rlim_cur < 2 * DOOR_GUESTS_MAX + 100)
		skip();
	scene = scene_new("127.0.0.0/8");
	expect(scene);
	for (size_t i = 0; i < DOOR_GUESTS_MAX; i++) {
		guests[i] = visit(scene);
		turn(scene);
	}
	fd = visit(scene);
	assert_shown_out(scene, fd);
	/* one leaves and there is room again */
	assert_int_equal(send(guests[7], "123456789012345678901234", 24,
	    MSG_NOSIGNAL), 24);
	assert_shown_out(scene, guests[7]);
	fd = visit(scene);
	greet(fd, GREETING_MARK, scene->openings[0].token);
	assert_int_equal(answer(scene, fd), GREETING_ANSWER);
	(void)close(fd);
	/* the door goes with all its guests */
	door_free(scene->door);
	scene->door = NULL;
	for (size_t i = 0; i < DOOR_GUESTS_MAX; i++)
		if (i != 7)
			assert_shown_out(scene, guests[i]);
	scene_free(scene);
}

/* --- sockets ----------------------------------------------------------- */

static int
open_door(struct scene *scene, const char *local, const char *interface,
    unsigned ports, uint16_t *port, struct error *err)
{
	memset(err, 0, sizeof(*err));
	return door_open(scene->base, &scene->policy, &scene->trial, local,
	    interface, ports, port, &scene->door, err);
}

static void
a_taken_port_is_passed_over(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	struct door *first = scene->door;
	uint16_t port = scene->port;
	struct error err;

	(void)state;
	assert_int_equal(open_door(scene, "127.0.0.1", "", 1, &port, &err),
	    -1);
	assert_int_equal(err.kind, ERROR_BUSY);
	assert_int_equal(port, scene->port);
	/* the next one may be another program's by chance */
	if (port < 65500 && open_door(scene, "127.0.0.1", "", 20, &port,
	    &err) == 0) {
		assert_in_range(port, scene->port + 1, scene->port + 19);
		door_free(first);
	}
	scene_free(scene);
}

static void
a_socket_that_cannot_be_had_is_refused(void **state)
{
	static const struct {
		const char *local, *interface;
		enum error_kind kind;
	} rows[] = {
		{ "198.18.0.1", "", ERROR_REFUSED },
		{ "127.0.0.1", "no-such-device", ERROR_REFUSED },
		{ "localhost", "", ERROR_INPUT },
		{ "127.0.0.1:5", "", ERROR_INPUT },
	};
	struct scene *scene = scene_new("127.0.0.0/8");
	struct error err;

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++) {
		struct door *door = scene->door;
		uint16_t port = 0;

		if (open_door(scene, rows[i].local, rows[i].interface, 1,
		    &port, &err) == 0)
			fail_msg("taken: %s %s", rows[i].local,
			    rows[i].interface);
		assert_int_equal(err.kind, rows[i].kind);
		assert_ptr_equal(scene->door, door);
		assert_int_equal(port, 0);
	}
	scene_free(scene);
}

/* At [::]; both families come in, and IPv4 counts as IPv4. */
static void
without_an_address_any_family_comes_in(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	uint16_t port = 0;
	struct error err;
	int fd;

	(void)state;
	door_free(scene->door);
	scene->door = NULL;
	if (open_door(scene, "", "", 1, &port, &err) == -1) {
		scene_free(scene);
		skip();		/* a machine without IPv6 */
	}
	scene->port = port;
	expect(scene);
	fd = visit(scene);
	greet(fd, GREETING_MARK, scene->openings[0].token);
	assert_int_equal(answer(scene, fd), GREETING_ANSWER);
	(void)close(fd);
	scene_free(scene);
}

static void
only_numeric_addresses_are_addresses(void **state)
{
	static const char *const texts[] = { "", "localhost", "127.1",
		"127.0.0.1:80", "[::1]", "::1%lo", "1.2.3.256", "::g" };
	struct sockaddr_storage address;
	unsigned length;
	struct error err;

	(void)state;
	for (size_t i = 0; i < sizeof(texts) / sizeof(texts[0]); i++) {
		assert_int_equal(address_make(texts[i], 1, &address, &length,
		    &err), -1);
		assert_int_equal(err.kind, ERROR_INPUT);
	}
	assert_int_equal(address_make("198.18.0.1", 61742, &address, &length,
	    &err), 0);
	assert_int_equal(address.ss_family, AF_INET);
	assert_int_equal(length, sizeof(struct sockaddr_in));
	assert_int_equal(((struct sockaddr_in *)&address)->sin_port,
	    htons(61742));
	assert_int_equal(address_make("2001:2::1", 1, &address, &length,
	    &err), 0);
	assert_int_equal(address.ss_family, AF_INET6);
	assert_int_equal(length, sizeof(struct sockaddr_in6));
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_greeting_octet_by_octet_is_one),
		cmocka_unit_test(
		    what_follows_the_greeting_is_left_to_the_stream),
		cmocka_unit_test(nobody_comes_in_before_the_start),
		cmocka_unit_test(a_token_that_nobody_made_is_shown_out),
		cmocka_unit_test(a_token_opens_one_stream_once),
		cmocka_unit_test(a_greeting_that_is_none_is_shown_out),
		cmocka_unit_test(
		    a_peer_outside_the_policy_is_shown_out_at_once),
		cmocka_unit_test(too_many_guests_are_shown_out),
		cmocka_unit_test(a_taken_port_is_passed_over),
		cmocka_unit_test(a_socket_that_cannot_be_had_is_refused),
		cmocka_unit_test(without_an_address_any_family_comes_in),
		cmocka_unit_test(only_numeric_addresses_are_addresses),
	};

	/* every guest that is shown out is a line of the log */
	log_set_level(LOG_LEVEL_ERROR);
	return cmocka_run_group_tests(tests, NULL, NULL);
}
