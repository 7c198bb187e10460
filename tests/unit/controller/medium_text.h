/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * medium_text: media written in a test, read or refused without a circuit
 * around them, and their capacity under a load of frames all alike.
 */
#ifndef PLAFOND_TEST_MEDIUM_TEXT_H
#define PLAFOND_TEST_MEDIUM_TEXT_H

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "ceiling/capacity.h"
#include "declare/medium.h"
#include "error.h"

static inline int
medium_from(const char *text, struct medium_use *out, struct error *err)
{
	static const struct field row = { .name = "medium",
		.kind = FIELD_CUSTOM };
	struct node *root;
	int rc;

	if (document_read_text(text, strlen(text), "test", &root, err) == -1)
		return -1;
	rc = medium_read(root, &row, out, err);
	document_free(root);
	return rc;
}

static inline void
medium_accepted(const char *text, struct medium_use *out)
{
	struct error err;
	char why[1024];

	if (medium_from(text, out, &err) == -1)
		fail_msg("%s: %s", text, error_text(&err, why, sizeof(why)));
}

/* In `marked` an '@' stands before what the refusal must point at; the cause
 * must hold `expected`. */
static inline void
medium_refused(const char *marked, const char *expected)
{
	const char *mark = strchr(marked, '@');
	char text[512], place[32], why[1024];
	struct medium_use use;
	struct error err;

	assert_non_null(mark);
	(void)snprintf(text, sizeof(text), "%.*s%s", (int)(mark - marked),
	    marked, mark + 1);
	(void)snprintf(place, sizeof(place), "test:1:%d",
	    (int)(mark - marked) + 1);
	if (medium_from(text, &use, &err) == 0)
		fail_msg("accepted: %s", text);
	(void)error_text(&err, why, sizeof(why));
	assert_int_equal(err.kind, ERROR_INPUT);
	if (strstr(why, place) == NULL || strstr(why, expected) == NULL)
		fail_msg("%s: '%s' or '%s' is not in: %s", text, place,
		    expected, why);
	if (strstr(why, "allowed") == NULL)
		fail_msg("says not what is allowed: %s", why);
}

static inline void
capacity_of(const char *text, enum direction direction, uint64_t frame_bytes,
    struct medium_capacity *out)
{
	struct medium_load load = { .direction = direction };
	struct medium_use use;
	struct error err;
	char why[1024];
	size_t i;

	for (i = 0; i < LEVELS; i++)
		load.octets[i] = fraction_whole(i == LEVEL_LINE ?
		    frame_bytes : 0);
	load.ack_octets = fraction_whole(0);
	load.segments_per_ack = fraction_whole(1);
	medium_accepted(text, &use);
	if (capacity_compute(&use, &load, out, &err) == -1)
		fail_msg("%s: %s", text, error_text(&err, why, sizeof(why)));
	for (i = 0; i < out->steps_count; i++) {
		assert_true(out->steps[i].what[0] != '\0');
		assert_true(out->steps[i].source[0] != '\0');
	}
}

/* bit/s left after the step of that name; no such step fails the test. */
static inline double
left_after(const struct medium_capacity *capacity, const char *what)
{
	size_t i;

	for (i = 0; i < capacity->steps_count; i++)
		if (strcmp(capacity->steps[i].what, what) == 0)
			return fraction_double(capacity->steps[i].left_bps);
	fail_msg("no step '%s'", what);
	return 0;
}

/* Within half of the last digit that is printed. */
static inline void
assert_printed(const char *of, double value_bps, double printed_bps,
    double digit_bps, const char *source)
{
	if (!(fabs(value_bps - printed_bps) <= digit_bps / 2 + 1e-6))
		fail_msg("%s: %.3f, printed %.3f (%s)", of, value_bps,
		    printed_bps, source);
}

static inline double
offered(const struct medium_capacity *capacity)
{
	return fraction_double(capacity_offered(capacity));
}

#endif
