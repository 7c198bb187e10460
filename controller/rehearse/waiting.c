/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/waiting.h"

#include <assert.h>
#include <stdlib.h>

int
waiting_init(struct waiting *waiting, uint32_t most)
{
	*waiting = (struct waiting){ .most = most,
		.ring = calloc(most, sizeof(*waiting->ring)) };
	return waiting->ring == NULL ? -1 : 0;
}

void
waiting_fini(struct waiting *waiting)
{
	free(waiting->ring);
	waiting->ring = NULL;
}

void
waiting_release(struct waiting *waiting, uint64_t now_ns)
{
	const struct waiting_packet *packet;

	while (waiting->count > 0) {
		packet = &waiting->ring[waiting->first];
		if (packet->start_ns > now_ns)
			return;
		waiting->bytes -= packet->bytes;
		waiting->first = (waiting->first + 1) % waiting->most;
		waiting->count--;
	}
}

bool
waiting_is_full(const struct waiting *waiting)
{
	return waiting->count == waiting->most;
}

void
waiting_add(struct waiting *waiting, uint64_t start_ns, uint32_t bytes)
{
	uint32_t last = (waiting->first + waiting->count) % waiting->most;

	assert(waiting->count < waiting->most);
	waiting->ring[last] = (struct waiting_packet){ start_ns, bytes };
	waiting->count++;
	waiting->bytes += bytes;
}
