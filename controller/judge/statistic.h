/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * statistic: the one place that calls R's mathematics library.
 *
 * Exact distributions come from the library and none is written again.  Main
 * thread only; arguments are checked before the call.  Otherwise pure.
 */
#ifndef PLAFOND_STATISTIC_H
#define PLAFOND_STATISTIC_H

#include <stdbool.h>
#include <stddef.h>

struct error;

/* Median by the mean of the middle two (Hyndman-Fan type 7 at one half), and a
 * distribution-free interval of order statistics that holds the median of the
 * population with at least the stated confidence (binomial, p = 1/2). */
struct median_estimate {
	size_t n;
	double median, min, max;
	bool has_interval;	/* n is enough for the confidence */
	double low, high;	/* two-sided interval, order statistics */
	double confidence;	/* wanted, e.g. 0.95 */
	double coverage;	/* reached, >= confidence */
	/* One-sided bounds at `bound_confidence` (0.99): the population median
	 * is not below lower / not above upper. */
	bool has_bounds;
	double lower, upper;
	double bound_confidence, bound_coverage;
};

/* values need not be sorted; n >= 1, all finite; -1: ERROR_INPUT. */
int statistic_median(const double values[], size_t n, double confidence,
    double bound_confidence, struct median_estimate *out, struct error *err);

#endif
