/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Mutation: an octet more or less anywhere in the tables of the layers, or in
 * what their options add, is noticed by a published sum. */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "octets_subjects.h"

#define COUNT(array) (sizeof(array) / sizeof((array)[0]))

/* What no stack of packets can reach: a row alone around some octets. */
static const struct {
	const char *name, *below;
	uint64_t carried_bytes, line;
	const char *source;
} lone_vectors[] = {
	{ "xgem", "", 1, 16, "ITU-T G.987.3: least frame of 16, from memory" },
	{ "xgem", "", 8, 16, "ITU-T G.987.3: 8 + 8, from memory" },
	{ "xgem", "", 9, 20, "ITU-T G.987.3: 8 + 12, from memory" },
};

static uint64_t *
member_of(struct layer_use *use, size_t offset)
{
	return (uint64_t *)(void *)((char *)&use->cost + offset);
}

static bool
lone_vector_notices(const struct layer *layer, size_t offset, int change)
{
	struct layer_stack stack;
	struct fraction octets[LEVELS];
	size_t i;

	for (i = 0; i < COUNT(lone_vectors); i++) {
		if (layer_find_on(lone_vectors[i].name,
		    lone_vectors[i].below) != layer)
			continue;
		memset(&stack, 0, sizeof(stack));
		stack.count = 3;
		stack.use[0].layer = layer;
		stack.use[0].cost = layer->cost;
		stack.use[1].layer = layer_find("ipv4");
		stack.use[2].layer = layer_find("udp");
		*member_of(&stack.use[0], offset) +=
		    (uint64_t)(int64_t)change;
		overhead_of_packet(&stack, lone_vectors[i].carried_bytes,
		    false, octets);
		if (fraction_compare(octets[LEVEL_LINE],
		    fraction_whole(lone_vectors[i].line)) != 0)
			return true;
	}
	return false;
}

static void
lone_rows_make_the_least_frame(void **state)
{
	size_t i;

	(void)state;
	for (i = 0; i < COUNT(lone_vectors); i++)
		assert_false(lone_vector_notices(
		    layer_find_on(lone_vectors[i].name, lone_vectors[i].below),
		    0, 0));
}

/* The same row with the same options, sizes that the packet is cut to
 * aside. */
static bool
costs_alike(const struct layer_use *left, const struct layer_use *right)
{
	struct layer_cost l = left->cost, r = right->cost;

	l.record_bytes = r.record_bytes = 0;
	l.limit_bytes = r.limit_bytes = 0;
	return left->layer == right->layer && memcmp(&l, &r, sizeof(l)) == 0;
}

/* Does this vector notice when the uses like `use` are changed?  Members that
 * are 0 and mean "none" stay so. */
static bool
subject_notices(const struct subject *subject, const struct layer_use *use,
    size_t offset, bool zero_too, int change)
{
	struct layer_stack stack = subject->stack;
	struct overhead o;
	struct error err;
	bool changed = false;
	uint64_t *value;
	size_t n;

	for (n = 0; n < stack.count; n++) {
		value = member_of(&stack.use[n], offset);
		if (!costs_alike(&subject->stack.use[n], use) ||
		    (*value == 0 && !zero_too))
			continue;
		*value += (uint64_t)(int64_t)change;
		changed = true;
	}
	if (!changed)
		return false;
	return overhead_compute(&stack, subject->v.mtu_bytes,
	    subject->v.upstream, &o, &err) == -1 ||
	    !subject_agrees(subject, &o);
}

static bool
some_vector_notices(const struct subjects *subjects,
    const struct layer_use *use, size_t offset, bool zero_too, int change)
{
	size_t i;

	for (i = 0; i < subjects->count; i++)
		if (subject_notices(&subjects->subject[i], use, offset,
		    zero_too, change))
			return true;
	return lone_vector_notices(use->layer, offset, change);
}

