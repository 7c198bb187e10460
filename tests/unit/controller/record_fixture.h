/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * record_fixture: invented records of every outcome, from judge_fixture.
 */
#ifndef PLAFOND_RECORD_FIXTURE_H
#define PLAFOND_RECORD_FIXTURE_H

#include "error.h"
#include "judge_fixture.h"
#include "report/record.h"

struct sample {
	const char *name;
	void (*make)(struct fixture *f);
};

static inline void
sample_meets(struct fixture *f)
{
	fixture_fill(f, 7, 0.9981, 0.9993);
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++) {
		f->circuit.criteria.loss_ratio[d] = 0.001;
		f->circuit.criteria.delay_ns[d] = 20 * NS_PER_MS;
	}
}

static inline void
sample_falls_short(struct fixture *f)
{
	fixture_fill(f, 7, 0.6214, 0.994);
	for (size_t i = 0; i < f->input.trials_count; i += 2) {
		uint64_t *tcp = f->trials[i].directions[0].sender.last.value;

		f->trials[i].trial.streams = 1;
		tcp[TCP_SAMPLE_snd_mss_bytes] = 1400;
		tcp[TCP_SAMPLE_bytes_sent] = 1000000;
		tcp[TCP_SAMPLE_bytes_retrans] = 21000 + 100 * i;
	}
}

static inline void
sample_undecided(struct fixture *f)
{
	fixture_fill(f, 3, 0.995, 0.99);
}

/* Everything at once: a failed trial, a two-way one, our own limit. */
static inline void
sample_void(struct fixture *f)
{
	sample_falls_short(f);
	f->trials[5].failed = true;
	(void)error_set(&f->trials[5].why, ERROR_UNREACHABLE, "the agent at "
	    "end b (198.18.0.2:61741) vanished: nothing was heard from it for "
	    "2 s");
	f->trials[5].directions[1].sender_reported = false;
	f->trials[2].directions[0].sender.cpu_busiest_ratio_ppm = 1000000;
	fixture_add(f, DIRECTION_BOTH, UINT64_C(500000000));
	f->circuit.plan.directions = 7;
	f->input.trials_planned = 15;
}

static inline void
sample_nothing(struct fixture *f)
{
	f->input.interrupted = true;
}

static inline void
sample_host(struct fixture *f)
{
	fixture_make_host(f, UINT64_C(38123456789));
	for (uint64_t i = 0; i < 7; i++) {
		fixture_add(f, DIRECTION_A_TO_B, UINT64_C(35123456789) +
		    i * UINT64_C(300000000));
		fixture_add(f, DIRECTION_B_TO_A, UINT64_C(34123456789) +
		    i * UINT64_C(300000000));
	}
	f->input.trials_planned = f->input.trials_count;
}

/* The last has every kind of object. */
static const struct sample samples[] = {
	{ "meets", sample_meets },
	{ "falls-short", sample_falls_short },
	{ "undecided", sample_undecided },
	{ "nothing", sample_nothing },
	{ "host", sample_host },
	{ "void", sample_void },
};
#define SAMPLES (sizeof(samples) / sizeof(samples[0]))

/* Borrows f, which is judged. */
static inline struct record
fixture_record(struct fixture *f)
{
	static const unsigned char random[10] = { 1, 2, 3, 4, 5, 6, 7, 8, 9,
		10 };
	struct record record = { .task = "acceptance",
		.started_utc_ns = UINT64_C(1796119200000000000),
		.finished_utc_ns = UINT64_C(1796119258400000000),
		.circuit = &f->circuit, .ceilings = f->ceilings,
		.hosts = f->hosts, .trials = f->trials,
		.trials_count = f->input.trials_count,
		.trials_planned = f->input.trials_planned,
		.verdict = &f->verdict };

	verdict_judge(&f->input, &f->verdict);
	memcpy(record.reference_bps, f->input.reference_bps,
	    sizeof(record.reference_bps));
	record_make_id(record.started_utc_ns, random, record.id);
	return record;
}

#endif
