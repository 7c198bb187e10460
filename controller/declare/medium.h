/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * medium: the table of media, one row each.
 *
 * A row says which fields a declaration gives, what rate the medium carries for
 * the layers above it and on what that rate is spent before, how exact that is
 * and where it is written.  Each family of media is a file of its own,
 * medium_*.c, that keeps its parameters to itself; nothing outside names a
 * medium.  Pure.
 */
#ifndef PLAFOND_MEDIUM_H
#define PLAFOND_MEDIUM_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "declare/accuracy.h"
#include "declare/fraction.h"
#include "declare/layer.h"
#include "field.h"
#include "trial.h"

struct error;

/* Largest rate that can be declared; 128 bits then never overflow. */
#define RATE_MAX_BPS UINT64_C(1600000000000)

/* What one direction of a medium is asked to carry: packets all alike. */
struct medium_load {
	enum direction direction;	/* single */
	/* Octets of one packet at each level, as the layers make them; LINE is
	 * what the lowest layer hands to the medium.  Levels that the stack
	 * does not have are 0. */
	struct fraction octets[LEVELS];
	/* Octets that the lowest layer hands over for one acknowledgement, 0
	 * where none are sent, and the segments that one acknowledges. */
	struct fraction ack_octets, segments_per_ack;
};

/* Part of the line that the layers do not get. */
struct medium_step {
	const char *what;		/* "section and line overhead" */
	const char *source;		/* short: it stands in a column */
	struct fraction left_bps;	/* what is left after it */
};
#define MEDIUM_STEPS_MAX 8
#define MEDIUM_NOTES_MAX 12
#define MEDIUM_NOTE_SIZE 128

enum duplex {
	DUPLEX_FULL,		/* a line for each direction */
	DUPLEX_SHARED		/* both directions share one */
};
const char *duplex_name(enum duplex duplex);	/* "full", "shared" */

/* All in bit/s of one direction.  Where the medium's arithmetic is not exact,
 * every rate is whole. */
struct medium_capacity {
	struct fraction line_bps;	/* all bits of the line */
	struct medium_step steps[MEDIUM_STEPS_MAX];	/* rates descend */
	size_t steps_count;
	/* Users that share the line evenly, this circuit included; 1: none. */
	uint64_t contention;
	enum duplex duplex;
	uint64_t tolerance_ppm;
	/* Shannon's limit in whole bit/s, 0: unknown.  Not below line_bps
	 * unless the declaration asks for more than the channel can carry. */
	uint64_t channel_bps;
	bool counts_acks;		/* a step already holds their share */
	/* Sentences for the reader: the line code, the steps of a modem. */
	char notes[MEDIUM_NOTES_MAX][MEDIUM_NOTE_SIZE];
	size_t notes_count;
};

/* Room for any family's own struct of parameters. */
#define MEDIUM_PARAMETERS_BYTES 2048
union medium_parameters {
	unsigned char bytes[MEDIUM_PARAMETERS_BYTES];
	uint64_t align_u64;
	double align_real;
};

struct medium {
	const char *name;	/* "ethernet" */
	const char *title;
	/* Offsets are those of the family's struct, at most
	 * MEDIUM_PARAMETERS_BYTES long; the first row is MEDIUM_KIND_ROW. */
	const struct field *fields;
	/* After the fields were read: what contradicts, what is missing.  May
	 * fill in what was left out.  NULL: nothing can go wrong.  -1: placed
	 * with node_error at a child of `node` (medium_place). */
	int (*check)(void *parameters, const struct node *node,
	    struct error *err);
	/* Fills *out, which is zeroed but for contention 1, the row's duplex
	 * and tolerance.  NULL: a reference, no ceiling.  -1 (ERROR_INPUT):
	 * the parameters make no rate for this load. */
	int (*capacity)(const void *parameters, const struct medium_load *load,
	    struct medium_capacity *out, struct error *err);
	const char *const *carries;	/* what the lowest layer may be */
	/* Of these, does this one go with the parameters?  NULL: each does. */
	bool (*suits)(const void *parameters, const char *layer_name);
	bool bare_frames;	/* Ethernet frames lie on it without preamble
				 * and gap */
	uint64_t default_mtu_bytes;	/* where no layer has a say; else 0 */
	uint64_t max_mtu_bytes;		/* 0: no limit of the medium */
	enum duplex duplex;	/* unless a field says otherwise */
	uint64_t tolerance_ppm;	/* of the medium's clock */
	/* Offset of the uint64_t of MEDIUM_SUBSCRIBER_ROW; 0: has none. */
	size_t subscriber_offset;
	enum accuracy accuracy;
	const char *accuracy_note;
	const char *memory;	/* what rests on memory; NULL: nothing.  Such a
				 * row is never exact */
	const char *formula;
	const char *source;
};

