/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * payload: what the senders of one transfer send.
 *
 * Pseudo-random bytes that do not repeat within the period, so that nothing on
 * the way can compress or deduplicate them; another seed each time.  Not
 * secret, and not for keys.  Page-aligned, read-only once made, shared by all
 * workers of a transfer.
 */
#ifndef PLAFOND_PAYLOAD_H
#define PLAFOND_PAYLOAD_H

#include <stddef.h>
#include <stdint.h>

#define PAYLOAD_PERIOD_BYTES UINT64_C(16777216)	/* where a trial says 0 */
#define PAYLOAD_PERIOD_BYTES_MIN UINT64_C(4096)
#define PAYLOAD_PERIOD_BYTES_MAX UINT64_C(268435456)

struct error;

struct payload {
	unsigned char *bytes;	/* owned */
	size_t period_bytes;
};

/* The generator: `size` bytes from a seed (xoshiro256++, Blackman and Vigna,
 * 2019; 64-bit little-endian words).  Pure. */
void payload_fill(unsigned char *bytes, size_t size, const uint64_t seed[4]);

/* period_bytes 0 stands for PAYLOAD_PERIOD_BYTES.
 * -1: ERROR_INPUT outside of the limits, ERROR_INTERNAL no memory. */
int payload_init(struct payload *payload, uint64_t period_bytes,
    struct error *err);
void payload_fini(struct payload *payload);	/* also of one all zero */

/* What to send at a place of the endless repetition: up to *size bytes, fewer
 * at the end of the period (*size is lowered). */
const unsigned char *payload_at(const struct payload *payload,
    uint64_t position_bytes, size_t *size);

#endif
