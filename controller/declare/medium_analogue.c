/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Medium analogue: any channel of so many hertz, by Shannon and Hartley. */
#include <assert.h>
#include <math.h>

#include "declare/medium_rows.h"
#include "declare/signal.h"
#include "error.h"

struct parameters {
	double width_hz[DIRECTIONS_SINGLE];
	struct signal signal;
	double gap_db;
	uint64_t streams;
	uint64_t duplex;		/* enum duplex */
	uint64_t contention;
};
static_assert(sizeof(struct parameters) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");

static const struct field fields[] = {
	MEDIUM_KIND_ROW,
	{ .name = "bandwidth", .kind = FIELD_REAL,	/* Hz */
	  .dimension = DIMENSION_FREQUENCY,
	  .offset = offsetof(struct parameters, width_hz),
	  .real_min = 1, .real_max = 1e12, .required = true,
	  .per_direction = true,
	  .help = "B, what the channel lets through, in hertz" },
	SIGNAL_ROWS(struct parameters, signal),
	{ .name = "gap", .kind = FIELD_REAL, .dimension = DIMENSION_DECIBEL,
	  .offset = offsetof(struct parameters, gap_db),
	  .real_min = 0, .real_max = 30, .default_text = "0 dB",
	  .help = "what a real modem needs above Shannon's S/N: 3 to 6 dB "
		  "coded, 9.8 dB uncoded at 1e-7 (from memory)" },
	{ .name = "streams", .kind = FIELD_COUNT,
	  .offset = offsetof(struct parameters, streams),
	  .min = 1, .max = 64, .default_text = "1",
	  .help = "independent ones, each with that S/N" },
	MEDIUM_DUPLEX_ROW(struct parameters, duplex, "half: both directions "
	    "share the channel"),
	MEDIUM_CONTENTION_ROW(struct parameters, contention),
	{ .name = NULL },
};

/* Below the gap to capacity. */
static double
net_bps(const struct parameters *p, enum direction direction)
{
	double width_hz = p->width_hz[direction];

	return (double)p->streams * shannon_bps(width_hz, signal_snr(
	    &p->signal, direction, width_hz) / ratio_of_db(p->gap_db));
}

static int
check(void *base, const struct node *node, struct error *err)
{
	const struct parameters *p = base;

	if (signal_check(&p->signal, node, "analogue", true, err) == -1)
		return -1;
	for (enum direction d = 0; d < DIRECTIONS_SINGLE; d++)
		if (net_bps(p, d) < 1)
			return node_error(medium_place(node, "snr"), err,
			    "analogue: found S/N of %.1f dB, at which less "
			    "than 1 bit/s is left; as S/N -> 0 so does C = B "
			    "log2(1 + S/N), and Eb/N0 stays above ln 2 = "
			    "-1.59 dB; allowed: a larger S/N or more hertz",
			    decibels(signal_snr(&p->signal, d,
			    p->width_hz[d])));
	return 0;
}

static void
add_notes(const struct parameters *p, double width_hz, double snr,
    struct medium_capacity *out)
{
	double bits_per_hz = shannon_bps(1, snr);

	medium_add_note(out, "S/N %.3f dB, a ratio of %.6g", decibels(snr),
	    snr);
	medium_add_note(out, "%.4g bit/s in each Hz of a stream; Eb/N0 at "
	    "that limit %.3f dB, never below ln 2 = -1.59 dB", bits_per_hz,
	    decibels(snr / bits_per_hz));
	if (signal_has_level(&p->signal))
		medium_add_note(out, "noise kTB with the noise figure: "
		    "%.3f dBm", signal_noise_dbm(&p->signal, width_hz));
	if (snr < 1)
		medium_add_note(out, "signal below the noise: C comes near "
		    "1.4427 B S/N, and 0 as the signal does");
}

static int
capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct parameters *p = base;
	double width_hz = p->width_hz[load->direction];
	double snr = signal_snr(&p->signal, load->direction, width_hz);

	(void)err;
	out->line_bps = medium_whole_bps((double)p->streams *
	    shannon_bps(width_hz, snr));
	out->channel_bps = fraction_floor(out->line_bps);
	out->duplex = (enum duplex)p->duplex;
	out->contention = p->contention;
	if (p->gap_db > 0)
		medium_add_step(out, "gap to capacity", medium_whole_bps(
		    net_bps(p, load->direction)), "declared");
	add_notes(p, width_hz, snr, out);
	return 0;
}

const struct medium medium_analogue = {
	.name = "analogue",
	.title = "any analogue channel, by Shannon and Hartley",
	.fields = fields,
	.check = check,
	.capacity = capacity,
	.carries = (const char *const[]){ "ethernet", "hdlc", "aal5", "ipv4",
	    "ipv6", NULL },
	.bare_frames = true,
	.default_mtu_bytes = 1500,
	.duplex = DUPLEX_FULL,
	.accuracy = ACCURACY_MODEL,
	.accuracy_note = "Shannon's limit for white Gaussian noise, an upper "
	    "bound that nothing reaches: a microwave link in service comes "
	    "to about 70 % of it; declare a gap for what a real modem does",
	.memory = "the usual gaps to capacity, which are no default",
	.formula = "C = streams * B log2(1 + S/N); N = k T B + noise figure; "
	    "with a gap S/N is divided by it",
	.source = "Shannon 1949, Hartley 1928",
};
