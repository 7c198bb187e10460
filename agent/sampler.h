/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * sampler: TCP_INFO of one socket, read by offset.
 *
 * The layout is the kernel's stable one (linux/tcp.h), kept as the offsets of
 * TCP_SAMPLE_FIELDS.  A field is present only if the length that the kernel
 * returned covers it; the header we were compiled with decides nothing.
 */
#ifndef PLAFOND_SAMPLER_H
#define PLAFOND_SAMPLER_H

#include <stddef.h>

#include "measurement.h"

#define SAMPLER_INFO_BYTES 256	/* past the last field that we keep */

/* Fields out of a kernel answer of `size` bytes.  Pure. */
void sampler_decode(const unsigned char *info, size_t size,
    struct tcp_sample *out);
/* All UNKNOWN_U64 where the socket does not answer. */
void sampler_read(int fd, struct tcp_sample *out);

#endif
