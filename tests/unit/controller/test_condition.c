/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <math.h>

#include "ceiling/condition.h"
#include "ceiling/window.h"
#include "declaration_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define GBE "1 Gbit/s"
#define TCP "ethernet, ipv4, tcp"

/* Ceiling and conditions of a-to-b under the declared stack. */
static void
explained(const struct circuit *circuit, struct ceiling *ceiling,
    struct condition_figures *figures)
{
	const struct load load = { .direction = DIRECTION_A_TO_B,
		.declared = true };
	struct error err;
	char why[1024];

	if (ceiling_of_load(circuit, &load, ceiling, &err) == -1 ||
	    condition_add_declared(circuit, &load, ceiling, &err) == -1)
		fail_msg("%s", error_text(&err, why, sizeof(why)));
	condition_figures(circuit, ceiling, figures);
}

static void
explain(const char *layers, const char *more, struct ceiling *ceiling,
    struct condition_figures *figures)
{
	struct circuit *circuit = circuit_of(GBE, layers, more);

	explained(circuit, ceiling, figures);
	circuit_free(circuit);
}

/* The condition whose name begins so; NULL: there is none. */
static const struct bound *
condition(const struct ceiling *ceiling, const char *begins)
{
	size_t i;

	for (i = 0; i < ceiling->bounds_count; i++)
		if (ceiling->bounds[i].class == BOUND_CONDITION &&
		    strncmp(ceiling->bounds[i].name, begins,
		    strlen(begins)) == 0)
			return &ceiling->bounds[i];
	return NULL;
}

static uint64_t
condition_bps(const struct ceiling *ceiling, const char *begins)
{
	const struct bound *bound = condition(ceiling, begins);

	if (bound == NULL)
		fail_msg("no condition %s", begins);
	return bound == NULL ? 0 : bound->payload_bps;
}

static void
assert_near(double found, double expected, double ratio)
{
	if (!(fabs(found - expected) <= ratio * expected))
		fail_msg("found %.10g, expected %.10g", found, expected);
}

static bool
noted(const struct condition_figures *figures, const char *words)
{
	size_t i;

	for (i = 0; i < figures->notes_count; i++)
		if (strstr(figures->notes[i], words) != NULL)
			return true;
	return false;
}

/* 8 W / RTT; with TLS a share of the window is records (RFC 8446 s5.2:
 * 16384 of 16406). */
static void
a_window_bounds_the_stream_and_tls_its_payload(void **state)
{
	struct ceiling c;
	struct condition_figures f;
	const char *more = "conditions: { round-trip: 20 ms, window: 65535 B }";

	(void)state;
	explain(TCP, more, &c, &f);
	assert_int_equal(condition_bps(&c, "window of 65535 B"), 26214000);
	assert_true(condition(&c, "window")->binding);
	assert_int_equal(c.rate_bps[LEVEL_PAYLOAD], 941482444);
	explain(TCP ", tls", more, &c, &f);
	assert_int_equal(condition_bps(&c, "window"), 26178847);
	explain(TCP, "conditions: { round-trip: 20 ms, window: 65535 B }\n"
	    "plan: { streams: 4 }", &c, &f);
	assert_int_equal(condition_bps(&c, "window of 65535 B a round trip, "
	    "4 streams"), 4 * 26214000);
}

/* s 1448, R 20 ms, p 1e-4 by the formulas, worked out apart: Mathis with
 * sqrt(3/2), RFC 5348 s3.1, and Reno's 120 segments, above CUBIC's 56. */
static void
the_lowest_model_of_loss_binds(void **state)
{
	struct ceiling c;
	struct condition_figures f;

	(void)state;
	explain(TCP, "conditions: { round-trip: 20 ms, loss: 0.01 % }", &c,
	    &f);
	assert_near((double)condition_bps(&c, "loss, square root"),
	    70937222.95, 2e-8);
	assert_near((double)condition_bps(&c, "loss, with timeouts"),
	    70873436.84, 2e-8);
	assert_near((double)condition_bps(&c, "loss, CUBIC"), 69504000.0,
	    1e-7);
	assert_true(condition(&c, "loss, CUBIC")->binding);
	assert_false(condition(&c, "loss, square root")->binding);
	assert_true(fabs(f.loss_ratio - 1e-4) < 1e-12);
	assert_true(noted(&f, "events of loss"));
}

