/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/line_settings.h"

#include <inttypes.h>

#include "error.h"
#include "rehearse/truth.h"

#define COUNT(a) (sizeof(a) / sizeof(*(a)))

void
line_settings_init(struct line_settings *settings)
{
	const struct octets plain = { .added_den = 1 };

	*settings = (struct line_settings){
		.octets = plain,
		.policer.octets = plain,
		.shaper.octets = plain,
		.bursts = { .r = 1, .k = 1 },
		.interval_ns = 1000000000,
		.intervals = 600,
	};
}

struct whole_limit {
	const char *name;
	size_t offset;
	uint64_t min, max;
	bool zero;		/* 0 is allowed too: off */
};

#define WHOLE(field, min, max, zero) \
	{ #field, offsetof(struct line_settings, field), min, max, zero }
#define OCTETS(field) \
	WHOLE(field.added_den, 1, OCTETS_DEN_MAX, false), \
	WHOLE(field.least, 0, OCTETS_ADDED_MAX, true), \
	WHOLE(field.added_num, 0, OCTETS_DEN_MAX * OCTETS_ADDED_MAX, true)

static const struct whole_limit whole_limits[] = {
	WHOLE(mtu_bytes, 68, LINE_PACKET_BYTES_MAX, true),	/* RFC 791 */
	WHOLE(policer.rate_bps, LINE_RATE_MIN_BPS, LINE_RATE_MAX_BPS, true),
	WHOLE(policer.burst_bytes, 0, LINE_BYTES_MAX, true),
	OCTETS(policer.octets),
	WHOLE(queue_bytes, 0, LINE_BYTES_MAX, true),
	WHOLE(queue_ns, 0, LINE_QUEUE_MAX_NS, true),
	WHOLE(shaper.rate_bps, LINE_RATE_MIN_BPS, LINE_RATE_MAX_BPS, true),
	WHOLE(shaper.burst_bytes, 0, LINE_BYTES_MAX, true),
	OCTETS(shaper.octets),
	WHOLE(rate_bps, LINE_RATE_MIN_BPS, LINE_RATE_MAX_BPS, true),
	OCTETS(octets),
	WHOLE(step_count, 0, SERIAL_STEPS_MAX, true),
	WHOLE(background.rate_bps, 1, LINE_RATE_MAX_BPS, true),
	WHOLE(background.packet_bytes, 20, LINE_PACKET_BYTES_MAX, true),
	WHOLE(outage_count, 0, LINE_OUTAGES_MAX, true),
	WHOLE(propagation_ns, 0, LINE_DELAY_MAX_NS, true),
	WHOLE(variation.spread_ns, 1, LINE_DELAY_MAX_NS, true),
	WHOLE(reordering.packets, 0, LINE_HELD_MAX, true),
	WHOLE(reordering.extra_ns, 0, LINE_DELAY_MAX_NS, true),
	WHOLE(duplication.extra_ns, 0, LINE_DELAY_MAX_NS, true),
	WHOLE(interval_ns, 1000000, LINE_TIME_MAX_NS, false),
	WHOLE(intervals, 1, TRUTH_INTERVALS_MAX, false),
};

static const struct {
	const char *name;
	size_t offset;
} ratios[] = {
	{ "loss_ratio", offsetof(struct line_settings, loss_ratio) },
	{ "bursts.p", offsetof(struct line_settings, bursts.p) },
	{ "bursts.r", offsetof(struct line_settings, bursts.r) },
	{ "bursts.h", offsetof(struct line_settings, bursts.h) },
	{ "bursts.k", offsetof(struct line_settings, bursts.k) },
	{ "variation.correlation",
	    offsetof(struct line_settings, variation.correlation) },
	{ "reordering.ratio",
	    offsetof(struct line_settings, reordering.ratio) },
	{ "duplication.ratio",
	    offsetof(struct line_settings, duplication.ratio) },
};

static int
check_whole(const struct line_settings *settings,
    const struct whole_limit *limit, struct error *err)
{
	uint64_t found = *(const uint64_t *)(const void *)
	    ((const char *)settings + limit->offset);

	if ((found >= limit->min && found <= limit->max) ||
	    (found == 0 && limit->zero))
		return 0;
	return error_set(err, ERROR_INPUT, "%s: found %" PRIu64
	    ", allowed %s%" PRIu64 " to %" PRIu64, limit->name, found,
	    limit->zero && limit->min > 0 ? "0 (off) or " : "", limit->min,
	    limit->max);
}

_Static_assert(sizeof(size_t) == sizeof(uint64_t),
    "counts are checked as uint64_t");

static int
check_ranges(const struct line_settings *settings, struct error *err)
{
	double found;

	for (size_t i = 0; i < COUNT(whole_limits); i++)
		if (check_whole(settings, &whole_limits[i], err) == -1)
			return -1;
	for (size_t i = 0; i < COUNT(ratios); i++) {
		found = *(const double *)(const void *)
		    ((const char *)settings + ratios[i].offset);
		if (!(found >= 0 && found <= 1))	/* NAN as well */
			return error_set(err, ERROR_INPUT,
			    "%s: found %g, allowed 0 to 1", ratios[i].name,
			    found);
	}
	return 0;
}

static int
check_octets(const char *name, const struct octets *octets, struct error *err)
{
	if (octets->added_num <= OCTETS_ADDED_MAX * octets->added_den)
		return 0;
	return error_set(err, ERROR_INPUT, "%s: found %" PRIu64 "/%" PRIu64
	    " octets added, allowed 0 to %" PRIu64, name, octets->added_num,
	    octets->added_den, OCTETS_ADDED_MAX);
}

static int
check_steps(const struct line_settings *settings, struct error *err)
{
	const struct serial_step *step;
	uint64_t least_ns = 1;

	if (settings->step_count > 0 && settings->rate_bps == 0)
		return error_set(err, ERROR_INPUT,
		    "steps: found %zu on a line without a rate, allowed "
		    "where rate_bps is set", settings->step_count);
	for (size_t i = 0; i < settings->step_count; i++) {
		step = &settings->steps[i];
		if (step->at_ns < least_ns || step->at_ns > LINE_TIME_MAX_NS)
			return error_set(err, ERROR_INPUT,
			    "steps[%zu].at_ns: found %" PRIu64 ", allowed %"
			    PRIu64 " to %" PRIu64, i, step->at_ns, least_ns,
			    LINE_TIME_MAX_NS);
		if (step->rate_bps < LINE_RATE_MIN_BPS ||
		    step->rate_bps > LINE_RATE_MAX_BPS)
			return error_set(err, ERROR_INPUT,
			    "steps[%zu].rate_bps: found %" PRIu64
			    ", allowed %" PRIu64 " to %" PRIu64
			    " (an outage is not a rate)", i, step->rate_bps,
			    LINE_RATE_MIN_BPS, LINE_RATE_MAX_BPS);
		least_ns = step->at_ns + 1;
	}
	return 0;
}

static int
check_outages(const struct line_settings *settings, struct error *err)
{
	const struct line_outage *outage;
	uint64_t least_ns = 0;

	for (size_t i = 0; i < settings->outage_count; i++) {
		outage = &settings->outages[i];
		if (outage->from_ns < least_ns ||
		    outage->to_ns <= outage->from_ns ||
		    outage->to_ns > LINE_TIME_MAX_NS)
			return error_set(err, ERROR_INPUT,
			    "outages[%zu]: found %" PRIu64 " to %" PRIu64
			    " ns, allowed %" PRIu64 " to %" PRIu64
			    ", the end after the beginning", i,
			    outage->from_ns, outage->to_ns, least_ns,
			    LINE_TIME_MAX_NS);
		least_ns = outage->to_ns;
	}
	return 0;
}

static int
check_background(const struct line_settings *settings, struct error *err)
{
	const struct background_settings *background = &settings->background;
	uint64_t most_bps = background->packet_bytes * 8 *
	    LINE_BACKGROUND_PPS_MAX;

	if (background->rate_bps == 0)
		return 0;
	if (background->packet_bytes == 0 || background->rate_bps > most_bps)
		return error_set(err, ERROR_INPUT,
		    "background: found %" PRIu64 " bit/s in packets of %"
		    PRIu64 " B, allowed up to %" PRIu64 " packets a second",
		    background->rate_bps, background->packet_bytes,
		    LINE_BACKGROUND_PPS_MAX);
	if (settings->rate_bps == 0 && settings->shaper.rate_bps == 0)
		return error_set(err, ERROR_INPUT,
		    "background: found on a line without a rate, allowed "
		    "where rate_bps or shaper.rate_bps is set");
	return 0;
}

static int
check_random(const struct line_settings *settings, struct error *err)
{
	const struct variation_settings *variation = &settings->variation;
	const struct line_reordering *reordering = &settings->reordering;

	if (settings->bursts.p > 0 && settings->bursts.r == 0)
		return error_set(err, ERROR_INPUT,
		    "bursts.r: found 0, allowed above 0 to 1 (the bad state "
		    "would never end)");
	if ((unsigned)variation->kind >= VARIATION_KINDS ||
	    (variation->kind == VARIATION_NONE) != (variation->spread_ns == 0))
		return error_set(err, ERROR_INPUT,
		    "variation: found kind %d with a spread of %" PRIu64
		    " ns, allowed a kind and a spread above 0, or neither",
		    (int)variation->kind, variation->spread_ns);
	if (variation->correlation == 1)
		return error_set(err, ERROR_INPUT, "variation.correlation: "
		    "found 1, allowed 0 to below 1");
	if (reordering->ratio > 0 && reordering->extra_ns == 0)
		return error_set(err, ERROR_INPUT, "reordering.extra_ns: "
		    "found 0, allowed 1 to %" PRIu64, LINE_DELAY_MAX_NS);
	return 0;
}

int
line_check(const struct line_settings *settings, struct error *err)
{
	if (check_ranges(settings, err) == -1 ||
	    check_octets("octets", &settings->octets, err) == -1 ||
	    check_octets("policer.octets", &settings->policer.octets,
		err) == -1 ||
	    check_octets("shaper.octets", &settings->shaper.octets,
		err) == -1 ||
	    check_steps(settings, err) == -1 ||
	    check_outages(settings, err) == -1 ||
	    check_background(settings, err) == -1)
		return -1;
	return check_random(settings, err);
}
