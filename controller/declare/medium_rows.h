/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * medium_rows: the rows that the families of media define, in the order in
 * which they are listed.  For medium.c alone.
 */
#ifndef PLAFOND_MEDIUM_ROWS_H
#define PLAFOND_MEDIUM_ROWS_H

#include "declare/medium.h"

extern const struct medium medium_ethernet;
extern const struct medium medium_pdh;
extern const struct medium medium_sdh;
extern const struct medium medium_otn;
extern const struct medium medium_adsl2plus;
extern const struct medium medium_vdsl2;
extern const struct medium medium_gfast;
extern const struct medium medium_docsis_3_0;
extern const struct medium medium_docsis_3_1;
extern const struct medium medium_gpon;
extern const struct medium medium_xg_pon;
extern const struct medium medium_xgs_pon;
extern const struct medium medium_wlan;
extern const struct medium medium_lte;
extern const struct medium medium_nr;
extern const struct medium medium_radio;
extern const struct medium medium_analogue;
extern const struct medium medium_ip;
extern const struct medium medium_host;

#define MEDIUM_ROWS							\
	&medium_ethernet,						\
	&medium_pdh,							\
	&medium_sdh,							\
	&medium_otn,							\
	&medium_adsl2plus,						\
	&medium_vdsl2,							\
	&medium_gfast,							\
	&medium_docsis_3_0,						\
	&medium_docsis_3_1,						\
	&medium_gpon,							\
	&medium_xg_pon,							\
	&medium_xgs_pon,						\
	&medium_wlan,							\
	&medium_lte,							\
	&medium_nr,							\
	&medium_radio,							\
	&medium_analogue,						\
	&medium_ip,							\
	&medium_host,

#endif
