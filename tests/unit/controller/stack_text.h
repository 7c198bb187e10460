/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * stack_text: stacks of layers written in a test, read or refused, whatever
 * medium they would lie on.
 */
#ifndef PLAFOND_TEST_STACK_TEXT_H
#define PLAFOND_TEST_STACK_TEXT_H

#include <stdio.h>
#include <string.h>

#include "declare/stack.h"
#include "error.h"
#include "field.h"

/* 0 or -1 as layers_read. */
static inline int
stack_read(const char *layers, struct layer_stack *out, struct error *err)
{
	static const struct field field = { .name = "layers" };
	struct node *root;
	char text[2048];
	size_t i;
	int rc;

	(void)snprintf(text, sizeof(text), "layers: [ %s ]\n", layers);
	if (document_read_text(text, strlen(text), "test", &root, err) == -1)
		return -1;
	rc = layers_read(node_child(root, "layers"), &field, out, err);
	for (i = 0; i < out->count; i++)
		out->use[i].at = NULL;
	document_free(root);
	return rc;
}

/* A refusal fails the test and is printed. */
static inline void
stack_accepted(const char *layers, struct layer_stack *out)
{
	struct error err;
	char why[1024];

	if (stack_read(layers, out, &err) == -1)
		fail_msg("%s: %s", layers, error_text(&err, why, sizeof(why)));
}

/* The refusal must be of kind ERROR_INPUT and hold `expected`. */
static inline void
stack_refused(const char *layers, const char *expected)
{
	struct layer_stack stack;
	struct error err;
	char why[1024];

	if (stack_read(layers, &stack, &err) == 0)
		fail_msg("accepted: %s", layers);
	(void)error_text(&err, why, sizeof(why));
	assert_int_equal(err.kind, ERROR_INPUT);
	if (strstr(why, expected) == NULL)
		fail_msg("'%s' is not in: %s", expected, why);
}

#endif
