/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "conduct/preflight.h"

#include <inttypes.h>
#include <string.h>

#include "conduct/pair.h"
#include "error.h"
#include "units.h"

void
preflight_look(const struct pair *pair, const struct circuit *circuit,
    struct preflight *out)
{
	for (int e = 0; e < ENDS; e++) {
		struct preflight_end *end = &out->ends[e];

		memset(end, 0, sizeof(*end));
		end->capability = pair_capability(pair, (enum end)e);
		end->host = &end->capability->host;
		end->name = circuit->ends[e].name;
		end->has_clock = pair_clock(pair, (enum end)e, &end->clock);
		end->reference_bps = UNKNOWN_U64;
	}
	out->same_host = circuit->ends[END_A].reach == REACH_EMBEDDED &&
	    circuit->ends[END_B].reach == REACH_EMBEDDED;
}

int
preflight_reference(struct pair *pair, struct preflight *preflight,
    struct error *err)
{
	for (int e = 0; e < ENDS; e++) {
		struct preflight_end *end = &preflight->ends[e];
		uint64_t payload_bps;

		if (e == END_B && preflight->same_host) {
			end->reference_bps =
			    preflight->ends[END_A].reference_bps;
			continue;
		}
		if (pair_reference(pair, (enum end)e, REFERENCE_NS,
		    &payload_bps, err) == -1)
			return -1;
		if (end->reference_bps == UNKNOWN_U64 ||
		    payload_bps > end->reference_bps)
			end->reference_bps = payload_bps;
	}
	return 0;
}

static const char *
rate_or_unknown(uint64_t bps, char *buf, size_t size)
{
	return bps == UNKNOWN_U64 ? "unknown" :
	    units_format(bps, DIMENSION_RATE, 3, buf, size);
}

static const char *
bytes_or_unknown(uint64_t bytes, char *buf, size_t size)
{
	return bytes == UNKNOWN_U64 ? "unknown" :
	    units_format_exact(bytes, DIMENSION_SIZE, buf, size);
}

static void
print_clock(const struct preflight_end *end, FILE *out)
{
	double bound_ms = (double)end->clock.delay_ns / 2e6;

	if (!end->has_clock) {
		(void)fprintf(out, "  clock             unknown\n");
		return;
	}
	(void)fprintf(out, "  round trip        %.3f ms to this controller\n",
	    (double)end->clock.delay_ns / 1e6);
	(void)fprintf(out, "  clock             %+.3f ms against this "
	    "controller's, within +-%.3f ms\n",
	    (double)end->clock.civil_offset_ns / 1e6, bound_ms);
}

static void
print_end(const struct preflight_end *end, enum end which, FILE *out)
{
	const struct host_facts *host = end->host;
	char a[32], b[32];

	(void)fprintf(out, "end %s, agent '%s'\n", end_name(which), end->name);
	(void)fprintf(out, "  software          %s on %s\n", host->software,
	    host->kernel);
	(void)fprintf(out, "  host              %s, %" PRIu64 " cores\n",
	    host->hostname, host->cpus);
	print_clock(end, out);
	if (host->interface[0] != '\0') {
		(void)fprintf(out, "  interface         %s, MTU %s, link "
		    "speed %s\n", host->interface,
		    bytes_or_unknown(host->interface_mtu_bytes, a, sizeof(a)),
		    rate_or_unknown(host->link_speed_bps, b, sizeof(b)));
	} else
		(void)fprintf(out, "  interface         unknown: no data "
		    "address is declared\n");
	(void)fprintf(out, "  TCP windows       receive up to %s, send up to "
	    "%s\n", bytes_or_unknown(host->tcp_receive_max_bytes, a,
	    sizeof(a)), bytes_or_unknown(host->tcp_send_max_bytes, b,
	    sizeof(b)));
	(void)fprintf(out, "  TCP timestamps    %s\n",
	    host->tcp_timestamps == UNKNOWN_U64 ? "unknown" :
	    host->tcp_timestamps == 0 ? "off" : "on");
	(void)fprintf(out, "  congestion ctrl   %s by default; %s\n",
	    host->default_congestion_control,
	    end->capability->congestion_controls);
	(void)fprintf(out, "  host reference    %s in one stream through its "
	    "own loopback\n", rate_or_unknown(end->reference_bps, a,
	    sizeof(a)));
	if (end->capability->highest_rate_bps != 0)
		(void)fprintf(out, "  policy            sends at most %s\n",
		    rate_or_unknown(end->capability->highest_rate_bps, a,
		    sizeof(a)));
}

void
preflight_print(const struct preflight *preflight,
    const struct circuit *circuit, FILE *out)
{
	const struct preflight_end *a = &preflight->ends[END_A];
	const struct preflight_end *b = &preflight->ends[END_B];

	(void)fprintf(out, "%s: both agents are ready\n\n", circuit->name);
	for (int e = 0; e < ENDS; e++) {
		print_end(&preflight->ends[e], (enum end)e, out);
		(void)fputc('\n', out);
	}
	if (a->has_clock && b->has_clock)
		(void)fprintf(out, "clock of b against a: %+.3f ms, within "
		    "+-%.3f ms\n", (double)(b->clock.civil_offset_ns -
		    a->clock.civil_offset_ns) / 1e6,
		    (double)(a->clock.delay_ns + b->clock.delay_ns) / 2e6);
}

static json_t *
number_or_null(uint64_t value)
{
	return value > WIRE_INTEGER_MAX ? json_null() :
	    json_integer((json_int_t)value);
}

json_t *
preflight_to_json(const struct preflight *preflight)
{
	json_t *ends = json_array();

	for (int e = 0; e < ENDS; e++) {
		const struct preflight_end *end = &preflight->ends[e];
		json_t *o = wire_encode(WIRE_CAPABILITY, end->capability);

		(void)json_object_del(o, "type");
		(void)json_object_del(o, "members");
		(void)json_object_set_new(o, "end",
		    json_string(end_name((enum end)e)));
		(void)json_object_set_new(o, "name", json_string(end->name));
		(void)json_object_set_new(o, "reference_bps",
		    number_or_null(end->reference_bps));
		(void)json_object_set_new(o, "round_trip_ns",
		    number_or_null(end->has_clock ? end->clock.delay_ns :
		    UNKNOWN_U64));
		(void)json_object_set_new(o, "clock_offset_ns",
		    end->has_clock ? json_integer(end->clock.civil_offset_ns) :
		    json_null());
		(void)json_object_set_new(o, "clock_bound_ns",
		    number_or_null(end->has_clock ? end->clock.delay_ns / 2 :
		    UNKNOWN_U64));
		(void)json_array_append_new(ends, o);
	}
	return json_pack("{s:s, s:o}", "format", "plafond-ready/1", "ends",
	    ends);
}
