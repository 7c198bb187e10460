/* SPDX-License-Identifier: GPL-3.0-or-later */
/* plafond draft: a declaration to begin with, from what the kernel knows. */
#include <stdlib.h>

#include "command.h"
#include "draft/draft.h"
#include "draft/interface.h"
#include "error.h"

static int
draft_run(const struct command_options *options, int argc, char *const argv[],
    struct error *err)
{
	struct interface_facts facts;
	char *text;
	FILE *out;

	(void)argc;
	if (interface_read(argv[0], &facts, err) == -1 ||
	    draft_make(&facts, &text, err) == -1)
		return -1;
	if (command_output_open(options, &out, err) == -1) {
		free(text);
		return -1;
	}
	(void)fputs(text, out);
	free(text);
	return command_output_close(options, out, err);
}

static const struct field draft_options[] = {
	OPTION_OUTPUT_ROW,
	OPTION_COMMON_ROWS
};

const struct command command_draft = {
	.name = "draft",
	.arguments = "INTERFACE",
	.arguments_min = 1,
	.arguments_max = 1,
	.summary = "a declaration to begin with, from an interface of this "
	    "machine",
	.description = "Writes a declaration from what the kernel knows of "
	    "INTERFACE and of those below it:\nrate and duplex, tags, tunnels "
	    "and their options, IP versions, MTU.  A person must\nconfirm the "
	    "lines marked `confirm:` and complete those marked `fill in:`.\n"
	    "Only reads; needs no privilege and no agents.",
	.options = draft_options,
	.run = draft_run,
};
