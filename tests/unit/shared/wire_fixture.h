/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Valid messages with pseudo-random values, made by walking the tables. */
#ifndef PLAFOND_TEST_WIRE_FIXTURE_H
#define PLAFOND_TEST_WIRE_FIXTURE_H

#include <stdlib.h>
#include <string.h>

#include "error.h"
#include "seeded.h"
#include "wire.h"

static inline void
fill_text(uint64_t *seed, char *at, size_t size)
{
	/* é and € take two and three bytes of UTF-8 */
	static const char *const letters[] = { "a", "Z", "0", " ", ".", "-",
		"\"", "\\", "/", "\xc3\xa9", "\xe2\x82\xac" };
	size_t wanted = (size_t)seeded_between(seed, 0, size - 1), used = 0;

	for (;;) {
		const char *letter = letters[seeded_between(seed, 0, 10)];

		if (used + strlen(letter) > wanted)
			break;
		memcpy(at + used, letter, strlen(letter));
		used += strlen(letter);
	}
}

static inline void
fill_tokens(uint64_t *seed, const struct wire_member *m, char *body,
    size_t most)
{
	size_t count = (size_t)seeded_between(seed, 0, most);

	memcpy(body + m->count_offset, &count, sizeof(count));
	for (size_t i = 0; i < count; i++)
		for (size_t k = 0; k < WIRE_TOKEN_SIZE - 1; k++)
			body[m->offset + i * WIRE_TOKEN_SIZE + k] =
			    "0123456789abcdef"[seeded_u64(seed) % 16];
}

static inline uint64_t
greatest(const struct wire_member *m)
{
	return m->max != 0 ? m->max : WIRE_INTEGER_MAX;
}

static inline void
fill(uint64_t *seed, const struct wire_member *members, char *body,
    size_t most_tokens)
{
	for (const struct wire_member *m = members; m->name != NULL; m++) {
		char *at = body + m->offset;
		uint64_t number;
		int name = 0;
		bool yes = seeded_u64(seed) % 2 == 0;

		switch (m->kind) {
		case WIRE_U64:
			number = seeded_between(seed, m->min, greatest(m));
			if (m->nullable && yes)
				number = UNKNOWN_U64;
			memcpy(at, &number, sizeof(number));
			break;
		case WIRE_BOOL:
			memcpy(at, &yes, sizeof(yes));
			break;
		case WIRE_TEXT:
			fill_text(seed, at, m->size);
			break;
		case WIRE_NAME:
			while (m->names[name] != NULL)
				name++;
			name = (int)seeded_between(seed, 0,
			    (uint64_t)name - 1);
			memcpy(at, &name, sizeof(name));
			break;
		case WIRE_TOKENS:
			fill_tokens(seed, m, body, most_tokens);
			break;
		case WIRE_OBJECT:
			fill(seed, m->members, at, most_tokens);
			break;
		}
	}
}

static inline bool
is_plain(enum wire_type type)
{
	return wire_members(type) != NULL;
}

/* Owned struct of the message. */
static inline void *
random_body(uint64_t *seed, enum wire_type type, size_t most_tokens)
{
	size_t size = wire_size(type);
	char *body = calloc(1, size != 0 ? size : 1);

	assert_non_null(body);
	fill(seed, wire_members(type), body, most_tokens);
	return body;
}

static inline json_t *
random_message(uint64_t *seed, enum wire_type type)
{
	void *body = random_body(seed, type, 3);
	json_t *message = wire_encode(type, body);

	assert_non_null(message);
	free(body);
	return message;
}

static inline int
decode(enum wire_type type, const json_t *message, struct error *err)
{
	size_t size = wire_size(type);
	void *body = calloc(1, size != 0 ? size : 1);
	int rc;

	assert_non_null(body);
	memset(err, 0, sizeof(*err));
	rc = wire_decode(type, message, body, err);
	if (rc == -1) {
		const char *bytes = body;

		assert_int_equal(err->kind, ERROR_PEER);
		assert_non_null(strstr(err->where, wire_type_name(type)));
		for (size_t i = 0; i < size; i++)
			assert_int_equal(bytes[i], 0);
	}
	free(body);
	return rc;
}

#endif
