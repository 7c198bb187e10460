/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/layer.h"

#include <assert.h>
#include <string.h>

#include "error.h"

static const char *const level_names[LEVELS] = {
	[LEVEL_LINE] = "line",
	[LEVEL_FRAME] = "frame",
	[LEVEL_FRAME_WITHOUT_FCS] = "frame-without-fcs",
	[LEVEL_PACKET] = "packet",
	[LEVEL_SEGMENT] = "segment",
	[LEVEL_PAYLOAD] = "payload",
};
static const char tunnel_name[] = "tunnel";

const struct choice level_choices[] = {
	{ "line", LEVEL_LINE },
	{ "frame", LEVEL_FRAME },
	{ "frame-without-fcs", LEVEL_FRAME_WITHOUT_FCS },
	{ "packet", LEVEL_PACKET },
	{ "segment", LEVEL_SEGMENT },
	{ "payload", LEVEL_PAYLOAD },
	{ NULL, 0 },
};

/* RFC 791 section 3.1 and RFC 9293 section 3.1: the header's length is counted
 * in words of 4 octets and leaves 40 octets for options. */
#define HEADER_OPTIONS_MAX_BYTES 40
#define HEADER_WORD_BYTES 4

/* RFC 7323 appendix A: 10 octets, sent as 12 with two NOPs. */
#define TCP_TIMESTAMPS_BYTES 12

enum tls_version { TLS_VERSION_12, TLS_VERSION_13, TLS_VERSIONS };
enum tls_cipher { TLS_AES_GCM, TLS_CHACHA20_POLY1305, TLS_CIPHERS };

/* What a record adds besides its 5 octets of header and 16 of tag. */
struct tls_record_cost {
	uint64_t nonce_bytes;	/* explicit, before the ciphertext */
	uint64_t type_bytes;	/* inner content type, after the content */
};
static const struct tls_record_cost tls_costs[TLS_VERSIONS][TLS_CIPHERS] = {
	/* RFC 5246 section 6.2.3.3 with RFC 5288; RFC 7905 section 2 */
	[TLS_VERSION_12] = {
		[TLS_AES_GCM] = { .nonce_bytes = 8 },
		[TLS_CHACHA20_POLY1305] = { .nonce_bytes = 0 },
	},
	/* RFC 8446 section 5.2 */
	[TLS_VERSION_13] = {
		[TLS_AES_GCM] = { .type_bytes = 1 },
		[TLS_CHACHA20_POLY1305] = { .type_bytes = 1 },
	},
};

static const struct choice tls_version_choices[] = {
	{ "1.2", TLS_VERSION_12 },
	{ "1.3", TLS_VERSION_13 },
	{ NULL, 0 },
};
static const struct choice tls_cipher_choices[] = {
	{ "aes-gcm", TLS_AES_GCM },
	{ "chacha20-poly1305", TLS_CHACHA20_POLY1305 },
	{ NULL, 0 },
};

