/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * address: socket addresses as text.  What both programs use is in channel.h;
 * this is for the other files of the channel.
 */
#ifndef PLAFOND_SHARED_ADDRESS_H
#define PLAFOND_SHARED_ADDRESS_H

#include <stdbool.h>
#include <stddef.h>
#include <sys/socket.h>

/* "198.18.0.1:40112", "[2001:2::1]:40112", or without the port; an IPv4
 * address in an IPv6 socket is written as IPv4. */
void address_text(const struct sockaddr *address, socklen_t size,
    bool with_port, char *buf, size_t buf_size);

#endif
