/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * loss: what a stream of loss-based TCP reaches at a given loss.
 *
 * Models, each within the range that it was made for; outside it answers NAN
 * and the caller says so.  Rates are bit/s of the transport's stream of
 * octets.  They say nothing of congestion control that does not answer to
 * loss.  Pure.
 */
#ifndef PLAFOND_LOSS_H
#define PLAFOND_LOSS_H

struct loss_path {
	double segment_octets;	/* s: of the stream in one segment */
	double round_trip_s;	/* R */
	double ratio;		/* p: loss events a segment */
};

/* Mathis 1997: s / R * C / sqrt(p), for p up to LOSS_WINDOW_MODELS_MOST:
 * beyond it timeouts rule (the limit is from memory). */
double loss_mathis_bps(const struct loss_path *path, double c);
/* sqrt(3/2): the window grows by a segment a round trip, acknowledgements
 * delayed or not (RFC 3465). */
#define LOSS_MATHIS_C 1.2247448713915890

/* Padhye 1998 with b segments an acknowledgement and a timeout of so many
 * round trips, 0 < p < 1; RFC 3819 s8.5.1. */
double loss_pftk_bps(const struct loss_path *path, double b,
    double timeout_round_trips);
/* The same as RFC 5348 s3.1 has it: b = 1, timeout 4 R, and the chance of a
 * timeout not held to 1, so for p up to LOSS_TFRC_MOST, where it is 1. */
double loss_tfrc_bps(const struct loss_path *path);
#define LOSS_TFRC_MOST (8.0 / 27.0)

/* RFC 9438 s5: the larger of CUBIC's mean window (C 0.4, beta 0.7) and Reno's,
 * for p up to LOSS_WINDOW_MODELS_MOST, the largest in its table 3. */
double loss_cubic_bps(const struct loss_path *path);
#define LOSS_WINDOW_MODELS_MOST 0.02
/* Segments, whatever p is. */
double loss_cubic_window(double round_trip_s, double ratio);
double loss_reno_window(double ratio);	/* 1.2 / sqrt(p): RFC 3649 s5 */

/* Share of frames with a wrong bit: 1 - (1 - BER)^(8 * octets), RFC 3819
 * s8.5.3. */
double loss_of_bit_errors(double bit_error_ratio, double frame_octets);

#endif
