/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * stack: the layers of one segment as declared, lowest first.
 *
 * Reads and checks them; answers what the rest asks about a stack without
 * naming a layer.  A stack that was read holds one IP layer at least and ends
 * in a transport or in what lies on one.  Pure.
 */
#ifndef PLAFOND_STACK_H
#define PLAFOND_STACK_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "declare/layer.h"
#include "field.h"
#include "trial.h"

struct error;

#define LAYERS_MAX 16			/* in one stack */
#define LAYERS_DECLARED_MAX (LAYERS_MAX - 1)	/* room for TLS on top */

/* One layer as declared, lowest first in an array. */
struct layer_use {
	const struct layer *layer;	/* borrowed from the table */
	struct layer_options options;
	struct layer_cost cost;		/* the row's, adjusted */
	const struct node *at;		/* borrowed while reading, then NULL */
};

/* The row with every option at its default. */
void layer_use_default(struct layer_use *use, const struct layer *layer);

/* CUSTOM reader of `layers: [ethernet, {tcp: {timestamps: no}}]` into a
 * struct layer_stack at field->offset; refuses impossible stacks. */
struct layer_stack {
	struct layer_use use[LAYERS_MAX];
	size_t count;
};
int layers_read(const struct node *node, const struct field *field, void *base,
    struct error *err);
/* rows_of of such a field: "3.tls.record-bytes" leads to the options of the
 * layer tls, which is the item 3 of the list. */
int layers_rows_of(const struct node *node, const char **key,
    const struct field **rows, struct error *err);

/* Index of the lowest IP layer, and of the uppermost transport: a stack that
 * was read has both. */
size_t layers_lowest_packet(const struct layer_stack *stack);
size_t layers_transport(const struct layer_stack *stack);
/* Index of the lowest layer of a level below IP; false: there is none. */
bool layers_lowest_frame(const struct layer_stack *stack, size_t *index);
bool layers_have_level(const struct layer_stack *stack, enum layer_level level);
/* 4 or 6: what the transport lies on, hence the addresses of the data. */
unsigned layers_ip_version(const struct layer_stack *stack);
/* Least of what the layers below IP let through; 0: they have no say. */
uint64_t layers_default_mtu(const struct layer_stack *stack);
uint64_t layers_min_mtu(const struct layer_stack *stack);
/* True where both are the same from the lowest IP layer upward. */
bool layers_agree_above_frame(const struct layer_stack *left,
    const struct layer_stack *right);

/* What the layers from the lowest IP layer upward can carry, up to the first
 * layer of records or the top. */
struct layers_room {
	uint64_t carried_bytes;		/* by the uppermost of them */
	size_t top;			/* index above the uppermost */
	size_t failed;			/* index of what does not fit; on -1 */
};
/* In a packet of mtu_bytes.  -1 (ERROR_INPUT): no room for payload, or a
 * packet size declared inside a tunnel does not fit. */
int layers_fit(const struct layer_stack *stack, uint64_t mtu_bytes,
    struct layers_room *out, struct error *err);
/* The same check while reading: the error is placed at the layer. */
int layers_check_fit(const struct layer_stack *stack, uint64_t mtu_bytes,
    struct error *err);

/* The lowest layer lies on a medium without a gap of its own between frames:
 * takes the row for that where there is one. */
void layers_settle_bare(struct layer_stack *stack);
/* The worst accuracy of the rows. */
enum accuracy layers_accuracy(const struct layer_stack *stack);

/* The protocol that the stack ends in; false: its top is none that a trial
 * can use, *out is then the nearest. */
bool layers_ends_in_protocol(const struct layer_stack *stack,
    enum protocol *out);
/* The protocol that the stack ends in, or the nearest. */
enum protocol layers_protocol(const struct layer_stack *stack);
/* The stack with its transport and all above it replaced; options that were
 * declared for a layer which stays are kept. */
void layers_with_protocol(const struct layer_stack *stack,
    enum protocol protocol, struct layer_stack *out);
/* What lies above the uppermost IP layer, "tcp+tls"; returns buf. */
const char *layers_top_text(const struct layer_stack *stack, char *buf,
    size_t size);
/* "ethernet, vlan, ipv4, tcp"; returns buf. */
const char *layers_text(const struct layer_stack *stack, char *buf,
    size_t size);

#endif
