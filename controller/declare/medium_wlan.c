/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Medium Wi-Fi: the rate of the PHY, and what taking the channel costs. */
#include <assert.h>

#include "clock.h"
#include "declare/medium_rows.h"
#include "declare/wlan_declaration.h"
#include "error.h"

/* MSDU of 2304 octets, LLC/SNAP of 8 (IEEE 802.11, from memory). */
#define PACKET_MAX_BYTES (2304 - 8)

static_assert(sizeof(struct wlan_parameters) <= MEDIUM_PARAMETERS_BYTES,
    "parameters fit");

static void
make_link(const struct wlan_parameters *p, struct wlan_phy *phy,
    struct wlan_access *access)
{
	enum wlan_protection protection = (enum wlan_protection)p->protection;
	bool legacy = p->generation < WLAN_N;
	struct wlan_mode mode;
	struct wlan_phy guard;

	if (legacy) {
		*phy = wlan_phy_of_rate(p->phy_rate_bps,
		    p->short_preamble == 1);
	} else {
		mode = wlan_mode_of(p);
		*phy = wlan_phy_of_mode(&mode);
	}
	guard = wlan_phy_of_rate(p->protection_bps, p->short_preamble == 1);
	/* What stations of 802.11b shall hear goes with their long slot. */
	*access = wlan_access_of((enum wlan_generation)p->generation,
	    (enum wlan_band)p->band,
	    protection != WLAN_PROTECTION_NONE && guard.dsss);
	access->answer = wlan_phy_of_rate(p->control_bps,
	    p->short_preamble == 1);
	access->guard = guard;
	access->protection = protection;
	access->aggregated = p->aggregation == 1;
	access->ampdu_octets = p->ampdu_octets;
	access->window_frames = p->window_frames;
}

static uint64_t
octets_up(struct fraction octets)
{
	return fraction_floor(octets) + (octets.num % octets.den != 0);
}

/* The channel time that the acknowledgements of one exchange's frames take:
 * they go together in exchanges of their own. */
static uint64_t
acks_ns(const struct wlan_phy *phy, const struct wlan_access *access,
    const struct medium_load *load, uint64_t frames)
{
	struct fraction acks = fraction_divide(fraction_whole(frames),
	    load->segments_per_ack);
	struct wlan_exchange exchange;
	struct fraction ns;

	if (load->ack_octets.num == 0)
		return 0;
	if (fraction_floor(acks) > 0)	/* else one of several exchanges' */
		acks = fraction_whole(octets_up(acks));
	wlan_exchange_make(phy, access, octets_up(load->ack_octets),
	    octets_up(acks), &exchange);
	ns = fraction_multiply(fraction_whole(wlan_exchange_ns(&exchange)),
	    acks);
	if (fraction_floor(acks) > 0)
		ns = fraction_divide(ns, fraction_whole(exchange.frames));
	return octets_up(ns);
}

/* Steps of the time that a number of bits takes. */
struct timing {
	struct medium_capacity *out;
	uint64_t bits, ns;
};

static void
add_time(struct timing *timing, const char *what, uint64_t ns,
    const char *source)
{
	if (ns == 0)
		return;
	timing->ns += ns;
	medium_add_step(timing->out, what, fraction_whole((uint64_t)(
	    (uint128)timing->bits * NS_PER_S / timing->ns)), source);
}

static void
add_steps(const struct wlan_phy *phy, const struct wlan_exchange *exchange,
    bool aggregated, uint64_t tcp_ns, struct medium_capacity *out)
{
	struct timing timing = { .out = out,
		.bits = exchange->frames * exchange->mpdu_octets * 8 };

	if (exchange->subframe_octets != exchange->mpdu_octets)
		medium_add_step(out, "A-MPDU delimiters and padding",
		    fraction_whole(fraction_floor(fraction_multiply(
		    phy->rate_bps, fraction_make(exchange->mpdu_octets,
		    exchange->subframe_octets)))), "IEEE 802.11 s9.7");
	add_time(&timing, "symbol padding", exchange->data_ns,
	    "IEEE 802.11 s17, 19, 21");
	add_time(&timing, "preamble", exchange->preamble_ns,
	    "IEEE 802.11 s17, 19, 21");
	add_time(&timing, "interframe spaces", exchange->spaces_ns,
	    "IEEE 802.11 s10.3.2.3");
	add_time(&timing, "mean backoff", exchange->backoff_ns,
	    "IEEE 802.11 s10.3.3");
	add_time(&timing, aggregated ? "block acknowledgement" :
	    "acknowledgement", exchange->answer_ns, "IEEE 802.11 s10.3.2");
	add_time(&timing, "protection", exchange->protection_ns,
	    "IEEE 802.11 s10.3.2.9");
	add_time(&timing, "TCP acknowledgements", tcp_ns,
	    "RFC 9293 s3.8.6.3");
}

