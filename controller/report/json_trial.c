/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "error.h"
#include "judge/two_way.h"
#include "report/json_value.h"
#include "report/record.h"

static json_t *
json_tcp(const struct tcp_sample *sample)
{
#define TCP_SAMPLE_NAME(name, offset, bytes) #name,
	static const char *const names[TCP_SAMPLE_COUNT] = {
		TCP_SAMPLE_FIELDS(TCP_SAMPLE_NAME) };
#undef TCP_SAMPLE_NAME
	json_t *object = json_object();

	for (size_t i = 0; i < TCP_SAMPLE_COUNT; i++)
		json_put(object, names[i], json_value_u64(sample->value[i]));
	return object;
}

/* Seconds of processor a gigabyte of payload.  A receiver counts bytes in the
 * window only but processor time over all rows, so its share of a core is set
 * against the rate. */
static double
cpu_seconds_per_gigabyte(const struct measurement *m, uint64_t payload_bps)
{
	if (m->cpu_ns == UNKNOWN_U64)
		return NAN;
	if (!m->is_receiver)
		return m->bytes == 0 ? NAN
		    : (double)m->cpu_ns / (double)m->bytes;
	if (m->elapsed_ns == 0 || payload_bps == 0)
		return NAN;
	return (double)m->cpu_ns / (double)m->elapsed_ns * 8e9 /
	    (double)payload_bps;
}

static json_t *
json_measurement(const struct measurement *m, bool reported,
    uint64_t payload_bps)
{
	json_t *object;

	if (!reported)
		return json_null();
	object = json_object();
	json_put(object, "end", json_value_text(measurement_end_name(m->end)));
	json_put(object, "bytes", json_value_u64(m->bytes));
	json_put(object, "cpu_ns", json_value_u64(m->cpu_ns));
	json_put(object, "cpu_seconds_per_gigabyte",
	    json_value_real(cpu_seconds_per_gigabyte(m, payload_bps)));
	json_put(object, "cpu_busiest_ratio",
	    m->cpu_busiest_ratio_ppm == UNKNOWN_U64 ? json_null()
	    : json_value_real((double)m->cpu_busiest_ratio_ppm * 1e-6));
	json_put(object, "steal_ns", json_value_u64(m->steal_ns));
	json_put(object, "elapsed_ns", json_value_u64(m->elapsed_ns));
	json_put(object, "streams", json_value_u64(m->streams));
	json_put(object, "rows", json_value_u64(m->rows));
	json_put(object, "stream_rows", json_value_u64(m->stream_rows));
	json_put(object, "worker_rows", json_value_u64(m->worker_rows));
	json_put(object, "sha256", json_value_text(m->sha256));
	json_put(object, "congestion_control",
	    json_value_text(m->congestion_control));
	json_put(object, "tcp", json_tcp(&m->last));
	return object;
}

static json_t *
json_series(const struct series *series)
{
	json_t *object = json_object();
	json_t *buckets = json_array();

	json_put(object, "rows", json_value_u64(series->rows));
	json_put(object, "spacing_ns", json_value_u64(series->spacing_ns));
	json_put(object, "sha256", json_value_text(series->sha256));
	json_put(object, "rows_per_bucket", json_value_u64(
	    series->rows_per_bucket > 0 ? series->rows_per_bucket : 1));
	for (size_t i = 0; i < series->buckets_count; i++) {
		json_t *bucket = json_array();

		json_push(bucket, json_value_u64(series->buckets[i].min_bps));
		json_push(bucket, json_value_u64(series->buckets[i].mean_bps));
		json_push(bucket, json_value_u64(series->buckets[i].max_bps));
		json_push(buckets, bucket);
	}
	json_put(object, "buckets", buckets);
	return object;
}

/* Figures that are results are null where the direction does not count. */
static void
put_direction(const struct record *record, const struct trial_run *run,
    enum direction direction, json_t *object)
{
	const struct direction_run *way = &run->directions[direction];
	bool counts = trial_run_counts(run, direction);
	uint64_t target_bps = two_way_target_bps(record->circuit, run,
	    direction, record->verdict->target_bps[direction]);

	json_put(object, "payload_bps", counts
	    ? json_value_u64(way->payload_bps) : json_null());
	json_put(object, "ceiling_payload_bps",
	    target_bps > 0 ? json_value_u64(target_bps) : json_null());
	json_put(object, "attained", counts && target_bps > 0
	    ? json_value_real((double)way->payload_bps / (double)target_bps)
	    : json_null());
	json_put(object, "row_min_bps", counts
	    ? json_value_u64(way->row_min_bps) : json_null());
	json_put(object, "row_max_bps", counts
	    ? json_value_u64(way->row_max_bps) : json_null());
	json_put(object, "bytes", counts ? json_value_u64(way->bytes)
	    : json_null());
	json_put(object, "settle_ns", way->receiver_reported
	    ? json_value_u64(way->receiver.settle_ns) : json_null());
	json_put(object, "settled", way->receiver_reported
	    ? json_boolean(way->receiver.settled) : json_null());
	json_put(object, "duration_ns", counts
	    ? json_value_u64(way->duration_ns) : json_null());
	json_put(object, "congestion_control",
	    json_value_text(way->sender_reported &&
	    way->sender.congestion_control[0] != '\0'
	    ? way->sender.congestion_control : run->trial.congestion_control));
	json_put(object, "round_trip_ns", way->present
	    ? json_value_u64(way->round_trip_ns) : json_null());
	json_put(object, "interface_bytes", way->present
	    ? json_value_u64(way->interface_bytes) : json_null());
	json_put(object, "sender", json_measurement(&way->sender,
	    way->sender_reported, way->payload_bps));
	json_put(object, "receiver", json_measurement(&way->receiver,
	    way->receiver_reported, way->payload_bps));
	json_put(object, "series", json_series(&way->series));
}

static json_t *
json_both(const struct record *record, const struct trial_run *run)
{
	json_t *array = json_array();

	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++) {
		json_t *object = json_object();

		json_put(object, "direction",
		    json_value_text(direction_name((enum direction)d)));
		put_direction(record, run, (enum direction)d, object);
		json_push(array, object);
	}
	return array;
}

json_t *
json_trial(const struct record *record, const struct trial_run *run)
{
	const struct trial *trial = &run->trial;
	char text[1024];
	json_t *object = json_object();

	json_put(object, "number", json_value_u64(trial->number));
	json_put(object, "protocol",
	    json_value_text(protocol_name(trial->protocol)));
	json_put(object, "encryption", json_value_text(
	    trial->protocol == PROTOCOL_TCP_TLS ? "tls" : "none"));
	json_put(object, "direction",
	    json_value_text(direction_name(trial->direction)));
	json_put(object, "opens", json_value_text(end_name(trial->opens)));
	json_put(object, "streams", json_value_u64(trial->streams));
	json_put(object, "started_utc", json_value_utc(run->started_utc_ns));
	json_put(object, "failed", json_boolean(run->failed));
	json_put(object, "failure", run->failed
	    ? json_value_text(error_text(&run->why, text, sizeof(text)))
	    : json_null());
	if (trial->direction == DIRECTION_BOTH)
		json_put(object, "directions", json_both(record, run));
	else
		put_direction(record, run, trial->direction, object);
	return object;
}
