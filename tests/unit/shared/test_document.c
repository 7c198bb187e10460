/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <errno.h>
#include <inttypes.h>
#include <unistd.h>

#include "shared/document_fixture.h"

static void
a_tree_keeps_texts_and_places(void **state)
{
	static const struct {
		const char *path;
		enum node_kind kind;
		unsigned line, column, key_line, key_column;
		const char *text;
	} table[] = {
		{ "circuit", NODE_SCALAR, 2, 10, 2, 1, "HARBOUR-04" },
		{ "ends", NODE_MAPPING, 4, 3, 3, 1, NULL },
		{ "ends.a", NODE_MAPPING, 4, 6, 4, 3, NULL },
		{ "ends.a.control", NODE_SCALAR, 4, 29, 4, 20,
		    "198.18.0.1:61741" },
		{ "ends.b.name", NODE_SCALAR, 5, 14, 5, 8, "mast" },
		{ "medium.line-rate", NODE_SCALAR, 6, 38, 6, 27, "1 Gbit/s" },
		{ "layers", NODE_SEQUENCE, 7, 9, 7, 1, NULL },
		{ "layers.0", NODE_SCALAR, 7, 11, 0, 0, "ethernet" },
		{ "layers.2", NODE_SCALAR, 7, 27, 0, 0, "ipv4" },
		{ "layers.3.tcp.timestamps", NODE_SCALAR, 7, 54, 7, 42, "no" },
		{ "empty", NODE_SCALAR, 8, 7, 8, 1, "" },
	};
	struct node *root = read_good(sample, "circuit.yaml");

	(void)state;
	assert_int_equal(root->kind, NODE_MAPPING);
	assert_null(root->key);
	assert_null(root->next);
	for (size_t i = 0; i < COUNT(table); i++) {
		const struct node *node = find(root, table[i].path);

		if (node == NULL)
			fail_msg("no %s", table[i].path);
		assert_int_equal(node->kind, table[i].kind);
		if (node->line != table[i].line ||
		    node->column != table[i].column ||
		    node->key_line != table[i].key_line ||
		    node->key_column != table[i].key_column)
			fail_msg("%s: %u:%u, key %u:%u", table[i].path,
			    node->line, node->column, node->key_line,
			    node->key_column);
		assert_string_equal(node->origin, "circuit.yaml");
		if (table[i].text == NULL)
			assert_null(node->text);
		else
			assert_string_equal(node->text, table[i].text);
	}
	document_free(root);
}

static void
the_tree_outlives_text_and_origin(void **state)
{
	char text[] = "name: quay", origin[] = "circuit.yaml";
	struct node *root = read_good(text, origin);

	(void)state;
	memset(text, '#', sizeof(text) - 1);
	memset(origin, '#', sizeof(origin) - 1);
	assert_string_equal(node_child(root, "name")->text, "quay");
	assert_string_equal(node_child(root, "name")->origin, "circuit.yaml");
	document_free(root);
	document_free(NULL);
}

static void
children_are_found_in_mappings_only(void **state)
{
	struct node *root = read_good("{ a: 1, b: [ a ] }", "x");

	(void)state;
	assert_non_null(node_child(root, "a"));
	assert_null(node_child(root, "c"));
	assert_null(node_child(node_child(root, "a"), "a"));
	assert_null(node_child(node_child(root, "b"), "a"));
	assert_null(node_child(NULL, "a"));
	document_free(root);
}

#define TEXT(literal) literal, sizeof(literal) - 1

