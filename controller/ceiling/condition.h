/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * condition: what explains a shortfall and never lowers a ceiling.
 *
 * Takes what the declaration says under `conditions` (round trip, loss,
 * window, host) and a ceiling; adds bounds of class condition to it, and works
 * out the figures that an engineer wants beside a ceiling.  The formulas
 * themselves are in loss.h and window.h.  Pure.
 */
#ifndef PLAFOND_CONDITION_H
#define PLAFOND_CONDITION_H

#include <stddef.h>
#include <stdint.h>

#include "ceiling/ceiling.h"
#include "ceiling/path.h"
#include "declare/circuit.h"

struct error;

#define CONDITION_NOTES_MAX 8
#define CONDITION_NOTE_SIZE 160

/* Of one direction.  FIELD_UNSET, or NAN for the ratio, where what it needs is
 * not declared.  What is needed is rounded up, all else down. */
struct condition_figures {
	/* Share of packets lost, from bit errors where these are declared. */
	double loss_ratio;
	/* Bandwidth-delay product: octets of the line in one round trip at the
	 * ceiling (RFC 6349 s3.3.1). */
	uint64_t bdp_bytes;
	/* Window that all streams together need to reach the ceiling: octets
	 * of the transport's stream in one round trip. */
	uint64_t window_needed_bytes;
	/* Least shift of RFC 7323 with which one stream can have that window;
	 * 14 also where even that is too small. */
	uint64_t window_shift;
	/* With the declared window each, else with the largest of RFC 7323. */
	uint64_t streams_needed;
	/* Slow start from RFC 6928's initial window to the ceiling. */
	uint64_t ramp_rounds;
	uint64_t ramp_ns;
	/* Mean payload rate over test-length that begins with slow start. */
	uint64_t cold_mean_bps;
	/* Of the binding contract's burst allowance, full at the beginning:
	 * how long it lasts at the rate of the narrow segment's line (unset
	 * where the line is not faster), and the mean payload rate over
	 * test-length. */
	uint64_t burst_ns;
	uint64_t burst_mean_bps;
	/* Ideal transfer time of transfer-size at the ceiling (RFC 6349 s4.1),
	 * without slow start. */
	uint64_t transfer_ns;
	/* Sentences for the reader: which model says nothing, and why. */
	char notes[CONDITION_NOTES_MAX][CONDITION_NOTE_SIZE];
	size_t notes_count;
};

/* Adds what the declaration's conditions allow under the load that the ceiling
 * was made of: window, loss, the path of acknowledgements, host.  Adds nothing
 * to a reference.  -1 (ERROR_INPUT): as ceiling_of_load. */
int condition_add_declared(const struct circuit *circuit,
    const struct load *load, struct ceiling *ceiling, struct error *err);

/* The figures beside that ceiling; all unset for a reference. */
void condition_figures(const struct circuit *circuit,
    const struct ceiling *ceiling, struct condition_figures *out);

#endif
