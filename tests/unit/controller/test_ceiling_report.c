/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdlib.h>

#include <jansson.h>

#include "declaration_text.h"
#include "report/ceiling_report.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))
#define ANSWER_SIZE 65536

/* What a function prints, in a buffer of ANSWER_SIZE. */
static FILE *
answer_begin(char *answer)
{
	FILE *f = fmemopen(answer, ANSWER_SIZE, "w");

	assert_non_null(f);
	return f;
}

static size_t
widest_line(const char *text)
{
	size_t widest = 0, length;

	for (; *text != '\0'; text += text[length] == '\n' ? length + 1 :
	    length) {
		length = strcspn(text, "\n");
		if (length > widest)
			widest = length;
	}
	return widest;
}

static struct ceiling_report *
report_of(struct circuit *circuit)
{
	struct ceiling_report *report = calloc(1, sizeof(*report));
	struct error err;

	assert_non_null(report);
	assert_int_equal(ceiling_report_make(circuit, report, &err), 0);
	return report;
}

/* 1 Gbit/s, IPv4, TCP with timestamps: 1448 of 1538 octets (RFC 7323). */
static void
json_holds_the_ceiling_at_every_level(void **state)
{
	static const struct {
		const char *name;
		json_int_t bps;
	} members[] = {
		{ "line_rate_bps", 1000000000 },
		{ "line_bps", 1000000000 },
		{ "frame_bps", 986996098 },
		{ "packet_bps", 975292587 },
		{ "segment_bps", 962288686 },
		{ "payload_bps", 941482444 },
		{ "unused_bps", 0 },
	};
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    "");
	struct ceiling_report *report = report_of(circuit);
	static char answer[ANSWER_SIZE];
	json_t *root, *ceilings, *bound, *protocols;
	json_int_t left = 1000000000;
	size_t i;
	FILE *f = answer_begin(answer);

	(void)state;
	assert_int_equal(ceiling_report_json(report, f), 0);
	(void)fclose(f);
	root = json_loads(answer, JSON_REJECT_DUPLICATES, NULL);
	assert_non_null(root);
	ceilings = json_object_get(root, "ceilings");
	assert_int_equal(json_array_size(ceilings), 2);
	ceilings = json_array_get(ceilings, 1);
	assert_string_equal(json_string_value(json_object_get(ceilings,
	    "direction")), "b-to-a");
	for (i = 0; i < COUNT(members); i++)
		assert_int_equal(json_integer_value(json_object_get(ceilings,
		    members[i].name)), members[i].bps);
	bound = json_array_get(json_object_get(ceilings, "bounds"), 0);
	assert_true(json_is_true(json_object_get(bound, "binding")));
	assert_string_equal(json_string_value(json_object_get(bound,
	    "class")), "medium");
	for (i = 0; i < json_array_size(json_object_get(ceilings, "ladder"));
	    i++)
		left -= json_integer_value(json_object_get(json_array_get(
		    json_object_get(ceilings, "ladder"), i), "bps"));
	assert_int_equal(left, 941482444);
	protocols = json_object_get(ceilings, "payload_by_protocol");
	assert_int_equal(json_integer_value(json_object_get(protocols,
	    "udp")), 957087126);
	json_decref(root);
	free(report);
	circuit_free(circuit);
}

static void
csv_quotes_as_rfc_4180_says(void **state)
{
	struct circuit *circuit = circuit_accepted("circuit: X\n"
	    "layers: [ ethernet, ipv4, tcp ]\nsegments: [ { name: 'a \"b\", c'"
	    ", medium: { kind: ethernet, line-rate: 1 Gbit/s } } ]\n");
	struct ceiling_report *report = report_of(circuit);
	static char answer[ANSWER_SIZE];
	const char *line;
	FILE *f = answer_begin(answer);

	(void)state;
	ceiling_report_csv(report, f);
	(void)fclose(f);
	assert_non_null(strstr(answer,
	    "a-to-b,bound,\"ethernet line of segment 'a \"\"b\"\", c'\","
	    "medium,,941482444,yes,IEEE 802.3,\r\n"));
	assert_non_null(strstr(answer, "a-to-b,step,\"ethernet: preamble, SFD, "
	    "gap\",,20,13003902,,IEEE 802.3,\r\n"));	/* 1e9 - 986996098 */
	for (line = answer; (line = strchr(line, '\n')) != NULL; line++)
		assert_int_equal(line[-1], '\r');
	free(report);
	circuit_free(circuit);
}

