/* SPDX-License-Identifier: GPL-3.0-or-later */
/* plafond ceiling: what a declared circuit can carry at most, and why. */
#include <assert.h>
#include <stdlib.h>

#include "command.h"
#include "declare/circuit.h"
#include "error.h"
#include "report/ceiling_report.h"
#include "report/packet_sizes.h"
#include "report/sweep.h"

/* What is printed: one of these. */
struct view {
	void *data;			/* owned */
	void (*text)(const void *data, FILE *out);
	int (*json)(const void *data, FILE *out);
	void (*csv)(const void *data, FILE *out);
};

static void
report_text(const void *data, FILE *out)
{
	ceiling_report_text(data, out);
}

static int
report_json(const void *data, FILE *out)
{
	return ceiling_report_json(data, out);
}

static void
report_csv(const void *data, FILE *out)
{
	ceiling_report_csv(data, out);
}

static void
sizes_text(const void *data, FILE *out)
{
	packet_sizes_text(data, out);
}

static int
sizes_json(const void *data, FILE *out)
{
	return packet_sizes_json(data, out);
}

static void
sizes_csv(const void *data, FILE *out)
{
	packet_sizes_csv(data, out);
}

static void
swept_text(const void *data, FILE *out)
{
	sweep_text(data, out);
}

static int
swept_json(const void *data, FILE *out)
{
	return sweep_json(data, out);
}

static void
swept_csv(const void *data, FILE *out)
{
	sweep_csv(data, out);
}

static int
print(const struct view *view, const struct command_options *options,
    FILE *out, struct error *err)
{
	assert(view->text != NULL && view->json != NULL && view->csv != NULL);
	switch ((enum format)options->format) {
	case FORMAT_TEXT:
		view->text(view->data, out);
		return 0;
	case FORMAT_JSON:
		if (view->json(view->data, out) == -1)
			return error_set(err, ERROR_INTERNAL, "no memory");
		return 0;
	case FORMAT_CSV:
		view->csv(view->data, out);
		return 0;
	case FORMAT_HTML:
		break;
	}
	return error_set(err, ERROR_INTERNAL, "no such format");
}

static int
make_sweep(const struct command_options *options, const char *path,
    struct view *view, struct error *err)
{
	struct sweep_range range;
	struct sweep *sweep = NULL;
	struct node *root;
	int rc = 0;

	if (document_read_file(path, &root, err) == -1)
		return -1;
	for (size_t i = 0; i < options->overrides_count && rc == 0; i++)
		rc = document_override(root, options->overrides[i], err);
	if (rc == 0)
		rc = sweep_range_read(options->sweep, root, circuit_fields,
		    &range, err);
	if (rc == 0)
		rc = sweep_make(root, &range, &sweep, err);
	document_free(root);
	*view = (struct view){ sweep, swept_text, swept_json, swept_csv };
	return rc;
}

static int
make_sizes(const struct circuit *circuit, struct view *view,
    struct error *err)
{
	struct packet_sizes *sizes = NULL;
	int rc = packet_sizes_make(circuit, &sizes, err);

	*view = (struct view){ sizes, sizes_text, sizes_json, sizes_csv };
	return rc;
}

/* The report borrows the circuit. */
static int
make_report(const struct circuit *circuit, struct view *view,
    struct error *err)
{
	struct ceiling_report *report = calloc(1, sizeof(*report));

	if (report == NULL)
		return error_errno(err, ERROR_INTERNAL, "ceiling");
	*view = (struct view){ report, report_text, report_json, report_csv };
	return ceiling_report_make(circuit, report, err);
}

static int
make_view(const struct command_options *options, const char *path,
    struct circuit **circuit, struct view *view, struct error *err)
{
	int rc;

	if (options->sweep != NULL && options->packet_sizes > 0)
		return error_set(err, ERROR_USAGE, "--sweep and "
		    "--packet-sizes: allowed: one of them");
	if (options->sweep != NULL)
		return make_sweep(options, path, view, err);
	if (circuit_read_file(path, options->overrides,
	    options->overrides_count, circuit, err) == -1)
		return -1;
	rc = options->packet_sizes > 0 ? make_sizes(*circuit, view, err) :
	    make_report(*circuit, view, err);
	if (rc == -1)
		error_wrap(err, "%s", path);
	return rc;
}

static int
ceiling_run(const struct command_options *options, int argc,
    char *const argv[], struct error *err)
{
	struct circuit *circuit = NULL;
	struct view view = { .data = NULL };
	FILE *out;
	int rc = -1;

	(void)argc;
	if (make_view(options, argv[0], &circuit, &view, err) == -1 ||
	    command_output_open(options, &out, err) == -1)
		goto out;
	if (print(&view, options, out, err) == -1)
		command_output_discard(options, out);
	else
		rc = command_output_close(options, out, err);
out:
	free(view.data);
	circuit_free(circuit);
	return rc;
}

static const struct field ceiling_options[] = {
	OPTION_SET_ROW,
	OPTION_SWEEP_ROW,
	OPTION_PACKET_SIZES_ROW,
	OPTION_FORMAT_ROW(format_text_json_csv),
	OPTION_OUTPUT_ROW,
	OPTION_COMMON_ROWS
};

const struct command command_ceiling = {
	.name = "ceiling",
	.arguments = "FILE",
	.arguments_min = 1,
	.arguments_max = 1,
	.summary = "the highest rate a declared circuit can carry, and why",
	.description = "Reads the declaration in FILE and prints the ladder "
	    "from the line's rate to the\npayload, the rate at each level, and "
	    "every bound with the one that binds.\nNeeds no agents.",
	.options = ceiling_options,
	.fields = circuit_fields,
	.run = ceiling_run,
};
