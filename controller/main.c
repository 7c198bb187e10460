/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <limits.h>
#include <stdio.h>
#include <string.h>

#include "command.h"
#include "error.h"
#include "log.h"

static const struct command *const commands[] = {
	&command_ceiling,
	&command_media,
	&command_layers,
	&command_draft,
	&command_ready,
	&command_accept,
	&command_identity,
};
#define COMMANDS_COUNT (sizeof(commands) / sizeof(commands[0]))

static int
fail(const char *command, const struct error *err)
{
	char text[1024];

	(void)fprintf(stderr, "plafond%s%s: %s\n", command[0] != '\0' ? " " :
	    "", command, error_text(err, text, sizeof(text)));
	if (err->kind == ERROR_USAGE)
		(void)fprintf(stderr, "`plafond%s%s --help` says more.\n",
		    command[0] != '\0' ? " " : "", command);
	return error_exit_status(err->kind);
}

static int
unknown_command(const char *name)
{
	const char *names[COMMANDS_COUNT];
	struct error err;
	size_t i;

	for (i = 0; i < COMMANDS_COUNT; i++)
		names[i] = commands[i]->name;
	(void)command_unknown("command", name, names, COMMANDS_COUNT, &err);
	return fail("", &err);
}

static int
print_done(struct error *err)
{
	const struct command_options options = { 0 };

	return command_output_close(&options, stdout, err) == -1 ?
	    fail("", err) : 0;
}

static int
run(const struct command *command, int argc, char *argv[])
{
	struct command_options options;
	struct error err;
	int count, status;

	if (command_parse(command, argc, argv, &options, &count, &err) == -1)
		return fail(command->name, &err);
	if (options.version > 0)
		(void)puts("plafond " PLAFOND_VERSION);
	else if (options.help > 0)
		command_help(command, stdout);
	if (options.version > 0 || options.help > 0)
		return print_done(&err);
	if (options.quiet > 0)
		log_set_level(LOG_LEVEL_ERROR);
	else if (options.verbose > 0)
		log_set_level(options.verbose > 1 ? LOG_LEVEL_DEBUG :
		    LOG_LEVEL_INFO);
	status = command->run(&options, count, argv + 1, &err);
	return status == -1 ? fail(command->name, &err) : status;
}

int
main(int argc, char *argv[])
{
	static const struct field rows[] = { OPTION_COMMON_ROWS };
	static const struct command program = { .name = "", .arguments = "",
		.arguments_max = INT_MAX, .options = rows };
	struct command_options options;
	struct error err;
	size_t i;
	int count;

	for (i = 0; i < COMMANDS_COUNT && argc > 1; i++)
		if (strcmp(argv[1], commands[i]->name) == 0)
			return run(commands[i], argc - 1, argv + 1);
	if (argc > 1 && argv[1][0] != '-')
		return unknown_command(argv[1]);
	if (command_parse(&program, argc, argv, &options, &count, &err) == -1)
		return fail("", &err);
	if (options.help == 0 && options.version == 0) {
		(void)error_set(&err, ERROR_USAGE, "missing COMMAND, which "
		    "stands first");
		return fail("", &err);
	}
	if (options.version > 0)
		(void)puts("plafond " PLAFOND_VERSION);
	else
		command_list(commands, COMMANDS_COUNT, stdout);
	return print_done(&err);
}
