/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * random_stack: stacks drawn from the whole table of layers, and a medium with
 * rates that have no factor in common.
 */
#ifndef PLAFOND_TEST_RANDOM_STACK_H
#define PLAFOND_TEST_RANDOM_STACK_H

#include <inttypes.h>
#include <stdio.h>
#include <string.h>

#include "declaration_text.h"
#include "declare/layer.h"
#include "declare/medium.h"

/* A sequence that is the same in every run (Lehmer, Park and Miller 1988). */
static inline uint64_t
next_random(uint64_t *seed, uint64_t below)
{
	*seed = *seed * 48271 % 2147483647;
	return *seed % below;
}

#define ITEM_SIZE 256

/* A stack as written, lowest first. */
struct random_stack {
	char items[LAYERS_DECLARED_MAX][ITEM_SIZE];
	const struct layer *layers[LAYERS_DECLARED_MAX];
	size_t count;
};

static inline bool
random_lies_on(const struct layer *layer, const char *below)
{
	const char *const *name;

	for (name = layer->below; *name != NULL; name++)
		if (strcmp(*name, below) == 0)
			return true;
	return false;
}

/* Any row that lies on `below`; NULL: none does. */
static inline const struct layer *
random_layer_on(uint64_t *seed, const char *below)
{
	const struct layer *const *layer, *found = NULL;
	uint64_t count = 0;

	for (layer = layer_table; *layer != NULL; layer++)
		if (random_lies_on(*layer, below) &&
		    next_random(seed, ++count) == 0)
			found = *layer;
	return found;
}

/* "name: value" with a value that the row allows. */
static inline void
random_option(uint64_t *seed, const struct field *field, char *buf,
    size_t size)
{
	uint64_t max = field->max != 0 ? field->max : field->min + 100, value;
	size_t count = 0;

	value = field->min + next_random(seed, max - field->min + 1);
	switch ((int)field->kind) {
	case FIELD_YES_NO:
		(void)snprintf(buf, size, "%s: %s", field->name,
		    value % 2 == 0 ? "yes" : "no");
		break;
	case FIELD_CHOICE:
		while (field->choices[count].name != NULL)
			count++;
		(void)snprintf(buf, size, "%s: %s", field->name,
		    field->choices[next_random(seed, count)].name);
		break;
	case FIELD_QUANTITY:
		if (value - value % 8 >= field->min)
			value -= value % 8;
		(void)snprintf(buf, size, "%s: %" PRIu64 " B", field->name,
		    value);
		break;
	default:
		(void)snprintf(buf, size, "%s: %" PRIu64, field->name, value);
		break;
	}
}

/* The layer's name, or half the time some of its options beside it. */
static inline void
random_item(uint64_t *seed, const struct layer *layer, char buf[ITEM_SIZE])
{
	const struct field *field;
	char options[ITEM_SIZE - 64] = "";
	size_t used = 0;

	if (layer->fields == NULL || next_random(seed, 2) == 0) {
		(void)snprintf(buf, ITEM_SIZE, "%s", layer->name);
		return;
	}
	for (field = layer->fields; field->name != NULL; field++) {
		if (next_random(seed, 4) != 0)
			continue;
		if (used > 0)
			used += (size_t)snprintf(options + used,
			    sizeof(options) - used, ", ");
		random_option(seed, field, options + used,
		    sizeof(options) - used);
		used = strlen(options);
	}
	(void)snprintf(buf, ITEM_SIZE, "{ %s: { %s } }", layer->name, options);
}

static inline void
random_push(uint64_t *seed, const struct layer *layer,
    struct random_stack *stack)
{
	random_item(seed, layer, stack->items[stack->count]);
	stack->layers[stack->count++] = layer;
}

/* From a medium up to what can carry payload; the walk starts again where it
 * leads nowhere.  At most `most` layers. */
