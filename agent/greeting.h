/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * greeting: the octets that open a data connection, and its socket.
 * Shared by the side that is knocked at (door.c) and the side that knocks.
 */
#ifndef PLAFOND_GREETING_H
#define PLAFOND_GREETING_H

#include <stdbool.h>
#include <stdint.h>

#include "trial.h"

struct error;

#define GREETING_MARK "PLAFOND\1"	/* with the version of this layout */
#define GREETING_MARK_SIZE 8
#define GREETING_SIZE (GREETING_MARK_SIZE + TRIAL_TOKEN_BYTES)
#define GREETING_ANSWER 0x06		/* ACK of ISO/IEC 646 */

/* A non-blocking TCP socket with the trial's options, bound to local ("": any
 * address of `family`), port and interface.  Returns the fd, -1 with err. */
int greeting_socket(const struct trial *trial, bool is_sender,
    const char *local, const char *interface, uint16_t port, int family,
    struct error *err);

#endif
