/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/wlan_declaration.h"

#include <assert.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "error.h"

static const struct choice generations[] = {
	{ "802.11b", WLAN_B }, { "802.11a", WLAN_A }, { "802.11g", WLAN_G },
	{ "802.11n", WLAN_N }, { "802.11ac", WLAN_AC },
	{ "802.11ax", WLAN_AX }, { "802.11be", WLAN_BE }, { NULL, 0 },
};
static const struct choice bands[] = {
	{ "2.4 GHz", WLAN_2_4_GHZ }, { "5 GHz", WLAN_5_GHZ },
	{ "6 GHz", WLAN_6_GHZ }, { NULL, 0 },
};
static const struct choice preambles[] = {
	{ "long", 0 }, { "short", 1 }, { NULL, 0 },
};
static const struct choice protections[] = {
	{ "none", WLAN_PROTECTION_NONE },
	{ "cts-to-self", WLAN_PROTECTION_CTS },
	{ "rts-cts", WLAN_PROTECTION_RTS }, { NULL, 0 },
};

#define RATE_ROW(key, member, text)					\
	{ .name = key, .kind = FIELD_QUANTITY,				\
	  .dimension = DIMENSION_RATE,					\
	  .offset = offsetof(struct wlan_parameters, member),		\
	  .min = 1, .max = RATE_MAX_BPS, .help = text }
#define CHOICE_ROW(key, member, rows, text)				\
	.name = key, .kind = FIELD_CHOICE,				\
	.offset = offsetof(struct wlan_parameters, member),		\
	.choices = rows, .help = text
#define COUNT_ROW(key, member, least, most, text)			\
	{ .name = key, .kind = FIELD_COUNT,				\
	  .offset = offsetof(struct wlan_parameters, member),		\
	  .min = least, .max = most, .help = text }

const struct field wlan_fields[] = {
	MEDIUM_KIND_ROW,
	{ CHOICE_ROW("generation", generation, generations,
	  "the standard that both stations use"), .required = true },
	{ CHOICE_ROW("band", band, bands, "2.4 GHz has another SIFS and a "
	  "signal extension; default: where the generation has only one") },
	{ .name = "channel-width", .kind = FIELD_REAL,
	  .dimension = DIMENSION_FREQUENCY,
	  .offset = offsetof(struct wlan_parameters, width_hz),
	  .real_min = 20e6, .real_max = 320e6,
	  .help = "20, 40, 80, 160 or 320 MHz (802.11n and later)" },
	COUNT_ROW("mcs", mcs, 0, 31, "modulation and coding scheme; of "
	    "802.11n 8 * (streams - 1) + 0..7"),
	RATE_ROW("phy-rate", phy_rate_bps, "in place of mcs, as the station "
	    "shows it; of 802.11a, b, g the rate itself"),
	COUNT_ROW("streams", streams, 1, 8, "spatial streams; default: 1, "
	    "with 802.11n what its mcs says"),
	{ .name = "guard-interval", .kind = FIELD_QUANTITY,
	  .dimension = DIMENSION_TIME,
	  .offset = offsetof(struct wlan_parameters, guard_ns),
	  .min = 400, .max = 3200,
	  .help = "802.11n, ac: 800 or 400 ns; ax, be: 800, 1600 or 3200 ns; "
		  "default: 800 ns" },
	{ CHOICE_ROW("preamble", short_preamble, preambles, "of DSSS frames"),
	  .default_text = "long" },
	{ .name = "aggregation", .kind = FIELD_YES_NO,
	  .offset = offsetof(struct wlan_parameters, aggregation),
	  .help = "A-MPDU and block acknowledgement; default: yes from "
		  "802.11n on" },
	{ .name = "a-mpdu-limit", .kind = FIELD_QUANTITY,
	  .dimension = DIMENSION_SIZE,
	  .offset = offsetof(struct wlan_parameters, ampdu_octets),
	  .min = 1, .max = 15523198,
	  .help = "longest A-MPDU; default: the standard's" },
	COUNT_ROW("block-ack-window", window_frames, 1, 1024,
	    "frames in one A-MPDU at most; default: the standard's"),
	RATE_ROW("control-rate", control_bps, "of acknowledgements; default: "
	    "the highest basic rate not above that of the data"),
	{ CHOICE_ROW("protection", protection, protections,
	  "what precedes each frame or A-MPDU"), .default_text = "none" },
	RATE_ROW("protection-rate", protection_bps, "of RTS and CTS; default: "
	    "at 2.4 GHz 11 Mbit/s, which stations of 802.11b hear, else "
	    "control-rate"),
	MEDIUM_CONTENTION_ROW(struct wlan_parameters, contention),
	{ .name = NULL },
};