static void
text_says_both_directions_once_where_they_are_alike(void **state)
{
	struct circuit *alike = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    ""), *unlike = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    "service: { committed: { a-to-b: 1 Mbit/s, b-to-a: 2 Mbit/s } }");
	struct ceiling_report *report = report_of(alike);
	static char answer[ANSWER_SIZE];
	FILE *f = answer_begin(answer);

	(void)state;
	ceiling_report_text(report, f);
	(void)fclose(f);
	free(report);
	assert_non_null(strstr(answer, "both directions alike: 941.482 Mbit/s"
	    ));
	assert_null(strstr(answer, "a-to-b"));
	assert_true(widest_line(answer) <= 80);
	memset(answer, 0, sizeof(answer));
	report = report_of(unlike);
	f = answer_begin(answer);
	ceiling_report_text(report, f);
	(void)fclose(f);
	free(report);
	assert_non_null(strstr(answer, "a-to-b: 0.953 Mbit/s"));
	assert_non_null(strstr(answer, "b-to-a: 1.907 Mbit/s"));
	circuit_free(alike);
	circuit_free(unlike);
}

static void
text_of(struct circuit *circuit, char *answer)
{
	struct ceiling_report *report = report_of(circuit);
	FILE *f;

	memset(answer, 0, ANSWER_SIZE);
	f = answer_begin(answer);
	ceiling_report_text(report, f);
	(void)fclose(f);
	free(report);
}

/* 1448 of 1538 + 90/2 octets, and of 1538 + 90/45: the acknowledgement is 20 +
 * 32 octets in a frame of 70 on a line of 90 (RFC 9293 section 3.8.6.3). */
static void
text_gives_a_range_to_both_directions_at_once(void **state)
{
	struct circuit *full = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    ""), *datagrams = circuit_of("1 Gbit/s", "ethernet, ipv4, udp",
	    ""), *half = circuit_accepted("circuit: X\nmedium: { kind: "
	    "ethernet, line-rate: 10 Mbit/s, duplex: half }\nlayers: "
	    "[ ethernet, ipv4, udp ]\n");
	static char answer[ANSWER_SIZE];

	(void)state;
	text_of(full, answer);
	assert_non_null(strstr(answer, "both directions at once: 914.718 to "
	    "940.259 Mbit/s each way\n  one acknowledgement for 2 to 45 "
	    "segments\n"));
	text_of(datagrams, answer);
	assert_non_null(strstr(answer, "both directions at once: the same\n"));
	text_of(half, answer);		/* 1472 of 1538 octets, halved */
	assert_non_null(strstr(answer, "both directions at once: 4.785 Mbit/s "
	    "each way\n  they share the line: 9.570 Mbit/s together\n"));
	assert_non_null(strstr(answer, "on ethernet, duplex: shared\n"));
	circuit_free(full);
	circuit_free(datagrams);
	circuit_free(half);
}

/* A level without a step of its own is there: 1500 + 18 octets of frame. */
static void
text_shows_a_level_that_no_step_leads_to(void **state)
{
	struct circuit *circuit = circuit_accepted("circuit: X\nmedium: { "
	    "kind: radio, channel-width: 56 MHz, roll-off: 0.12, modulation: "
	    "256-qam, code-rate: 0.9 }\nlayers: [ ethernet, ipv4, udp ]\n");
	static char answer[ANSWER_SIZE];
	const char *frame;

	(void)state;
	text_of(circuit, answer);
	frame = strstr(answer, "\nframe  ");
	assert_non_null(frame);
	assert_non_null(strstr(frame, "1518.000  360.000"));
	assert_true(strstr(answer, "radio: coding") < frame);
	assert_true(frame < strstr(answer, "ethernet: header and FCS"));
	circuit_free(circuit);
}

/* RFC 6349 table 3.3.1: 1 ms of 1 Gbit/s are 125 kB. */
static void
text_sets_conditions_and_figures_beside_the_ceiling(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    "conditions: { round-trip: 1 ms, window: 16 kB, host: 2 Gbit/s, "
	    "test-length: 10 s, transfer-size: 100 MB }");
	static char answer[ANSWER_SIZE];

	(void)state;
	text_of(circuit, answer);
	assert_non_null(strstr(answer, "set by ethernet line\n"));
	assert_non_null(strstr(answer, "condition, lowers no ceiling"));
	assert_non_null(strstr(answer, " 128.000  lowest: "));
	assert_non_null(strstr(answer, "125000 B of the line in 1 ms"));
	assert_non_null(strstr(answer, "each with a window of 16 kB"));
	assert_non_null(strstr(answer, "for 100 MB (RFC 6349"));
	circuit_free(circuit);
}

static void
text_keeps_the_declared_stack_beside_the_others(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s",
	    "ethernet, ipv4, udp, quic", "");
	static char answer[ANSWER_SIZE];

	(void)state;
	text_of(circuit, answer);
	assert_non_null(strstr(answer, "of payload over udp+quic\n"));
	assert_non_null(strstr(answer, "as declared"));
	assert_non_null(strstr(answer, "\ntcp+tls "));
	assert_non_null(strstr(answer, "quic: packet and frame header, tag"));
	circuit_free(circuit);
}

