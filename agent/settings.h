/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * settings: the command line of plafond-agent, and the agent it describes.
 */
#ifndef PLAFOND_SETTINGS_H
#define PLAFOND_SETTINGS_H

#include <stdint.h>
#include <stdio.h>

struct agent;
struct error;
struct event_base;

struct settings {
	char policy[4096];		/* file, "" = none */
	char state[4096];		/* folder, "" = the default one */
	char listen[256];		/* over the policy's, "" = policy's */
	uint64_t data_port;		/* over the policy's, or FIELD_UNSET */
	char certificate[4096], key[4096];	/* of an authority, or "" */
	uint64_t embedded_fd;		/* FIELD_UNSET: not embedded */
	uint64_t identity, quiet, verbose, help, version;	/* flags */
};

int settings_read(int argc, char *argv[], struct settings *out,
    struct error *err);
void settings_print_help(FILE *out);
/* Makes the identity where there is none. */
int settings_print_identity(const struct settings *settings, FILE *out,
    struct error *err);
/* Open the agent and log that it listens. */
int settings_open_agent(const struct settings *settings,
    struct event_base *base, struct agent *agent, struct error *err);

#endif
