/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * The messages: one table of members each.  The codec that walks them is at
 * the end; rows, which are arrays, have their own file.
 */
#include "wire.h"

#include <assert.h>
#include <string.h>

#include "error.h"
#include "text.h"

#define U64(type, member, low, high, text)				\
	{ .name = #member, .kind = WIRE_U64,				\
	  .offset = offsetof(struct type, member), .min = (low),	\
	  .max = (high), .help = text }
#define U64_NULL(type, member, text)					\
	{ .name = #member, .kind = WIRE_U64, .nullable = true,		\
	  .offset = offsetof(struct type, member), .help = text }
#define U64_OPTIONAL(type, member, high, text)				\
	{ .name = #member, .kind = WIRE_U64, .optional = true,		\
	  .offset = offsetof(struct type, member), .max = (high),	\
	  .help = text }
#define BOOL(type, member, text)					\
	{ .name = #member, .kind = WIRE_BOOL,				\
	  .offset = offsetof(struct type, member), .help = text }
#define TEXT(type, member, text)					\
	{ .name = #member, .kind = WIRE_TEXT,				\
	  .offset = offsetof(struct type, member),			\
	  .size = sizeof(((struct type *)0)->member), .help = text }
#define NAME(type, member, table, text)					\
	{ .name = #member, .kind = WIRE_NAME,				\
	  .offset = offsetof(struct type, member), .names = (table),	\
	  .help = text }
#define OBJECT(type, member, table, text)				\
	{ .name = #member, .kind = WIRE_OBJECT,				\
	  .offset = offsetof(struct type, member), .members = (table),	\
	  .help = text }
#define TOKENS(type, text)						\
	{ .name = "tokens", .kind = WIRE_TOKENS,			\
	  .offset = offsetof(struct type, tokens),			\
	  .count_offset = offsetof(struct type, tokens_count),		\
	  .help = text }
#define END { .name = NULL }

/* Of what one agent saw: never "both". */
static const char *const single_direction_names[DIRECTIONS_SINGLE + 1] = {
	[DIRECTION_A_TO_B] = "a-to-b",
	[DIRECTION_B_TO_A] = "b-to-a",
};

