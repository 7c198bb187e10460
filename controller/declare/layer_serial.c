/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Layers: PPP and what it lies on, HDLC-like framing, ATM adaptation. */
#include "declare/layer_rows.h"
#include "error.h"

/* What transparency adds to random data.  The data of a trial is random; a
 * constant octet may lie on either side. */
enum stuffing { STUFFING_NONE, STUFFING_BIT, STUFFING_OCTET, STUFFINGS };
static const struct {
	uint64_t num, den;
} stuffings[STUFFINGS] = {
	[STUFFING_NONE] = { 1, 1 },
	/* A 0 after five 1s: one bit in 62. */
	[STUFFING_BIT] = { 63, 62 },
	/* RFC 1662 section 4.2: 2 of 256 octets become two. */
	[STUFFING_OCTET] = { 129, 128 },
};
static const struct choice stuffing_choices[] = {
	{ "none", STUFFING_NONE },
	{ "bit", STUFFING_BIT },
	{ "octet", STUFFING_OCTET },
	{ NULL, 0 },
};

#define STUFFING_ROW							\
	LAYER_CHOICE("stuffing", stuffing, stuffing_choices, "bit",	\
	    "bit on T1, E1, T3 and serial lines: 63/62 on average; octet on " \
	    "SONET/SDH (RFC 2615): 129/128; none: as if it cost nothing")
#define FLAGS_ROW							\
	LAYER_COUNT("flags", flags, 1, 64, "1",				\
	    "flags between two frames: 1 suffices (RFC 1662 section 3.1)")
#define FCS_BYTES_ROW							\
	LAYER_BYTES("fcs-bytes", fcs_bytes, 2, 4, "2 B",		\
	    "2 B, or 4 B as on SONET/SDH (RFC 2615 section 5)")

static const struct field hdlc_fields[] = {
	FCS_BYTES_ROW, STUFFING_ROW, FLAGS_ROW, { .name = NULL },
};
static const struct field frame_relay_fields[] = {
	FCS_BYTES_ROW, STUFFING_ROW, FLAGS_ROW, { .name = NULL },
};
static const struct field tunnelled_fields[] = {
	LAYER_YES_NO("address-control", address_control, "yes",
	    "the 2 B of address and control are sent; no: compressed "
	    "(RFC 1661 section 6.6)"),
	{ .name = NULL },
};

static int
adjust_hdlc(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	if (options->fcs_bytes == 3)
		return error_set(err, ERROR_INPUT, "fcs-bytes: found 3 B, "
		    "allowed: 2 B or 4 B");
	cost->tail_bytes += options->fcs_bytes;
	cost->gap_bytes += options->flags;
	cost->num = stuffings[options->stuffing].num;
	cost->den = stuffings[options->stuffing].den;
	return 0;
}

static int
adjust_tunnelled(const struct layer_options *options,
    struct layer_cost *cost, struct error *err)
{
	(void)err;
	if (options->address_control != 0)
		cost->head_bytes += 2;
	return 0;
}

const struct layer layer_pppoe = {
	.name = "pppoe",
	.title = "PPP over Ethernet session",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("ethernet", "vlan", "macsec"),
	.default_mtu_bytes = 1492,	/* RFC 2516 s7; RFC 4638: declare it */
	/* version and type 1, code 1, session 2, length 2 */
	.cost = { .head_bytes = 6, LAYER_PLAIN },
	.inside = "header",
	.formula = "carried + 6; ppp on it adds 2",
	.source = "RFC 2516",
};

const struct layer layer_ppp = {
	.name = "ppp",
	.title = "Point-to-Point Protocol",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("pppoe", "hdlc", "aal5", "llc-ppp"),
	.default_mtu_bytes = 1500,	/* RFC 1661 section 6.1 */
	.cost = { .head_bytes = 2, LAYER_PLAIN },
	.inside = "protocol",
	.formula = "carried + 2",
	.source = "RFC 1661",
};

const struct layer layer_ppp_tunnelled = {
	.name = "ppp",
	.title = "Point-to-Point Protocol in a tunnel",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("l2tp"),
	.cost = { .head_bytes = 2, LAYER_PLAIN },
	.adjust = adjust_tunnelled,
	.fields = tunnelled_fields,
	.inside = "protocol",
	.inside_with_options = "address, control, protocol",
	.formula = "carried + 2 + 2 with address-control",
	.source = "RFC 1661, 2661",
};

const struct layer layer_hdlc = {
	.name = "hdlc",
	.title = "HDLC-like framing of PPP on a synchronous line",
	.level = LEVEL_FRAME,
	.below = LAYER_NAMES(""),
	/* head: address and control */
	.cost = { .head_bytes = 2, LAYER_PLAIN },
	.adjust = adjust_hdlc,
	.fields = hdlc_fields,
	.inside = "address, control, FCS",
	.around = "flag",
	.coding = "stuffing, average",
	.formula = "frame = 2 + carried + fcs-bytes; line = (frame + flags) * "
	    "63/62 (bit), 129/128 (octet): the mean over random data",
	.source = "RFC 1662",
	.accuracy = ACCURACY_NOMINAL,
};

const struct layer layer_frame_relay = {
	.name = "frame-relay",
	.title = "Frame Relay, multiprotocol encapsulation of IP",
	.level = LEVEL_FRAME,
	.below = LAYER_NAMES(""),
	.default_mtu_bytes = 1500,
	/* head: Q.922 address 2, control 1, NLPID 1 */
	.cost = { .head_bytes = 4, LAYER_PLAIN },
	.adjust = adjust_hdlc,
	.fields = frame_relay_fields,
	.inside = "address, control, NLPID, FCS",
	.around = "flag",
	.coding = "stuffing, average",
	.formula = "frame = 4 + carried + fcs-bytes; line = (frame + flags) * "
	    "63/62 (bit): the mean over random data",
	.source = "RFC 2427",
	.accuracy = ACCURACY_NOMINAL,
	.memory = "FCS of 2 B and flag of 1 B (ITU-T Q.922)",
};

const struct layer layer_aal5 = {
	.name = "aal5",
	.title = "ATM adaptation layer 5 in cells",
	.level = LEVEL_LINE,
	.below = LAYER_NAMES(""),
	.default_mtu_bytes = 9180,	/* RFC 2225 */
	.cost = { .trail_bytes = 8, .align_bytes = 48, .num = 53, .den = 48 },
	.inside = "trailer",
	.coding = "cell headers",
	.formula = "53 * ceil((carried + 8) / 48)",
	.source = "ITU-T I.363.5",
};

const struct layer layer_llc_snap = {
	.name = "llc-snap",
	.title = "LLC/SNAP encapsulation over AAL5",
	.level = LEVEL_LINE,
	.below = LAYER_NAMES("aal5"),
	/* LLC 3, OUI 3, EtherType or PID 2 */
	.cost = { .head_bytes = 8, LAYER_PLAIN },
	.inside = "header",
	.formula = "carried + 8",
	.source = "RFC 2684 s5",
};

const struct layer layer_llc_ppp = {
	.name = "llc-ppp",
	.title = "LLC encapsulation of PPP over AAL5",
	.level = LEVEL_LINE,
	.below = LAYER_NAMES("aal5"),
	/* FE-FE-03 and NLPID CF */
	.cost = { .head_bytes = 4, LAYER_PLAIN },
	.inside = "header",
	.formula = "carried + 4; ppp on it adds 2",
	.source = "RFC 2364 s6",
};
