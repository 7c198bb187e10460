/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/stack.h"

#include <assert.h>
#include <stdio.h>
#include <string.h>

#include "error.h"
#include "log.h"

#define NAMES_MAX 64	/* in a message */

size_t
layers_lowest_packet(const struct layer_stack *stack)
{
	size_t i;

	for (i = 0; i < stack->count; i++)
		if (stack->use[i].layer->level == LEVEL_PACKET)
			break;
	assert(i < stack->count);
	return i;
}

size_t
layers_transport(const struct layer_stack *stack)
{
	size_t i = stack->count;

	while (i > 0 && stack->use[i - 1].layer->level != LEVEL_SEGMENT)
		i--;
	assert(i > 0);
	return i - 1;
}

bool
layers_lowest_frame(const struct layer_stack *stack, size_t *index)
{
	size_t i, packet = layers_lowest_packet(stack);

	for (i = 0; i < packet; i++) {
		if (stack->use[i].layer->level == LEVEL_FRAME) {
			*index = i;
			return true;
		}
	}
	return false;
}

bool
layers_have_level(const struct layer_stack *stack, enum layer_level level)
{
	size_t index;

	if (level == LEVEL_FRAME || level == LEVEL_FRAME_WITHOUT_FCS)
		return layers_lowest_frame(stack, &index);
	return true;
}

unsigned
layers_ip_version(const struct layer_stack *stack)
{
	size_t i = layers_transport(stack);

	while (i > 0 && stack->use[i - 1].layer->ip_version == 0)
		i--;
	assert(i > 0);
	return stack->use[i - 1].layer->ip_version;
}

uint64_t
layers_default_mtu(const struct layer_stack *stack)
{
	size_t i, packet = layers_lowest_packet(stack);
	uint64_t mtu_bytes = 0, own_bytes;

	for (i = 0; i < packet; i++) {
		own_bytes = stack->use[i].layer->default_mtu_bytes;
		if (own_bytes != 0 && (mtu_bytes == 0 || own_bytes < mtu_bytes))
			mtu_bytes = own_bytes;
	}
	return mtu_bytes;
}

uint64_t
layers_min_mtu(const struct layer_stack *stack)
{
	return stack->use[layers_lowest_packet(stack)].layer->min_mtu_bytes;
}

static bool
options_equal(const struct layer_options *left,
    const struct layer_options *right)
{
	return memcmp(left, right, sizeof(*left)) == 0;
}

bool
layers_agree_above_frame(const struct layer_stack *left,
    const struct layer_stack *right)
{
	size_t l = layers_lowest_packet(left), r = layers_lowest_packet(right);

	if (left->count - l != right->count - r)
		return false;
	for (; l < left->count; l++, r++)
		if (left->use[l].layer != right->use[r].layer ||
		    !options_equal(&left->use[l].options,
		    &right->use[r].options))
			return false;
	return true;
}

bool
layers_ends_in_protocol(const struct layer_stack *stack, enum protocol *out)
{
	size_t transport = layers_transport(stack), i, matched, longest = 0;
	enum protocol protocol, best = PROTOCOL_TCP;

	for (protocol = 0; protocol < PROTOCOLS; protocol++) {
		const char *const *names = protocol_layers(protocol);

		matched = 0;
		for (i = transport; i < stack->count && names[matched] != NULL;
		    i++, matched++)
			if (strcmp(stack->use[i].layer->name,
			    names[matched]) != 0)
				break;
		if (names[matched] == NULL && matched > longest) {
			longest = matched;
			best = protocol;
		}
	}
	*out = best;
	return longest == stack->count - transport;
}

enum protocol
layers_protocol(const struct layer_stack *stack)
{
	enum protocol protocol;

	(void)layers_ends_in_protocol(stack, &protocol);
	return protocol;
}

enum accuracy
layers_accuracy(const struct layer_stack *stack)
{
	enum accuracy worst = ACCURACY_EXACT;

	for (size_t i = 0; i < stack->count; i++)
		if (stack->use[i].layer->accuracy > worst)
			worst = stack->use[i].layer->accuracy;
	return worst;
}

const char *
layers_top_text(const struct layer_stack *stack, char *buf, size_t size)
{
	size_t i, used = 0;

	buf[0] = '\0';
	for (i = layers_transport(stack); i < stack->count; i++) {
		(void)snprintf(buf + used, size - used, "%s%s",
		    used == 0 ? "" : "+", stack->use[i].layer->name);
		used += strlen(buf + used);
	}
	return buf;
}

