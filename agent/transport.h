/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * transport: what carries the payload of a stream, one file a protocol.
 *
 * A row of function pointers, found by the trial's protocol.  Keeps no state
 * of its own and owns no socket.  Nothing here blocks, allocates or formats
 * unless it takes a struct error.
 */
#ifndef PLAFOND_TRANSPORT_H
#define PLAFOND_TRANSPORT_H

#include <stdbool.h>
#include <stddef.h>

#include "measurement.h"
#include "trial.h"

struct error;

enum io_result {
	IO_DONE,	/* *bytes were carried, at least one */
	IO_AGAIN,	/* nothing now; wait for the socket */
	IO_CLOSED,	/* the peer sends no more */
	IO_FAILED	/* *sys_errno says why */
};

struct transport {
	enum protocol protocol;
	/* Options that must be set before connect or listen. */
	int (*prepare)(int fd, int family, const struct trial *trial,
	    struct error *err);
	/* Options of a sender's connected socket: the rate limit. */
	int (*limit)(int fd, const struct trial *trial, struct error *err);
	/* Take at most `size` bytes of payload off the socket, unseen. */
	enum io_result (*receive)(int fd, size_t size, size_t *bytes,
	    int *sys_errno);
	enum io_result (*send)(int fd, const unsigned char *payload,
	    size_t size, size_t *bytes, int *sys_errno);
	/* Report the socket readable only from so many bytes on, or at its
	 * end; 1: from any.  May settle for 1.  Returns what holds now. */
	uint64_t (*coalesce)(int fd, uint64_t bytes);
	/* The receiver tells the sender that it has enough. */
	void (*finish)(int fd);
	/* Close, dropping what is queued, here and on the way. */
	void (*reset)(int fd);
	void (*sample)(int fd, struct tcp_sample *out);
	/* What steers this socket's rate; "" where unknown. */
	void (*congestion_control)(int fd,
	    char name[TRIAL_CONGESTION_CONTROL_SIZE]);
};

extern const struct transport transport_tcp;

/* -1 (ERROR_REFUSED): this agent does not carry that protocol. */
int transport_find(enum protocol protocol, const struct transport **out,
    struct error *err);

#endif
