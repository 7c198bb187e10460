/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <pthread.h>
#include <sched.h>
#include <string.h>

#include "error.h"
#include "ring.h"

#define ITEM_BYTES 100	/* not a whole number of cache lines */
#define ITEMS 100000

static void
put(struct ring *ring, uint64_t value)
{
	unsigned char *slot = ring_reserve(ring);

	assert_non_null(slot);
	memset(slot, (int)(value & 0xff), ITEM_BYTES);
	memcpy(slot, &value, sizeof(value));
	ring_commit(ring);
}

static uint64_t
value_of(const unsigned char *slot)
{
	uint64_t value;

	memcpy(&value, slot, sizeof(value));
	for (size_t i = sizeof(value); i < ITEM_BYTES; i++)
		if (slot[i] != (value & 0xff))
			return UINT64_MAX;
	return value;
}

static void
what_goes_in_comes_out_in_order(void **state)
{
	struct ring *ring;
	struct error err;

	(void)state;
	assert_int_equal(ring_new(4, ITEM_BYTES, &ring, &err), 0);
	assert_null(ring_front(ring));
	/* three in, three out, so that every slot is crossed */
	for (uint64_t i = 0; i < 30; i += 3) {
		for (uint64_t j = 0; j < 3; j++)
			put(ring, i + j);
		for (uint64_t j = 0; j < 3; j++) {
			assert_int_equal(value_of(ring_front(ring)), i + j);
			ring_pop(ring);
		}
		assert_null(ring_front(ring));
	}
	ring_free(ring);
}

static void
a_full_ring_takes_nothing_until_one_is_popped(void **state)
{
	struct ring *ring;
	struct error err;

	(void)state;
	assert_int_equal(ring_new(2, ITEM_BYTES, &ring, &err), 0);
	put(ring, 1);
	put(ring, 2);
	assert_null(ring_reserve(ring));
	ring_pop(ring);
	put(ring, 3);
	assert_null(ring_reserve(ring));
	assert_int_equal(value_of(ring_front(ring)), 2);
	ring_free(ring);
}

static void
a_reserved_slot_is_not_seen_before_its_commit(void **state)
{
	struct ring *ring;
	struct error err;

	(void)state;
	assert_int_equal(ring_new(2, ITEM_BYTES, &ring, &err), 0);
	assert_non_null(ring_reserve(ring));
	assert_null(ring_front(ring));
	put(ring, 9);
	assert_int_equal(value_of(ring_front(ring)), 9);
	ring_free(ring);
	ring_free(NULL);
}

static void *
produce(void *arg)
{
	struct ring *ring = arg;

	for (uint64_t i = 0; i < ITEMS; i++) {
		unsigned char *slot;

		while ((slot = ring_reserve(ring)) == NULL)
			(void)sched_yield();
		memset(slot, (int)(i & 0xff), ITEM_BYTES);
		memcpy(slot, &i, sizeof(i));
		ring_commit(ring);
	}
	return NULL;
}

static void
two_threads_lose_and_tear_nothing(void **state)
{
	struct ring *ring;
	struct error err;
	pthread_t producer;

	(void)state;
	assert_int_equal(ring_new(16, ITEM_BYTES, &ring, &err), 0);
	assert_int_equal(pthread_create(&producer, NULL, produce, ring), 0);
	for (uint64_t i = 0; i < ITEMS; i++) {
		const unsigned char *slot;

		while ((slot = ring_front(ring)) == NULL)
			(void)sched_yield();
		assert_int_equal(value_of(slot), i);
		ring_pop(ring);
	}
	assert_int_equal(pthread_join(producer, NULL), 0);
	assert_null(ring_front(ring));
	ring_free(ring);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(what_goes_in_comes_out_in_order),
		cmocka_unit_test(
		    a_full_ring_takes_nothing_until_one_is_popped),
		cmocka_unit_test(
		    a_reserved_slot_is_not_seen_before_its_commit),
		cmocka_unit_test(two_threads_lose_and_tear_nothing),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
