/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One direction's ceiling as JSON, for the record and for `plafond ceiling`. */
#include <stdio.h>

#include "ceiling/ceiling.h"
#include "report/json_value.h"

static const char *const level_members[LEVELS] = {
	[LEVEL_LINE] = "line_bps",
	[LEVEL_FRAME] = "frame_bps",
	[LEVEL_FRAME_WITHOUT_FCS] = "frame_without_fcs_bps",
	[LEVEL_PACKET] = "packet_bps",
	[LEVEL_SEGMENT] = "segment_bps",
	[LEVEL_PAYLOAD] = "payload_bps",
};

/* Whole octets stay whole. */
static json_t *
octets(uint128 num, uint128 den)
{
	if (den == 0)
		return json_null();
	return num % den == 0 ? json_value_u64((uint64_t)(num / den)) :
	    json_value_real((double)num / (double)den);
}

static json_t *
json_bounds(const struct ceiling *ceiling)
{
	json_t *array = json_array();

	for (size_t i = 0; i < ceiling->bounds_count; i++) {
		const struct bound *bound = &ceiling->bounds[i];
		json_t *object = json_object();

		json_put(object, "name", json_value_text(bound->name));
		json_put(object, "class",
		    json_value_text(bound_class_name(bound->class)));
		json_put(object, "payload_bps",
		    json_value_u64(bound->payload_bps));
		json_put(object, "binding", json_boolean(bound->binding));
		json_put(object, "source", json_value_text(bound->source));
		json_push(array, object);
	}
	return array;
}

static json_t *
json_ladder(const struct ceiling *ceiling)
{
	json_t *array = json_array();

	for (size_t i = 0; i < ceiling->steps_count; i++) {
		const struct ladder_step *step = &ceiling->steps[i];
		json_t *object = json_object();

		json_put(object, "name", json_value_text(step->name));
		json_put(object, "bytes", octets(step->bytes_num,
		    step->bytes_den));
		json_put(object, "bps", json_value_u64(step->bps));
		json_put(object, "level", step->reaches_level
		    ? json_value_text(level_name(step->level)) : json_null());
		json_put(object, "source", step->source == NULL ? json_null()
		    : json_value_text(step->source));
		json_push(array, object);
	}
	return array;
}

static json_t *
json_levels(const struct ceiling *ceiling)
{
	json_t *array = json_array();

	for (size_t i = 0; i < LEVELS; i++) {
		json_t *object;

		if (!ceiling->has_level[i])
			continue;
		object = json_object();
		json_put(object, "level",
		    json_value_text(level_name((enum layer_level)i)));
		json_put(object, "bytes", octets(ceiling->level_bytes_num[i],
		    ceiling->level_bytes_den));
		json_push(array, object);
	}
	return array;
}

/* On the narrow segment's medium. */
static json_t *
json_notes(const struct ceiling *ceiling)
{
	json_t *array = json_array();

	for (size_t i = 0; i < ceiling->notes_count; i++)
		json_push(array, json_value_text(ceiling->notes[i]));
	return array;
}

static void
push_memory(json_t *array, const char *name, const char *memory)
{
	char text[512];

	if (memory == NULL)
		return;
	(void)snprintf(text, sizeof(text), "%s: %s", name, memory);
	json_push(array, json_value_text(text));
}

/* What of the narrow segment rests on memory. */
static json_t *
json_memory(const struct segment *segment)
{
	const struct layer_stack *stack = &segment->layers;
	json_t *array = json_array();

	push_memory(array, segment->medium.medium->name,
	    segment->medium.medium->memory);
	for (size_t i = 0; i < stack->count; i++)
		if (i == 0 || stack->use[i].layer != stack->use[i - 1].layer)
			push_memory(array, stack->use[i].layer->name,
			    stack->use[i].layer->memory);
	return array;
}

json_t *
json_ceiling(const struct circuit *circuit, const struct ceiling *ceiling)
{
	const struct segment *narrow = &circuit->segments[
	    ceiling->narrow < circuit->segments_count ? ceiling->narrow : 0];
	const char *note = narrow->medium.medium->accuracy_note;
	bool known = !ceiling->reference;
	json_t *object = json_object();

	json_put(object, "direction",
	    json_value_text(direction_name(ceiling->direction)));
	json_put(object, "protocol",
	    json_value_text(protocol_name(ceiling->protocol)));
	json_put(object, "top", json_value_text(ceiling->top));
	json_put(object, "reference", json_boolean(ceiling->reference));
	json_put(object, "line_rate_bps", known
	    ? json_value_u64(ceiling->line_rate_bps) : json_null());
	for (size_t i = 0; i < LEVELS; i++)
		json_put(object, level_members[i], known &&
		    ceiling->has_level[i]
		    ? json_value_u64(ceiling->rate_bps[i]) : json_null());
	json_put(object, "shared_bps", known
	    ? json_value_u64(ceiling->shared_bps) : json_null());
	json_put(object, "unused_bps", known
	    ? json_value_u64(ceiling->unused_bps) : json_null());
	json_put(object, "packet_bytes", known
	    ? json_value_u64(ceiling->packet_bytes) : json_null());
	json_put(object, "narrow_segment",
	    known && ceiling->narrow < circuit->segments_count
	    ? json_value_text(circuit->segments[ceiling->narrow].name)
	    : json_null());
	json_put(object, "accuracy",
	    json_value_text(accuracy_name(ceiling->accuracy)));
	json_put(object, "accuracy_note", note == NULL ? json_null() :
	    json_value_text(note));
	json_put(object, "memory", json_memory(narrow));
	json_put(object, "notes", json_notes(ceiling));
	json_put(object, "duplex", known ? json_value_text(duplex_name(
	    ceiling->shared ? DUPLEX_SHARED : DUPLEX_FULL)) : json_null());
	json_put(object, "tolerance_ppm",
	    json_value_u64(ceiling->tolerance_ppm));
	json_put(object, "burst_bytes", json_value_u64(ceiling->burst_bytes));
	json_put(object, "bounds", json_bounds(ceiling));
	json_put(object, "ladder", json_ladder(ceiling));
	json_put(object, "levels", json_levels(ceiling));
	return object;
}
