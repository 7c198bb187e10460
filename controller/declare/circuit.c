/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/circuit.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "declare/circuit_inside.h"
#include "declare/end.h"
#include "error.h"

#define THROUGHPUT_DEFAULT_RATIO 0.97

/* The member, or else the nearest place there is. */
static const struct node *
place(const struct node *node, const char *key)
{
	const struct node *child = NULL;

	if (node != NULL && node->kind == NODE_MAPPING)
		child = node_child(node, key);
	return child != NULL ? child : node;
}

bool
circuit_is_reference(const struct circuit *circuit)
{
	return medium_is_reference(circuit->segments[0].medium.medium);
}

uint64_t
circuit_mtu(const struct circuit *circuit)
{
	uint64_t mtu_bytes = circuit->segments[0].mtu_bytes;
	size_t i;

	for (i = 1; i < circuit->segments_count; i++)
		if (circuit->segments[i].mtu_bytes < mtu_bytes)
			mtu_bytes = circuit->segments[i].mtu_bytes;
	return mtu_bytes;
}

uint64_t
service_rate(const struct service *service, enum direction direction)
{
	if (service->committed_bps[direction] == FIELD_UNSET)
		return service->peak_bps[direction];
	if (service->excess_bps[direction] == FIELD_UNSET)
		return service->committed_bps[direction];
	return service->committed_bps[direction] +
	    service->excess_bps[direction];
}

bool
service_has_rate(const struct service *service, enum direction direction)
{
	return service_rate(service, direction) != FIELD_UNSET;
}

/* One form or the other: what the short form says would have no segment. */
static int
check_forms(const struct node *root, struct error *err)
{
	const char *const short_only[] = { "medium", "mtu", "device",
		"service" };
	const struct node *node;
	size_t i;

	if (root->kind != NODE_MAPPING)
		return node_error(root, err, "allowed: a mapping that begins "
		    "with `circuit: NAME`");
	if (node_child(root, "service") != NULL &&
	    node_child(root, "services") != NULL)
		return node_error(node_child(root, "service"), err,
		    "service: `services` is given too, allowed: one of them");
	if (node_child(root, "segments") == NULL) {
		if (node_child(root, "medium") == NULL)
			return node_error(root, err, "medium: missing, "
			    "allowed: medium, or segments with one each");
		return 0;
	}
	for (i = 0; i < sizeof(short_only) / sizeof(short_only[0]); i++) {
		node = node_child(root, short_only[i]);
		if (node != NULL)
			return node_error(node, err, "%s: `segments` is given "
			    "too, allowed: in the segment%s", short_only[i],
			    strcmp(short_only[i], "service") == 0 ?
			    " that it limits, or a list `services`" : "s");
	}
	return 0;
}

static int
refuse_lowest(const struct medium_use *use, const struct layer_use *lowest,
    struct error *err)
{
	const struct medium *medium = use->medium;
	char allowed[256] = "";
	size_t i, used = 0;

	for (i = 0; medium->carries[i] != NULL; i++) {
		if (!medium_use_carries(use, medium->carries[i]))
			continue;
		(void)snprintf(allowed + used, sizeof(allowed) - used, "%s%s",
		    used == 0 ? "" : medium->carries[i + 1] == NULL ? " or " :
		    ", ", medium->carries[i]);
		used += strlen(allowed + used);
	}
	return node_error(lowest->at, err, "layers: found %s on medium %s, "
	    "allowed there: %s", lowest->layer->name, medium->name, allowed);
}

/* Medium and layers must be there and go together. */
static int
settle_segment(struct segment *segment, const struct layer_stack *inherited,
    const struct node *node, struct error *err)
{
	const struct medium *medium = segment->medium.medium;
	const struct layer_use *lowest;
	uint64_t min_bytes;

	if (medium == NULL)
		return node_error(node, err, "medium: missing, allowed: "
		    "{ kind: NAME, ... }");
	if (segment->layers.count == 0)
		segment->layers = *inherited;
	if (segment->layers.count == 0)
		return node_error(node, err, "layers: missing, allowed: a "
		    "list, lowest first, such as [ ethernet, ipv4, tcp ]");
	lowest = &segment->layers.use[0];
	if (!medium_use_carries(&segment->medium, lowest->layer->name))
		return refuse_lowest(&segment->medium, lowest, err);
	if (medium->bare_frames)
		layers_settle_bare(&segment->layers);
	if (segment->mtu_bytes == FIELD_UNSET)
		segment->mtu_bytes = layers_default_mtu(&segment->layers);
	if (segment->mtu_bytes == 0)
		segment->mtu_bytes = medium->default_mtu_bytes;
	min_bytes = layers_min_mtu(&segment->layers);
	if (segment->mtu_bytes < min_bytes)
		return node_error(place(node, "mtu"), err, "mtu: found %llu B, "
		    "allowed with %s: from %llu B",
		    (unsigned long long)segment->mtu_bytes,
		    segment->layers.use[layers_lowest_packet(
		    &segment->layers)].layer->name,
		    (unsigned long long)min_bytes);
	if (medium->max_mtu_bytes != 0 &&
	    segment->mtu_bytes > medium->max_mtu_bytes)
		return node_error(place(node, "mtu"), err, "mtu: found %llu B, "
		    "allowed on medium %s: at most %llu B",
		    (unsigned long long)segment->mtu_bytes, medium->name,
		    (unsigned long long)medium->max_mtu_bytes);
	if (layers_check_fit(&segment->layers, segment->mtu_bytes, err) == -1)
		return -1;
	if (segment->exclusive == 1 && segment->shared_with_count > 0)
		return node_error(place(node, "exclusive"), err, "exclusive: "
		    "the segment is shared with another circuit");
	return 0;
}