static void
text_says_how_far_each_row_can_be_relied_on(void **state)
{
	struct circuit *exact = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    ""), *mixed = circuit_accepted("circuit: X\nmedium: { kind: "
	    "wlan, generation: 802.11n, band: 5 GHz, mcs: 7, channel-width: "
	    "20 MHz }\nlayers: [ wlan, ipv4, tcp ]\n");
	static char answer[ANSWER_SIZE];

	(void)state;
	text_of(exact, answer);
	assert_non_null(strstr(answer, "ethernet  exact, within 100 ppm: "));
	assert_non_null(strstr(answer, "  layers    exact\n"));
	assert_non_null(strstr(answer, "1000base-t: PAM-5"));
	text_of(mixed, answer);
	assert_non_null(strstr(answer, "wlan        model: "));
	assert_non_null(strstr(answer, "rests on memory: "));
	assert_non_null(strstr(answer, "  layer wlan  nominal"));
	circuit_free(exact);
	circuit_free(mixed);
}

/* The same of a line of a few kbit/s and of 400 Gbit/s. */
static void
text_chooses_a_unit_that_can_be_read(void **state)
{
	static const struct {
		const char *rate, *expected;
	} vectors[] = {	/* 1472 of 1538 octets */
		{ "9600 bit/s", "alike: 9.188 kbit/s of payload" },
		{ "10 Mbit/s", "alike: 9.570 Mbit/s of payload" },
		{ "400 Gbit/s", "alike: 382.834 Gbit/s of payload" },
	};
	static char answer[ANSWER_SIZE];
	struct circuit *circuit;

	(void)state;
	for (size_t i = 0; i < COUNT(vectors); i++) {
		circuit = circuit_of(vectors[i].rate, "ethernet, ipv4, udp",
		    "");
		text_of(circuit, answer);
		assert_non_null(strstr(answer, vectors[i].expected));
		circuit_free(circuit);
	}
	circuit = circuit_of("400 Gbit/s", "ethernet, ipv4, udp",
	    "service: { committed: 1 Mbit/s }");
	text_of(circuit, answer);	/* 1472 of 1518 octets */
	assert_non_null(strstr(answer, "alike: 0.969 Mbit/s of payload"));
	circuit_free(circuit);
}

static void
json_says_duplex_accuracy_and_figures(void **state)
{
	struct circuit *circuit = circuit_of("1 Gbit/s", "ethernet, ipv4, tcp",
	    "conditions: { round-trip: 1 ms }");
	struct ceiling_report *report = report_of(circuit);
	static char answer[ANSWER_SIZE];
	json_t *root, *ceiling, *both, *figures;
	FILE *f = answer_begin(answer);

	(void)state;
	assert_int_equal(ceiling_report_json(report, f), 0);
	(void)fclose(f);
	assert_null(strstr(answer, "nan"));
	root = json_loads(answer, JSON_REJECT_DUPLICATES, NULL);
	assert_non_null(root);
	ceiling = json_array_get(json_object_get(root, "ceilings"), 0);
	assert_string_equal(json_string_value(json_object_get(ceiling,
	    "duplex")), "full");
	assert_string_equal(json_string_value(json_object_get(ceiling,
	    "top")), "tcp");
	assert_true(json_is_string(json_object_get(ceiling,
	    "accuracy_note")));
	assert_int_equal(json_array_size(json_object_get(ceiling, "memory")),
	    0);
	assert_true(json_array_size(json_object_get(ceiling, "notes")) > 0);
	both = json_object_get(ceiling, "both");
	assert_int_equal(json_integer_value(json_object_get(both,
	    "low_payload_bps")), 914718888);	/* 1448 of 1583 octets */
	figures = json_object_get(ceiling, "figures");
	assert_int_equal(json_integer_value(json_object_get(figures,
	    "bdp_bytes")), 125000);
	assert_true(json_is_null(json_object_get(figures, "loss_ratio")));
	assert_int_equal(json_integer_value(json_object_get(json_object_get(
	    json_object_get(root, "circuit"), "conditions"),
	    "round_trip_ns")), 1000000);
	json_decref(root);
	free(report);
	circuit_free(circuit);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(json_holds_the_ceiling_at_every_level),
		cmocka_unit_test(csv_quotes_as_rfc_4180_says),
		cmocka_unit_test(
		    text_says_both_directions_once_where_they_are_alike),
		cmocka_unit_test(text_gives_a_range_to_both_directions_at_once),
		cmocka_unit_test(text_shows_a_level_that_no_step_leads_to),
		cmocka_unit_test(
		    text_sets_conditions_and_figures_beside_the_ceiling),
		cmocka_unit_test(
		    text_keeps_the_declared_stack_beside_the_others),
		cmocka_unit_test(text_says_how_far_each_row_can_be_relied_on),
		cmocka_unit_test(text_chooses_a_unit_that_can_be_read),
		cmocka_unit_test(json_says_duplex_accuracy_and_figures),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
