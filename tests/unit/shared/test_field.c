/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <math.h>
#include <string.h>

#include "shared/field_fixture.h"

static void
near(double found, double wanted)
{
	assert_true(found > wanted - 1e-12 && found < wanted + 1e-12);
}

static void
what_is_absent_is_set_to_default_or_unset(void **state)
{
	struct thing t;

	(void)state;
	read_good("name: quay", &t);
	assert_string_equal(t.name, "quay");
	assert_int_equal(t.rate_bps[0], FIELD_UNSET);
	assert_int_equal(t.rate_bps[1], FIELD_UNSET);
	assert_int_equal(t.burst_bytes, 64000);
	assert_int_equal(t.delay_ns, FIELD_UNSET);
	assert_true(isnan(t.share_ratio));
	near(t.loss_ratio[0], 0.001);
	near(t.loss_ratio[1], 0.001);
	assert_true(isnan(t.level_dbm));
	assert_int_equal(t.streams, 4);
	assert_int_equal(t.priority[0], FIELD_UNSET);
	assert_int_equal(t.priority[1], FIELD_UNSET);
	assert_int_equal(t.on, FIELD_UNSET);
	assert_int_equal(t.kind, 20);
	/* an absent mapping demands nothing and still has its defaults */
	assert_string_equal(t.inner.name, "");
	assert_int_equal(t.inner.rate_bps, 5000);
	assert_int_equal(t.items_count, 0);
	assert_string_equal(t.custom, "absent");
}

static void
every_kind_of_field_is_read(void **state)
{
	struct thing t;

	(void)state;
	read_good("name: quay\n"
	    "line-rate: 1 Gbit/s\n"
	    "burst: 1500 B\n"
	    "delay: 20 ms\n"
	    "share: 97 %\n"
	    "loss: { a-to-b: 1 %, b-to-a: 0.02 }\n"
	    "level: -60 dBm\n"
	    "streams: 8\n"
	    "priority: { b-to-a: 5 }\n"
	    "on: yes\n"
	    "kind: radio\n"
	    "inner: { name: in, rate: 3 Mbit/s }\n"
	    "items: [ { name: a }, { name: b, rate: 7 bit/s } ]\n"
	    "custom: [ 1 ]\n", &t);
	assert_int_equal(t.rate_bps[0], 1000000000);
	assert_int_equal(t.rate_bps[1], 1000000000);
	assert_int_equal(t.burst_bytes, 1500);
	assert_int_equal(t.delay_ns, 20000000);
	near(t.share_ratio, 0.97);
	near(t.loss_ratio[0], 0.01);
	near(t.loss_ratio[1], 0.02);
	near(t.level_dbm, -60);
	assert_int_equal(t.streams, 8);
	assert_int_equal(t.priority[0], FIELD_UNSET);
	assert_int_equal(t.priority[1], 5);
	assert_int_equal(t.on, 1);
	assert_int_equal(t.kind, 30);
	assert_string_equal(t.inner.name, "in");
	assert_int_equal(t.inner.rate_bps, 3000000);
	assert_int_equal(t.items_count, 2);
	assert_string_equal(t.items[0].name, "a");
	assert_int_equal(t.items[0].rate_bps, 5000);
	assert_string_equal(t.items[1].name, "b");
	assert_int_equal(t.items[1].rate_bps, 7);
	assert_string_equal(t.custom, "given");
}

static void
a_direction_left_out_has_the_default(void **state)
{
	struct thing t;

	(void)state;
	read_good("{ name: x, loss: { a-to-b: 2 % }, priority: {} }", &t);
	near(t.loss_ratio[0], 0.02);
	near(t.loss_ratio[1], 0.001);
	assert_int_equal(t.priority[0], FIELD_UNSET);
	assert_int_equal(t.priority[1], FIELD_UNSET);
}

static void
yes_and_no_have_two_spellings(void **state)
{
	static const struct {
		const char *text;
		uint64_t value;
	} table[] = {
		{ "yes", 1 }, { "true", 1 }, { "no", 0 }, { "false", 0 },
	};

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++) {
		struct error err = { 0 };
		uint64_t value = 77;

		assert_int_equal(field_set_text(row_named("on"),
		    table[i].text, NULL, &value, &err), 0);
		assert_int_equal(value, table[i].value);
	}
}

