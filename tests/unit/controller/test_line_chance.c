/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <math.h>
#include <stdlib.h>

#include "rehearse/bursts.h"
#include "rehearse/chance.h"
#include "rehearse/variation.h"

#define N 200000
#define SEED 20120531
#define SIGMAS 5
#define COUNT(a) (sizeof(a) / sizeof(*(a)))

/* SplitMix64 from state 0: from memory, as printed with its reference code. */
static void
a_stream_is_splitmix64(void **state)
{
	const struct chance zero = { 0 };

	(void)state;
	assert_true(chance_u64(zero, 0) == UINT64_C(0xe220a8397b1dcdaf));
	assert_true(chance_u64(zero, 1) == UINT64_C(0x6e789e6aa1b965f4));
	assert_true(chance_u64(zero, 2) == UINT64_C(0x06c45d188009454f));
}

static void
uniform_numbers_have_their_moments_and_no_memory(void **state)
{
	const struct chance chance = chance_stream(SEED, 3);
	const struct chance other = chance_stream(SEED, 4);
	double sum = 0, squares = 0, neighbours = 0, streams = 0, x;

	(void)state;
	for (uint64_t n = 0; n < N; n++) {
		x = chance_uniform(chance, n) - 0.5;
		assert_true(x >= -0.5 && x < 0.5);
		sum += x;
		squares += x * x;
		neighbours += x * (chance_uniform(chance, n + 1) - 0.5);
		streams += x * (chance_uniform(other, n) - 0.5);
	}
	/* Mean 1/2, variance 1/12, that of the square 1/180. */
	assert_true(fabs(sum) < SIGMAS * sqrt(N / 12.0));
	assert_true(fabs(squares - N / 12.0) < SIGMAS * sqrt(N / 180.0));
	assert_true(fabs(neighbours) < SIGMAS * sqrt(N) / 12);
	assert_true(fabs(streams) < SIGMAS * sqrt(N) / 12);
}

static void
normal_numbers_have_their_moments(void **state)
{
	const struct chance chance = chance_stream(SEED, 1);
	double sum = 0, squares = 0, fourths = 0, x;

	(void)state;
	for (uint64_t n = 0; n < N; n++) {
		x = chance_normal(chance, n);
		sum += x;
		squares += x * x;
		fourths += x * x * x * x;
	}
	/* E x^2 = 1, x^4 3, x^8 105: variances 1, 2, 96. */
	assert_true(fabs(sum) < SIGMAS * sqrt(N));
	assert_true(fabs(squares - N) < SIGMAS * sqrt(2.0 * N));
	assert_true(fabs(fourths - 3.0 * N) < SIGMAS * sqrt(96.0 * N));
}

/* RFC 6534 s7.1: loss p / (p + q), mean run 1 / q, with q our r. */
static const struct bursts_settings simple[] = {
	{ 0.01, 0.25, 0, 1 },
	{ 0.001, 0.05, 0, 1 },
	{ 0.2, 0.8, 0, 1 },
	{ 0.02, 1, 0, 1 },
};

static void
runs_of_loss_agree_with_rfc_6534(void **state)
{
	(void)state;
	for (size_t i = 0; i < COUNT(simple); i++) {
		double p = simple[i].p, r = simple[i].r, share = p / (p + r);
		/* Variance of the share in a chain of two states, whose
		 * neighbours correlate by 1 - p - r. */
		double sigma = sqrt(share * (1 - share) / N *
		    (2 - p - r) / (p + r));
		uint64_t lost = 0, runs = 0;
		struct bursts bursts;
		bool before = false, now;

		bursts_init(&bursts, &simple[i], chance_stream(SEED, 1),
		    chance_stream(SEED, 2));
		for (uint64_t n = 0; n < N; n++) {
			now = bursts_lose(&bursts, n);
			lost += now;
			runs += now && !before;
			before = now;
		}
		assert_true(fabs((double)lost / N - share) <
		    SIGMAS * sigma);
		/* A run is geometric: variance (1 - r) / r^2. */
		assert_true(fabs((double)lost / (double)runs - 1 / r) <=
		    SIGMAS * sqrt((1 - r) / (double)runs) / r +
		    1.0 / (double)runs);
		assert_true(fabs(bursts_loss_ratio(&simple[i]) - share) <
		    1e-15);
	}
}

/* Elliott 1963: both states lose.  p 0.02, r 0.1, h 0.5, k 0.99: a sixth of
 * the packets find the bad state; 1/6 * 0.5 + 5/6 * 0.01 = 11/120, by hand. */
static void
loss_in_both_states_adds_up(void **state)
{
	const struct bursts_settings both = { 0.02, 0.1, 0.5, 0.99 };
	struct bursts bursts;
	uint64_t lost = 0;
	/* Of the share of bad states, of which 0.49 is lost more, and of the
	 * losses within them. */
	double sigma = sqrt((0.49 * 0.49 * 5 / 36 * 1.88 / 0.12 +
	    0.25 / 6 + 0.0099 * 5 / 6) / N);

	(void)state;
	assert_true(fabs(bursts_loss_ratio(&both) - 11.0 / 120) < 1e-15);
	bursts_init(&bursts, &both, chance_stream(SEED, 5),
	    chance_stream(SEED, 6));
	for (uint64_t n = 0; n < N; n++)
		lost += bursts_lose(&bursts, n);
	assert_true(fabs((double)lost / N - 11.0 / 120) < SIGMAS * sigma);
}

