/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * wire: the messages of the control protocol as structs and tables of members.
 *
 * Encoder, decoder, limits and DEVELOPERS.md come from the same rows.  A
 * request with an unknown member is refused; in a report it is ignored.
 * Everything here distrusts its input.  Pure.
 *
 *   controller                         agent
 *   hello              ------------->  (each side sends its hello first)
 *                      <-------------  hello, capability | refused
 *   beat               ------------->  (all the time; silence stops the load)
 *                      <-------------  beat-reply (RFC 5905 exchange)
 *   prepare            ------------->
 *                      <-------------  ready (tokens of what it will receive)
 *   start              ------------->  (listening end first)
 *                      <-------------  started
 *                      <-------------  progress, rows ...
 *   rows-received      ------------->
 *                      <-------------  measurement (one a direction)
 *   measurement-received ----------->
 *   abort              <------------>  (either side, any time)
 */
#ifndef PLAFOND_WIRE_H
#define PLAFOND_WIRE_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include <jansson.h>

#include "measurement.h"
#include "trial.h"

struct error;

#define WIRE_PROTOCOL_VERSION 1
#define WIRE_INTEGER_MAX ((UINT64_C(1) << 53) - 1)	/* I-JSON, RFC 7493 */
#define WIRE_TEXT_SIZE 256
#define WIRE_MEMBERS_SIZE 1024		/* the longest text of all */
#define WIRE_TOKEN_SIZE (2 * TRIAL_TOKEN_BYTES + 1)	/* hex and NUL */
#define WIRE_ROWS_MAX 512		/* in one rows frame */
#define WIRE_ROWS_UNACKNOWLEDGED_MAX 256	/* frames an agent spools */

/* Spacing of beats while a session is commanded, and on an idle call. */
#define WIRE_BEAT_NS UINT64_C(250000000)
#define WIRE_BEAT_IDLE_NS UINT64_C(1000000000)
#define WIRE_LIMIT_MAX_NS UINT64_C(10000000000)

/* max(stated, 3 x largest round trip, 8 x feedback spacing), at most 10 s. */
uint64_t wire_limit_ns(uint64_t stated_ns, uint64_t largest_round_trip_ns,
    uint64_t spacing_ns);

#define WIRE_MESSAGES(X)					\
	X(HELLO, "hello") X(REFUSED, "refused")			\
	X(CAPABILITY, "capability")				\
	X(BEAT, "beat") X(BEAT_REPLY, "beat-reply")		\
	X(PREPARE, "prepare") X(READY, "ready")			\
	X(START, "start") X(STARTED, "started")			\
	X(PROGRESS, "progress") X(ROWS, "rows")			\
	X(ROWS_RECEIVED, "rows-received")			\
	X(MEASUREMENT, "measurement")				\
	X(MEASUREMENT_RECEIVED, "measurement-received")		\
	X(REFERENCE, "reference")				\
	X(REFERENCE_RESULT, "reference-result")			\
	X(RELAY, "relay") X(RELAYED, "relayed")			\
	X(ABORT, "abort")
#define WIRE_ENUM(id, name) WIRE_##id,
enum wire_type { WIRE_MESSAGES(WIRE_ENUM) WIRE_TYPES };
#undef WIRE_ENUM
const char *wire_type_name(enum wire_type type);

/* Facts about an agent's host; UNKNOWN_U64 or "" where nobody knows. */
struct host_facts {
	char hostname[WIRE_TEXT_SIZE];
	char software[64];		/* "plafond-agent 0.1.0" */
	char kernel[64];		/* "Linux 6.1.0 x86_64" */
	uint64_t cpus;
	char default_congestion_control[TRIAL_CONGESTION_CONTROL_SIZE];
	uint64_t receive_buffer_max_bytes;	/* net.core.rmem_max */
	uint64_t send_buffer_max_bytes;		/* net.core.wmem_max */
	uint64_t tcp_receive_max_bytes;		/* third of tcp_rmem */
	uint64_t tcp_send_max_bytes;		/* third of tcp_wmem */
	uint64_t tcp_timestamps;		/* sysctl, 0..2 */
	char interface[16];		/* that carries the data address */
	uint64_t interface_mtu_bytes;
	uint64_t link_speed_bps;	/* of a physical link only */
};

