/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * command: the table of commands of `plafond`, one file each.
 *
 * main.c finds the row, reads the options by the row's field table (GNU long
 * options, --set may repeat), runs it and maps an error to an exit status.
 * Results go to standard output, everything else to standard error.
 */
#ifndef PLAFOND_COMMAND_H
#define PLAFOND_COMMAND_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>

#include "field.h"

struct circuit;
struct error;

#define COMMAND_OVERRIDES_MAX 64

enum format { FORMAT_TEXT, FORMAT_JSON, FORMAT_CSV, FORMAT_HTML };

/* Options that every command may have; a command's table says which. */
struct command_options {
	uint64_t format;		/* enum format */
	char output[4096];		/* -o FILE, "" = standard output */
	char state[4096];		/* --state FOLDER, "" = default */
	char listen[256];		/* --listen ADDRESS:PORT */
	char agent_program[4096];	/* --agent-program FILE */
	const char *overrides[COMMAND_OVERRIDES_MAX];	/* --set, borrowed */
	size_t overrides_count;
	const char *sweep;		/* --sweep, borrowed; NULL: none */
	uint64_t packet_sizes;		/* --packet-sizes: count */
	uint64_t quiet, verbose;	/* -q, -v: counts */
	uint64_t help, version;		/* -h, -V: counts */
};

struct command {
	const char *name;
	const char *arguments;		/* "FILE" */
	int arguments_min, arguments_max;
	const char *summary;		/* one line */
	const char *description;	/* for its --help; or NULL */
	const struct field *options;	/* offsets in command_options */
	const struct field *fields;	/* of FILE, for its --help; or NULL */
	/* Returns the exit status, or -1 with err. */
	int (*run)(const struct command_options *options, int argc,
	    char *const argv[], struct error *err);
};

/* Rows that several commands share, to be listed in their tables by macro;
 * choices_: of `enum format`, those that the command can print. */
#define OPTION_FORMAT_ROW(choices_)					\
	{ .name = "format", .kind = FIELD_CHOICE,			\
	  .offset = offsetof(struct command_options, format),		\
	  .choices = (choices_), .default_text = "text",		\
	  .help = "FORMAT form of the result" }
#define OPTION_OUTPUT_ROW						\
	{ .name = "output", .kind = FIELD_TEXT,				\
	  .offset = offsetof(struct command_options, output),		\
	  .size = sizeof(((struct command_options *)0)->output),	\
	  .help = "FILE write the result here, whole or not at all" }
#define OPTION_SET_ROW							\
	{ .name = "set", .kind = FIELD_CUSTOM,				\
	  .read = command_read_override,				\
	  .help = "KEY=VALUE override what FILE declares, such as "	\
		  "medium.line-rate='10 Gbit/s'; may be repeated" }
#define OPTION_SWEEP_ROW						\
	{ .name = "sweep", .kind = FIELD_CUSTOM,			\
	  .read = command_read_sweep,					\
	  .help = "KEY=FROM..TO[:STEP] a table of the ceilings while "	\
		  "one number of FILE goes through a range, such as "	\
		  "mtu='64 B..1500 B'; STEP: a tenth of it" }
#define OPTION_PACKET_SIZES_ROW						\
	{ .name = "packet-sizes", .kind = FIELD_YES_NO,			\
	  .offset = offsetof(struct command_options, packet_sizes),	\
	  .help = "a table of the frame sizes of RFC 2544 and the "	\
		  "largest, with frames a second and rates" }
#define OPTION_STATE_ROW						\
	{ .name = "state", .kind = FIELD_TEXT,				\
	  .offset = offsetof(struct command_options, state),		\
	  .size = sizeof(((struct command_options *)0)->state),		\
	  .help = "FOLDER where the identity and the records are" }
#define OPTION_LISTEN_ROW						\
	{ .name = "listen", .kind = FIELD_TEXT,				\
	  .offset = offsetof(struct command_options, listen),		\
	  .size = sizeof(((struct command_options *)0)->listen),	\
	  .default_text = "[::]:61741",					\
	  .help = "ADDRESS:PORT where an agent declared `called` calls" }
#define OPTION_AGENT_ROW						\
	{ .name = "agent-program", .kind = FIELD_TEXT,			\
	  .offset = offsetof(struct command_options, agent_program),	\
	  .size = sizeof(((struct command_options *)0)->agent_program),	\
	  .help = "FILE the program to start for `agent: embedded`" }

/* The end of every command's table. */
#define OPTION_COMMON_ROWS						\
	{ .name = "quiet", .kind = FIELD_YES_NO,			\
	  .offset = offsetof(struct command_options, quiet),		\
	  .help = "errors only, no warnings, no progress" },		\
	{ .name = "verbose", .kind = FIELD_YES_NO,			\
	  .offset = offsetof(struct command_options, verbose),		\
	  .help = "say more; twice: say all" },				\
	{ .name = "help", .kind = FIELD_YES_NO,				\
	  .offset = offsetof(struct command_options, help),		\
	  .help = "print this page" },					\
	{ .name = "version", .kind = FIELD_YES_NO,			\
	  .offset = offsetof(struct command_options, version),		\
	  .help = "print the version" },				\
	{ .name = NULL }

extern const struct choice format_text_json[], format_text_json_csv[];

/* Keeps the text of one --set in the struct command_options at base. */
int command_read_override(const struct node *node, const struct field *field,
    void *base, struct error *err);

/* Keeps the text of --sweep, which may be given once. */
int command_read_sweep(const struct node *node, const struct field *field,
    void *base, struct error *err);

/* "unknown WHAT 'NAME', did you mean 'NEAREST'?"; always -1: ERROR_USAGE. */
int command_unknown(const char *what, const char *name,
    const char *const names[], size_t count, struct error *err);
/* The declaration in FILE with what --set puts in place, for a command that
 * reaches the agents.  Owned.  -1 also where it has no ends. */
int command_read_circuit(const struct command_options *options,
    const char *path, struct circuit **out, struct error *err);
/* The state folder: --state, else $XDG_STATE_HOME/plafond, else
 * ~/.local/state/plafond; made where missing. */
int command_state_folder(const struct command_options *options, char *buf,
    size_t size, struct error *err);
/* Standard output or a new file of that name; written whole or not at all:
 * command_output_close renames it into place, command_output_discard takes it
 * away again.  What is not a regular file (/dev/null, a pipe) is written as it
 * is.  -1: ERROR_WRITE; the stream is closed either way. */
int command_output_open(const struct command_options *options, FILE **out,
    struct error *err);
int command_output_close(const struct command_options *options, FILE *f,
    struct error *err);
void command_output_discard(const struct command_options *options, FILE *f);

/* Options and arguments of one command; argv[0] is its name, and the arguments
 * are moved to argv[1] and on, and counted.  -1: ERROR_USAGE. */
int command_parse(const struct command *command, int argc, char *argv[],
    struct command_options *options, int *arguments_count, struct error *err);
/* Help pages, made from the tables. */
void command_help(const struct command *command, FILE *out);
void command_list(const struct command *const commands[], size_t count,
    FILE *out);

/* The table of main.c holds these, in the order of the help page. */
extern const struct command command_ceiling;
extern const struct command command_media;
extern const struct command command_layers;
extern const struct command command_draft;
extern const struct command command_ready;
extern const struct command command_accept;
extern const struct command command_identity;

#endif
