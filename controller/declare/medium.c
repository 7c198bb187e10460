/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/medium.h"

#include <assert.h>
#include <stdio.h>
#include <string.h>

#include "error.h"
#include "log.h"

static const char *const accuracy_names[] = {
	[ACCURACY_EXACT] = "exact",
	[ACCURACY_NOMINAL] = "nominal",
	[ACCURACY_MODEL] = "model",
	[ACCURACY_REFERENCE] = "reference",
};

/* medium_read has looked at the kind before it knew the table. */
static int
kind_read(const struct node *node, const struct field *field, void *base,
    struct error *err)
{
	(void)node;
	(void)field;
	(void)base;
	(void)err;
	return 0;
}

#define KIND_ROW							\
	{ .name = "kind", .kind = FIELD_CUSTOM, .read = kind_read,	\
	  .help = "name of the medium" }

static const struct field ethernet_fields[] = {
	KIND_ROW,
	{ .name = "line-rate", .kind = FIELD_QUANTITY,
	  .dimension = DIMENSION_RATE,
	  .offset = offsetof(struct medium_parameters, line_rate_bps),
	  .min = 1, .max = RATE_MAX_BPS, .required = true,
	  .per_direction = true,
	  .help = "the MAC rate that names the interface, e.g. 1 Gbit/s" },
	{ .name = NULL },
};
static const struct field host_fields[] = {
	KIND_ROW,
	{ .name = NULL },
};

/* The name of an Ethernet rate is the MAC rate: line code and FEC are paid for
 * by a higher symbol rate and are never taken off (IEEE 802.3). */
static int
ethernet_rate(const struct medium_parameters *parameters,
    enum direction direction, struct medium_rate *out, struct error *err)
{
	(void)err;
	out->num_bps = parameters->line_rate_bps[direction];
	out->den = 1;
	return 0;
}

#define NAMES(...) (const char *const[]){ __VA_ARGS__, NULL }

const struct medium medium_table[] = {
	{
		.name = "ethernet",
		.title = "Ethernet, full duplex, 10 Mbit/s to 400 Gbit/s",
		.fields = ethernet_fields,
		.rate = ethernet_rate,
		.carries = NAMES("ethernet"),
		.tolerance_ppm = 100,	/* RFC 5180 appendix A.1 */
		.accuracy = ACCURACY_EXACT,
		.accuracy_note = "the clocks of two interfaces may differ: "
		    "each within 100 ppm of the name (RFC 5180 A.1)",
		.formula = "line = line-rate; line code and FEC are already "
		    "paid for by the symbol rate",
		.source = "IEEE 802.3",
	},
	{
		.name = "host",
		.title = "inside one machine: a reference, never a ceiling",
		.fields = host_fields,
		.carries = NAMES("ipv4", "ipv6"),
		/* MTU of Linux's loopback interface, drivers/net/loopback.c */
		.default_mtu_bytes = 65536,
		.accuracy = ACCURACY_REFERENCE,
		.accuracy_note = "shows what the machine can do; no rate is "
		    "expected of it",
		.formula = "none",
		.source = "measured",
	},
	{ .name = NULL },
};
#define MEDIA_COUNT (sizeof(medium_table) / sizeof(medium_table[0]) - 1)

const char *
accuracy_name(enum medium_accuracy accuracy)
{
	assert(accuracy <= ACCURACY_REFERENCE);
	return accuracy_names[accuracy];
}

const struct medium *
medium_find(const char *name)
{
	const struct medium *medium;

	for (medium = medium_table; medium->name != NULL; medium++)
		if (strcmp(medium->name, name) == 0)
			return medium;
	return NULL;
}

bool
medium_carries(const struct medium *medium, const char *layer_name)
{
	const char *const *name;

	for (name = medium->carries; *name != NULL; name++)
		if (strcmp(*name, layer_name) == 0)
			return true;
	return false;
}

bool
medium_is_reference(const struct medium *medium)
{
	return medium->rate == NULL;
}

static int
unknown_medium(const struct node *node, const char *name, struct error *err)
{
	const char *names[MEDIA_COUNT], *nearest;
	char allowed[400] = "", found[64];
	size_t i, used = 0;

	for (i = 0; i < MEDIA_COUNT; i++) {
		names[i] = medium_table[i].name;
		(void)snprintf(allowed + used, sizeof(allowed) - used, "%s%s",
		    i == 0 ? "" : ", ", names[i]);
		used += strlen(allowed + used);
	}
	nearest = nearest_name(name, names, MEDIA_COUNT);
	(void)log_escape(name, found, sizeof(found));
	if (nearest != NULL)
		return node_error(node, err, "kind: found '%s', did you mean "
		    "'%s'? allowed: %s", found, nearest, allowed);
	return node_error(node, err, "kind: found '%s', allowed: %s", found,
	    allowed);
}

int
medium_read(const struct node *node, const struct field *field, void *base,
    struct error *err)
{
	const struct node *kind = node;
	struct node none;
	struct medium_use *use;

	use = (struct medium_use *)(void *)((char *)base + field->offset);
	memset(use, 0, sizeof(*use));
	if (node == NULL)
		return 0;
	if (node->kind == NODE_MAPPING) {
		kind = node_child(node, "kind");
	} else {		/* a bare name: no parameters, same place */
		none = *node;
		none.kind = NODE_MAPPING;
		none.children = NULL;
	}
	if (kind == NULL || kind->kind != NODE_SCALAR)
		return node_error(node, err, "medium: kind: missing, allowed: "
		    "{ kind: NAME, ... }; `plafond media` lists the names");
	use->medium = medium_find(kind->text);
	if (use->medium == NULL)
		return unknown_medium(kind, kind->text, err);
	return fields_read(kind == node ? &none : node, use->medium->fields,
	    kind->text, &use->parameters, err);
}