static void
a_model_out_of_range_is_said_and_not_printed(void **state)
{
	struct ceiling c;
	struct condition_figures f;

	(void)state;
	explain(TCP, "conditions: { round-trip: 20 ms, loss: 5 % }", &c, &f);
	assert_null(condition(&c, "loss, square root"));
	assert_null(condition(&c, "loss, CUBIC"));
	assert_non_null(condition(&c, "loss, with timeouts"));
	assert_true(noted(&f, "CUBIC: says nothing above a loss of 2 %"));
	explain(TCP, "conditions: { round-trip: 20 ms, loss: 100 % }", &c, &f);
	assert_null(condition(&c, "loss"));
	assert_true(noted(&f, "every packet is lost"));
	explain(TCP, "conditions: { round-trip: 20 ms, loss: 0 % }", &c, &f);
	assert_null(condition(&c, "loss"));
	assert_int_equal(f.notes_count, 0);
	explain(TCP, "conditions: { round-trip: 1 s, bit-error-ratio: "
	    "0.000000000000000001 }", &c, &f);
	assert_null(condition(&c, "loss"));
	assert_true(noted(&f, "largest window"));
	/* the full form beyond 8/27 */
	explain(TCP, "conditions: { round-trip: 20 ms, loss: 50 % }", &c, &f);
	assert_true(condition_bps(&c, "loss, with timeouts") > 0);
}

/* RFC 3819 s8.5.3: 1e-6 loses 1.207 % of frames of 1518 octets. */
static void
bit_errors_become_loss_of_frames(void **state)
{
	struct ceiling c;
	struct condition_figures f;

	(void)state;
	explain(TCP, "conditions: { round-trip: 20 ms, "
	    "bit-error-ratio: { a-to-b: 0.000001 } }", &c, &f);
	assert_near(f.loss_ratio, 0.0120705652, 1e-8);
	assert_non_null(condition(&c, "loss, CUBIC"));
}

/* One acknowledgement of 90 octets of line (52 of IP, RFC 7323) answers two
 * segments of 1448. */
static void
the_way_back_bounds_by_its_acknowledgements(void **state)
{
	static const struct {
		const char *rates, *more;
		uint64_t payload_bps;
		const char *source, *what;
	} rows[] = {
		{ "1 Gbit/s", "", 32177777777, "2 * 1448 / 90 * 1 Gbit/s",
		  "line b-to-a" },
		{ "{ a-to-b: 24 Mbit/s, b-to-a: 1 Mbit/s }", "", 32177777,
		  "2 * 1448 / 90 * 1 Mbit/s", "line b-to-a" },
		{ "1 Gbit/s", "service: { committed: { b-to-a: 1 Mbit/s }, "
		  "counted-at: packet }", 55692307, "2 * 1448 / 52 * 1 Mbit/s",
		  "contract b-to-a" },
		{ "1 Gbit/s", "service: { committed: { b-to-a: 1 Mbit/s }, "
		  "counted-at: payload }", 32177777777,
		  "an acknowledgement has no payload", "line b-to-a" },
		{ "1 Gbit/s", "device: { packets-per-second: 1000 }",
		  23168000, "2 * 1448 * 8 * 1000", "device b-to-a" },
	};
	struct circuit *circuit;
	struct condition_figures f;
	struct ceiling c;
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		circuit = circuit_of(rows[i].rates, TCP, rows[i].more);
		explained(circuit, &c, &f);
		assert_int_equal(condition_bps(&c, "acknowledgements"),
		    rows[i].payload_bps);
		assert_non_null(strstr(condition(&c,
		    "acknowledgements")->source, rows[i].what));
		circuit_free(circuit);
	}
}

/* PPPoA, VC-multiplexed: 52 + 2 + 8 octets are two cells of 53; 2 * 1448 / 106
 * of 1.0 Mbit/s (ITU-T G.992.5, RFC 2364, I.363.5). */
static void
a_narrow_way_up_bounds_an_adsl_line(void **state)
{
	struct circuit *circuit = circuit_accepted("circuit: ADSL\nmedium: "
	    "{ kind: adsl2plus, downstream: 24 Mbit/s, upstream: 1 Mbit/s }\n"
	    "layers: [ aal5, ppp, ipv4, tcp ]\nmtu: 1500 B\n");
	struct condition_figures f;
	struct ceiling c;

	(void)state;
	explained(circuit, &c, &f);
	assert_int_equal(condition_bps(&c, "acknowledgements"), 27320754);
	assert_true(c.rate_bps[LEVEL_PAYLOAD] < 27320754);
	circuit_free(circuit);
}

