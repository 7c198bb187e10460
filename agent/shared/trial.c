/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "trial.h"

#include <stddef.h>
#include <string.h>

#include "measurement.h"

const char *const direction_names[DIRECTIONS + 1] = {
	[DIRECTION_A_TO_B] = "a-to-b",
	[DIRECTION_B_TO_A] = "b-to-a",
	[DIRECTION_BOTH] = "both",
};
const char *const end_names[ENDS + 1] = {
	[END_A] = "a",
	[END_B] = "b",
};
const char *const protocol_names[PROTOCOLS + 1] = {
	[PROTOCOL_TCP] = "tcp",
	[PROTOCOL_UDP] = "udp",
	[PROTOCOL_TCP_TLS] = "tcp+tls",
};
const char *const measurement_end_names[MEASUREMENT_ENDS + 1] = {
	[MEASUREMENT_COMPLETE] = "complete",
	[MEASUREMENT_STOPPED] = "stopped",
	[MEASUREMENT_PEER_LOST] = "peer-lost",
};

static int
find_name(const char *const names[], int count, const char *name)
{
	for (int i = 0; i < count; i++)
		if (strcmp(names[i], name) == 0)
			return i;
	return -1;
}

const char *
direction_name(enum direction direction)
{
	return direction_names[direction];
}

const char *
end_name(enum end end)
{
	return end_names[end];
}

const char *
protocol_name(enum protocol protocol)
{
	return protocol_names[protocol];
}

const char *
measurement_end_name(enum measurement_end end)
{
	return measurement_end_names[end];
}

int
direction_from_name(const char *name, enum direction *out)
{
	int found = find_name(direction_names, DIRECTIONS, name);

	if (found == -1)
		return -1;
	*out = (enum direction)found;
	return 0;
}

int
end_from_name(const char *name, enum end *out)
{
	int found = find_name(end_names, ENDS, name);

	if (found == -1)
		return -1;
	*out = (enum end)found;
	return 0;
}

enum end
direction_sender(enum direction direction)
{
	return direction == DIRECTION_B_TO_A ? END_B : END_A;
}

enum end
direction_receiver(enum direction direction)
{
	return direction == DIRECTION_B_TO_A ? END_A : END_B;
}

bool
direction_has(enum direction direction, enum direction single)
{
	return direction == single || direction == DIRECTION_BOTH;
}
