/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * declaration_text: declarations written in a test, read or refused.
 */
#ifndef PLAFOND_TEST_DECLARATION_TEXT_H
#define PLAFOND_TEST_DECLARATION_TEXT_H

#include <stdio.h>
#include <string.h>

#include "ceiling/ceiling.h"
#include "declare/circuit.h"
#include "error.h"

/* Owned circuit; a refusal fails the test and is printed. */
static inline struct circuit *
circuit_accepted(const char *text)
{
	struct circuit *circuit = NULL;
	struct error err;
	char why[1024];

	if (circuit_read_text(text, strlen(text), "test", NULL, 0, &circuit,
	    &err) == -1)
		fail_msg("%s: %s", text, error_text(&err, why, sizeof(why)));
	return circuit;
}

/* The refusal must be of kind ERROR_INPUT and hold `expected`, for instance
 * "test:2:9" or a word of the cause. */
static inline void
circuit_refused(const char *text, const char *expected)
{
	struct circuit *circuit = NULL;
	struct error err;
	char why[1024];

	if (circuit_read_text(text, strlen(text), "test", NULL, 0, &circuit,
	    &err) == 0) {
		circuit_free(circuit);
		fail_msg("accepted: %s", text);
	}
	(void)error_text(&err, why, sizeof(why));
	assert_int_equal(err.kind, ERROR_INPUT);
	if (strstr(why, expected) == NULL)
		fail_msg("'%s' is not in: %s", expected, why);
}

/* A circuit of one Ethernet segment. */
static inline struct circuit *
circuit_of(const char *line_rate, const char *layers, const char *more)
{
	char text[2048];

	(void)snprintf(text, sizeof(text), "circuit: TEST\nmedium: { kind: "
	    "ethernet, line-rate: %s }\nlayers: [ %s ]\n%s\n", line_rate,
	    layers, more);
	return circuit_accepted(text);
}

/* Its first segment under its declared stack in one direction. */
static inline void
segment_of(const struct circuit *circuit, enum direction direction,
    struct path_segment *out)
{
	const struct load load = { .direction = direction, .declared = true };
	struct error err;
	char why[1024];

	if (path_segment_make(circuit, 0, &load, out, &err) == -1)
		fail_msg("%s", error_text(&err, why, sizeof(why)));
}

/* Its ceiling; every circuit here is the same in both directions. */
static inline void
ceiling_of(const struct circuit *circuit, enum protocol protocol,
    struct ceiling *out)
{
	struct error err;
	char why[1024];

	if (ceiling_compute(circuit, DIRECTION_A_TO_B, protocol, out,
	    &err) == -1)
		fail_msg("%s", error_text(&err, why, sizeof(why)));
}

#endif
