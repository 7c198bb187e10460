/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A help page's list of the fields of a YAML file, by their rows. */
#include <string.h>

#include "columns.h"
#include "option.h"

/* Tables that were listed, and under what name. */
struct listed {
	const struct field *fields;
	char name[96];
};
#define LISTED_MAX 16

struct listing {
	struct columns *columns;
	struct listed listed[LISTED_MAX];
	size_t listed_count;
};

static const struct listed *
find_listed(const struct listing *listing, const struct field *fields)
{
	size_t i;

	for (i = 0; i < listing->listed_count; i++)
		if (listing->listed[i].fields == fields)
			return &listing->listed[i];
	return NULL;
}

/* What a value of the row may be; what one direction may be is said once. */
static void
describe(const struct field *row, const struct listed *listed, char *text,
    size_t size)
{
	struct field one = *row;
	char allowed[256] = "";

	one.per_direction = false;
	if (row->kind != FIELD_CUSTOM && row->kind != FIELD_TEXT &&
	    row->kind != FIELD_MAPPING && row->kind != FIELD_LIST)
		(void)field_allowed(&one, allowed, sizeof(allowed));
	(void)snprintf(text, size, "%s%s%s%s%s%s%s%s%s",
	    row->help != NULL ? row->help : "",
	    allowed[0] != '\0' ? "; " : "", allowed,
	    row->default_text != NULL ? "; default: " : "",
	    row->default_text != NULL ? row->default_text : "",
	    row->per_direction ? " (by direction)" : "",
	    row->required ? " (required)" : "",
	    listed != NULL ? "; its fields are those of " : "",
	    listed != NULL ? listed->name : "");
}

static void
add_fields(struct listing *listing, const struct field *fields,
    const char *prefix)
{
	const struct listed *listed = NULL;
	const struct field *row;
	char name[96], label[100], text[768];

	for (row = fields; row->name != NULL; row++) {
		const char *cells[2] = { label, text };

		if (row->fields != NULL)
			listed = find_listed(listing, row->fields);
		(void)snprintf(name, sizeof(name), "%s%s", prefix, row->name);
		(void)snprintf(label, sizeof(label), "%s:", name);
		describe(row, row->fields != NULL ? listed : NULL, text,
		    sizeof(text));
		columns_row(listing->columns, cells);
		if (row->fields == NULL || listed != NULL)
			continue;
		if (listing->listed_count < LISTED_MAX) {
			struct listed *new;

			new = &listing->listed[listing->listed_count++];
			new->fields = row->fields;
			(void)snprintf(new->name, sizeof(new->name), "%s",
			    name);
		}
		(void)snprintf(text, sizeof(text), "%s.", name);
		add_fields(listing, row->fields, text);
	}
}

static bool
any_per_direction(const struct field *fields)
{
	for (; fields->name != NULL; fields++)
		if (fields->per_direction || (fields->fields != NULL &&
		    any_per_direction(fields->fields)))
			return true;
	return false;
}

void
fields_print(const struct field *fields, FILE *out)
{
	struct listing listing = { .columns = columns_new("lw") };

	add_fields(&listing, fields, "");
	columns_print(listing.columns, 2, out);
	columns_free(listing.columns);
	if (any_per_direction(fields))
		(void)fputs("\n(by direction): one value for both, or "
		    "{ a-to-b: VALUE, b-to-a: VALUE }.\n", out);
}
