/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The bytes of a frame, from the peer to a struct. */
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>

#include "channel.h"
#include "error.h"
#include "wire.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static void
decode(const json_t *message)
{
	static struct wire_rows rows;
	enum wire_type type;
	struct error err;
	json_t *again;
	void *body;

	if (wire_type_of(message, &type, &err) == -1)
		return;
	if (type == WIRE_ROWS) {
		if (wire_decode_rows(message, &rows, &err) == 0)
			free(wire_rows_text(message));
		return;
	}
	body = calloc(1, wire_size(type) + 1);
	if (body == NULL)
		return;
	/* what has been taken can be said again, and is taken again */
	if (wire_decode(type, message, body, &err) == 0) {
		again = wire_encode(type, body);
		if (again == NULL || wire_decode(type, again, body, &err) == -1)
			abort();
		json_decref(again);
	}
	free(body);
}

int
LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
	json_t *message;
	struct error err;

	if (frame_decode((const char *)data, size, &message, &err) == -1)
		return 0;
	decode(message);
	json_decref(message);
	return 0;
}