static const struct {
	const char *text;
	size_t size;
	const char *where, *cause;	/* part of the cause */
} refusals[] = {
	{ TEXT(""), "f:1:1", "is empty" },
	{ TEXT("\n\n"), "f:1:1", "is empty" },
	{ TEXT("# only words\n"), "f:1:1", "is empty" },
	{ TEXT("---\n"), "f:1:1", "is empty" },
	{ TEXT("---\n...\n"), "f:1:1", "is empty" },
	{ TEXT("\357\273\277"), "f:1:1", "is empty" },
	{ TEXT("a: &x 1"), "f:1:4", "an anchor ('&') is not allowed" },
	{ TEXT("a: &x [ 1 ]"), "f:1:4", "an anchor" },
	{ TEXT("a: &x { b: 1 }"), "f:1:4", "an anchor" },
	{ TEXT("&x a: 1"), "f:1:1", "an anchor" },
	{ TEXT("a: 1\nb: *x"), "f:2:4", "an alias ('*') is not allowed" },
	{ TEXT("*x : 1"), "f:1:1", "an alias" },
	{ TEXT("a: !!str 1"), "f:1:4", "a tag ('!') is not allowed" },
	{ TEXT("a: !x 1"), "f:1:4", "a tag" },
	{ TEXT("a: ! 1"), "f:1:4", "a tag" },
	{ TEXT("\303\251: ! 1"), "f:1:4", "a tag" },
	{ TEXT("a: ! \"1\""), "f:1:4", "a tag" },
	{ TEXT("a: !\nb: 1"), "f:1:4", "a tag" },
	{ TEXT("a: !!map { b: 1 }"), "f:1:4", "a tag" },
	{ TEXT("a: ! [ 1 ]"), "f:1:4", "a tag" },
	{ TEXT("!!str a: 1"), "f:1:1", "a tag" },
	{ TEXT("%TAG ! tag:example.org,2026:\n---\na: 1"), "f:1:1",
	    "a tag directive" },
	{ TEXT("a: 1\nb: 2\na: 3"), "f:3:1", "duplicate key 'a'" },
	{ TEXT("{ a: 1, \"a\": 2 }"), "f:1:9", "duplicate key 'a'" },
	{ TEXT("x: { a: 1, a: 2 }"), "f:1:12", "duplicate key 'a'" },
	{ TEXT("? [ a ]\n: 1"), "f:1:3", "a key must be a word" },
	{ TEXT("? { a: b }\n: 1"), "f:1:3", "a key must be a word" },
	{ TEXT("{ [ a ]: 1 }"), "f:1:3", "a key must be a word" },
	{ TEXT("a:\n  <<: { b: 1 }"), "f:2:3",
	    "a merge key ('<<') is not allowed" },
	{ TEXT("\"\": 1"), "f:1:1", "an empty key" },
	{ TEXT("?\n: 1"), "f:1:2", "an empty key" },
	{ TEXT("a: 1\n---\nb: 2"), "f:2:1", "a second document" },
	{ TEXT("a: 1\n--- \n"), "f:2:1", "a second document" },
	{ TEXT("a: \377"), "f:1:4", "not UTF-8 text: " },
	{ TEXT("a: 1\n\303\251: \303("), "f:2:5", "not UTF-8 text: " },
	{ TEXT("a: \355\240\200"), "f:1:4", "not UTF-8 text: " },
	{ TEXT("a: \300\200"), "f:1:4", "not UTF-8 text: " },
	{ TEXT("a: b\0c"), "f:1:5", "control characters" },
	{ TEXT("a: b\033c"), "f:1:5", "control characters" },
	{ TEXT("a: \"b\\0c\""), "f:1:4", "a NUL character" },
	{ TEXT("\"a\\0c\": 1"), "f:1:1", "a NUL character" },
	{ TEXT("a\0: \0b\0"), "f:1:2", "control characters" },
	{ TEXT("\377\376a\0:\0 \0b\0"), "f:1:1", "not UTF-8 text: " },
	{ TEXT("a: [ 1, 2\n"), "f:2:1", "not YAML: while parsing a flow" },
	{ TEXT("a: { b: 1\n"), "f:2:1", "not YAML: while parsing a flow" },
	{ TEXT("a: \"b\n"), "f:2:1", "not YAML: while scanning a quoted" },
	{ TEXT("a: b: c\n"), "f:1:5", "not YAML: mapping values" },
	{ TEXT("a: 1\n b: 2\n"), "f:2:3", "not YAML: " },
	{ TEXT("a: 1\n\tb: 2\n"), "f:2:1", "not YAML: " },
	{ TEXT("a: @b\n"), "f:1:4", "not YAML: " },
};

static void
what_yaml_can_but_we_do_not_is_refused_with_its_place(void **state)
{
	(void)state;
	for (size_t i = 0; i < COUNT(refusals); i++) {
		struct node *root = NULL;
		struct error err = { 0 };

		if (document_read_text(refusals[i].text, refusals[i].size, "f",
		    &root, &err) == 0)
			fail_msg("'%s' was read", refusals[i].text);
		if (strcmp(err.where, refusals[i].where) != 0 ||
		    strstr(err.cause, refusals[i].cause) == NULL)
			fail_msg("%zu '%s': '%s' '%s', not '%s' '%s'", i,
			    refusals[i].text, err.where, err.cause,
			    refusals[i].where, refusals[i].cause);
		assert_int_equal(err.kind, ERROR_INPUT);
		assert_null(root);
	}
}

