/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Layers: the Internet protocols and their transports. */
#include <inttypes.h>

#include "declare/layer_rows.h"
#include "error.h"

/* RFC 791 section 3.1 and RFC 9293 section 3.1: the header's length is counted
 * in words of 4 octets and leaves 40 octets for options. */
#define HEADER_OPTIONS_MAX_BYTES 40
#define HEADER_WORD_BYTES 4
/* RFC 8200 section 4: extension headers are multiples of 8 octets. */
#define EXTENSION_WORD_BYTES 8
#define EXTENSIONS_MAX_BYTES 1024

#define IPV4_MIN_MTU_BYTES 68		/* RFC 791 section 3.2 */
#define IPV6_MIN_MTU_BYTES 1280		/* RFC 8200 section 5 */
#define PACKET_MAX_BYTES 65535

/* RFC 7323 appendix A: 10 octets, sent as 12 with two NOPs. */
#define TCP_TIMESTAMPS_BYTES 12

#define TUNNEL_MTU_HELP "largest packet inside a tunnel; without it, what " \
	"fits.  Not of the lowest IP layer, whose mtu is the circuit's"

static const struct field ipv4_fields[] = {
	LAYER_BYTES("options-bytes", options_bytes, 0,
	    HEADER_OPTIONS_MAX_BYTES, "0 B",
	    "header options, a multiple of 4 B (RFC 791)"),
	LAYER_BYTES("mtu", mtu_bytes, IPV4_MIN_MTU_BYTES, PACKET_MAX_BYTES,
	    NULL, TUNNEL_MTU_HELP),
	{ .name = NULL },
};
static const struct field ipv6_fields[] = {
	LAYER_BYTES("extension-bytes", options_bytes, 0, EXTENSIONS_MAX_BYTES,
	    "0 B", "extension headers, a multiple of 8 B (RFC 8200); the "
	    "encapsulation limit of a tunnel is 8 B (RFC 2473)"),
	LAYER_BYTES("mtu", mtu_bytes, IPV6_MIN_MTU_BYTES, PACKET_MAX_BYTES,
	    NULL, TUNNEL_MTU_HELP),
	{ .name = NULL },
};
static const struct field udp_fields[] = {
	LAYER_BYTES("datagram-bytes", datagram_bytes, 1, PACKET_MAX_BYTES,
	    NULL, "what one datagram carries; without it, what fits.  Never "
	    "more: fragments are not modelled"),
	{ .name = NULL },
};
static const struct field tcp_fields[] = {
	LAYER_YES_NO("timestamps", timestamps, "yes",
	    "12 B in every segment (RFC 7323)"),
	LAYER_BYTES("options-bytes", options_bytes, 0,
	    HEADER_OPTIONS_MAX_BYTES, "0 B",
	    "further options in every segment, a multiple of 4 B"),
	LAYER_BYTES("mss", mss_bytes, 1, PACKET_MAX_BYTES, NULL,
	    "maximum segment size where it is clamped; options are taken out "
	    "of it (RFC 9293 section 3.7.1)"),
	LAYER_COUNT("segments-per-acknowledgement", segments_per_ack, 1, 1000,
	    "2", "segments that one acknowledgement answers (RFC 9293 "
	    "section 3.8.6.3); more with receive offload"),
	{ .name = NULL },
};

static int
add_options(uint64_t options_bytes, uint64_t word_bytes, uint64_t max_bytes,
    struct layer_cost *cost, struct error *err)
{
	if (options_bytes % word_bytes != 0)
		return error_set(err, ERROR_INPUT, "options of %" PRIu64 " B, "
		    "allowed: a multiple of %" PRIu64 " B", options_bytes,
		    word_bytes);
	if (options_bytes > max_bytes)
		return error_set(err, ERROR_INPUT, "options of %" PRIu64 " B "
		    "(timestamps included), allowed: at most %" PRIu64 " B",
		    options_bytes, max_bytes);
	cost->head_bytes += options_bytes;
	return 0;
}

/* An MTU that the header alone fills leaves nothing to limit. */
static int
add_mtu(uint64_t mtu_bytes, struct layer_cost *cost, struct error *err)
{
	if (mtu_bytes == FIELD_UNSET)
		return 0;
	if (mtu_bytes <= cost->head_bytes)
		return error_set(err, ERROR_INPUT, "mtu: found %" PRIu64
		    " B, allowed: more than the %" PRIu64 " B of header",
		    mtu_bytes, cost->head_bytes);
	cost->limit_bytes = mtu_bytes - cost->head_bytes;
	return 0;
}

