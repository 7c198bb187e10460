/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * progress: one live line on standard error while trials run.
 *
 * Drawn over itself on a terminal, and silent anywhere else.  Making the text
 * is pure.
 */
#ifndef PLAFOND_PROGRESS_H
#define PLAFOND_PROGRESS_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

struct progress {
	bool shown;			/* standard error is a terminal */
	bool drawn;			/* a line stands there */
	uint64_t drawn_ns;
};

struct progress_view {
	uint64_t trial, trials;
	const char *direction;		/* "a-to-b" */
	const char *phase;		/* "settling", "counting" */
	uint64_t payload_bps;		/* of the last second */
	uint64_t target_bps;		/* ceiling or reference; 0: none */
	bool reference;			/* the target is one */
	uint64_t left_ns;		/* of the whole task, an estimate */
};

void progress_init(struct progress *progress, bool quiet);
/* At most ten times a second, but for a change that must be seen. */
void progress_show(struct progress *progress, const struct progress_view *view,
    uint64_t now_ns);
/* Any other text; "" takes the line away. */
void progress_say(struct progress *progress, const char *text);

/* Pure: at most size - 1 octets, which is the width of a terminal. */
const char *progress_text(const struct progress_view *view, char *buf,
    size_t size);

#endif