static int
check_service_rates(const struct service *service, const struct node *node,
    struct error *err)
{
	enum direction d;

	for (d = 0; d < DIRECTIONS_SINGLE; d++) {
		if (service->committed_bps[d] != FIELD_UNSET &&
		    service->peak_bps[d] < service->committed_bps[d])
			return node_error(place(node, "peak"), err,
			    "peak: %s: below the committed rate",
			    direction_name(d));
		if (service->excess_bps[d] == FIELD_UNSET)
			continue;
		if (service->committed_bps[d] == FIELD_UNSET)
			return node_error(place(node, "excess"), err,
			    "excess: %s: `committed` is missing, allowed: "
			    "beside a committed rate", direction_name(d));
		if (service->peak_bps[d] != FIELD_UNSET)
			return node_error(place(node, "excess"), err,
			    "excess: %s: `peak` is given too, allowed: one of "
			    "them", direction_name(d));
		if (service_rate(service, d) > RATE_MAX_BPS)
			return node_error(place(node, "excess"), err,
			    "excess: %s: with the committed rate more than "
			    "1.6 Tbit/s", direction_name(d));
	}
	return 0;
}

/* Where the contract's octets are counted must exist in the stack. */
static int
settle_service(struct service *service, const struct layer_stack *layers,
    const struct node *node, struct error *err)
{
	if (service->counted_at == FIELD_UNSET)
		service->counted_at = layers_have_level(layers, LEVEL_FRAME) ?
		    LEVEL_FRAME : LEVEL_PACKET;
	if (!layers_have_level(layers, (enum layer_level)service->counted_at))
		return node_error(place(node, "counted-at"), err,
		    "counted-at: the layers have no frames, allowed: line, "
		    "packet, segment, payload");
	return check_service_rates(service, node, err);
}

/* The i-th item of the list, or the mapping itself in the short form. */
static const struct node *
item_of(const struct node *root, const char *list, size_t i)
{
	const struct node *node = node_child(root, list);

	if (node == NULL)
		return root;
	for (node = node->children; node != NULL && i > 0; i--)
		node = node->next;
	return node != NULL ? node : root;
}

static int
check_segments_agree(const struct circuit *circuit, size_t i,
    const struct node *node, struct error *err)
{
	const struct segment *segment = &circuit->segments[i];

	if (circuit->segments_count > 1 &&
	    medium_is_reference(segment->medium.medium))
		return node_error(place(node, "medium"), err, "medium: %s is a "
		    "reference and cannot be one of several segments",
		    segment->medium.medium->name);
	for (size_t other = 0; other < i; other++)
		if (strcmp(circuit->segments[other].name, segment->name) == 0)
			return node_error(place(node, "name"), err, "name: "
			    "'%s' is taken by an earlier segment",
			    segment->name);
	if (i > 0 && !layers_agree_above_frame(&circuit->segments[0].layers,
	    &segment->layers))
		return node_error(place(node, "layers"), err, "layers: from "
		    "the lowest IP layer upward they differ from those of "
		    "segment '%s', allowed: the same",
		    circuit->segments[0].name);
	return 0;
}

static int
settle_segments(struct draft *draft, const struct node *root,
    struct error *err)
{
	struct circuit *circuit = &draft->circuit;
	struct segment *segment;
	const struct node *node;
	size_t i;

	if (node_child(root, "segments") == NULL) {
		circuit->segments[0] = draft->short_form;
		circuit->segments_count = 1;
		if (fields_read(NULL, service_fields, "service",
		    &circuit->segments[0].service, err) == -1)
			return -1;
		circuit->segments[0].exclusive = FIELD_UNSET;
	}
	if (circuit->segments_count == 0)
		return node_error(place(root, "segments"), err,
		    "segments: found none, allowed: 1 to %d", SEGMENTS_MAX);
	for (i = 0; i < circuit->segments_count; i++) {
		segment = &circuit->segments[i];
		node = item_of(root, "segments", i);
		if (settle_segment(segment, &draft->short_form.layers, node,
		    err) == -1 ||
		    settle_service(&segment->service, &segment->layers,
		    place(node, "service"), err) == -1 ||
		    check_segments_agree(circuit, i, node, err) == -1)
			return -1;
	}
	return 0;
}

