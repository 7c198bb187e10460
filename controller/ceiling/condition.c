/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/condition.h"

#include <assert.h>
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "ceiling/answers.h"
#include "ceiling/loss.h"
#include "ceiling/window.h"
#include "error.h"
#include "units.h"

/* Streams that share the load: as planned, else one. */
static uint64_t
streams_of(const struct circuit *circuit)
{
	return circuit->plan.streams == FIELD_UNSET ? 1 :
	    circuit->plan.streams;
}

/* "4 streams" */
static const char *
streams_text(const struct circuit *circuit, char *buf, size_t size)
{
	uint64_t streams = streams_of(circuit);

	if (streams == 1)
		(void)snprintf(buf, size, "one stream");
	else
		(void)snprintf(buf, size, "%llu streams",
		    (unsigned long long)streams);
	return buf;
}

static bool
is_acknowledged(const struct ceiling *ceiling)
{
	return !ceiling->reference && ceiling->stream_bytes_num != 0;
}

/* Of the transport's stream: all of it, or less what TLS takes. */
static struct fraction
payload_share(const struct ceiling *ceiling)
{
	return fraction_make(ceiling->level_bytes_num[LEVEL_PAYLOAD],
	    ceiling->stream_bytes_num);
}

static uint64_t
stream_octets(const struct ceiling *ceiling)
{
	return (uint64_t)(ceiling->stream_bytes_num /
	    ceiling->level_bytes_den);
}

/* Share of packets lost, NAN where it is not declared. */
static double
loss_ratio(const struct circuit *circuit, const struct ceiling *ceiling)
{
	const struct conditions *conditions = &circuit->conditions;
	enum layer_level level = ceiling->has_level[LEVEL_FRAME] ?
	    LEVEL_FRAME : LEVEL_LINE;

	if (!isnan(conditions->loss_ratio[ceiling->direction]))
		return conditions->loss_ratio[ceiling->direction];
	return loss_of_bit_errors(
	    conditions->bit_error_ratio[ceiling->direction],
	    (double)ceiling->level_bytes_num[level] /
	    (double)ceiling->level_bytes_den);
}

/* The models, with what each says of its range. */
struct loss_model {
	const char *name, *source;
	double (*rate_bps)(const struct loss_path *path);
	double most;		/* largest loss that it speaks of */
};

static double
mathis(const struct loss_path *path)
{
	return loss_mathis_bps(path, LOSS_MATHIS_C);
}

/* RFC 5348's form to where its chance of a timeout is 1, then the full one
 * with the same b and timeout. */
static double
pftk(const struct loss_path *path)
{
	double bps = loss_tfrc_bps(path);

	return isnan(bps) ? loss_pftk_bps(path, 1, 4) : bps;
}

static const struct loss_model loss_models[] = {
	{ "loss, square root", "Mathis 1997: s / R * sqrt(3/2) / sqrt(p), from "
	    "memory", mathis, LOSS_WINDOW_MODELS_MOST },
	{ "loss, with timeouts", "RFC 5348 s3.1 (PFTK), b = 1, tRTO = 4 R; "
	    "RFC 3819 s8.5.1", pftk, 1 },
	{ "loss, CUBIC", "RFC 9438 s5: the larger of CUBIC's and Reno's mean "
	    "window / R", loss_cubic_bps, LOSS_WINDOW_MODELS_MOST },
};
#define LOSS_MODELS (sizeof(loss_models) / sizeof(loss_models[0]))

/* What one stream reaches; NAN: the model says nothing, or the largest window
 * there is would bind before the loss. */
static double
stream_of_model(const struct loss_model *model, const struct circuit *circuit,
    const struct ceiling *ceiling)
{
	struct loss_path path = {
		.segment_octets = (double)stream_octets(ceiling),
		.round_trip_s = (double)circuit->conditions.round_trip_ns /
		    NS_PER_S,
		.ratio = loss_ratio(circuit, ceiling),
	};
	double bps = model->rate_bps(&path);

	return bps * path.round_trip_s / 8 <= (double)WINDOW_LARGEST_BYTES ?
	    bps : NAN;
}

static int
add_loss(const struct circuit *circuit, struct ceiling *ceiling,
    struct error *err)
{
	char name[96], streams[32];
	double bps;
	size_t i;

