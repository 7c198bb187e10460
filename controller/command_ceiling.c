/* SPDX-License-Identifier: GPL-3.0-or-later */
/* plafond ceiling: what a declared circuit can carry at most, and why. */
#include <stdlib.h>

#include "command.h"
#include "declare/circuit.h"
#include "error.h"
#include "report/ceiling_report.h"

static int
print(const struct ceiling_report *report,
    const struct command_options *options, FILE *out, struct error *err)
{
	switch ((enum format)options->format) {
	case FORMAT_TEXT:
		ceiling_report_text(report, out);
		return 0;
	case FORMAT_JSON:
		if (ceiling_report_json(report, out) == -1)
			return error_set(err, ERROR_INTERNAL, "no memory");
		return 0;
	case FORMAT_CSV:
		ceiling_report_csv(report, out);
		return 0;
	case FORMAT_HTML:
		break;
	}
	return error_set(err, ERROR_INTERNAL, "no such format");
}

static int
ceiling_run(const struct command_options *options, int argc,
    char *const argv[], struct error *err)
{
	struct ceiling_report *report = NULL;
	struct circuit *circuit = NULL;
	FILE *out;
	int rc = -1;

	(void)argc;
	if (circuit_read_file(argv[0], options->overrides,
	    options->overrides_count, &circuit, err) == -1)
		return -1;
	report = calloc(1, sizeof(*report));
	if (report == NULL) {
		(void)error_errno(err, ERROR_INTERNAL, "ceiling");
		goto out;
	}
	if (ceiling_report_make(circuit, report, err) == -1) {
		error_wrap(err, "%s", argv[0]);
		goto out;
	}
	if (command_output_open(options, &out, err) == -1)
		goto out;
	if (print(report, options, out, err) == -1)
		command_output_discard(options, out);
	else
		rc = command_output_close(options, out, err);
out:
	free(report);
	circuit_free(circuit);
	return rc;
}

static const struct field ceiling_options[] = {
	OPTION_SET_ROW,
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
