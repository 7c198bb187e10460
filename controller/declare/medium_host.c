/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Medium of a machine's own loopback: a reference. */
#include "declare/medium_rows.h"

static const struct field fields[] = {
	MEDIUM_KIND_ROW,
	{ .name = NULL },
};

const struct medium medium_host = {
	.name = "host",
	.title = "inside one machine: a reference, never a ceiling",
	.fields = fields,
	.carries = (const char *const[]){ "ipv4", "ipv6", NULL },
	/* MTU of Linux's loopback interface, drivers/net/loopback.c */
	.default_mtu_bytes = 65536,
	.accuracy = ACCURACY_REFERENCE,
	.accuracy_note = "shows what the machine can do; no rate is expected "
	    "of it",
	.formula = "none",
	.source = "measured",
};
