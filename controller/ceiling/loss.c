/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/loss.h"

#include <math.h>

/* RFC 9438 s4.6, s5.1 */
#define CUBIC_BETA 0.7
#define CUBIC_C 0.4
#define RENO_FACTOR 1.2			/* RFC 3649 s5, RFC 9438 s5.1 */
#define TFRC_TIMEOUT_ROUND_TRIPS 4.0	/* RFC 5348 s3.1 */

static double
rate_of_window(const struct loss_path *path, double segments)
{
	return 8 * path->segment_octets * segments / path->round_trip_s;
}

double
loss_mathis_bps(const struct loss_path *path, double c)
{
	if (!(path->ratio > 0 && path->ratio <= LOSS_WINDOW_MODELS_MOST))
		return NAN;
	return rate_of_window(path, c / sqrt(path->ratio));
}

/* timeouts: 3 sqrt(3bp/8), held to 1 or not. */
static double
pftk(const struct loss_path *path, double b, double timeout_round_trips,
    double timeouts)
{
	double p = path->ratio;

	return rate_of_window(path, 1 / (sqrt(2 * b * p / 3) +
	    timeout_round_trips * timeouts * p * (1 + 32 * p * p)));
}

double
loss_pftk_bps(const struct loss_path *path, double b,
    double timeout_round_trips)
{
	if (!(path->ratio > 0 && path->ratio < 1))
		return NAN;
	return pftk(path, b, timeout_round_trips,
	    fmin(1, 3 * sqrt(3 * b * path->ratio / 8)));
}

double
loss_tfrc_bps(const struct loss_path *path)
{
	if (!(path->ratio > 0 && path->ratio <= LOSS_TFRC_MOST))
		return NAN;
	return pftk(path, 1, TFRC_TIMEOUT_ROUND_TRIPS,
	    3 * sqrt(3 * path->ratio / 8));
}

double
loss_cubic_window(double round_trip_s, double ratio)
{
	return pow(CUBIC_C * (3 + CUBIC_BETA) / (4 * (1 - CUBIC_BETA)), 0.25) *
	    pow(round_trip_s / ratio, 0.75);
}

double
loss_reno_window(double ratio)
{
	return RENO_FACTOR / sqrt(ratio);
}

double
loss_cubic_bps(const struct loss_path *path)
{
	if (!(path->ratio > 0 && path->ratio <= LOSS_WINDOW_MODELS_MOST))
		return NAN;
	return rate_of_window(path, fmax(loss_reno_window(path->ratio),
	    loss_cubic_window(path->round_trip_s, path->ratio)));
}

double
loss_of_bit_errors(double bit_error_ratio, double frame_octets)
{
	/* Without cancellation where the ratio is tiny. */
	return -expm1(8 * frame_octets * log1p(-bit_error_ratio));
}
