/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Media on a passive optical tree: GPON, XG-PON, XGS-PON.
 *
 * All count octets of a frame of 125 us.  The tree is shared: what one
 * subscriber has of it is said by a contract or by the contention.
 */
#include <assert.h>

#include "declare/medium_rows.h"
#include "error.h"

struct parameters {
	uint64_t fec;			/* 0 or 1 */
	uint64_t allocations;		/* entries of the map, a frame */
	uint64_t ploam_messages;	/* downstream, a frame; XG(S)-PON */
	uint64_t bursts;		/* upstream, a frame */
	uint64_t burst_bytes;		/* overhead of one */
	uint64_t contention;
	uint64_t subscriber;		/* enum end */
};
static_assert(sizeof(struct parameters) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");

/* One octet in every frame, 8000 frames a second. */
#define OCTET_BPS (UINT64_C(8) * 8000)
#define ALLOCATION_BYTES 8		/* of the map, both families */

/* ITU-T G.984.3: PSync 4, Ident 4, PLOAMd 13, BIP 1, Plend twice 4. */
#define GPON_DOWN_BYTES UINT64_C(38880)
#define GPON_UP_BYTES UINT64_C(19440)
#define GPON_HEADER_BYTES 30
#define GPON_WORD_BYTES 255		/* RS(255,239), the last one shorter */
#define GPON_PARITY_BYTES 16

/* ITU-T G.987.3, G.9807.1: PSBd 24; downstream RS(248,216) always; HLend 4 and
 * trailer 4, a PLOAM message 48; upstream RS(248,232).  Frame header, trailer
 * and the upstream code from memory. */
#define XG_DOWN_BYTES UINT64_C(155520)
#define XG_PSB_BYTES 24
#define XG_WORD_BYTES 248
#define XG_DOWN_DATA_BYTES 216
#define XG_UP_DATA_BYTES 232
#define XG_FRAME_BYTES (4 + 4)
#define XG_PLOAM_BYTES 48

#define ALLOCATIONS_MAX 1024
#define BURSTS_MAX 1024
#define PLOAM_MAX 128
#define BURST_BYTES_MAX 4096

#define PON_ROWS(fec_default, fec_help, burst_default, burst_help)	\
	MEDIUM_KIND_ROW,						\
	{ .name = "fec", .kind = FIELD_YES_NO,				\
	  .offset = offsetof(struct parameters, fec),			\
	  .default_text = fec_default, .help = fec_help },		\
	{ .name = "allocations", .kind = FIELD_COUNT,			\
	  .offset = offsetof(struct parameters, allocations), .min = 1,	\
	  .max = ALLOCATIONS_MAX, .default_text = "1",			\
	  .help = "entries of the upstream map in a downstream frame, 8 B " \
		  "each: about one a subscriber and class" },		\
	{ .name = "bursts", .kind = FIELD_COUNT,			\
	  .offset = offsetof(struct parameters, bursts), .min = 1,	\
	  .max = BURSTS_MAX, .default_text = "1",			\
	  .help = "upstream bursts of all subscribers in a frame of 125 us" }, \
	{ .name = "burst-overhead", .kind = FIELD_QUANTITY,		\
	  .dimension = DIMENSION_SIZE,					\
	  .offset = offsetof(struct parameters, burst_bytes),		\
	  .max = BURST_BYTES_MAX, .default_text = burst_default,	\
	  .help = burst_help },						\
	MEDIUM_CONTENTION_ROW(struct parameters, contention),		\
	MEDIUM_SUBSCRIBER_ROW(struct parameters, subscriber)
#define PLOAM_ROW							\
	{ .name = "ploam-messages", .kind = FIELD_COUNT,		\
	  .offset = offsetof(struct parameters, ploam_messages),	\
	  .max = PLOAM_MAX, .default_text = "0",			\
	  .help = "management messages in a downstream frame, 48 B each" }
#define XG_FEC_HELP "upstream code RS(248,232); downstream has RS(248,216) " \
	"always"

static const struct field gpon_fields[] = {
	PON_ROWS("no", "RS(255,239) in both directions (ITU-T G.984.3)",
	    "17 B", "octets a burst: guard 4, preamble and delimiter 8, PLOu "
	    "3, DBRu 2; PLOAMu adds 13"),
	{ .name = NULL },
};
static const struct field xg_fields[] = {
	PON_ROWS("yes", XG_FEC_HELP, "44 B", "octets a burst: guard 8, "
	    "preamble and delimiter 24, header 4, trailer 4, DBRu 4; from "
	    "memory"),
	PLOAM_ROW,
	{ .name = NULL },
};
static const struct field xgs_fields[] = {
	PON_ROWS("yes", XG_FEC_HELP, "268 B", "octets a burst: guard, preamble "
	    "and delimiter 256, header 4, trailer 4, DBRu 4; from memory"),
	PLOAM_ROW,
	{ .name = NULL },
};

/* Octets a frame to bit/s. */
static struct fraction
bps_of(uint64_t octets)
{
	return fraction_whole(octets * OCTET_BPS);
}

/* The bursts must leave something of a frame. */
static int
check_bursts(const struct parameters *p, uint64_t frame_bytes,
    const struct node *node, struct error *err)
{
	if (p->bursts * p->burst_bytes < frame_bytes)
		return 0;
	return node_error(medium_place(node, "bursts"), err, "bursts: found "
	    "%llu of %llu B overhead, allowed: less than a frame of %llu B",
	    (unsigned long long)p->bursts, (unsigned long long)p->burst_bytes,
	    (unsigned long long)frame_bytes);
}

static int
gpon_check(void *base, const struct node *node, struct error *err)
{
	return check_bursts(base, GPON_UP_BYTES, node, err);
}

static int
xg_check(void *base, const struct node *node, struct error *err)
{
	return check_bursts(base, XG_DOWN_BYTES / 4, node, err);
}

static int
xgs_check(void *base, const struct node *node, struct error *err)
{
	return check_bursts(base, XG_DOWN_BYTES, node, err);
}

/* Upstream in either family; the last word of a burst is taken as full. */
static void
add_upstream(const struct parameters *p, uint64_t frame_bytes,
    struct fraction code, const char *source, struct medium_capacity *out)
{
	struct fraction left;

	out->line_bps = bps_of(frame_bytes);
	left = bps_of(frame_bytes - p->bursts * p->burst_bytes);
	medium_add_step(out, "bursts", left, source);
	if (p->fec == 1)
		medium_add_step(out, "FEC", fraction_multiply(left, code),
		    source);
}

static void
gpon_downstream(const struct parameters *p, struct medium_capacity *out)
{
	uint64_t words = (GPON_DOWN_BYTES + GPON_WORD_BYTES - 1) /
	    GPON_WORD_BYTES, left = GPON_DOWN_BYTES;

	out->line_bps = bps_of(left);
	if (p->fec == 1) {
		left -= words * GPON_PARITY_BYTES;
		medium_add_step(out, "FEC", bps_of(left), "ITU-T G.984.3");
	}
	left -= GPON_HEADER_BYTES;
	medium_add_step(out, "frame header", bps_of(left), "ITU-T G.984.3");
	left -= p->allocations * ALLOCATION_BYTES;
	medium_add_step(out, "upstream map", bps_of(left), "ITU-T G.984.3");
}

static int
gpon_capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct parameters *p = base;

	(void)err;
	out->contention = p->contention;
	if (medium_is_upstream(p->subscriber, load->direction))
		add_upstream(p, GPON_UP_BYTES, fraction_make(GPON_WORD_BYTES -
		    GPON_PARITY_BYTES, GPON_WORD_BYTES), "ITU-T G.984.3", out);
	else
		gpon_downstream(p, out);
	return 0;
}

