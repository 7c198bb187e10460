/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a declaration's conditions need beside them, and what excludes what. */
#include <math.h>

#include "declare/circuit_inside.h"
#include "error.h"

static int
check_direction(const struct conditions *c, enum direction direction,
    const struct node *node, struct error *err)
{
	const struct {
		const char *name;
		bool given;
	} need_round_trip[] = {
		{ "loss", !isnan(c->loss_ratio[direction]) },
		{ "bit-error-ratio", !isnan(c->bit_error_ratio[direction]) },
		{ "window", c->window_bytes[direction] != FIELD_UNSET },
	};
	size_t i;

	for (i = 0; i < sizeof(need_round_trip) / sizeof(need_round_trip[0]);
	    i++)
		if (need_round_trip[i].given &&
		    c->round_trip_ns == FIELD_UNSET)
			return node_error(medium_place(node,
			    need_round_trip[i].name), err, "%s: `round-trip` "
			    "is missing, allowed: beside a round-trip time",
			    need_round_trip[i].name);
	if (!isnan(c->loss_ratio[direction]) &&
	    !isnan(c->bit_error_ratio[direction]))
		return node_error(medium_place(node, "bit-error-ratio"), err,
		    "bit-error-ratio: %s: `loss` is given too, allowed: one "
		    "of them", direction_name(direction));
	return 0;
}

int
conditions_check(const struct conditions *conditions, const struct node *node,
    struct error *err)
{
	enum direction d;

	if (node == NULL)
		return 0;
	for (d = 0; d < DIRECTIONS_SINGLE; d++)
		if (check_direction(conditions, d, node, err) == -1)
			return -1;
	if (conditions->test_length_ns != FIELD_UNSET &&
	    conditions->round_trip_ns != FIELD_UNSET &&
	    conditions->test_length_ns < conditions->round_trip_ns)
		return node_error(medium_place(node, "test-length"), err,
		    "test-length: shorter than the round-trip time");
	return 0;
}