static const struct wire_member hello_members[] = {
	U64(wire_hello, protocol, 1, 0, "version of this protocol"),
	TEXT(wire_hello, role, "controller or agent"),
	TEXT(wire_hello, software, "program and version"),
	TEXT(wire_hello, name, "an agent's name in its policy"),
	U64(wire_hello, beat_ns, 10000000, WIRE_LIMIT_MAX_NS,
	    "spacing of its beats"),
	TEXT(wire_hello, local, "controller: declared data address"),
	TEXT(wire_hello, interface, "controller: declared interface"),
	END
};
static const struct wire_member refused_members[] = {
	TEXT(wire_refused, reason, "fixed word"),
	TEXT(wire_refused, text, "a sentence for a person"),
	END
};
static const struct wire_member host_members[] = {
	TEXT(host_facts, hostname, ""),
	TEXT(host_facts, software, ""),
	TEXT(host_facts, kernel, ""),
	U64(host_facts, cpus, 1, 65536, ""),
	TEXT(host_facts, default_congestion_control, ""),
	U64_NULL(host_facts, receive_buffer_max_bytes, "net.core.rmem_max"),
	U64_NULL(host_facts, send_buffer_max_bytes, "net.core.wmem_max"),
	U64_NULL(host_facts, tcp_receive_max_bytes, "net.ipv4.tcp_rmem"),
	U64_NULL(host_facts, tcp_send_max_bytes, "net.ipv4.tcp_wmem"),
	U64_NULL(host_facts, tcp_timestamps, "net.ipv4.tcp_timestamps"),
	TEXT(host_facts, interface, "of the data address, or empty"),
	U64_NULL(host_facts, interface_mtu_bytes, ""),
	U64_NULL(host_facts, link_speed_bps, "of a physical link only"),
	END
};
static const struct wire_member capability_members[] = {
	OBJECT(wire_capability, host, host_members, "facts of the host"),
	TEXT(wire_capability, members, "of a trial, space apart"),
	TEXT(wire_capability, congestion_controls, "space apart"),
	U64(wire_capability, streams_max, 1, TRIAL_STREAMS_MAX, ""),
	U64(wire_capability, longest_trial_ns, 1, TRIAL_DURATION_MAX_NS, ""),
	U64(wire_capability, highest_rate_bps, 0, 0, "0: no limit"),
	U64(wire_capability, data_port, 1, 65535, ""),
	END
};
static const struct wire_member beat_members[] = {
	U64(wire_beat, number, 0, 0, ""),
	U64(wire_beat, t1_ns, 0, 0, "sender's session clock"),
	U64(wire_beat, largest_round_trip_ns, 0, 0, "seen so far"),
	END
};
static const struct wire_member beat_reply_members[] = {
	U64(wire_beat_reply, number, 0, 0, "of the beat"),
	U64(wire_beat_reply, t1_ns, 0, 0, "of the beat"),
	U64(wire_beat_reply, t2_ns, 0, 0, "arrival, agent's session clock"),
	U64(wire_beat_reply, t3_ns, 0, 0, "departure, the same clock"),
	U64(wire_beat_reply, utc_s, 0, 0, "civil time at t3"),
	U64(wire_beat_reply, utc_ns, 0, 999999999, ""),
	END
};
static const struct wire_member trial_members[] = {
	U64(trial, number, 1, 1000000, ""),
	NAME(trial, protocol, protocol_names, ""),
	NAME(trial, direction, direction_names, ""),
	NAME(trial, opens, end_names, "which end opens the connections"),
	U64(trial, streams, 1, TRIAL_STREAMS_MAX, "a direction"),
	U64(trial, settle_ns, 0, TRIAL_SETTLE_MAX_NS, "least settle time"),
	BOOL(trial, settle_extends, "until two 1 s means differ < 1 %"),
	U64(trial, duration_ns, 1, TRIAL_DURATION_MAX_NS, "counted"),
	U64(trial, row_ns, 10000000, 10000000000, "spacing of the rows"),
	TEXT(trial, congestion_control, ""),
	U64_OPTIONAL(trial, dscp, 63, ""),
	U64_OPTIONAL(trial, mss_bytes, 65535, "0: the kernel's"),
	U64_OPTIONAL(trial, send_buffer_bytes, 1 << 30, "0: autotuning"),
	U64_OPTIONAL(trial, receive_buffer_bytes, 1 << 30, "0: autotuning"),
	U64(trial, payload_period_bytes, 1 << 16, 1 << 26,
	    "payload does not repeat within"),
	U64_OPTIONAL(trial, rate_limit_bps, 0, "0: none"),
	END
};
static const struct wire_member prepare_members[] = {
	OBJECT(wire_prepare, trial, trial_members, ""),
	NAME(wire_prepare, end, end_names, "which end this agent is"),
	TEXT(wire_prepare, local, "address to bind data to, or empty"),
	TEXT(wire_prepare, interface, "to bind data to, or empty"),
	END
};
static const struct wire_member ready_members[] = {
	U64(wire_ready, data_port, 1, 65535, "where it accepts streams"),
	TEXT(wire_ready, local, "at which address, or empty"),
	TOKENS(wire_ready, "one a stream that it will receive"),
	END
};
static const struct wire_member start_members[] = {
	TEXT(wire_start, peer, "numeric address of the other agent"),
	U64(wire_start, peer_port, 1, 65535, ""),
	TOKENS(wire_start, "of the streams that it will send"),
	END
};
static const struct wire_member no_members[] = {
	END
};
static const struct wire_member progress_members[] = {
	NAME(wire_progress, direction, single_direction_names, ""),
	U64(wire_progress, elapsed_ns, 0, 0, "since the zero"),
	U64(wire_progress, bytes, 0, 0, "since the zero"),
	U64(wire_progress, rate_bps, 0, 0, "of the last second"),
	TEXT(wire_progress, phase, "waiting, settling, counting, closed"),
	END
};
static const struct wire_member rows_received_members[] = {
	{ .name = "number", .kind = WIRE_U64, .offset = 0,
	    .help = "of the last rows frame that is kept" },
	END
};
#define SAMPLE(member, tcp_offset, bytes)				\
	{ .name = #member, .kind = WIRE_U64, .nullable = true,		\
	  .offset = sizeof(uint64_t) * TCP_SAMPLE_##member,		\
	  .help = "TCP_INFO" },
