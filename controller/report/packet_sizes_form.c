/* SPDX-License-Identifier: GPL-3.0-or-later */
/* packet_sizes for programs: JSON "plafond-packet-sizes/1" and CSV. */
#include <inttypes.h>

#include "report/csv_text.h"
#include "report/json_value.h"
#include "report/packet_sizes.h"

static json_t *
json_size(const struct packet_sizes_direction *d,
    const struct packet_size *size)
{
	json_t *object = json_object();

	json_put(object, "frame_bytes", d->frames ?
	    json_value_u64(size->bytes) : json_null());
	json_put(object, "packet_bytes",
	    json_value_u64(size->rate.packet_bytes));
	json_put(object, "packets_per_s",
	    json_value_u64(fraction_floor(size->rate.packets_per_s)));
	json_put(object, "line_bps",
	    json_value_u64(size->rate.rate_bps[LEVEL_LINE]));
	json_put(object, "frame_bps", d->frames ?
	    json_value_u64(size->rate.rate_bps[LEVEL_FRAME]) : json_null());
	json_put(object, "packet_bps",
	    json_value_u64(size->rate.rate_bps[LEVEL_PACKET]));
	json_put(object, "payload_bps", json_value_u64(size->declared_bps));
	json_put(object, "udp_payload_bps", json_value_u64(size->udp_bps));
	json_put(object, "binding", json_value_text(size->rate.binding));
	return object;
}

static json_t *
json_direction(const struct packet_sizes *sizes, enum direction direction)
{
	const struct packet_sizes_direction *d =
	    &sizes->directions[direction];
	json_t *object = json_object(), *array = json_array();
	json_t *left = json_array();

	json_put(object, "direction",
	    json_value_text(direction_name(direction)));
	for (size_t i = 0; i < d->count; i++)
		json_push(array, json_size(d, &d->sizes[i]));
	json_put(object, "sizes", array);
	for (size_t i = 0; i < d->left_count; i++) {
		json_t *one = json_object();

		json_put(one, d->frames ? "frame_bytes" : "packet_bytes",
		    json_value_u64(d->left[i].bytes));
		json_put(one, "why", json_value_text(d->left[i].why));
		json_push(left, one);
	}
	json_put(object, "left_out", left);
	json_put(object, "contract_ignored",
	    json_boolean(d->contract_ignored));
	return object;
}

int
packet_sizes_json(const struct packet_sizes *sizes, FILE *out)
{
	json_t *root = json_object(), *circuit = json_object();
	json_t *directions = json_array();
	enum direction d;
	int rc;

	json_put(root, "format", json_value_text("plafond-packet-sizes/1"));
	json_put(root, "software",
	    json_value_text("plafond " PLAFOND_VERSION));
	json_put(circuit, "name", json_value_text(sizes->circuit));
	json_put(root, "circuit", circuit);
	json_put(root, "top", json_value_text(sizes->top));
	json_put(root, "reference", json_boolean(sizes->reference));
	for (d = 0; d < DIRECTIONS_SINGLE && !sizes->reference; d++)
		json_push(directions, json_direction(sizes, d));
	json_put(root, "directions", directions);
	rc = json_dumpf(root, out, JSON_INDENT(2));
	(void)fputc('\n', out);
	json_decref(root);
	return rc;
}

static void
csv_known(uint64_t value, FILE *out)
{
	(void)fputc(',', out);
	if (value != FIELD_UNSET)
		(void)fprintf(out, "%" PRIu64, value);
}

static void
csv_size(enum direction direction, const struct packet_sizes_direction *d,
    const struct packet_size *size, FILE *out)
{
	(void)fputs(direction_name(direction), out);
	csv_known(d->frames ? size->bytes : FIELD_UNSET, out);
	csv_known(size->rate.packet_bytes, out);
	csv_known(fraction_floor(size->rate.packets_per_s), out);
	csv_known(size->rate.rate_bps[LEVEL_LINE], out);
	csv_known(d->frames ? size->rate.rate_bps[LEVEL_FRAME] : FIELD_UNSET,
	    out);
	csv_known(size->rate.rate_bps[LEVEL_PACKET], out);
	csv_known(size->declared_bps, out);
	csv_known(size->udp_bps, out);
	(void)fputc(',', out);
	csv_text(size->rate.binding, out);
	(void)fputs("\r\n", out);
}

void
packet_sizes_csv(const struct packet_sizes *sizes, FILE *out)
{
	enum direction d;

	(void)fputs("direction,frame_bytes,packet_bytes,packets_per_s,"
	    "line_bps,frame_bps,packet_bps,payload_bps,udp_payload_bps,"
	    "binding\r\n", out);
	for (d = 0; d < DIRECTIONS_SINGLE && !sizes->reference; d++)
		for (size_t i = 0; i < sizes->directions[d].count; i++)
			csv_size(d, &sizes->directions[d],
			    &sizes->directions[d].sizes[i], out);
}
