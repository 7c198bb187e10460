/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdlib.h>

#include <jansson.h>

#include "declaration_text.h"
#include "report/sweep.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define ANSWER_SIZE 65536

static const char plain[] = "circuit: TEST\nmedium: { kind: ethernet, "
    "line-rate: 1 Gbit/s }\nlayers: [ ethernet, vlan, ipv4, tcp, tls ]\n"
    "mtu: 1500 B\n";
static const char segments[] = "circuit: TEST\nlayers: [ ethernet, ipv4, "
    "udp ]\nsegments:\n  - name: one\n    medium: { kind: ethernet, "
    "line-rate: 1 Gbit/s }\n  - name: two\n    medium: { kind: ethernet, "
    "line-rate: 10 Gbit/s }\n";
static const char channel[] = "circuit: TEST\nmedium: { kind: analogue, "
    "bandwidth: 3 kHz, snr: 20 dB }\nlayers: [ ipv4, udp ]\nmtu: 576 B\n";
static const char radio[] = "circuit: TEST\nmedium: { kind: analogue, "
    "bandwidth: 20 MHz, received-level: -60 dBm, noise-figure: 6 dB }\n"
    "layers: [ ipv4, udp ]\nmtu: 1500 B\n";

static struct node *
tree_of(const char *text)
{
	struct node *root = NULL;
	struct error err;
	char why[1024];

	if (document_read_text(text, strlen(text), "test", &root, &err) == -1)
		fail_msg("%s", error_text(&err, why, sizeof(why)));
	return root;
}

static void
range_of(const char *declaration, const char *text, struct sweep_range *out)
{
	struct node *root = tree_of(declaration);
	struct error err;
	char why[1024];

	if (sweep_range_read(text, root, circuit_fields, out, &err) == -1)
		fail_msg("%s: %s", text, error_text(&err, why, sizeof(why)));
	document_free(root);
}

static struct sweep *
sweep_of(const char *declaration, const char *text)
{
	struct node *root = tree_of(declaration);
	struct sweep_range range;
	struct sweep *sweep = NULL;
	struct error err;
	char why[1024];

	if (sweep_range_read(text, root, circuit_fields, &range, &err) == -1 ||
	    sweep_make(root, &range, &sweep, &err) == -1)
		fail_msg("%s: %s", text, error_text(&err, why, sizeof(why)));
	document_free(root);
	return sweep;
}