/* Each edge, and what lies just beyond it. */
static void
limits_hold_to_the_last_unit(void **state)
{
	static const struct {
		const char *row, *text;
		bool good;
	} table[] = {
		{ "line-rate", "0 bit/s", false },
		{ "line-rate", "1 bit/s", true },
		{ "line-rate", "2 bit/s", true },
		{ "line-rate", "999999999999 bit/s", true },
		{ "line-rate", "1 Tbit/s", true },
		{ "line-rate", "1000000000001 bit/s", false },
		{ "burst", "1499 B", false },
		{ "burst", "1500 B", true },
		{ "burst", "1501 B", true },
		{ "burst", "65534 B", true },
		{ "burst", "65535 B", true },
		{ "burst", "64 KiB", false },
		{ "delay", "0 s", true },
		{ "delay", "18446744073709551614 ns", true },
		{ "delay", "18446744073709551615 ns", false }, /* unset */
		{ "share", "0.499999", false },
		{ "share", "0.5", true },
		{ "share", "50 %", true },
		{ "share", "100 %", true },
		{ "share", "100.0001 %", false },
		{ "loss", "0", true },
		{ "loss", "1", true },
		{ "loss", "1.01", false },
		{ "level", "-999 dBm", true },
		{ "level", "999 dBm", true },
		{ "streams", "0", false },
		{ "streams", "1", true },
		{ "streams", "2", true },
		{ "streams", "63", true },
		{ "streams", "64", true },
		{ "streams", "65", false },
		{ "streams", "18446744073709551616", false },
		{ "priority", "0", true },
		{ "priority", "7", true },
		{ "priority", "8", false },
		{ "name", "", false },
		{ "name", "1", true },
		{ "name", "12345678", true },
		{ "name", "123456789", false },
	};

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++) {
		union {
			uint64_t whole;
			double real;
			char text[9];
		} value;
		struct error err = { 0 };
		int rc = field_set_text(row_named(table[i].row),
		    table[i].text, NULL, &value, &err);

		if (rc != (table[i].good ? 0 : -1))
			fail_msg("%s: '%s': %s", table[i].row, table[i].text,
			    err.cause);
	}
}

static void
a_required_direction_must_be_given(void **state)
{
	static const struct field required[] = {
		{ .name = "rate", .kind = FIELD_QUANTITY, .required = true,
		    .dimension = DIMENSION_RATE, .per_direction = true },
		{ .name = NULL },
	};
	static const char text[] = "rate: { a-to-b: 1 bit/s }";
	struct node *root = NULL;
	struct error err = { 0 };
	uint64_t rates_bps[2];

	(void)state;
	assert_int_equal(document_read_text(text, sizeof(text) - 1, "f",
	    &root, &err), 0);
	assert_int_equal(fields_read(root, required, "it", rates_bps, &err),
	    -1);
	assert_string_equal(err.where, "f:1:7");
	assert_non_null(strstr(err.cause,
	    "required field 'b-to-a' is missing in rate; allowed: a rate"));
	assert_int_equal(document_override(root, "rate.b-to-a=2 bit/s", &err),
	    0);
	assert_int_equal(fields_read(root, required, "it", rates_bps, &err),
	    0);
	assert_int_equal(rates_bps[0], 1);
	assert_int_equal(rates_bps[1], 2);
	document_free(root);
}

static void
no_mapping_is_an_empty_one(void **state)
{
	struct error err = { 0 };
	struct thing t;
	struct item item;

	(void)state;
	assert_int_equal(fields_read(NULL, rows, "thing", &t, &err), -1);
	assert_string_equal(err.where, "");
	assert_non_null(strstr(err.cause,
	    "required field 'name' is missing in thing"));
	assert_int_equal(fields_read(NULL, item_rows + 1, "item", &item,
	    &err), 0);
	assert_int_equal(item.rate_bps, 5000);
}

static void
the_nearest_name_is_found(void **state)
{
	static const char *const names[] = {
		"medium", "layers", "mtu", "service", "services", "a", "b",
		"congestion-control",
		"a-name-that-is-longer-than-thirty-two-bytes",
	};
	static const struct {
		const char *word, *nearest;
	} table[] = {
		{ "mediun", "medium" },		/* one replaced */
		{ "meduim", "medium" },		/* two exchanged */
		{ "mdium", "medium" },		/* one left out */
		{ "mediumm", "medium" },	/* one too many */
		{ "madiom", "medium" },		/* two of six */
		{ "madion", NULL },		/* three of six */
		{ "medium", "medium" },
		{ "service", "service" },
		{ "servicess", "services" },
		{ "mut", "mtu" },
		{ "congxxxion-control", "congestion-control" },
		{ "congxxxxon-control", NULL },	/* four of eighteen */
		{ "mtx", "mtu" },
		{ "xtx", NULL },
		{ "xy", NULL },
		{ "c", NULL },			/* nothing in common */
		{ "", NULL },
		{ "MEDIUM", NULL },
		{ "a-name-that-is-longer-than-thirty-two-bytes", NULL },
	};

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++) {
		const char *nearest = nearest_name(table[i].word, names,
		    COUNT(names));

		if (table[i].nearest == NULL && nearest != NULL)
			fail_msg("'%s': '%s'", table[i].word, nearest);
		if (table[i].nearest != NULL)
			assert_string_equal(nearest, table[i].nearest);
	}
	assert_null(nearest_name("medium", names, 0));
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(what_is_absent_is_set_to_default_or_unset),
		cmocka_unit_test(every_kind_of_field_is_read),
		cmocka_unit_test(a_direction_left_out_has_the_default),
		cmocka_unit_test(yes_and_no_have_two_spellings),
		cmocka_unit_test(limits_hold_to_the_last_unit),
		cmocka_unit_test(a_required_direction_must_be_given),
		cmocka_unit_test(no_mapping_is_an_empty_one),
		cmocka_unit_test(the_nearest_name_is_found),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
