/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Ceilings a second in one core, of circuits that are already read.
 *
 *     bench_ceilings ROUNDS FILE...
 *
 * Each round times, for every declaration, a slice of ceiling_of_load and at
 * once after it a slice of a reference loop, so that both see the same clock
 * and the same neighbours.  The reference is the 128-bit division as the
 * compiler makes it: dividends of 88 bits, a divisor of 41, each quotient
 * feeding the next dividend.  A line for each of both: file, segments, layers
 * of all of them, ceilings a second, divisions a second, with tabs between.
 */
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

#include "ceiling/ceiling.h"
#include "declare/circuit.h"
#include "error.h"

#define SLICE_NS UINT64_C(20000000)	/* of each loop in a round */
#define TURN 64				/* ceilings between two looks at the
					 * clock */
#define DIVISIONS 20000			/* the same of the other loop */

/* Of this thread's time on a core: not what others had of it meanwhile. */
static uint64_t
now_ns(void)
{
	struct timespec now;

	(void)clock_gettime(CLOCK_THREAD_CPUTIME_ID, &now);
	return (uint64_t)now.tv_sec * 1000000000 + (uint64_t)now.tv_nsec;
}

static struct circuit *
read_circuit(const char *path)
{
	struct circuit *circuit;
	struct error err;
	char why[1024];

	if (circuit_read_file(path, NULL, 0, &circuit, &err) == 0)
		return circuit;
	(void)fprintf(stderr, "%s\n", error_text(&err, why, sizeof(why)));
	exit(65);
}

static size_t
count_layers(const struct circuit *circuit)
{
	size_t count = 0, i;

	for (i = 0; i < circuit->segments_count; i++)
		count += circuit->segments[i].layers.count;
	return count;
}

static double
ceilings_per_s(const struct circuit *circuit)
{
	static struct ceiling ceiling;
	struct load load = { .declared = true };
	uint64_t begin_ns = now_ns(), spent_ns, count = 0;
	struct error err;

	do {
		for (int i = 0; i < TURN; i++) {
			load.direction = (enum direction)(i & 1);
			if (ceiling_of_load(circuit, &load, &ceiling,
			    &err) == -1)
				exit(70);
		}
		count += TURN;
		spent_ns = now_ns() - begin_ns;
	} while (spent_ns < SLICE_NS);
	return (double)count * 1e9 / (double)spent_ns;
}

static double
divisions_per_s(void)
{
	uint64_t begin_ns = now_ns(), spent_ns, count = 0;
	uint128 dividend = ((uint128)1 << 88) - 159;
	volatile uint64_t divisor = 1599999999991, kept;

	do {
		for (int i = 0; i < DIVISIONS; i++)
			dividend = ((uint128)1 << 87) + dividend / divisor;
		count += DIVISIONS;
		spent_ns = now_ns() - begin_ns;
	} while (spent_ns < SLICE_NS);
	kept = (uint64_t)dividend;
	(void)kept;
	return (double)count * 1e9 / (double)spent_ns;
}

static void
time_file(const char *path)
{
	struct circuit *circuit = read_circuit(path);
	double ceilings = ceilings_per_s(circuit);

	(void)printf("%s\t%zu\t%zu\t%.0f\t%.0f\n", path,
	    circuit->segments_count, count_layers(circuit), ceilings,
	    divisions_per_s());
	circuit_free(circuit);
}

int
main(int argc, char *argv[])
{
	long rounds = argc > 2 ? strtol(argv[1], NULL, 10) : 0;
	int i;

	if (rounds < 1 || rounds > 1000) {
		(void)fprintf(stderr, "usage: bench_ceilings ROUNDS FILE...\n");
		return 64;
	}
	while (rounds-- > 0)
		for (i = 2; i < argc; i++)
			time_file(argv[i]);
	return 0;
}
