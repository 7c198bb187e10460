/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * wlan_declaration: the fields of medium wlan, and what of them go together.
 *
 * For medium_wlan.c alone.  Pure.
 */
#ifndef PLAFOND_WLAN_DECLARATION_H
#define PLAFOND_WLAN_DECLARATION_H

#include "declare/medium.h"
#include "declare/wlan_airtime.h"

struct error;

/* As declared; wlan_check fills in what was left out. */
struct wlan_parameters {
	uint64_t generation;		/* enum wlan_generation */
	uint64_t band;			/* enum wlan_band */
	double width_hz;
	uint64_t mcs;			/* once checked: of one stream */
	uint64_t phy_rate_bps;
	uint64_t streams;
	uint64_t guard_ns;
	uint64_t short_preamble;	/* 0, 1 */
	uint64_t aggregation;		/* 0, 1 */
	uint64_t ampdu_octets;
	uint64_t window_frames;
	uint64_t control_bps;
	uint64_t protection;		/* enum wlan_protection */
	uint64_t protection_bps;
	uint64_t contention;
};

extern const struct field wlan_fields[];

/* The check of the medium's row; places its refusals. */
int wlan_check(void *parameters, const struct node *node, struct error *err);

/* Of parameters that were checked. */
const struct wlan_standard *wlan_standard_of(const struct wlan_parameters *p);
/* Of n, ac, ax and be. */
struct wlan_mode wlan_mode_of(const struct wlan_parameters *p);

#endif
