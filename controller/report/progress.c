/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/progress.h"

#include <inttypes.h>
#include <stdio.h>
#include <string.h>
#include <unistd.h>

#include "units.h"

#define NS_PER_S UINT64_C(1000000000)
#define LEAST_NS (NS_PER_S / 10)

const char *
progress_text(const struct progress_view *view, char *buf, size_t size)
{
	char rate[32], share[48] = "";
	uint64_t left_s = view->left_ns / NS_PER_S +
	    (view->left_ns % NS_PER_S != 0);

	if (view->target_bps != 0)
		(void)snprintf(share, sizeof(share), "  %5.1f %% of %s",
		    (double)view->payload_bps / (double)view->target_bps * 100,
		    view->reference ? "reference" : "ceiling");
	(void)snprintf(buf, size,
	    "trial %" PRIu64 "/%" PRIu64 "  %s  %-8s  %12s%s  %" PRIu64
	    ":%02u left", view->trial, view->trials, view->direction,
	    view->phase, units_format(view->payload_bps, DIMENSION_RATE, 1,
	    rate, sizeof(rate)), share, left_s / 60, (unsigned)(left_s % 60));
	return buf;
}

void
progress_init(struct progress *progress, bool quiet)
{
	memset(progress, 0, sizeof(*progress));
	progress->shown = !quiet && isatty(STDERR_FILENO) == 1;
}

void
progress_say(struct progress *progress, const char *text)
{
	if (!progress->shown || (text[0] == '\0' && !progress->drawn))
		return;
	/* to the start of the line, the text, and away with the rest */
	(void)fprintf(stderr, "\r%s\033[K", text);
	(void)fflush(stderr);
	progress->drawn = text[0] != '\0';
}

void
progress_show(struct progress *progress, const struct progress_view *view,
    uint64_t now_ns)
{
	char line[80];

	if (!progress->shown ||
	    (progress->drawn && now_ns < progress->drawn_ns + LEAST_NS))
		return;
	progress->drawn_ns = now_ns;
	progress_say(progress, progress_text(view, line, sizeof(line)));
}
