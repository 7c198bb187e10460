/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <event2/event.h>
#include <stdbool.h>
#include <sys/time.h>

#include "clock.h"
#include "error.h"
#include "reference.h"

#define GUARD_S 20

struct outcome {
	struct event_base *base;
	unsigned done, ticks;
	bool failed;
	uint64_t payload_bps, cpu_ns;
};

static void
on_done(struct reference *reference, uint64_t payload_bps, uint64_t cpu_ns,
    const struct error *why, void *arg)
{
	struct outcome *outcome = arg;

	outcome->done++;
	outcome->failed = why != NULL;
	outcome->payload_bps = payload_bps;
	outcome->cpu_ns = cpu_ns;
	reference_free(reference);
	(void)event_base_loopbreak(outcome->base);
}

static void
on_tick(evutil_socket_t fd, short what, void *arg)
{
	struct outcome *outcome = arg;

	(void)fd;
	(void)what;
	outcome->ticks++;
}

static void
a_reference_ends_with_a_rate_and_leaves_the_loop_free(void **state)
{
	const struct timeval guard = { .tv_sec = GUARD_S };
	const struct timeval tick = { .tv_usec = 10000 };
	struct outcome outcome = { .base = event_base_new() };
	struct event *ticker = event_new(outcome.base, -1, EV_PERSIST,
	    on_tick, &outcome);
	struct reference *reference;
	struct error err;
	uint64_t since_ns = clock_raw_ns();

	(void)state;
	(void)event_add(ticker, &tick);
	(void)event_base_loopexit(outcome.base, &guard);
	assert_int_equal(reference_start(outcome.base, 200 * NS_PER_MS,
	    on_done, &outcome, &reference, &err), 0);
	(void)event_base_dispatch(outcome.base);
	assert_int_equal(outcome.done, 1);
	assert_false(outcome.failed);
	/* any host's memory carries 10 Mbit/s, none 10 Tbit/s */
	assert_in_range(outcome.payload_bps, 10000000, 10000000000000);
	assert_true(outcome.cpu_ns > 0);
	assert_true(clock_raw_ns() - since_ns >= 200 * NS_PER_MS);
	assert_true(outcome.ticks > 0);
	event_free(ticker);
	event_base_free(outcome.base);
}

static void
a_reference_can_be_freed_early(void **state)
{
	struct outcome outcome = { .base = event_base_new() };
	struct reference *reference;
	struct error err;
	uint64_t since_ns = clock_raw_ns();

	(void)state;
	assert_int_equal(reference_start(outcome.base, 3600 * NS_PER_S,
	    on_done, &outcome, &reference, &err), 0);
	reference_free(reference);
	reference_free(NULL);
	(void)event_base_loop(outcome.base, EVLOOP_NONBLOCK);
	assert_int_equal(outcome.done, 0);
	assert_true(clock_raw_ns() - since_ns < GUARD_S * NS_PER_S);
	event_base_free(outcome.base);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    a_reference_ends_with_a_rate_and_leaves_the_loop_free),
		cmocka_unit_test(a_reference_can_be_freed_early),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
