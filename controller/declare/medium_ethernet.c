/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Medium Ethernet: the name of the rate is the rate of the MAC. */
#include <assert.h>
#include <stdio.h>

#include "declare/medium_rows.h"
#include "error.h"

struct parameters {
	uint64_t line_rate_bps[DIRECTIONS_SINGLE];	/* FIELD_UNSET */
	uint64_t phy;			/* FIELD_UNSET, else row of phys */
	uint64_t duplex;		/* enum duplex */
};
static_assert(sizeof(struct parameters) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");

/* What carries a rate.  mac_bps = mac_num / mac_den.  The line codes and
 * symbol rates are for the reader: the rate of the MAC is already what is left
 * after them (IEEE 802.3). */
static const struct phy {
	const char *name;
	uint64_t mac_num_bps, mac_den;
	const char *code;
} phys[] = {
	{ "10base-t", 10000000, 1, "Manchester, 20 MBd" },
	{ "100base-x", 100000000, 1, "4B/5B, 125 MBd" },
	{ "1000base-x", 1000000000, 1, "8b/10b, 1.25 GBd" },
	{ "1000base-t", 1000000000, 1, "PAM-5 on 4 pairs, 125 MBd each" },
	{ "2.5gbase-t", 2500000000, 1, "64b/65b, DSQ128, LDPC on 4 pairs, "
	    "200 MBd each" },
	{ "5gbase-t", 5000000000, 1, "64b/65b, DSQ128, LDPC on 4 pairs, "
	    "400 MBd each" },
	{ "10gbase-t", 10000000000, 1, "64b/65b, DSQ128, LDPC on 4 pairs, "
	    "800 MBd each" },
	{ "10gbase-r", 10000000000, 1, "64b/66b, 10.3125 GBd" },
	/* WAN PHY: 64b/66b in the payload of STS-192c, 9584.64 Mbit/s */
	{ "10gbase-w", 9584640000 * 64, 66, "64b/66b in STS-192c, "
	    "9.95328 GBd" },
	{ "25gbase-r", 25000000000, 1, "64b/66b, or 256b/257b and "
	    "RS(528,514), 25.78125 GBd" },
	{ "40gbase-r", 40000000000, 1, "64b/66b, 4 lanes of 10.3125 GBd" },
	{ "50gbase-r", 50000000000, 1, "256b/257b and RS(544,514), PAM4, "
	    "26.5625 GBd" },
	{ "100gbase-r", 100000000000, 1, "64b/66b, or 256b/257b and "
	    "RS(528,514), 4 lanes of 25.78125 GBd" },
	{ "200gbase-r", 200000000000, 1, "256b/257b and RS(544,514), PAM4, "
	    "4 lanes of 26.5625 GBd" },
	{ "400gbase-r", 400000000000, 1, "256b/257b and RS(544,514), PAM4, "
	    "8 lanes of 26.5625 GBd or 4 of 53.125 GBd" },
};
#define PHYS (sizeof(phys) / sizeof(phys[0]))

/* The same names in the same order; a test compares them. */
static const struct choice phy_choices[] = {
	{ "10base-t", 0 }, { "100base-x", 1 }, { "1000base-x", 2 },
	{ "1000base-t", 3 }, { "2.5gbase-t", 4 }, { "5gbase-t", 5 },
	{ "10gbase-t", 6 }, { "10gbase-r", 7 }, { "10gbase-w", 8 },
	{ "25gbase-r", 9 }, { "40gbase-r", 10 }, { "50gbase-r", 11 },
	{ "100gbase-r", 12 }, { "200gbase-r", 13 }, { "400gbase-r", 14 },
	{ NULL, 0 },
};
static_assert(sizeof(phy_choices) / sizeof(phy_choices[0]) == PHYS + 1,
    "a choice for every row");

static const struct field fields[] = {
	MEDIUM_KIND_ROW,
	{ .name = "line-rate", .kind = FIELD_QUANTITY,
	  .dimension = DIMENSION_RATE,
	  .offset = offsetof(struct parameters, line_rate_bps),
	  .min = 1, .max = RATE_MAX_BPS, .per_direction = true,
	  .help = "the MAC rate that names the interface, e.g. 1 Gbit/s" },
	{ .name = "phy", .kind = FIELD_CHOICE,
	  .offset = offsetof(struct parameters, phy), .choices = phy_choices,
	  .help = "its physical layer, in place of line-rate or beside it" },
	MEDIUM_DUPLEX_ROW(struct parameters, duplex, "half: both directions "
	    "share the line, collisions are not counted"),
	{ .name = NULL },
};

static int
check(void *base, const struct node *node, struct error *err)
{
	struct parameters *p = base;
	const struct phy *phy;

	if (p->phy == FIELD_UNSET) {
		if (p->line_rate_bps[0] == FIELD_UNSET ||
		    p->line_rate_bps[1] == FIELD_UNSET)
			return node_error(node, err, "ethernet: 'line-rate' is "
			    "missing, allowed: line-rate, or phy");
		return 0;
	}
	phy = &phys[p->phy];
	for (int d = 0; d < DIRECTIONS_SINGLE; d++)
		if (p->line_rate_bps[d] != FIELD_UNSET &&
		    p->line_rate_bps[d] != phy->mac_num_bps / phy->mac_den)
			return node_error(medium_place(node, "line-rate"), err,
			    "line-rate: %s has %llu bit/s, allowed: that, or "
			    "leave it out", phy->name, (unsigned long long)
			    (phy->mac_num_bps / phy->mac_den));
	return 0;
}

/* The line codes that a rate may have. */
static void
note_codes(uint64_t line_bps, struct medium_capacity *out)
{
	bool named = false;

	for (size_t i = 0; i < PHYS; i++) {
		if (phys[i].mac_num_bps != line_bps || phys[i].mac_den != 1)
			continue;
		medium_add_note(out, "%s: %s, already paid for by the symbol "
		    "rate", phys[i].name, phys[i].code);
		named = true;
	}
	if (!named)
		medium_add_note(out, "no Ethernet interface is named by this "
		    "rate: confirm it");
}

static int
capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct parameters *p = base;

	(void)err;
	out->duplex = (enum duplex)p->duplex;
	if (p->phy == FIELD_UNSET) {
		out->line_bps =
		    fraction_whole(p->line_rate_bps[load->direction]);
		note_codes(p->line_rate_bps[load->direction], out);
		return 0;
	}
	out->line_bps = fraction_make(phys[p->phy].mac_num_bps,
	    phys[p->phy].mac_den);
	medium_add_note(out, "%s: %s, already paid for by the symbol rate",
	    phys[p->phy].name, phys[p->phy].code);
	return 0;
}

const struct medium medium_ethernet = {
	.name = "ethernet",
	.title = "Ethernet, 10 Mbit/s to 400 Gbit/s",
	.fields = fields,
	.check = check,
	.capacity = capacity,
	.carries = (const char *const[]){ "ethernet", NULL },
	.duplex = DUPLEX_FULL,
	.tolerance_ppm = 100,		/* RFC 5180 appendix A.1 */
	.accuracy = ACCURACY_EXACT,
	.accuracy_note = "the clocks of two interfaces may differ: each within "
	    "100 ppm of the name (RFC 5180 A.1)",
	.formula = "line = line-rate; line code and FEC are already paid for "
	    "by the symbol rate; 10gbase-w: 9584.64 Mbit/s * 64/66",
	.source = "IEEE 802.3",
};
