/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * reference: what this host moves through its own loopback with a bare copy
 * loop: two blocking threads, 1 MiB calls, the receiver discarding in the
 * kernel.  A reference for validity, never a ceiling of a circuit.
 */
#ifndef PLAFOND_REFERENCE_H
#define PLAFOND_REFERENCE_H

#include <stdint.h>

struct error;
struct event_base;
struct reference;

/* Runs for duration_ns in threads of its own; done is called once, from the
 * loop; error NULL on success.  Returns owned; free joins and may be early. */
int reference_start(struct event_base *base, uint64_t duration_ns,
    void (*done)(struct reference *reference, uint64_t payload_bps,
	uint64_t cpu_ns, const struct error *why, void *arg),
    void *arg, struct reference **out, struct error *err);
void reference_free(struct reference *reference);

#endif
