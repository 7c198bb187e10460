/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <dirent.h>
#include <math.h>

#include "declaration_text.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define REFERENCE "circuit: X\nmedium: host\nlayers: [ ipv4, tcp ]\n"
#define MEDIUM "circuit: X\nmedium: { kind: ethernet, line-rate: 1 Gbit/s }\n"
#define HEAD MEDIUM "layers: [ ethernet, ipv4, tcp ]\n"
#define PIN "\"sha256:0123456789abcdef0123456789abcdef" \
	"0123456789abcdef0123456789abcdef\""

static void
what_is_not_declared_has_its_default(void **state)
{
	struct circuit *c = circuit_accepted(HEAD);
	const struct plan_declaration *plan = &c->plan;

	(void)state;
	assert_string_equal(c->name, "X");
	assert_false(c->ends_declared);
	assert_int_equal(c->segments_count, 1);
	assert_int_equal(c->services_count, 0);
	assert_int_equal(circuit_mtu(c), 1500);		/* IEEE 802.3 */
	assert_int_equal(plan->trials, 7);
	assert_int_equal(plan->duration_ns, 3000000000);
	assert_int_equal(plan->settle_ns, 1000000000);
	assert_int_equal(plan->settle_extends, FIELD_UNSET);
	assert_int_equal(plan->row_ns, 100000000);
	assert_int_equal(plan->streams, FIELD_UNSET);
	assert_int_equal(plan->directions, 3);
	assert_int_equal(plan->opens, END_A);
	assert_string_equal(plan->congestion_control, "cubic");
	assert_int_equal(plan->dscp, 0);
	assert_int_equal(plan->mss_bytes, 0);
	assert_int_equal(plan->send_buffer_bytes, 0);
	assert_int_equal(plan->receive_buffer_bytes, 0);
	assert_true(c->criteria.throughput_ratio[0] == 0.97);
	assert_true(c->criteria.throughput_ratio[1] == 0.97);
	assert_true(isnan(c->criteria.single_stream_ratio[0]));
	assert_true(isnan(c->criteria.loss_ratio[1]));
	assert_int_equal(c->criteria.delay_ns[0], FIELD_UNSET);
	assert_false(circuit_is_reference(c));
	assert_false(service_has_rate(&c->segments[0].service,
	    DIRECTION_A_TO_B));
	circuit_free(c);
}

static void
nothing_is_required_of_a_reference_unless_declared(void **state)
{
	struct circuit *c = circuit_accepted(REFERENCE);

	(void)state;
	for (int d = 0; d < DIRECTIONS_SINGLE; d++) {
		assert_true(isnan(c->criteria.throughput_ratio[d]));
		assert_true(isnan(c->criteria.single_stream_ratio[d]));
		assert_true(isnan(c->criteria.loss_ratio[d]));
		assert_int_equal(c->criteria.delay_ns[d], FIELD_UNSET);
	}
	circuit_free(c);
	c = circuit_accepted(REFERENCE "criteria: { throughput: 90 % }\n");
	assert_true(c->criteria.throughput_ratio[1] == 0.9);
	circuit_free(c);
}

static void
any_criterion_takes_the_place_of_the_default(void **state)
{
	struct circuit *c = circuit_accepted(HEAD
	    "criteria: { loss: 0.1 %, delay: { a-to-b: 20 ms, b-to-a: 30 ms } "
	    "}\n");

	(void)state;
	assert_true(isnan(c->criteria.throughput_ratio[0]));
	assert_true(fabs(c->criteria.loss_ratio[1] - 0.001) < 1e-12);
	assert_int_equal(c->criteria.delay_ns[0], 20000000);
	assert_int_equal(c->criteria.delay_ns[1], 30000000);
	circuit_free(c);
}

static void
the_plan_is_read_whole(void **state)
{
	struct circuit *c = circuit_accepted(HEAD "plan: { trials: 9, "
	    "duration: 10 s, settle: 2 s, settle-extends: no, row-spacing: "
	    "1 s, streams: 4, directions: [ both, b-to-a ], opens: b, "
	    "congestion-control: bbr, dscp: 46, mss: 1400 B, send-buffer: "
	    "1 MiB, receive-buffer: 2 MiB }\n");

	(void)state;
	assert_int_equal(c->plan.trials, 9);
	assert_int_equal(c->plan.duration_ns, 10000000000);
	assert_int_equal(c->plan.settle_ns, 2000000000);
	assert_int_equal(c->plan.settle_extends, 0);
	assert_int_equal(c->plan.row_ns, 1000000000);
	assert_int_equal(c->plan.streams, 4);
	assert_int_equal(c->plan.directions, 6);
	assert_int_equal(c->plan.opens, END_B);
	assert_string_equal(c->plan.congestion_control, "bbr");
	assert_int_equal(c->plan.dscp, 46);
	assert_int_equal(c->plan.mss_bytes, 1400);
	assert_int_equal(c->plan.send_buffer_bytes, 1048576);
	assert_int_equal(c->plan.receive_buffer_bytes, 2097152);
	circuit_free(c);
	c = circuit_accepted(HEAD "plan: { directions: both }\n");
	assert_int_equal(c->plan.directions, 4);
	circuit_free(c);
}