static void
xg_downstream(const struct parameters *p, struct medium_capacity *out)
{
	uint64_t left = XG_DOWN_BYTES;

	out->line_bps = bps_of(left);
	left -= XG_PSB_BYTES;
	medium_add_step(out, "synchronisation block", bps_of(left),
	    "ITU-T G.987.3");
	left = left / XG_WORD_BYTES * XG_DOWN_DATA_BYTES;
	medium_add_step(out, "FEC", bps_of(left), "ITU-T G.987.3");
	left -= XG_FRAME_BYTES + p->ploam_messages * XG_PLOAM_BYTES;
	medium_add_step(out, "frame header and trailer", bps_of(left),
	    "ITU-T G.987.3");
	left -= p->allocations * ALLOCATION_BYTES;
	medium_add_step(out, "upstream map", bps_of(left), "ITU-T G.987.3");
}

static int
xg_family_capacity(const struct parameters *p, uint64_t up_bytes,
    const struct medium_load *load, struct medium_capacity *out)
{
	out->contention = p->contention;
	if (medium_is_upstream(p->subscriber, load->direction))
		add_upstream(p, up_bytes, fraction_make(XG_UP_DATA_BYTES,
		    XG_WORD_BYTES), "ITU-T G.987.3", out);
	else
		xg_downstream(p, out);
	return 0;
}

