/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Medium OTN: the payload of an OPUk, under its ODUk and OTUk. */
#include <assert.h>

#include "declare/medium_rows.h"
#include "error.h"

struct parameters {
	uint64_t signal;		/* row of odus */
};
static_assert(sizeof(struct parameters) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");

/* ITU-T G.709: ODUk = client * odu_num / den, OTUk = client * 255 / den.  The
 * clock is that of STM-N, 20 ppm (section 12.2); ODU2e follows its client
 * 10GBASE-R, 100 ppm (RFC 5180 A.1). */
static const struct odu {
	uint64_t client_bps;
	uint64_t odu_num, den;
	bool has_otu;
	uint64_t tolerance_ppm;
} odus[] = {
	{ UINT64_C(1244160000), 1, 1, false, 20 },		/* ODU0 */
	{ UINT64_C(2488320000), 239, 238, true, 20 },		/* ODU1 */
	{ UINT64_C(9953280000), 239, 237, true, 20 },		/* ODU2 */
	{ UINT64_C(10312500000), 239, 237, true, 100 },		/* ODU2e */
	{ UINT64_C(39813120000), 239, 236, true, 20 },		/* ODU3 */
	{ UINT64_C(99532800000), 239, 227, true, 20 },		/* ODU4 */
};
#define OTU_NUM 255
/* Columns of an ODU frame, and of them the payload's: 3824 and 3808, that is
 * 239 and 238 (ITU-T G.709 section 12.1). */
#define OPU_NUM 238
#define OPU_DEN 239

static const struct choice signal_choices[] = {
	{ "odu0", 0 }, { "odu1", 1 }, { "odu2", 2 }, { "odu2e", 3 },
	{ "odu3", 4 }, { "odu4", 5 },
	{ NULL, 0 },
};

static const struct field fields[] = {
	MEDIUM_KIND_ROW,
	{ .name = "signal", .kind = FIELD_CHOICE, .required = true,
	  .offset = offsetof(struct parameters, signal),
	  .choices = signal_choices,
	  .help = "optical data unit that the circuit has (ITU-T G.709)" },
	{ .name = NULL },
};

static int
capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct parameters *p = base;
	const struct odu *odu = &odus[p->signal];
	struct fraction client = fraction_whole(odu->client_bps), unit;

	(void)load;
	(void)err;
	out->tolerance_ppm = odu->tolerance_ppm;
	unit = fraction_multiply(client, fraction_make(odu->odu_num, odu->den));
	out->line_bps = unit;
	if (odu->has_otu) {
		out->line_bps = fraction_multiply(client,
		    fraction_make(OTU_NUM, odu->den));
		medium_add_step(out, "FEC of the OTU", unit, "ITU-T G.709");
	}
	medium_add_step(out, "overhead of ODU and OPU", fraction_multiply(unit,
	    fraction_make(OPU_NUM, OPU_DEN)), "ITU-T G.709");
	medium_add_note(out, "a transparent Ethernet client keeps its MAC "
	    "rate: declare it as medium ethernet");
	return 0;
}

const struct medium medium_otn = {
	.name = "otn",
	.title = "Optical transport network, ODU0 to ODU4",
	.fields = fields,
	.capacity = capacity,
	.carries = (const char *const[]){ "gfp", NULL },
	.bare_frames = true,
	.duplex = DUPLEX_FULL,
	.tolerance_ppm = 20,
	.accuracy = ACCURACY_EXACT,
	.accuracy_note = "exact from the nominal rate; the clock is within "
	    "20 ppm of it, that of odu2e within 100 ppm",
	.formula = "line = OTU = client * 255/(239-k); ODU = client * "
	    "239/(239-k), k = 12 for odu4; payload = ODU * 238/239",
	.source = "ITU-T G.709",
};
