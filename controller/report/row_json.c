/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/row_json.h"

#include "error.h"
#include "report/json_value.h"

json_t *
row_json_text(const char *text)
{
	return text == NULL ? json_null() : json_value_text(text);
}

json_t *
row_json_names(const char *const names[])
{
	json_t *array = json_array();
	size_t i;

	for (i = 0; names[i] != NULL; i++)
		json_push(array, json_string(names[i]));
	return array;
}

json_t *
row_json_fields(const struct field *fields)
{
	json_t *array = json_array(), *object;
	const struct field *row;
	char allowed[512];

	for (row = fields; row != NULL && row->name != NULL; row++) {
		object = json_object();
		json_put(object, "name", json_value_text(row->name));
		json_put(object, "help", row_json_text(row->help));
		json_put(object, "allowed", json_value_text(
		    field_allowed(row, allowed, sizeof(allowed))));
		json_put(object, "default", row_json_text(row->default_text));
		json_put(object, "required", json_boolean(row->required));
		if (row->fields != NULL)
			json_put(object, "fields",
			    row_json_fields(row->fields));
		json_push(array, object);
	}
	return array;
}

int
row_json_print(const char *format, const char *name, json_t *rows, FILE *out,
    struct error *err)
{
	json_t *root = json_object();
	int rc;

	json_put(root, "format", json_value_text(format));
	json_put(root, "software",
	    json_value_text("plafond " PLAFOND_VERSION));
	json_put(root, name, rows);
	rc = json_dumpf(root, out, JSON_INDENT(2));
	(void)fputc('\n', out);
	json_decref(root);
	return rc == 0 ? 0 : error_set(err, ERROR_INTERNAL, "no memory");
}