static const struct {
	const char *declaration, *text;
	size_t count;
	const char *first, *second, *last;
} ranges[] = {
	{ plain, "mtu=64 B..1500 B:64 B", 23, "64 B", "128 B",
	  "1472 B" },
	{ plain, "mtu=100 B..1100 B", 11, "100 B", "200 B", "1100 B" },
	/* a tenth to the nearest; both ends are there */
	{ plain, "mtu=64B..1500B", 11, "64 B", "207 B", "1500 B" },
	{ plain, "mtu=1500 B..1505 B", 6, "1500 B", "1501 B",
	  "1505 B" },
	{ plain, "mtu=1500 B..1500 B", 1, "1500 B", NULL, "1500 B" },
	{ plain, "mtu=1 kB..1.5 kB:1 B", 501, "1 kB", "1.001 kB",
	  "1.5 kB" },
	{ plain, "mtu=1 KiB..2 KiB:512 B", 3, "1 KiB", "1.5 KiB",
	  "2 KiB" },
	{ plain, "medium.line-rate=1 Gbit/s..10 Gbit/s:500 Mbit/s",
	  19, "1 Gbit/s", "1.5 Gbit/s", "10 Gbit/s" },
	{ plain, "layers.4.tls.record-bytes=1024 B..16384 B:1 KiB",
	  16, "1024 B", "2048 B", "16384 B" },
	{ plain, "layers.3.tcp.segments-per-acknowledgement=1..8", 8,
	  "1", "2", "8" },
	{ plain, "layers.3.tcp.segments-per-acknowledgement=1..45", 12,
	  "1", "5", "45" },
	{ plain, "service.committed=10 Mbit/s..20 Mbit/s", 11,
	  "10 Mbit/s", "11 Mbit/s", "20 Mbit/s" },
	{ plain, "service.committed.a-to-b=1 kbit/s..3 kbit/s:"
	  "500 bit/s", 5, "1 kbit/s", "1.5 kbit/s", "3 kbit/s" },
	{ plain, "conditions.round-trip=1 ms..2 ms:100 us", 11, "1 ms",
	  "1.1 ms", "2 ms" },
	{ plain, "conditions.loss=0 %..0.3 %:0.1 %", 4, "0 %", "0.1 %",
	  "0.3 %" },
	{ plain, "conditions.loss=0.0000001..0.000001", 11,
	  "0.0000001", "0.00000019", "0.000001" },
	{ plain, "plan.trials=1..3", 3, "1", "2", "3" },
	{ segments, "segments.1.medium.line-rate=1 Gbit/s..2 Gbit/s:"
	  "1 Gbit/s", 2, "1 Gbit/s", "2 Gbit/s", "2 Gbit/s" },
	{ segments, "segments.0.mtu=1000 B..1500 B:250 B", 3,
	  "1000 B", "1250 B", "1500 B" },
	{ channel, "medium.snr=0 dB..30 dB:0.1 dB", 301, "0 dB",
	  "0.1 dB", "30 dB" },
	{ channel, "medium.snr=-1.6 dB..1 dB:0.2 dB", 14, "-1.6 dB",
	  "-1.4 dB", "1 dB" },
	{ channel, "medium.bandwidth=300 Hz..3.4 kHz:100 Hz", 32,
	  "300 Hz", "400 Hz", "3400 Hz" },
	{ radio, "medium.received-level=-90 dBm..-60 dBm:0.5 dB", 61,
	  "-90 dBm", "-89.5 dBm", "-60 dBm" },
};

static void
a_range_has_the_values_that_it_says(void **state)
{
	struct sweep_range range;
	char value[SWEEP_VALUE_SIZE];

	(void)state;
	for (size_t i = 0; i < COUNT(ranges); i++) {
		range_of(ranges[i].declaration, ranges[i].text, &range);
		if (range.count != ranges[i].count)
			fail_msg("%s: %zu points", ranges[i].text,
			    range.count);
		assert_string_equal(sweep_range_value(&range, 0, value),
		    ranges[i].first);
		if (ranges[i].second != NULL)
			assert_string_equal(sweep_range_value(&range, 1,
			    value), ranges[i].second);
		assert_string_equal(sweep_range_value(&range,
		    range.count - 1, value), ranges[i].last);
	}
}

/* 0.1 is no double: a sum of 999 of them is off in the 13th digit. */
static void
reals_gather_no_error(void **state)
{
	struct sweep_range range;
	char value[SWEEP_VALUE_SIZE], expected[SWEEP_VALUE_SIZE];

	(void)state;
	range_of(channel, "medium.snr=0.1 dB..100 dB:0.1 dB", &range);
	assert_int_equal(range.count, 1000);
	for (unsigned i = 0; i < range.count; i++) {
		if ((i + 1) % 10 == 0)
			(void)snprintf(expected, sizeof(expected), "%u dB",
			    (i + 1) / 10);
		else
			(void)snprintf(expected, sizeof(expected), "%u.%u dB",
			    (i + 1) / 10, (i + 1) % 10);
		assert_string_equal(sweep_range_value(&range, i, value),
		    expected);
	}
}

