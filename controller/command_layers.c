/* SPDX-License-Identifier: GPL-3.0-or-later */
/* plafond layers: the table of layers, or one with its options and all rows of
 * its name. */
#include <inttypes.h>
#include <string.h>

#include "columns.h"
#include "command.h"
#include "declare/layer.h"
#include "error.h"
#include "option.h"
#include "report/csv_text.h"
#include "report/json_value.h"
#include "report/row_json.h"

#define NAMES_MAX 64
#define BELOW_SIZE 512

static const char *
below_text(const struct layer *layer, char buf[BELOW_SIZE])
{
	size_t i, used = 0;

	buf[0] = '\0';
	for (i = 0; layer->below[i] != NULL; i++) {
		const char *name = layer->below[i];

		if (name[0] == '\0')
			name = "a medium";
		else if (strcmp(name, "bare") == 0)
			name = "a medium without gaps";
		(void)snprintf(buf + used, BELOW_SIZE - used, "%s%s",
		    i == 0 ? "" : ", ", name);
		used += strlen(buf + used);
	}
	return buf;
}

/* What it always costs a packet, before padding. */
static uint64_t
fixed_bytes(const struct layer_cost *cost)
{
	return cost->before_bytes + cost->head_bytes + cost->trail_bytes +
	    cost->tail_bytes + cost->gap_bytes;
}

static void
print_table(FILE *out)
{
	static const char *const head[] = { "layer", "level", "octets",
		"accuracy", "source; lies on" };
	struct columns *columns = columns_new("llrlw");
	char below[BELOW_SIZE], octets[32], lies[BELOW_SIZE + 128];
	size_t i;

	columns_row(columns, head);
	columns_rule(columns);
	for (i = 0; layer_table[i] != NULL; i++) {
		const struct layer *layer = layer_table[i];
		const char *cells[] = { layer->name, level_name(layer->level),
			octets, accuracy_name(layer->accuracy), lies };

		(void)snprintf(lies, sizeof(lies), "%s; %s", layer->source,
		    below_text(layer, below));
		(void)snprintf(octets, sizeof(octets), "%" PRIu64 "%s",
		    fixed_bytes(&layer->cost), layer->fields != NULL ? "+" :
		    "");
		columns_row(columns, cells);
	}
	columns_print(columns, 0, out);
	columns_free(columns);
	(void)fputs("\noctets: without options and padding; +: options change "
	    "it.  tunnel: nothing is\ncounted there.  `plafond layers NAME` "
	    "shows the options of one.\n", out);
}

/* "8 before, 14 head, 4 tail, 12 gap; at least 64" */
static const char *
octets_text(const struct layer_cost *cost, char *buf, size_t size)
{
	const struct {
		uint64_t bytes;
		const char *name;
	} parts[] = {
		{ cost->before_bytes, "before" }, { cost->head_bytes, "head" },
		{ cost->trail_bytes, "trailer" }, { cost->tail_bytes, "tail" },
		{ cost->gap_bytes, "gap" },
	};
	size_t i, used = 0;

	(void)snprintf(buf, size, "none");
	for (i = 0; i < sizeof(parts) / sizeof(parts[0]); i++) {
		if (parts[i].bytes == 0)
			continue;
		(void)snprintf(buf + used, size - used, "%s%" PRIu64 " %s",
		    used > 0 ? ", " : "", parts[i].bytes, parts[i].name);
		used += strlen(buf + used);
	}
	used = strlen(buf);
	if (cost->align_bytes > 1)
		(void)snprintf(buf + used, size - used, "; carried and "
		    "trailer padded to a multiple of %" PRIu64,
		    cost->align_bytes);
	used = strlen(buf);
	if (cost->min_bytes > 0)
		(void)snprintf(buf + used, size - used, "; head to tail at "
		    "least %" PRIu64, cost->min_bytes);
	used = strlen(buf);
	if (cost->num != cost->den)
		(void)snprintf(buf + used, size - used, "; times %" PRIu64
		    "/%" PRIu64, cost->num, cost->den);
	return buf;
}

static void
print_row(const struct layer *layer, FILE *out)
{
	struct columns *columns = columns_new("lw");
	char below[BELOW_SIZE], octets[256], mtu[96] = "no say";
	const char *rows[][2] = {
		{ "level", level_name(layer->level) },
		{ "lies on", below_text(layer, below) },
		{ "octets", octets_text(&layer->cost, octets,
		    sizeof(octets)) },
		{ "formula", layer->formula },
		{ "MTU", mtu },
		{ "accuracy", accuracy_name(layer->accuracy) },
		{ "memory", layer->memory },
		{ "source", layer->source },
	};
	size_t i;

	if (layer->default_mtu_bytes != 0)
		(void)snprintf(mtu, sizeof(mtu), "lets %" PRIu64
		    " B through unless declared", layer->default_mtu_bytes);
	else if (layer->min_mtu_bytes != 0)
		(void)snprintf(mtu, sizeof(mtu), "needs at least %" PRIu64
		    " B", layer->min_mtu_bytes);
	(void)fprintf(out, "%s: %s\n\n", layer->name, layer->title);
	for (i = 0; i < sizeof(rows) / sizeof(rows[0]); i++)
		if (rows[i][1] != NULL)
			columns_row(columns, rows[i]);
	columns_print(columns, 2, out);
	columns_free(columns);
}