static const struct wire_member sample_members[] = {
	TCP_SAMPLE_FIELDS(SAMPLE)
	END
};
static const struct wire_member measurement_members[] = {
	NAME(measurement, direction, single_direction_names, ""),
	BOOL(measurement, is_receiver, ""),
	NAME(measurement, end, measurement_end_names, "how it ended"),
	TEXT(measurement, why, "a stream was lost, for a person"),
	U64(measurement, zero_ns, 0, 0, "agent's session clock at zero"),
	U64(measurement, settle_ns, 0, 0, "as it came out"),
	U64(measurement, duration_ns, 0, 0, "counted"),
	BOOL(measurement, settled, "two 1 s means agreed"),
	U64(measurement, bytes, 0, 0, "in the window, or handed over"),
	U64(measurement, row_min_bps, 0, 0, "least row of the window"),
	U64(measurement, row_max_bps, 0, 0, "greatest row of the window"),
	U64(measurement, cpu_ns, 0, 0, "of its workers"),
	U64_NULL(measurement, steal_ns, "stolen from the machine"),
	U64(measurement, cpu_busiest_ratio_ppm, 0, 0, "busiest worker"),
	U64(measurement, rows, 0, 0, "interval rows handed over"),
	U64(measurement, stream_rows, 0, 0, "stream rows handed over"),
	U64(measurement, worker_rows, 0, 0, "worker rows handed over"),
	U64(measurement, streams, 1, TRIAL_STREAMS_MAX, ""),
	U64(measurement, elapsed_ns, 0, 0, "first to last row"),
	U64_NULL(measurement, interface_bytes, "kernel's counter"),
	TEXT(measurement, congestion_control, ""),
	OBJECT(measurement, last, sample_members, "stream 0 at the end"),
	TEXT(measurement, sha256, "of the rows as sent"),
	END
};
static const struct wire_member reference_members[] = {
	U64(wire_reference, duration_ns, 1000000, 10000000000, ""),
	END
};
static const struct wire_member reference_result_members[] = {
	U64(wire_reference_result, payload_bps, 0, 0, ""),
	U64(wire_reference_result, cpu_ns, 0, 0, ""),
	END
};
static const struct wire_member relay_members[] = {
	TEXT(wire_relay, name, "of the agent that called in"),
	END
};
static const struct wire_member abort_members[] = {
	TEXT(wire_abort, reason, "a sentence for a person"),
	END
};

static const struct message {
	const char *name;
	bool request;		/* unknown members are refused */
	const struct wire_member *members;
	size_t size;
} messages[WIRE_TYPES] = {
	[WIRE_HELLO] = { "hello", false, hello_members,
	    sizeof(struct wire_hello) },
	[WIRE_REFUSED] = { "refused", false, refused_members,
	    sizeof(struct wire_refused) },
	[WIRE_CAPABILITY] = { "capability", false, capability_members,
	    sizeof(struct wire_capability) },
	[WIRE_BEAT] = { "beat", true, beat_members,
	    sizeof(struct wire_beat) },
	[WIRE_BEAT_REPLY] = { "beat-reply", false, beat_reply_members,
	    sizeof(struct wire_beat_reply) },
	[WIRE_PREPARE] = { "prepare", true, prepare_members,
	    sizeof(struct wire_prepare) },
	[WIRE_READY] = { "ready", false, ready_members,
	    sizeof(struct wire_ready) },
	[WIRE_START] = { "start", true, start_members,
	    sizeof(struct wire_start) },
	[WIRE_STARTED] = { "started", false, no_members, 0 },
	[WIRE_PROGRESS] = { "progress", false, progress_members,
	    sizeof(struct wire_progress) },
	[WIRE_ROWS] = { "rows", false, NULL, sizeof(struct wire_rows) },
	[WIRE_ROWS_RECEIVED] = { "rows-received", true,
	    rows_received_members, sizeof(uint64_t) },
	[WIRE_MEASUREMENT] = { "measurement", false, measurement_members,
	    sizeof(struct measurement) },
	[WIRE_MEASUREMENT_RECEIVED] = { "measurement-received", true,
	    no_members, 0 },
	[WIRE_REFERENCE] = { "reference", true, reference_members,
	    sizeof(struct wire_reference) },
	[WIRE_REFERENCE_RESULT] = { "reference-result", false,
	    reference_result_members, sizeof(struct wire_reference_result) },
	[WIRE_RELAY] = { "relay", true, relay_members,
	    sizeof(struct wire_relay) },
	[WIRE_RELAYED] = { "relayed", false, no_members, 0 },
	[WIRE_ABORT] = { "abort", false, abort_members,
	    sizeof(struct wire_abort) },
};

