/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "report/json_value.h"
#include "report/record.h"

/* Rates of estimates are doubles; whole bit/s, rounded down. */
static json_t *
whole_bps(double bps)
{
	return isfinite(bps) && bps >= 0 && bps < 9007199254740992.0
	    ? json_integer((json_int_t)bps) : json_null();
}

static json_t *
json_layers(const struct layer_stack *layers)
{
	json_t *array = json_array();

	for (size_t i = 0; i < layers->count; i++)
		json_push(array, json_value_text(layers->use[i].layer->name));
	return array;
}

static json_t *
json_service(const struct service *service)
{
	static const char *const names[DIRECTIONS_SINGLE][3] = {
		{ "committed_a_to_b_bps", "peak_a_to_b_bps",
		  "excess_a_to_b_bps" },
		{ "committed_b_to_a_bps", "peak_b_to_a_bps",
		  "excess_b_to_a_bps" },
	};
	json_t *object = json_object();

	json_put(object, "name", json_value_text(service->name));
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++) {
		json_put(object, names[d][0],
		    json_value_u64(service->committed_bps[d]));
		json_put(object, names[d][1],
		    json_value_u64(service->peak_bps[d]));
		json_put(object, names[d][2],
		    json_value_u64(service->excess_bps[d]));
	}
	json_put(object, "counted_at", service->counted_at < LEVELS
	    ? json_value_text(level_name(
	    (enum layer_level)service->counted_at)) : json_null());
	json_put(object, "burst_a_to_b_bytes",
	    json_value_u64(service->burst_bytes[DIRECTION_A_TO_B]));
	json_put(object, "burst_b_to_a_bytes",
	    json_value_u64(service->burst_bytes[DIRECTION_B_TO_A]));
	json_put(object, "dscp", json_value_u64(service->dscp));
	json_put(object, "priority", json_value_u64(service->priority));
	return object;
}

static json_t *
json_circuit(const struct circuit *circuit)
{
	json_t *object = json_object();
	json_t *segments = json_array(), *services = json_array();

	json_put(object, "name", json_value_text(circuit->name));
	for (size_t i = 0; i < circuit->segments_count; i++) {
		const struct segment *segment = &circuit->segments[i];
		json_t *item = json_object();

		json_put(item, "name", json_value_text(segment->name));
		json_put(item, "medium",
		    json_value_text(segment->medium.medium->name));
		json_put(item, "layers", json_layers(&segment->layers));
		json_put(item, "mtu_bytes",
		    json_value_u64(segment->mtu_bytes));
		json_put(item, "service", json_service(&segment->service));
		json_push(segments, item);
	}
	json_put(object, "segments", segments);
	for (size_t i = 0; i < circuit->services_count; i++)
		json_push(services, json_service(&circuit->services[i]));
	json_put(object, "services", services);
	return object;
}

static json_t *
json_plan(const struct plan_declaration *plan, size_t trials_planned)
{
	json_t *object = json_object();
	json_t *directions = json_array();

	json_put(object, "trials_planned", json_value_u64(trials_planned));
	json_put(object, "trials", json_value_u64(plan->trials));
	for (size_t d = 0; d < DIRECTIONS; d++)
		if ((plan->directions >> d & 1) != 0)
			json_push(directions, json_value_text(
			    direction_name((enum direction)d)));
	json_put(object, "directions", directions);
	json_put(object, "duration_ns", json_value_u64(plan->duration_ns));
	json_put(object, "settle_ns", json_value_u64(plan->settle_ns));
	json_put(object, "settle_extends", plan->settle_extends == FIELD_UNSET
	    ? json_null() : json_boolean(plan->settle_extends != 0));
	json_put(object, "row_ns", json_value_u64(plan->row_ns));
	json_put(object, "streams", json_value_u64(plan->streams));
	json_put(object, "opens", json_value_text(
	    end_name(plan->opens == END_B ? END_B : END_A)));
	json_put(object, "congestion_control",
	    json_value_text(plan->congestion_control));
	json_put(object, "dscp", json_value_u64(plan->dscp));
	json_put(object, "mss_bytes", json_value_u64(plan->mss_bytes));
	json_put(object, "send_buffer_bytes",
	    json_value_u64(plan->send_buffer_bytes));
	json_put(object, "receive_buffer_bytes",
	    json_value_u64(plan->receive_buffer_bytes));
	return object;
}

static json_t *
json_host(const struct record *record, enum end end)
{
	const struct host_facts *host = &record->hosts[end];
	json_t *object = json_object();

	json_put(object, "end", json_value_text(end_name(end)));
	json_put(object, "name",
	    json_value_text(record->circuit->ends[end].name));
	json_put(object, "hostname", json_value_text(host->hostname));
	json_put(object, "software", json_value_text(host->software));
	json_put(object, "kernel", json_value_text(host->kernel));
	json_put(object, "cpus", json_value_u64(host->cpus));
	json_put(object, "default_congestion_control",
	    json_value_text(host->default_congestion_control));
	json_put(object, "receive_buffer_max_bytes",
	    json_value_u64(host->receive_buffer_max_bytes));
	json_put(object, "send_buffer_max_bytes",
	    json_value_u64(host->send_buffer_max_bytes));
	json_put(object, "tcp_receive_max_bytes",
	    json_value_u64(host->tcp_receive_max_bytes));
	json_put(object, "tcp_send_max_bytes",
	    json_value_u64(host->tcp_send_max_bytes));
	json_put(object, "tcp_timestamps",
	    json_value_u64(host->tcp_timestamps));
	json_put(object, "interface", json_value_text(host->interface));
	json_put(object, "interface_mtu_bytes",
	    json_value_u64(host->interface_mtu_bytes));
	json_put(object, "link_speed_bps",
	    json_value_u64(host->link_speed_bps));
	json_put(object, "reference_bps",
	    json_value_u64(record->reference_bps[end]));
	return object;
}

