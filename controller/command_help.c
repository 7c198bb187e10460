/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Help pages, made by walking the tables of commands, options and fields. */
#include "columns.h"
#include "command.h"
#include "option.h"

void
command_help(const struct command *command, FILE *out)
{
	(void)fprintf(out, "Usage: plafond %s%s%s [OPTION]...\n\n%s\n\n"
	    "Options\n", command->name, command->arguments[0] != '\0' ?
	    " " : "", command->arguments, command->description != NULL ?
	    command->description : command->summary);
	options_print(command->options, out);
	if (command->fields == NULL)
		return;
	(void)fputs("\nFields of the declaration\n", out);
	fields_print(command->fields, out);
}

void
command_list(const struct command *const commands[], size_t count, FILE *out)
{
	struct columns *columns = columns_new("lw");
	char usage[64];
	size_t i;

	(void)fputs("Usage: plafond COMMAND [ARGUMENT]... [OPTION]...\n\n"
	    "Measures a circuit between a pair of agents and sets the result "
	    "beside the\nceiling that its medium, its contract and its "
	    "protocol overhead allow.\n\nCommands\n", out);
	for (i = 0; i < count; i++) {
		const char *cells[2] = { usage, commands[i]->summary };

		(void)snprintf(usage, sizeof(usage), "%s %s",
		    commands[i]->name, commands[i]->arguments);
		columns_row(columns, cells);
	}
	columns_print(columns, 2, out);
	columns_free(columns);
	(void)fputs("\n`plafond COMMAND --help` describes one command, "
	    "`plafond --version` prints the\nversion.\n", out);
}
