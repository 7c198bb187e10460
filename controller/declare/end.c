/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/end.h"

#include <arpa/inet.h>

#include <stdio.h>
#include <string.h>

#include "channel.h"
#include "error.h"
#include "log.h"
#include "trial.h"

/* What one end's mapping says, before it is weighed. */
struct end_draft {
	struct end_declaration end;
	char agent[16];
};

#define END_TEXT(key, member, text)					\
	{ .name = key, .kind = FIELD_TEXT,				\
	  .offset = offsetof(struct end_draft, member),			\
	  .size = sizeof(((struct end_draft *)0)->member), .help = text }

const struct field end_fields[] = {
	END_TEXT("name", end.name, "name of the end; default: a or b"),
	END_TEXT("control", end.control, "host:port where its agent listens, "
	    "or `called` (it calls us), or `relayed` (it calls the other)"),
	END_TEXT("data", end.data, "numeric address of the load; default: "
	    "that of control"),
	END_TEXT("interface", end.interface, "interface that the load must "
	    "leave by"),
	{ .name = "identity", .kind = FIELD_CUSTOM, .read = trust_read,
	  .offset = offsetof(struct end_draft, end.identity),
	  .help = "the agent's key, sha256:..., or { authority: FILE, "
		  "name: NAME }" },
	END_TEXT("agent", agent, "`embedded`: started by this program, in "
	    "place of control and identity"),
	{ .name = NULL },
};

const struct field ends_fields[] = {
	{ .name = "a|b", .kind = FIELD_MAPPING, .fields = end_fields,
	  .help = "one end" },
	{ .name = NULL },
};

static const struct {
	const char *word;
	enum reach reach;
} reach_words[] = {
	{ "called", REACH_CALLED },
	{ "relayed", REACH_RELAYED },
};

static int
settle_embedded(const struct node *node, struct end_draft *draft,
    struct error *err)
{
	const char *const excluded[] = { "control", "identity" };
	size_t i;

	if (strcmp(draft->agent, "embedded") != 0)
		return node_error(node_child(node, "agent"), err,
		    "agent: found '%s', allowed: embedded", draft->agent);
	for (i = 0; i < sizeof(excluded) / sizeof(excluded[0]); i++)
		if (node_child(node, excluded[i]) != NULL)
			return node_error(node_child(node, excluded[i]), err,
			    "%s: an embedded agent has none", excluded[i]);
	draft->end.reach = REACH_EMBEDDED;
	return 0;
}

static int
settle_control(const struct node *node, struct end_draft *draft,
    struct error *err)
{
	const struct node *control = node_child(node, "control");
	char host[256];
	struct error cause;
	uint16_t port;
	size_t i;

	if (control == NULL)
		return node_error(node, err, "control: missing, allowed: "
		    "host:port, called, relayed; or else agent: embedded");
	if (!trust_given(&draft->end.identity))
		return node_error(node, err, "identity: missing, allowed: "
		    "sha256:... (`plafond-agent` prints its own), or "
		    "{ authority: FILE, name: NAME }");
	for (i = 0; i < sizeof(reach_words) / sizeof(reach_words[0]); i++) {
		if (strcmp(draft->end.control, reach_words[i].word) == 0) {
			draft->end.reach = reach_words[i].reach;
			draft->end.control[0] = '\0';
			return 0;
		}
	}
	draft->end.reach = REACH_DIAL;
	if (address_split(draft->end.control, CONTROL_DEFAULT_PORT, host,
	    sizeof(host), &port, &cause) == -1)
		return node_error(control, err, "control: %s", cause.cause);
	return 0;
}

/* 4, 6, or 0 where the text is not a numeric address. */
static unsigned
address_version(const char *text)
{
	unsigned char address[sizeof(struct in6_addr)];

	if (inet_pton(AF_INET, text, address) == 1)
		return 4;
	if (inet_pton(AF_INET6, text, address) == 1)
		return 6;
	return 0;
}

static int
read_end(const struct node *node, enum end which, struct end_declaration *end,
    struct error *err)
{
	struct end_draft draft;

	memset(&draft, 0, sizeof(draft));
	if (fields_read(node, end_fields, end_name(which), &draft, err) == -1)
		return -1;
	if (draft.agent[0] != '\0') {
		if (settle_embedded(node, &draft, err) == -1)
			return -1;
	} else if (settle_control(node, &draft, err) == -1) {
		return -1;
	}
	if (draft.end.data[0] != '\0' &&
	    address_version(draft.end.data) == 0)
		return node_error(node_child(node, "data"), err,
		    "data: found '%s', allowed: a numeric IPv4 or IPv6 "
		    "address", draft.end.data);
	if (draft.end.name[0] == '\0')
		(void)snprintf(draft.end.name, sizeof(draft.end.name), "%s",
		    end_name(which));
	*end = draft.end;
	return 0;
}

int
ends_read(const struct node *node, const struct field *field, void *base,
    struct error *err)
{
	struct circuit *circuit = base;
	const struct node *child, *given[ENDS] = { NULL };
	char found[64];
	enum end which;

	(void)field;
	if (node == NULL)
		return 0;
	if (node->kind != NODE_MAPPING)
		return node_error(node, err, "ends: allowed: { a: {...}, "
		    "b: {...} }");
	for (child = node->children; child != NULL; child = child->next) {
		if (end_from_name(child->key, &which) == -1)
			return node_error(child, err, "ends: found '%s', "
			    "allowed: a, b", log_escape(child->key, found,
			    sizeof(found)));
		given[which] = child;
	}
	for (which = 0; which < ENDS; which++) {
		if (given[which] == NULL)
			return node_error(node, err, "ends: %s: missing",
			    end_name(which));
		if (read_end(given[which], which, &circuit->ends[which],
		    err) == -1)
			return -1;
	}
	if (circuit->ends[END_A].reach == REACH_RELAYED &&
	    circuit->ends[END_B].reach == REACH_RELAYED)
		return node_error(node, err, "ends: both are relayed; one "
		    "must be reached to relay the other");
	circuit->ends_declared = true;
	return 0;
}

int
ends_check_version(const struct circuit *circuit, const struct node *ends,
    struct error *err)
{
	const struct segment *segment = &circuit->segments[0];
	unsigned declared = layers_ip_version(&segment->layers), found;
	enum end which;

	for (which = 0; which < ENDS; which++) {
		if (circuit->ends[which].data[0] == '\0')
			continue;
		found = address_version(circuit->ends[which].data);
		if (found != declared)
			return node_error(node_child(node_child(ends,
			    end_name(which)), "data"), err, "data: found an "
			    "IPv%u address; the layers say IPv%u", found,
			    declared);
	}
	return 0;
}