	if (isnan(loss_ratio(circuit, ceiling)))
		return 0;
	for (i = 0; i < LOSS_MODELS; i++) {
		bps = stream_of_model(&loss_models[i], circuit, ceiling);
		if (isnan(bps))
			continue;
		(void)snprintf(name, sizeof(name), "%s, %s",
		    loss_models[i].name, streams_text(circuit, streams,
		    sizeof(streams)));
		if (ceiling_add_condition(ceiling, name, 
		    fraction_floor(medium_whole_bps(bps *
		    (double)streams_of(circuit) *
		    fraction_double(payload_share(ceiling)))),
		    loss_models[i].source, err) == -1)
			return -1;
	}
	return 0;
}

static int
add_window(const struct circuit *circuit, struct ceiling *ceiling,
    struct error *err)
{
	const struct conditions *conditions = &circuit->conditions;
	uint64_t window_bytes = conditions->window_bytes[ceiling->direction];
	char name[96], window[32], streams[32];
	struct mixed bps;

	if (window_bytes == FIELD_UNSET)
		return 0;
	bps = mixed_product(fraction_make((uint128)window_bytes *
	    streams_of(circuit) * 8 * NS_PER_S, conditions->round_trip_ns),
	    payload_share(ceiling));
	(void)snprintf(name, sizeof(name), "window of %s a round trip, %s",
	    units_format_exact(window_bytes, DIMENSION_SIZE, window,
	    sizeof(window)), streams_text(circuit, streams, sizeof(streams)));
	return ceiling_add_condition(ceiling, name, bps.whole,
	    "RFC 6349 s3.3.1: 8 W / RTT", err);
}

static int
add_host(const struct circuit *circuit, struct ceiling *ceiling,
    struct error *err)
{
	uint64_t bps = circuit->conditions.host_bps[ceiling->direction];

	if (bps == FIELD_UNSET)
		return 0;
	return ceiling_add_condition(ceiling, "host", bps, "declared", err);
}

int
condition_add_declared(const struct circuit *circuit, const struct load *load,
    struct ceiling *ceiling, struct error *err)
{
	assert(load->direction == ceiling->direction);
	if (ceiling->reference)
		return 0;
	if (is_acknowledged(ceiling) &&
	    (add_window(circuit, ceiling, err) == -1 ||
	    add_loss(circuit, ceiling, err) == -1 ||
	    answers_add(circuit, load, ceiling, err) == -1))
		return -1;
	return add_host(circuit, ceiling, err);
}

__attribute__((format(printf, 2, 3)))
static void
add_note(struct condition_figures *out, const char *fmt, ...)
{
	va_list ap;

	if (out->notes_count == CONDITION_NOTES_MAX)
		return;
	va_start(ap, fmt);
	(void)vsnprintf(out->notes[out->notes_count++], CONDITION_NOTE_SIZE,
	    fmt, ap);
	va_end(ap);
}

/* Why a model of loss adds no bound. */
static void
note_loss(const struct circuit *circuit, const struct ceiling *ceiling,
    struct condition_figures *out)
{
	size_t i;

	if (isnan(out->loss_ratio) || out->loss_ratio <= 0)
		return;
	if (out->loss_ratio >= 1) {
		add_note(out, "every packet is lost: no model of loss speaks "
		    "of it");
		return;
	}
	for (i = 0; i < LOSS_MODELS; i++) {
		const struct loss_model *model = &loss_models[i];

		if (out->loss_ratio > model->most)
			add_note(out, "%s: says nothing above a loss of "
			    "%.4g %%", model->name, 100 * model->most);
		else if (isnan(stream_of_model(model, circuit, ceiling)))
			add_note(out, "%s: at so little loss the largest "
			    "window there is binds before (RFC 7323)",
			    model->name);
	}
	add_note(out, "the models count events of loss: where packets are "
	    "lost in bursts the rate is higher");
}

static void
fill_windows(const struct circuit *circuit, const struct ceiling *ceiling,
    struct condition_figures *out)
{
	const struct conditions *conditions = &circuit->conditions;
	uint64_t window_bytes = conditions->window_bytes[ceiling->direction];
	uint64_t payload_bps = ceiling->payload.whole +
	    (ceiling->payload.rest.num != 0);
	struct fraction stream_bps = fraction_divide(
	    fraction_whole(payload_bps), payload_share(ceiling));
	uint64_t bps = fraction_floor(stream_bps);

