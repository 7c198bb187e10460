/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Layers: what an access network puts around an Ethernet frame or a packet. */
#include "declare/layer_rows.h"
#include "error.h"

enum encryption { ENCRYPTION_NONE, ENCRYPTION_CCMP, ENCRYPTION_GCMP,
	ENCRYPTIONS };
/* Octets before and after what is encrypted: header with the packet number,
 * and MIC. */
static const struct {
	uint64_t header_bytes, mic_bytes;
} encryptions[ENCRYPTIONS] = {
	[ENCRYPTION_NONE] = { 0, 0 },
	[ENCRYPTION_CCMP] = { 8, 8 },
	[ENCRYPTION_GCMP] = { 8, 16 },
};
static const struct choice encryption_choices[] = {
	{ "none", ENCRYPTION_NONE },
	{ "ccmp", ENCRYPTION_CCMP },
	{ "gcmp", ENCRYPTION_GCMP },
	{ NULL, 0 },
};

static const struct field docsis_fields[] = {
	LAYER_BYTES("downstream-header-bytes", downstream_header_bytes, 0, 240,
	    "11 B", "extended header toward the subscriber: 6 B of service "
	    "header and 5 B of privacy"),
	LAYER_BYTES("upstream-header-bytes", upstream_header_bytes, 0, 240,
	    "4 B", "extended header away from the subscriber, not longer than "
	    "the other"),
	{ .name = NULL },
};
static const struct field gfp_fields[] = {
	LAYER_YES_NO("fcs", fcs, "no", "4 B of FCS over the payload"),
	{ .name = NULL },
};
static const struct field wlan_fields[] = {
	LAYER_YES_NO("qos", qos, "yes", "2 B of QoS control, as all from "
	    "802.11n on send"),
	LAYER_CHOICE("encryption", encryption, encryption_choices, "ccmp",
	    "ccmp (WPA2): 16 B, gcmp (WPA3): 24 B"),
	{ .name = NULL },
};
static const struct field lte_fields[] = {
	LAYER_BYTES("mac-bytes", mac_bytes, 2, 3, "3 B",
	    "MAC subheader; 3 B from 128 B of payload on"),
	LAYER_BYTES("rlc-bytes", rlc_bytes, 1, 5, "2 B", "RLC header"),
	LAYER_BYTES("pdcp-bytes", pdcp_bytes, 1, 3, "2 B",
	    "PDCP header; 2 B with a 12-bit sequence number"),
	{ .name = NULL },
};
static const struct field nr_fields[] = {
	LAYER_BYTES("mac-bytes", mac_bytes, 2, 3, "3 B",
	    "MAC subheader; 3 B from 256 B of payload on"),
	LAYER_BYTES("rlc-bytes", rlc_bytes, 1, 5, "3 B",
	    "RLC header; 3 B with an 18-bit sequence number"),
	LAYER_BYTES("pdcp-bytes", pdcp_bytes, 2, 3, "3 B",
	    "PDCP header; 3 B with an 18-bit sequence number"),
	LAYER_YES_NO("sdap", sdap, "yes", "1 B of SDAP header"),
	{ .name = NULL },
};

static int
adjust_docsis(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	if (options->upstream_header_bytes > options->downstream_header_bytes)
		return error_set(err, ERROR_INPUT, "upstream-header-bytes: "
		    "found %llu B, allowed: at most downstream-header-bytes, "
		    "%llu B", (unsigned long long)
		    options->upstream_header_bytes, (unsigned long long)
		    options->downstream_header_bytes);
	cost->head_bytes += options->downstream_header_bytes;
	cost->upstream_less_bytes = options->downstream_header_bytes -
	    options->upstream_header_bytes;
	return 0;
}

static int
adjust_gfp(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	(void)err;
	if (options->fcs != 0)
		cost->tail_bytes += 4;
	return 0;
}

static int
adjust_wlan(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	(void)err;
	if (options->qos != 0)
		cost->head_bytes += 2;
	cost->head_bytes += encryptions[options->encryption].header_bytes;
	cost->trail_bytes += encryptions[options->encryption].mic_bytes;
	return 0;
}

/* LTE has no SDAP; its option is then 0. */
static int
adjust_cellular(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	(void)err;
	cost->head_bytes += options->mac_bytes + options->rlc_bytes +
	    options->pdcp_bytes + options->sdap;
	return 0;
}

const struct layer layer_ptm = {
	.name = "ptm",
	.title = "Packet transfer mode of DSL, 64/65 octets",
	.level = LEVEL_LINE,
	.below = LAYER_NAMES(""),
	/* start of frame; end of frame and TC-CRC 2 */
	.cost = { .head_bytes = 1, .align_bytes = 1, .tail_bytes = 3,
	    .num = 65, .den = 64 },
	.inside = "start, end, TC-CRC",
	.coding = "64/65 sync octets",
	.formula = "(1 + carried + 1 + 2) * 65/64",
	.source = "IEEE 802.3 s61.3",
};

