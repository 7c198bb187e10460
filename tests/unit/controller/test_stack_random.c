/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Properties of stacks that are drawn by walking the table of layers. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "ceiling/overhead.h"
#include "stack_text.h"

#define STACKS 1200
#define LAYERS_DRAWN_MAX 12	/* one more can be put in between */

/* xorshift64, G. Marsaglia 2003: the same stacks in every run. */
static uint64_t
draw(uint64_t *seed, uint64_t below)
{
	*seed ^= *seed << 13;
	*seed ^= *seed >> 7;
	*seed ^= *seed << 17;
	return *seed % below;
}

/* Names of the layers, lowest first. */
struct draft {
	const char *name[LAYERS_MAX];
	size_t count;
};

static bool
lies_on(const struct layer *layer, const char *name)
{
	return layer_find_on(layer->name, name) == layer;
}

/* One of the rows that lie on `name`; NULL: none does. */
static const struct layer *
draw_layer(uint64_t *seed, const char *name)
{
	const struct layer *fitting[64];
	size_t count = 0, i;

	for (i = 0; layer_table[i] != NULL; i++)
		if (lies_on(layer_table[i], name))
			fitting[count++] = layer_table[i];
	return count == 0 ? NULL : fitting[draw(seed, count)];
}

/* False: the walk did not end in a transport in time. */
static bool
draw_draft(uint64_t *seed, struct draft *out)
{
	const struct layer *layer = NULL;
	bool transport = false;

	out->count = 0;
	while (out->count < LAYERS_DRAWN_MAX) {
		layer = draw_layer(seed, out->count == 0 ? "" :
		    out->name[out->count - 1]);
		if (layer == NULL)
			break;
		out->name[out->count++] = layer->name;
		transport = layer->level == LEVEL_SEGMENT ||
		    layer->level == LEVEL_PAYLOAD;
		if (transport && draw(seed, 3) == 0)
			break;
	}
	return transport;
}

/* ESP is read with its default cipher, and so on: no options. */
static bool
read_draft(const struct draft *draft, struct layer_stack *out)
{
	char text[512] = "";
	struct error err;
	size_t i, used = 0;

	for (i = 0; i < draft->count; i++) {
		(void)snprintf(text + used, sizeof(text) - used, "%s%s",
		    i == 0 ? "" : ", ", draft->name[i]);
		used += strlen(text + used);
	}
	return stack_read(text, out, &err) == 0;
}

static bool
draw_stack(uint64_t *seed, struct draft *draft, uint64_t *mtu_bytes,
    struct overhead *out)
{
	struct layer_stack stack;
	struct error err;

	if (!draw_draft(seed, draft) || !read_draft(draft, &stack))
		return false;
	*mtu_bytes = 1280 + draw(seed, 8000);
	return overhead_compute(&stack, *mtu_bytes, draw(seed, 2) == 1, out,
	    &err) == 0;
}

static void
fail_draft(const struct draft *draft, uint64_t mtu_bytes, const char *why)
{
	char text[512] = "";
	size_t i, used = 0;

	for (i = 0; i < draft->count; i++) {
		(void)snprintf(text + used, sizeof(text) - used, " %s",
		    draft->name[i]);
		used += strlen(text + used);
	}
	fail_msg("%s:%s at %lu", why, text, (unsigned long)mtu_bytes);
}

static void
parts_and_payload_of_any_stack_make_the_line(void **state)
{
	uint64_t seed = 20260101, mtu_bytes;
	struct fraction sum, before;
	struct draft draft;
	struct overhead o;
	size_t accepted = 0, i, n;
	enum layer_level level;

	(void)state;
	for (i = 0; i < STACKS; i++) {
		if (!draw_stack(&seed, &draft, &mtu_bytes, &o))
			continue;
		accepted++;
		sum = o.octets[LEVEL_PAYLOAD];
		for (n = 0; n < o.parts_count; n++)
			sum = fraction_add(sum, o.parts[n].octets);
		if (fraction_compare(sum, o.octets[LEVEL_LINE]) != 0)
			fail_draft(&draft, mtu_bytes, "the sum differs");
		before = o.octets[LEVEL_LINE];
		for (level = LEVEL_FRAME; level < LEVELS; level++) {
			if (!o.has_level[level])
				continue;
			if (fraction_compare(o.octets[level], before) > 0)
				fail_draft(&draft, mtu_bytes, "a level rises");
			before = o.octets[level];
		}
		if (o.packet_bytes > mtu_bytes)
			fail_draft(&draft, mtu_bytes, "beyond the MTU");
		if (o.octets[LEVEL_PAYLOAD].num == 0)
			fail_draft(&draft, mtu_bytes, "no payload");
	}
	assert_true(accepted > STACKS / 4);
}