	/* Rounded up: a window that falls short by a bit is too small. */
	if (fraction_compare(stream_bps, fraction_whole(bps)) > 0)
		bps++;
	out->window_needed_bytes = window_needed_bytes(bps,
	    conditions->round_trip_ns);
	out->window_shift = window_shift(out->window_needed_bytes);
	out->streams_needed = window_streams(out->window_needed_bytes,
	    window_bytes == FIELD_UNSET ? WINDOW_LARGEST_BYTES : window_bytes);
	if (out->window_needed_bytes > WINDOW_LARGEST_BYTES)
		add_note(out, "one stream cannot have the window needed: "
		    "RFC 7323 allows %llu B",
		    (unsigned long long)WINDOW_LARGEST_BYTES);
}

static void
fill_ramp(const struct circuit *circuit, const struct ceiling *ceiling,
    struct condition_figures *out)
{
	const struct conditions *conditions = &circuit->conditions;
	uint64_t payload_bps = ceiling->rate_bps[LEVEL_PAYLOAD], initial_bytes;
	struct ramp ramp;

	initial_bytes = fraction_floor(fraction_multiply(payload_share(
	    ceiling), fraction_whole(streams_of(circuit) *
	    window_initial_bytes(stream_octets(ceiling)))));
	if (initial_bytes == 0)
		return;
	window_ramp(payload_bps, conditions->round_trip_ns, initial_bytes,
	    &ramp);
	out->ramp_rounds = ramp.rounds;
	out->ramp_ns = ramp.ns;
	if (conditions->test_length_ns == FIELD_UNSET)
		return;
	out->cold_mean_bps = window_cold_mean_bps(payload_bps,
	    conditions->round_trip_ns, initial_bytes,
	    conditions->test_length_ns);
	if (conditions->test_length_ns < ramp.ns)
		add_note(out, "the test ends before slow start does");
}

static void
fill_burst(const struct circuit *circuit, const struct ceiling *ceiling,
    struct condition_figures *out)
{
	uint64_t bps = ceiling->rate_bps[LEVEL_PAYLOAD];
	uint64_t line_bps = UINT64_MAX;
	size_t i;

	if (ceiling->burst_payload_bytes == 0)
		return;
	for (i = 0; i < ceiling->bounds_count; i++)
		if (ceiling->bounds[i].class == BOUND_MEDIUM &&
		    ceiling->bounds[i].payload_bps < line_bps)
			line_bps = ceiling->bounds[i].payload_bps;
	out->burst_ns = bucket_lasts_ns(ceiling->burst_payload_bytes, bps,
	    line_bps);
	if (circuit->conditions.test_length_ns != FIELD_UNSET)
		out->burst_mean_bps = bucket_mean_bps(
		    ceiling->burst_payload_bytes, bps, line_bps,
		    circuit->conditions.test_length_ns);
}

static void
unset_figures(struct condition_figures *out)
{
	memset(out, 0, sizeof(*out));
	out->loss_ratio = NAN;
	out->bdp_bytes = FIELD_UNSET;
	out->window_needed_bytes = FIELD_UNSET;
	out->window_shift = FIELD_UNSET;
	out->streams_needed = FIELD_UNSET;
	out->ramp_rounds = FIELD_UNSET;
	out->ramp_ns = FIELD_UNSET;
	out->cold_mean_bps = FIELD_UNSET;
	out->burst_ns = FIELD_UNSET;
	out->burst_mean_bps = FIELD_UNSET;
	out->transfer_ns = FIELD_UNSET;
}

void
condition_figures(const struct circuit *circuit, const struct ceiling *ceiling,
    struct condition_figures *out)
{
	const struct conditions *conditions = &circuit->conditions;

	unset_figures(out);
	if (ceiling->reference)
		return;
	out->loss_ratio = loss_ratio(circuit, ceiling);
	fill_burst(circuit, ceiling, out);
	if (conditions->transfer_bytes != FIELD_UNSET &&
	    ceiling->rate_bps[LEVEL_PAYLOAD] != 0)
		out->transfer_ns = transfer_ideal_ns(
		    conditions->transfer_bytes,
		    ceiling->rate_bps[LEVEL_PAYLOAD]);
	if (conditions->round_trip_ns == FIELD_UNSET)
		return;
	out->bdp_bytes = window_product_bytes(ceiling->rate_bps[LEVEL_LINE],
	    conditions->round_trip_ns);
	if (!is_acknowledged(ceiling)) {
		if (!isnan(out->loss_ratio))
			add_note(out, "nothing is acknowledged: no window and "
			    "no model of loss applies");
		return;
	}
	fill_windows(circuit, ceiling, out);
	fill_ramp(circuit, ceiling, out);
	note_loss(circuit, ceiling, out);
}
