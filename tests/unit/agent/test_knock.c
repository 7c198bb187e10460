/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <errno.h>
#include <netinet/in.h>
#include <sys/socket.h>

#include "door_fixture.h"
#include "log.h"

static void
on_knock(enum direction direction, size_t stream, int fd, void *arg)
{
	take(&((struct scene *)arg)->at_knock, direction, stream, fd);
}

static void
on_failed(const struct error *why, void *arg)
{
	struct scene *scene = arg;

	scene->at_knock.failed++;
	scene->at_knock.why = *why;
}

static int
knock(struct scene *scene, size_t count, struct error *err)
{
	return knock_start(scene->base, &scene->trial, "127.0.0.1", "",
	    "127.0.0.1", scene->port, scene->openings, count, on_knock,
	    on_failed, scene, &scene->knock, err);
}

static uint16_t
port_of(int fd, bool peer)
{
	struct sockaddr_in address;
	socklen_t length = sizeof(address);

	assert_int_equal(peer ? getpeername(fd, (struct sockaddr *)&address,
	    &length) : getsockname(fd, (struct sockaddr *)&address, &length),
	    0);
	return ntohs(address.sin_port);
}

static void
every_stream_opens_with_its_own_token(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	struct error err;

	(void)state;
	expect(scene);
	assert_int_equal(knock(scene, OPENINGS, &err), 0);
	while (scene->at_door.opened < OPENINGS ||
	    scene->at_knock.opened < OPENINGS)
		turn(scene);
	assert_int_equal(scene->at_knock.failed, 0);
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		for (size_t i = 0; i < OPENINGS / 2; i++) {
			/* two ends of one connection, and nothing in it */
			int in = scene->at_door.fds[d][i];
			int out = scene->at_knock.fds[d][i];
			char octet;

			assert_int_equal(port_of(in, true),
			    port_of(out, false));
			assert_int_equal(recv(in, &octet, 1, 0), -1);
			assert_int_equal(errno, EAGAIN);
			assert_int_equal(recv(out, &octet, 1, 0), -1);
			assert_int_equal(errno, EAGAIN);
		}
	scene_free(scene);
}

/* --- the side that knocks ---------------------------------------------- */

static void
a_refused_token_fails_all_streams_once(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	unsigned opened;
	struct error err;

	(void)state;
	expect(scene);
	memset(scene->openings[OPENINGS - 1].token, 0xee, TRIAL_TOKEN_BYTES);
	assert_int_equal(knock(scene, OPENINGS, &err), 0);
	while (scene->at_knock.failed == 0)
		turn(scene);
	assert_int_equal(scene->at_knock.why.kind, ERROR_UNREACHABLE);
	assert_non_null(strstr(scene->at_knock.why.cause, "token"));
	assert_non_null(strstr(scene->at_knock.why.cause, "127.0.0.1 port"));
	/* nothing opens after it */
	opened = scene->at_knock.opened;
	assert_true(opened < OPENINGS);
	for (int i = 0; i < 50; i++)
		turn_ready(scene);
	assert_int_equal(scene->at_knock.failed, 1);
	assert_int_equal(scene->at_knock.opened, opened);
	scene_free(scene);
}

static void
many_refused_tokens_fail_once(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	struct error err;

	(void)state;
	expect(scene);
	for (size_t i = 0; i < OPENINGS; i++)
		scene->openings[i].token[0] ^= 0xff;
	assert_int_equal(knock(scene, OPENINGS, &err), 0);
	while (scene->at_knock.failed == 0)
		turn(scene);
	for (int i = 0; i < 50; i++)
		turn_ready(scene);
	assert_int_equal(scene->at_knock.failed, 1);
	assert_int_equal(scene->at_knock.opened, 0);
	assert_int_equal(scene->at_door.opened, 0);
	scene_free(scene);
}

/* Nobody listens: the kernel says so at once, or from the loop. */
static void
a_refused_connection_is_unreachable(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	struct error err = { 0 };

	(void)state;
	door_free(scene->door);
	scene->door = NULL;
	if (knock(scene, 3, &err) == 0) {
		while (scene->at_knock.failed == 0)
			turn(scene);
		for (int i = 0; i < 20; i++)
			turn_ready(scene);
		assert_int_equal(scene->at_knock.failed, 1);
		err = scene->at_knock.why;
	} else
		assert_int_equal(scene->at_knock.failed, 0);
	assert_int_equal(err.kind, ERROR_UNREACHABLE);
	assert_int_equal(err.sys_errno, ECONNREFUSED);
	assert_non_null(strstr(err.cause, "127.0.0.1 port"));
	assert_int_equal(scene->at_knock.opened, 0);
	scene_free(scene);
}

static void
a_knock_can_be_given_up_at_any_time(void **state)
{
	(void)state;
	for (int turns = 0; turns < 12; turns++) {
		struct scene *scene = scene_new("127.0.0.0/8");
		struct error err;

		expect(scene);
		assert_int_equal(knock(scene, OPENINGS, &err), 0);
		for (int i = 0; i < turns; i++)
			turn_ready(scene);
		knock_free(scene->knock);
		scene->knock = NULL;
		for (int i = 0; i < 20; i++)
			turn_ready(scene);
		assert_int_equal(scene->at_knock.failed, 0);
		scene_free(scene);
	}
}

static void
on_opened_give_up(enum direction direction, size_t stream, int fd, void *arg)
{
	struct scene *scene = arg;

	take(&scene->at_knock, direction, stream, fd);
	knock_free(scene->knock);
	scene->knock = NULL;
	door_free(scene->door);
	scene->door = NULL;
}

static void
on_door_give_up(enum direction direction, size_t stream, int fd, void *arg)
{
	struct scene *scene = arg;

	take(&scene->at_door, direction, stream, fd);
	door_free(scene->door);
	scene->door = NULL;
}

static void
a_callback_may_free_what_called_it(void **state)
{
	struct scene *scene = scene_new("127.0.0.0/8");
	struct error err;

	(void)state;
	expect(scene);
	assert_int_equal(knock_start(scene->base, &scene->trial, "", "",
	    "127.0.0.1", scene->port, scene->openings, OPENINGS,
	    on_opened_give_up, on_failed, scene, &scene->knock, &err), 0);
	while (scene->at_knock.opened == 0)
		turn(scene);
	for (int i = 0; i < 20; i++)
		turn_ready(scene);
	assert_int_equal(scene->at_knock.opened, 1);
	assert_int_equal(scene->at_knock.failed, 0);
	scene_free(scene);
	scene = scene_new("127.0.0.0/8");
	assert_int_equal(door_expect(scene->door, scene->openings, OPENINGS,
	    on_door_give_up, scene, &err), 0);
	assert_int_equal(knock(scene, OPENINGS, &err), 0);
	while (scene->at_knock.failed == 0)
		turn(scene);
	assert_int_equal(scene->at_door.opened, 1);
	scene_free(scene);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(every_stream_opens_with_its_own_token),
		cmocka_unit_test(a_refused_token_fails_all_streams_once),
		cmocka_unit_test(many_refused_tokens_fail_once),
		cmocka_unit_test(a_refused_connection_is_unreachable),
		cmocka_unit_test(a_knock_can_be_given_up_at_any_time),
		cmocka_unit_test(a_callback_may_free_what_called_it),
	};

	/* every guest that is shown out is a line of the log */
	log_set_level(LOG_LEVEL_ERROR);
	return cmocka_run_group_tests(tests, NULL, NULL);
}