const struct layer layer_gem = {
	.name = "gem",
	.title = "GPON encapsulation method",
	.level = LEVEL_LINE,
	.below = LAYER_NAMES(""),
	/* PLI 12, Port-ID 12, PTI 3, HEC 13 bits */
	.cost = { .head_bytes = 5, LAYER_PLAIN },
	.inside = "header",
	.formula = "carried + 5; a frame cut into fragments costs 5 for each, "
	    "which is not counted",
	.source = "ITU-T G.984.3",
	.accuracy = ACCURACY_NOMINAL,
};

const struct layer layer_xgem = {
	.name = "xgem",
	.title = "XG-PON encapsulation method",
	.level = LEVEL_LINE,
	.below = LAYER_NAMES(""),
	.cost = { .head_bytes = 8, .align_bytes = 4, .min_bytes = 16, .num = 1,
	    .den = 1 },
	.inside = "header",
	.formula = "max(16, 8 + carried rounded up to 4); fragments are not "
	    "counted",
	.source = "ITU-T G.987.3",
	.accuracy = ACCURACY_NOMINAL,
	.memory = "padding to 4 B and the least length of 16 B",
};

const struct layer layer_docsis = {
	.name = "docsis",
	.title = "DOCSIS MAC frame",
	.level = LEVEL_LINE,
	.below = LAYER_NAMES(""),
	.cost = { .head_bytes = 6, LAYER_PLAIN },
	.adjust = adjust_docsis,
	.fields = docsis_fields,
	.inside = "header",
	.inside_with_options = "header and extended header",
	.formula = "carried + 6 + downstream-header-bytes, or "
	    "upstream-header-bytes away from the subscriber",
	.source = "CableLabs MULPI",
	.accuracy = ACCURACY_NOMINAL,
	.memory = "which extended headers a network sends",
};

const struct layer layer_gfp = {
	.name = "gfp",
	.title = "Generic framing procedure, frame-mapped",
	.level = LEVEL_LINE,
	.below = LAYER_NAMES(""),
	/* core header 4 and payload header 4 */
	.cost = { .head_bytes = 8, LAYER_PLAIN },
	.adjust = adjust_gfp,
	.fields = gfp_fields,
	.inside = "core and payload header",
	.inside_with_options = "core and payload header",
	.formula = "carried + 8 + 4 with fcs",
	.source = "ITU-T G.7041",
	.accuracy = ACCURACY_NOMINAL,
	.memory = "headers of 4 B each and the FCS of 4 B",
};

const struct layer layer_wlan = {
	.name = "wlan",
	.title = "802.11 data frame with LLC/SNAP",
	.level = LEVEL_FRAME,
	.below = LAYER_NAMES(""),
	.default_mtu_bytes = 1500,
	/* head: MAC header 24, LLC/SNAP 8; tail: FCS */
	.cost = { .head_bytes = 32, .tail_bytes = 4, LAYER_PLAIN },
	.adjust = adjust_wlan,
	.fields = wlan_fields,
	.inside = "header, LLC/SNAP, FCS",
	.inside_with_options = "header, cipher, LLC/SNAP, FCS",
	.formula = "24 + 2 with qos + 8 + carried + 4; + 8 + 8 ccmp, + 8 + 16 "
	    "gcmp; aggregation is the medium's",
	.source = "IEEE 802.11",
	.accuracy = ACCURACY_NOMINAL,
	.memory = "QoS control of 2 B, GCMP of 8 B and 16 B",
};

const struct layer layer_lte = {
	.name = "lte",
	.title = "LTE user plane: MAC, RLC, PDCP",
	.level = LEVEL_LINE,
	.below = LAYER_NAMES(""),
	.default_mtu_bytes = 1500,
	.cost = { .head_bytes = 0, LAYER_PLAIN },
	.adjust = adjust_cellular,
	.fields = lte_fields,
	.inside = "MAC, RLC, PDCP",
	.formula = "carried + mac-bytes + rlc-bytes + pdcp-bytes; segments of "
	    "a packet are not counted",
	.source = "3GPP TS 36.321",
	.accuracy = ACCURACY_NOMINAL,
	.memory = "all header lengths",
};

const struct layer layer_nr = {
	.name = "nr",
	.title = "5G NR user plane: MAC, RLC, PDCP, SDAP",
	.level = LEVEL_LINE,
	.below = LAYER_NAMES(""),
	.default_mtu_bytes = 1500,
	.cost = { .head_bytes = 0, LAYER_PLAIN },
	.adjust = adjust_cellular,
	.fields = nr_fields,
	.inside = "MAC, RLC, PDCP, SDAP",
	.formula = "carried + mac-bytes + rlc-bytes + pdcp-bytes + 1 with "
	    "sdap; segments of a packet are not counted",
	.source = "3GPP TS 38.321",
	.accuracy = ACCURACY_NOMINAL,
	.memory = "all header lengths",
};
