/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Layers: Ethernet frames, and what lies in them before IP does. */
#include "declare/layer_rows.h"
#include "error.h"

/* IEEE 802.3: two addresses of 6 and a type of 2; FCS; least frame. */
#define ETHERNET_HEADER_BYTES 14
#define ETHERNET_FCS_BYTES 4
#define ETHERNET_MIN_BYTES 64
#define ETHERNET_MTU_BYTES 1500

static const struct field bridged_fields[] = {
	LAYER_YES_NO("fcs", fcs, "no", "the bridged frame keeps its FCS of "
	    "4 B and least length of 64 B (RFC 2684 section 5.2)"),
	{ .name = NULL },
};
static const struct field macsec_fields[] = {
	LAYER_YES_NO("sci", sci, "yes", "the 8 B of the secure channel "
	    "identifier are sent, as Linux does unless told otherwise"),
	LAYER_BYTES("icv-bytes", icv_bytes, 8, 16, "16 B",
	    "integrity check value"),
	{ .name = NULL },
};
static const struct field mpls_fields[] = {
	LAYER_COUNT("labels", labels, 1, 16, "1",
	    "labels of 4 B each (RFC 3032 section 2.1)"),
	{ .name = NULL },
};
static const struct field pseudowire_fields[] = {
	LAYER_YES_NO("control-word", control_word, "yes",
	    "4 B (RFC 4385, RFC 4448 section 4.6)"),
	{ .name = NULL },
};

static int
adjust_bridged(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	(void)err;
	if (options->fcs != 0) {
		cost->tail_bytes += ETHERNET_FCS_BYTES;
		cost->min_bytes = ETHERNET_MIN_BYTES;
	}
	return 0;
}

static int
adjust_macsec(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	(void)err;
	if (options->sci != 0)
		cost->head_bytes += 8;
	cost->tail_bytes += options->icv_bytes;
	return 0;
}

static int
adjust_mpls(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	(void)err;
	cost->head_bytes *= options->labels;
	return 0;
}

static int
adjust_pseudowire(const struct layer_options *options,
    struct layer_cost *cost, struct error *err)
{
	(void)err;
	if (options->control_word != 0)
		cost->head_bytes += 4;
	return 0;
}

const struct layer layer_ethernet = {
	.name = "ethernet",
	.title = "Ethernet II frame on its line",
	.level = LEVEL_FRAME,
	.below = LAYER_NAMES(""),
	.default_mtu_bytes = ETHERNET_MTU_BYTES,
	/* before: preamble 7 and SFD 1; gap: 96 bit times. */
	.cost = { .before_bytes = 8, .head_bytes = ETHERNET_HEADER_BYTES,
	    .tail_bytes = ETHERNET_FCS_BYTES,
	    .min_bytes = ETHERNET_MIN_BYTES, .gap_bytes = 12, LAYER_PLAIN },
	.inside = "header and FCS",
	.around = "preamble, SFD, gap",
	.formula = "frame = max(64, 14 + carried + 4); line = frame + 8 + 12",
	.source = "IEEE 802.3",
};

const struct layer layer_ethernet_bare = {
	.name = "ethernet",
	.title = "Ethernet II frame without preamble and gap",
	.level = LEVEL_FRAME,
	.below = LAYER_NAMES("bare", "ptm", "gem", "xgem", "docsis", "gfp"),
	.default_mtu_bytes = ETHERNET_MTU_BYTES,
	.cost = { .head_bytes = ETHERNET_HEADER_BYTES,
	    .tail_bytes = ETHERNET_FCS_BYTES,
	    .min_bytes = ETHERNET_MIN_BYTES, LAYER_PLAIN },
	.inside = "header and FCS",
	.formula = "frame = max(64, 14 + carried + 4)",
	.source = "IEEE 802.3",
};

const struct layer layer_ethernet_inner = {
	.name = "ethernet",
	.title = "Ethernet II frame in a tunnel, without FCS and padding",
	.level = LEVEL_FRAME,
	.below = LAYER_NAMES("vxlan", "geneve", "gre", "l2tpv3", "pseudowire"),
	.default_mtu_bytes = ETHERNET_MTU_BYTES,
	.cost = { .head_bytes = ETHERNET_HEADER_BYTES, LAYER_PLAIN },
	.inside = "header",
	.formula = "carried + 14",
	.source = "RFC 7348, 4448",
};

const struct layer layer_ethernet_bridged = {
	.name = "ethernet",
	.title = "Ethernet II frame bridged over AAL5",
	.level = LEVEL_FRAME,
	.below = LAYER_NAMES("aal5", "llc-snap"),
	.default_mtu_bytes = ETHERNET_MTU_BYTES,
	/* before: pad, so that the header ends on 4 octets */
	.cost = { .before_bytes = 2, .head_bytes = ETHERNET_HEADER_BYTES,
	    LAYER_PLAIN },
	.adjust = adjust_bridged,
	.fields = bridged_fields,
	.inside = "header",
	.inside_with_options = "header and FCS",
	.around = "pad",
	.formula = "2 + 14 + carried; with fcs: 2 + max(64, 14 + carried + 4)",
	.source = "RFC 2684 s5.2, s6.2",
};

const struct layer layer_vlan = {
	.name = "vlan",
	.title = "802.1Q or 802.1ad tag",
	.level = LEVEL_FRAME,
	.below = LAYER_NAMES("ethernet", "vlan", "macsec"),
	.cost = { .head_bytes = 4, LAYER_PLAIN },
	.inside = "tag",
	.formula = "carried + 4; the least frame stays 64",
	.source = "IEEE 802.1Q",
};

const struct layer layer_macsec = {
	.name = "macsec",
	.title = "MACsec, SecTAG and integrity check value",
	.level = LEVEL_FRAME,
	.below = LAYER_NAMES("ethernet", "vlan"),
	/* head: its EtherType 2, TCI and AN 1, SL 1, packet number 4 */
	.cost = { .head_bytes = 8, LAYER_PLAIN },
	.adjust = adjust_macsec,
	.fields = macsec_fields,
	.inside = "SecTAG and ICV",
	.formula = "carried + 8 + 8 with sci + icv-bytes",
	.source = "IEEE 802.1AE",
};

const struct layer layer_mpls = {
	.name = "mpls",
	.title = "MPLS label stack",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("ethernet", "vlan", "macsec", "ppp", "gre"),
	.cost = { .head_bytes = 4, LAYER_PLAIN },
	.adjust = adjust_mpls,
	.fields = mpls_fields,
	.inside = "label",
	.inside_with_options = "labels",
	.formula = "carried + 4 * labels",
	.source = "RFC 3032",
};

const struct layer layer_pseudowire = {
	.name = "pseudowire",
	.title = "Ethernet pseudowire over MPLS",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("mpls"),
	.cost = { .head_bytes = 0, LAYER_PLAIN },
	.adjust = adjust_pseudowire,
	.fields = pseudowire_fields,
	.inside = "control word",
	.formula = "carried + 4 with control-word; the frame in it has no FCS",
	.source = "RFC 4448, 4385",
	.accuracy = ACCURACY_NOMINAL,
	.memory = "that the FCS of the frame in it is dropped by default",
};
