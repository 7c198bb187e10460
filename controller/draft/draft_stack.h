/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * draft_stack: the layers and the MTU that a chain of interfaces amounts to.
 *
 * Makes layers as a declaration writes them and asks the declaration's own
 * reader whether they go together; knows no octets, which it takes from the
 * layers that were read.  Pure.
 */
#ifndef PLAFOND_DRAFT_STACK_H
#define PLAFOND_DRAFT_STACK_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "draft/interface.h"

#define DRAFT_LAYERS_MAX 48
#define DRAFT_LAYER_SIZE 64		/* of the longest, with all options */
#define DRAFT_LAYERS_SIZE (DRAFT_LAYERS_MAX * (DRAFT_LAYER_SIZE + 2) + 8)
#define DRAFT_TEXT_SIZE 512

struct draft_stack {
	/* As in YAML, lowest first. */
	char layers[DRAFT_LAYERS_MAX][DRAFT_LAYER_SIZE];
	size_t count;
	size_t packet;			/* index of the lowest IP layer */
	/* Device i carries what the layers from this index up make. */
	size_t carries[INTERFACE_DEPTH_MAX];
	/* Why the layers cannot be written as they stand; "": they can. */
	char open[DRAFT_TEXT_SIZE];
	char confirm[DRAFT_TEXT_SIZE];	/* what a person must confirm, or "" */

	bool octets_unknown;		/* of what a tunnel adds */
	uint64_t mtu_bytes;		/* 0: it cannot be told */
	/* Of the first device, and of what its layers add to that. */
	uint64_t inner_mtu_bytes, added_bytes;
	bool too_large;			/* a full packet of it does not fit */
	bool unbounded;			/* no MTU of what lies below is told */
};

void draft_stack_make(const struct interface_facts *facts,
    struct draft_stack *out);
/* "[ ethernet, ipv4, tcp ]"; returns buf. */
const char *draft_stack_text(const struct draft_stack *stack, size_t from,
    char *buf, size_t size);

#endif