static const struct field ipv4_fields[] = {
	{ .name = "options-bytes", .kind = FIELD_QUANTITY,
	  .dimension = DIMENSION_SIZE,
	  .offset = offsetof(struct layer_options, options_bytes),
	  .max = HEADER_OPTIONS_MAX_BYTES, .default_text = "0 B",
	  .help = "header options, a multiple of 4 B (RFC 791)" },
	{ .name = NULL },
};
static const struct field tcp_fields[] = {
	{ .name = "timestamps", .kind = FIELD_YES_NO,
	  .offset = offsetof(struct layer_options, timestamps),
	  .default_text = "yes",
	  .help = "12 B in every segment (RFC 7323)" },
	{ .name = "options-bytes", .kind = FIELD_QUANTITY,
	  .dimension = DIMENSION_SIZE,
	  .offset = offsetof(struct layer_options, options_bytes),
	  .max = HEADER_OPTIONS_MAX_BYTES, .default_text = "0 B",
	  .help = "further options in every segment, a multiple of 4 B" },
	{ .name = "segments-per-acknowledgement", .kind = FIELD_COUNT,
	  .offset = offsetof(struct layer_options, segments_per_ack),
	  .min = 1, .max = 1000, .default_text = "2",
	  .help = "segments that one acknowledgement answers (RFC 9293 "
		  "section 3.8.6.3); more with receive offload" },
	{ .name = NULL },
};
static const struct field tls_fields[] = {
	{ .name = "version", .kind = FIELD_CHOICE,
	  .offset = offsetof(struct layer_options, version),
	  .choices = tls_version_choices, .default_text = "1.3",
	  .help = "1.2 or 1.3 (RFC 5246, RFC 8446)" },
	{ .name = "cipher", .kind = FIELD_CHOICE,
	  .offset = offsetof(struct layer_options, cipher),
	  .choices = tls_cipher_choices, .default_text = "aes-gcm",
	  .help = "in 1.2 aes-gcm adds 8 B; in 1.3 both cost the same" },
	{ .name = "record-bytes", .kind = FIELD_QUANTITY,
	  .dimension = DIMENSION_SIZE,
	  .offset = offsetof(struct layer_options, record_bytes),
	  .min = 1, .max = 16384, .default_text = "16384 B",
	  .help = "plaintext in one record (RFC 8446 section 5.1)" },
	{ .name = NULL },
};

static int
adjust_header_options(uint64_t options_bytes, struct layer_cost *cost,
    struct error *err)
{
	if (options_bytes % HEADER_WORD_BYTES != 0)
		return error_set(err, ERROR_INPUT, "options of %llu B, "
		    "allowed: a multiple of 4 B",
		    (unsigned long long)options_bytes);
	if (options_bytes > HEADER_OPTIONS_MAX_BYTES)
		return error_set(err, ERROR_INPUT, "options of %llu B "
		    "(timestamps included), allowed: at most 40 B",
		    (unsigned long long)options_bytes);
	cost->head_bytes += options_bytes;
	return 0;
}

static int
adjust_ipv4(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	return adjust_header_options(options->options_bytes, cost, err);
}

static int
adjust_tcp(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	uint64_t timestamps_bytes = 0;

	if (options->timestamps != 0)
		timestamps_bytes = TCP_TIMESTAMPS_BYTES;
	return adjust_header_options(options->options_bytes + timestamps_bytes,
	    cost, err);
}

static int
adjust_tls(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	const struct tls_record_cost *record;

	(void)err;
	record = &tls_costs[options->version][options->cipher];
	cost->head_bytes += record->nonce_bytes;
	cost->trail_bytes += record->type_bytes;
	cost->record_bytes = options->record_bytes;
	return 0;
}

#define NAMES(...) (const char *const[]){ __VA_ARGS__, NULL }