static const struct member {
	const char *name;
	size_t offset;
	bool zero_too;		/* 0 is a cost as any other */
} members[] = {
#define MEMBER(member, zero_too)					\
	{ #member, offsetof(struct layer_cost, member), zero_too }
	MEMBER(before_bytes, true), MEMBER(head_bytes, true),
	MEMBER(trail_bytes, true), MEMBER(tail_bytes, true),
	MEMBER(gap_bytes, true), MEMBER(align_bytes, false),
	MEMBER(min_bytes, false), MEMBER(num, false), MEMBER(den, false),
	MEMBER(record_bytes, false), MEMBER(limit_bytes, false),
	MEMBER(upstream_less_bytes, false),
#undef MEMBER
};

#define MEMBER_IS(row, member)						\
	((row).offset == offsetof(struct layer_cost, member))

static void
check_use(const struct subjects *subjects, struct layer_use use)
{
	size_t m;
	int change;
	bool least;

	for (m = 0; m < COUNT(members); m++) {
		uint64_t value = *member_of(&use, members[m].offset);

		if (value == 0 && !members[m].zero_too)
			continue;
		/* 1 means "none" of alignment and coding, which never takes
		 * octets away */
		if (value == 1 && (MEMBER_IS(members[m], align_bytes) ||
		    MEMBER_IS(members[m], den)))
			continue;
		least = value == 0 ||
		    (value == 1 && MEMBER_IS(members[m], num));
		for (change = least ? 1 : -1; change <= 1; change += 2)
			if (!some_vector_notices(subjects, &use,
			    members[m].offset, members[m].zero_too, change))
				fail_msg("%s (%lu before, %lu head, %lu trail, "
				    "%lu tail): %s %+d", use.layer->title,
				    (unsigned long)use.cost.before_bytes,
				    (unsigned long)use.cost.head_bytes,
				    (unsigned long)use.cost.trail_bytes,
				    (unsigned long)use.cost.tail_bytes,
				    members[m].name, change);
	}
}

/* Every row under every set of options that a vector gives it. */
static void
a_vector_notices_each_octet_of_the_table(void **state)
{
	const struct subjects *subjects = *state;
	const struct layer_use *use;
	size_t i, n, other;
	bool seen;

	for (i = 0; i < subjects->count; i++) {
		for (n = 0; n < subjects->subject[i].stack.count; n++) {
			use = &subjects->subject[i].stack.use[n];
			seen = false;
			for (other = 0; other < i && !seen; other++)
				seen = subject_notices(
				    &subjects->subject[other], use,
				    offsetof(struct layer_cost, num), false,
				    1);
			if (!seen)
				check_use(subjects, *use);
		}
	}
}

static bool
some_vector_has(const struct subjects *subjects, const struct layer *layer)
{
	size_t i, n;

	for (i = 0; i < subjects->count; i++)
		for (n = 0; n < subjects->subject[i].stack.count; n++)
			if (subjects->subject[i].stack.use[n].layer == layer)
				return true;
	return false;
}

static bool
some_vector_gives(const struct subjects *subjects, const struct layer *layer,
    const struct field *field, uint64_t value)
{
	const struct layer_use *use;
	uint64_t given;
	size_t i, n;

	for (i = 0; i < subjects->count; i++) {
		for (n = 0; n < subjects->subject[i].stack.count; n++) {
			use = &subjects->subject[i].stack.use[n];
			memcpy(&given, (const char *)&use->options +
			    field->offset, sizeof(given));
			if (use->layer == layer && given == value)
				return true;
		}
	}
	return false;
}

/* Of a number: something other than its default. */
static bool
some_vector_changes(const struct subjects *subjects,
    const struct layer *layer, const struct field *field)
{
	struct layer_options presets;
	const struct layer_use *use;
	struct error err;
	uint64_t given, preset;
	size_t i, n;

	assert_int_equal(fields_read(NULL, layer->fields, layer->name,
	    &presets, &err), 0);
	memcpy(&preset, (const char *)&presets + field->offset,
	    sizeof(preset));
	for (i = 0; i < subjects->count; i++) {
		for (n = 0; n < subjects->subject[i].stack.count; n++) {
			use = &subjects->subject[i].stack.use[n];
			memcpy(&given, (const char *)&use->options +
			    field->offset, sizeof(given));
			if (use->layer == layer && given != preset)
				return true;
		}
	}
	return false;
}

static bool
some_vector_tries(const struct subjects *subjects, const struct layer *layer,
    const struct field *field)
{
	const struct choice *choice;

	if (field->kind == FIELD_YES_NO)
		return some_vector_gives(subjects, layer, field, 0) &&
		    some_vector_gives(subjects, layer, field, 1);
	if (field->kind != FIELD_CHOICE)
		return some_vector_changes(subjects, layer, field);
	for (choice = field->choices; choice->name != NULL; choice++)
		if (!some_vector_gives(subjects, layer, field, choice->value))
			return false;
	return true;
}

static void
every_row_and_every_option_has_a_vector(void **state)
{
	const struct subjects *subjects = *state;
	const struct field *field;
	size_t i;

	for (i = 0; layer_table[i] != NULL; i++) {
		if (!some_vector_has(subjects, layer_table[i]))
			fail_msg("%s: no vector", layer_table[i]->title);
		field = layer_table[i]->fields;
		for (; field != NULL && field->name != NULL; field++)
			if (!some_vector_tries(subjects, layer_table[i],
			    field))
				fail_msg("%s: %s: no vector",
				    layer_table[i]->title, field->name);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(lone_rows_make_the_least_frame),
		cmocka_unit_test(every_row_and_every_option_has_a_vector),
		cmocka_unit_test(a_vector_notices_each_octet_of_the_table),
	};

	return cmocka_run_group_tests(tests, subjects_set_up,
	    subjects_tear_down);
}
