/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "settings.h"

#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "agent.h"
#include "error.h"
#include "identity.h"
#include "log.h"
#include "option.h"
#include "policy.h"

#define TEXT(member_, name_, help_)					\
	{ .name = (name_), .kind = FIELD_TEXT, .help = (help_),		\
	  .offset = offsetof(struct settings, member_),			\
	  .size = sizeof(((struct settings *)0)->member_) }
#define FLAG(member_, name_, help_)					\
	{ .name = (name_), .kind = FIELD_YES_NO, .help = (help_),	\
	  .offset = offsetof(struct settings, member_) }

static const struct field option_rows[] = {
	TEXT(policy, "policy", "FILE that says who may command this agent and "
	    "whom it may exchange load with (YAML, below)"),
	TEXT(state, "state", "FOLDER of the identity; default: "
	    "$XDG_STATE_HOME/plafond/agent"),
	TEXT(listen, "listen", "ADDRESS:PORT of the control connections, "
	    "instead of the policy's"),
	{ .name = "data-port", .kind = FIELD_COUNT, .min = 1, .max = 65528,
	    .offset = offsetof(struct settings, data_port),
	    .help = "PORT the first of the data connections, instead of the "
		"policy's" },
	TEXT(certificate, "certificate", "FILE with a certificate of your "
	    "organisation's authority, instead of the own identity"),
	TEXT(key, "key", "FILE with its private key"),
	FLAG(identity, "identity", "print this agent's identity and end"),
	{ .name = "embedded", .kind = FIELD_COUNT, .min = 3, .max = 1023,
	    .offset = offsetof(struct settings, embedded_fd),
	    .help = "DESCRIPTOR of an inherited socket, on which to serve the "
		"controller (started by plafond itself)" },
	FLAG(quiet, "quiet", "errors only"),
	FLAG(verbose, "verbose", "say more; twice: say all"),
	FLAG(help, "help", "print this page"),
	FLAG(version, "version", "print the version"),
	{ .name = NULL }
};

void
settings_print_help(FILE *out)
{
	(void)fprintf(out,
	    "Usage: plafond-agent [OPTION]...\n\n"
	    "The daemon at each end of a circuit: it sends in one trial and "
	    "receives in the\nnext, at the command of a controller that its "
	    "policy names.\n\n"
	    "A load test can disturb everybody who uses the circuit. Name in "
	    "the policy only\ncontrollers and peers that you have agreed "
	    "with.\n\n"
	    "Exit status: 0 ended by a signal, 64 usage, 70 internal, 75 port "
	    "in use,\n77 refused, 78 bad policy.\n\nOptions\n");
	options_print(option_rows, out);
	(void)fprintf(out, "\nFields of the policy\n");
	fields_print(policy_fields, out);
}

int
settings_read(int argc, char *argv[], struct settings *out, struct error *err)
{
	int arguments;

	memset(out, 0, sizeof(*out));
	out->data_port = FIELD_UNSET;
	out->embedded_fd = FIELD_UNSET;
	if (options_read(option_rows, argc, argv, out, &arguments, err) == -1)
		return -1;
	if (arguments != 0)
		return error_set(err, ERROR_USAGE,
		    "found '%s', allowed: options only", argv[1]);
	if ((out->certificate[0] == '\0') != (out->key[0] == '\0'))
		return error_set(err, ERROR_USAGE,
		    "--certificate and --key go together");
	if (out->verbose > 0)
		log_set_level(out->verbose > 1 ? LOG_LEVEL_DEBUG :
		    LOG_LEVEL_INFO);
	else
		log_set_level(out->quiet > 0 ? LOG_LEVEL_ERROR :
		    LOG_LEVEL_INFO);
	if (out->embedded_fd != FIELD_UNSET && out->verbose == 0)
		log_set_level(LOG_LEVEL_ERROR);
	return 0;
}

/* $XDG_STATE_HOME/plafond/agent, else ~/.local/state/plafond/agent; systemd
 * gives a service its own in STATE_DIRECTORY. */
static int
state_folder(const struct settings *settings, char *buf, size_t size,
    struct error *err)
{
	const char *service = getenv("STATE_DIRECTORY");
	const char *xdg = getenv("XDG_STATE_HOME");
	const char *home = getenv("HOME");

	if (settings->state[0] != '\0')
		(void)snprintf(buf, size, "%s", settings->state);
	else if (service != NULL && service[0] == '/')
		(void)snprintf(buf, size, "%s", service);
	else if (xdg != NULL && xdg[0] == '/')
		(void)snprintf(buf, size, "%s/plafond/agent", xdg);
	else if (home != NULL && home[0] == '/')
		(void)snprintf(buf, size, "%s/.local/state/plafond/agent",
		    home);
	else
		return error_set(err, ERROR_USAGE, "no folder for the "
		    "identity: give --state FOLDER");
	return 0;
}

static int
open_identity(const struct settings *settings, struct identity **out,
    struct error *err)
{
	char folder[4200];

	if (settings->certificate[0] != '\0')
		return identity_open_files(settings->certificate,
		    settings->key, out, err);
	if (state_folder(settings, folder, sizeof(folder), err) == -1)
		return -1;
	return identity_open(folder, "plafond agent", out, err);
}

int
settings_print_identity(const struct settings *settings, FILE *out,
    struct error *err)
{
	struct identity *identity;

	if (open_identity(settings, &identity, err) == -1)
		return -1;
	(void)fprintf(out, "%s\n", identity_digest(identity));
	identity_free(identity);
	return 0;
}

static int
read_policy(const struct settings *settings, struct policy *policy,
    struct error *err)
{
	policy_init(policy);
	if (settings->policy[0] != '\0' &&
	    policy_read_file(settings->policy, policy, err) == -1)
		return -1;
	if (settings->listen[0] != '\0')
		(void)snprintf(policy->listen, sizeof(policy->listen), "%s",
		    settings->listen);
	if (settings->data_port != FIELD_UNSET)
		policy->data_port = settings->data_port;
	if (policy->controllers_count == 0 && policy->calls_count == 0)
		log_warning("no_controllers", "policy=\"%s\" this agent "
		    "obeys nobody: name controllers in a policy file",
		    settings->policy);
	return 0;
}

int
settings_open_agent(const struct settings *settings, struct event_base *base,
    struct agent *agent, struct error *err)
{
	struct identity *identity;
	struct policy *policy;
	int rc;

	if (settings->embedded_fd != FIELD_UNSET)
		return agent_open_embedded(agent, base,
		    (int)settings->embedded_fd, err);
	policy = malloc(sizeof(*policy));
	if (policy == NULL)
		return error_errno(err, ERROR_INTERNAL, "the policy");
	rc = read_policy(settings, policy, err);
	if (rc == 0)
		rc = open_identity(settings, &identity, err);
	if (rc == 0)
		rc = agent_open(agent, base, policy, identity, err);
	if (rc == 0)
		log_info("listening", "control=%.*s:%u data=%u identity=%s",
		    (int)(strrchr(policy->listen, ':') - policy->listen),
		    policy->listen, agent->control_port,
		    (unsigned)policy->data_port,
		    identity_digest(agent->identity));
	free(policy);
	return rc;
}
