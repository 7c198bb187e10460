/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "sampler.h"

#include <netinet/in.h>
#include <netinet/tcp.h>
#include <stdint.h>
#include <string.h>
#include <sys/socket.h>

struct layout {
	size_t offset, bytes;
};

#define FIELD_LAYOUT(name, field_offset, field_bytes)		\
	[TCP_SAMPLE_##name] = { .offset = (field_offset),	\
	    .bytes = (field_bytes) },

static const struct layout layouts[TCP_SAMPLE_COUNT] = {
	TCP_SAMPLE_FIELDS(FIELD_LAYOUT)
};

/* One field, little or big endian as the host is. */
static uint64_t
field_value(const unsigned char *info, const struct layout *layout)
{
	uint64_t wide;
	uint32_t narrow;

	if (layout->bytes == sizeof(narrow)) {
		memcpy(&narrow, info + layout->offset, sizeof(narrow));
		return narrow;
	}
	memcpy(&wide, info + layout->offset, sizeof(wide));
	return wide;
}

void
sampler_decode(const unsigned char *info, size_t size, struct tcp_sample *out)
{
	for (unsigned i = 0; i < TCP_SAMPLE_COUNT; i++)
		out->value[i] =
		    layouts[i].offset + layouts[i].bytes <= size ?
		    field_value(info, &layouts[i]) : UNKNOWN_U64;
	/* min_rtt starts as ~0 in 32 bits: none yet (net/ipv4/tcp.c) */
	if (out->value[TCP_SAMPLE_min_rtt_us] == UINT32_MAX)
		out->value[TCP_SAMPLE_min_rtt_us] = UNKNOWN_U64;
}

void
sampler_read(int fd, struct tcp_sample *out)
{
	unsigned char info[SAMPLER_INFO_BYTES];
	socklen_t size = sizeof(info);

	if (getsockopt(fd, IPPROTO_TCP, TCP_INFO, info, &size) == -1)
		size = 0;
	sampler_decode(info, size, out);
}