static int
xg_capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	(void)err;
	return xg_family_capacity(base, XG_DOWN_BYTES / 4, load, out);
}

static int
xgs_capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	(void)err;
	return xg_family_capacity(base, XG_DOWN_BYTES, load, out);
}

#define PON_TOLERANCE_PPM 32		/* ITU-T G.984.2, from memory */

const struct medium medium_gpon = {
	.name = "gpon",
	.title = "GPON, 2.5 Gbit/s down and 1.25 Gbit/s up",
	.fields = gpon_fields,
	.check = gpon_check,
	.capacity = gpon_capacity,
	.carries = (const char *const[]){ "gem", NULL },
	.bare_frames = true,
	.duplex = DUPLEX_FULL,
	.tolerance_ppm = PON_TOLERANCE_PPM,
	.subscriber_offset = offsetof(struct parameters, subscriber),
	.accuracy = ACCURACY_NOMINAL,
	.accuracy_note = "nominal: the standard's octets, of a tree that "
	    "carries nothing else; the parity of short last words upstream is "
	    "not counted (up to 2 %)",
	.memory = "clock; PLOu 3 B, DBRu 2 B",
	.formula = "down = (38880 [- 16 * 153 with FEC] - 30 - 8 * "
	    "allocations) * 64 kbit/s; up = (19440 - bursts * overhead) [* "
	    "239/255] * 64 kbit/s",
	.source = "ITU-T G.984.3",
};

const struct medium medium_xg_pon = {
	.name = "xg-pon",
	.title = "XG-PON, 10 Gbit/s down and 2.5 Gbit/s up",
	.fields = xg_fields,
	.check = xg_check,
	.capacity = xg_capacity,
	.carries = (const char *const[]){ "xgem", NULL },
	.bare_frames = true,
	.duplex = DUPLEX_FULL,
	.tolerance_ppm = PON_TOLERANCE_PPM,
	.subscriber_offset = offsetof(struct parameters, subscriber),
	.accuracy = ACCURACY_NOMINAL,
	.accuracy_note = "nominal: the standard's octets, of a tree that "
	    "carries nothing else; upstream as the declared bursts",
	.memory = "clock; frame header and trailer; upstream code; overhead "
	    "of a burst",
	.formula = "down = ((155520 - 24) * 216/248 - 8 - 48 * ploam-messages "
	    "- 8 * allocations) * 64 kbit/s; up = (38880 - bursts * overhead) "
	    "[* 232/248] * 64 kbit/s",
	.source = "ITU-T G.987.3",
};

const struct medium medium_xgs_pon = {
	.name = "xgs-pon",
	.title = "XGS-PON, 10 Gbit/s down and up",
	.fields = xgs_fields,
	.check = xgs_check,
	.capacity = xgs_capacity,
	.carries = (const char *const[]){ "xgem", NULL },
	.bare_frames = true,
	.duplex = DUPLEX_FULL,
	.tolerance_ppm = PON_TOLERANCE_PPM,
	.subscriber_offset = offsetof(struct parameters, subscriber),
	.accuracy = ACCURACY_NOMINAL,
	.accuracy_note = "nominal: the standard's octets, of a tree that "
	    "carries nothing else; upstream as the declared bursts",
	.memory = "clock; frame header and trailer; upstream code; overhead "
	    "of a burst",
	.formula = "down = ((155520 - 24) * 216/248 - 8 - 48 * ploam-messages "
	    "- 8 * allocations) * 64 kbit/s; up = (155520 - bursts * overhead) "
	    "[* 232/248] * 64 kbit/s",
	.source = "ITU-T G.9807.1",
};