static const struct {
	const char *text;
	int status;
	const char *expected;
} refusals[] = {
	{ "circuit=a..b", 64,
	  "circuit is a text and cannot be swept" },
	{ "mut=64 B..1500 B", 64, "did you mean 'mtu'?" },
	{ "medium.line-rat=1 bit/s..2 bit/s", 64,
	  "did you mean 'line-rate'?" },
	{ "medium=1..2", 64, "below it can be swept: line-rate" },
	{ "medium.phy=1..2", 64, "is a choice and cannot be swept" },
	{ "medium.kind=1..2", 64, "cannot be swept" },
	{ "service=1..2", 64, "below it can be swept: committed" },
	{ "services=1..2", 64, "a list" },
	{ "services.0.committed=1 bit/s..2 bit/s", 64,
	  "no such list" },
	{ "layers=1..2", 64, "cannot be swept" },
	{ "layers.4.tcp.mss=1 B..2 B", 64, "4.tls" },
	{ "layers.9.tcp.mss=1 B..2 B", 64, "4.tls" },
	{ "layers.1.vlan.x=1 B..2 B", 64, "vlan has no options" },
	{ "layers.3.tcp.timestamps=0..1", 64, "yes or no" },
	{ "layers.3.tcp.timestamp=0..1", 64,
	  "did you mean 'timestamps'?" },
	{ "mtu.x=1 B..2 B", 64, "nothing is below 'mtu'" },
	{ "service.committed.a-to-c=1 bit/s..2 bit/s", 64,
	  "nothing is below 'committed'" },
	{ "", 64, "KEY=FROM..TO[:STEP]" },
	{ "mtu", 64, "KEY=FROM..TO[:STEP]" },
	{ "mtu=1500 B", 64, "KEY=FROM..TO[:STEP]" },
	{ "mtu=..1500 B", 64, "KEY=FROM..TO[:STEP]" },
	{ "mtu=64 B..", 64, "KEY=FROM..TO[:STEP]" },
	{ "mtu=64 B..1500 B:", 64, "KEY=FROM..TO[:STEP]" },
	{ "=64 B..1500 B", 64, "KEY=FROM..TO[:STEP]" },
	{ "mtu=64..1500 B", 64, "FROM: found '64'" },
	{ "mtu=64 B..1500", 64, "TO: found '1500'" },
	{ "mtu=64 B..1500 B:10", 64, "STEP: found '10'" },
	{ "mtu=64 ms..1500 ms", 64, "a size such as '1500 B'" },
	{ "mtu=1500 B..64 B", 64, "allowed: from low to high" },
	{ "mtu=64 B..1500 B:0 B", 64, "allowed: more than 0" },
	{ "mtu=64 B..1500 B:1 B", 64, "found 1437 points, allowed: 1 "
	  "to 1000" },
	{ "conditions.loss=2 %..1 %", 64, "from low to high" },
	{ "conditions.loss=0 %..1 %:0 %", 64, "more than 0" },
	{ "conditions.loss=0 %..1 %:0.0001 %", 64, "found 10001" },
	{ "conditions.loss=-1 %..1 %", 64, "FROM: found '-1 %'" },
	{ "plan.trials=a..b", 64, "a whole number" },
	{ "mtu=64 B..160000 B", 65, "found '160000 B'" },
	{ "mtu=0 B..1500 B", 65, "found '0 B'" },
	{ "conditions.loss=0 %..101 %", 65, "found '101 %'" },
};

static void
what_is_no_range_is_refused_with_what_is_allowed(void **state)
{
	struct node *root = tree_of(plain);
	struct sweep_range range;
	struct error err;
	char why[1024];

	(void)state;
	for (size_t i = 0; i < COUNT(refusals); i++) {
		if (sweep_range_read(refusals[i].text, root, circuit_fields,
		    &range, &err) == 0)
			fail_msg("accepted: %s", refusals[i].text);
		(void)error_text(&err, why, sizeof(why));
		if (strstr(why, refusals[i].expected) == NULL ||
		    strncmp(why, "--sweep", 7) != 0 ||
		    error_exit_status(err.kind) != refusals[i].status)
			fail_msg("%s: '%s' is not in: %s", refusals[i].text,
			    refusals[i].expected, why);
	}
	document_free(root);
}

/* 1460 less 12 of timestamps; the fractions are those of RFC 6349 section
 * 4.1.1, RFC 7323, RFC 8446 section 5.2. */
