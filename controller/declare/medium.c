/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/medium.h"

#include <assert.h>
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "declare/medium_rows.h"
#include "error.h"
#include "log.h"

const struct medium *const media[] = {
	MEDIUM_ROWS
	NULL
};
#define MEDIA_COUNT (sizeof(media) / sizeof(media[0]) - 1)

static const char *const duplex_names[] = {
	[DUPLEX_FULL] = "full",
	[DUPLEX_SHARED] = "shared",
};

const struct choice medium_ends[] = {
	{ "a", END_A },
	{ "b", END_B },
	{ NULL, 0 },
};

const struct choice medium_duplexes[] = {
	{ "full", DUPLEX_FULL },
	{ "half", DUPLEX_SHARED },
	{ NULL, 0 },
};

const char *
duplex_name(enum duplex duplex)
{
	assert(duplex <= DUPLEX_SHARED);
	return duplex_names[duplex];
}

const struct medium *
medium_find(const char *name)
{
	size_t i;

	for (i = 0; i < MEDIA_COUNT; i++)
		if (strcmp(media[i]->name, name) == 0)
			return media[i];
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
medium_use_carries(const struct medium_use *use, const char *layer_name)
{
	return medium_carries(use->medium, layer_name) &&
	    (use->medium->suits == NULL ||
	    use->medium->suits(&use->parameters, layer_name));
}

bool
medium_is_reference(const struct medium *medium)
{
	return medium->capacity == NULL;
}

static int
unknown_medium(const struct node *node, const char *name, struct error *err)
{
	const char *names[MEDIA_COUNT], *nearest;
	char allowed[400] = "", found[64];
	size_t i, used = 0;

	for (i = 0; i < MEDIA_COUNT; i++) {
		names[i] = media[i]->name;
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
	if (kind == node)
		node = &none;
	if (fields_read(node, use->medium->fields, kind->text,
	    &use->parameters, err) == -1)
		return -1;
	if (use->medium->check == NULL)
		return 0;
	return use->medium->check(&use->parameters, node, err);
}

int
medium_rows_of(const struct node *node, const char **key,
    const struct field **rows, struct error *err)
{
	const struct medium *medium = NULL;
	const struct node *kind = node;

	(void)key;
	if (node != NULL && node->kind == NODE_MAPPING)
		kind = node_child(node, "kind");
	if (kind != NULL && kind->kind == NODE_SCALAR)
		medium = medium_find(kind->text);
	if (medium == NULL)
		return error_set(err, ERROR_USAGE, "medium: its kind is not "
		    "declared or not known; `plafond media` lists them");
	*rows = medium->fields;
	return 0;
}

const struct node *
medium_place(const struct node *node, const char *key)
{
	const struct node *child = node_child(node, key);

	return child != NULL ? child : node;
}

int
medium_kind_read(const struct node *node, const struct field *field,
    void *base, struct error *err)
{
	(void)node;
	(void)field;
	(void)base;
	(void)err;
	return 0;
}

bool
medium_is_upstream(uint64_t subscriber, enum direction direction)
{
	return direction_sender(direction) == (enum end)subscriber;
}

bool
medium_upstream(const struct medium_use *use, enum direction direction)
{
	uint64_t subscriber;

	if (use->medium->subscriber_offset == 0)
		return false;
	memcpy(&subscriber, use->parameters.bytes +
	    use->medium->subscriber_offset, sizeof(subscriber));
	return medium_is_upstream(subscriber, direction);
}

void
medium_add_step(struct medium_capacity *out, const char *what,
    struct fraction left_bps, const char *source)
{
	struct medium_step *step;

	assert(out->steps_count < MEDIUM_STEPS_MAX);
	assert(fraction_compare(left_bps, out->steps_count == 0 ?
	    out->line_bps : out->steps[out->steps_count - 1].left_bps) <= 0);
	step = &out->steps[out->steps_count++];
	step->what = what;
	step->left_bps = left_bps;
	step->source = source;
}

void
medium_add_note(struct medium_capacity *out, const char *fmt, ...)
{
	va_list ap;

	assert(out->notes_count < MEDIUM_NOTES_MAX);
	va_start(ap, fmt);
	(void)vsnprintf(out->notes[out->notes_count++], MEDIUM_NOTE_SIZE, fmt,
	    ap);
	va_end(ap);
}

struct fraction
medium_whole_bps(double bps)
{
	if (isnan(bps) || bps < 0)
		return fraction_whole(0);
	if (bps > (double)RATE_MAX_BPS)
		return fraction_whole(RATE_MAX_BPS + 1);
	return fraction_whole((uint64_t)bps);
}
