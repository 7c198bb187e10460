/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * dialer: from "host:port" to a connected TCP socket, without blocking.
 *
 * A literal address is tried at once; a name is looked up through libevent's
 * resolver and its addresses are tried in turn.  Has no deadline of its own:
 * its owner has one for the whole way.
 */
#ifndef PLAFOND_SHARED_DIALER_H
#define PLAFOND_SHARED_DIALER_H

struct dialer;
struct error;
struct event_base;

/* From the loop, once: a connected socket, now the callee's; or -1 and why.
 * May free the dialer. */
typedef void (*dialer_done_fn)(int fd, const struct error *why, void *arg);

/* Returns owned; NULL with ERROR_INPUT where it is not an address. */
struct dialer *dialer_new(struct event_base *base, const char *address,
    dialer_done_fn done, void *arg, struct error *err);
void dialer_free(struct dialer *dialer);	/* NULL is fine */

#endif
