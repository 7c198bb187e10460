/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "payload.h"

#include <inttypes.h>
#include <string.h>
#include <sys/mman.h>
#include <sys/random.h>

#include "error.h"

static uint64_t
rotate_left(uint64_t x, unsigned bits)
{
	return (x << bits) | (x >> (64 - bits));
}

/* One step of xoshiro256++, as its authors published it. */
static uint64_t
next_word(uint64_t s[4])
{
	uint64_t word = rotate_left(s[0] + s[3], 23) + s[0];
	uint64_t t = s[1] << 17;

	s[2] ^= s[0];
	s[3] ^= s[1];
	s[1] ^= s[2];
	s[0] ^= s[3];
	s[2] ^= t;
	s[3] = rotate_left(s[3], 45);
	return word;
}

static void
store_little_endian(unsigned char *out, uint64_t word)
{
	for (unsigned i = 0; i < sizeof(word); i++)
		out[i] = (unsigned char)(word >> (8 * i));
}

void
payload_fill(unsigned char *bytes, size_t size, const uint64_t seed[4])
{
	uint64_t state[4];
	unsigned char last[sizeof(uint64_t)];
	size_t done = 0;

	memcpy(state, seed, sizeof(state));
	for (; size - done >= sizeof(uint64_t); done += sizeof(uint64_t))
		store_little_endian(bytes + done, next_word(state));
	if (done < size) {
		store_little_endian(last, next_word(state));
		memcpy(bytes + done, last, size - done);
	}
}

int
payload_init(struct payload *payload, uint64_t period_bytes,
    struct error *err)
{
	uint64_t seed[4];
	void *memory;

	if (period_bytes == 0)
		period_bytes = PAYLOAD_PERIOD_BYTES;
	if (period_bytes < PAYLOAD_PERIOD_BYTES_MIN ||
	    period_bytes > PAYLOAD_PERIOD_BYTES_MAX)
		return error_set(err, ERROR_INPUT, "payload period %" PRIu64
		    " B, allowed %" PRIu64 " B to %" PRIu64 " B", period_bytes,
		    PAYLOAD_PERIOD_BYTES_MIN, PAYLOAD_PERIOD_BYTES_MAX);
	if (getrandom(seed, sizeof(seed), 0) != (ssize_t)sizeof(seed))
		return error_errno(err, ERROR_INTERNAL, "seed of the payload");
	seed[0] |= 1;		/* the state must not be all zero */
	memory = mmap(NULL, period_bytes, PROT_READ | PROT_WRITE,
	    MAP_PRIVATE | MAP_ANONYMOUS, -1, 0);
	if (memory == MAP_FAILED)
		return error_errno(err, ERROR_INTERNAL, "payload of %" PRIu64
		    " B", period_bytes);
	/* a wish: walking 16 MiB in large pages takes a tenth less CPU time */
	(void)madvise(memory, period_bytes, MADV_HUGEPAGE);
	payload->bytes = memory;
	payload->period_bytes = period_bytes;
	payload_fill(payload->bytes, payload->period_bytes, seed);
	return 0;
}

void
payload_fini(struct payload *payload)
{
	if (payload->bytes != NULL)
		(void)munmap(payload->bytes, payload->period_bytes);
	memset(payload, 0, sizeof(*payload));
}

const unsigned char *
payload_at(const struct payload *payload, uint64_t position_bytes,
    size_t *size)
{
	size_t offset = position_bytes % payload->period_bytes;

	if (*size > payload->period_bytes - offset)
		*size = payload->period_bytes - offset;
	return payload->bytes + offset;
}
