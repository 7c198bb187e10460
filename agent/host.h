/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * host: what the kernel knows of this machine, for preflight and validity.
 *
 * What it does not know is unknown, never a number: the speed of a virtual
 * link, for one.  Reads /proc and /sys only.
 */
#ifndef PLAFOND_HOST_H
#define PLAFOND_HOST_H

#include <stdint.h>

#include "wire.h"

/* data_address and interface may be "": then no interface is named. */
void host_read_facts(const char *data_address, const char *interface,
    struct host_facts *out);
/* Octets the kernel counted at the interface, sent or received;
 * UNKNOWN_U64 where there is no such interface. */
uint64_t host_interface_bytes(const char *interface, int sent);
/* Congestion controls that this process may use, space apart. */
void host_congestion_controls(char *buf, size_t size);

#endif