const char *
layers_text(const struct layer_stack *stack, char *buf, size_t size)
{
	size_t i, used = 0;

	buf[0] = '\0';
	for (i = 0; i < stack->count; i++) {
		(void)snprintf(buf + used, size - used, "%s%s",
		    i == 0 ? "" : ", ", stack->use[i].layer->name);
		used += strlen(buf + used);
	}
	return buf;
}

/* The row's cost with the options' own. */
static int
use_adjust(struct layer_use *use, struct error *err)
{
	use->cost = use->layer->cost;
	if (use->layer->adjust == NULL)
		return 0;
	return use->layer->adjust(&use->options, &use->cost, err);
}

void
layers_settle_bare(struct layer_stack *stack)
{
	struct layer_use *use = &stack->use[0];
	const struct layer *bare = layer_find_on(use->layer->name, "bare");
	struct error err;
	int rc;

	if (bare == NULL || bare == use->layer)
		return;
	use->layer = bare;
	rc = use_adjust(use, &err);
	assert(rc == 0);
	(void)rc;
}

void
layer_use_default(struct layer_use *use, const struct layer *layer)
{
	struct error err;
	int rc;

	memset(use, 0, sizeof(*use));
	use->layer = layer;
	if (layer->fields != NULL) {
		rc = fields_read(NULL, layer->fields, layer->name,
		    &use->options, &err);
		assert(rc == 0);
	}
	rc = use_adjust(use, &err);
	assert(rc == 0);
	(void)rc;
}

void
layers_with_protocol(const struct layer_stack *stack, enum protocol protocol,
    struct layer_stack *out)
{
	const char *const *names = protocol_layers(protocol);
	size_t transport = layers_transport(stack), i, n;

	*out = *stack;
	out->count = transport;
	for (n = 0; names[n] != NULL; n++) {
		const struct layer *layer = layer_find(names[n]);

		assert(layer != NULL && out->count < LAYERS_MAX);
		layer_use_default(&out->use[out->count], layer);
		for (i = transport; i < stack->count; i++)
			if (stack->use[i].layer == layer)
				out->use[out->count] = stack->use[i];
		out->count++;
	}
}

/* Names of layers in words, "ipv4 or ipv6". */
static void
append_names(char *buf, size_t size, const char *const names[])
{
	size_t i, used;

	for (i = 0; names[i] != NULL; i++) {
		used = strlen(buf);
		(void)snprintf(buf + used, size - used, "%s%s",
		    i == 0 ? "" : names[i + 1] == NULL ? " or " : ", ",
		    names[i][0] == '\0' ? "a medium" : names[i]);
	}
}

static int
find_on(const struct layer_stack *stack, const char *name,
    const struct node *node, const struct layer **out, struct error *err)
{
	const char *found = "", *below[NAMES_MAX] = { NULL };
	const struct layer *layer;
	char allowed[512] = "";
	size_t count = 0, i;

	if (stack->count > 0)
		found = stack->use[stack->count - 1].layer->name;
	*out = layer_find_on(name, found);
	if (*out != NULL)
		return 0;
	for (layer = layer_find(name); layer != NULL;
	    layer = layer_next_variant(layer))
		for (i = 0; layer->below[i] != NULL; i++)
			if (strcmp(layer->below[i], "bare") != 0 &&
			    count < NAMES_MAX - 1)
				below[count++] = layer->below[i];
	append_names(allowed, sizeof(allowed), below);
	return node_error(node, err, "layers: found %s on %s; %s lies on %s",
	    name, found[0] == '\0' ? "the medium" : found, name, allowed);
}

static int
unknown_layer(const struct node *node, const char *name, struct error *err)
{
	const char *names[NAMES_MAX], *nearest;
	char allowed[800] = "", found[64];
	size_t count = 0, i;

	for (i = 0; layer_table[i] != NULL && count < NAMES_MAX - 1; i++)
		if (layer_find(layer_table[i]->name) == layer_table[i])
			names[count++] = layer_table[i]->name;
	names[count] = NULL;
	nearest = nearest_name(name, names, count);
	append_names(allowed, sizeof(allowed), names);
	(void)log_escape(name, found, sizeof(found));
	if (nearest != NULL)
		return node_error(node, err, "layers: found '%s', did you mean "
		    "'%s'? allowed: %s", found, nearest, allowed);
	return node_error(node, err, "layers: found '%s', allowed: %s", found,
	    allowed);
}