static void
each_way_to_reach_an_agent_is_known(void **state)
{
	static const struct {
		const char *end;
		enum reach reach;
		const char *control;
	} vectors[] = {
		{ "{ control: \"198.18.0.1:61741\", identity: " PIN " }",
		  REACH_DIAL, "198.18.0.1:61741" },
		{ "{ control: \"[2001:2::1]:61741\", identity: " PIN " }",
		  REACH_DIAL, "[2001:2::1]:61741" },
		{ "{ control: quay.example, identity: " PIN " }", REACH_DIAL,
		  "quay.example" },
		{ "{ control: called, identity: " PIN " }", REACH_CALLED, "" },
		{ "{ control: relayed, identity: " PIN " }", REACH_RELAYED,
		  "" },
		{ "{ agent: embedded }", REACH_EMBEDDED, "" },
	};
	struct circuit *c;
	char text[512];
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(vectors); i++) {
		(void)snprintf(text, sizeof(text), HEAD "ends:\n  a: %s\n"
		    "  b: { agent: embedded, name: far, data: 198.18.0.2 }\n",
		    vectors[i].end);
		c = circuit_accepted(text);
		assert_true(c->ends_declared);
		assert_int_equal(c->ends[END_A].reach, vectors[i].reach);
		assert_string_equal(c->ends[END_A].control,
		    vectors[i].control);
		assert_string_equal(c->ends[END_A].name, "a");
		assert_string_equal(c->ends[END_B].name, "far");
		assert_string_equal(c->ends[END_B].data, "198.18.0.2");
		circuit_free(c);
	}
}

static void
segments_inherit_layers_and_keep_what_they_share(void **state)
{
	struct circuit *c = circuit_accepted("circuit: X\n"
	    "layers: [ ethernet, ipv4, tcp ]\n"
	    "segments:\n"
	    "  - { name: one, medium: { kind: ethernet, line-rate: 1 Gbit/s }, "
	    "exclusive: yes, mtu: 9000 B }\n"
	    "  - name: two\n"
	    "    medium: { kind: ethernet, line-rate: 10 Gbit/s }\n"
	    "    layers: [ ethernet, vlan, ipv4, tcp ]\n"
	    "    shared-with: [ P, Q ]\n"
	    "    service: { peak: 2 Gbit/s, counted-at: line, burst: 1 MB }\n"
	    "services: [ { name: voice, dscp: 46, priority: 5, committed: "
	    "10 Mbit/s } ]\n");

	(void)state;
	assert_int_equal(c->segments_count, 2);
	assert_int_equal(c->segments[0].layers.count, 3);
	assert_int_equal(c->segments[0].exclusive, 1);
	assert_int_equal(c->segments[1].layers.count, 4);
	assert_int_equal(c->segments[1].shared_with_count, 2);
	assert_string_equal(c->segments[1].shared_with[1].name, "Q");
	assert_int_equal(c->segments[1].service.peak_bps[1], 2000000000);
	assert_int_equal(service_rate(&c->segments[1].service,
	    DIRECTION_B_TO_A), 2000000000);
	assert_int_equal(c->segments[1].service.counted_at, LEVEL_LINE);
	assert_int_equal(c->segments[1].service.burst_bytes[0], 1000000);
	assert_int_equal(circuit_mtu(c), 1500);
	assert_int_equal(c->services_count, 1);
	assert_int_equal(c->services[0].dscp, 46);
	assert_int_equal(c->services[0].priority, 5);
	assert_int_equal(c->services[0].counted_at, LEVEL_FRAME);
	circuit_free(c);
}

#define ONE "{ name: one, medium: { kind: ethernet, line-rate: 1 Gbit/s } }"

