/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * exchange: clock offset and delay by four time stamps, RFC 5905 section 8.
 *
 * The sample with the least delay of the last EXCHANGE_KEPT is used; its offset
 * is wrong by at most half its delay, whatever the asymmetry.  Pure.
 */
#ifndef PLAFOND_EXCHANGE_H
#define PLAFOND_EXCHANGE_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#define EXCHANGE_KEPT 64

struct exchange_sample {
	int64_t offset_ns;		/* agent's clock - ours */
	uint64_t delay_ns;
	int64_t civil_offset_ns;	/* agent's civil time - ours */
};

struct exchange {
	struct exchange_sample samples[EXCHANGE_KEPT];
	uint64_t count;			/* ever */
	uint64_t largest_delay_ns;
};

/* t1, t4 on our clock, t2, t3 on the agent's; agent_utc_ns at t3 and
 * our_utc_ns at t4 are civil.  A sample with t4 < t1 or t3 < t2 is dropped. */
void exchange_add(struct exchange *exchange, uint64_t t1_ns, uint64_t t2_ns,
    uint64_t t3_ns, uint64_t t4_ns, uint64_t agent_utc_ns,
    uint64_t our_utc_ns);
/* false: no sample yet. */
bool exchange_best(const struct exchange *exchange,
    struct exchange_sample *out);

#endif
