/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * document_fixture: a YAML text with all kinds of nodes, and ways to read one
 * and to find a node in it.
 */
#ifndef PLAFOND_TESTS_DOCUMENT_FIXTURE_H
#define PLAFOND_TESTS_DOCUMENT_FIXTURE_H

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "error.h"
#include "field.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

/* An invented circuit with all kinds of nodes. */
static const char sample[] =
    "# an invented circuit\n"
    "circuit: HARBOUR-04\n"
    "ends:\n"
    "  a: { name: quay, control: \"198.18.0.1:61741\" }\n"
    "  b: { name: mast, control: called }\n"
    "medium: { kind: ethernet, line-rate: 1 Gbit/s }\n"
    "layers: [ ethernet, vlan, ipv4, { tcp: { timestamps: no } } ]\n"
    "empty:\n";

static inline struct node *
read_good(const char *text, const char *origin)
{
	struct node *root = NULL;
	struct error err = { 0 };

	if (document_read_text(text, strlen(text), origin, &root, &err) == -1)
		fail_msg("'%s': %s: %s", text, err.where, err.cause);
	return root;
}

/* The node that keys and numbers with dots between lead to. */
static inline const struct node *
find(const struct node *node, const char *path)
{
	char copy[128], *rest = copy, *part;

	(void)snprintf(copy, sizeof(copy), "%s", path);
	while (node != NULL && (part = strsep(&rest, ".")) != NULL) {
		if (node->kind == NODE_MAPPING) {
			node = node_child(node, part);
			continue;
		}
		unsigned long index = strtoul(part, NULL, 10);
		for (node = node->children; node != NULL && index > 0; index--)
			node = node->next;
	}
	return node;
}

#endif
