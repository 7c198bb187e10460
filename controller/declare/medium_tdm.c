/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Media of time division: the plesiochronous signals (T1, E1, E3, DS3) and
 * SONET/SDH with contiguous or virtual concatenation.
 */
#include <assert.h>
#include <stdio.h>
#include <string.h>

#include "declare/medium_rows.h"
#include "error.h"

/* --- pdh --- */

enum pdh_signal { PDH_T1, PDH_E1, PDH_E3, PDH_DS3, PDH_SIGNALS };
enum pdh_framing {
	FRAMING_NONE, FRAMING_SLOTS, FRAMING_SIGNALLING, FRAMING_C_BIT,
	FRAMING_G751, FRAMING_G832
};
enum pdh_mapping { MAPPING_DIRECT, MAPPING_PLCP };

struct pdh {
	uint64_t signal;		/* enum pdh_signal */
	uint64_t framing;		/* enum pdh_framing */
	uint64_t mapping;		/* enum pdh_mapping */
	uint64_t slots;			/* time slots used */
	uint64_t robbed_bits;		/* 0 or 1 */
};
static_assert(sizeof(struct pdh) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");

#define SLOT_BPS UINT64_C(64000)	/* DS0: ITU-T G.704 */
#define SLOT_BITS 8
#define CELL_BITS (53 * 8)		/* ITU-T I.432 */

static const struct pdh_signal_row {
	const char *name;
	uint64_t line_bps;
	uint64_t tolerance_ppm;
	uint64_t default_framing;	/* FIELD_UNSET: must be declared */
} pdh_signals[PDH_SIGNALS] = {
	/* 32 ppm as interface specifications print; the other tolerances from
	 * memory: ITU-T G.703 */
	[PDH_T1] = { "t1", 1544000, 32, FRAMING_SLOTS },
	[PDH_E1] = { "e1", 2048000, 50, FRAMING_SLOTS },
	[PDH_E3] = { "e3", 34368000, 20, FIELD_UNSET },
	[PDH_DS3] = { "ds3", 44736000, 20, FRAMING_C_BIT },
};

/* Of every `den` bits of the line `num` are the payload's. */
static const struct pdh_frame {
	uint64_t signal, framing;
	uint64_t num, den;
	uint64_t slots;			/* of 64 kbit/s; 0: not divided */
	uint64_t plcp_cells_per_s;	/* 0: none is defined here */
	const char *what, *source;
} pdh_frames[] = {
	{ PDH_T1, FRAMING_SLOTS, 192, 193, 24, 0, "framing bit",
	  "ITU-T G.704" },
	{ PDH_T1, FRAMING_NONE, 1, 1, 0, 0, "", "" },
	{ PDH_E1, FRAMING_SLOTS, 31, 32, 31, 0, "time slot 0",
	  "ITU-T G.704" },
	{ PDH_E1, FRAMING_SIGNALLING, 30, 32, 30, 0, "time slots 0 and 16",
	  "ITU-T G.704" },
	{ PDH_E1, FRAMING_NONE, 1, 1, 0, 0, "", "" },
	{ PDH_E3, FRAMING_G751, 1524, 1536, 0, 72000, "framing, 12 bits of "
	  "1536", "ITU-T G.751" },
	{ PDH_E3, FRAMING_G832, 530, 537, 0, 0, "framing, 7 B of 537",
	  "ITU-T G.832" },
	{ PDH_E3, FRAMING_NONE, 1, 1, 0, 0, "", "" },
	{ PDH_DS3, FRAMING_C_BIT, 4704, 4760, 0, 96000, "framing, 56 bits of "
	  "4760", "ANSI T1.107" },
};
#define PDH_FRAMES (sizeof(pdh_frames) / sizeof(pdh_frames[0]))

static const struct choice pdh_signal_choices[] = {
	{ "t1", PDH_T1 }, { "e1", PDH_E1 }, { "e3", PDH_E3 },
	{ "ds3", PDH_DS3 },
	{ NULL, 0 },
};
static const struct choice pdh_framing_choices[] = {
	{ "unframed", FRAMING_NONE }, { "framed", FRAMING_SLOTS },
	{ "signalling", FRAMING_SIGNALLING }, { "c-bit", FRAMING_C_BIT },
	{ "g.751", FRAMING_G751 }, { "g.832", FRAMING_G832 },
	{ NULL, 0 },
};
static const struct choice pdh_mapping_choices[] = {
	{ "direct", MAPPING_DIRECT }, { "plcp", MAPPING_PLCP },
	{ NULL, 0 },
};

static const struct field pdh_fields[] = {
	MEDIUM_KIND_ROW,
	{ .name = "signal", .kind = FIELD_CHOICE, .required = true,
	  .offset = offsetof(struct pdh, signal),
	  .choices = pdh_signal_choices,
	  .help = "t1 = DS1, 1544 kbit/s; e1 2048; e3 34368; ds3 = T3, 44736 "
		  "(ITU-T G.703)" },
	{ .name = "framing", .kind = FIELD_CHOICE,
	  .offset = offsetof(struct pdh, framing),
	  .choices = pdh_framing_choices,
	  .help = "t1: framed; e1: framed (time slot 0), signalling (0 and "
		  "16); e3: g.751, g.832; ds3: c-bit; all but ds3: unframed" },
	{ .name = "mapping", .kind = FIELD_CHOICE,
	  .offset = offsetof(struct pdh, mapping),
	  .choices = pdh_mapping_choices, .default_text = "direct",
	  .help = "plcp: how older equipment puts ATM cells into ds3, and into "
		  "e3 with g.751" },
	{ .name = "slots", .kind = FIELD_COUNT,
	  .offset = offsetof(struct pdh, slots), .min = 1, .max = 31,
	  .help = "time slots of 64 kbit/s that the circuit has; omitted: all "
		  "of the frame" },
	{ .name = "robbed-bits", .kind = FIELD_YES_NO,
	  .offset = offsetof(struct pdh, robbed_bits), .default_text = "no",
	  .help = "t1: signalling takes the last bit of every octet, which "
		  "leaves 56 kbit/s a slot" },
	{ .name = NULL },
};

static const struct pdh_frame *
pdh_frame_of(uint64_t signal, uint64_t framing)
{
	size_t i;

	for (i = 0; i < PDH_FRAMES; i++)
		if (pdh_frames[i].signal == signal &&
		    pdh_frames[i].framing == framing)
			return &pdh_frames[i];
	return NULL;
}

/* "framed, unframed": the framings of one signal. */
static const char *
pdh_framings_text(uint64_t signal, char *buf, size_t size)
{
	size_t i, used = 0;

	buf[0] = '\0';
	for (i = 0; i < PDH_FRAMES; i++) {
		if (pdh_frames[i].signal != signal)
			continue;
		(void)snprintf(buf + used, size - used, "%s%s", used == 0 ?
		    "" : ", ", pdh_framing_choices[pdh_frames[i].framing].name);
		used += strlen(buf + used);
	}
	return buf;
}

static int
pdh_check(void *base, const struct node *node, struct error *err)
{
	struct pdh *p = base;
	const struct pdh_signal_row *signal = &pdh_signals[p->signal];
	const struct pdh_frame *frame;
	char allowed[128];

	if (p->framing == FIELD_UNSET)
		p->framing = signal->default_framing;
	(void)pdh_framings_text(p->signal, allowed, sizeof(allowed));
	if (p->framing == FIELD_UNSET)
		return node_error(node, err, "pdh: 'framing' is missing, "
		    "allowed with %s: %s", signal->name, allowed);
	frame = pdh_frame_of(p->signal, p->framing);
	if (frame == NULL)
		return node_error(medium_place(node, "framing"), err,
		    "framing: found '%s', allowed with %s: %s",
		    pdh_framing_choices[p->framing].name, signal->name,
		    allowed);
	if (p->mapping == MAPPING_PLCP && frame->plcp_cells_per_s == 0)
		return node_error(medium_place(node, "mapping"), err,
		    "mapping: found 'plcp' on %s, allowed: on ds3, and on e3 "
		    "with framing g.751", signal->name);
	if (p->robbed_bits == 1 && (p->signal != PDH_T1 || frame->slots == 0))
		return node_error(medium_place(node, "robbed-bits"), err,
		    "robbed-bits: found 'yes', allowed: with signal t1 and "
		    "framing framed");
	if (p->slots == FIELD_UNSET)
		p->slots = frame->slots;
	if (p->slots <= frame->slots)
		return 0;
	if (frame->slots == 0)
		return node_error(medium_place(node, "slots"), err,
		    "slots: found %llu, allowed: with framing framed or "
		    "signalling", (unsigned long long)p->slots);
	return node_error(medium_place(node, "slots"), err, "slots: found "
	    "%llu, allowed with %s and framing %s: at most %llu",
	    (unsigned long long)p->slots, signal->name,
	    pdh_framing_choices[p->framing].name,
	    (unsigned long long)frame->slots);
}

static int
pdh_capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct pdh *p = base;
	const struct pdh_frame *frame = pdh_frame_of(p->signal, p->framing);

	(void)load;
	(void)err;
	assert(frame != NULL);
	out->tolerance_ppm = pdh_signals[p->signal].tolerance_ppm;
	out->line_bps = fraction_whole(pdh_signals[p->signal].line_bps);
	if (frame->num != frame->den)
		medium_add_step(out, frame->what, fraction_multiply(
		    out->line_bps, fraction_make(frame->num, frame->den)),
		    frame->source);
	if (p->slots < frame->slots)
		medium_add_step(out, "time slots of others",
		    fraction_whole(p->slots * SLOT_BPS), "declared");
	if (p->robbed_bits == 1)
		medium_add_step(out, "robbed bits", fraction_whole(p->slots *
		    SLOT_BPS / SLOT_BITS * (SLOT_BITS - 1)),
		    "ANSI T1.403, from memory");
	if (p->mapping == MAPPING_PLCP)
		medium_add_step(out, "PLCP", fraction_whole(
		    frame->plcp_cells_per_s * CELL_BITS), "ITU-T G.804");
	return 0;
}