const char *
wire_type_name(enum wire_type type)
{
	return messages[type].name;
}

const struct wire_member *
wire_members(enum wire_type type)
{
	return messages[type].members;
}

bool
wire_is_request(enum wire_type type)
{
	return messages[type].request;
}

size_t
wire_size(enum wire_type type)
{
	return messages[type].size;
}

uint64_t
wire_limit_ns(uint64_t stated_ns, uint64_t largest_round_trip_ns,
    uint64_t spacing_ns)
{
	uint64_t limit_ns = stated_ns;

	if (largest_round_trip_ns > WIRE_LIMIT_MAX_NS ||
	    spacing_ns > WIRE_LIMIT_MAX_NS)
		return WIRE_LIMIT_MAX_NS;
	if (3 * largest_round_trip_ns > limit_ns)
		limit_ns = 3 * largest_round_trip_ns;
	if (8 * spacing_ns > limit_ns)
		limit_ns = 8 * spacing_ns;
	return limit_ns < WIRE_LIMIT_MAX_NS ? limit_ns : WIRE_LIMIT_MAX_NS;
}

int
wire_type_of(const json_t *message, enum wire_type *out, struct error *err)
{
	const char *name = json_string_value(json_object_get(message, "type"));
	char quoted[TEXT_QUOTE_SIZE];

	if (name == NULL)
		return error_set(err, ERROR_PEER,
		    "a message without a member 'type'");
	for (int i = 0; i < WIRE_TYPES; i++)
		if (strcmp(messages[i].name, name) == 0) {
			*out = (enum wire_type)i;
			return 0;
		}
	return error_set(err, ERROR_PEER, "message type '%s' is unknown",
	    text_quote(name, quoted, sizeof(quoted)));
}

void
wire_trial_members(char *buf, size_t size)
{
	size_t used = 0;

	for (const struct wire_member *m = trial_members; m->name != NULL;
	    m++) {
		size_t length = strlen(m->name);

		assert(used + length + 2 <= size);
		if (used > 0)
			buf[used++] = ' ';
		memcpy(buf + used, m->name, length);
		used += length;
	}
	buf[used] = '\0';
}

static bool
word_in(const char *words, const char *word)
{
	size_t length = strlen(word);
	const char *at = words;

	while ((at = strstr(at, word)) != NULL) {
		bool starts = at == words || at[-1] == ' ';

		if (starts && (at[length] == ' ' || at[length] == '\0'))
			return true;
		at += length;
	}
	return false;
}

static bool
json_is_zero(const json_t *value)
{
	return json_is_false(value) ||
	    (json_is_integer(value) && json_integer_value(value) == 0);
}

json_t *
wire_encode_prepare(const struct wire_prepare *prepare,
    const char *known_members, struct error *err)
{
	json_t *message = wire_encode(WIRE_PREPARE, prepare);
	json_t *trial = json_object_get(message, "trial");

	for (const struct wire_member *m = trial_members; m->name != NULL;
	    m++) {
		if (word_in(known_members, m->name))
			continue;
		if (!json_is_zero(json_object_get(trial, m->name))) {
			(void)error_set(err, ERROR_REFUSED, "the agent does "
			    "not know '%s' of a trial: it is too old for "
			    "this plan", m->name);
			json_decref(message);
			return NULL;
		}
		(void)json_object_del(trial, m->name);
	}
	return message;
}
