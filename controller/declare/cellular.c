/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/cellular.h"

#include <assert.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "declare/fraction.h"
#include "field.h"

#define SLOT_SYMBOLS 14		/* normal cyclic prefix */
#define BLOCK_SUBCARRIERS 12
#define MILLION 1000000

/* TS 38.101-1 table 5.3.2-1 and TS 38.101-2 table 5.3.2-1 */
#define NR_WIDTHS 17
static const uint64_t nr_widths_mhz[NR_WIDTHS] = {
	5, 10, 15, 20, 25, 30, 35, 40, 45, 50, 60, 70, 80, 90, 100, 200, 400
};
static const struct nr_row {
	enum frequency_range range;
	uint64_t spacing_khz;
	uint64_t blocks[NR_WIDTHS];
} nr_rows[] = {
	{ FREQUENCY_RANGE_1, 15, { 25, 52, 79, 106, 133, 160, 188, 216, 242,
	    270 } },
	{ FREQUENCY_RANGE_1, 30, { 11, 24, 38, 51, 65, 78, 92, 106, 119, 133,
	    162, 189, 217, 245, 273 } },
	{ FREQUENCY_RANGE_1, 60, { 0, 11, 18, 24, 31, 38, 44, 51, 58, 65, 79,
	    93, 107, 121, 135 } },
	{ FREQUENCY_RANGE_2, 60, { 0, 0, 0, 0, 0, 0, 0, 0, 0, 66, 0, 0, 0, 0,
	    132, 264 } },
	{ FREQUENCY_RANGE_2, 120, { 0, 0, 0, 0, 0, 0, 0, 0, 0, 32, 0, 0, 0, 0,
	    66, 132, 264 } },
};
#define NR_ROWS (sizeof(nr_rows) / sizeof(nr_rows[0]))

/* TS 36.101 table 5.6-1 (from memory) */
static const struct {
	uint64_t width_khz, blocks;
} lte_rows[] = {
	{ 1400, 6 }, { 3000, 15 }, { 5000, 25 }, { 10000, 50 },
	{ 15000, 75 }, { 20000, 100 },
};
#define LTE_ROWS (sizeof(lte_rows) / sizeof(lte_rows[0]))

/* TS 38.306 section 4.1.2: overhead in percent, [range][uplink] */
static const uint64_t nr_overhead_percent[2][2] = { { 14, 8 }, { 18, 10 } };
/* The same: R_max */
#define NR_CODE_NUM 948
#define NR_CODE_DEN 1024

static const struct nr_row *
nr_row_of(enum frequency_range range, uint64_t spacing_khz)
{
	for (size_t i = 0; i < NR_ROWS; i++)
		if (nr_rows[i].range == range &&
		    nr_rows[i].spacing_khz == spacing_khz)
			return &nr_rows[i];
	return NULL;
}

uint64_t
nr_blocks(enum frequency_range range, uint64_t spacing_khz,
    uint64_t width_khz)
{
	const struct nr_row *row = nr_row_of(range, spacing_khz);

	for (size_t i = 0; row != NULL && i < NR_WIDTHS; i++)
		if (nr_widths_mhz[i] * 1000 == width_khz)
			return row->blocks[i];
	return 0;
}

const char *
nr_widths(enum frequency_range range, uint64_t spacing_khz, char *buf,
    size_t size)
{
	const struct nr_row *row = nr_row_of(range, spacing_khz);
	size_t used = 0;

	(void)snprintf(buf, size, "none");
	for (size_t i = 0; row != NULL && i < NR_WIDTHS; i++) {
		if (row->blocks[i] == 0)
			continue;
		(void)snprintf(buf + used, size - used, "%s%llu", used == 0 ?
		    "" : ", ", (unsigned long long)nr_widths_mhz[i]);
		used += strlen(buf + used);
	}
	return buf;
}

uint64_t
lte_blocks(uint64_t width_khz)
{
	for (size_t i = 0; i < LTE_ROWS; i++)
		if (lte_rows[i].width_khz == width_khz)
			return lte_rows[i].blocks;
	return 0;
}

static bool
has_special(const struct tdd *tdd)
{
	return tdd->special_downlink != FIELD_UNSET ||
	    tdd->special_uplink != FIELD_UNSET;
}

uint64_t
tdd_symbols(const struct tdd *tdd, bool uplink)
{
	uint64_t slots = uplink ? tdd->uplink_slots : tdd->downlink_slots;
	uint64_t special = uplink ? tdd->special_uplink :
	    tdd->special_downlink;

	return slots * SLOT_SYMBOLS + (special == FIELD_UNSET ? 0 : special);
}

uint64_t
tdd_period(const struct tdd *tdd)
{
	return (tdd->downlink_slots + tdd->uplink_slots +
	    (has_special(tdd) ? 1 : 0)) * SLOT_SYMBOLS;
}

/* 1000 slots a second at 15 kHz, and in proportion. */
static uint64_t
gross_bps(enum cellular_kind kind, const struct carrier *carrier,
    enum direction direction)
{
	uint64_t slots = 1000;

	if (kind == CELLULAR_NR)
		slots = carrier->spacing_khz * 1000 / 15;
	return carrier->blocks * BLOCK_SUBCARRIERS * SLOT_SYMBOLS * slots *
	    carrier->symbol_bits[direction] * carrier->layers[direction];
}

static struct fraction
times(struct fraction value, uint64_t num, uint64_t den)
{
	return fraction_multiply(value, fraction_make(num, den));
}

static struct fraction
user_of_lte(const struct carrier *carrier, struct fraction gross)
{
	uint64_t overhead_ppm;

	if (isnan(carrier->overhead_ratio))
		return gross;
	overhead_ppm = (uint64_t)llround(carrier->overhead_ratio * MILLION);
	return times(gross, MILLION - overhead_ppm, MILLION);
}

void
carrier_rates(enum cellular_kind kind, const struct carrier *carrier,
    enum direction direction, bool uplink, uint64_t block_errors_ppm,
    struct carrier_rates *out)
{
	struct fraction rate;

	assert(block_errors_ppm < MILLION);
	if (carrier->block_bits[direction] != FIELD_UNSET)
		rate = fraction_whole(carrier->block_bits[direction] *
		    carrier->codewords[direction] * 1000);
	else
		rate = fraction_whole(gross_bps(kind, carrier, direction));
	rate = times(rate, carrier->count, 1);
	out->gross_bps = fraction_floor(rate);
	if (kind == CELLULAR_NR)
		rate = times(rate, NR_CODE_NUM, NR_CODE_DEN);
	out->coded_bps = fraction_floor(rate);
	if (kind == CELLULAR_NR)
		rate = times(rate, 100 - nr_overhead_percent[carrier->range]
		    [uplink], 100);
	else if (carrier->block_bits[direction] == FIELD_UNSET)
		rate = user_of_lte(carrier, rate);
	out->user_bps = fraction_floor(rate);
	if (kind == CELLULAR_NR)
		rate = times(rate, carrier->scaling_percent, 100);
	out->scaled_bps = fraction_floor(rate);
	if (carrier->tdd.downlink_slots != FIELD_UNSET)
		rate = times(rate, tdd_symbols(&carrier->tdd, uplink),
		    tdd_period(&carrier->tdd));
	out->shared_bps = fraction_floor(rate);
	rate = times(rate, MILLION - block_errors_ppm, MILLION);
	out->good_bps = fraction_floor(rate);
}
