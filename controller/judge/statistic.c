/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "judge/statistic.h"

#include <assert.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#define MATHLIB_STANDALONE
#include <Rmath.h>

#include "error.h"

/* Far above any task; keeps the library's loops short. */
#define VALUES_MAX 1000000

/* Slack where a binomial sum is compared with a stated level: the library's
 * sums are good to about 1e-14, no level anyone states is finer than this. */
#define LEVEL_SLACK 1e-12

static int
compare_doubles(const void *a, const void *b)
{
	double left = *(const double *)a, right = *(const double *)b;

	return (left > right) - (left < right);
}

/* P(X <= x) for X binomial(n, 1/2); x may be -1. */
static double
binomial_half(double x, size_t n)
{
	return x < 0 ? 0.0 : pbinom(x, (double)n, 0.5, 1, 0);
}

/* Largest k, 0 where there is none, with P(X <= k - 1) <= tail: then the k-th
 * smallest of n values is above the median of the population with at most
 * that probability (David and Nagaraja, Order Statistics, section 7.1). */
static size_t
order_rank(size_t n, double tail)
{
	double k = qbinom(tail, (double)n, 0.5, 1, 0);

	while (k > 0 && binomial_half(k - 1, n) > tail + LEVEL_SLACK)
		k--;
	while (k < (double)n && binomial_half(k, n) <= tail + LEVEL_SLACK)
		k++;
	return (size_t)k;
}

static void
estimate_interval(const double sorted[], size_t n, struct median_estimate *out)
{
	size_t k = order_rank(n, (1 - out->confidence) / 2);

	/* Beyond the middle both ends would change places. */
	if (k == 0 || 2 * k > n)
		return;
	out->has_interval = true;
	out->low = sorted[k - 1];
	out->high = sorted[n - k];
	out->coverage = 1 - 2 * binomial_half((double)k - 1, n);
}

static void
estimate_bounds(const double sorted[], size_t n, struct median_estimate *out)
{
	size_t k = order_rank(n, 1 - out->bound_confidence);

	if (k == 0 || 2 * k > n)
		return;
	out->has_bounds = true;
	out->lower = sorted[k - 1];
	out->upper = sorted[n - k];
	out->bound_coverage = 1 - binomial_half((double)k - 1, n);
}

static int
check_values(const double values[], size_t n, struct error *err)
{
	if (n == 0 || n > VALUES_MAX)
		return error_set(err, ERROR_INPUT,
		    "median of %zu values; allowed 1 to %d", n, VALUES_MAX);
	for (size_t i = 0; i < n; i++)
		if (!isfinite(values[i]))
			return error_set(err, ERROR_INPUT,
			    "value %zu of %zu is not a number", i + 1, n);
	return 0;
}

int
statistic_median(const double values[], size_t n, double confidence,
    double bound_confidence, struct median_estimate *out, struct error *err)
{
	double *sorted;

	assert(confidence > 0.5 && confidence < 1);
	assert(bound_confidence > 0.5 && bound_confidence < 1);
	if (check_values(values, n, err) == -1)
		return -1;
	sorted = malloc(n * sizeof(*sorted));
	if (sorted == NULL)
		return error_set(err, ERROR_INTERNAL, "out of memory");
	memcpy(sorted, values, n * sizeof(*sorted));
	qsort(sorted, n, sizeof(*sorted), compare_doubles);
	memset(out, 0, sizeof(*out));
	out->n = n;
	out->min = sorted[0];
	out->max = sorted[n - 1];
	/* Halved first: the sum of two large values may overflow. */
	out->median = n % 2 == 1 ? sorted[n / 2]
	    : sorted[n / 2 - 1] / 2 + sorted[n / 2] / 2;
	out->confidence = confidence;
	out->bound_confidence = bound_confidence;
	estimate_interval(sorted, n, out);
	estimate_bounds(sorted, n, out);
	free(sorted);
	return 0;
}
