/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Media on coaxial cable: DOCSIS 3.0 (single-carrier channels) and 3.1 (OFDM
 * blocks, with single-carrier channels beside them).
 *
 * The cable is shared: what one subscriber has of it is said by a contract or
 * by the contention.
 */
#include <assert.h>
#include <math.h>

#include "declare/medium_rows.h"
#include "error.h"

enum annex { ANNEX_A, ANNEX_B };
enum modulation { MODULATION_64, MODULATION_256 };

struct parameters {
	uint64_t channels;		/* SC-QAM, downstream */
	uint64_t modulation, annex;
	uint64_t upstream_channels;
	uint64_t upstream_bps;		/* 3.0: of one channel */
	uint64_t contention;
	uint64_t subscriber;		/* enum end */
	/* 3.1, each of `blocks` alike */
	uint64_t blocks;
	double occupied_hz, guard_hz;
	uint64_t spacing_hz;
	uint64_t prefix_samples;
	uint64_t pilot_density;		/* M */
	uint64_t control_bits;		/* a subcarrier of the NCP */
	double bits_per_subcarrier;
};
static_assert(sizeof(struct parameters) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");

/* ITU-T J.83 annex A and B; RS(128,122) from memory.  Of den bits num are
 * left; 1/1: there is no such code. */
static const struct channel {
	enum annex annex;
	enum modulation modulation;
	uint64_t symbols_per_s, bits;
	uint64_t trellis_num, trellis_den;
	uint64_t words_num, words_den;	/* Reed-Solomon */
	uint64_t sync_num, sync_den;	/* trailer of a FEC frame */
} channels[] = {
	/* 60 words of 128 symbols of 7 bits, then 42 bits */
	{ ANNEX_B, MODULATION_64, 5056941, 6, 14, 15, 122, 128,
	  60 * 128 * 7, 60 * 128 * 7 + 42 },
	/* 88 words, then 40 bits */
	{ ANNEX_B, MODULATION_256, 5360537, 8, 19, 20, 122, 128,
	  88 * 128 * 7, 88 * 128 * 7 + 40 },
	{ ANNEX_A, MODULATION_64, 6952000, 6, 1, 1, 188, 204, 1, 1 },
	{ ANNEX_A, MODULATION_256, 6952000, 8, 1, 1, 188, 204, 1, 1 },
};

/* ITU-T J.122 section 7: a packet of the transport stream, its header, and
 * the pointer octet in each packet in which a MAC frame starts; from memory. */
#define MPEG_BYTES 188
#define MPEG_PAYLOAD_BYTES 184

#define CHANNELS_MAX 32
#define UPSTREAM_CHANNELS_MAX 8
/* 6.4 MHz: 5.12 Msymbol/s of 6 bits. */
#define UPSTREAM_CHANNEL_MAX_BPS (5120000 * 6)
#define BLOCKS_MAX 8

static const struct choice modulation_choices[] = {
	{ "64-qam", MODULATION_64 }, { "256-qam", MODULATION_256 },
	{ NULL, 0 },
};
static const struct choice annex_choices[] = {
	{ "a", ANNEX_A }, { "b", ANNEX_B },
	{ NULL, 0 },
};
static const struct choice spacing_choices[] = {
	{ "25 kHz", 25000 }, { "50 kHz", 50000 },
	{ NULL, 0 },
};
/* Samples of 204.8 MHz. */
static const struct choice prefix_choices[] = {
	{ "0.9375 us", 192 }, { "1.25 us", 256 }, { "2.5 us", 512 },
	{ "3.75 us", 768 }, { "5 us", 1024 },
	{ NULL, 0 },
};
static const struct choice control_choices[] = {
	{ "qpsk", 2 }, { "16-qam", 4 }, { "64-qam", 6 },
	{ NULL, 0 },
};

#define CHANNELS_ROW(least, normal, text)				\
	{ .name = "downstream-channels", .kind = FIELD_COUNT,		\
	  .offset = offsetof(struct parameters, channels),		\
	  .min = (least), .max = CHANNELS_MAX, .default_text = normal,	\
	  .required = (least) > 0, .help = text },			\
	{ .name = "modulation", .kind = FIELD_CHOICE,			\
	  .offset = offsetof(struct parameters, modulation),		\
	  .choices = modulation_choices, .default_text = "256-qam",	\
	  .help = "of the downstream channels" },			\
	{ .name = "annex", .kind = FIELD_CHOICE,			\
	  .offset = offsetof(struct parameters, annex),			\
	  .choices = annex_choices, .default_text = "b",		\
	  .help = "of ITU-T J.83: a is 8 MHz (Europe), b is 6 MHz" }
#define UPSTREAM_ROW(most, text)					\
	{ .name = "upstream-rate", .kind = FIELD_QUANTITY,		\
	  .dimension = DIMENSION_RATE, .required = true,		\
	  .offset = offsetof(struct parameters, upstream_bps),		\
	  .min = 1, .max = (most), .help = text }
#define SHARED_ROWS							\
	MEDIUM_CONTENTION_ROW(struct parameters, contention),		\
	MEDIUM_SUBSCRIBER_ROW(struct parameters, subscriber)

static const struct field fields_3_0[] = {
	MEDIUM_KIND_ROW,
	CHANNELS_ROW(1, NULL, "bonded downstream channels"),
	{ .name = "upstream-channels", .kind = FIELD_COUNT,
	  .offset = offsetof(struct parameters, upstream_channels), .min = 1,
	  .max = UPSTREAM_CHANNELS_MAX, .default_text = "1",
	  .help = "bonded upstream channels" },
	UPSTREAM_ROW(UPSTREAM_CHANNEL_MAX_BPS, "of one upstream channel after "
	    "FEC and guard times: about 27 Mbit/s of 6.4 MHz with 64-QAM"),
	SHARED_ROWS,
	{ .name = NULL },
};

static const struct field fields_3_1[] = {
	MEDIUM_KIND_ROW,
	{ .name = "blocks", .kind = FIELD_COUNT,
	  .offset = offsetof(struct parameters, blocks), .min = 1,
	  .max = BLOCKS_MAX, .default_text = "1",
	  .help = "bonded OFDM blocks, all alike" },
	{ .name = "occupied", .kind = FIELD_REAL, .required = true,
	  .dimension = DIMENSION_FREQUENCY,
	  .offset = offsetof(struct parameters, occupied_hz),
	  .real_min = 24e6, .real_max = 192e6,
	  .help = "width of one block" },
	{ .name = "guard", .kind = FIELD_REAL,
	  .dimension = DIMENSION_FREQUENCY,
	  .offset = offsetof(struct parameters, guard_hz),
	  .real_min = 0, .real_max = 10e6, .default_text = "2 MHz",
	  .help = "of that, guard bands at both edges together" },
	{ .name = "spacing", .kind = FIELD_CHOICE,
	  .offset = offsetof(struct parameters, spacing_hz),
	  .choices = spacing_choices, .default_text = "50 kHz",
	  .help = "of the subcarriers: 50 kHz is the transform of 4096 points, "
		  "25 kHz of 8192" },
	{ .name = "cyclic-prefix", .kind = FIELD_CHOICE,
	  .offset = offsetof(struct parameters, prefix_samples),
	  .choices = prefix_choices, .default_text = "2.5 us",
	  .help = "before each symbol of 20 or 40 us" },
	{ .name = "bits-per-subcarrier", .kind = FIELD_REAL, .required = true,
	  .dimension = DIMENSION_RATIO,
	  .offset = offsetof(struct parameters, bits_per_subcarrier),
	  .help = "average of the modem's profile, 1 to 14: 12 is 4096-QAM" },
	{ .name = "pilot-density", .kind = FIELD_COUNT,
	  .offset = offsetof(struct parameters, pilot_density), .min = 48,
	  .max = 120, .default_text = "48",
	  .help = "M, which sets the number of continuous pilots" },
	{ .name = "control-modulation", .kind = FIELD_CHOICE,
	  .offset = offsetof(struct parameters, control_bits),
	  .choices = control_choices, .default_text = "64-qam",
	  .help = "of the next codeword pointer" },
	CHANNELS_ROW(0, "0", "single-carrier channels bonded beside the "
	    "blocks"),
	UPSTREAM_ROW(RATE_MAX_BPS, "of all upstream channels, as provisioned"),
	SHARED_ROWS,
	{ .name = NULL },
};

static const struct channel *
channel_of(const struct parameters *p)
{
	const struct channel *channel = channels;

	while (channel->annex != p->annex ||
	    channel->modulation != p->modulation)
		channel++;
	return channel;
}

/* Share that the pointer octets leave: one a frame, yet at most one a packet
 * of the transport stream, where several short frames start. */
static struct fraction
pointer_share(struct fraction frame_octets)
{
	struct fraction each = fraction_divide(frame_octets,
	    fraction_add(frame_octets, fraction_whole(1)));
	struct fraction least = fraction_make(MPEG_PAYLOAD_BYTES - 1,
	    MPEG_PAYLOAD_BYTES);

	return fraction_compare(each, least) < 0 ? least : each;
}

/* A step of the single-carrier channels beside what others carry. */
static void
add_share(struct medium_capacity *out, const char *what,
    struct fraction share, uint64_t others_bps, uint64_t *left_bps,
    const char *source)
{
	if (share.num == share.den)
		return;
	*left_bps = fraction_floor(fraction_multiply(
	    fraction_whole(*left_bps), share));
	medium_add_step(out, what, fraction_whole(*left_bps + others_bps),
	    source);
}

static uint64_t
channels_raw_bps(const struct parameters *p)
{
	const struct channel *channel = channel_of(p);

	return p->channels * channel->symbols_per_s * channel->bits;
}

static void
add_channels(const struct parameters *p, const struct medium_load *load,
    uint64_t others_bps, struct medium_capacity *out)
{
	const struct channel *channel = channel_of(p);
	uint64_t left_bps = channels_raw_bps(p);

	add_share(out, "trellis code", fraction_make(channel->trellis_num,
	    channel->trellis_den), others_bps, &left_bps, "ITU-T J.83");
	add_share(out, "Reed-Solomon code", fraction_make(channel->words_num,
	    channel->words_den), others_bps, &left_bps, "ITU-T J.83");
	add_share(out, "FEC frame trailer", fraction_make(channel->sync_num,
	    channel->sync_den), others_bps, &left_bps, "ITU-T J.83");
	add_share(out, "MPEG header", fraction_make(MPEG_PAYLOAD_BYTES,
	    MPEG_BYTES), others_bps, &left_bps, "ITU-T J.122");
	add_share(out, "pointer", pointer_share(load->octets[LEVEL_LINE]),
	    others_bps, &left_bps, "ITU-T J.122");
}

static int
capacity_3_0(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct parameters *p = base;

	(void)err;
	out->contention = p->contention;
	if (medium_is_upstream(p->subscriber, load->direction)) {
		out->line_bps = fraction_whole(p->upstream_channels *
		    p->upstream_bps);
		return 0;
	}
	out->line_bps = fraction_whole(channels_raw_bps(p));
	add_channels(p, load, 0, out);
	return 0;
}

/* --- OFDM, an estimate after DOCSIS 3.1 PHY (CM-SP-PHYv3.1) --- */

#define SAMPLES_PER_S 204800000
#define PILOTS_FIXED 8			/* around the PLC */
#define PILOTS_MIN 8
#define PILOTS_MAX 120
#define PILOTS_SPAN_HZ 190000000	/* M pilots over so much; from memory */
#define SCATTERED_EACH 128		/* subcarriers a scattered pilot */
#define PLC_HZ 400000			/* 8 subcarriers of 50 kHz, 16 of 25 */
#define CODEWORD_BITS 16200
#define CODEWORD_DATA_BITS 14216	/* less LDPC 1800, BCH 168, header 16 */
#define POINTER_BITS 48			/* a message block of the NCP */

/* Subcarriers of one block. */
static uint64_t
subcarriers(const struct parameters *p)
{
	return (uint64_t)((p->occupied_hz - p->guard_hz) /
	    (double)p->spacing_hz + 1e-6);
}

/* Of those, what is left for data. */
static double
data_subcarriers(const struct parameters *p)
{
	uint64_t all = subcarriers(p), pilots, codewords;
	uint64_t plc = PLC_HZ / p->spacing_hz;
	double left;

	pilots = (p->pilot_density * all * p->spacing_hz + PILOTS_SPAN_HZ - 1) /
	    PILOTS_SPAN_HZ;
	if (pilots < PILOTS_MIN)
		pilots = PILOTS_MIN;
	if (pilots > PILOTS_MAX)
		pilots = PILOTS_MAX;
	left = (double)(all - plc - PILOTS_FIXED - pilots) -
	    (double)all / SCATTERED_EACH;
	codewords = (uint64_t)ceil(left * p->bits_per_subcarrier /
	    CODEWORD_BITS);
	left -= (double)((codewords + 1) * POINTER_BITS) /
	    (double)p->control_bits;
	assert(left > 0);
	return left;
}

static int
capacity_3_1(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct parameters *p = base;
	uint64_t points = SAMPLES_PER_S / p->spacing_hz;
	uint64_t raw_bps = channels_raw_bps(p);
	struct fraction raw = fraction_whole(raw_bps), left;
	double bits, symbols_per_s;

	(void)err;
	out->contention = p->contention;
	if (medium_is_upstream(p->subscriber, load->direction)) {
		out->line_bps = fraction_whole(p->upstream_bps);
		return 0;
	}
	bits = (double)p->blocks * p->bits_per_subcarrier;
	symbols_per_s = SAMPLES_PER_S / (double)(points + p->prefix_samples);
	out->line_bps = fraction_add(raw, medium_whole_bps(bits *
	    (double)(subcarriers(p) * p->spacing_hz)));
	medium_add_step(out, "cyclic prefix", fraction_add(raw,
	    medium_whole_bps(bits * (double)subcarriers(p) * symbols_per_s)),
	    "CM-SP-PHYv3.1");
	bits *= data_subcarriers(p);
	medium_add_step(out, "pilots, PLC and NCP", fraction_add(raw,
	    medium_whole_bps(bits * symbols_per_s)), "CM-SP-PHYv3.1");
	left = medium_whole_bps(bits * symbols_per_s * CODEWORD_DATA_BITS /
	    CODEWORD_BITS);
	medium_add_step(out, "LDPC and BCH codes", fraction_add(raw, left),
	    "CM-SP-PHYv3.1");
	if (p->channels > 0)
		add_channels(p, load, fraction_floor(left), out);
	return 0;
}

#define BITS_MIN 1.0
#define BITS_MAX 14.0			/* 16384-QAM */

static int
check_3_1(void *base, const struct node *node, struct error *err)
{
	const struct parameters *p = base;

	if (p->bits_per_subcarrier >= BITS_MIN &&
	    p->bits_per_subcarrier <= BITS_MAX)
		return 0;
	return node_error(medium_place(node, "bits-per-subcarrier"), err,
	    "bits-per-subcarrier: found %g, allowed: 1 to 14",
	    p->bits_per_subcarrier);
}

#define DOCSIS_TOLERANCE_PPM 5		/* master clock, from memory */

const struct medium medium_docsis_3_0 = {
	.name = "docsis-3.0",
	.title = "DOCSIS 3.0, bonded single-carrier channels",
	.fields = fields_3_0,
	.capacity = capacity_3_0,
	.carries = (const char *const[]){ "docsis", NULL },
	.bare_frames = true,
	.duplex = DUPLEX_FULL,
	.tolerance_ppm = DOCSIS_TOLERANCE_PPM,
	.subscriber_offset = offsetof(struct parameters, subscriber),
	.accuracy = ACCURACY_NOMINAL,
	.accuracy_note = "nominal downstream, of a cable that carries nothing "
	    "else; upstream as good as the declared rate",
	.memory = "clock; RS(128,122); 188/204; MPEG header and pointer",
	.formula = "line = channels * symbol rate * bits; annex b: * 14/15 or "
	    "19/20 * 122/128 * 53760/53802 or 78848/78888; annex a: * 188/204; "
	    "* 184/188 less a pointer a frame of w octets: * w/(w+1), at least "
	    "183/184",
	.source = "ITU-T J.83, J.122",
};

const struct medium medium_docsis_3_1 = {
	.name = "docsis-3.1",
	.title = "DOCSIS 3.1, OFDM blocks beside single-carrier channels",
	.fields = fields_3_1,
	.check = check_3_1,
	.capacity = capacity_3_1,
	.carries = (const char *const[]){ "docsis", NULL },
	.bare_frames = true,
	.duplex = DUPLEX_FULL,
	.tolerance_ppm = DOCSIS_TOLERANCE_PPM,
	.subscriber_offset = offsetof(struct parameters, subscriber),
	.accuracy = ACCURACY_MODEL,
	.accuracy_note = "a model: an estimate of the OFDM blocks, typically "
	    "within 3 %; upstream as good as the declared rate",
	.memory = "clock; number of pilots; RS(128,122); 188/204; MPEG header "
	    "and pointer",
	.formula = "N = (occupied - guard)/spacing; data = N - PLC - pilots - "
	    "N/128 - NCP; rate = blocks * data * bits / (symbol + prefix) * "
	    "14216/16200; single-carrier channels as in docsis-3.0",
	.source = "CM-SP-PHYv3.1, ITU-T J.83",
};