static void
harmless_forms_are_read(void **state)
{
	static const char *const table[] = {
		"%YAML 1.1\n---\na: 1", "--- { a: 1 }\n...\n",
		"\357\273\277a: 1", "a: 1\r\n", "a: '1'", "\"a\": \"1\"",
		"a: |-\n  1", "a: >-\n  1", "a: 1 # one", "? a\n: 1",
	};

	(void)state;
	for (size_t i = 0; i < COUNT(table); i++) {
		struct node *root = read_good(table[i], "f");
		const struct node *a = node_child(root, "a");

		assert_non_null(a);
		assert_string_equal(a->text, "1");
		document_free(root);
	}
}

static void
every_truncation_is_read_or_refused_cleanly(void **state)
{
	(void)state;
	for (size_t n = 0; n < sizeof(sample) - 1; n++) {
		struct node *root = NULL;
		struct error err = { 0 };
		char *cut = malloc(n + 1);	/* so that an overrun is seen */

		assert_non_null(cut);
		memcpy(cut, sample, n);
		if (document_read_text(cut, n, "f", &root, &err) == 0) {
			assert_non_null(root);
		} else {
			assert_null(root);
			assert_int_equal(err.kind, ERROR_INPUT);
			assert_memory_equal(err.where, "f:", 2);
			assert_true(err.cause[0] != '\0');
		}
		document_free(root);
		free(cut);
	}
}

/* "[[[...]]]" */
static int
read_nested(unsigned depth, struct error *err)
{
	struct node *root = NULL;
	char text[200];
	int rc;

	memset(text, '[', depth);
	memset(text + depth, ']', depth);
	rc = document_read_text(text, (size_t)2 * depth, "f", &root, err);
	document_free(root);
	return rc;
}

static void
depth_is_limited(void **state)
{
	struct error err = { 0 };

	(void)state;
	assert_int_equal(read_nested(DOCUMENT_DEPTH_MAX - 1, &err), 0);
	assert_int_equal(read_nested(DOCUMENT_DEPTH_MAX, &err), 0);
	assert_int_equal(read_nested(DOCUMENT_DEPTH_MAX + 1, &err), -1);
	assert_string_equal(err.where, "f:1:17");
	assert_string_equal(err.cause, "nested deeper than 16 levels");
	assert_int_equal(read_nested(100, &err), -1);
}

/* A list of `items` with the root makes items + 1 values. */
static int
read_items(unsigned items, struct error *err)
{
	size_t size = (size_t)2 * items + 2;
	struct node *root = NULL;
	char *text = malloc(size);
	int rc;

	assert_non_null(text);
	text[0] = '[';
	for (unsigned i = 0; i < items; i++) {
		text[1 + 2 * i] = 'x';
		text[2 + 2 * i] = ',';
	}
	text[size - 1] = ']';
	rc = document_read_text(text, size, "f", &root, err);
	document_free(root);
	free(text);
	return rc;
}

static void
the_number_of_values_is_limited(void **state)
{
	struct error err = { 0 };

	(void)state;
	assert_int_equal(read_items(DOCUMENT_NODES_MAX - 2, &err), 0);
	assert_int_equal(read_items(DOCUMENT_NODES_MAX - 1, &err), 0);
	assert_int_equal(read_items(DOCUMENT_NODES_MAX, &err), -1);
	assert_string_equal(err.cause, "more than 20000 values");
}

/* "a: x" followed by blanks up to `size`. */
static char *
padded(size_t size)
{
	char *text = malloc(size);

	assert_non_null(text);
	memset(text, '\n', size);
	memcpy(text, "a: x", 4);
	return text;
}

static void
the_size_is_limited(void **state)
{
	char *text = padded(DOCUMENT_BYTES_MAX + 1);
	struct node *root = NULL;
	struct error err = { 0 };

	(void)state;
	assert_int_equal(document_read_text(text, DOCUMENT_BYTES_MAX, "f",
	    &root, &err), 0);
	document_free(root);
	assert_int_equal(document_read_text(text, DOCUMENT_BYTES_MAX + 1, "f",
	    &root, &err), -1);
	assert_int_equal(err.kind, ERROR_INPUT);
	assert_string_equal(err.cause, "longer than 1048576 B");
	free(text);
}

