/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * clock: the two clocks of the product.
 *
 * Intervals use CLOCK_MONOTONIC_RAW, which nothing slews or steps; civil time
 * is for labels only.  Pure modules never call these: they take now_ns.
 */
#ifndef PLAFOND_CLOCK_H
#define PLAFOND_CLOCK_H

#include <stdint.h>
#include <sys/time.h>

#define NS_PER_S UINT64_C(1000000000)
#define NS_PER_MS UINT64_C(1000000)

uint64_t clock_raw_ns(void);		/* CLOCK_MONOTONIC_RAW */
uint64_t clock_utc_ns(void);		/* since 1970-01-01T00:00:00Z */
uint64_t clock_thread_cpu_ns(void);	/* CPU time of the calling thread */

/* A length of time as timers want it; less than 1 us is cut off. */
struct timeval clock_timeval(uint64_t ns);

/* RFC 3339 with milliseconds and Z: "2026-12-01T10:00:00.000Z", 25 bytes. */
void clock_utc_text(uint64_t utc_ns, char buf[25]);

/* A steal-time reading of /proc/stat, all CPUs, in ns; UINT64_MAX: unknown. */
uint64_t clock_steal_ns(void);

#endif