static bool
pdh_suits(const void *base, const char *layer_name)
{
	const struct pdh *p = base;

	return p->mapping != MAPPING_PLCP || strcmp(layer_name, "aal5") == 0;
}

const struct medium medium_pdh = {
	.name = "pdh",
	.title = "T1, E1, E3 and DS3",
	.fields = pdh_fields,
	.check = pdh_check,
	.capacity = pdh_capacity,
	.carries = (const char *const[]){ "hdlc", "aal5", "frame-relay",
	    NULL },
	.suits = pdh_suits,
	.duplex = DUPLEX_FULL,
	.tolerance_ppm = 50,		/* the widest: E1 */
	.accuracy = ACCURACY_NOMINAL,
	.accuracy_note = "exact from the nominal rate; the clock may differ "
	    "from it: t1 32 ppm, e1 50 ppm, e3 and ds3 20 ppm",
	.memory = "clocks of e1, e3 and ds3; 56 kbit/s a slot with robbed bits",
	.formula = "line less framing: t1 192/193, e1 31/32 or 30/32, e3 "
	    "1524/1536 (g.751) or 530/537 (g.832), ds3 4704/4760; plcp: ds3 "
	    "96000 cells/s, e3 72000",
	.source = "ITU-T G.702, G.704, G.751, G.832; ANSI T1.107",
};

