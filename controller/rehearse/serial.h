/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * serial: when the bits of each packet are on the line, exactly.
 *
 * A first-in first-out server.  The part of a nanosecond that a packet ends
 * with is carried to the next as a fraction, so that no error adds up, however
 * long the line is busy.  Rates may change at given times, also in the middle
 * of a packet: the bits that are out stay out, the rest goes at the new rate.
 * Pure.
 */
#ifndef PLAFOND_SERIAL_H
#define PLAFOND_SERIAL_H

#include <stddef.h>
#include <stdint.h>

#include "rehearse/octets.h"

#define SERIAL_STEPS_MAX 64

struct serial_step {
	uint64_t at_ns;
	uint64_t rate_bps;	/* > 0 */
};

/* A moment: at_ns + part / (rate * den) ns; the quotient is below 1. */
struct serial_moment {
	uint64_t at_ns;
	uint64_t part;
	size_t step;		/* whose rate this is */
};

struct serial {
	struct octets octets;
	struct serial_step steps[1 + SERIAL_STEPS_MAX];
	size_t step_count;	/* 0: no serialisation, all bits at once */
	struct serial_moment idle;	/* from here on nothing is to be sent */
};

/* Steps rise in time, the first is at or before any packet.  Rates up to
 * 10^12 bit/s, times below 2^62 ns. */
void serial_init(struct serial *serial, const struct octets *octets,
    const struct serial_step steps[], size_t step_count);
/* First bit of a packet that is ready at ready_ns. */
struct serial_moment serial_start(const struct serial *serial,
    uint64_t ready_ns);
/* Moment after the last bit. */
struct serial_moment serial_finish(const struct serial *serial,
    struct serial_moment start, uint64_t bytes);
/* The packet is sent: the next one begins after it. */
void serial_keep(struct serial *serial, struct serial_moment finish);
/* The first whole nanosecond not before the moment. */
uint64_t serial_ceil_ns(struct serial_moment moment);

#endif