const struct layer layer_table[] = {
	{
		.name = "ethernet",
		.title = "Ethernet II frame on its line",
		.level = LEVEL_FRAME,
		.below = NAMES(""),
		.default_mtu_bytes = 1500,
		/* before: preamble 7 and SFD 1; head: two addresses of 6 and a
		 * type of 2; tail: FCS; gap: 96 bit times. */
		.cost = { .before_bytes = 8, .head_bytes = 14, .align_bytes = 1,
		    .tail_bytes = 4, .min_bytes = 64, .gap_bytes = 12,
		    .num = 1, .den = 1 },
		.inside = "header and FCS",
		.around = "preamble, SFD, gap",
		.formula = "frame = max(64, 14 + carried + 4); "
		    "line = frame + 8 + 12",
		.source = "IEEE 802.3",
	},
	{
		.name = "vlan",
		.title = "802.1Q or 802.1ad tag",
		.level = LEVEL_FRAME,
		.below = NAMES("ethernet", "vlan"),
		.cost = { .head_bytes = 4, .align_bytes = 1, .num = 1,
		    .den = 1 },
		.inside = "tag",
		.formula = "carried + 4; the least frame stays 64",
		.source = "IEEE 802.1Q",
	},
	{
		.name = "ipv4",
		.title = "Internet Protocol version 4",
		.level = LEVEL_PACKET,
		.below = NAMES("", "ethernet", "vlan"),
		.min_mtu_bytes = 68,
		.ip_version = 4,
		.cost = { .head_bytes = 20, .align_bytes = 1, .num = 1,
		    .den = 1 },
		.adjust = adjust_ipv4,
		.fields = ipv4_fields,
		.inside = "header",
		.inside_with_options = "header and options",
		.formula = "carried + 20 + options-bytes",
		.source = "RFC 791",
	},
	{
		.name = "ipv6",
		.title = "Internet Protocol version 6",
		.level = LEVEL_PACKET,
		.below = NAMES("", "ethernet", "vlan"),
		.min_mtu_bytes = 1280,
		.ip_version = 6,
		.cost = { .head_bytes = 40, .align_bytes = 1, .num = 1,
		    .den = 1 },
		.inside = "header",
		.formula = "carried + 40",
		.source = "RFC 8200",
	},
	{
		.name = "tcp",
		.title = "Transmission Control Protocol",
		.level = LEVEL_SEGMENT,
		.acknowledged = true,
		.below = NAMES("ipv4", "ipv6"),
		.cost = { .head_bytes = 20, .align_bytes = 1, .num = 1,
		    .den = 1 },
		.adjust = adjust_tcp,
		.fields = tcp_fields,
		.inside = "header",
		.inside_with_options = "header and options",
		.formula = "carried + 20 + 12 with timestamps + options-bytes",
		.source = "RFC 9293, 7323",
	},
	{
		.name = "udp",
		.title = "User Datagram Protocol",
		.level = LEVEL_SEGMENT,
		.below = NAMES("ipv4", "ipv6"),
		.cost = { .head_bytes = 8, .align_bytes = 1, .num = 1,
		    .den = 1 },
		.inside = "header",
		.formula = "carried + 8",
		.source = "RFC 768",
	},
	{
		.name = "tls",
		.title = "Transport Layer Security, AEAD records",
		.level = LEVEL_PAYLOAD,
		.below = NAMES("tcp"),
		/* head: record header; tail: tag of 16 octets, RFC 5116
		 * section 5.1 */
		.cost = { .head_bytes = 5, .align_bytes = 1, .tail_bytes = 16,
		    .num = 1, .den = 1 },
		.adjust = adjust_tls,
		.fields = tls_fields,
		.inside = "record headers and tags",
		.formula = "carried * (record-bytes + X) / record-bytes; X = "
		    "22 (1.3), 29 (1.2 aes-gcm), 21 (1.2 chacha20-poly1305)",
		.source = "RFC 8446, 5246",
	},
	{ .name = NULL },
};

/* What a trial puts on top of IP. */
static const char *const layers_of_protocol[PROTOCOLS][3] = {
	[PROTOCOL_TCP] = { "tcp" },
	[PROTOCOL_UDP] = { "udp" },
	[PROTOCOL_TCP_TLS] = { "tcp", "tls" },
};

const char *
level_name(enum layer_level level)
{
	assert(level <= LEVEL_TUNNEL);
	return level == LEVEL_TUNNEL ? tunnel_name : level_names[level];
}

const struct layer *
layer_find(const char *name)
{
	const struct layer *layer;

	for (layer = layer_table; layer->name != NULL; layer++)
		if (strcmp(layer->name, name) == 0)
			return layer;
	return NULL;
}

static bool
lies_on(const struct layer *layer, const char *below)
{
	const char *const *name;

	for (name = layer->below; *name != NULL; name++)
		if (strcmp(*name, below) == 0)
			return true;
	return false;
}

const struct layer *
layer_find_on(const char *name, const char *below)
{
	const struct layer *layer;

	for (layer = layer_table; layer->name != NULL; layer++)
		if (strcmp(layer->name, name) == 0 && lies_on(layer, below))
			return layer;
	return NULL;
}

const char *const *
protocol_layers(enum protocol protocol)
{
	assert(protocol < PROTOCOLS);
	return layers_of_protocol[protocol];
}
