/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "judge/ledger.h"

#include <assert.h>
#include <inttypes.h>
#include <math.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>

#include "error.h"

/* What the rows of the table below look at. */
struct account {
	const struct ceiling *ceiling;
	const struct trial_run *trials;
	size_t trials_count;
	enum direction direction;
};

/* A cause: what one trial says it cost, in bit/s of payload; false where the
 * trial holds no evidence of it.  A cause that costs nothing has no entry. */
struct cause {
	const char *name;
	bool (*cost)(const struct account *account,
	    const struct trial_run *run, double *bps);
	void (*explain)(const struct account *account, size_t trials,
	    double bps, char *buf, size_t size);
};

static uint64_t
sender_value(const struct account *account, const struct trial_run *run,
    enum tcp_sample_field field)
{
	const struct direction_run *way = &run->directions[account->direction];

	return way->sender_reported ? way->sender.last.value[field]
	    : UNKNOWN_U64;
}

static uint64_t
declared_segment_bytes(const struct ceiling *ceiling)
{
	return (uint64_t)(ceiling->level_bytes_num[LEVEL_PAYLOAD] /
	    ceiling->level_bytes_den);
}

/* Payload rate with segments of another size: the octets around a segment
 * stay, so p / b becomes m / (m + b - p), where p is the payload and b are the
 * octets of a packet at the level of the binding bound. */
static double
rate_with_segments(const struct ceiling *ceiling, uint64_t segment_bytes)
{
	double den = (double)ceiling->level_bytes_den;
	double p = (double)ceiling->level_bytes_num[LEVEL_PAYLOAD] / den;
	double b = (double)ceiling->level_bytes_num[
	    ceiling->binding_counted_at] / den;
	double m = (double)segment_bytes;

	return (double)ceiling->rate_bps[LEVEL_PAYLOAD] * (b / p) *
	    (m / (m + b - p));
}

static bool
segment_size_cost(const struct account *account, const struct trial_run *run,
    double *bps)
{
	const struct ceiling *ceiling = account->ceiling;
	uint64_t mss = sender_value(account, run, TCP_SAMPLE_snd_mss_bytes);

	/* Above TCP a record layer's octets depend on the segment: no exact
	 * figure. */
	if (ceiling->protocol != PROTOCOL_TCP || mss == UNKNOWN_U64 ||
	    mss == 0 || !ceiling->has_level[ceiling->binding_counted_at] ||
	    declared_segment_bytes(ceiling) == 0)
		return false;
	*bps = mss == declared_segment_bytes(ceiling) ? 0.0
	    : (double)ceiling->rate_bps[LEVEL_PAYLOAD] -
	    rate_with_segments(ceiling, mss);
	return true;
}

static void
segment_size_explain(const struct account *account, size_t trials, double bps,
    char *buf, size_t size)
{
	uint64_t mss = UNKNOWN_U64;

	(void)bps;
	for (size_t i = 0; i < account->trials_count; i++) {
		const struct trial_run *run = &account->trials[i];
		uint64_t seen;

		if (run->trial.direction != account->direction ||
		    !trial_run_counts(run, account->direction))
			continue;
		seen = sender_value(account, run, TCP_SAMPLE_snd_mss_bytes);
		if (seen < mss)
			mss = seen;
	}
	(void)snprintf(buf, size, "segments of %" PRIu64 " B were sent where "
	    "the declared layers and MTU give %" PRIu64 " B (TCP_INFO, %zu "
	    "trial%s)", mss, declared_segment_bytes(account->ceiling), trials,
	    trials == 1 ? "" : "s");
}

static bool
retransmitted_cost(const struct account *account, const struct trial_run *run,
    double *bps)
{
	uint64_t sent = sender_value(account, run, TCP_SAMPLE_bytes_sent);
	uint64_t again = sender_value(account, run, TCP_SAMPLE_bytes_retrans);

	/* The sample is of the first stream, so it must be the only one. */
	if (run->trial.streams != 1 || sent == UNKNOWN_U64 ||
	    again == UNKNOWN_U64 || again >= sent)
		return false;
	/* bytes_sent holds every repetition (RFC 4898 HCDataOctets). */
	*bps = (double)run->directions[account->direction].payload_bps *
	    ((double)again / (double)(sent - again));
	return true;
}

