/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/serial.h"

#include <assert.h>
#include <string.h>

void
serial_init(struct serial *serial, const struct octets *octets,
    const struct serial_step steps[], size_t step_count)
{
	assert(step_count <= 1 + SERIAL_STEPS_MAX);
	*serial = (struct serial){ .octets = *octets,
		.step_count = step_count };
	if (step_count > 0)
		memcpy(serial->steps, steps, step_count * sizeof(*steps));
}

struct serial_moment
serial_start(const struct serial *serial, uint64_t ready_ns)
{
	struct serial_moment start = serial->idle;

	if (ready_ns > start.at_ns) {
		start.at_ns = ready_ns;
		start.part = 0;
	}
	/* A part is never carried over a step: a step is at a whole ns, so
	 * what ends at or after it has been counted at the new rate. */
	while (start.step + 1 < serial->step_count &&
	    serial->steps[start.step + 1].at_ns <= start.at_ns)
		start.step++;
	return start;
}

struct serial_moment
serial_finish(const struct serial *serial, struct serial_moment start,
    uint64_t bytes)
{
	struct serial_moment at = start;
	uint128 work = octets_work(&serial->octets, bytes), room;
	uint64_t work_a_ns;

	if (serial->step_count == 0)
		return at;
	for (;; at.step++, at.part = 0) {
		work_a_ns = serial->steps[at.step].rate_bps *
		    serial->octets.added_den;
		if (at.step + 1 == serial->step_count)
			break;
		room = (uint128)(serial->steps[at.step + 1].at_ns - at.at_ns) *
		    work_a_ns - at.part;
		if (work <= room)
			break;
		work -= room;
		at.at_ns = serial->steps[at.step + 1].at_ns;
	}
	work += at.part;
	at.at_ns += (uint64_t)(work / work_a_ns);
	at.part = (uint64_t)(work % work_a_ns);
	return at;
}

void
serial_keep(struct serial *serial, struct serial_moment finish)
{
	serial->idle = finish;
}

uint64_t
serial_ceil_ns(struct serial_moment moment)
{
	return moment.at_ns + (moment.part > 0);
}