const struct wlan_standard *
wlan_standard_of(const struct wlan_parameters *p)
{
	return &wlan_standards[p->generation];
}

static uint64_t
width_mhz(const struct wlan_parameters *p)
{
	return (uint64_t)(p->width_hz / 1e6);
}

/* A key that must not be there. */
static int
check_absent(const struct node *node, const char *key, const char *why,
    struct error *err)
{
	const struct node *child = node_child(node, key);

	if (child == NULL)
		return 0;
	return node_error(child, err, "%s: %s, allowed: leave it out", key,
	    why);
}

static int
check_band(struct wlan_parameters *p, const struct node *node,
    struct error *err)
{
	const struct wlan_standard *standard = wlan_standard_of(p);
	char allowed[64] = "";
	uint64_t count = 0, band = 0;
	size_t used = 0;

	for (size_t i = 0; bands[i].name != NULL; i++) {
		if (!standard->bands[i])
			continue;
		(void)snprintf(allowed + used, sizeof(allowed) - used, "%s%s",
		    count == 0 ? "" : ", ", bands[i].name);
		used = strlen(allowed);
		band = bands[i].value;
		count++;
	}
	if (p->band == FIELD_UNSET && count == 1)
		p->band = band;
	if (p->band == FIELD_UNSET)
		return node_error(node, err, "wlan: 'band' is missing, "
		    "allowed with %s: %s", standard->name, allowed);
	if (!standard->bands[p->band])
		return node_error(medium_place(node, "band"), err, "band: %s "
		    "has no %s, allowed: %s", standard->name,
		    bands[p->band].name, allowed);
	return 0;
}

/* 802.11a, b and g: the rate is all. */
static int
check_legacy(struct wlan_parameters *p, const struct node *node,
    struct error *err)
{
	static const char *const later[] = { "mcs", "streams",
		"guard-interval", "a-mpdu-limit", "block-ack-window" };
	bool dsss = p->generation == WLAN_B;
	char why[48];

	(void)snprintf(why, sizeof(why), "%s has none",
	    wlan_standard_of(p)->name);
	for (size_t i = 0; i < sizeof(later) / sizeof(later[0]); i++)
		if (check_absent(node, later[i], why, err) == -1)
			return -1;
	if (p->width_hz > 20e6)		/* false of NAN */
		return node_error(medium_place(node, "channel-width"), err,
		    "channel-width: allowed with %s: 20 MHz",
		    wlan_standard_of(p)->name);
	if (p->phy_rate_bps == FIELD_UNSET || !wlan_rate_known(dsss ?
	    wlan_dsss_rates_kbps : wlan_ofdm_rates_kbps, p->phy_rate_bps))
		return node_error(medium_place(node, "phy-rate"), err,
		    "phy-rate: %s, allowed with %s: %s",
		    p->phy_rate_bps == FIELD_UNSET ? "missing" :
		    "found another", wlan_standard_of(p)->name, dsss ?
		    "1, 2, 5.5, 11 Mbit/s" :
		    "6, 9, 12, 18, 24, 36, 48, 54 Mbit/s");
	if (p->aggregation == 1)
		return node_error(medium_place(node, "aggregation"), err,
		    "aggregation: %s", why);
	p->aggregation = 0;
	return 0;
}

static int
check_width(const struct wlan_parameters *p, const struct node *node,
    struct error *err)
{
	const struct wlan_standard *standard = wlan_standard_of(p);
	char allowed[64] = "";
	unsigned found, i;
	size_t used = 0;

	found = isnan(p->width_hz) ? WLAN_WIDTHS :
	    wlan_width_index(width_mhz(p));
	if (found < WLAN_WIDTHS && p->width_hz > (double)width_mhz(p) * 1e6)
		found = WLAN_WIDTHS;
	for (i = 0; i < WLAN_WIDTHS; i++) {
		/* 40 MHz is the widest at 2.4 GHz, 160 MHz at 5 GHz */
		if (standard->subcarriers[i] == 0 ||
		    (p->band == WLAN_2_4_GHZ && i > 1) ||
		    (p->band == WLAN_5_GHZ && i > 3))
			break;
		if (i == found)
			return 0;
		(void)snprintf(allowed + used, sizeof(allowed) - used, "%s%u",
		    i == 0 ? "" : ", ", 20U << i);
		used = strlen(allowed);
	}
	return node_error(medium_place(node, "channel-width"), err,
	    "channel-width: %s, allowed with %s at %s: %s MHz",
	    isnan(p->width_hz) ? "missing" : "found another",
	    standard->name, bands[p->band].name, allowed);
}