/* Puts a layer between two others, where both agree. */
static bool
put_between(const struct draft *draft, size_t at, const char *name,
    struct draft *out)
{
	size_t i;

	if (layer_find_on(name, at == 0 ? "" : draft->name[at - 1]) == NULL ||
	    layer_find_on(draft->name[at], name) == NULL)
		return false;
	*out = *draft;
	for (i = draft->count; i > at; i--)
		out->name[i] = draft->name[i - 1];
	out->name[at] = name;
	out->count++;
	return true;
}

/* Cells may pay for a tunnel that makes the packet a little smaller. */
static bool
has_cells(const struct draft *draft)
{
	return strcmp(draft->name[0], "aal5") == 0;
}

static struct fraction
payload_share(const struct overhead *o)
{
	return fraction_divide(o->octets[LEVEL_PAYLOAD],
	    o->octets[LEVEL_LINE]);
}

/* Every row that fits in between is tried at every place. */
static size_t
check_layer_more(const struct draft *draft, uint64_t mtu_bytes)
{
	struct layer_stack stack;
	struct overhead before, after;
	struct draft longer;
	struct error err;
	size_t at, i, tried = 0;

	if (!read_draft(draft, &stack) || overhead_compute(&stack, mtu_bytes,
	    false, &before, &err) == -1)
		return 0;
	for (at = 1; at < draft->count; at++) {
		for (i = 0; layer_table[i] != NULL; i++) {
			if (!put_between(draft, at, layer_table[i]->name,
			    &longer) || !read_draft(&longer, &stack) ||
			    overhead_compute(&stack, mtu_bytes, false, &after,
			    &err) == -1)
				continue;
			tried++;
			if (fraction_compare(payload_share(&after),
			    payload_share(&before)) > 0)
				fail_draft(&longer, mtu_bytes, "a layer more "
				    "raises the share of payload");
		}
	}
	return tried;
}

static void
a_layer_more_never_raises_the_share_of_payload(void **state)
{
	uint64_t seed = 20260202, mtu_bytes;
	struct draft draft;
	struct overhead o;
	size_t tried = 0, i;

	(void)state;
	for (i = 0; i < STACKS / 8; i++) {
		if (!draw_stack(&seed, &draft, &mtu_bytes, &o) ||
		    has_cells(&draft))
			continue;
		tried += check_layer_more(&draft, mtu_bytes);
	}
	assert_true(tried > STACKS / 8);
}

/* Both the row of the largest packet and one octet more are walked: what is
 * carried never falls when the MTU grows. */
static void
a_larger_mtu_never_carries_less(void **state)
{
	uint64_t seed = 20260303, mtu_bytes;
	struct layer_stack stack;
	struct overhead before, after;
	struct draft draft;
	struct error err;
	size_t i;

	(void)state;
	for (i = 0; i < STACKS; i++) {
		if (!draw_stack(&seed, &draft, &mtu_bytes, &before))
			continue;
		assert_true(read_draft(&draft, &stack));
		assert_int_equal(overhead_compute(&stack, mtu_bytes + 1, false,
		    &after, &err), 0);
		if (fraction_compare(after.octets[LEVEL_PAYLOAD],
		    before.octets[LEVEL_PAYLOAD]) < 0)
			fail_draft(&draft, mtu_bytes, "carries less");
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(parts_and_payload_of_any_stack_make_the_line),
		cmocka_unit_test(
		    a_layer_more_never_raises_the_share_of_payload),
		cmocka_unit_test(a_larger_mtu_never_carries_less),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
