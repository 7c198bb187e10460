/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "clock.h"

#include <inttypes.h>
#include <stdio.h>
#include <time.h>
#include <unistd.h>

static uint64_t
read_ns(clockid_t id)
{
	struct timespec ts;

	(void)clock_gettime(id, &ts);
	return (uint64_t)ts.tv_sec * NS_PER_S + (uint64_t)ts.tv_nsec;
}

uint64_t
clock_raw_ns(void)
{
	return read_ns(CLOCK_MONOTONIC_RAW);
}

uint64_t
clock_utc_ns(void)
{
	return read_ns(CLOCK_REALTIME);
}

uint64_t
clock_thread_cpu_ns(void)
{
	return read_ns(CLOCK_THREAD_CPUTIME_ID);
}

struct timeval
clock_timeval(uint64_t ns)
{
	struct timeval tv = {
		.tv_sec = (time_t)(ns / NS_PER_S),
		.tv_usec = (suseconds_t)(ns % NS_PER_S / 1000),
	};

	return tv;
}

void
clock_utc_text(uint64_t utc_ns, char buf[25])
{
	time_t seconds = (time_t)(utc_ns / NS_PER_S);
	struct tm tm;
	char date[20];

	(void)gmtime_r(&seconds, &tm);
	(void)strftime(date, sizeof(date), "%Y-%m-%dT%H:%M:%S", &tm);
	(void)snprintf(buf, 25, "%s.%03uZ", date,
	    (unsigned)(utc_ns / NS_PER_MS % 1000));
}

uint64_t
clock_steal_ns(void)
{
	uint64_t user, nice, sys, idle, iowait, irq, softirq, steal;
	long ticks_per_s = sysconf(_SC_CLK_TCK);
	FILE *f = fopen("/proc/stat", "re");
	int found;

	if (f == NULL)
		return UINT64_MAX;
	/* proc(5): cpu user nice system idle iowait irq softirq steal */
	found = fscanf(f, "cpu %" SCNu64 " %" SCNu64 " %" SCNu64 " %" SCNu64
	    " %" SCNu64 " %" SCNu64 " %" SCNu64 " %" SCNu64, &user, &nice,
	    &sys, &idle, &iowait, &irq, &softirq, &steal);
	(void)fclose(f);
	if (found != 8 || ticks_per_s <= 0)
		return UINT64_MAX;
	return steal * (NS_PER_S / (uint64_t)ticks_per_s);
}
