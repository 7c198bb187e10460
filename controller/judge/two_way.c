/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "judge/two_way.h"

#include <stdlib.h>

#include "ceiling/ceiling.h"
#include "error.h"

bool
two_way_counted(const struct trial_run *run, enum direction direction,
    struct fraction *segments_per_ack)
{
	enum direction other = direction == DIRECTION_A_TO_B ?
	    DIRECTION_B_TO_A : DIRECTION_A_TO_B;
	const uint64_t *data = run->directions[direction].receiver.last.value;
	const uint64_t *acks = run->directions[other].receiver.last.value;
	uint64_t sent = acks[TCP_SAMPLE_segs_out_packets];
	uint64_t with_data = acks[TCP_SAMPLE_data_segs_out_packets];

	if (!run->directions[direction].receiver_reported ||
	    !run->directions[other].receiver_reported ||
	    sent == UNKNOWN_U64 || with_data == UNKNOWN_U64 ||
	    sent < with_data)
		return false;
	return path_counted_segments(data[TCP_SAMPLE_data_segs_in_packets],
	    sent - with_data, segments_per_ack);
}

uint64_t
two_way_target_bps(const struct circuit *circuit, const struct trial_run *run,
    enum direction direction, uint64_t alone_bps)
{
	struct load load = { .direction = direction, .both = true,
		.protocol = run->trial.protocol };
	struct ceiling *ceiling;
	struct error err;

	if (run->trial.direction != DIRECTION_BOTH ||
	    circuit_is_reference(circuit))
		return alone_bps;
	/* Counted on this line already: nothing of the other to settle. */
	if (two_way_counted(run, direction, &load.segments_per_ack))
		load.other_packets = fraction_whole(1);
	ceiling = malloc(sizeof(*ceiling));
	if (ceiling == NULL)
		return alone_bps;
	if (ceiling_of_load(circuit, &load, ceiling, &err) == 0)
		alone_bps = ceiling->rate_bps[LEVEL_PAYLOAD];
	free(ceiling);
	return alone_bps;
}
