/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Any text as a declaration: what is accepted has ceilings that add up. */
#include <assert.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include "ceiling/ceiling.h"
#include "declare/circuit.h"
#include "error.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

static void
check(const struct ceiling *ceiling)
{
	uint64_t bps = ceiling->line_rate_bps;
	size_t i;

	if (ceiling->reference)
		return;
	for (i = 0; i < ceiling->steps_count; i++) {
		assert(ceiling->steps[i].bps <= bps);
		bps -= ceiling->steps[i].bps;
	}
	assert(bps == ceiling->rate_bps[LEVEL_PAYLOAD]);
}

int
LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
	static struct ceiling ceiling;
	struct circuit *circuit = NULL;
	enum direction d;
	enum protocol p;
	struct error err;

	memset(&err, 0, sizeof(err));
	if (circuit_read_text((const char *)data, size, "fuzz", NULL, 0,
	    &circuit, &err) == -1) {
		assert(err.kind == ERROR_INPUT && err.cause[0] != '\0');
		return 0;
	}
	for (d = 0; d < DIRECTIONS_SINGLE; d++)
		for (p = 0; p < PROTOCOLS; p++)
			if (ceiling_compute(circuit, d, p, &ceiling,
			    &err) == 0)
				check(&ceiling);
	circuit_free(circuit);
	return 0;
}