static void
retransmitted_explain(const struct account *account, size_t trials, double bps,
    char *buf, size_t size)
{
	(void)account;
	(void)bps;
	(void)snprintf(buf, size, "payload sent again, bytes_retrans / "
	    "(bytes_sent - bytes_retrans) of the achieved rate (TCP_INFO, "
	    "median of %zu trial%s)", trials, trials == 1 ? "" : "s");
}

static const struct cause causes[] = {
	{ "segment-size", segment_size_cost, segment_size_explain },
	{ "retransmitted", retransmitted_cost, retransmitted_explain },
};

/* The cost in each counted one-way trial; the number of them that know it. */
static size_t
gather(const struct account *account, const struct cause *cause,
    double values[])
{
	size_t count = 0;

	for (size_t i = 0; i < account->trials_count; i++) {
		const struct trial_run *run = &account->trials[i];

		if (run->trial.direction == account->direction &&
		    trial_run_counts(run, account->direction) &&
		    cause->cost(account, run, &values[count]))
			count++;
	}
	return count;
}

static bool
make_entry(const struct account *account, const struct cause *cause,
    double values[], struct ledger_entry *out)
{
	struct median_estimate estimate;
	struct error err;
	size_t count = gather(account, cause, values);

	if (count == 0 || statistic_median(values, count, 0.95, 0.99,
	    &estimate, &err) == -1)
		return false;
	*out = (struct ledger_entry){ .direction = account->direction };
	out->bps = llround(estimate.median);
	if (out->bps == 0)
		return false;
	out->uncertainty_bps =
	    (uint64_t)ceil((estimate.max - estimate.min) / 2);
	(void)snprintf(out->name, sizeof(out->name), "%s", cause->name);
	cause->explain(account, count, estimate.median, out->evidence,
	    sizeof(out->evidence));
	return true;
}

static const char *
rest_evidence(int64_t rest_bps, size_t causes_found)
{
	if (rest_bps == 0)
		return "nothing is left to explain";
	if (rest_bps > 0)
		return "no evidence in these trials accounts for it";
	return causes_found > 0
	    ? "the causes found claim more than is missing"
	    : "the achieved rate lies above the ceiling";
}

/* The rest carries the sampling uncertainty of the achieved median. */
static void
make_rest(enum direction direction, int64_t rest_bps, size_t causes_found,
    const struct median_estimate *achieved, struct ledger_entry *out)
{
	double low = achieved->has_interval ? achieved->low : achieved->min;
	double high = achieved->has_interval ? achieved->high : achieved->max;

	*out = (struct ledger_entry){ .direction = direction,
		.bps = rest_bps };
	out->uncertainty_bps = (uint64_t)ceil(fmax(achieved->median - low,
	    high - achieved->median));
	(void)snprintf(out->name, sizeof(out->name), "unexplained");
	(void)snprintf(out->evidence, sizeof(out->evidence), "%s",
	    rest_evidence(rest_bps, causes_found));
}

size_t
ledger_make(const struct ceiling *ceiling, const struct trial_run trials[],
    size_t trials_count, const struct median_estimate *achieved_bps,
    struct ledger_entry out[], size_t max)
{
	const struct account account = { ceiling, trials, trials_count,
		ceiling->direction };
	double *values;
	int64_t rest_bps;
	size_t count = 0;

	assert(ceiling->direction < DIRECTIONS_SINGLE);
	if (ceiling->reference || max == 0)
		return 0;
	rest_bps = (int64_t)ceiling->rate_bps[LEVEL_PAYLOAD] -
	    (int64_t)floor(achieved_bps->median);
	/* Without memory everything stays unexplained, which is still true. */
	values = calloc(trials_count + 1, sizeof(*values));
	for (size_t i = 0; values != NULL &&
	    i < sizeof(causes) / sizeof(*causes) && count + 1 < max; i++) {
		if (!make_entry(&account, &causes[i], values, &out[count]))
			continue;
		rest_bps -= out[count].bps;
		count++;
	}
	free(values);
	make_rest(ceiling->direction, rest_bps, count, achieved_bps,
	    &out[count]);
	return count + 1;
}
