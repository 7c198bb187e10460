/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * door: where one trial's data connections come in, and knock: where they go
 * out.
 *
 * Whoever opens a connection presents a greeting of 8 octets and the stream's
 * token of 16; the other side answers one octet once it has found the token
 * unused, and closes at once otherwise.  A token opens one stream once, within
 * DOOR_LIMIT_NS.  The door is open for one trial only: the port is bound when
 * the trial is prepared and nothing is accepted before the trial is started.
 */
#ifndef PLAFOND_DOOR_H
#define PLAFOND_DOOR_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "trial.h"

struct door;
struct error;
struct event_base;
struct knock;
struct policy;

#define DOOR_LIMIT_NS UINT64_C(10000000000)
#define DOOR_GUESTS_MAX (2 * TRIAL_STREAMS_MAX + 16)

/* One stream to come or to open. */
struct opening {
	enum direction direction;	/* single */
	size_t stream;
	unsigned char token[TRIAL_TOKEN_BYTES];
};

/* fd is connected, non-blocking and taken by the callee. */
typedef void (*opened_fn)(enum direction direction, size_t stream, int fd,
    void *arg);

/* Bind and listen at local ("" = any) on a port from *port on, at most `ports`
 * of them (*port 0: any free one); *port says which.  Returns owned. */
int door_open(struct event_base *base, const struct policy *policy,
    const struct trial *trial, const char *local, const char *interface,
    unsigned ports, uint16_t *port, struct door **out, struct error *err);
/* Accept these, at most 2 * TRIAL_STREAMS_MAX; copied. */
int door_expect(struct door *door, const struct opening openings[],
    size_t count, opened_fn opened, void *arg, struct error *err);
void door_free(struct door *door);	/* NULL is fine */

/* Open these to peer:port; failed is called at most once, after which no
 * stream opens.  Returns owned. */
int knock_start(struct event_base *base, const struct trial *trial,
    const char *local, const char *interface,
    const char *peer, uint16_t port, const struct opening openings[],
    size_t count, opened_fn opened,
    void (*failed)(const struct error *why, void *arg), void *arg,
    struct knock **out, struct error *err);
void knock_free(struct knock *knock);	/* NULL is fine */

/* Numeric address text and port to a socket address; -1: ERROR_INPUT. */
struct sockaddr_storage;
int address_make(const char *address, uint16_t port,
    struct sockaddr_storage *out, unsigned *length, struct error *err);

#endif
