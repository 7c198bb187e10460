/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * line_settings: what one direction of an emulated line does to packets.
 *
 * line_settings_init turns every feature off; each field is one feature or a
 * part of one.  Times in the lists count from the line's origin.  Pure.
 */
#ifndef PLAFOND_LINE_SETTINGS_H
#define PLAFOND_LINE_SETTINGS_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "rehearse/background.h"
#include "rehearse/bucket.h"
#include "rehearse/bursts.h"
#include "rehearse/serial.h"
#include "rehearse/variation.h"

struct error;

#define LINE_OUTAGES_MAX 64
#define LINE_RATE_MIN_BPS UINT64_C(1000)
#define LINE_RATE_MAX_BPS UINT64_C(1000000000000)
#define LINE_PACKET_BYTES_MAX 65535
#define LINE_DELAY_MAX_NS UINT64_C(10000000000)
#define LINE_QUEUE_MAX_NS UINT64_C(60000000000)
#define LINE_BYTES_MAX UINT64_C(1000000000000)
#define LINE_TIME_MAX_NS UINT64_C(1000000000000000)	/* 11 days */
#define LINE_HELD_MAX 128
/* Packets a second of background traffic: each is computed. */
#define LINE_BACKGROUND_PPS_MAX UINT64_C(2000000)

/* The line is down from from_ns on and up again at to_ns. */
struct line_outage {
	uint64_t from_ns, to_ns;
};

struct line_reordering {
	double ratio;		/* of packets that are held back */
	uint64_t packets;	/* until so many others have passed; 0: none */
	uint64_t extra_ns;	/* so long, with `packets` at most so long */
};

struct line_duplication {
	double ratio;
	uint64_t extra_ns;	/* the copy comes so much later */
};

struct line_settings {
	/* Of all random choices.  Each direction has its own. */
	uint64_t seed;

	uint64_t mtu_bytes;	/* 0: none */
	bool mtu_answer;	/* say so to the sender; else a black hole */
	struct bucket_settings policer;

	/* A packet waits until its first bit is sent.  It is dropped if its
	 * bytes and those that wait would be more than this, or if it had to
	 * wait for longer; one that need not wait never is.  0: no limit. */
	uint64_t queue_bytes, queue_ns;
	struct bucket_settings shaper;	/* behind the queue */

	uint64_t rate_bps;	/* of all octets; 0: no serialisation */
	struct octets octets;	/* of a packet on the line */
	struct serial_step steps[SERIAL_STEPS_MAX];
	size_t step_count;
	struct background_settings background;

	/* What is on the line, by one bit, while it is down is lost. */
	struct line_outage outages[LINE_OUTAGES_MAX];
	size_t outage_count;
	double loss_ratio;
	struct bursts_settings bursts;

	uint64_t propagation_ns;
	struct variation_settings variation;
	struct line_reordering reordering;
	struct line_duplication duplication;

	uint64_t interval_ns;	/* spacing of the truth's rows */
	uint64_t intervals;	/* rows; what comes later shares one more */
	uint64_t sample_every;	/* packets; 0: no delays are kept */
};

void line_settings_init(struct line_settings *settings);
/* -1 (ERROR_INPUT): a value is absurd or contradicts another; the cause names
 * it, what was found and what is allowed. */
int line_check(const struct line_settings *settings, struct error *err);

#endif
