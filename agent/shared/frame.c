/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * frame: length and JSON text of one message.  Pure.
 *
 * Everything here comes from a peer, known or not: it is bounded first and
 * parsed then.
 */
#include "channel.h"

#include "error.h"
#include "log.h"

#define FRAME_HEADER_BYTES 4
#define FRAME_DEPTH_MAX 32

/* RFC 7493 (I-JSON), 2.2: what a double holds exactly. */
#define FRAME_INTEGER_MAX ((INT64_C(1) << 53) - 1)

int
frame_length(const unsigned char *bytes, size_t size, size_t *length,
    struct error *err)
{
	uint32_t stated;

	if (size < FRAME_HEADER_BYTES)
		return 0;
	stated = (uint32_t)bytes[0] << 24 | (uint32_t)bytes[1] << 16 |
	    (uint32_t)bytes[2] << 8 | (uint32_t)bytes[3];
	if (stated == 0 || stated > CHANNEL_FRAME_MAX)
		return error_set(err, ERROR_PEER,
		    "a frame of %u bytes; allowed: 1 to %d", (unsigned)stated,
		    CHANNEL_FRAME_MAX);
	if (size - FRAME_HEADER_BYTES < stated)
		return 0;
	*length = stated;
	return 1;
}

static int
check_value(const json_t *value, unsigned depth, struct error *err)
{
	const char *key;
	json_t *item;
	size_t i;

	if (json_is_integer(value)) {
		json_int_t number = json_integer_value(value);

		if (number > FRAME_INTEGER_MAX || number < -FRAME_INTEGER_MAX)
			return error_set(err, ERROR_PEER, "the integer %"
			    JSON_INTEGER_FORMAT
			    "; allowed: -(2^53 - 1) to 2^53 - 1", number);
		return 0;
	}
	if (!json_is_object(value) && !json_is_array(value))
		return 0;
	if (depth > FRAME_DEPTH_MAX)
		return error_set(err, ERROR_PEER,
		    "objects and arrays nested deeper than %d",
		    FRAME_DEPTH_MAX);
	if (json_is_array(value)) {
		json_array_foreach(value, i, item)
			if (check_value(item, depth + 1, err) == -1)
				return -1;
		return 0;
	}
	/* The macro wants a json_t that may change; nothing here changes it. */
	json_object_foreach((json_t *)(uintptr_t)value, key, item)
		if (check_value(item, depth + 1, err) == -1)
			return -1;
	return 0;
}

int
frame_decode(const char *text, size_t size, json_t **out, struct error *err)
{
	json_error_t found;
	char escaped[JSON_ERROR_TEXT_LENGTH * 2];
	json_t *root = json_loadb(text, size, JSON_REJECT_DUPLICATES, &found);

	if (root == NULL)
		return error_set(err, ERROR_PEER,
		    "a frame that is no JSON object: %s (byte %d)",
		    log_escape(found.text, escaped, sizeof(escaped)),
		    found.position);
	if (!json_is_object(root)) {
		json_decref(root);
		return error_set(err, ERROR_PEER,
		    "a frame that is a JSON array; allowed: an object");
	}
	if (check_value(root, 1, err) == -1) {
		json_decref(root);
		return -1;
	}
	*out = root;
	return 0;
}
