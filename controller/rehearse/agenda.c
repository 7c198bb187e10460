/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/agenda.h"

#include <assert.h>
#include <stdbool.h>
#include <stdlib.h>

int
agenda_init(struct agenda *agenda, uint32_t most)
{
	*agenda = (struct agenda){
		.entries = calloc(most, sizeof(*agenda->entries)),
		.heap = calloc(most, sizeof(*agenda->heap)),
		.unused = calloc(most, sizeof(*agenda->unused)),
		.most = most,
	};
	if (agenda->entries == NULL || agenda->heap == NULL ||
	    agenda->unused == NULL)
		return -1;
	for (uint32_t i = 0; i < most; i++)
		agenda->unused[i] = most - 1 - i;
	return 0;
}

void
agenda_fini(struct agenda *agenda)
{
	free(agenda->entries);
	free(agenda->heap);
	free(agenda->unused);
	*agenda = (struct agenda){ 0 };
}

uint32_t
agenda_room(const struct agenda *agenda)
{
	return agenda->most - agenda->count;
}

static bool
is_before(const struct agenda *agenda, uint32_t left, uint32_t right)
{
	const struct agenda_entry *a = &agenda->entries[left];
	const struct agenda_entry *b = &agenda->entries[right];

	if (a->due_ns != b->due_ns)
		return a->due_ns < b->due_ns;
	return a->order < b->order;
}

static void
put(struct agenda *agenda, uint32_t place, uint32_t handle)
{
	agenda->heap[place] = handle;
	agenda->entries[handle].place = place;
}

static void
rise(struct agenda *agenda, uint32_t place, uint32_t handle)
{
	uint32_t above;

	while (place > 0) {
		above = (place - 1) / 2;
		if (!is_before(agenda, handle, agenda->heap[above]))
			break;
		put(agenda, place, agenda->heap[above]);
		place = above;
	}
	put(agenda, place, handle);
}

static void
sink(struct agenda *agenda, uint32_t handle)
{
	uint32_t place = 0, below;

	while ((below = 2 * place + 1) < agenda->count) {
		if (below + 1 < agenda->count && is_before(agenda,
		    agenda->heap[below + 1], agenda->heap[below]))
			below++;
		if (!is_before(agenda, agenda->heap[below], handle))
			break;
		put(agenda, place, agenda->heap[below]);
		place = below;
	}
	put(agenda, place, handle);
}

uint32_t
agenda_add(struct agenda *agenda, uint64_t due_ns)
{
	uint32_t handle;

	assert(agenda->count < agenda->most);
	handle = agenda->unused[agenda->most - agenda->count - 1];
	agenda->entries[handle] = (struct agenda_entry){ .due_ns = due_ns,
		.order = agenda->orders++ };
	rise(agenda, agenda->count++, handle);
	return handle;
}

void
agenda_advance(struct agenda *agenda, uint32_t handle, uint64_t due_ns)
{
	struct agenda_entry *entry = &agenda->entries[handle];

	assert(due_ns <= entry->due_ns);
	if (due_ns == entry->due_ns)
		return;
	entry->due_ns = due_ns;
	entry->order = agenda->orders++;
	rise(agenda, entry->place, handle);
}

uint64_t
agenda_due_ns(const struct agenda *agenda, uint32_t handle)
{
	return agenda->entries[handle].due_ns;
}

uint64_t
agenda_next_ns(const struct agenda *agenda)
{
	return agenda->count == 0 ? UINT64_MAX :
	    agenda->entries[agenda->heap[0]].due_ns;
}

uint32_t
agenda_take(struct agenda *agenda)
{
	uint32_t handle;

	assert(agenda->count > 0);
	handle = agenda->heap[0];
	agenda->count--;
	agenda->unused[agenda->most - agenda->count - 1] = handle;
	if (agenda->count > 0)
		sink(agenda, agenda->heap[agenda->count]);
	return handle;
}