/* They are steps of the ladder there. */
static void
acknowledgements_beside_the_data_are_no_condition(void **state)
{
	const struct load both = { .direction = DIRECTION_A_TO_B,
		.declared = true, .both = true };
	struct circuit *circuit = circuit_accepted("circuit: TEST\nmedium: "
	    "{ kind: ethernet, line-rate: 10 Mbit/s, duplex: half }\n"
	    "layers: [ " TCP " ]\n");
	struct condition_figures f;
	struct ceiling c;
	struct error err;

	(void)state;
	explained(circuit, &c, &f);
	assert_null(condition(&c, "acknowledgements"));
	circuit_free(circuit);
	circuit = circuit_of(GBE, TCP, "");
	assert_int_equal(ceiling_of_load(circuit, &both, &c, &err), 0);
	assert_int_equal(condition_add_declared(circuit, &both, &c, &err), 0);
	assert_null(condition(&c, "acknowledgements"));
	circuit_free(circuit);
}

static void
hosts_are_declared_for_each_direction(void **state)
{
	struct ceiling c;
	struct condition_figures f;

	(void)state;
	explain(TCP, "conditions: { host: { a-to-b: 700 Mbit/s, b-to-a: "
	    "1 Gbit/s } }", &c, &f);
	assert_int_equal(condition_bps(&c, "host"), 700000000);
	assert_true(condition(&c, "host")->binding);
	explain("ethernet, ipv4, udp", "conditions: { round-trip: 20 ms, "
	    "host: 700 Mbit/s, loss: 1 %, window: 64 kB }", &c, &f);
	assert_int_equal(condition_bps(&c, "host"), 700000000);
	assert_null(condition(&c, "loss"));
	assert_null(condition(&c, "window"));
	assert_true(noted(&f, "nothing is acknowledged"));
	assert_int_equal(f.bdp_bytes, 2500000);
	assert_int_equal(f.window_needed_bytes, FIELD_UNSET);
}

/* 1448/1538 of 1 Gbit/s, 20 ms, 10 s: 8 rounds from 14480 octets; 100 MB. */
static void
figures_follow_from_the_ceiling(void **state)
{
	struct ceiling c;
	struct condition_figures f;

	(void)state;
	explain(TCP, "conditions: { round-trip: 20 ms, window: 64 kB, "
	    "test-length: 10 s, transfer-size: 100 MB }", &c, &f);
	assert_int_equal(f.bdp_bytes, 2500000);
	assert_int_equal(f.window_needed_bytes, 2353707);
	assert_int_equal(f.window_shift, 6);	/* 65535 * 64 */
	assert_int_equal(f.streams_needed, 37);
	assert_int_equal(f.ramp_rounds, 8);
	assert_int_equal(f.ramp_ns, 160000000);
	assert_int_equal(f.cold_mean_bps, 929372644);
	assert_int_equal(f.transfer_ns, 849723757);
	assert_int_equal(f.burst_ns, FIELD_UNSET);
	assert_int_equal(f.burst_mean_bps, FIELD_UNSET);
	assert_true(isnan(f.loss_ratio));
	/* as RFC 6349 table 3.3.1: 1 Gbit/s and 1 ms make 125 000 octets */
	explain(TCP, "conditions: { round-trip: 1 ms }", &c, &f);
	assert_int_equal(f.bdp_bytes, 125000);
	assert_int_equal(f.streams_needed, 1);
	assert_int_equal(f.cold_mean_bps, FIELD_UNSET);
	assert_int_equal(f.transfer_ns, FIELD_UNSET);
	explain(TCP, "conditions: { round-trip: 60 s, test-length: 60 s }",
	    &c, &f);
	assert_true(noted(&f, "RFC 7323"));
	assert_true(noted(&f, "ends before slow start"));
	assert_int_equal(f.window_shift, 14);
	assert_int_equal(f.streams_needed, 7);	/* 7.06 GB / 1.07 GB */
}

/* 100 Mbit/s of frames with 10 MB on 1 Gbit/s: of an octet of frame 1448/1518
 * are payload; 8 B / (P - R), R + 8 B / 10 s. */
static void
a_burst_allowance_raises_the_mean_of_a_test(void **state)
{
	struct ceiling c;
	struct condition_figures f;

	(void)state;
	explain(TCP, "service: { committed: 100 Mbit/s, burst: 10 MB }\n"
	    "conditions: { test-length: 10 s }", &c, &f);
	assert_int_equal(c.burst_payload_bytes, 9538866);
	assert_int_equal(f.burst_ns, 90192045);
	assert_int_equal(f.burst_mean_bps, 103019761);
	/* on a line that the contract fills nothing is left to lend */
	explain(TCP, "service: { committed: 1 Gbit/s, burst: 10 MB, "
	    "counted-at: line }\nconditions: { test-length: 10 s }", &c, &f);
	assert_int_equal(f.burst_mean_bps, FIELD_UNSET);
}