static int
adjust_ipv4(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	if (add_options(options->options_bytes, HEADER_WORD_BYTES,
	    HEADER_OPTIONS_MAX_BYTES, cost, err) == -1)
		return -1;
	return add_mtu(options->mtu_bytes, cost, err);
}

static int
adjust_ipv6(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	if (add_options(options->options_bytes, EXTENSION_WORD_BYTES,
	    EXTENSIONS_MAX_BYTES, cost, err) == -1)
		return -1;
	return add_mtu(options->mtu_bytes, cost, err);
}

static int
adjust_udp(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	(void)err;
	if (options->datagram_bytes != FIELD_UNSET)
		cost->limit_bytes = options->datagram_bytes;
	return 0;
}

static int
adjust_tcp(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	uint64_t options_bytes = options->options_bytes;

	if (options->timestamps != 0)
		options_bytes += TCP_TIMESTAMPS_BYTES;
	if (add_options(options_bytes, HEADER_WORD_BYTES,
	    HEADER_OPTIONS_MAX_BYTES, cost, err) == -1)
		return -1;
	if (options->mss_bytes == FIELD_UNSET)
		return 0;
	if (options->mss_bytes <= options_bytes)
		return error_set(err, ERROR_INPUT, "mss: found %" PRIu64
		    " B, allowed: more than the %" PRIu64 " B of options",
		    options->mss_bytes, options_bytes);
	cost->limit_bytes = options->mss_bytes - options_bytes;
	return 0;
}

/* What both versions of IP lie on. */
#define IP_BELOW							\
	LAYER_NAMES("", "ethernet", "vlan", "macsec", "mpls", "ppp",	\
	    "llc-snap", "aal5", "frame-relay", "wlan", "lte", "nr", "gre", \
	    "ipv4", "ipv6", "esp", "wireguard")

const struct layer layer_ipv4 = {
	.name = "ipv4",
	.title = "Internet Protocol version 4",
	.level = LEVEL_PACKET,
	.below = IP_BELOW,
	.min_mtu_bytes = IPV4_MIN_MTU_BYTES,
	.ip_version = 4,
	.limit_option = "mtu",
	.cost = { .head_bytes = 20, LAYER_PLAIN },
	.adjust = adjust_ipv4,
	.fields = ipv4_fields,
	.inside = "header",
	.inside_with_options = "header and options",
	.formula = "carried + 20 + options-bytes",
	.source = "RFC 791",
};

const struct layer layer_ipv6 = {
	.name = "ipv6",
	.title = "Internet Protocol version 6",
	.level = LEVEL_PACKET,
	.below = IP_BELOW,
	.min_mtu_bytes = IPV6_MIN_MTU_BYTES,
	.ip_version = 6,
	.limit_option = "mtu",
	.cost = { .head_bytes = 40, LAYER_PLAIN },
	.adjust = adjust_ipv6,
	.fields = ipv6_fields,
	.inside = "header",
	.inside_with_options = "header and extensions",
	.formula = "carried + 40 + extension-bytes",
	.source = "RFC 8200",
};

const struct layer layer_udp = {
	.name = "udp",
	.title = "User Datagram Protocol",
	.level = LEVEL_SEGMENT,
	.below = LAYER_NAMES("ipv4", "ipv6", "esp"),
	.limit_option = "datagram-bytes",
	.cost = { .head_bytes = 8, LAYER_PLAIN },
	.adjust = adjust_udp,
	.fields = udp_fields,
	.inside = "header",
	.formula = "carried + 8",
	.source = "RFC 768",
};

const struct layer layer_tcp = {
	.name = "tcp",
	.title = "Transmission Control Protocol",
	.level = LEVEL_SEGMENT,
	.acknowledged = true,
	.below = LAYER_NAMES("ipv4", "ipv6", "esp"),
	.cost = { .head_bytes = 20, LAYER_PLAIN },
	.adjust = adjust_tcp,
	.fields = tcp_fields,
	.inside = "header",
	.inside_with_options = "header and options",
	.formula = "carried + 20 + 12 with timestamps + options-bytes; "
	    "carried at most mss less options",
	.source = "RFC 9293, 7323",
};
