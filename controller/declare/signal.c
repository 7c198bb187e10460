/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/signal.h"

#include <math.h>

#include "declare/medium.h"
#include "error.h"

#define LN_2 0.69314718055994530942
/* IEEE's standard noise temperature */
#define NOISE_TEMPERATURE_K 290

double
decibels(double ratio)
{
	return 10 * log10(ratio);
}

double
ratio_of_db(double db)
{
	return pow(10, db / 10);
}

double
noise_dbm(double width_hz, double temperature_k, double noise_figure_db)
{
	return decibels(BOLTZMANN_J_PER_K * temperature_k * width_hz / 1e-3) +
	    noise_figure_db;
}

/* log1p keeps its digits where the signal is far below the noise */
double
shannon_bps(double width_hz, double snr)
{
	return width_hz * (log1p(snr) / LN_2);
}

double
shannon_least_snr_db(double bits_per_hz)
{
	return decibels(expm1(bits_per_hz * LN_2));
}

double
shannon_least_ebn0_db(double bits_per_hz)
{
	return decibels(expm1(bits_per_hz * LN_2) / bits_per_hz);
}

bool
signal_has_level(const struct signal *signal)
{
	return !isnan(signal->noise_figure_db);
}

double
signal_noise_dbm(const struct signal *signal, double width_hz)
{
	double temperature_k = NOISE_TEMPERATURE_K;

	if (signal->temperature_k != FIELD_UNSET)
		temperature_k = (double)signal->temperature_k;
	return noise_dbm(width_hz, temperature_k, signal->noise_figure_db);
}

double
signal_snr(const struct signal *signal, enum direction direction,
    double width_hz)
{
	if (!isnan(signal->snr_db[direction]))
		return ratio_of_db(signal->snr_db[direction]);
	if (!isnan(signal->signal_w[direction]))
		return signal->signal_w[direction] /
		    signal->noise_w[direction];
	return ratio_of_db(signal->received_dbm[direction] -
	    signal_noise_dbm(signal, width_hz));
}

/* Is the key there, and then for both directions? */
static int
check_pair(const double values[DIRECTIONS_SINGLE], const struct node *node,
    const char *key, bool *given, struct error *err)
{
	*given = node_child(node, key) != NULL;
	if (*given && (isnan(values[0]) || isnan(values[1])))
		return node_error(medium_place(node, key), err, "%s: a "
		    "direction is missing, allowed: one value for both, or "
		    "{ a-to-b: VALUE, b-to-a: VALUE }", key);
	return 0;
}

/* Powers of 0 have limits but no rate. */
static int
check_powers(const struct signal *signal, const struct node *node,
    struct error *err)
{
	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		if (!(signal->signal_w[d] > 0))
			return node_error(medium_place(node, "signal-power"),
			    err, "signal-power: 0 W carries nothing, as S/N "
			    "-> 0 so does C = B log2(1 + S/N); allowed: more "
			    "than 0 W");
		if (!(signal->noise_w[d] > 0))
			return node_error(medium_place(node, "noise-power"),
			    err, "noise-power: with 0 W of noise C = B "
			    "log2(1 + S/N) has no limit, and no channel has "
			    "less noise than kTB; allowed: more than 0 W");
	}
	return 0;
}

/* Both or neither of two keys. */
static int
check_together(const struct node *node, const char *what, const char *left,
    const char *right, struct error *err)
{
	bool has_left = node_child(node, left) != NULL;
	bool has_right = node_child(node, right) != NULL;

	if (has_left == has_right)
		return 0;
	return node_error(medium_place(node, has_left ? left : right), err,
	    "%s: '%s' is missing, allowed: %s together with %s", what,
	    has_left ? right : left, left, right);
}

int
signal_check(const struct signal *signal, const struct node *node,
    const char *what, bool required, struct error *err)
{
	bool snr, powers, noise, level;

	if (check_pair(signal->snr_db, node, "snr", &snr, err) == -1 ||
	    check_pair(signal->signal_w, node, "signal-power", &powers,
	    err) == -1 ||
	    check_pair(signal->noise_w, node, "noise-power", &noise,
	    err) == -1 ||
	    check_pair(signal->received_dbm, node, "received-level", &level,
	    err) == -1 ||
	    check_together(node, what, "signal-power", "noise-power",
	    err) == -1 ||
	    check_together(node, what, "received-level", "noise-figure",
	    err) == -1)
		return -1;
	if (signal->temperature_k != FIELD_UNSET && !level)
		return node_error(medium_place(node, "temperature-kelvin"),
		    err, "temperature-kelvin: without received-level it says "
		    "nothing, allowed: leave it out");
	if (snr + powers + level > 1)
		return node_error(medium_place(node, powers ?
		    "signal-power" : "received-level"), err, "%s: S/N is "
		    "declared twice, allowed: one of snr, signal-power with "
		    "noise-power, received-level with noise-figure", what);
	if (required && !snr && !powers && !level)
		return node_error(node, err, "%s: 'snr' is missing, allowed: "
		    "snr, or signal-power with noise-power, or received-level "
		    "with noise-figure", what);
	return powers ? check_powers(signal, node, err) : 0;
}