static void
nothing_declared_leaves_all_unset(void **state)
{
	struct circuit *circuit;
	struct condition_figures f;
	struct ceiling c;

	(void)state;
	explain(TCP, "", &c, &f);
	assert_true(isnan(f.loss_ratio));
	assert_int_equal(f.bdp_bytes, FIELD_UNSET);
	assert_int_equal(f.ramp_rounds, FIELD_UNSET);
	assert_int_equal(f.notes_count, 0);
	circuit = circuit_accepted("circuit: HOST\nmedium: host\n"
	    "layers: [ ipv4, tcp ]\nconditions: { round-trip: 1 ms, "
	    "loss: 1 %, host: 1 Gbit/s, test-length: 1 s }\n");
	explained(circuit, &c, &f);
	assert_int_equal(c.bounds_count, 0);
	assert_int_equal(f.bdp_bytes, FIELD_UNSET);
	circuit_free(circuit);
}

static void
contradictions_are_refused_at_their_place(void **state)
{
#define BEGIN "circuit: TEST\nmedium: { kind: ethernet, line-rate: 1 Gbit/s " \
	"}\nlayers: [ ethernet, ipv4, tcp ]\n"
	static const char *const rows[][2] = {
		{ "conditions: { loss: 1 % }", "test:4:21: loss: `round-trip` "
		  "is missing" },
		{ "conditions: { window: 64 kB }", "test:4:23: window: "
		  "`round-trip` is missing" },
		{ "conditions: { bit-error-ratio: 0.1 }", "test:4:32: "
		  "bit-error-ratio: `round-trip` is missing" },
		{ "conditions: { round-trip: 1 ms, loss: 1 %, "
		  "bit-error-ratio: 0.1 }", "bit-error-ratio: a-to-b: `loss` "
		  "is given too" },
		{ "conditions: { round-trip: 1 s, test-length: 1 ms }",
		  "test:4:45: test-length: shorter than" },
		{ "conditions: { round-trip: 0 s }", "test:4:27" },
		{ "conditions: { round-trip: 61 s }", "test:4:27" },
		{ "conditions: { round-trip: 1 ms, loss: 101 % }",
		  "test:4:39" },
		{ "conditions: { round-trip: 1 ms, window: 2 GB }",
		  "test:4:41" },
		{ "conditions: { host: 0 bit/s }", "test:4:21" },
		{ "conditions: { test-length: 0 s }", "test:4:28" },
		{ "conditions: { transfer-size: 0 B }", "test:4:30" },
		{ "conditions: { round-tripp: 1 s }", "round-trip" },
		{ "service: { excess: 1 Mbit/s }", "test:4:20: excess: a-to-b: "
		  "`committed` is missing" },
		{ "service: { committed: 1 Mbit/s, peak: 2 Mbit/s, excess: "
		  "1 Mbit/s }", "excess: a-to-b: `peak` is given too" },
		{ "service: { committed: 1 Tbit/s, excess: 1 Tbit/s }",
		  "more than 1.6 Tbit/s" },
	};
	char text[512];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(rows); i++) {
		(void)snprintf(text, sizeof(text), BEGIN "%s\n", rows[i][0]);
		circuit_refused(text, rows[i][1]);
	}
#undef BEGIN
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    a_window_bounds_the_stream_and_tls_its_payload),
		cmocka_unit_test(the_lowest_model_of_loss_binds),
		cmocka_unit_test(a_model_out_of_range_is_said_and_not_printed),
		cmocka_unit_test(bit_errors_become_loss_of_frames),
		cmocka_unit_test(the_way_back_bounds_by_its_acknowledgements),
		cmocka_unit_test(a_narrow_way_up_bounds_an_adsl_line),
		cmocka_unit_test(
		    acknowledgements_beside_the_data_are_no_condition),
		cmocka_unit_test(hosts_are_declared_for_each_direction),
		cmocka_unit_test(figures_follow_from_the_ceiling),
		cmocka_unit_test(a_burst_allowance_raises_the_mean_of_a_test),
		cmocka_unit_test(nothing_declared_leaves_all_unset),
		cmocka_unit_test(contradictions_are_refused_at_their_place),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
