/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * signal: what a receiver gets of a signal and of noise, as declared, and
 * Shannon's limit for it.
 *
 * C. Shannon, Communication in the Presence of Noise, 1949: white Gaussian
 * noise.  Shared by the media that know their channel.  Pure.
 */
#ifndef PLAFOND_SIGNAL_H
#define PLAFOND_SIGNAL_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "field.h"
#include "trial.h"

struct error;
struct node;

/* SI 2019: exact. */
#define BOLTZMANN_J_PER_K 1.380649e-23

/* One of three forms: S/N; both powers; received level and noise figure. */
struct signal {
	double snr_db[DIRECTIONS_SINGLE];		/* NAN: not given */
	double signal_w[DIRECTIONS_SINGLE], noise_w[DIRECTIONS_SINGLE];
	double received_dbm[DIRECTIONS_SINGLE];
	double noise_figure_db;
	uint64_t temperature_k;				/* FIELD_UNSET: 290 */
};

/* Refuses two forms at once, half a form, powers of 0, and, where one is
 * required, none.  `what` names the medium. */
int signal_check(const struct signal *signal, const struct node *node,
    const char *what, bool required, struct error *err);
/* S/N as a ratio, above 0; NAN where none is declared.  Both of a signal that
 * was checked. */
double signal_snr(const struct signal *signal, enum direction direction,
    double width_hz);
bool signal_has_level(const struct signal *signal);
/* Noise that the receiver adds itself, with its noise figure. */
double signal_noise_dbm(const struct signal *signal, double width_hz);

/* k T B and the noise figure, in dBm. */
double noise_dbm(double width_hz, double temperature_k,
    double noise_figure_db);
/* C = B log2(1 + S/N), bit/s. */
double shannon_bps(double width_hz, double snr);
/* The least S/N, and Eb/N0, that carries so many bit/s in each Hz. */
double shannon_least_snr_db(double bits_per_hz);
double shannon_least_ebn0_db(double bits_per_hz);
double decibels(double ratio);
double ratio_of_db(double db);

#define SIGNAL_REAL_ROW(key, type, member, unit, low, high, text)	\
	{ .name = key, .kind = FIELD_REAL, .dimension = unit,		\
	  .offset = offsetof(type, member), .per_direction = true,	\
	  .real_min = low, .real_max = high, .help = text }
#define SIGNAL_ROWS(type, member)					\
	SIGNAL_REAL_ROW("snr", type, member.snr_db, DIMENSION_DECIBEL,	\
	    -100, 150, "ratio of signal to noise"),			\
	SIGNAL_REAL_ROW("signal-power", type, member.signal_w,		\
	    DIMENSION_POWER, 0, 1e9, "in place of snr, with noise-power"), \
	SIGNAL_REAL_ROW("noise-power", type, member.noise_w,		\
	    DIMENSION_POWER, 0, 1e9, "in the whole width"),		\
	SIGNAL_REAL_ROW("received-level", type, member.received_dbm,	\
	    DIMENSION_LEVEL, -200, 100, "in place of snr, with "	\
	    "noise-figure"),						\
	{ .name = "noise-figure", .kind = FIELD_REAL,			\
	  .dimension = DIMENSION_DECIBEL,				\
	  .offset = offsetof(type, member.noise_figure_db),		\
	  .real_min = 0, .real_max = 60,				\
	  .help = "of the receiver: noise = kTB + noise figure" },	\
	{ .name = "temperature-kelvin", .kind = FIELD_COUNT,		\
	  .offset = offsetof(type, member.temperature_k),		\
	  .min = 1, .max = 10000,					\
	  .help = "T of kTB in kelvin; default: 290" }

#endif
