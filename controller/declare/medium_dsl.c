/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Media on a telephone pair: ADSL2+, VDSL2, G.fast.
 *
 * What a modem shows as its synchronisation rate (net data rate: ITU-T
 * G.997.1) is after trellis code and FEC, so that nothing is left to take off;
 * whether cells or packets ride on it is said by the layers, aal5 or ptm.
 */
#include <assert.h>
#include <math.h>

#include "declare/medium_rows.h"
#include "error.h"

struct parameters {
	uint64_t sync_bps[2];		/* of one line: down, up */
	uint64_t subscriber;		/* enum end */
	uint64_t lines;
	uint64_t profile;		/* row of profiles, or FIELD_UNSET */
	double retransmission_ratio;	/* of the rate; G.fast */
};
static_assert(sizeof(struct parameters) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");
#define DOWN 0
#define UP 1

/* What no line can exceed: tones * bits a tone * symbols a second.  A rate
 * above is a slip of the pen; the bound is of no other use. */
struct profile {
	uint64_t tones, bits, symbols_per_s;
};

/* ITU-T G.992.5: 512 tones of 4.3125 kHz, 480 of them down; annexes J and M
 * give up to 64 tones to upstream (from memory). */
static const struct profile adsl_both = { 512, 15, 4000 };
static const struct profile adsl_way[2] = {
	[DOWN] = { 480, 15, 4000 },
	[UP] = { 64, 15, 4000 },
};

/* ITU-T G.993.2: 30a has twice the spacing and symbol rate; the highest tones
 * from memory. */
static const struct profile vdsl_profiles[] = {
	{ 2048, 15, 4000 },	/* 8a to 8d: 8.8 MHz */
	{ 2783, 15, 4000 },	/* 12a, 12b: 12 MHz */
	{ 4096, 15, 4000 },	/* 17a: 17.7 MHz */
	{ 3479, 15, 8000 },	/* 30a: 30 MHz */
	{ 8192, 15, 4000 },	/* 35b: 35.3 MHz */
};
static const struct choice vdsl_choices[] = {
	{ "8", 0 }, { "12", 1 }, { "17a", 2 }, { "30a", 3 }, { "35b", 4 },
	{ NULL, 0 },
};

/* ITU-T G.9701: tones of 51.75 kHz, 12 bits; symbol rate and 212a from
 * memory. */
static const struct profile fast_profiles[] = {
	{ 2048, 12, 48000 },		/* 106a */
	{ 4096, 12, 48000 },		/* 212a */
};
static const struct choice fast_choices[] = {
	{ "106a", 0 }, { "212a", 1 },
	{ NULL, 0 },
};

#define LINES_MAX 32			/* ITU-T G.998.1, from memory */

#define SYNC_ROW(row, way, direction)					\
	{ .name = row, .kind = FIELD_QUANTITY, .required = true,	\
	  .dimension = DIMENSION_RATE,					\
	  .offset = offsetof(struct parameters, sync_bps) +		\
	    (way) * sizeof(uint64_t),					\
	  .min = 1, .max = RATE_MAX_BPS,				\
	  .help = "synchronisation rate " direction ", of one line, as the " \
		  "modem shows it (net data rate)" }
#define DSL_ROWS							\
	MEDIUM_KIND_ROW,						\
	SYNC_ROW("downstream", DOWN, "to the subscriber"),		\
	SYNC_ROW("upstream", UP, "from the subscriber"),		\
	MEDIUM_SUBSCRIBER_ROW(struct parameters, subscriber),		\
	{ .name = "lines", .kind = FIELD_COUNT,				\
	  .offset = offsetof(struct parameters, lines), .min = 1,	\
	  .max = LINES_MAX, .default_text = "1",			\
	  .help = "bonded lines (ITU-T G.998); where they differ, the rates " \
		  "are their mean" }
#define PROFILE_ROW(table, text)					\
	{ .name = "profile", .kind = FIELD_CHOICE,			\
	  .offset = offsetof(struct parameters, profile),		\
	  .choices = (table),						\
	  .help = text ", which only bounds the rates; omitted: the widest" }

static const struct field adsl_fields[] = {
	DSL_ROWS,
	{ .name = NULL },
};
static const struct field vdsl_fields[] = {
	DSL_ROWS,
	PROFILE_ROW(vdsl_choices, "ITU-T G.993.2, 8 and 12 with any letter"),
	{ .name = NULL },
};
static const struct field fast_fields[] = {
	DSL_ROWS,
	PROFILE_ROW(fast_choices, "ITU-T G.9701"),
	{ .name = "retransmission-units", .kind = FIELD_REAL,
	  .dimension = DIMENSION_RATIO,
	  .offset = offsetof(struct parameters, retransmission_ratio),
	  .real_min = 0, .real_max = 0.5, .default_text = "2 %",
	  .help = "share of the rate that the framing of packets into "
		  "retransmission units takes; common practice" },
	{ .name = NULL },
};

static uint64_t
profile_bps(const struct profile *profile)
{
	return profile->tones * profile->bits * profile->symbols_per_s;
}

static int
check_way(const struct parameters *p, int way, uint64_t most_bps,
    const struct node *node, struct error *err)
{
	static const char *const keys[2] = {
		[DOWN] = "downstream", [UP] = "upstream" };
	char found[32], most[32];

	if (p->sync_bps[way] <= most_bps)
		return 0;
	return node_error(medium_place(node, keys[way]), err, "%s: found %s, "
	    "allowed on one line: at most %s", keys[way],
	    units_format(p->sync_bps[way], DIMENSION_RATE, 6, found,
	    sizeof(found)), units_format(most_bps, DIMENSION_RATE, 6, most,
	    sizeof(most)));
}

/* Both directions together have the tones of one line. */
static int
check_sum(const struct parameters *p, uint64_t most_bps,
    const struct node *node, struct error *err)
{
	uint64_t sum_bps = p->sync_bps[DOWN] + p->sync_bps[UP];
	char found[32], most[32];

	if (sum_bps <= most_bps)
		return 0;
	return node_error(medium_place(node, "downstream"), err, "downstream, "
	    "upstream: found %s together, allowed on one line: at most %s",
	    units_format(sum_bps, DIMENSION_RATE, 6, found, sizeof(found)),
	    units_format(most_bps, DIMENSION_RATE, 6, most, sizeof(most)));
}

static int
adsl_check(void *base, const struct node *node, struct error *err)
{
	const struct parameters *p = base;
	int way;

	for (way = DOWN; way <= UP; way++)
		if (check_way(p, way, profile_bps(&adsl_way[way]), node,
		    err) == -1)
			return -1;
	return check_sum(p, profile_bps(&adsl_both), node, err);
}

static int
check_profile(const struct parameters *p, const struct profile profiles[],
    size_t count, const struct node *node, struct error *err)
{
	uint64_t most_bps = 0;
	size_t i;

	for (i = 0; i < count; i++)
		if ((p->profile == FIELD_UNSET || p->profile == i) &&
		    profile_bps(&profiles[i]) > most_bps)
			most_bps = profile_bps(&profiles[i]);
	return check_sum(p, most_bps, node, err);
}

static int
vdsl_check(void *base, const struct node *node, struct error *err)
{
	return check_profile(base, vdsl_profiles,
	    sizeof(vdsl_profiles) / sizeof(vdsl_profiles[0]), node, err);
}

static int
fast_check(void *base, const struct node *node, struct error *err)
{
	return check_profile(base, fast_profiles,
	    sizeof(fast_profiles) / sizeof(fast_profiles[0]), node, err);
}

static int
capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct parameters *p = base;
	int way = medium_is_upstream(p->subscriber, load->direction) ?
	    UP : DOWN;

	(void)err;
	out->line_bps = fraction_whole(p->sync_bps[way] * p->lines);
	if (p->lines > 1)
		medium_add_note(out, "%llu bonded lines; what their fragments "
		    "add is not counted", (unsigned long long)p->lines);
	return 0;
}

