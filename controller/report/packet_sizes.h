/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * packet_sizes: the classic table of frame sizes (RFC 2544 section 9.1) with
 * the frames a second and the rates that a circuit allows at each.
 *
 * Sizes that the layers cannot make or the MTU does not let through are left
 * out, with the reason.  Stacks without frames have packets of those sizes.
 * Pure but for the printing.
 */
#ifndef PLAFOND_PACKET_SIZES_H
#define PLAFOND_PACKET_SIZES_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>

#include "ceiling/packet_rate.h"
#include "declare/circuit.h"
#include "trial.h"

struct error;

#define PACKET_SIZES_MAX 12

struct packet_size {
	uint64_t bytes;			/* of the frame; else of the packet */
	struct packet_rate rate;
	/* Payload over the declared stack and over UDP; FIELD_UNSET where
	 * there is no room, or where no such packet is made. */
	uint64_t declared_bps, udp_bps;
};

struct packet_size_left {
	uint64_t bytes;
	char why[96];
};

struct packet_sizes_direction {
	bool frames;			/* else packets */
	struct packet_size sizes[PACKET_SIZES_MAX];	/* ascending */
	size_t count;
	struct packet_size_left left[PACKET_SIZES_MAX];
	size_t left_count;
	bool contract_ignored;		/* for a size at least */
};

struct packet_sizes {
	char circuit[CIRCUIT_NAME_SIZE];
	char top[64];			/* "tcp": the declared transport */
	bool reference;			/* nothing below */
	struct packet_sizes_direction directions[DIRECTIONS_SINGLE];
};

/* Returns owned (free).  -1 (ERROR_INPUT): a medium makes no rate. */
int packet_sizes_make(const struct circuit *circuit,
    struct packet_sizes **out, struct error *err);

void packet_sizes_text(const struct packet_sizes *sizes, FILE *out);
/* "plafond-packet-sizes/1".  -1: no memory. */
int packet_sizes_json(const struct packet_sizes *sizes, FILE *out);
void packet_sizes_csv(const struct packet_sizes *sizes, FILE *out);

#endif