static void
add_notes(const struct wlan_parameters *p, const struct wlan_phy *phy,
    const struct wlan_exchange *exchange, uint64_t tcp_ns,
    struct medium_capacity *out)
{
	double phy_mbps = fraction_double(phy->rate_bps) / 1e6;

	if (p->generation >= WLAN_N)
		medium_add_note(out, "%s %s, %llu stream%s, %llu MHz, guard "
		    "interval %llu ns: %.1f Mbit/s", wlan_standard_of(p)->name,
		    wlan_modulation_name(p->mcs),
		    (unsigned long long)p->streams, p->streams == 1 ? "" : "s",
		    (unsigned long long)wlan_mode_of(p).width_mhz,
		    (unsigned long long)p->guard_ns, phy_mbps);
	medium_add_note(out, "frames in one go: %llu of %llu octets, %.1f us "
	    "of a cycle of %.1f us", (unsigned long long)exchange->frames,
	    (unsigned long long)exchange->mpdu_octets,
	    (double)(exchange->preamble_ns + exchange->data_ns) / 1e3,
	    (double)(wlan_exchange_ns(exchange) + tcp_ns) / 1e3);
	if (exchange->frames == 1)
		medium_add_note(out, "without aggregation the cycle decides, "
		    "not the rate of the PHY");
	medium_add_note(out, "one station in clean air; TCP usually reaches "
	    "60 to 75 %% of the PHY's rate: %.1f to %.1f Mbit/s",
	    0.6 * phy_mbps, 0.75 * phy_mbps);
}

static int
capacity(const void *base, const struct medium_load *load,
    struct medium_capacity *out, struct error *err)
{
	const struct wlan_parameters *p = base;
	struct wlan_access access;
	struct wlan_exchange exchange;
	struct wlan_phy phy;
	uint64_t tcp_ns;

	(void)err;
	make_link(p, &phy, &access);
	wlan_exchange_make(&phy, &access, octets_up(load->octets[LEVEL_LINE]),
	    access.aggregated ? access.window_frames : 1, &exchange);
	tcp_ns = acks_ns(&phy, &access, load, exchange.frames);
	out->line_bps = fraction_whole(fraction_floor(phy.rate_bps));
	out->contention = p->contention;
	out->counts_acks = true;
	add_steps(&phy, &exchange, access.aggregated, tcp_ns, out);
	add_notes(p, &phy, &exchange, tcp_ns, out);
	return 0;
}

const struct medium medium_wlan = {
	.name = "wlan",
	.title = "Wi-Fi, 802.11a/b/g/n/ac/ax/be",
	.fields = wlan_fields,
	.check = wlan_check,
	.capacity = capacity,
	.carries = (const char *const[]){ "wlan", NULL },
	.max_mtu_bytes = PACKET_MAX_BYTES,
	.duplex = DUPLEX_SHARED,
	.accuracy = ACCURACY_MODEL,
	.accuracy_note = "model of one station in clean air, an upper limit: "
	    "PHY rates are the standard's, but other stations, "
	    "retransmissions and rate adaptation take 10 to 40 % of the "
	    "result, and TCP in an acceptance usually reaches 60 to 75 % of "
	    "the PHY's rate",
	.memory = "durations of VHT-SIG-B and of the EHT fields, the number "
	    "of long training fields and their length at 3200 ns, octets of "
	    "a block acknowledgement, MSDU of 2304 octets",
	.formula = "line = subcarriers * bits * coding * streams / symbol; "
	    "frames * MPDU / (AIFS + backoff + preamble + symbols + SIFS + "
	    "acknowledgement + those of TCP)",
	.source = "IEEE 802.11-2020, 802.11ax, 802.11be",
};