static int
check_guard(struct wlan_parameters *p, const struct node *node,
    struct error *err)
{
	const uint64_t *guards = wlan_standard_of(p)->guards_ns;

	if (p->guard_ns == FIELD_UNSET)
		p->guard_ns = guards[0];
	for (int i = 0; i < WLAN_GUARDS_MAX; i++)
		if (guards[i] == p->guard_ns)
			return 0;
	return node_error(medium_place(node, "guard-interval"), err,
	    "guard-interval: found %llu ns, allowed with %s: %s",
	    (unsigned long long)p->guard_ns, wlan_standard_of(p)->name,
	    guards[2] == 0 ? "800 ns, 400 ns" : "800 ns, 1600 ns, 3200 ns");
}

struct wlan_mode
wlan_mode_of(const struct wlan_parameters *p)
{
	return (struct wlan_mode){
		.generation = (enum wlan_generation)p->generation,
		.width_mhz = width_mhz(p), .mcs = p->mcs,
		.streams = p->streams, .guard_ns = p->guard_ns };
}

/* 802.11n counts the streams into the index: 8 * (streams - 1) + 0..7. */
static int
check_mcs(struct wlan_parameters *p, const struct node *node,
    struct error *err)
{
	const struct wlan_standard *standard = wlan_standard_of(p);
	struct wlan_mode mode;
	uint64_t streams;

	if (p->generation == WLAN_N) {
		streams = p->mcs / 8 + 1;
		if (p->streams != FIELD_UNSET && p->streams != streams)
			return node_error(medium_place(node, "streams"), err,
			    "streams: mcs %llu of 802.11n has %llu, allowed: "
			    "that, or leave it out", (unsigned long long)
			    p->mcs, (unsigned long long)streams);
		p->streams = streams;
		p->mcs %= 8;
	}
	if (p->streams == FIELD_UNSET)
		p->streams = 1;
	mode = wlan_mode_of(p);
	if (p->mcs > standard->mcs_max)
		return node_error(medium_place(node, "mcs"), err, "mcs: found "
		    "%llu, allowed with %s: 0 to %llu", (unsigned long long)
		    p->mcs, standard->name,
		    (unsigned long long)standard->mcs_max);
	if (!wlan_mode_defined(&mode))
		return node_error(medium_place(node, "mcs"), err, "mcs: %s "
		    "does not define %llu at %llu MHz with %llu streams, "
		    "allowed: %s", standard->name, (unsigned long long)p->mcs,
		    (unsigned long long)mode.width_mhz,
		    (unsigned long long)p->streams, mode.width_mhz == 20 ?
		    "9 with 3 or 6 streams, or 0 to 8" : "another of 0 to 9");
	return 0;
}

/* Stations show a tenth of a megabit per second. */
static bool
rate_matches(const struct wlan_mode *mode, uint64_t bps)
{
	uint64_t exact_bps;

	exact_bps = fraction_floor(wlan_phy_of_mode(mode).rate_bps);
	return exact_bps < bps + 100000 && bps < exact_bps + 100000;
}

static int
find_mcs(struct wlan_parameters *p, const struct node *node, struct error *err)
{
	const struct wlan_standard *standard = wlan_standard_of(p);
	struct wlan_mode mode;

	if (p->streams == FIELD_UNSET)
		p->streams = 1;
	if (p->streams > standard->streams_max)
		return node_error(medium_place(node, "streams"), err,
		    "streams: allowed with %s: 1 to %llu", standard->name,
		    (unsigned long long)standard->streams_max);
	mode = wlan_mode_of(p);
	for (mode.mcs = 0; mode.mcs <= standard->mcs_max; mode.mcs++)
		if (wlan_mode_defined(&mode) &&
		    rate_matches(&mode, p->phy_rate_bps)) {
			p->mcs = mode.mcs;
			return 0;
		}
	return node_error(medium_place(node, "phy-rate"), err, "phy-rate: no "
	    "mcs of %s has it at %llu MHz with %llu streams and a guard "
	    "interval of %llu ns, allowed: one that has, or mcs",
	    standard->name, (unsigned long long)mode.width_mhz,
	    (unsigned long long)p->streams, (unsigned long long)p->guard_ns);
}

static int
check_mode(struct wlan_parameters *p, const struct node *node,
    struct error *err)
{
	bool by_rate = p->phy_rate_bps != FIELD_UNSET;

