/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * layer: the table of protocol layers, one row each.
 *
 * A row says how many octets a layer puts around what it carries, and what may
 * lie below it.  Nothing outside layer.c names a layer's octets; parser, help,
 * arithmetic and tests walk the table.  Pure.
 */
#ifndef PLAFOND_LAYER_H
#define PLAFOND_LAYER_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "declare/accuracy.h"
#include "field.h"
#include "trial.h"

struct error;

/* Where the rate of a layer is counted; also the order of a stack. */
enum layer_level {
	LEVEL_LINE,		/* L1: frame with preamble, SFD and gap */
	LEVEL_FRAME,		/* L2: header to FCS */
	LEVEL_FRAME_WITHOUT_FCS,	/* counting only, never a layer's own */
	LEVEL_PACKET,		/* L3 */
	LEVEL_SEGMENT,		/* L4 with its header */
	LEVEL_PAYLOAD,		/* what the application hands over */
	LEVELS,
	LEVEL_TUNNEL = LEVELS	/* of a row only: nothing is counted there */
};
/* "line", "frame", ..., "tunnel" */
const char *level_name(enum layer_level level);
extern const struct choice level_choices[];	/* for counted-at */

/* Options that a declaration can give to a layer; each row's fields point into
 * this struct and the rest stays at 0.  FIELD_UNSET: not declared. */
struct layer_options {
	uint64_t fcs;			/* ethernet on AAL5, gfp: 0 or 1 */
	uint64_t sci, icv_bytes;	/* macsec */
	uint64_t labels;		/* mpls */
	uint64_t control_word;		/* pseudowire */
	uint64_t address_control;	/* ppp on l2tp */
	uint64_t fcs_bytes, stuffing, flags;	/* hdlc, frame-relay */
	uint64_t downstream_header_bytes;	/* docsis: extended header */
	uint64_t upstream_header_bytes;
	uint64_t qos, encryption;	/* wlan */
	uint64_t mac_bytes, rlc_bytes, pdcp_bytes, sdap;	/* lte, nr */
	uint64_t mtu_bytes;		/* ipv4, ipv6, wireguard */
	uint64_t options_bytes;		/* ipv4, tcp, geneve; ipv6: extension
					 * headers */
	uint64_t timestamps;		/* tcp: 0 or 1 */
	uint64_t mss_bytes;		/* tcp */
	uint64_t segments_per_ack;	/* tcp */
	uint64_t datagram_bytes;	/* udp */
	uint64_t checksum, key;		/* gre */
	uint64_t sequence;		/* gre, l2tp: 0 or 1 */
	uint64_t length;		/* l2tp, dtls: 0 or 1 */
	uint64_t offset_bytes;		/* l2tp, quic */
	uint64_t cookie_bytes, sublayer;	/* l2tpv3 */
	uint64_t cipher, integrity;	/* esp, tls, dtls */
	uint64_t version;		/* tls, dtls */
	uint64_t encrypt_then_mac;	/* tls */
	uint64_t record_bytes;		/* tls: plaintext a record */
	uint64_t connection_id_bytes;	/* dtls, quic */
	uint64_t sequence_bytes;	/* dtls, quic: packet number */
	uint64_t stream_id_bytes, length_bytes;	/* quic */
};

/* len = head + roundup(len + trail, align) + tail; at least min; plus before
 * and gap; times num/den.  With record_bytes the octets are those around one
 * record of that many carried octets, whatever the packets are.  What is
 * carried together with its padding is at most limit_bytes. */
struct layer_cost {
	uint64_t before_bytes;		/* preamble and SFD */
	uint64_t head_bytes;
	uint64_t trail_bytes;
	uint64_t align_bytes;		/* 1: none */
	uint64_t tail_bytes;		/* FCS, tag */
	uint64_t min_bytes;		/* of head + carried + tail */
	uint64_t gap_bytes;
	uint64_t num, den;
	uint64_t record_bytes;		/* 0: the layer counts a packet */
	uint64_t limit_bytes;		/* 0: none but the MTU's */
	uint64_t upstream_less_bytes;	/* of head, away from a subscriber */
};

struct layer {
	const char *name;		/* "ethernet"; NULL ends the table */
	const char *title;		/* "Ethernet II" */
	/* PACKET: IP; SEGMENT: a transport; PAYLOAD: above it; FRAME: with a
	 * header of its own below IP; LINE: below frames (cells, coding);
	 * TUNNEL: none of these. */
	enum layer_level level;
	/* Names; "": a medium with its own gap between frames, "bare": one
	 * without.  Several rows may have one name and differ by what lies
	 * below; no two of them lie on the same. */
	const char *const *below;
	uint64_t default_mtu_bytes;	/* what it lets through; 0: no say */
	uint64_t min_mtu_bytes;		/* an IP layer's least MTU, else 0 */
	unsigned ip_version;		/* 4, 6, or 0 */
	bool acknowledged;		/* bare headers come back */
	/* Option that declares limit_bytes, which must fit; NULL: where less
	 * room is left, that room counts. */
	const char *limit_option;
	struct layer_cost cost;		/* without options */
	/* Adds what the options cost; NULL where there are none.  -1: the
	 * options do not go together. */
	int (*adjust)(const struct layer_options *options,
	    struct layer_cost *cost, struct error *err);
	const struct field *fields;	/* options, offsets in layer_options */
	/* What a ladder calls the parts: head to tail, the same with options,
	 * before and gap, num/den. */
	const char *inside, *inside_with_options, *around, *coding;
	const char *formula;		/* for `plafond layers` */
	const char *source;		/* short: it stands in a column */
	enum accuracy accuracy;
	const char *memory;		/* what rests on memory; NULL: nothing.
					 * Such a row is never exact */
};

/* Every row, in the order of `plafond layers`; NULL ends it.  Rows of one name
 * follow each other. */
extern const struct layer *const layer_table[];
const struct layer *layer_find(const char *name);	/* the first */
/* The next row of the same name; NULL: that was the last. */
const struct layer *layer_next_variant(const struct layer *layer);
/* The row of that name that lies on `below`; NULL: none. */
const struct layer *layer_find_on(const char *name, const char *below);

/* Names of the layers that a trial of this protocol puts on top of IP, lowest
 * first, NULL at the end. */
const char *const *protocol_layers(enum protocol protocol);

#endif