/* Where a refusal of options belongs: its words begin with the option's name,
 * or else it is about them all. */
static const struct node *
option_place(const struct node *options, const char *cause)
{
	char name[64];
	const struct node *child;

	(void)snprintf(name, sizeof(name), "%.*s", (int)strcspn(cause, ":"),
	    cause);
	child = node_child(options, name);
	return child != NULL ? child : options;
}

/* One item: a name, or a mapping of one name to its options. */
static int
read_use(const struct node *item, struct layer_stack *stack,
    struct error *err)
{
	struct layer_use *use = &stack->use[stack->count];
	const struct node *options = NULL;
	const struct layer *layer;
	const char *name;
	struct error cause;

	if (item->kind == NODE_SCALAR) {
		name = item->text;
	} else if (item->kind == NODE_MAPPING && item->children != NULL &&
	    item->children->next == NULL) {
		options = item->children;
		name = options->key;
	} else {
		return node_error(item, err, "layers: allowed: a name, or "
		    "{ name: { option: value } }");
	}
	if (layer_find(name) == NULL)
		return unknown_layer(item, name, err);
	if (find_on(stack, name, item, &layer, err) == -1)
		return -1;
	if (options != NULL && layer->fields == NULL)
		return node_error(options, err, "layers: %s has no options",
		    name);
	memset(use, 0, sizeof(*use));
	use->layer = layer;
	use->at = options != NULL ? options : item;
	if (layer->fields != NULL && fields_read(options, layer->fields,
	    layer->name, &use->options, err) == -1)
		return -1;
	if (use_adjust(use, &cause) == -1)
		return node_error(option_place(use->at, cause.cause), err,
		    "%s: %s", name, cause.cause);
	stack->count++;
	return 0;
}

/* The circuit's mtu is that of the lowest IP layer. */
static int
check_lowest_mtu(const struct layer_stack *stack, struct error *err)
{
	const struct layer_use *use;

	use = &stack->use[layers_lowest_packet(stack)];
	if (use->options.mtu_bytes == FIELD_UNSET)
		return 0;
	return node_error(node_child(use->at, "mtu"), err, "%s: mtu: found on "
	    "the lowest IP layer, allowed: on one inside a tunnel; this "
	    "one's is the mtu of the circuit or segment", use->layer->name);
}

/* A trial needs a packet to fill and a transport to fill it: what lies above
 * the uppermost transport takes from its payload and is no tunnel. */
static int
check_top(const struct layer_stack *stack, const struct node *node,
    struct error *err)
{
	const char *names[NAMES_MAX];
	char allowed[256] = "";
	size_t count = 0, i = stack->count, n;

	while (i > 0 && stack->use[i - 1].layer->level == LEVEL_PAYLOAD)
		i--;
	if (i > 0 && stack->use[i - 1].layer->level == LEVEL_SEGMENT)
		return 0;
	for (n = 0; layer_table[n] != NULL && count < NAMES_MAX - 1; n++)
		if (layer_table[n]->level == LEVEL_SEGMENT)
			names[count++] = layer_table[n]->name;
	names[count] = NULL;
	append_names(allowed, sizeof(allowed), names);
	return node_error(node, err, "layers: the stack has no transport%s%s, "
	    "allowed on top: %s", i > 0 ? " above " : "",
	    i > 0 ? stack->use[i - 1].layer->name : "", allowed);
}

int
layers_read(const struct node *node, const struct field *field, void *base,
    struct error *err)
{
	struct layer_stack *stack;
	const struct node *item;

	stack = (struct layer_stack *)(void *)((char *)base + field->offset);
	memset(stack, 0, sizeof(*stack));
	if (node == NULL)
		return 0;
	if (node->kind != NODE_SEQUENCE)
		return node_error(node, err, "layers: allowed: a list, lowest "
		    "first, such as [ ethernet, ipv4, tcp ]");
	for (item = node->children; item != NULL; item = item->next) {
		if (stack->count == LAYERS_DECLARED_MAX)
			return node_error(item, err, "layers: more than %d",
			    LAYERS_DECLARED_MAX);
		if (read_use(item, stack, err) == -1)
			return -1;
	}
	if (check_top(stack, node, err) == -1)
		return -1;
	return check_lowest_mtu(stack, err);
}
