/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "relay.h"

#include <stdlib.h>

#include "channel.h"
#include "error.h"
#include "log.h"

struct relay {
	struct relay **list;		/* borrowed: outlives us */
	struct relay *next;
	struct channel_relay *pipe;	/* owned */
};

static void
relay_free(struct relay *relay)
{
	struct relay **at = relay->list;

	while (*at != relay)
		at = &(*at)->next;
	*at = relay->next;
	channel_relay_free(relay->pipe);
	free(relay);
}

static void
on_ended(struct channel_relay *pipe, void *arg)
{
	(void)pipe;
	log_info("relay_ended", "by=peer");
	relay_free(arg);
}

int
relay_start(struct relay **list, struct channel *left, struct channel *right,
    struct error *err)
{
	struct relay *relay = calloc(1, sizeof(*relay));

	if (relay == NULL)
		return error_errno(err, ERROR_INTERNAL, "a relay");
	relay->pipe = channel_join(left, right, on_ended, relay, err);
	if (relay->pipe == NULL) {
		free(relay);
		return -1;
	}
	relay->list = list;
	relay->next = *list;
	*list = relay;
	return 0;
}

void
relay_free_all(struct relay **list)
{
	for (struct relay *relay = *list, *next; relay != NULL; relay = next) {
		next = relay->next;
		relay_free(relay);
	}
}
