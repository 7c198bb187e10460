/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <math.h>

#include "ceiling/loss.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

static void
assert_near(double found, double expected, double ratio)
{
	if (!(fabs(found - expected) <= ratio * expected))
		fail_msg("found %.10g, expected %.10g", found, expected);
}

static void
square_roots_of_loss_are_those_of_rfc_3819(void **state)
{
	static const struct {
		struct loss_path path;
		double c, bps;
		const char *source;
	} rows[] = {
		{ { 1000, 0.12, 0.01 }, 1, 666666.667, "RFC 3819 s8.5.3" },
		{ { 1460, 0.1, 1e-4 }, LOSS_MATHIS_C, 14.305e6,
		  "Mathis 1997, sqrt(3/2), from memory" },
		{ { 1460, 0.1, 1e-4 }, 1, 11.680e6, "C = 1" },
		{ { 1460, 0.1, 1e-4 }, 0.93, 10.862e6, "RFC 3819 s8.5.1" },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++)
		assert_near(loss_mathis_bps(&rows[i].path, rows[i].c),
		    rows[i].bps, 5e-5);
	assert_near(LOSS_MATHIS_C * LOSS_MATHIS_C, 1.5, 1e-15);
}

static void
timeouts_are_those_of_rfc_5348_and_rfc_3819(void **state)
{
	/* RFC 5348 s3.1, b = 1, tRTO = 4 R; 1460 octets, 100 ms */
	static const double rows[][2] = { { 1e-4, 14.292e6 },
		{ 1e-3, 4.483e6 }, { 1e-2, 1.312e6 }, { 0.1, 0.2067e6 } };
	struct loss_path path = { 1460, 0.1, 0 };
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		path.ratio = rows[i][0];
		assert_near(loss_tfrc_bps(&path), rows[i][1], 3e-4);
		assert_near(loss_pftk_bps(&path, 1, 4), rows[i][1], 3e-4);
	}
	/* RFC 3819 s8.5.3: b = 2, RTO = 5 R.  It prints 402.9 kbit/s, which
	 * its own formula gives only with min(...) taken as 1; as printed the
	 * formula gives 519.4 with 1.33 and 518.8 with 4/3 under the root. */
	path = (struct loss_path){ 1000, 0.12, 0.01 };
	assert_near(loss_pftk_bps(&path, 2, 5), 519.4e3, 1.2e-3);
	assert_near(loss_pftk_bps(&path, 2, 5), 518.8e3, 1e-5);
}

/* RFC 9438 tables 1 and 2, C = 0.4. */
static void
mean_windows_are_those_of_rfc_9438(void **state)
{
	static const struct {
		double ratio, reno, long_trip, short_trip;
	} rows[] = {
		{ 1e-2, 12, 12, 12 }, { 1e-3, 38, 38, 38 },
		{ 1e-4, 120, 187, 120 }, { 1e-5, 379, 1054, 379 },
		{ 1e-6, 1200, 5926, 1200 }, { 1e-7, 3795, 33325, 5926 },
		{ 1e-8, 12000, 187400, 33325 },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		struct loss_path path = { 1000, 0.1, rows[i].ratio };

		assert_near(round(loss_reno_window(rows[i].ratio)),
		    rows[i].reno, 1e-9);
		assert_near(round(loss_cubic_bps(&path) * 0.1 / 8000),
		    rows[i].long_trip, 2e-6);
		path.round_trip_s = 0.01;
		assert_near(round(loss_cubic_bps(&path) * 0.01 / 8000),
		    rows[i].short_trip, 1e-4);
	}
	/* RFC 9438 s5.1 prints the coefficient as 1.054 */
	assert_near(loss_cubic_window(1, 1), 1.05383, 5e-6);
}

/* RFC 9438 table 3 (RFC 3649 table 1 for Reno): 1500 octets, 100 ms.  The
 * losses are printed with two digits, so the windows agree within 3 %. */
static void
losses_for_a_rate_are_those_of_rfc_9438_table_3(void **state)
{
	static const double rows[][4] = {	/* bit/s, W, Reno p, CUBIC p */
		{ 1e6, 8.3, 2.0e-2, 2.0e-2 },
		{ 10e6, 83.3, 2.0e-4, 2.9e-4 },
		{ 100e6, 833.3, 2.0e-6, 1.4e-5 },
		{ 1e9, 8333.3, 2.0e-8, 6.3e-7 },
		{ 10e9, 83333.3, 2.0e-10, 2.9e-8 },
	};
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		struct loss_path path = { 1500, 0.1, rows[i][3] };

		assert_near(loss_reno_window(rows[i][2]), rows[i][1], 0.03);
		assert_near(loss_cubic_bps(&path), rows[i][0], 0.03);
	}
	/* the exact losses by the same formulas */
	assert_near(loss_reno_window(2.0736e-10), 83333.3, 1e-5);
	assert_near(loss_cubic_window(0.1, 2.947e-8), 83333.3, 2e-4);
}

static void
bit_errors_lose_frames_as_in_rfc_3819(void **state)
{
	(void)state;
	/* RFC 3819 s8.5.3's formula, 1518 octets */
	assert_near(loss_of_bit_errors(1e-12, 1518), 1.2144e-8, 1e-5);
	assert_near(loss_of_bit_errors(1e-6, 1518), 0.01207, 1e-4);
	assert_true(loss_of_bit_errors(0, 1518) == 0);
	assert_true(loss_of_bit_errors(1, 1518) == 1);
	assert_true(isnan(loss_of_bit_errors(NAN, 1518)));
}

static void
no_model_speaks_outside_its_range(void **state)
{
	static const double nowhere[] = { 0, -0.1, 1, 1.5, NAN };
	struct loss_path path = { 1448, 0.02, 0 };
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(nowhere); i++) {
		path.ratio = nowhere[i];
		assert_true(isnan(loss_mathis_bps(&path, 1)));
		assert_true(isnan(loss_pftk_bps(&path, 1, 4)));
		assert_true(isnan(loss_tfrc_bps(&path)));
		assert_true(isnan(loss_cubic_bps(&path)));
	}
	path.ratio = 0.0201;
	assert_true(isnan(loss_mathis_bps(&path, 1)));
	assert_true(isnan(loss_cubic_bps(&path)));
	path.ratio = LOSS_TFRC_MOST;
	assert_near(loss_tfrc_bps(&path), loss_pftk_bps(&path, 1, 4), 1e-12);
	path.ratio = 0.3;
	assert_true(isnan(loss_tfrc_bps(&path)));
	assert_true(isfinite(loss_pftk_bps(&path, 1, 4)));
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(square_roots_of_loss_are_those_of_rfc_3819),
		cmocka_unit_test(timeouts_are_those_of_rfc_5348_and_rfc_3819),
		cmocka_unit_test(mean_windows_are_those_of_rfc_9438),
		cmocka_unit_test(
		    losses_for_a_rate_are_those_of_rfc_9438_table_3),
		cmocka_unit_test(bit_errors_lose_frames_as_in_rfc_3819),
		cmocka_unit_test(no_model_speaks_outside_its_range),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
