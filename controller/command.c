/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "command.h"

#include <sys/stat.h>

#include <errno.h>
#include <stdlib.h>
#include <string.h>

#include "declare/circuit.h"
#include "error.h"
#include "log.h"
#include "option.h"

const struct choice format_text_json[] = {
	{ "text", FORMAT_TEXT },
	{ "json", FORMAT_JSON },
	{ NULL, 0 },
};
const struct choice format_text_json_csv[] = {
	{ "text", FORMAT_TEXT },
	{ "json", FORMAT_JSON },
	{ "csv", FORMAT_CSV },
	{ NULL, 0 },
};

int
command_read_override(const struct node *node, const struct field *field,
    void *base, struct error *err)
{
	struct command_options *options = base;

	if (options->overrides_count == COMMAND_OVERRIDES_MAX)
		return error_set(err, ERROR_USAGE, "%s: more than %d",
		    field->name, COMMAND_OVERRIDES_MAX);
	options->overrides[options->overrides_count++] = node->text;
	return 0;
}

int
command_read_sweep(const struct node *node, const struct field *field,
    void *base, struct error *err)
{
	struct command_options *options = base;

	if (options->sweep != NULL)
		return error_set(err, ERROR_USAGE, "%s: given twice, allowed: "
		    "one range", field->name);
	options->sweep = node->text;
	return 0;
}

int
command_unknown(const char *what, const char *name,
    const char *const names[], size_t count, struct error *err)
{
	const char *nearest = nearest_name(name, names, count);
	char found[64];

	(void)log_escape(name, found, sizeof(found));
	return error_set(err, ERROR_USAGE, "unknown %s '%s'%s%s%s", what,
	    found, nearest != NULL ? ", did you mean '" : "",
	    nearest != NULL ? nearest : "", nearest != NULL ? "'?" : "");
}

int
command_read_circuit(const struct command_options *options,
    const char *path, struct circuit **out, struct error *err)
{
	struct circuit *circuit;

	if (circuit_read_file(path, options->overrides,
	    options->overrides_count, &circuit, err) == -1)
		return -1;
	if (!circuit->ends_declared) {
		circuit_free(circuit);
		return error_set(err, ERROR_INPUT, "%s: 'ends' is missing: "
		    "where the two agents are", path);
	}
	*out = circuit;
	return 0;
}

static int
check_arguments(const struct command *command, int count, struct error *err)
{
	const char *arguments = command->arguments;

	if (count < command->arguments_min)
		return error_set(err, ERROR_USAGE, "missing %s", arguments);
	if (count > command->arguments_max && command->arguments_max == 0)
		return error_set(err, ERROR_USAGE, "no arguments are allowed");
	if (count > command->arguments_max)
		return error_set(err, ERROR_USAGE, "too many arguments, "
		    "allowed: %s", arguments);
	return 0;
}

int
command_parse(const struct command *command, int argc, char *argv[],
    struct command_options *options, int *arguments_count, struct error *err)
{
	memset(options, 0, sizeof(*options));
	if (options_read(command->options, argc, argv, options,
	    arguments_count, err) == -1)
		return -1;
	if (options->help > 0 || options->version > 0)
		return 0;
	return check_arguments(command, *arguments_count, err);
}

/* A folder and all above it; what is there already is fine. */
static int
make_folders(char *path)
{
	char *slash;

	for (slash = path + 1; ; slash++) {
		slash = strchr(slash, '/');
		if (slash != NULL)
			*slash = '\0';
		if (mkdir(path, 0700) == -1 && errno != EEXIST)
			return -1;
		if (slash == NULL)
			return 0;
		*slash = '/';
	}
}

int
command_state_folder(const struct command_options *options, char *buf,
    size_t size, struct error *err)
{
	const char *state = getenv("XDG_STATE_HOME"), *home = getenv("HOME");
	int length;

	/* The XDG base directories: a relative path is to be ignored. */
	if (options->state[0] != '\0')
		length = snprintf(buf, size, "%s", options->state);
	else if (state != NULL && state[0] == '/')
		length = snprintf(buf, size, "%s/plafond", state);
	else if (home != NULL && home[0] == '/')
		length = snprintf(buf, size, "%s/.local/state/plafond", home);
	else
		return error_set(err, ERROR_USAGE, "no state folder: neither "
		    "--state nor XDG_STATE_HOME nor HOME is given");
	if (length < 0 || (size_t)length >= size)
		return error_set(err, ERROR_USAGE, "state folder: too long");
	if (make_folders(buf) == -1)
		return error_errno(err, ERROR_WRITE, "state folder '%s'", buf);
	return 0;
}