	if (check_width(p, node, err) == -1 || check_guard(p, node, err) == -1)
		return -1;
	if (by_rate == (p->mcs != FIELD_UNSET))
		return node_error(by_rate ? medium_place(node, "phy-rate") :
		    node, err, "wlan: %s, allowed: mcs, or phy-rate", by_rate ?
		    "mcs is given beside phy-rate" : "'mcs' is missing");
	return by_rate ? find_mcs(p, node, err) : check_mcs(p, node, err);
}

static int
check_aggregation(struct wlan_parameters *p, const struct node *node,
    struct error *err)
{
	const struct wlan_standard *standard = wlan_standard_of(p);
	const char *const off = "aggregation is off";

	if (p->aggregation == FIELD_UNSET)
		p->aggregation = 1;
	if (p->aggregation == 0 &&
	    (check_absent(node, "a-mpdu-limit", off, err) == -1 ||
	    check_absent(node, "block-ack-window", off, err) == -1))
		return -1;
	if (p->ampdu_octets == FIELD_UNSET)
		p->ampdu_octets = standard->ampdu_octets;
	if (p->window_frames == FIELD_UNSET)
		p->window_frames = standard->window_frames;
	if (p->ampdu_octets > standard->ampdu_octets)
		return node_error(medium_place(node, "a-mpdu-limit"), err,
		    "a-mpdu-limit: allowed with %s: at most %llu B",
		    standard->name,
		    (unsigned long long)standard->ampdu_octets);
	if (p->window_frames > standard->window_frames)
		return node_error(medium_place(node, "block-ack-window"), err,
		    "block-ack-window: allowed with %s: at most %llu",
		    standard->name,
		    (unsigned long long)standard->window_frames);
	return 0;
}

/* The highest basic rate not above that of the data: 6, 12 and 24 Mbit/s are
 * mandatory (IEEE 802.11-2020 section 10.6.6.5); of 802.11b all four. */
static uint64_t
default_control_bps(const struct wlan_parameters *p)
{
	uint64_t bps = p->phy_rate_bps;

	if (p->generation == WLAN_B)
		return bps;
	if (p->generation >= WLAN_N)
		bps = wlan_reference_rate(p->mcs);
	return bps >= 24000000 ? 24000000 : bps >= 12000000 ? 12000000 :
	    6000000;
}

static int
check_control(struct wlan_parameters *p, const struct node *node,
    struct error *err)
{
	bool low = p->band == WLAN_2_4_GHZ;

	if (p->control_bps == FIELD_UNSET)
		p->control_bps = default_control_bps(p);
	if (!wlan_rate_known(p->generation == WLAN_B ? wlan_dsss_rates_kbps :
	    wlan_ofdm_rates_kbps, p->control_bps))
		return node_error(medium_place(node, "control-rate"), err,
		    "control-rate: allowed with %s: %s",
		    wlan_standard_of(p)->name, p->generation == WLAN_B ?
		    "1, 2, 5.5, 11 Mbit/s" :
		    "6, 9, 12, 18, 24, 36, 48, 54 Mbit/s");
	if (p->protection == WLAN_PROTECTION_NONE &&
	    check_absent(node, "protection-rate", "protection is none",
	    err) == -1)
		return -1;
	if (p->protection_bps == FIELD_UNSET)
		p->protection_bps = low && p->generation != WLAN_B ? 11000000 :
		    p->control_bps;
	if ((low && wlan_rate_known(wlan_dsss_rates_kbps,
	    p->protection_bps)) || (p->generation != WLAN_B &&
	    wlan_rate_known(wlan_ofdm_rates_kbps, p->protection_bps)))
		return 0;
	return node_error(medium_place(node, "protection-rate"), err,
	    "protection-rate: allowed: %s%s%s",
	    low ? "1, 2, 5.5, 11" : "", low && p->generation != WLAN_B ?
	    ", " : "", p->generation == WLAN_B ? " Mbit/s" :
	    "6, 9, 12, 18, 24, 36, 48, 54 Mbit/s");
}

int
wlan_check(void *parameters, const struct node *node, struct error *err)
{
	struct wlan_parameters *p = parameters;

	if (check_band(p, node, err) == -1)
		return -1;
	if (p->generation < WLAN_N) {
		if (check_legacy(p, node, err) == -1)
			return -1;
	} else if (check_mode(p, node, err) == -1 ||
	    check_aggregation(p, node, err) == -1)
		return -1;
	return check_control(p, node, err);
}
