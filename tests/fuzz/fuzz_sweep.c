/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A range in the first line, a declaration in the others: every value of what
 * is accepted is one that a declaration can hold. */
#include <assert.h>
#include <math.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "declare/circuit.h"
#include "error.h"
#include "report/sweep.h"

#define POINTS_MADE_MAX 4	/* of more the ends alone are looked at */

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static void
check_value(const struct sweep_range *range, size_t i)
{
	char value[SWEEP_VALUE_SIZE];

	assert(sweep_range_value(range, i, value) == value);
	assert(value[0] != '\0' && strlen(value) < sizeof(value));
	assert(strstr(value, "nan") == NULL && strstr(value, "inf") == NULL);
}

static void
check_range(const char *text, struct node *root)
{
	struct sweep_range range;
	struct sweep *sweep;
	struct error err;
	size_t i;

	if (sweep_range_read(text, root, circuit_fields, &range, &err) == -1) {
		assert(err.cause[0] != '\0');
		return;
	}
	assert(range.count >= 1 && range.count <= SWEEP_POINTS_MAX);
	check_value(&range, 0);
	check_value(&range, range.count - 1);
	if (range.count > POINTS_MADE_MAX ||
	    sweep_make(root, &range, &sweep, &err) == -1)
		return;
	for (i = 0; i < range.count; i++)
		assert(isfinite(sweep->points[i].number));
	free(sweep);
}

int
LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
	const uint8_t *line_end = memchr(data, '\n', size);
	struct node *root;
	struct error err;
	size_t length;
	char *text;

	if (line_end == NULL)
		return 0;
	length = (size_t)(line_end - data);
	if (document_read_text((const char *)line_end + 1, size - length - 1,
	    "fuzz", &root, &err) == -1)
		return 0;
	text = strndup((const char *)data, length);
	if (text != NULL)
		check_range(text, root);
	free(text);
	document_free(root);
	return 0;
}