/* --- sdh --- */

struct sdh {
	uint64_t signal;		/* STS-1s in it: N of STS-N */
	uint64_t container;		/* row of containers; FIELD_UNSET */
	uint64_t members;
};
static_assert(sizeof(struct sdh) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");

/* A column of the frame: 9 rows of 8 bits, 8000 times a second. */
#define COLUMN_BPS (UINT64_C(9) * 8 * 8000)
/* Of an STS-1, whose frame STS-N has N times: ITU-T G.707 section 6. */
#define COLUMNS 90
#define COLUMNS_OVERHEAD 3		/* section and line */
#define COLUMNS_STUFF_STS1 2
#define STS1_IN_STM1 3

/* ITU-T G.707 sections 6.1 and 11: rates, how many an STM-1 and an STS-1
 * hold, and how many can be concatenated. */
static const struct container {
	const char *name;
	uint64_t virtual_bps;		/* VC, path overhead included */
	uint64_t payload_bps;		/* C */
	uint64_t in_stm1, in_sts1;
	uint64_t members_max;
} containers[] = {
	{ "vc-11", 1664000, 1600000, 84, 28, 64 },
	{ "vc-12", 2240000, 2176000, 63, 21, 64 },
	{ "vc-3", 48960000, 48384000, 3, 1, 256 },
	{ "vc-4", 150336000, 149760000, 1, 0, 256 },
};

static const struct choice sdh_signal_choices[] = {
	{ "sts-1", 1 }, { "stm-0", 1 },
	{ "sts-3c", 3 }, { "stm-1", 3 },
	{ "sts-12c", 12 }, { "stm-4", 12 },
	{ "sts-48c", 48 }, { "stm-16", 48 },
	{ "sts-192c", 192 }, { "stm-64", 192 },
	{ "sts-768c", 768 }, { "stm-256", 768 },
	{ NULL, 0 },
};
static const struct choice sdh_container_choices[] = {
	{ "vc-11", 0 }, { "vc-12", 1 }, { "vc-3", 2 }, { "vc-4", 3 },
	{ NULL, 0 },
};

static const struct field sdh_fields[] = {
	MEDIUM_KIND_ROW,
	{ .name = "signal", .kind = FIELD_CHOICE, .required = true,
	  .offset = offsetof(struct sdh, signal),
	  .choices = sdh_signal_choices,
	  .help = "line signal, by its SONET or its SDH name: sts-3c = stm-1 "
		  "(ITU-T G.707)" },
	{ .name = "container", .kind = FIELD_CHOICE,
	  .offset = offsetof(struct sdh, container),
	  .choices = sdh_container_choices,
	  .help = "virtual container that the circuit has; omitted: the whole "
		  "payload in one piece" },
	{ .name = "members", .kind = FIELD_COUNT,
	  .offset = offsetof(struct sdh, members), .min = 1, .max = 256,
	  .help = "containers concatenated virtually: 7 of vc-4 is VC-4-7v" },
	{ .name = NULL },
};

/* How many of a container the signal holds. */
static uint64_t
containers_in(const struct container *container, uint64_t sts1s)
{
	if (sts1s < STS1_IN_STM1)
		return container->in_sts1;
	return sts1s / STS1_IN_STM1 * container->in_stm1;
}

static int
sdh_check(void *base, const struct node *node, struct error *err)
{
	struct sdh *p = base;
	const struct container *container;
	uint64_t most;

	if (p->container == FIELD_UNSET) {
		if (p->members != FIELD_UNSET)
			return node_error(medium_place(node, "members"), err,
			    "members: found %llu, allowed: beside 'container'",
			    (unsigned long long)p->members);
		return 0;
	}
	container = &containers[p->container];
	most = containers_in(container, p->signal);
	if (most == 0)
		return node_error(medium_place(node, "container"), err,
		    "container: found '%s', allowed in an STS-1: vc-11, "
		    "vc-12, vc-3", container->name);
	if (p->members == FIELD_UNSET)
		p->members = 1;
	if (most > container->members_max)
		most = container->members_max;
	if (p->members > most)
		return node_error(medium_place(node, "members"), err,
		    "members: found %llu, allowed of %s in this signal: at "
		    "most %llu", (unsigned long long)p->members,
		    container->name, (unsigned long long)most);
	return 0;
}

/* One container over the whole signal: one column of path overhead, and of
 * every further STM-1 one of fixed stuff; of an STS-1 two (RFC 5180 A.2: the
 * payload of STS-Nc has 87 N - N/3 columns). */
static void
add_contiguous_steps(uint64_t sts1s, struct medium_capacity *out)
{
	uint64_t columns = sts1s * (COLUMNS - COLUMNS_OVERHEAD) - 1;
	uint64_t stuff = sts1s < STS1_IN_STM1 ? COLUMNS_STUFF_STS1 :
	    sts1s / STS1_IN_STM1 - 1;

	medium_add_step(out, "path overhead",
	    fraction_whole(columns * COLUMN_BPS), "ITU-T G.707");
	if (stuff > 0)
		medium_add_step(out, "fixed stuff",
		    fraction_whole((columns - stuff) * COLUMN_BPS),
		    "ITU-T G.707");
}

static void
add_member_steps(const struct container *container, uint64_t members,
    struct medium_capacity *out)
{
	medium_add_step(out, "containers of others, pointers, stuff",
	    fraction_whole(members * container->virtual_bps), "ITU-T G.707");
	medium_add_step(out, "path overhead",
	    fraction_whole(members * container->payload_bps), "ITU-T G.707");
	medium_add_note(out, "%s-%lluv: %llu members of %llu kbit/s",
	    container->name, (unsigned long long)members,
	    (unsigned long long)members,
	    (unsigned long long)container->payload_bps / 1000);
}

static int
sdh_capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct sdh *p = base;

	(void)load;
	(void)err;
	out->line_bps = fraction_whole(p->signal * COLUMNS * COLUMN_BPS);
	medium_add_step(out, "section and line overhead", fraction_whole(
	    p->signal * (COLUMNS - COLUMNS_OVERHEAD) * COLUMN_BPS),
	    "ITU-T G.707");
	if (p->container == FIELD_UNSET)
		add_contiguous_steps(p->signal, out);
	else
		add_member_steps(&containers[p->container], p->members, out);
	return 0;
}

const struct medium medium_sdh = {
	.name = "sdh",
	.title = "SONET and SDH, STS-1 to STM-256",
	.fields = sdh_fields,
	.check = sdh_check,
	.capacity = sdh_capacity,
	.carries = (const char *const[]){ "hdlc", "aal5", "gfp", NULL },
	.bare_frames = true,
	.duplex = DUPLEX_FULL,
	/* ITU-T G.709 section 12.2: 20 ppm, by the clocks of STM-N */
	.tolerance_ppm = 20,
	.accuracy = ACCURACY_EXACT,
	.accuracy_note = "exact from the nominal rate; the clock is within "
	    "20 ppm of it, and in service far closer",
	.formula = "STS-N: 90 N columns of 576 kbit/s, less 3 N, less N/3 of "
	    "path overhead and stuff (STS-1: 3); virtual concatenation: "
	    "members * container",
	.source = "ITU-T G.707, RFC 5180 A.2",
};
