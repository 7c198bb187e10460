/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * draft_facts: chains of interfaces made by hand.
 */
#ifndef PLAFOND_TEST_DRAFT_FACTS_H
#define PLAFOND_TEST_DRAFT_FACTS_H

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "draft/draft.h"
#include "draft/interface.h"
#include "error.h"

/* What every device is unless a test says otherwise. */
static inline struct interface_device
device_of(enum interface_kind kind, uint64_t mtu_bytes)
{
	return (struct interface_device){ .name = "top0", .kind = kind,
		.mtu_bytes = mtu_bytes, .frames = true, .up = true,
		.carrier = true, .ipv4 = true, .line_bps = INTERFACE_UNKNOWN };
}

/* A port that has negotiated 1 Gbit/s. */
static inline struct interface_device
port_of(const char *name, uint64_t mtu_bytes)
{
	struct interface_device port = device_of(INTERFACE_PORT, mtu_bytes);

	(void)snprintf(port.name, sizeof(port.name), "%s", name);
	port.line_bps = UINT64_C(1000000000);
	port.duplex = INTERFACE_DUPLEX_FULL;
	port.negotiated = true;
	return port;
}

/* One device, or one that lies on the next. */
static inline struct interface_facts
facts_of(struct interface_device device)
{
	struct interface_facts facts = { .count = 1 };

	facts.device[0] = device;
	return facts;
}

static inline void
facts_add(struct interface_facts *facts, struct interface_device device)
{
	facts->device[facts->count - 1].below = INTERFACE_BELOW_DEVICE;
	facts->device[facts->count++] = device;
}

/* Owned. */
static inline char *
draft_of(const struct interface_facts *facts)
{
	struct error err;
	char *text;

	if (draft_make(facts, &text, &err) == -1)
		fail_msg("%s", err.cause);
	return text;
}

static inline void
assert_has(const char *text, const char *expected)
{
	if (strstr(text, expected) == NULL)
		fail_msg("'%s' is not in:\n%s", expected, text);
}

static inline void
assert_has_not(const char *text, const char *unexpected)
{
	if (strstr(text, unexpected) != NULL)
		fail_msg("'%s' is in:\n%s", unexpected, text);
}

/* The text of the line that begins so; a copy in buf. */
static inline const char *
line_of(const char *text, const char *beginning, char *buf, size_t size)
{
	const char *line = text;

	while (line != NULL &&
	    strncmp(line, beginning, strlen(beginning)) != 0) {
		line = strchr(line, '\n');
		line = line != NULL ? line + 1 : NULL;
	}
	if (line == NULL)
		fail_msg("no line '%s' in:\n%s", beginning, text);
	(void)snprintf(buf, size, "%.*s", (int)strcspn(line, "\n"), line);
	return buf;
}

#endif
