/* SPDX-License-Identifier: GPL-3.0-or-later */
/* plafond layers: the table of layers, or one row with its options. */
#include <inttypes.h>
#include <string.h>

#include "command.h"
#include "columns.h"
#include "declare/layer.h"
#include "error.h"
#include "option.h"

static void
append_below(const struct layer *layer, char *buf, size_t size)
{
	size_t i, used;

	buf[0] = '\0';
	for (i = 0; layer->below[i] != NULL; i++) {
		used = strlen(buf);
		(void)snprintf(buf + used, size - used, "%s%s",
		    i == 0 ? "" : ", ", layer->below[i][0] == '\0' ?
		    "a medium" : layer->below[i]);
	}
}

static void
print_table(FILE *out)
{
	static const char *const head[] = { "layer", "level", "lies on",
		"octets", "source" };
	struct columns *columns = columns_new("lllrl");
	const struct layer *layer;
	char below[256], octets[32];

	columns_row(columns, head);
	columns_rule(columns);
	for (layer = layer_table; layer->name != NULL; layer++) {
		const struct layer_cost *cost = &layer->cost;
		const char *cells[] = { layer->name, level_name(layer->level),
			below, octets, layer->source };

		append_below(layer, below, sizeof(below));
		(void)snprintf(octets, sizeof(octets), "%" PRIu64 "%s",
		    cost->before_bytes + cost->head_bytes + cost->trail_bytes +
		    cost->tail_bytes + cost->gap_bytes,
		    layer->fields != NULL ? "+" : "");
		columns_row(columns, cells);
	}
	columns_print(columns, 0, out);
	columns_free(columns);
	(void)fputs("\n+: options add to it. `plafond layers NAME` shows the "
	    "options of one.\n", out);
}

static void
print_layer(const struct layer *layer, FILE *out)
{
	struct columns *columns = columns_new("lw");
	char below[256], octets[256], mtu[64] = "no say";
	const struct layer_cost *cost = &layer->cost;
	const char *rows[][2] = {
		{ "level", level_name(layer->level) },
		{ "lies on", below },
		{ "octets", octets },
		{ "formula", layer->formula },
		{ "MTU", mtu },
		{ "source", layer->source },
	};
	size_t i;

	append_below(layer, below, sizeof(below));
	(void)snprintf(octets, sizeof(octets), "%" PRIu64 " before, %" PRIu64
	    " head, %" PRIu64 " trailer, %" PRIu64 " tail, %" PRIu64
	    " gap; aligned to %" PRIu64 ", at least %" PRIu64 "; times %"
	    PRIu64 "/%" PRIu64, cost->before_bytes, cost->head_bytes,
	    cost->trail_bytes, cost->tail_bytes, cost->gap_bytes,
	    cost->align_bytes, cost->min_bytes, cost->num, cost->den);
	if (layer->default_mtu_bytes != 0)
		(void)snprintf(mtu, sizeof(mtu), "lets %" PRIu64
		    " B through unless declared", layer->default_mtu_bytes);
	else if (layer->min_mtu_bytes != 0)
		(void)snprintf(mtu, sizeof(mtu), "needs at least %" PRIu64
		    " B", layer->min_mtu_bytes);
	(void)fprintf(out, "%s: %s\n\n", layer->name, layer->title);
	for (i = 0; i < sizeof(rows) / sizeof(rows[0]); i++)
		columns_row(columns, rows[i]);
	columns_print(columns, 2, out);
	columns_free(columns);
	if (layer->fields == NULL)
		return;
	(void)fputs("\nOptions\n", out);
	fields_print(layer->fields, out);
}

static int
find_layer(const char *name, const struct layer **out, struct error *err)
{
	const char *names[64];
	size_t i;

	*out = layer_find(name);
	if (*out != NULL)
		return 0;
	for (i = 0; i < 64 && layer_table[i].name != NULL; i++)
		names[i] = layer_table[i].name;
	return command_unknown("layer", name, names, i, err);
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
	if (layer != NULL)
		print_layer(layer, out);
	else
		print_table(out);
	return command_output_close(options, out, err);
}

static const struct field layers_options[] = {
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
