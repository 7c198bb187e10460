/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * medium_air: circuits over the air, declared in a test.
 */
#ifndef PLAFOND_TEST_MEDIUM_AIR_H
#define PLAFOND_TEST_MEDIUM_AIR_H

#include "declaration_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

static inline void
air_text(const char *medium, const char *layers, char *text, size_t size)
{
	(void)snprintf(text, size, "circuit: AIR\nmedium: { %s }\n"
	    "layers: [ %s ]\n", medium, layers);
}

/* The ceiling of a trial over the medium `{ ... }`. */
static inline void
air_ceiling(const char *medium, const char *layers, enum protocol protocol,
    enum direction direction, struct ceiling *out)
{
	struct circuit *circuit;
	struct error err;
	char text[2048], why[1024];

	air_text(medium, layers, text, sizeof(text));
	circuit = circuit_accepted(text);
	if (ceiling_compute(circuit, direction, protocol, out, &err) == -1)
		fail_msg("%s: %s", medium, error_text(&err, why,
		    sizeof(why)));
	circuit_free(circuit);
}

/* What the medium itself makes of the declared stack. */
static inline void
air_capacity(const char *medium, const char *layers, enum direction direction,
    struct medium_capacity *out)
{
	struct path_segment segment;
	struct circuit *circuit;
	char text[2048];

	air_text(medium, layers, text, sizeof(text));
	circuit = circuit_accepted(text);
	segment_of(circuit, direction, &segment);
	*out = segment.capacity;
	circuit_free(circuit);
}

/* Refused while it is read: at "test:2:COLUMN" and with these words. */
static inline void
air_refused(const char *medium, const char *layers, const char *expected)
{
	char text[2048];

	air_text(medium, layers, text, sizeof(text));
	circuit_refused(text, "test:2:");
	circuit_refused(text, expected);
}

struct air_refusal {
	const char *medium, *expected;
};
static inline void
air_refused_all(const struct air_refusal refusals[], size_t count,
    const char *layers)
{
	size_t i;

	for (i = 0; i < count; i++)
		air_refused(refusals[i].medium, layers, refusals[i].expected);
}

static inline bool
air_noted(const struct medium_capacity *capacity, const char *text)
{
	size_t i;

	for (i = 0; i < capacity->notes_count; i++)
		if (strstr(capacity->notes[i], text) != NULL)
			return true;
	return false;
}

/* The same with more lines below the layers. */
static inline void
air_refused_with(const char *medium, const char *layers, const char *more,
    const char *expected)
{
	char text[2048];

	air_text(medium, layers, text, sizeof(text));
	(void)snprintf(text + strlen(text), sizeof(text) - strlen(text), "%s",
	    more);
	circuit_refused(text, expected);
}

/* Read, but there is no ceiling. */
static inline void
air_impossible(const char *medium, const char *layers, const char *more,
    const char *expected)
{
	struct ceiling ceiling;
	struct circuit *circuit;
	struct error err;
	char text[2048], why[1024];

	air_text(medium, layers, text, sizeof(text));
	(void)snprintf(text + strlen(text), sizeof(text) - strlen(text), "%s",
	    more);
	circuit = circuit_accepted(text);
	if (ceiling_compute(circuit, DIRECTION_A_TO_B, PROTOCOL_UDP, &ceiling,
	    &err) == 0)
		fail_msg("a ceiling of %s", medium);
	(void)error_text(&err, why, sizeof(why));
	if (strstr(why, expected) == NULL)
		fail_msg("'%s' is not in: %s", expected, why);
	circuit_free(circuit);
}

static inline void
assert_near(double found, double expected, double tolerance, const char *what)
{
	double difference = found - expected;

	if (difference < -tolerance || difference > tolerance ||
	    found != found)
		fail_msg("%s: found %.9g, expected %.9g", what, found,
		    expected);
}

#endif