/* Rows of one name that follow each other and share their options show them
 * once. */
static void
print_layer(const struct layer *layer, FILE *out)
{
	const struct layer *next;

	for (; layer != NULL; layer = next) {
		next = layer_next_variant(layer);
		print_row(layer, out);
		if (layer->fields != NULL && (next == NULL ||
		    next->fields != layer->fields)) {
			(void)fputs("\nOptions\n", out);
			fields_print(layer->fields, out);
		}
		if (next != NULL)
			(void)fputc('\n', out);
	}
}

static json_t *
json_cost(const struct layer_cost *cost)
{
	const struct {
		const char *name;
		uint64_t value;
	} members[] = {
		{ "before_bytes", cost->before_bytes },
		{ "head_bytes", cost->head_bytes },
		{ "trail_bytes", cost->trail_bytes },
		{ "tail_bytes", cost->tail_bytes },
		{ "gap_bytes", cost->gap_bytes },
		{ "align_bytes", cost->align_bytes },
		{ "min_bytes", cost->min_bytes },
		{ "num", cost->num },
		{ "den", cost->den },
	};
	json_t *object = json_object();

	for (size_t i = 0; i < sizeof(members) / sizeof(members[0]); i++)
		json_put(object, members[i].name,
		    json_value_u64(members[i].value));
	return object;
}

static json_t *
json_layer(const struct layer *layer)
{
	json_t *object = json_object();

	json_put(object, "name", json_value_text(layer->name));
	json_put(object, "title", json_value_text(layer->title));
	json_put(object, "level", json_value_text(level_name(layer->level)));
	json_put(object, "below", row_json_names(layer->below));
	json_put(object, "cost", json_cost(&layer->cost));
	json_put(object, "default_mtu_bytes", layer->default_mtu_bytes == 0 ?
	    json_null() : json_value_u64(layer->default_mtu_bytes));
	json_put(object, "accuracy",
	    json_value_text(accuracy_name(layer->accuracy)));
	json_put(object, "memory", row_json_text(layer->memory));
	json_put(object, "formula", row_json_text(layer->formula));
	json_put(object, "source", row_json_text(layer->source));
	json_put(object, "fields", row_json_fields(layer->fields));
	return object;
}

static void
csv_layer(const struct layer *layer, FILE *out)
{
	char below[BELOW_SIZE], octets[256];
	const char *cells[] = { layer->name, layer->title,
		level_name(layer->level), below_text(layer, below),
		octets_text(&layer->cost, octets, sizeof(octets)),
		accuracy_name(layer->accuracy), layer->memory,
		layer->formula, layer->source };
	size_t i;

	for (i = 0; i < sizeof(cells) / sizeof(cells[0]); i++) {
		if (i > 0)
			(void)fputc(',', out);
		csv_text(cells[i] != NULL ? cells[i] : "", out);
	}
	(void)fputs("\r\n", out);
}

/* All rows of that name, or all where it is NULL. */
static int
print_form(const char *name, bool json, FILE *out, struct error *err)
{
	json_t *array = json ? json_array() : NULL;
	size_t i;

	if (!json)
		(void)fputs("layer,title,level,below,octets,accuracy,memory,"
		    "formula,source\r\n", out);
	for (i = 0; layer_table[i] != NULL; i++) {
		if (name != NULL && strcmp(layer_table[i]->name, name) != 0)
			continue;
		if (json)
			json_push(array, json_layer(layer_table[i]));
		else
			csv_layer(layer_table[i], out);
	}
	return json ? row_json_print("plafond-layers/1", "layers", array,
	    out, err) : 0;
}

static int
find_layer(const char *name, const struct layer **out, struct error *err)
{
	const char *names[NAMES_MAX];
	size_t i, count = 0;

	*out = layer_find(name);
	if (*out != NULL)
		return 0;
	for (i = 0; layer_table[i] != NULL && count < NAMES_MAX; i++)
		if (layer_find(layer_table[i]->name) == layer_table[i])
			names[count++] = layer_table[i]->name;
	return command_unknown("layer", name, names, count, err);
}

static int
layers_run(const struct command_options *options, int argc,
    char *const argv[], struct error *err)
{
	const struct layer *layer = NULL;
	FILE *out;

	if (argc == 1 && find_layer(argv[0], &layer, err) == -1)
		return -1;
	if (command_output_open(options, &out, err) == -1)
		return -1;
	if (options->format != FORMAT_TEXT) {
		if (print_form(layer != NULL ? layer->name : NULL,
		    options->format == FORMAT_JSON, out, err) == -1) {
			command_output_discard(options, out);
			return -1;
		}
	} else if (layer != NULL) {
		print_layer(layer, out);
	} else {
		print_table(out);
	}
	return command_output_close(options, out, err);
}

static const struct field layers_options[] = {
	OPTION_FORMAT_ROW(format_text_json_csv),
	OPTION_OUTPUT_ROW,
	OPTION_COMMON_ROWS
};

const struct command command_layers = {
	.name = "layers",
	.arguments = "[NAME]",
	.arguments_max = 1,
	.summary = "the layers that a declaration can name, and their options",
	.options = layers_options,
	.run = layers_run,
};