static const struct {
	const char *text, *expected;
} refused[] = {
	{ "", "empty" },
	{ "[ 1 ]\n", "a mapping that begins with" },
	{ "layers: [ ethernet, ipv4, tcp ]\n", "medium" },
	{ MEDIUM, "layers: missing" },
	{ "medium: host\nlayers: [ ipv4, tcp ]\n", "'circuit'" },
	{ HEAD "colour: blue\n", "unknown field 'colour'" },
	{ HEAD "critera: { }\n", "did you mean 'criteria'" },
	{ HEAD "mtu: 1500\n", "test:4:6" },
	{ HEAD "mtu: 67 B\n", "from 68 B" },
	{ MEDIUM "layers: [ ethernet, ipv6, tcp ]\nmtu: 1279 B\n",
	  "from 1280 B" },
	{ HEAD "segments: [ " ONE " ]\n", "`segments` is given too" },
	{ "circuit: X\nmtu: 1400 B\nsegments: [ " ONE " ]\n",
	  "`segments` is given too" },
	{ "circuit: X\nservice: { }\nsegments: [ " ONE " ]\n",
	  "`segments` is given too" },
	{ "circuit: X\nsegments: [ ]\n", "test:2:11" },
	{ "circuit: X\nsegments: [ " ONE " ]\n", "layers: missing" },
	{ "circuit: X\nlayers: [ ethernet, ipv4, tcp ]\n"
	  "segments: [ " ONE ", " ONE " ]\n", "'one' is taken" },
	{ "circuit: X\nlayers: [ ethernet, ipv4, tcp ]\n"
	  "segments: [ " ONE ", { name: b, medium: { kind: ethernet, "
	  "line-rate: 1 Gbit/s }, layers: [ ethernet, ipv4, { tcp: { "
	  "timestamps: no } } ] } ]\n", "segment 'one'" },
	{ "circuit: X\nlayers: [ ethernet, ipv4, tcp ]\n"
	  "segments: [ " ONE ", { name: b, medium: host, "
	  "layers: [ ipv4, tcp ] } ]\n", "reference" },
	{ "circuit: X\nlayers: [ ethernet, ipv4, tcp ]\n"
	  "segments: [ { name: b } ]\n", "medium: missing" },
	{ "circuit: X\nlayers: [ ethernet, ipv4, tcp ]\nsegments: [ { "
	  "name: b, medium: { kind: ethernet, line-rate: 1 Gbit/s }, "
	  "exclusive: yes, shared-with: [ Y ] } ]\n", "exclusive" },
	{ HEAD "service: { }\nservices: [ { } ]\n",
	  "`services` is given too" },
	{ HEAD "service: { committed: 2 Mbit/s, peak: 1 Mbit/s }\n",
	  "below the committed rate" },
	{ HEAD "service: { committed: 1 Mbit/s, counted-at: bits }\n",
	  "frame-without-fcs" },
	{ HEAD "services: [ { committed: 1 Mbit/s }, { committed: "
	  "1 Mbit/s, counted-at: line } ]\n", "the same for all" },
	{ "circuit: X\nmedium: host\nlayers: [ ipv4, tcp ]\n"
	  "service: { committed: 1 Mbit/s }\n", "reference" },
	{ HEAD "plan: { duration: 1050 ms }\n", "row-spacing" },
	{ HEAD "plan: { trials: 0 }\n", "trials" },
	{ HEAD "plan: { trials: 1001 }\n", "trials" },
	{ HEAD "plan: { row-spacing: 9 ms }\n", "row-spacing" },
	{ HEAD "plan: { streams: 257 }\n", "streams" },
	{ HEAD "plan: { dscp: 64 }\n", "dscp" },
	{ HEAD "plan: { directions: up }\n", "a-to-b, b-to-a, both" },
	{ HEAD "plan: { directions: [ ] }\n", "found none" },
	{ HEAD "plan: { directions: { a-to-b: a-to-b } }\n",
	  "found a mapping" },
	{ HEAD "criteria: { throughput: 101 % }\n", "throughput" },
	{ HEAD "ends: { a: { agent: embedded } }\n", "b: missing" },
	{ HEAD "ends: { a: { agent: embedded }, "
	  "b: { agent: embedded }, c: { } }\n", "allowed: a, b" },
	{ HEAD "ends: { a: { agent: remote }, b: { agent: embedded } "
	  "}\n", "allowed: embedded" },
	{ HEAD "ends: { a: { agent: embedded, control: called }, b: { "
	  "agent: embedded } }\n", "an embedded agent has none" },
	{ HEAD "ends: { a: { agent: embedded, identity: " PIN " }, b: "
	  "{ agent: embedded } }\n", "an embedded agent has none" },
	{ HEAD "ends: { a: { name: x }, b: { agent: embedded } }\n",
	  "control: missing" },
	{ HEAD "ends: { a: { control: called }, b: { agent: embedded } "
	  "}\n", "identity: missing" },
	{ HEAD "ends: { a: { control: \"x:99999\", identity: " PIN
	  " }, b: { agent: embedded } }\n", "control" },
	{ HEAD "ends: { a: { control: relayed, identity: " PIN " }, "
	  "b: { control: relayed, identity: " PIN " } }\n", "relay" },
	{ HEAD "ends: { a: { agent: embedded, data: quay.example }, "
	  "b: { agent: embedded } }\n", "a numeric" },
	{ HEAD "ends: { a: { agent: embedded, data: \"2001:2::1\" }, "
	  "b: { agent: embedded } }\n", "an IPv6 address" },
	{ HEAD "ends: [ ]\n", "ends" },
};

