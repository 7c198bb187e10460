/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Medium digital radio link: symbols, modulation, coding, framing; adaptive
 * modulation as a list of steps. */
#include <assert.h>
#include <math.h>
#include <stdio.h>

#include "declare/medium_rows.h"
#include "declare/signal.h"
#include "error.h"

#define STEPS_MAX 16
#define NANO 1000000000		/* ratios are kept in parts of it */

/* One state of adaptive modulation. */
struct step {
	uint64_t bits;			/* a symbol; FIELD_UNSET */
	double code_ratio;
	double least_snr_db;
};

struct parameters {
	double width_hz;
	double roll_off_ratio;
	double symbol_hz;
	struct step fixed;		/* without a list */
	struct step steps[STEPS_MAX];
	size_t steps_count;
	uint64_t reference;		/* from 1; FIELD_UNSET */
	size_t chosen[DIRECTIONS_SINGLE];	/* of steps, by check */
	double framing_ratio;
	uint64_t streams;
	struct signal signal;
	uint64_t duplex;		/* enum duplex */
	uint64_t contention;
};
static_assert(sizeof(struct parameters) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");

/* log2 of the number of points is the bits of a symbol. */
static const struct choice modulations[] = {
	{ "bpsk", 1 }, { "qpsk", 2 }, { "4-qam", 2 }, { "8-psk", 3 },
	{ "16-qam", 4 }, { "32-qam", 5 }, { "64-qam", 6 }, { "128-qam", 7 },
	{ "256-qam", 8 }, { "512-qam", 9 }, { "1024-qam", 10 },
	{ "2048-qam", 11 }, { "4096-qam", 12 }, { NULL, 0 },
};

#define MODULATION_ROW(type, member, needed)				\
	{ .name = "modulation", .kind = FIELD_CHOICE,			\
	  .offset = offsetof(type, member.bits), .choices = modulations, \
	  .required = needed, .help = "points of the constellation" }
#define CODE_ROW(type, member)						\
	{ .name = "code-rate", .kind = FIELD_REAL,			\
	  .dimension = DIMENSION_RATIO,					\
	  .offset = offsetof(type, member.code_ratio),			\
	  .real_min = 0.01, .real_max = 1,				\
	  .help = "share of the bits that is not coding; default: 1" }

struct step_row {
	struct step step;
};
static const struct field step_fields[] = {
	MODULATION_ROW(struct step_row, step, true),
	CODE_ROW(struct step_row, step),
	{ .name = "least-snr", .kind = FIELD_REAL,
	  .dimension = DIMENSION_DECIBEL,
	  .offset = offsetof(struct step_row, step.least_snr_db),
	  .real_min = -100, .real_max = 150, .required = true,
	  .help = "the link takes the step from this S/N on" },
	{ .name = NULL },
};

static const struct field fields[] = {
	MEDIUM_KIND_ROW,
	{ .name = "channel-width", .kind = FIELD_REAL,
	  .dimension = DIMENSION_FREQUENCY,
	  .offset = offsetof(struct parameters, width_hz),
	  .real_min = 1000, .real_max = 1e11, .required = true,
	  .help = "in hertz, as licensed" },
	{ .name = "roll-off", .kind = FIELD_REAL,
	  .dimension = DIMENSION_RATIO,
	  .offset = offsetof(struct parameters, roll_off_ratio),
	  .real_min = 0, .real_max = 1,
	  .help = "symbols a second = channel-width / (1 + roll-off)" },
	{ .name = "symbol-rate", .kind = FIELD_REAL,
	  .dimension = DIMENSION_FREQUENCY,
	  .offset = offsetof(struct parameters, symbol_hz),
	  .real_min = 1, .real_max = 1e11,
	  .help = "in place of roll-off: symbols a second, written in Hz" },
	MODULATION_ROW(struct parameters, fixed, false),
	CODE_ROW(struct parameters, fixed),
	{ .name = "steps", .kind = FIELD_LIST,
	  .offset = offsetof(struct parameters, steps),
	  .size = sizeof(struct step), .fields = step_fields, .min = 1,
	  .max = STEPS_MAX,
	  .count_offset = offsetof(struct parameters, steps_count),
	  .help = "in place of modulation: adaptive modulation; the declared "
		  "S/N, or reference, takes one" },
	{ .name = "reference", .kind = FIELD_COUNT,
	  .offset = offsetof(struct parameters, reference),
	  .min = 1, .max = STEPS_MAX,
	  .help = "the step, from 1, in which the link is accepted" },
	{ .name = "framing-share", .kind = FIELD_REAL,
	  .dimension = DIMENSION_RATIO,
	  .offset = offsetof(struct parameters, framing_ratio),
	  .real_min = 0, .real_max = 0.9, .default_text = "0 %",
	  .help = "of what coding leaves: pilots, framing, management" },
	{ .name = "streams", .kind = FIELD_COUNT,
	  .offset = offsetof(struct parameters, streams),
	  .min = 1, .max = 16, .default_text = "1",
	  .help = "independent ones: polarisations, antennas" },
	SIGNAL_ROWS(struct parameters, signal),
	MEDIUM_DUPLEX_ROW(struct parameters, duplex, "half: both directions "
	    "share the channel"),
	MEDIUM_CONTENTION_ROW(struct parameters, contention),
	{ .name = NULL },
};

static uint64_t
parts_of(double ratio)
{
	return (uint64_t)llround(ratio * NANO);
}

static uint64_t
share_of(uint64_t bps, uint64_t parts)
{
	return (uint64_t)((uint128)bps * parts / NANO);
}

static uint64_t
symbols_per_s(const struct parameters *p)
{
	if (!isnan(p->symbol_hz))
		return (uint64_t)p->symbol_hz;
	return (uint64_t)((uint128)(uint64_t)p->width_hz * NANO /
	    (NANO + parts_of(p->roll_off_ratio)));
}

/* Whole at each step, and exact up to there. */
static uint64_t
gross_bps(const struct parameters *p, const struct step *step)
{
	uint128 bits = step->bits * p->streams;

	if (!isnan(p->symbol_hz))
		return (uint64_t)((uint128)p->symbol_hz * bits);
	return (uint64_t)((uint128)p->width_hz * NANO * bits /
	    (NANO + parts_of(p->roll_off_ratio)));
}

static uint64_t
coded_bps(const struct parameters *p, const struct step *step)
{
	return share_of(gross_bps(p, step), parts_of(step->code_ratio));
}

static uint64_t
net_bps(const struct parameters *p, const struct step *step)
{
	return share_of(coded_bps(p, step),
	    NANO - parts_of(p->framing_ratio));
}

static bool
has_signal(const struct parameters *p)
{
	return !isnan(signal_snr(&p->signal, DIRECTION_A_TO_B, p->width_hz));
}

static int
check_symbols(const struct parameters *p, const struct node *node,
    struct error *err)
{
	if (isnan(p->symbol_hz) && isnan(p->roll_off_ratio))
		return node_error(node, err, "radio: 'roll-off' is missing, "
		    "allowed: roll-off, or symbol-rate");
	if (isnan(p->symbol_hz))
		return 0;
	if (!isnan(p->roll_off_ratio))
		return node_error(medium_place(node, "roll-off"), err,
		    "roll-off: symbol-rate is given too, allowed: one of "
		    "them");
	if (p->symbol_hz > p->width_hz)
		return node_error(medium_place(node, "symbol-rate"), err,
		    "symbol-rate: found more symbols a second than "
		    "channel-width has hertz, allowed: at most as many "
		    "(Nyquist)");
	return 0;
}

static int
check_fixed(const struct parameters *p, const struct node *node,
    struct error *err)
{
	if (p->fixed.bits == FIELD_UNSET)
		return node_error(node, err, "radio: 'modulation' is "
		    "missing, allowed: modulation, or steps");
	if (p->reference != FIELD_UNSET)
		return node_error(medium_place(node, "reference"), err,
		    "reference: without steps it says nothing, allowed: "
		    "leave it out");
	return 0;
}

/* The fastest step that the declared S/N allows, or the reference. */
static int
choose_step(struct parameters *p, enum direction d, const struct node *node,
    struct error *err)
{
	double snr_db = decibels(signal_snr(&p->signal, d, p->width_hz));
	double least_db = p->steps[0].least_snr_db;
	size_t i, found = STEPS_MAX;

	for (i = 0; i < p->steps_count; i++) {
		const struct step *step = &p->steps[i];

		least_db = fmin(least_db, step->least_snr_db);
		/* what was written in dB went through a ratio and back */
		if (p->reference != FIELD_UNSET ? i + 1 != p->reference :
		    !(step->least_snr_db <= snr_db + 1e-9))
			continue;
		if (found == STEPS_MAX ||
		    net_bps(p, step) > net_bps(p, &p->steps[found]))
			found = i;
	}
	if (found == STEPS_MAX)
		return node_error(node, err, "radio: S/N of %.2f dB is below "
		    "that of all steps, allowed: at least %.2f dB", snr_db,
		    least_db);
	if (p->steps[found].least_snr_db > snr_db + 1e-9)
		return node_error(medium_place(node, "reference"), err,
		    "reference: the step needs %.2f dB and the declared S/N "
		    "is %.2f dB, allowed: a step that it reaches",
		    p->steps[found].least_snr_db, snr_db);
	p->chosen[d] = found;
	return 0;
}

static int
check_steps(struct parameters *p, const struct node *node, struct error *err)
{
	const char *const single[] = { "modulation", "code-rate" };
	int d;

	for (int i = 0; i < 2; i++)
		if (node_child(node, single[i]) != NULL)
			return node_error(medium_place(node, single[i]), err,
			    "%s: steps are given too, allowed: in each step",
			    single[i]);
	if (p->reference != FIELD_UNSET && p->reference > p->steps_count)
		return node_error(medium_place(node, "reference"), err,
		    "reference: found %llu, allowed: 1 to %zu",
		    (unsigned long long)p->reference, p->steps_count);
	if (p->reference == FIELD_UNSET && !has_signal(p))
		return node_error(node, err, "radio: 'reference' is missing, "
		    "allowed with steps: reference, or the S/N");
	for (d = 0; d < DIRECTIONS_SINGLE; d++)
		if (choose_step(p, (enum direction)d, node, err) == -1)
			return -1;
	return 0;
}

static int
check(void *base, const struct node *node, struct error *err)
{
	struct parameters *p = base;

	if (signal_check(&p->signal, node, "radio", false, err) == -1 ||
	    check_symbols(p, node, err) == -1)
		return -1;
	if (isnan(p->fixed.code_ratio))
		p->fixed.code_ratio = 1;
	for (size_t i = 0; i < p->steps_count; i++)
		if (isnan(p->steps[i].code_ratio))
			p->steps[i].code_ratio = 1;
	if (p->steps_count > 0)
		return check_steps(p, node, err);
	return check_fixed(p, node, err);
}

static const char *
modulation_name(uint64_t bits)
{
	const struct choice *choice = modulations;

	while (choice->value != bits)
		choice++;
	return choice->name;
}

/* "3 64-qam 129.800 Mbit/s from 22.5 dB", two to a note. */
static void
note_steps(const struct parameters *p, struct medium_capacity *out)
{
	char text[2][64], rate[32];

	for (size_t i = 0; i < p->steps_count; i += 2) {
		text[1][0] = '\0';
		for (size_t n = 0; n < 2 && i + n < p->steps_count; n++) {
			const struct step *step = &p->steps[i + n];

			(void)snprintf(text[n], sizeof(text[n]),
			    "%s%zu %s %s from %.1f dB", n == 0 ? "" : "; ",
			    i + n + 1, modulation_name(step->bits),
			    units_format(net_bps(p, step), DIMENSION_RATE, 3,
			    rate, sizeof(rate)), step->least_snr_db);
		}
		medium_add_note(out, "steps: %s%s", text[0], text[1]);
	}
}

static int
capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct parameters *p = base;
	const struct step *step = &p->fixed;
	double snr = signal_snr(&p->signal, load->direction, p->width_hz);

	(void)err;
	if (p->steps_count > 0)
		step = &p->steps[p->chosen[load->direction]];
	out->line_bps = fraction_whole(gross_bps(p, step));
	out->duplex = (enum duplex)p->duplex;
	out->contention = p->contention;
	if (step->code_ratio < 1)
		medium_add_step(out, "coding",
		    fraction_whole(coded_bps(p, step)), "declared");
	if (p->framing_ratio > 0)
		medium_add_step(out, "framing, pilots, management",
		    fraction_whole(net_bps(p, step)), "declared");
	medium_add_note(out, "%llu symbols a second of %llu bit (%s), %llu "
	    "stream%s", (unsigned long long)symbols_per_s(p),
	    (unsigned long long)step->bits, modulation_name(step->bits),
	    (unsigned long long)p->streams, p->streams == 1 ? "" : "s");
	if (!isnan(snr)) {
		out->channel_bps = fraction_floor(medium_whole_bps(
		    (double)p->streams * shannon_bps(p->width_hz, snr)));
		medium_add_note(out, "S/N %.2f dB: Shannon's limit is "
		    "%.3f Mbit/s", decibels(snr),
		    (double)out->channel_bps / 1e6);
	}
	note_steps(p, out);
	return 0;
}

const struct medium medium_radio = {
	.name = "radio",
	.title = "digital radio link",
	.fields = fields,
	.check = check,
	.capacity = capacity,
	.carries = (const char *const[]){ "ethernet", "hdlc", "aal5", "ipv4",
	    "ipv6", NULL },
	.bare_frames = true,
	.default_mtu_bytes = 1500,
	.duplex = DUPLEX_FULL,
	.accuracy = ACCURACY_NOMINAL,
	.accuracy_note = "the gross rate is exact; data sheets show 81 to "
	    "91 % of it for packets (74 % in a robust state), so without the "
	    "code rate and the framing share of the device the result is up "
	    "to 26 % too high",
	.formula = "line = channel-width / (1 + roll-off) * bits of a symbol "
	    "* streams; then code-rate, framing-share; C = streams * "
	    "channel-width * log2(1 + S/N)",
	.source = "Nyquist 1928; data sheet; Shannon 1949",
};