static void
points_are_the_ceilings_of_the_declaration(void **state)
{
	static const struct {
		const char *declaration, *text;
		size_t index;
		uint64_t num, den;	/* payload = 1 Gbit/s * num / den */
	} vectors[] = {
		{ plain, "mtu=576 B..1500 B:924 B", 1, 1448 * 16384,
		  1542 * 16406 },
		{ plain, "mtu=576 B..1500 B:924 B", 0, 524 * 16384,
		  618 * 16406 },
		{ plain, "layers.4.tls.record-bytes=1400 B..1400 B", 0,
		  1448 * 1400, 1542 * 1422 },
		{ plain, "layers.3.tcp.options-bytes=0 B..8 B:4 B", 2,
		  1440 * 16384, 1542 * 16406 },
		{ segments, "segments.1.medium.line-rate=100 Mbit/s.."
		  "10 Gbit/s:100 Mbit/s", 0, 1472, 15380 },
		{ segments, "segments.1.medium.line-rate=100 Mbit/s.."
		  "10 Gbit/s:100 Mbit/s", 99, 1472, 1538 },
	};
	struct sweep *sweep;
	const struct sweep_point *point;

	(void)state;
	for (size_t i = 0; i < COUNT(vectors); i++) {
		sweep = sweep_of(vectors[i].declaration, vectors[i].text);
		point = &sweep->points[vectors[i].index];
		assert_false(point->refused);
		for (int d = 0; d < DIRECTIONS_SINGLE; d++)
			assert_int_equal(point->directions[d].rate_bps[
			    LEVEL_PAYLOAD], scale_u64(1000000000,
			    vectors[i].num, vectors[i].den));
		free(sweep);
	}
}

static void
one_direction_alone_can_be_swept(void **state)
{
	struct sweep *sweep = sweep_of(plain,
	    "service.committed.a-to-b=100 Mbit/s..200 Mbit/s:100 Mbit/s");

	(void)state;
	assert_int_equal(sweep->points[1].directions[DIRECTION_A_TO_B].
	    rate_bps[LEVEL_FRAME], 200000000);
	assert_string_equal(sweep->points[1].directions[DIRECTION_A_TO_B].
	    binding, "committed 200 Mbit/s at frame");
	assert_int_equal(sweep->points[1].directions[DIRECTION_B_TO_A].
	    rate_bps[LEVEL_LINE], 1000000000);
	free(sweep);
}

/* RFC 6349 section 3.3.1: 64 kB in 25 ms are 20.48 Mbit/s. */
static void
a_condition_stands_beside_the_ceiling_and_leaves_it(void **state)
{
	struct sweep *sweep = sweep_of("circuit: TEST\nmedium: { kind: "
	    "ethernet, line-rate: 1 Gbit/s }\nlayers: [ ethernet, ipv4, tcp "
	    "]\nconditions: { window: 64 kB }\n",
	    "conditions.round-trip=10 ms..25 ms:15 ms");
	const struct sweep_direction *d =
	    &sweep->points[1].directions[DIRECTION_A_TO_B];

	(void)state;
	assert_int_equal(d->rate_bps[LEVEL_PAYLOAD], 941482444);
	assert_int_equal(d->condition_bps, 20480000);
	assert_string_equal(d->binding, "ethernet line");
	free(sweep);
}

/* IPv4 needs 68 octets (RFC 791); 20 + 32 of headers and a payload. */
static void
a_point_that_is_refused_is_shown_and_stops_nothing(void **state)
{
	struct sweep *sweep = sweep_of(plain, "mtu=60 B..80 B:10 B");
	static char answer[ANSWER_SIZE];
	FILE *f = fmemopen(answer, sizeof(answer), "w");

	(void)state;
	assert_true(sweep->points[0].refused);
	assert_non_null(strstr(sweep->points[0].why, "60 B"));
	assert_false(sweep->points[1].refused);
	assert_false(sweep->points[2].refused);
	sweep_text(sweep, f);
	(void)fclose(f);
	assert_non_null(strstr(answer, "60 B         -"));
	assert_non_null(strstr(answer, "refused with 60 B: mtu: found 60 B"));
	free(sweep);
}

