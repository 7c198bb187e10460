/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A ceiling_report as JSON: "plafond-ceiling/1". */
#include "report/ceiling_report.h"
#include "report/json_value.h"

static json_t *
payload_by_protocol(const struct ceiling_report *report,
    enum direction direction)
{
	bool known = !report->ceilings[direction].reference;
	json_t *object = json_object();
	enum protocol p;

	for (p = 0; p < PROTOCOLS; p++)
		json_put(object, protocol_name(p), known ? json_value_u64(
		    report->payload_bps[direction][p]) : json_null());
	return object;
}

static json_t *
json_both(const struct ceiling_report *report, enum direction direction)
{
	const struct both_report *both = &report->both[direction];
	json_t *object;

	if (report->ceilings[direction].reference)
		return json_null();
	object = json_object();
	json_put(object, "low_payload_bps", json_value_u64(both->low_bps));
	json_put(object, "high_payload_bps", json_value_u64(both->high_bps));
	json_put(object, "low_segments_per_acknowledgement",
	    both->low_segments > 0 ? json_value_real(both->low_segments) :
	    json_null());
	json_put(object, "high_segments_per_acknowledgement",
	    both->high_segments > 0 ? json_value_real(both->high_segments) :
	    json_null());
	return object;
}

static json_t *
json_notes(const struct condition_figures *figures)
{
	json_t *array = json_array();

	for (size_t i = 0; i < figures->notes_count; i++)
		json_push(array, json_value_text(figures->notes[i]));
	return array;
}

static json_t *
json_figures(const struct condition_figures *f)
{
	const struct {
		const char *name;
		uint64_t value;
	} members[] = {
		{ "bdp_bytes", f->bdp_bytes },
		{ "window_needed_bytes", f->window_needed_bytes },
		{ "window_shift", f->window_shift },
		{ "streams_needed", f->streams_needed },
		{ "ramp_rounds", f->ramp_rounds },
		{ "ramp_ns", f->ramp_ns },
		{ "cold_mean_bps", f->cold_mean_bps },
		{ "burst_ns", f->burst_ns },
		{ "burst_mean_bps", f->burst_mean_bps },
		{ "transfer_ns", f->transfer_ns },
	};
	json_t *object = json_object();

	json_put(object, "loss_ratio", json_value_real(f->loss_ratio));
	for (size_t i = 0; i < sizeof(members) / sizeof(members[0]); i++)
		json_put(object, members[i].name,
		    json_value_u64(members[i].value));
	json_put(object, "notes", json_notes(f));
	return object;
}

static json_t *
json_directions(const uint64_t values[DIRECTIONS_SINGLE])
{
	json_t *object = json_object();
	enum direction d;

	for (d = 0; d < DIRECTIONS_SINGLE; d++)
		json_put(object, direction_name(d), json_value_u64(values[d]));
	return object;
}

static json_t *
json_ratios(const double values[DIRECTIONS_SINGLE])
{
	json_t *object = json_object();
	enum direction d;

	for (d = 0; d < DIRECTIONS_SINGLE; d++)
		json_put(object, direction_name(d),
		    json_value_real(values[d]));
	return object;
}

static json_t *
json_conditions(const struct conditions *conditions)
{
	json_t *object = json_object();

	json_put(object, "round_trip_ns",
	    json_value_u64(conditions->round_trip_ns));
	json_put(object, "loss_ratio", json_ratios(conditions->loss_ratio));
	json_put(object, "bit_error_ratio",
	    json_ratios(conditions->bit_error_ratio));
	json_put(object, "window_bytes",
	    json_directions(conditions->window_bytes));
	json_put(object, "host_bps", json_directions(conditions->host_bps));
	json_put(object, "test_length_ns",
	    json_value_u64(conditions->test_length_ns));
	json_put(object, "transfer_bytes",
	    json_value_u64(conditions->transfer_bytes));
	return object;
}

static json_t *
json_layers(const struct layer_stack *stack)
{
	json_t *array = json_array();

	for (size_t i = 0; i < stack->count; i++)
		json_push(array, json_value_text(stack->use[i].layer->name));
	return array;
}

static json_t *
json_segments(const struct ceiling_report *report)
{
	json_t *array = json_array();

	for (size_t i = 0; i < report->circuit->segments_count; i++) {
		const struct segment *segment = &report->circuit->segments[i];
		const struct medium *medium = segment->medium.medium;
		json_t *object = json_object();

		json_put(object, "name", json_value_text(segment->name));
		json_put(object, "medium", json_value_text(medium->name));
		json_put(object, "layers", json_layers(&segment->layers));
		json_put(object, "mtu_bytes",
		    json_value_u64(segment->mtu_bytes));
		json_put(object, "duplex", json_value_text(duplex_name(
		    report->segments[i].duplex)));
		json_put(object, "accuracy", json_value_text(accuracy_name(
		    report->segments[i].accuracy)));
		json_put(object, "tolerance_ppm", json_value_u64(
		    report->segments[i].tolerance_ppm));
		json_push(array, object);
	}
	return array;
}

int
ceiling_report_json(const struct ceiling_report *report, FILE *out)
{
	json_t *root = json_object(), *circuit = json_object();
	json_t *ceilings = json_array(), *ceiling;
	enum direction d;
	int rc;

	json_put(root, "format", json_value_text("plafond-ceiling/1"));
	json_put(root, "software",
	    json_value_text("plafond " PLAFOND_VERSION));
	json_put(circuit, "name", json_value_text(report->circuit->name));
	json_put(circuit, "mtu_bytes",
	    json_value_u64(circuit_mtu(report->circuit)));
	json_put(circuit, "segments", json_segments(report));
	json_put(circuit, "conditions",
	    json_conditions(&report->circuit->conditions));
	json_put(root, "circuit", circuit);
	for (d = 0; d < DIRECTIONS_SINGLE; d++) {
		ceiling = json_ceiling(report->circuit, &report->ceilings[d]);
		json_put(ceiling, "payload_by_protocol",
		    payload_by_protocol(report, d));
		json_put(ceiling, "both", json_both(report, d));
		json_put(ceiling, "figures",
		    json_figures(&report->figures[d]));
		json_push(ceilings, ceiling);
	}
	json_put(root, "ceilings", ceilings);
	rc = json_dumpf(root, out, JSON_INDENT(2));
	(void)fputc('\n', out);
	json_decref(root);
	return rc;
}
