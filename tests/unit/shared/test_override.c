/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "shared/document_fixture.h"

static void
an_override_changes_adds_and_replaces(void **state)
{
	static const struct {
		const char *assignment, *path, *text;	/* NULL: not scalar */
	} table[] = {
		{ "circuit=PIER-05", "circuit", "PIER-05" },
		{ "medium.line-rate=2 Gbit/s", "medium.line-rate",
		    "2 Gbit/s" },
		{ "ends.a.control=198.18.0.9:1", "ends.a.control",
		    "198.18.0.9:1" },
		{ "ends.a.identity=sha256:ab", "ends.a.identity",
		    "sha256:ab" },
		{ "criteria={throughput: 95 %}", "criteria.throughput",
		    "95 %" },
		{ "criteria.loss=0.1 %", "criteria.loss", "0.1 %" },
		{ "plan.a.b.c.d=5", "plan.a.b.c.d", "5" },
		{ "layers.1=mpls", "layers.1", "mpls" },
		{ "layers.3.tcp.timestamps=yes", "layers.3.tcp.timestamps",
		    "yes" },
		{ "layers=[ ethernet, ipv6 ]", "layers.1", "ipv6" },
		{ "layers.1={ ipv4: { options: 4 B } }",
		    "layers.1.ipv4.options", "4 B" },
		{ "medium=x", "medium", "x" },
		{ "medium={ kind: radio }", "medium.kind", "radio" },
		{ "empty=\"a=b\"", "empty", "a=b" },
		{ "empty=a=b", "empty", "a=b" },
		{ "empty=", "empty", "" },
		{ "0.1=numbers are keys in a mapping", "0.1",
		    "numbers are keys in a mapping" },
	};
	struct node *root = read_good(sample, "circuit.yaml");
	struct error err = { 0 };

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++) {
		const struct node *node;

		if (document_override(root, table[i].assignment, &err) == -1)
			fail_msg("%s: %s", table[i].assignment, err.cause);
		node = find(root, table[i].path);
		if (node == NULL || node->text == NULL ||
		    strcmp(node->text, table[i].text) != 0)
			fail_msg("%s", table[i].assignment);
		assert_int_equal(node->line, 0);
	}
	/* the rest stands as it was */
	assert_string_equal(find(root, "ends.b.name")->text, "mast");
	assert_int_equal(find(root, "ends.b.name")->line, 5);
	assert_string_equal(find(root, "ends.a.name")->text, "quay");
	document_free(root);
}

static void
an_override_keeps_the_order_of_a_list(void **state)
{
	struct node *root = read_good("l: [ a, b, c ]", "f");
	struct error err = { 0 };

	(void)state;
	assert_int_equal(document_override(root, "l.0=x", &err), 0);
	assert_int_equal(document_override(root, "l.2=z", &err), 0);
	assert_string_equal(find(root, "l.0")->text, "x");
	assert_string_equal(find(root, "l.1")->text, "b");
	assert_string_equal(find(root, "l.2")->text, "z");
	assert_null(find(root, "l.3"));
	assert_null(find(root, "l.0")->key);
	document_free(root);
}

static void
errors_below_an_override_name_it_and_no_line(void **state)
{
	struct node *root = read_good(sample, "circuit.yaml");
	struct error err = { 0 };
	char text[600], assignment[] = "plan.x={ a: [ 1 ] }";

	(void)state;
	assert_int_equal(document_override(root, assignment, &err), 0);
	memset(assignment, '#', sizeof(assignment) - 1);
	(void)node_error(find(root, "plan.x.a.0"), &err, "found %d", 1);
	assert_string_equal(error_text(&err, text, sizeof(text)),
	    "--set plan.x: found 1");
	(void)node_error(find(root, "plan"), &err, "found %d", 2);
	assert_string_equal(error_text(&err, text, sizeof(text)),
	    "--set plan.x: found 2");
	document_free(root);
}

