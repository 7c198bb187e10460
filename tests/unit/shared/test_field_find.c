/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

/* From a key to its row. */
#include "field_fixture.h"

static const char text[] = "name: x\nline-rate: 1 Gbit/s\n"
    "items: [ { name: a }, { name: b } ]\ncustom: [ 1 ]\n";

/* Below "chosen" are the rows of an item, where it is in the tree at all. */
static int
chosen_rows(const struct node *node, const char **key,
    const struct field **out, struct error *err)
{
	if (node == NULL)
		return error_set(err, ERROR_USAGE, "chosen: nothing there");
	if (strncmp(*key, "skip.", 5) == 0)
		*key += 5;
	*out = item_rows;
	return 0;
}

static const struct field own_rows[] = {
	{ .name = "chosen", .kind = FIELD_CUSTOM, .read = read_custom,
	    .rows_of = chosen_rows },
	{ .name = NULL },
};

static struct node *
read_tree(const char *yaml)
{
	struct node *root = NULL;
	struct error err;

	assert_int_equal(document_read_text(yaml, strlen(yaml), "f", &root,
	    &err), 0);
	return root;
}

static void
a_key_leads_to_its_row(void **state)
{
	static const struct {
		const char *key, *name;
		const struct field *below;
	} vectors[] = {
		{ "name", "name", NULL },
		{ "line-rate", "line-rate", NULL },
		{ "line-rate.a-to-b", "line-rate", NULL },
		{ "priority.b-to-a", "priority", NULL },
		{ "inner", "inner", item_rows },
		{ "inner.rate", "rate", NULL },	/* not in the tree */
		{ "items", "items", item_rows },
		{ "items.1", "items", item_rows },
		{ "items.1.rate", "rate", NULL },
		{ "custom", "custom", NULL },
	};
	const struct field *row, *below;
	struct node *root = read_tree(text);
	struct error err;

	(void)state;
	for (size_t i = 0; i < COUNT(vectors); i++) {
		if (field_find(root, rows, vectors[i].key, &row, &below,
		    &err) == -1)
			fail_msg("%s: %s", vectors[i].key, err.cause);
		assert_string_equal(row->name, vectors[i].name);
		assert_ptr_equal(below, vectors[i].below);
	}
	document_free(root);
}

static void
a_key_that_leads_nowhere_names_the_nearest(void **state)
{
	static const struct {
		const char *key, *cause;
	} vectors[] = {
		{ "brust", "did you mean 'burst'?" },
		{ "", "unknown field ''; known: name, " },
		{ "inner.rat", "did you mean 'rate'?" },
		{ "burst.x", "nothing is below 'burst'" },
		{ "burst.a-to-b", "nothing is below 'burst'" },
		{ "line-rate.a-to-c", "nothing is below 'line-rate'" },
		{ "line-rate.a-to-b.x", "nothing is below" },
		{ "items.2.rate", "the list has 2 from 0 on" },
		{ "items.x.rate", "found 'x'" },
		{ "custom.0", "nothing is below 'custom'" },
		{ "q\001", "unknown field 'q?'" },
	};
	const struct field *row, *below;
	struct node *root = read_tree(text);
	struct error err;

	(void)state;
	for (size_t i = 0; i < COUNT(vectors); i++) {
		assert_int_equal(field_find(root, rows, vectors[i].key, &row,
		    &below, &err), -1);
		assert_int_equal(err.kind, ERROR_USAGE);
		if (strstr(err.cause, vectors[i].cause) == NULL)
			fail_msg("'%s': %s", vectors[i].key, err.cause);
	}
	document_free(root);
	root = read_tree("name: x");
	assert_int_equal(field_find(root, rows, "items.0.rate", &row, &below,
	    &err), -1);
	assert_non_null(strstr(err.cause, "no such list"));
	document_free(root);
}

static void
a_custom_row_says_which_rows_apply(void **state)
{
	const struct field *row, *below;
	struct node *root = read_tree("chosen: { x: 1 }");
	struct node *without = read_tree("other: 1");
	struct error err;

	(void)state;
	assert_int_equal(field_find(root, own_rows, "chosen", &row, &below,
	    &err), 0);
	assert_string_equal(row->name, "chosen");
	assert_ptr_equal(below, item_rows);
	assert_int_equal(field_find(root, own_rows, "chosen.skip.rate", &row,
	    &below, &err), 0);
	assert_string_equal(row->name, "rate");
	assert_int_equal(field_find(without, own_rows, "chosen.rate", &row,
	    &below, &err), -1);
	assert_string_equal(err.cause, "chosen: nothing there");
	document_free(root);
	document_free(without);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_key_leads_to_its_row),
		cmocka_unit_test(a_key_that_leads_nowhere_names_the_nearest),
		cmocka_unit_test(a_custom_row_says_which_rows_apply),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