/* Every row, in the order of `plafond media`; NULL ends it. */
extern const struct medium *const media[];
const struct medium *medium_find(const char *name);

struct medium_use {
	const struct medium *medium;	/* borrowed from the table */
	union medium_parameters parameters;
};

/* CUSTOM reader of `medium: { kind: ethernet, line-rate: 1 Gbit/s }`, or of a
 * bare `medium: host`, into a struct medium_use at field->offset.  Absent
 * leaves it without a medium. */
int medium_read(const struct node *node, const struct field *field, void *base,
    struct error *err);
/* rows_of of such a field: those of the declared kind. */
int medium_rows_of(const struct node *node, const char **key,
    const struct field **rows, struct error *err);
/* May this layer be the lowest on the medium? */
bool medium_carries(const struct medium *medium, const char *layer_name);
/* The same with the parameters as declared. */
bool medium_use_carries(const struct medium_use *use, const char *layer_name);
bool medium_is_reference(const struct medium *medium);
/* Away from the subscriber; false where the medium has none. */
bool medium_upstream(const struct medium_use *use, enum direction direction);

/* For the families. */

/* The child of that name, or else the mapping itself, for node_error. */
const struct node *medium_place(const struct node *node, const char *key);
/* medium_read has looked at the kind before it knew the table. */
int medium_kind_read(const struct node *node, const struct field *field,
    void *base, struct error *err);
#define MEDIUM_KIND_ROW							\
	{ .name = "kind", .kind = FIELD_CUSTOM, .read = medium_kind_read, \
	  .help = "name of the medium" }
/* `subscriber: b`, for media with an up and a down; uint64_t member, not the
 * first of its struct. */
#define MEDIUM_SUBSCRIBER_ROW(type, member)				\
	{ .name = "subscriber", .kind = FIELD_CHOICE,			\
	  .offset = offsetof(type, member), .choices = medium_ends,	\
	  .default_text = "b", .help = "the end at the subscriber" }
extern const struct choice medium_ends[];	/* enum end */
/* True where the direction leads away from the subscriber. */
bool medium_is_upstream(uint64_t subscriber, enum direction direction);
/* `duplex: half`; uint64_t member, enum duplex. */
#define MEDIUM_DUPLEX_ROW(type, member, text)				\
	{ .name = "duplex", .kind = FIELD_CHOICE,			\
	  .offset = offsetof(type, member), .choices = medium_duplexes,	\
	  .default_text = "full", .help = text }
extern const struct choice medium_duplexes[];
/* `contention: 32`; uint64_t member. */
#define MEDIUM_CONTENTION_ROW(type, member)				\
	{ .name = "contention", .kind = FIELD_COUNT,			\
	  .offset = offsetof(type, member), .min = 1, .max = 100000,	\
	  .default_text = "1",						\
	  .help = "users who share it evenly, this circuit included" }

/* Adds a step to `left`; asserts that rates descend. */
void medium_add_step(struct medium_capacity *out, const char *what,
    struct fraction left_bps, const char *source);
/* Adds a note; what does not fit is cut. */
void medium_add_note(struct medium_capacity *out, const char *fmt, ...)
    __attribute__((format(printf, 2, 3)));
/* A computed rate as whole bit/s, rounded down; NAN and what is negative is 0,
 * what is too large RATE_MAX_BPS + 1. */
struct fraction medium_whole_bps(double bps);

#endif
