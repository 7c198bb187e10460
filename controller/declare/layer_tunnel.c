/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Layers: tunnels over IP that do not encrypt, and WireGuard. */
#include <inttypes.h>

#include "declare/layer_rows.h"
#include "error.h"

/* RFC 8926 section 3.4: at most 260 with the header of 8, in words of 4. */
#define GENEVE_OPTIONS_MAX_BYTES 252
#define WIREGUARD_MTU_MAX_BYTES 65535

static const struct field gre_fields[] = {
	LAYER_YES_NO("checksum", checksum, "no",
	    "4 B of checksum and reserved (RFC 2784)"),
	LAYER_YES_NO("key", key, "no", "4 B (RFC 2890)"),
	LAYER_YES_NO("sequence", sequence, "no", "4 B (RFC 2890)"),
	{ .name = NULL },
};
static const struct field geneve_fields[] = {
	LAYER_BYTES("options-bytes", options_bytes, 0,
	    GENEVE_OPTIONS_MAX_BYTES, "0 B", "options, a multiple of 4 B"),
	{ .name = NULL },
};
static const struct field l2tp_fields[] = {
	LAYER_YES_NO("length", length, "no", "2 B of length"),
	LAYER_YES_NO("sequence", sequence, "no", "4 B of Ns and Nr"),
	LAYER_BYTES("offset-bytes", offset_bytes, 0, 1024, NULL,
	    "offset pad; its size takes 2 B more, also where it is 0"),
	{ .name = NULL },
};
static const struct field l2tpv3_fields[] = {
	LAYER_BYTES("cookie-bytes", cookie_bytes, 0, 8, "0 B",
	    "0, 4 or 8 B (RFC 3931 section 4.1)"),
	LAYER_YES_NO("sublayer", sublayer, "yes",
	    "4 B of default L2-specific sublayer (RFC 3931 section 4.6)"),
	{ .name = NULL },
};
/* The default is what the Linux driver takes where nobody says otherwise: 1500
 * less 80, the cost over IPv6. */
static const struct field wireguard_fields[] = {
	LAYER_BYTES("mtu", mtu_bytes, 68, WIREGUARD_MTU_MAX_BYTES, "1420 B",
	    "MTU of the tunnel's interface, which padding never goes beyond"),
	{ .name = NULL },
};

static int
adjust_gre(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	(void)err;
	cost->head_bytes += 4 * (options->checksum + options->key +
	    options->sequence);
	return 0;
}

static int
adjust_geneve(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	if (options->options_bytes % 4 != 0)
		return error_set(err, ERROR_INPUT, "options-bytes: found %"
		    PRIu64 " B, allowed: a multiple of 4 B",
		    options->options_bytes);
	cost->head_bytes += options->options_bytes;
	return 0;
}

static int
adjust_l2tp(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	(void)err;
	cost->head_bytes += 2 * options->length + 4 * options->sequence;
	if (options->offset_bytes != FIELD_UNSET)
		cost->head_bytes += 2 + options->offset_bytes;
	return 0;
}

static int
adjust_l2tpv3(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	if (options->cookie_bytes % 4 != 0)
		return error_set(err, ERROR_INPUT, "cookie-bytes: found %"
		    PRIu64 " B, allowed: 0 B, 4 B or 8 B",
		    options->cookie_bytes);
	cost->head_bytes += options->cookie_bytes + 4 * options->sublayer;
	return 0;
}

static int
adjust_wireguard(const struct layer_options *options,
    struct layer_cost *cost, struct error *err)
{
	(void)err;
	cost->limit_bytes = options->mtu_bytes;
	return 0;
}

const struct layer layer_gre = {
	.name = "gre",
	.title = "Generic Routing Encapsulation",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("ipv4", "ipv6", "esp"),
	.cost = { .head_bytes = 4, LAYER_PLAIN },
	.adjust = adjust_gre,
	.fields = gre_fields,
	.inside = "header",
	.inside_with_options = "header and options",
	.formula = "carried + 4 + 4 each for checksum, key, sequence",
	.source = "RFC 2784, 2890",
};

const struct layer layer_vxlan = {
	.name = "vxlan",
	.title = "Virtual eXtensible LAN",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("udp"),
	.cost = { .head_bytes = 8, LAYER_PLAIN },
	.inside = "header",
	.formula = "carried + 8; the frame in it has no FCS",
	.source = "RFC 7348",
};

const struct layer layer_geneve = {
	.name = "geneve",
	.title = "Generic Network Virtualization Encapsulation",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("udp"),
	.cost = { .head_bytes = 8, LAYER_PLAIN },
	.adjust = adjust_geneve,
	.fields = geneve_fields,
	.inside = "header",
	.inside_with_options = "header and options",
	.formula = "carried + 8 + options-bytes; the frame in it has no FCS",
	.source = "RFC 8926",
};

const struct layer layer_l2tp = {
	.name = "l2tp",
	.title = "Layer Two Tunneling Protocol version 2",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("udp"),
	/* flags and version, tunnel, session: 2 each */
	.cost = { .head_bytes = 6, LAYER_PLAIN },
	.adjust = adjust_l2tp,
	.fields = l2tp_fields,
	.inside = "header",
	.inside_with_options = "header and options",
	.formula = "carried + 6 + 2 with length + 4 with sequence + 2 and "
	    "offset-bytes where given; ppp on it adds 2 to 4",
	.source = "RFC 2661",
};

const struct layer layer_l2tpv3 = {
	.name = "l2tpv3",
	.title = "Layer Two Tunneling Protocol version 3 over IP",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("ipv4", "ipv6"),
	.cost = { .head_bytes = 4, LAYER_PLAIN },	/* session */
	.adjust = adjust_l2tpv3,
	.fields = l2tpv3_fields,
	.inside = "header",
	.inside_with_options = "header, cookie, sublayer",
	.formula = "carried + 4 + cookie-bytes + 4 with sublayer",
	.source = "RFC 3931",
};

const struct layer layer_l2tpv3_udp = {
	.name = "l2tpv3",
	.title = "Layer Two Tunneling Protocol version 3 over UDP",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("udp"),
	/* flags and reserved, session: 4 each */
	.cost = { .head_bytes = 8, LAYER_PLAIN },
	.adjust = adjust_l2tpv3,
	.fields = l2tpv3_fields,
	.inside = "header",
	.inside_with_options = "header, cookie, sublayer",
	.formula = "carried + 8 + cookie-bytes + 4 with sublayer",
	.source = "RFC 3931",
};

const struct layer layer_wireguard = {
	.name = "wireguard",
	.title = "WireGuard transport data",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("udp"),
	.limit_option = "mtu",
	/* head: type and reserved 4, receiver 4, counter 8; tail: tag */
	.cost = { .head_bytes = 16, .align_bytes = 16, .tail_bytes = 16,
	    .num = 1, .den = 1 },
	.adjust = adjust_wireguard,
	.fields = wireguard_fields,
	.inside = "header and tag",
	.formula = "16 + min(mtu, carried rounded up to 16) + 16",
	.source = "WireGuard s5.4.6",
};