static void
a_sweep_that_is_refused_throughout_names_the_value(void **state)
{
	struct node *root = tree_of(plain);
	struct sweep_range range;
	struct sweep *sweep = NULL;
	struct error err;
	char why[1024];

	(void)state;
	assert_int_equal(sweep_range_read("mtu=10 B..20 B:5 B", root,
	    circuit_fields, &range, &err), 0);
	assert_int_equal(sweep_make(root, &range, &sweep, &err), -1);
	assert_int_equal(error_exit_status(err.kind), 65);
	(void)error_text(&err, why, sizeof(why));
	assert_non_null(strstr(why, "--sweep mtu"));
	assert_non_null(strstr(why, "10 B"));
	document_free(root);
}

static void
every_form_holds_the_points(void **state)
{
	struct sweep *sweep = sweep_of(plain, "mtu=60 B..1500 B:1440 B");
	static char answer[ANSWER_SIZE];
	json_t *root, *points, *ceiling;
	FILE *f = fmemopen(answer, sizeof(answer), "w");

	(void)state;
	assert_int_equal(sweep_json(sweep, f), 0);
	(void)fclose(f);
	root = json_loads(answer, JSON_REJECT_DUPLICATES, NULL);
	assert_non_null(root);
	assert_string_equal(json_string_value(json_object_get(root,
	    "format")), "plafond-sweep/1");
	assert_string_equal(json_string_value(json_object_get(root, "unit")),
	    "B");
	points = json_object_get(root, "points");
	assert_int_equal(json_array_size(points), 2);
	assert_true(json_is_string(json_object_get(json_array_get(points, 0),
	    "refused")));
	assert_int_equal(json_integer_value(json_object_get(json_array_get(
	    points, 1), "number")), 1500);
	ceiling = json_array_get(json_object_get(json_array_get(points, 1),
	    "ceilings"), 1);
	assert_string_equal(json_string_value(json_object_get(ceiling,
	    "direction")), "b-to-a");
	assert_int_equal(json_integer_value(json_object_get(ceiling,
	    "line_bps")), 1000000000);
	json_decref(root);
	memset(answer, 0, sizeof(answer));
	f = fmemopen(answer, sizeof(answer), "w");
	sweep_csv(sweep, f);
	(void)fclose(f);
	assert_non_null(strstr(answer, "mtu,1500 B,b-to-a,1000000000,"));
	free(sweep);
}

static void
a_wide_table_keeps_its_unit_readable(void **state)
{
	struct sweep *sweep = sweep_of(plain,
	    "medium.line-rate=100 Gbit/s..400 Gbit/s:100 Gbit/s");
	static char answer[ANSWER_SIZE];
	FILE *f = fmemopen(answer, sizeof(answer), "w");

	(void)state;
	sweep_text(sweep, f);
	(void)fclose(f);
	assert_non_null(strstr(answer, "in Gbit/s; set by ethernet line"));
	assert_non_null(strstr(answer, "400 Gbit/s  400.000"));
	free(sweep);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_range_has_the_values_that_it_says),
		cmocka_unit_test(reals_gather_no_error),
		cmocka_unit_test(
		    what_is_no_range_is_refused_with_what_is_allowed),
		cmocka_unit_test(points_are_the_ceilings_of_the_declaration),
		cmocka_unit_test(one_direction_alone_can_be_swept),
		cmocka_unit_test(
		    a_condition_stands_beside_the_ceiling_and_leaves_it),
		cmocka_unit_test(
		    a_point_that_is_refused_is_shown_and_stops_nothing),
		cmocka_unit_test(
		    a_sweep_that_is_refused_throughout_names_the_value),
		cmocka_unit_test(every_form_holds_the_points),
		cmocka_unit_test(a_wide_table_keeps_its_unit_readable),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