static void
wrong_declarations_are_refused_with_their_place(void **state)
{
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(refused); i++)
		circuit_refused(refused[i].text, refused[i].expected);
}

static void
an_override_takes_the_place_of_what_the_file_says(void **state)
{
	const char *const overrides[] = { "medium.line-rate=10 Gbit/s",
		"mtu=9000 B", "service.committed=1 Gbit/s" };
	const char *const wrong[] = { "medium.line-rate=fast" };
	struct path_segment segment;
	struct circuit *c = NULL;
	struct error err;

	(void)state;
	assert_int_equal(circuit_read_text(HEAD, strlen(HEAD), "test",
	    overrides, COUNT(overrides), &c, &err), 0);
	segment_of(c, DIRECTION_A_TO_B, &segment);
	assert_int_equal(fraction_floor(segment.capacity.line_bps),
	    10000000000);
	assert_int_equal(circuit_mtu(c), 9000);
	assert_int_equal(c->services[0].committed_bps[1], 1000000000);
	circuit_free(c);
	assert_int_equal(circuit_read_text(HEAD, strlen(HEAD), "test", wrong,
	    1, &c, &err), -1);
	assert_non_null(strstr(err.where, "--set medium.line-rate"));
}

/* The product's own examples, in both directions and for every protocol. */
static void
every_example_is_accepted_and_has_a_ceiling(void **state)
{
	DIR *folder = opendir(SOURCE_FOLDER "/controller/examples");
	struct dirent *entry;
	struct circuit *c;
	struct ceiling ceiling;
	struct error err;
	enum protocol protocol;
	char path[1024], why[1024];
	int read = 0;

	(void)state;
	assert_non_null(folder);
	while ((entry = readdir(folder)) != NULL) {
		if (strstr(entry->d_name, ".yaml") == NULL)
			continue;
		(void)snprintf(path, sizeof(path), "%s/controller/examples/%s",
		    SOURCE_FOLDER, entry->d_name);
		if (circuit_read_file(path, NULL, 0, &c, &err) == -1)
			fail_msg("%s", error_text(&err, why, sizeof(why)));
		for (protocol = 0; protocol < PROTOCOLS; protocol++) {
			ceiling_of(c, protocol, &ceiling);
			assert_int_equal(ceiling.reference,
			    ceiling.rate_bps[LEVEL_PAYLOAD] == 0);
		}
		circuit_free(c);
		read++;
	}
	(void)closedir(folder);
	assert_true(read >= 6);
}

static void
a_file_that_is_not_there_is_absent(void **state)
{
	struct circuit *c;
	struct error err;

	(void)state;
	assert_int_equal(circuit_read_file("/nonexistent/x.yaml", NULL, 0, &c,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_ABSENT);
}

static void
every_field_says_what_it_is(void **state)
{
	const struct field *row, *inner;

	(void)state;
	for (row = circuit_fields; row->name != NULL; row++) {
		assert_non_null(row->help);
		for (inner = row->fields; inner != NULL && inner->name != NULL;
		    inner++)
			assert_non_null(inner->help);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(what_is_not_declared_has_its_default),
		cmocka_unit_test(
		    nothing_is_required_of_a_reference_unless_declared),
		cmocka_unit_test(any_criterion_takes_the_place_of_the_default),
		cmocka_unit_test(the_plan_is_read_whole),
		cmocka_unit_test(each_way_to_reach_an_agent_is_known),
		cmocka_unit_test(
		    segments_inherit_layers_and_keep_what_they_share),
		cmocka_unit_test(
		    wrong_declarations_are_refused_with_their_place),
		cmocka_unit_test(
		    an_override_takes_the_place_of_what_the_file_says),
		cmocka_unit_test(every_example_is_accepted_and_has_a_ceiling),
		cmocka_unit_test(a_file_that_is_not_there_is_absent),
		cmocka_unit_test(every_field_says_what_it_is),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
