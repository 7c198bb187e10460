/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "rehearse/bucket.h"

#include <assert.h>

void
bucket_init(struct bucket *bucket, const struct bucket_settings *settings,
    uint64_t at_ns)
{
	*bucket = (struct bucket){
		.octets = settings->octets,
		.work_a_ns = settings->rate_bps * settings->octets.added_den,
		.depth = octets_bytes_work(&settings->octets,
		    settings->burst_bytes),
		.at_ns = at_ns,
	};
}

static uint128
missing_at(const struct bucket *bucket, uint64_t now_ns)
{
	uint128 earned;

	assert(now_ns >= bucket->at_ns);
	earned = (uint128)(now_ns - bucket->at_ns) * bucket->work_a_ns;
	return bucket->missing > earned ? bucket->missing - earned : 0;
}

bool
bucket_conforms(struct bucket *bucket, uint64_t now_ns, uint64_t bytes)
{
	uint128 missing;

	if (bucket->work_a_ns == 0)
		return true;
	missing = missing_at(bucket, now_ns) +
	    octets_work(&bucket->octets, bytes);
	if (missing > bucket->depth)
		return false;
	bucket->missing = missing;
	bucket->at_ns = now_ns;
	return true;
}

uint64_t
bucket_release_ns(const struct bucket *bucket, uint64_t now_ns, uint64_t bytes)
{
	uint128 work, allowed, missing;

	if (bucket->work_a_ns == 0)
		return now_ns;
	if (now_ns < bucket->at_ns)
		now_ns = bucket->at_ns;
	work = octets_work(&bucket->octets, bytes);
	allowed = work < bucket->depth ? bucket->depth - work : 0;
	missing = missing_at(bucket, now_ns);
	if (missing <= allowed)
		return now_ns;
	return now_ns + (uint64_t)((missing - allowed + bucket->work_a_ns - 1) /
	    bucket->work_a_ns);
}

void
bucket_take(struct bucket *bucket, uint64_t release_ns, uint64_t bytes)
{
	if (bucket->work_a_ns == 0)
		return;
	bucket->missing = missing_at(bucket, release_ns) +
	    octets_work(&bucket->octets, bytes);
	bucket->at_ns = release_ns;
}