/* A file with this content; the path goes into `path`. */
static void
make_file(char path[32], const char *text, size_t size)
{
	int fd;

	(void)snprintf(path, 32, "test_document.XXXXXX");
	fd = mkstemp(path);
	assert_true(fd >= 0);
	assert_int_equal(write(fd, text, size), (ssize_t)size);
	assert_int_equal(close(fd), 0);
}

static void
files_are_read_under_their_name(void **state)
{
	struct node *root = NULL;
	struct error err = { 0 };
	char path[32];

	(void)state;
	make_file(path, TEXT("name: quay\n"));
	assert_int_equal(document_read_file(path, &root, &err), 0);
	assert_string_equal(node_child(root, "name")->text, "quay");
	assert_string_equal(root->origin, path);
	document_free(root);
	assert_int_equal(unlink(path), 0);
}

static void
a_file_that_is_too_long_is_refused(void **state)
{
	char *text = padded(DOCUMENT_BYTES_MAX + 10);
	struct node *root = NULL;
	struct error err = { 0 };
	char path[32];

	(void)state;
	make_file(path, text, DOCUMENT_BYTES_MAX + 10);
	assert_int_equal(document_read_file(path, &root, &err), -1);
	assert_int_equal(err.kind, ERROR_INPUT);
	assert_string_equal(err.cause, "longer than 1048576 B");
	assert_int_equal(unlink(path), 0);
	free(text);
}

static void
what_cannot_be_read_is_told_apart(void **state)
{
	struct node *root = NULL;
	struct error err = { 0 };
	char path[32];

	(void)state;
	assert_int_equal(document_read_file("no-such-file.yaml", &root, &err),
	    -1);
	assert_int_equal(err.kind, ERROR_ABSENT);
	assert_int_equal(err.sys_errno, ENOENT);
	assert_non_null(strstr(err.cause, "'no-such-file.yaml'"));
	assert_int_equal(document_read_file(".", &root, &err), -1);
	assert_int_equal(err.kind, ERROR_READ);
	assert_int_equal(err.sys_errno, EISDIR);
	make_file(path, TEXT(""));
	assert_int_equal(document_read_file(path, &root, &err), -1);
	assert_int_equal(err.kind, ERROR_INPUT);
	assert_string_equal(err.cause, "is empty");
	assert_int_equal(unlink(path), 0);
	assert_null(root);
}

static void
a_place_fits_whatever_the_file_is_called(void **state)
{
	struct node node = { .line = 12, .column = 34 };
	struct error err = { 0 };
	char origin[2000], cause[2000];

	(void)state;
	memset(origin, 'o', sizeof(origin));
	origin[sizeof(origin) - 1] = '\0';
	memset(cause, 'c', sizeof(cause));
	cause[sizeof(cause) - 1] = '\0';
	node.origin = origin;
	assert_int_equal(node_error(&node, &err, "%s", cause), -1);
	assert_non_null(strstr(err.where, "o...:12:34"));
	assert_int_equal(err.cause[0], 'c');
	node.origin = "a\nb\033[0m";
	(void)node_error(&node, &err, "found %s", "x");
	assert_string_equal(err.where, "a?b?[0m:12:34");
	assert_int_equal(node_error(NULL, &err, "found %s", "x"), -1);
	assert_string_equal(err.where, "");
	assert_string_equal(err.cause, "found x");
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(a_tree_keeps_texts_and_places),
		cmocka_unit_test(the_tree_outlives_text_and_origin),
		cmocka_unit_test(children_are_found_in_mappings_only),
		cmocka_unit_test(
		    what_yaml_can_but_we_do_not_is_refused_with_its_place),
		cmocka_unit_test(harmless_forms_are_read),
		cmocka_unit_test(every_truncation_is_read_or_refused_cleanly),
		cmocka_unit_test(depth_is_limited),
		cmocka_unit_test(the_number_of_values_is_limited),
		cmocka_unit_test(the_size_is_limited),
		cmocka_unit_test(files_are_read_under_their_name),
		cmocka_unit_test(a_file_that_is_too_long_is_refused),
		cmocka_unit_test(what_cannot_be_read_is_told_apart),
		cmocka_unit_test(a_place_fits_whatever_the_file_is_called),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
