/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * medium_rows: the rows that the families of media define, in the order in
 * which they are listed.  For medium.c alone.
 */
#ifndef PLAFOND_MEDIUM_ROWS_H
#define PLAFOND_MEDIUM_ROWS_H

#include "declare/medium.h"

extern const struct medium medium_ethernet;
extern const struct medium medium_host;

#define MEDIUM_ROWS							\
	&medium_ethernet,						\
	&medium_host,

#endif