static const struct {
	const char *assignment, *where, *cause;
} override_refusals[] = {
	{ "", "--set ", "no '=', allowed: KEY=VALUE" },
	{ "circuit", "--set circuit", "no '='" },
	{ "=x", "--set ", "an empty name in the key" },
	{ ".=x", "--set .", "an empty name in the key" },
	{ ".a=x", "--set .a", "an empty name in the key" },
	{ "a.=x", "--set a.", "an empty name in the key" },
	{ "a..b=x", "--set a..b", "an empty name in the key" },
	{ "circuit.x=1", "--set circuit.x", "nothing is below 'circuit'" },
	{ "circuit.x.y=1", "--set circuit.x.y",
	    "nothing is below 'circuit'" },
	{ "layers.0.x=1", "--set layers.0.x",
	    "nothing is below 'ethernet'" },
	{ "layers.4=x", "--set layers.4",
	    "found '4', allowed: the number of an item, of which the list "
	    "has 4 from 0 on" },
	{ "layers.4.x=x", "--set layers.4.x", "found '4'" },
	{ "layers.x=1", "--set layers.x", "found 'x'" },
	{ "layers.-1=1", "--set layers.-1", "found '-1'" },
	{ "layers.18446744073709551616=1",
	    "--set layers.18446744073709551616", "found '18446744" },
	{ "list.0=1", "--set list.0", "the list has 0" },
	{ "x=[ 1", "--set x", "not YAML: " },
	{ "x=*a", "--set x", "an alias" },
	{ "x=&a 1", "--set x", "an anchor" },
	{ "x=!!str 1", "--set x", "a tag" },
	{ "x={ a: 1, a: 2 }", "--set x", "duplicate key 'a'" },
	{ "x={ <<: 2 }", "--set x", "a merge key" },
	{ "x=1\n---\n2", "--set x", "a second document" },
	{ "x=\377", "--set x", "not UTF-8 text" },
	{ "a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a=1",
	    "--set a.a.a.a.a.a.a.a.a.a.a.a.a.a.a.a", "nested deeper" },
	{ "a.a.a.a.a.a.a.a.a.a.a.a.a.a.a=[ 1 ]",
	    "--set a.a.a.a.a.a.a.a.a.a.a.a.a.a.a", "nested deeper" },
};

static void
a_bad_override_is_refused_and_changes_nothing(void **state)
{
	struct node *root = read_good(sample, "circuit.yaml");
	struct error err = { 0 };

	(void)state;
	assert_int_equal(document_override(root, "list=[]", &err), 0);
	for (size_t i = 0; i < COUNT(override_refusals); i++) {
		if (document_override(root, override_refusals[i].assignment,
		    &err) == 0)
			fail_msg("%s", override_refusals[i].assignment);
		if (strcmp(err.where, override_refusals[i].where) != 0 ||
		    strstr(err.cause, override_refusals[i].cause) == NULL)
			fail_msg("%s: '%s' '%s'",
			    override_refusals[i].assignment, err.where,
			    err.cause);
		assert_int_equal(err.kind, ERROR_INPUT);
	}
	assert_null(node_child(root, "a"));
	assert_null(node_child(root, "x"));
	assert_string_equal(find(root, "circuit")->text, "HARBOUR-04");
	document_free(root);
}

static void
overrides_reach_the_deepest_level(void **state)
{
	struct node *root = read_good("x: 1", "f");
	struct error err = { 0 };

	(void)state;
	assert_int_equal(document_override(root,
	    "a.a.a.a.a.a.a.a.a.a.a.a.a.a.a=1", &err), 0);
	assert_int_equal(document_override(root,
	    "a.a.a.a.a.a.a.a.a.a.a.a.a.a=[ 1 ]", &err), 0);
	document_free(root);
}

static void
a_root_that_is_no_collection_takes_no_override(void **state)
{
	struct node *root = read_good("word", "f");
	struct error err = { 0 };

	(void)state;
	assert_int_equal(document_override(root, "a=1", &err), -1);
	assert_string_equal(err.where, "--set a");
	document_free(root);
}

/* `- ethernet` and `- ethernet: {}` say the same. */
static void
a_bare_name_in_a_list_takes_what_lies_below_it(void **state)
{
	struct node *root = read_good(sample, "f");
	struct error err = { 0 };

	(void)state;
	assert_int_equal(document_override(root, "layers.1.vlan.id=7", &err),
	    0);
	assert_int_equal(document_put(root, "--sweep", "layers.1.vlan.id",
	    "8", &err), 0);
	assert_string_equal(find(root, "layers.1.vlan.id")->text, "8");
	assert_string_equal(find(root, "layers.1.vlan.id")->origin,
	    "--sweep layers.1.vlan.id");
	assert_string_equal(find(root, "layers.0")->text, "ethernet");
	assert_int_equal(document_put(root, "--sweep", "a..b", "8", &err), -1);
	assert_string_equal(err.where, "--sweep a..b");
	document_free(root);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(an_override_changes_adds_and_replaces),
		cmocka_unit_test(an_override_keeps_the_order_of_a_list),
		cmocka_unit_test(errors_below_an_override_name_it_and_no_line),
		cmocka_unit_test(a_bad_override_is_refused_and_changes_nothing),
		cmocka_unit_test(
		    a_bare_name_in_a_list_takes_what_lies_below_it),
		cmocka_unit_test(overrides_reach_the_deepest_level),
		cmocka_unit_test(
		    a_root_that_is_no_collection_takes_no_override),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
