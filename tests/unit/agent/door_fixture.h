/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Door and knock over real loopback sockets, both in this process. */
#ifndef PLAFOND_TEST_DOOR_FIXTURE_H
#define PLAFOND_TEST_DOOR_FIXTURE_H

#include <stdbool.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include <event2/event.h>

#include "door.h"
#include "error.h"
#include "policy.h"

#define OPENINGS 20
#define GUARD_S 10		/* what has not happened then never will */

struct side {
	int fds[DIRECTIONS_SINGLE][TRIAL_STREAMS_MAX];	/* owned, or -1 */
	unsigned opened;
	unsigned failed;
	struct error why;
};

struct scene {
	struct event_base *base;	/* owned */
	struct event *guard;		/* owned */
	struct policy policy;
	struct trial trial;
	struct door *door;		/* owned */
	struct knock *knock;		/* owned */
	uint16_t port;
	struct opening openings[OPENINGS];
	struct side at_door, at_knock;
};

static inline void
on_guard(evutil_socket_t fd, short what, void *arg)
{
	(void)fd;
	(void)what;
	(void)arg;
	fail_msg("nothing happened for %d s", GUARD_S);
}

static inline void
take(struct side *side, enum direction direction, size_t stream, int fd)
{
	assert_int_equal(side->fds[direction][stream], -1);
	side->fds[direction][stream] = fd;
	side->opened++;
}

static inline void
on_door(enum direction direction, size_t stream, int fd, void *arg)
{
	take(&((struct scene *)arg)->at_door, direction, stream, fd);
}

static inline void
side_init(struct side *side)
{
	memset(side->fds, 0xff, sizeof(side->fds));
}

static inline void
side_fini(struct side *side)
{
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		for (size_t i = 0; i < TRIAL_STREAMS_MAX; i++)
			if (side->fds[d][i] != -1)
				assert_int_equal(close(side->fds[d][i]), 0);
}

/* A door at 127.0.0.1 on any port, and OPENINGS streams to come. */
static inline struct scene *
scene_new(const char *peers)
{
	static const struct timeval limit = { .tv_sec = GUARD_S };
	struct scene *scene = calloc(1, sizeof(*scene));
	struct error err;

	assert_non_null(scene);
	scene->base = event_base_new();
	scene->guard = event_new(scene->base, -1, 0, on_guard, NULL);
	assert_int_equal(event_add(scene->guard, &limit), 0);
	policy_init(&scene->policy);
	assert_int_equal(prefix_parse(peers, &scene->policy.peers[0], &err),
	    0);
	scene->policy.peers_count = 1;
	scene->trial.direction = DIRECTION_BOTH;
	scene->trial.streams = OPENINGS / 2;
	side_init(&scene->at_door);
	side_init(&scene->at_knock);
	for (size_t i = 0; i < OPENINGS; i++) {
		scene->openings[i].direction = (enum direction)(i % 2);
		scene->openings[i].stream = i / 2;
		memset(scene->openings[i].token, (int)i + 1,
		    TRIAL_TOKEN_BYTES);
	}
	if (door_open(scene->base, &scene->policy, &scene->trial, "127.0.0.1",
	    "", 1, &scene->port, &scene->door, &err) == -1)
		fail_msg("%s", err.cause);
	assert_int_not_equal(scene->port, 0);
	return scene;
}

static inline void
expect(struct scene *scene)
{
	struct error err;

	assert_int_equal(door_expect(scene->door, scene->openings, OPENINGS,
	    on_door, scene, &err), 0);
}

static inline void
scene_free(struct scene *scene)
{
	knock_free(scene->knock);
	door_free(scene->door);
	side_fini(&scene->at_door);
	side_fini(&scene->at_knock);
	event_free(scene->guard);
	event_base_free(scene->base);
	free(scene);
}

static inline void
turn(struct scene *scene)
{
	assert_int_equal(event_base_loop(scene->base, EVLOOP_ONCE), 0);
}

/* What is ready now, and no more. */
static inline void
turn_ready(struct scene *scene)
{
	assert_true(event_base_loop(scene->base, EVLOOP_NONBLOCK) >= 0);
}

#endif
