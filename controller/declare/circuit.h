/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * circuit: what an engineer declares about a circuit, from YAML.
 *
 * Owns nothing but itself: no pointers into the tree survive the reading.
 * The ceiling, the plan and the report borrow it and never change it.
 */
#ifndef PLAFOND_CIRCUIT_H
#define PLAFOND_CIRCUIT_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "declare/medium.h"
#include "declare/stack.h"
#include "field.h"
#include "identity.h"
#include "trial.h"

struct error;

#define CIRCUIT_NAME_SIZE 64
#define SEGMENTS_MAX 16
#define SERVICES_MAX 16
#define SHARED_MAX 16
#define CONTROL_DEFAULT_PORT 61741

/* How the controller gets at an end's agent. */
enum reach {
	REACH_DIAL,		/* control: "host:port" */
	REACH_CALLED,		/* control: called; the agent calls us */
	REACH_RELAYED,		/* control: relayed; it calls the other agent */
	REACH_EMBEDDED		/* agent: embedded; our child process */
};

struct end_declaration {
	char name[CIRCUIT_NAME_SIZE];
	enum reach reach;
	char control[256];	/* "host:port" for REACH_DIAL */
	char data[64];		/* numeric address for data, "" = control's */
	char interface[16];	/* to bind data to, or "" */
	struct trust identity;
};

struct service {
	char name[CIRCUIT_NAME_SIZE];
	uint64_t committed_bps[DIRECTIONS_SINGLE];	/* FIELD_UNSET */
	uint64_t excess_bps[DIRECTIONS_SINGLE];		/* FIELD_UNSET */
	uint64_t peak_bps[DIRECTIONS_SINGLE];		/* FIELD_UNSET */
	uint64_t counted_at;		/* enum layer_level, resolved */
	uint64_t burst_bytes[DIRECTIONS_SINGLE];	/* FIELD_UNSET */
	uint64_t dscp;			/* FIELD_UNSET */
	uint64_t priority;		/* 802.1Q PCP, FIELD_UNSET */
};

/* Requirements; NAN or FIELD_UNSET where not declared. */
struct criteria {
	double throughput_ratio[DIRECTIONS_SINGLE];
	double single_stream_ratio[DIRECTIONS_SINGLE];
	double loss_ratio[DIRECTIONS_SINGLE];
	uint64_t delay_ns[DIRECTIONS_SINGLE];
	uint64_t delay_variation_ns[DIRECTIONS_SINGLE];
};

/* A box on the way that forwards so many packets and no more. */
struct device {
	char name[CIRCUIT_NAME_SIZE];
	uint64_t packets_per_s;		/* each direction; FIELD_UNSET */
};

struct shared_circuit {
	char name[CIRCUIT_NAME_SIZE];
};

struct segment {
	char name[CIRCUIT_NAME_SIZE];	/* "" where it is the only one */
	struct medium_use medium;
	struct layer_stack layers;
	uint64_t mtu_bytes;		/* resolved, never unset */
	struct service service;		/* its own contract, or all unset */
	struct device device;
	struct shared_circuit shared_with[SHARED_MAX];	/* other circuits */
	size_t shared_with_count;
	uint64_t exclusive;		/* 1: carries no other; FIELD_UNSET */
};

/* What the circuit is used under: it explains a shortfall and never lowers a
 * ceiling.  FIELD_UNSET or NAN where not declared. */
struct conditions {
	uint64_t round_trip_ns;
	double loss_ratio[DIRECTIONS_SINGLE];		/* of packets */
	double bit_error_ratio[DIRECTIONS_SINGLE];
	/* The smaller of send buffer and receive window, each stream. */
	uint64_t window_bytes[DIRECTIONS_SINGLE];
	uint64_t host_bps[DIRECTIONS_SINGLE];	/* payload, any one direction */
	/* Of a test that begins cold, with a full bucket. */
	uint64_t test_length_ns;
	uint64_t transfer_bytes;
};

/* How trials are to be run; every value has a default. */
struct plan_declaration {
	uint64_t trials;		/* a direction */
	uint64_t duration_ns;
	uint64_t settle_ns;
	uint64_t settle_extends;	/* 0, 1; FIELD_UNSET: by the medium */
	uint64_t row_ns;
	uint64_t streams;		/* FIELD_UNSET: as the plan computes */
	uint64_t directions;		/* bit 0 a-to-b, 1 b-to-a, 2 both */
	uint64_t opens;			/* enum end */
	char congestion_control[TRIAL_CONGESTION_CONTROL_SIZE];
	uint64_t dscp;
	uint64_t mss_bytes;		/* 0: the kernel's */
	uint64_t send_buffer_bytes;	/* 0: autotuning */
	uint64_t receive_buffer_bytes;	/* 0: autotuning */
};

struct circuit {
	char name[CIRCUIT_NAME_SIZE];
	struct end_declaration ends[ENDS];
	bool ends_declared;		/* `plafond ceiling` needs none */
	struct segment segments[SEGMENTS_MAX];	/* from a to b; at least one */
	size_t segments_count;
	/* Of the whole circuit; the top-level `service` is the only one. */
	struct service services[SERVICES_MAX];
	size_t services_count;
	struct criteria criteria;
	struct conditions conditions;
	struct plan_declaration plan;
};

/* Read FILE with the --set overrides into an owned circuit (circuit_free).
 * -1: ERROR_ABSENT, ERROR_READ, ERROR_INPUT with file:line:column. */
int circuit_read_file(const char *path, const char *const overrides[],
    size_t overrides_count, struct circuit **out, struct error *err);
int circuit_read_text(const char *text, size_t size, const char *origin,
    const char *const overrides[], size_t overrides_count,
    struct circuit **out, struct error *err);
/* The same of a tree, which is borrowed. */
int circuit_read_tree(const struct node *root, struct circuit **out,
    struct error *err);
void circuit_free(struct circuit *circuit);	/* NULL is fine */

/* True where the only medium is a reference (host). */
bool circuit_is_reference(const struct circuit *circuit);
/* Smallest MTU over the segments. */
uint64_t circuit_mtu(const struct circuit *circuit);
/* True where the service states a rate in this direction. */
bool service_has_rate(const struct service *service, enum direction direction);
/* The committed rate with the excess rate, or the peak rate where only that is
 * declared. */
uint64_t service_rate(const struct service *service, enum direction direction);

/* For help and tests; the offsets are those of a private struct. */
extern const struct field circuit_fields[];

#endif