static inline void
random_stack(uint64_t *seed, size_t most, struct random_stack *out)
{
	const struct layer *layer;

	for (;;) {
		out->count = 0;
		layer = random_layer_on(seed, "");
		while (layer != NULL && out->count < most) {
			random_push(seed, layer, out);
			if (layer->level == LEVEL_PAYLOAD ||
			    (layer->level == LEVEL_SEGMENT &&
			    next_random(seed, 3) == 0))
				return;
			layer = random_layer_on(seed, layer->name);
		}
	}
}

/* The stack with a walk of one to four more layers between two that are there,
 * above the lowest.  False: there is no room or no way. */
static inline bool
random_insert(uint64_t *seed, const struct random_stack *stack,
    struct random_stack *out)
{
	size_t at = 1 + next_random(seed, stack->count - 1), i, added = 0;
	const struct layer *layer = stack->layers[at - 1];

	memset(out, 0, sizeof(*out));
	for (i = 0; i < at; i++)
		memcpy(out->items[i], stack->items[i], ITEM_SIZE);
	out->count = at;
	do {
		layer = random_layer_on(seed, layer->name);
		if (layer == NULL || added == 4 ||
		    stack->count + ++added > LAYERS_DECLARED_MAX)
			return false;
		random_push(seed, layer, out);
	} while (!random_lies_on(stack->layers[at], layer->name) ||
	    layer_find_on(stack->layers[at]->name, layer->name) !=
	    stack->layers[at]);
	for (i = at; i < stack->count; i++)
		memcpy(out->items[out->count++], stack->items[i], ITEM_SIZE);
	return true;
}

/* Reads it as a declaration would; false: its options do not go together. */
static inline bool
random_stack_read(const struct random_stack *stack, struct layer_stack *out)
{
	const struct field field = { .name = "layers" };
	char text[LAYERS_DECLARED_MAX * (ITEM_SIZE + 2) + 8] = "[";
	struct node *root;
	struct error err;
	size_t i, used = 1;
	int rc;

	for (i = 0; i < stack->count; i++)
		used += (size_t)snprintf(text + used, sizeof(text) - used,
		    "%s%s", i == 0 ? "" : ", ", stack->items[i]);
	(void)snprintf(text + used, sizeof(text) - used, "]");
	if (document_read_text(text, strlen(text), "stack", &root, &err) == -1)
		fail_msg("%s: %s", text, err.cause);
	rc = layers_read(root, &field, out, &err);
	document_free(root);
	return rc == 0;
}

/* A stack whose options go together, as written and as read. */
static inline void
random_layers(uint64_t *seed, size_t most, struct random_stack *written,
    struct layer_stack *out)
{
	do
		random_stack(seed, most, written);
	while (!random_stack_read(written, out));
}

/* A medium as awkward as one may be: whole rates or quotients. */
struct awkward {
	uint64_t line_bps, left_bps[3], den;
	uint64_t steps, contention, duplex, channel_bps, counts_acks;
};

static inline int
awkward_capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct awkward *p = base;
	uint64_t i;

	(void)load;
	(void)err;
	out->line_bps = fraction_make(p->line_bps, p->den);
	for (i = 0; i < p->steps; i++)
		medium_add_step(out, "a step", fraction_make(p->left_bps[i],
		    p->den), "none");
	out->contention = p->contention;
	out->duplex = (enum duplex)p->duplex;
	out->channel_bps = p->channel_bps;
	out->counts_acks = p->counts_acks != 0;
	return 0;
}

static const struct medium awkward_medium = {
	.name = "awkward",
	.title = "Rates without common factors",
	.capacity = awkward_capacity,
	.source = "none",
};

/* A circuit of one segment with these layers on that medium. */
static inline struct circuit *
awkward_circuit(const struct layer_stack *layers, uint64_t mtu_bytes,
    const struct awkward *parameters)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, udp",
	    "");
	struct segment *segment = &circuit->segments[0];

	segment->layers = *layers;
	segment->mtu_bytes = mtu_bytes;
	segment->medium.medium = &awkward_medium;
	memcpy(&segment->medium.parameters, parameters, sizeof(*parameters));
	return circuit;
}

#endif