struct wire_hello {
	uint64_t protocol;		/* WIRE_PROTOCOL_VERSION */
	char role[16];			/* "controller", "agent" */
	char software[64];
	char name[64];			/* of an agent: its policy's name */
	uint64_t beat_ns;		/* spacing its beats will have */
	char local[64];		/* controller: the agent's declared data */
	char interface[16];		/* address and interface, or "" */
};
struct wire_refused {
	char reason[32];	/* fixed word: "identity", "busy", ... */
	char text[WIRE_TEXT_SIZE];
};
struct wire_capability {
	struct host_facts host;
	/* names that a prepare may hold, space apart */
	char members[WIRE_MEMBERS_SIZE];
	char congestion_controls[256];	/* space apart */
	uint64_t streams_max;
	uint64_t longest_trial_ns;
	uint64_t highest_rate_bps;	/* 0: no limit */
	uint64_t data_port;
};
struct wire_beat {
	uint64_t number;
	uint64_t t1_ns;			/* commander's session clock */
	uint64_t largest_round_trip_ns;
};
struct wire_beat_reply {
	uint64_t number, t1_ns, t2_ns, t3_ns;	/* t2, t3: agent's clock */
	uint64_t utc_s, utc_ns;		/* agent's civil time at t3 */
};
struct wire_prepare {
	struct trial trial;
	enum end end;			/* which end the addressed agent is */
	char local[64];			/* address to bind data to, or "" */
	char interface[16];		/* to bind data to, or "" */
};
struct wire_ready {
	uint64_t data_port;		/* where this agent accepts streams */
	char local[64];			/* address it accepts them at, or "" */
	size_t tokens_count;		/* 0 where it receives nothing */
	char tokens[TRIAL_STREAMS_MAX][WIRE_TOKEN_SIZE];
};
struct wire_start {
	char peer[64];			/* numeric address of the other agent */
	uint64_t peer_port;
	size_t tokens_count;		/* of the direction it sends, else 0 */
	char tokens[TRIAL_STREAMS_MAX][WIRE_TOKEN_SIZE];
};
struct wire_progress {
	enum direction direction;
	uint64_t elapsed_ns, bytes;	/* since zero */
	uint64_t rate_bps;		/* of the last second */
	char phase[16];			/* transfer_phase_name */
};
/* Rows are arrays in the order of the table's columns; the schema goes in the
 * frame of each table's first rows. */
enum wire_table { WIRE_TABLE_INTERVAL, WIRE_TABLE_STREAM, WIRE_TABLE_WORKER,
	WIRE_TABLES };
struct wire_reference {
	uint64_t duration_ns;
};
struct wire_reference_result {
	uint64_t payload_bps, cpu_ns;
};
struct wire_relay {
	char name[64];			/* of the agent that called in */
};
struct wire_abort {
	char reason[WIRE_TEXT_SIZE];
};

/* The message's type; -1 (ERROR_PEER): none or unknown. */
int wire_type_of(const json_t *message, enum wire_type *out,
    struct error *err);

/* A row of a message's table. */
enum wire_kind { WIRE_U64, WIRE_BOOL, WIRE_TEXT, WIRE_NAME, WIRE_TOKENS,
	WIRE_OBJECT };
struct wire_member {
	const char *name;		/* NULL ends the table */
	enum wire_kind kind;
	size_t offset, size;
	uint64_t min, max;		/* U64; max 0: WIRE_INTEGER_MAX */
	bool nullable;			/* UNKNOWN_U64 travels as null */
	bool optional;			/* absent: 0 */
	const char *const *names;	/* NAME: value is an enum (int) */
	const struct wire_member *members;	/* OBJECT */
	size_t count_offset;		/* TOKENS: size_t */
	const char *help;
};
/* Table of the plain messages; NULL for rows. */
const struct wire_member *wire_members(enum wire_type type);
bool wire_is_request(enum wire_type type);	/* unknown members refused */
size_t wire_size(enum wire_type type);		/* of its struct */

/* Owned object; body is the message's struct, NULL for one without members.
 * Only our own bugs make it NULL. */
json_t *wire_encode(enum wire_type type, const void *body);
/* -1 (ERROR_PEER): member missing, unknown, of another type or out of range;
 * the cause names it.  Outputs are written on success only. */
int wire_decode(enum wire_type type, const json_t *message, void *body,
    struct error *err);

/* As wire_encode(WIRE_PREPARE), leaving out members of the trial that the
 * peer's capability does not name; a value other than 0 in one of them is
 * ERROR_REFUSED: the agent is too old for this trial. */
json_t *wire_encode_prepare(const struct wire_prepare *prepare,
    const char *known_members, struct error *err);
/* The names that a prepare may hold in its trial, space apart. */
void wire_trial_members(char *buf, size_t size);

/* rows: { type, number, table, direction, columns?, rows: [[...], ...] } */
json_t *wire_encode_interval_rows(uint64_t number, enum direction direction,
    bool with_columns, const struct interval_row rows[], size_t count);
json_t *wire_encode_stream_rows(uint64_t number, enum direction direction,
    bool with_columns, const struct stream_row rows[], size_t count);
json_t *wire_encode_worker_rows(uint64_t number, enum direction direction,
    bool with_columns, const struct worker_row rows[], size_t count);
struct wire_rows {
	uint64_t number;
	enum wire_table table;
	enum direction direction;
	size_t count;
	struct interval_row interval[WIRE_ROWS_MAX];
	struct stream_row stream[WIRE_ROWS_MAX];
	struct worker_row worker[WIRE_ROWS_MAX];
};
/* -1 (ERROR_PEER): columns, a row or a value that is none; `out`, which is
 * large, is undefined then. */
int wire_decode_rows(const json_t *message, struct wire_rows *out,
    struct error *err);
/* Compact JSON text of the `rows` member of a rows frame.  Owned (free). */
char *wire_rows_text(const json_t *message);

/* The digest of a series: SHA-256 over wire_rows_text and a newline of each
 * rows frame in order. */
struct wire_rows_digest;
/* Owned; NULL: no memory. */
struct wire_rows_digest *wire_rows_digest_new(void);
void wire_rows_digest_free(struct wire_rows_digest *digest);	/* NULL: fine */
void wire_rows_digest_add(struct wire_rows_digest *digest,
    const json_t *message);
/* In hexadecimal digits; nothing can be added after it. */
void wire_rows_digest_end(struct wire_rows_digest *digest,
    char out[SHA256_HEX_SIZE]);

#endif