/* Over 20000 seeds the first packet is lost as often as any: p / (p + r). */
static void
a_burst_may_be_under_way_at_the_first_packet(void **state)
{
	const struct bursts_settings settings = { 0.1, 0.3, 0, 1 };
	struct bursts bursts;
	uint64_t lost = 0;

	(void)state;
	for (uint64_t seed = 0; seed < 20000; seed++) {
		bursts_init(&bursts, &settings, chance_stream(seed, 1),
		    chance_stream(seed, 2));
		lost += bursts_lose(&bursts, 0);
	}
	assert_true(fabs((double)lost - 5000) <
	    SIGMAS * sqrt(20000 * 0.25 * 0.75));
}

static void
bursts_are_off_by_a_p_of_0(void **state)
{
	const struct bursts_settings off = { 0, 0, 0, 0 };
	struct bursts bursts;

	(void)state;
	bursts_init(&bursts, &off, chance_stream(1, 1), chance_stream(1, 2));
	for (uint64_t n = 0; n < 1000; n++)
		assert_false(bursts_lose(&bursts, n));
	assert_true(bursts_loss_ratio(&off) == 0);
}

#define SPREAD_NS 2000000

/* Textbook moments in spreads; variance of the squared deviation is mu_4 -
 * sigma^4.  Correlation of delays whose scores correlate by c: uniform 6 / pi
 * asin(c / 2), Pearson 1907 (from memory); normal c.  That of exponential
 * delays has no short form: 0.5 gives 0.453075, SciPy 1.10, Gauss and Hermite's
 * sum of 150 x 150 terms. */
static const struct {
	enum variation_kind kind;
	double correlation, mean, variance, fourth, delays;
} distributions[] = {
	{ VARIATION_UNIFORM, 0, 0.5, 1 / 12.0, 1 / 80.0, 0 },
	{ VARIATION_NORMAL, 0, 4, 1, 3, 0 },
	{ VARIATION_EXPONENTIAL, 0, 1, 1, 9, 0 },
	{ VARIATION_UNIFORM, 0.5, 0.5, 1 / 12.0, 1 / 80.0, 0.482583740 },
	{ VARIATION_NORMAL, 0.5, 4, 1, 3, 0.5 },
	{ VARIATION_EXPONENTIAL, 0.5, 1, 1, 9, 0.453075020 },
};

static void
draw_delays(size_t row, double x[])
{
	const struct variation_settings settings = {
		.kind = distributions[row].kind,
		.spread_ns = SPREAD_NS,
		.correlation = distributions[row].correlation,
	};
	struct variation variation;

	variation_init(&variation, &settings, chance_stream(SEED, 7));
	for (uint64_t n = 0; n < N; n++)
		x[n] = (double)variation_next_ns(&variation, n) / SPREAD_NS;
}

static void
delays_have_their_moments_and_correlation(void **state)
{
	double *x = malloc(N * sizeof(*x));

	(void)state;
	assert_non_null(x);
	for (size_t i = 0; i < COUNT(distributions); i++) {
		double mean = distributions[i].mean, sum = 0, squares = 0,
		    products = 0, variance = distributions[i].variance;
		/* Correlation lengthens what counts as independent. */
		double c = distributions[i].correlation;
		double wider = SIGMAS * sqrt(N * (1 + c) / (1 - c));

		draw_delays(i, x);
		for (size_t n = 0; n < N; n++) {
			sum += x[n] - mean;
			squares += (x[n] - mean) * (x[n] - mean);
			if (n > 0)
				products += (x[n] - mean) * (x[n - 1] - mean);
		}
		assert_true(fabs(sum) < wider * sqrt(variance));
		assert_true(fabs(squares - N * variance) < wider *
		    sqrt(distributions[i].fourth - variance * variance));
		assert_true(fabs(products / squares -
		    distributions[i].delays) < wider / N * 1.5);
	}
	free(x);
}

static double
cumulative(enum variation_kind kind, double x)
{
	switch (kind) {
	case VARIATION_UNIFORM:
		return x;
	case VARIATION_NORMAL:
		return 0.5 * erfc((4 - x) / sqrt(2));
	case VARIATION_EXPONENTIAL:
		return 1 - exp(-x);
	case VARIATION_NONE:
	case VARIATION_KINDS:
		break;
	}
	return NAN;
}

static int
by_size(const void *left, const void *right)
{
	double a = *(const double *)left, b = *(const double *)right;

	return (a > b) - (a < b);
}

/* Kolmogorov and Smirnov: D sqrt(n) above 2.72 has a chance of 2 exp(-2 *
 * 2.72^2) = 7e-7, 5 sigma. */
static void
delays_have_the_distribution_asked_for(void **state)
{
	double *x = malloc(N * sizeof(*x));
	double most, f;

	(void)state;
	assert_non_null(x);
	for (size_t i = 0; i < 3; i++) {
		draw_delays(i, x);
		qsort(x, N, sizeof(*x), by_size);
		most = 0;
		for (size_t n = 0; n < N; n++) {
			f = cumulative(distributions[i].kind, x[n]);
			most = fmax(most, fabs(f - (double)n / N));
			most = fmax(most, fabs(f - (double)(n + 1) / N));
		}
		assert_true(most * sqrt(N) < 2.72);
	}
	free(x);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_stream_is_splitmix64),
		cmocka_unit_test(
		    uniform_numbers_have_their_moments_and_no_memory),
		cmocka_unit_test(normal_numbers_have_their_moments),
		cmocka_unit_test(runs_of_loss_agree_with_rfc_6534),
		cmocka_unit_test(loss_in_both_states_adds_up),
		cmocka_unit_test(
		    a_burst_may_be_under_way_at_the_first_packet),
		cmocka_unit_test(bursts_are_off_by_a_p_of_0),
		cmocka_unit_test(delays_have_their_moments_and_correlation),
		cmocka_unit_test(delays_have_the_distribution_asked_for),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