#define PER_MILLION 1000000

static int
fast_capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct parameters *p = base;
	uint64_t taken = (uint64_t)llround(p->retransmission_ratio *
	    PER_MILLION);
	struct fraction left;

	if (capacity(base, load, out, err) == -1)
		return -1;
	left = fraction_multiply(out->line_bps,
	    fraction_make(PER_MILLION - taken, PER_MILLION));
	medium_add_step(out, "retransmission units",
	    fraction_whole(fraction_floor(left)), "declared");
	medium_add_note(out, "both directions take turns on the pair (TDD): "
	    "the declared rates are what each has of it");
	return 0;
}

const struct medium medium_adsl2plus = {
	.name = "adsl2plus",
	.title = "ADSL, ADSL2 and ADSL2+",
	.fields = adsl_fields,
	.check = adsl_check,
	.capacity = capacity,
	.carries = (const char *const[]){ "aal5", "ptm", NULL },
	.bare_frames = true,
	.duplex = DUPLEX_FULL,
	.tolerance_ppm = 50,
	.subscriber_offset = offsetof(struct parameters, subscriber),
	.accuracy = ACCURACY_NOMINAL,
	.accuracy_note = "as good as the rate that the modem shows, which it "
	    "may round; exact from there on",
	.memory = "clock within 50 ppm; 64 tones upstream at most",
	.formula = "line = lines * synchronisation rate",
	.source = "ITU-T G.992.5, G.997.1",
};

const struct medium medium_vdsl2 = {
	.name = "vdsl2",
	.title = "VDSL2",
	.fields = vdsl_fields,
	.check = vdsl_check,
	.capacity = capacity,
	.carries = (const char *const[]){ "ptm", "aal5", NULL },
	.bare_frames = true,
	.duplex = DUPLEX_FULL,
	.tolerance_ppm = 50,
	.subscriber_offset = offsetof(struct parameters, subscriber),
	.accuracy = ACCURACY_NOMINAL,
	.accuracy_note = "as good as the rate that the modem shows, which it "
	    "may round; exact from there on",
	.memory = "clock within 50 ppm; highest tones of the profiles",
	.formula = "line = lines * synchronisation rate",
	.source = "ITU-T G.993.2, G.997.1",
};

const struct medium medium_gfast = {
	.name = "gfast",
	.title = "G.fast",
	.fields = fast_fields,
	.check = fast_check,
	.capacity = fast_capacity,
	.carries = (const char *const[]){ "ptm", NULL },
	.bare_frames = true,
	.duplex = DUPLEX_FULL,
	.tolerance_ppm = 50,
	.subscriber_offset = offsetof(struct parameters, subscriber),
	.accuracy = ACCURACY_MODEL,
	.accuracy_note = "a model: the framing into retransmission units is a "
	    "declared share, typically right within 2 %",
	.memory = "clock within 50 ppm; 48000 symbols a second; profile 212a",
	.formula = "line = lines * synchronisation rate, less the share of "
	    "retransmission units",
	.source = "ITU-T G.9701, G.997.2",
};
