/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * trial: one timed transfer, as planned and as both programs understand it.
 *
 * A trial has a settle time that is not counted and a duration that is
 * (RFC 2544's word, section 24).  Values that cross the wire are names, never
 * numbers.  Pure data.
 */
#ifndef PLAFOND_TRIAL_H
#define PLAFOND_TRIAL_H

#include <stdbool.h>
#include <stdint.h>

enum end { END_A, END_B, ENDS };

enum direction {
	DIRECTION_A_TO_B,
	DIRECTION_B_TO_A,
	DIRECTION_BOTH,		/* of a trial only; ceilings have one */
	DIRECTIONS
};
#define DIRECTIONS_SINGLE 2	/* arrays indexed by a single direction */

enum protocol { PROTOCOL_TCP, PROTOCOL_UDP, PROTOCOL_TCP_TLS, PROTOCOLS };

/* The names on the wire, in files and in reports; NULL ends each table. */
extern const char *const direction_names[DIRECTIONS + 1];
extern const char *const end_names[ENDS + 1];
extern const char *const protocol_names[PROTOCOLS + 1];
/* "a-to-b", "b-to-a", "both"; "a", "b"; "tcp", "udp", "tcp+tls". */
const char *direction_name(enum direction direction);
const char *end_name(enum end end);
const char *protocol_name(enum protocol protocol);
/* -1: no such name */
int direction_from_name(const char *name, enum direction *out);
int end_from_name(const char *name, enum end *out);

/* Who sends and who receives in one single direction. */
enum end direction_sender(enum direction direction);
enum end direction_receiver(enum direction direction);
/* True where `direction` (possibly both) holds the single direction. */
bool direction_has(enum direction direction, enum direction single);

#define TRIAL_STREAMS_MAX 256
#define TRIAL_CONGESTION_CONTROL_SIZE 16	/* TCP_CA_NAME_MAX */
#define TRIAL_SETTLE_MAX_NS UINT64_C(10000000000)
#define TRIAL_DURATION_MAX_NS UINT64_C(86400000000000)	/* 24 h */
#define TRIAL_TOKEN_BYTES 16

struct trial {
	uint64_t number;		/* from 1 within a task */
	enum protocol protocol;
	enum direction direction;
	enum end opens;			/* which end opens the connections */
	uint64_t streams;		/* a direction, 1..TRIAL_STREAMS_MAX */
	uint64_t settle_ns;		/* least settle time */
	bool settle_extends;		/* until two 1 s means differ < 1 % */
	uint64_t duration_ns;		/* counted; a multiple of row_ns */
	uint64_t row_ns;		/* spacing of the rows, >= 10 ms */
	char congestion_control[TRIAL_CONGESTION_CONTROL_SIZE];
	uint64_t dscp;			/* 0..63 */
	uint64_t mss_bytes;		/* 0: the kernel's */
	uint64_t send_buffer_bytes;	/* 0: the kernel's autotuning */
	uint64_t receive_buffer_bytes;	/* 0: the kernel's autotuning */
	uint64_t payload_period_bytes;	/* payload does not repeat within */
	uint64_t rate_limit_bps;	/* 0: none; the sender's policy */
};

#endif
