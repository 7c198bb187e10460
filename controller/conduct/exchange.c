/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "conduct/exchange.h"

void
exchange_add(struct exchange *exchange, uint64_t t1_ns, uint64_t t2_ns,
    uint64_t t3_ns, uint64_t t4_ns, uint64_t agent_utc_ns, uint64_t our_utc_ns)
{
	struct exchange_sample *sample;
	int64_t forth_ns = (int64_t)(t2_ns - t1_ns);
	int64_t back_ns = (int64_t)(t3_ns - t4_ns);
	uint64_t delay_ns;

	if (t4_ns < t1_ns || t3_ns < t2_ns)
		return;
	/* delta = (T4 - T1) - (T3 - T2), never below the clock's precision */
	delay_ns = t4_ns - t1_ns > t3_ns - t2_ns ?
	    (t4_ns - t1_ns) - (t3_ns - t2_ns) : 1;
	sample = &exchange->samples[exchange->count++ % EXCHANGE_KEPT];
	/* theta = ((T2 - T1) + (T3 - T4)) / 2 */
	sample->offset_ns = forth_ns / 2 + back_ns / 2 +
	    (forth_ns % 2 + back_ns % 2) / 2;
	sample->delay_ns = delay_ns;
	/* an agent may state any civil time: wrap, do not overflow */
	sample->civil_offset_ns = (int64_t)(agent_utc_ns - our_utc_ns +
	    delay_ns / 2);
	if (sample->delay_ns > exchange->largest_delay_ns)
		exchange->largest_delay_ns = sample->delay_ns;
}

bool
exchange_best(const struct exchange *exchange, struct exchange_sample *out)
{
	uint64_t kept = exchange->count < EXCHANGE_KEPT ?
	    exchange->count : EXCHANGE_KEPT;
	const struct exchange_sample *best = NULL;

	for (uint64_t i = 0; i < kept; i++)
		if (best == NULL ||
		    exchange->samples[i].delay_ns < best->delay_ns)
			best = &exchange->samples[i];
	if (best != NULL)
		*out = *best;
	return best != NULL;
}
