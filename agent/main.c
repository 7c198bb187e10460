/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <inttypes.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <event2/event.h>

#include "agent.h"
#include "error.h"
#include "identity.h"
#include "log.h"
#include "settings.h"

static void
on_signal(evutil_socket_t number, short what, void *arg)
{
	(void)number;
	(void)what;
	(void)event_base_loopbreak(arg);
}

/* The event loop's own words, a name server that fails, say. */
static void
on_event_log(int severity, const char *text)
{
	(void)severity;
	log_debug("event_loop", "text=\"%s\"", text);
}

/* Serve until a signal, or until the embedded agent's controller is gone. */
static int
serve(const struct settings *settings, struct error *err)
{
	struct event_base *base = event_base_new();
	struct event *stop[2];
	struct agent agent;
	int rc;

	if (base == NULL)
		return error_set(err, ERROR_INTERNAL, "no event loop");
	(void)signal(SIGPIPE, SIG_IGN);
	event_set_log_callback(on_event_log);
	stop[0] = evsignal_new(base, SIGTERM, on_signal, base);
	stop[1] = evsignal_new(base, SIGINT, on_signal, base);
	for (int i = 0; i < 2; i++)
		if (stop[i] != NULL)
			(void)event_add(stop[i], NULL);
	rc = settings_open_agent(settings, base, &agent, err);
	if (rc == 0) {
		(void)event_base_dispatch(base);
		agent_close(&agent);
	}
	for (int i = 0; i < 2; i++)
		if (stop[i] != NULL)
			event_free(stop[i]);
	/* connections that still had something to say: 2 s at most */
	(void)event_base_dispatch(base);
	event_base_free(base);
	return rc;
}

int
main(int argc, char *argv[])
{
	struct settings settings;
	struct error err;
	char text[1024];
	int rc;

	rc = settings_read(argc, argv, &settings, &err);
	if (rc == 0 && settings.help)
		settings_print_help(stdout);
	else if (rc == 0 && settings.version)
		(void)printf("plafond-agent %s\n", PLAFOND_VERSION);
	else if (rc == 0 && settings.identity)
		rc = settings_print_identity(&settings, stdout, &err);
	else if (rc == 0)
		rc = serve(&settings, &err);
	if (rc == -1) {
		(void)fprintf(stderr, "plafond-agent: %s\n",
		    error_text(&err, text, sizeof(text)));
		if (err.kind == ERROR_USAGE)
			(void)fputs("`plafond-agent --help` says more.\n",
			    stderr);
		return error_exit_status(err.kind);
	}
	return 0;
}