/* A contract of the circuit is metered where traffic enters: at either end. */
static int
settle_services(struct draft *draft, const struct node *root,
    struct error *err)
{
	struct circuit *circuit = &draft->circuit;
	const struct node *node;
	size_t i;

	if (node_child(root, "service") != NULL) {
		circuit->services[0] = draft->service;
		circuit->services_count = 1;
	}
	for (i = 0; i < circuit->services_count; i++) {
		node = item_of(root, "services", i);
		if (node == root)
			node = place(root, "service");
		if (circuit_is_reference(circuit))
			return node_error(node, err, "service: medium %s is a "
			    "reference and has no contract",
			    circuit->segments[0].medium.medium->name);
		if (settle_service(&circuit->services[i],
		    &circuit->segments[0].layers, node, err) == -1 ||
		    settle_service(&circuit->services[i],
		    &circuit->segments[circuit->segments_count - 1].layers,
		    node, err) == -1)
			return -1;
		if (circuit->services[i].counted_at !=
		    circuit->services[0].counted_at)
			return node_error(place(node, "counted-at"), err,
			    "counted-at: allowed: the same for all services");
	}
	return 0;
}

/* Where nothing is declared the throughput is judged; of a reference there is
 * nothing that it ought to reach. */
static void
settle_criteria(struct circuit *circuit)
{
	struct criteria *criteria = &circuit->criteria;
	bool given = circuit_is_reference(circuit);
	int d;

	for (d = 0; d < DIRECTIONS_SINGLE; d++)
		given = given || !isnan(criteria->throughput_ratio[d]) ||
		    !isnan(criteria->single_stream_ratio[d]) ||
		    !isnan(criteria->loss_ratio[d]) ||
		    criteria->delay_ns[d] != FIELD_UNSET ||
		    criteria->delay_variation_ns[d] != FIELD_UNSET;
	for (d = 0; d < DIRECTIONS_SINGLE && !given; d++)
		criteria->throughput_ratio[d] = THROUGHPUT_DEFAULT_RATIO;
}

static int
check_plan(const struct plan_declaration *plan, const struct node *root,
    struct error *err)
{
	if (plan->duration_ns % plan->row_ns != 0)
		return node_error(place(place(root, "plan"), "duration"), err,
		    "duration: not a multiple of row-spacing");
	return 0;
}

static int
read_root(const struct node *root, struct draft *draft, struct error *err)
{
	struct circuit *circuit = &draft->circuit;
	size_t i, n;

	if (check_forms(root, err) == -1 ||
	    fields_read(root, circuit_fields, "declaration", draft,
	    err) == -1 ||
	    settle_segments(draft, root, err) == -1 ||
	    settle_services(draft, root, err) == -1 ||
	    conditions_check(&circuit->conditions,
	    node_child(root, "conditions"), err) == -1 ||
	    check_plan(&circuit->plan, root, err) == -1)
		return -1;
	if (circuit->ends_declared && ends_check_version(circuit,
	    node_child(root, "ends"), err) == -1)
		return -1;
	settle_criteria(circuit);
	for (i = 0; i < circuit->segments_count; i++)
		for (n = 0; n < circuit->segments[i].layers.count; n++)
			circuit->segments[i].layers.use[n].at = NULL;
	return 0;
}

int
circuit_read_tree(const struct node *root, struct circuit **out,
    struct error *err)
{
	struct draft *draft = calloc(1, sizeof(*draft));
	int rc = -1;

	if (draft == NULL)
		return error_errno(err, ERROR_INTERNAL, "declaration");
	if (read_root(root, draft, err) == -1)
		goto out;
	*out = malloc(sizeof(**out));
	if (*out == NULL) {
		(void)error_errno(err, ERROR_INTERNAL, "declaration");
		goto out;
	}
	**out = draft->circuit;
	rc = 0;
out:
	free(draft);
	return rc;
}

/* Takes root. */
static int
circuit_from_tree(struct node *root, const char *const overrides[],
    size_t overrides_count, struct circuit **out, struct error *err)
{
	int rc = 0;

	for (size_t i = 0; i < overrides_count && rc == 0; i++)
		rc = document_override(root, overrides[i], err);
	if (rc == 0)
		rc = circuit_read_tree(root, out, err);
	document_free(root);
	return rc;
}

int
circuit_read_file(const char *path, const char *const overrides[],
    size_t overrides_count, struct circuit **out, struct error *err)
{
	struct node *root;

	if (document_read_file(path, &root, err) == -1)
		return -1;
	return circuit_from_tree(root, overrides, overrides_count, out, err);
}

int
circuit_read_text(const char *text, size_t size, const char *origin,
    const char *const overrides[], size_t overrides_count,
    struct circuit **out, struct error *err)
{
	struct node *root;

	if (document_read_text(text, size, origin, &root, err) == -1)
		return -1;
	return circuit_from_tree(root, overrides, overrides_count, out, err);
}

void
circuit_free(struct circuit *circuit)
{
	free(circuit);
}
