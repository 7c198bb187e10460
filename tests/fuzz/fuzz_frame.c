/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * fuzz_frame: a frame from the network.  Whatever the bytes are, it is taken
 * or refused; and what is taken says the same once it has been written and
 * read again.
 */
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "channel.h"
#include "error.h"

#define HEADER_BYTES 4

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

/* Not assert: release builds drop it. */
static void
require(bool holds)
{
	if (!holds)
		abort();
}

static void
decode(const char *text, size_t size)
{
	json_t *object = NULL, *again = NULL;
	struct error err = { 0 };
	char *written;

	if (frame_decode(text, size, &object, &err) == -1) {
		require(err.kind == ERROR_PEER && err.cause[0] != '\0');
		return;
	}
	require(json_is_object(object));
	written = json_dumps(object, JSON_COMPACT);
	require(written != NULL);
	require(frame_decode(written, strlen(written), &again, &err) == 0);
	require(json_equal(object, again));
	json_decref(again);
	json_decref(object);
	free(written);
}

int
LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
	struct error err = { 0 };
	size_t length = 0;
	int rc = frame_length(data, size, &length, &err);

	if (rc == 1) {
		require(length >= 1 && length <= size - HEADER_BYTES);
		decode((const char *)data + HEADER_BYTES, length);
	} else
		require((rc == -1) == (err.kind == ERROR_PEER));
	/* Most inputs have no fitting length: try them as bare text too. */
	decode((const char *)data, size);
	return 0;
}