/* The median of one direction's trials, in bit/s. */
static json_t *
json_result(const struct verdict *verdict, enum direction direction)
{
	const struct median_estimate *e = &verdict->achieved_bps[direction];
	json_t *object = json_object();

	json_put(object, "direction",
	    json_value_text(direction_name(direction)));
	json_put(object, "trials", json_value_u64(e->n));
	json_put(object, "median_bps", whole_bps(e->median));
	json_put(object, "attained",
	    json_value_real(verdict->attained[direction]));
	json_put(object, "min_bps", whole_bps(e->min));
	json_put(object, "max_bps", whole_bps(e->max));
	json_put(object, "interval_low_bps", e->has_interval
	    ? whole_bps(e->low) : json_null());
	json_put(object, "interval_high_bps", e->has_interval
	    ? whole_bps(e->high) : json_null());
	json_put(object, "interval_confidence", e->has_interval
	    ? json_value_real(e->coverage) : json_null());
	return object;
}

static json_t *
json_criterion(const struct criterion_outcome *row)
{
	const struct median_estimate *e = &row->estimate;
	json_t *object = json_object();

	json_put(object, "name", json_value_text(row->name));
	json_put(object, "direction",
	    json_value_text(direction_name(row->direction)));
	json_put(object, "unit", json_value_text(row->is_time ? "ns"
	    : "ratio"));
	json_put(object, "limit", json_value_text(row->at_least ? "at-least"
	    : "at-most"));
	json_put(object, "required", json_value_real(row->required));
	json_put(object, "judged", json_boolean(row->judged));
	json_put(object, "found", json_value_real(row->found));
	json_put(object, "lower_bound", e->has_bounds
	    ? json_value_real(e->lower) : json_null());
	json_put(object, "upper_bound", e->has_bounds
	    ? json_value_real(e->upper) : json_null());
	json_put(object, "bound_confidence", e->has_bounds
	    ? json_value_real(e->bound_coverage) : json_null());
	json_put(object, "outcome", row->judged
	    ? json_value_text(outcome_name(row->outcome)) : json_null());
	json_put(object, "note", json_value_text(row->note));
	return object;
}

static json_t *
json_ledger(const struct ledger_entry *entry)
{
	json_t *object = json_object();

	json_put(object, "direction",
	    json_value_text(direction_name(entry->direction)));
	json_put(object, "name", json_value_text(entry->name));
	json_put(object, "bps", json_value_i64(entry->bps));
	json_put(object, "uncertainty_bps",
	    json_value_u64(entry->uncertainty_bps));
	json_put(object, "evidence", json_value_text(entry->evidence));
	return object;
}

static json_t *
json_verdict(const struct verdict *verdict)
{
	json_t *object = json_object();
	json_t *reasons = json_array();

	json_put(object, "outcome",
	    json_value_text(outcome_name(verdict->outcome)));
	for (size_t i = 0; i < verdict->reasons_count; i++) {
		const struct reason *reason = &verdict->reasons[i];
		json_t *item = json_object();

		json_put(item, "voids", json_boolean(reason->voids));
		json_put(item, "code", json_value_text(reason->code));
		json_put(item, "text", json_value_text(reason->text));
		json_push(reasons, item);
	}
	json_put(object, "reasons", reasons);
	return object;
}

/* The arrays that follow from the verdict. */
static void
put_judgement(const struct verdict *verdict, json_t *object)
{
	json_t *results = json_array(), *ledger = json_array();
	json_t *criteria = json_array();

	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++)
		if (verdict->has_achieved[d])
			json_push(results, json_result(verdict,
			    (enum direction)d));
	for (size_t i = 0; i < verdict->ledger_count; i++)
		json_push(ledger, json_ledger(&verdict->ledger[i]));
	for (size_t i = 0; i < verdict->criteria_count; i++)
		json_push(criteria, json_criterion(&verdict->criteria[i]));
	json_put(object, "results", results);
	json_put(object, "ledger", ledger);
	json_put(object, "criteria", criteria);
	json_put(object, "verdict", json_verdict(verdict));
}

json_t *
record_to_json(const struct record *record)
{
	json_t *object = json_object();
	json_t *hosts = json_array(), *ceilings = json_array();
	json_t *trials = json_array();

	json_put(object, "format", json_value_text("plafond-record/1"));
	json_put(object, "id", json_value_text(record->id));
	json_put(object, "task", json_value_text(record->task));
	json_put(object, "started_utc",
	    json_value_utc(record->started_utc_ns));
	json_put(object, "finished_utc",
	    json_value_utc(record->finished_utc_ns));
	json_put(object, "software",
	    json_value_text("plafond " PLAFOND_VERSION));
	json_put(object, "circuit", json_circuit(record->circuit));
	json_put(object, "plan", json_plan(&record->circuit->plan,
	    record->trials_planned));
	for (size_t end = 0; record->hosts != NULL && end < ENDS; end++)
		json_push(hosts, json_host(record, (enum end)end));
	json_put(object, "hosts", hosts);
	for (size_t d = 0; d < DIRECTIONS_SINGLE; d++)
		json_push(ceilings, json_ceiling(record->circuit,
		    &record->ceilings[d]));
	json_put(object, "ceilings", ceilings);
	for (size_t i = 0; i < record->trials_count; i++)
		json_push(trials, json_trial(record, &record->trials[i]));
	json_put(object, "trials", trials);
	put_judgement(record->verdict, object);
	return object;
}
