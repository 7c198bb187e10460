/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * hex: octets as hexadecimal digits (RFC 4648, section 8), in lower case.
 *
 * Pure.
 */
#ifndef PLAFOND_HEX_H
#define PLAFOND_HEX_H

#include <stddef.h>

/* out: 2 * count + 1 bytes. */
void hex_text(const unsigned char *octets, size_t count, char *out);

/* The first 2 * count digits of text; -1: not so many. */
int hex_octets(const char *text, size_t count, unsigned char *out);

#endif
