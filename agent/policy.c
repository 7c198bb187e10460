/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "policy.h"

#include <arpa/inet.h>
#include <assert.h>
#include <netinet/in.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "error.h"
#include "field.h"
#include "units.h"

#define MAPPED_BITS 96		/* of ::ffff:0:0/96 */

static int read_peers(const struct node *node, const struct field *field,
    void *base, struct error *err);
static int read_controllers(const struct node *node, const struct field *field,
    void *base, struct error *err);

static const struct field trust_field = {
	.name = "identity", .kind = FIELD_CUSTOM, .required = true,
	.offset = offsetof(struct policy_controller, trust),
	.read = trust_read,
};
static const struct field caller_fields[] = {
	{ .name = "name", .kind = FIELD_TEXT, .required = true,
	    .offset = offsetof(struct policy_caller, name), .size = 64,
	    .help = "the name that a declaration's end has" },
	{ .name = "identity", .kind = FIELD_CUSTOM, .required = true,
	    .offset = offsetof(struct policy_caller, trust),
	    .read = trust_read, .help = "of the agent that calls" },
	{ .name = NULL }
};
static const struct field call_fields[] = {
	{ .name = "address", .kind = FIELD_TEXT, .required = true,
	    .offset = offsetof(struct policy_call, address), .size = 256,
	    .help = "HOST:PORT of a controller or of another agent" },
	{ .name = "identity", .kind = FIELD_CUSTOM, .required = true,
	    .offset = offsetof(struct policy_call, trust),
	    .read = trust_read, .help = "of who is called" },
	{ .name = NULL }
};

const struct field policy_fields[] = {
	{ .name = "name", .kind = FIELD_TEXT, .default_text = "agent",
	    .offset = offsetof(struct policy, name), .size = 64,
	    .help = "of this agent, as its calls state it" },
	{ .name = "listen", .kind = FIELD_TEXT,
	    .default_text = "[::]:61741", .size = 256,
	    .offset = offsetof(struct policy, listen),
	    .help = "ADDRESS:PORT of the control connections" },
	{ .name = "data-port", .kind = FIELD_COUNT, .min = 1, .max = 65528,
	    .default_text = "61742",
	    .offset = offsetof(struct policy, data_port),
	    .help = "first port of the data connections, one a trial at "
		"once" },
	{ .name = "controllers", .kind = FIELD_CUSTOM,
	    .read = read_controllers,
	    .help = "identities that may command this agent" },
	{ .name = "peers", .kind = FIELD_CUSTOM, .read = read_peers,
	    .help = "address prefixes it may exchange load with" },
	{ .name = "callers", .kind = FIELD_LIST, .fields = caller_fields,
	    .offset = offsetof(struct policy, callers),
	    .size = sizeof(struct policy_caller), .max = POLICY_CALLERS_MAX,
	    .count_offset = offsetof(struct policy, callers_count),
	    .help = "agents that may call here to be relayed" },
	{ .name = "calls", .kind = FIELD_LIST, .fields = call_fields,
	    .offset = offsetof(struct policy, calls),
	    .size = sizeof(struct policy_call), .max = POLICY_CALLS_MAX,
	    .count_offset = offsetof(struct policy, calls_count),
	    .help = "whom this agent calls, where it cannot be reached" },
	{ .name = "longest-trial", .kind = FIELD_QUANTITY,
	    .dimension = DIMENSION_TIME, .min = 1000000000,
	    .max = TRIAL_DURATION_MAX_NS, .default_text = "60 s",
	    .offset = offsetof(struct policy, longest_trial_ns),
	    .help = "counted time of one trial" },
	{ .name = "highest-rate", .kind = FIELD_QUANTITY,
	    .dimension = DIMENSION_RATE, .min = 1,
	    .offset = offsetof(struct policy, highest_rate_bps),
	    .help = "at which this agent sends, payload; default: no limit" },
	{ .name = "trials-at-once", .kind = FIELD_COUNT, .min = 1,
	    .max = POLICY_TRIALS_AT_ONCE_MAX, .default_text = "1",
	    .offset = offsetof(struct policy, trials_at_once),
	    .help = "how many; two load tests on one circuit spoil each "
		"other" },
	{ .name = NULL }
};

static bool
is_mapped(const unsigned char *address)
{
	struct in6_addr v6;

	memcpy(&v6, address, sizeof(v6));
	return IN6_IS_ADDR_V4MAPPED(&v6);
}

/* The last 32 bits of ::ffff:0:0/96 are an IPv4 address (RFC 4291, 2.5.5.2). */
static void
unmap(struct prefix *prefix)
{
	if (prefix->family != AF_INET6 || prefix->bits < MAPPED_BITS ||
	    !is_mapped(prefix->address))
		return;
	prefix->family = AF_INET;
	prefix->bits -= MAPPED_BITS;
	memmove(prefix->address, prefix->address + MAPPED_BITS / 8,
	    sizeof(struct in_addr));
}

int
prefix_parse(const char *text, struct prefix *out, struct error *err)
{
	char address[INET6_ADDRSTRLEN];
	const char *slash = strchr(text, '/');
	size_t length = slash != NULL ? (size_t)(slash - text) : strlen(text);
	struct prefix prefix = { .family = AF_INET };
	uint64_t bits, most;

	if (length >= sizeof(address))
		goto bad;
	memcpy(address, text, length);
	address[length] = '\0';
	if (inet_pton(AF_INET, address, prefix.address) != 1) {
		prefix.family = AF_INET6;
		if (inet_pton(AF_INET6, address, prefix.address) != 1)
			goto bad;
	}
	most = prefix.family == AF_INET ? 32 : 128;
	bits = most;
	if (slash != NULL &&
	    units_parse_count(slash + 1, 0, most, &bits, err) == -1)
		goto bad;
	prefix.bits = (unsigned)bits;
	unmap(&prefix);
	*out = prefix;
	return 0;
bad:
	return error_set(err, ERROR_INPUT, "found '%.64s', allowed: an address "
	    "prefix such as 198.18.0.0/15 or 2001:2::/48", text);
}

/* The address to compare; an IPv4 peer of a socket that listens on [::] counts
 * as what it is.  NULL: neither IPv4 nor IPv6. */
static const unsigned char *
address_bytes(const struct sockaddr *address, int *family)
{
	const unsigned char *bytes;

	*family = address->sa_family;
	if (address->sa_family == AF_INET)
		return (const unsigned char *)
		    &((const struct sockaddr_in *)(const void *)address)
		    ->sin_addr;
	if (address->sa_family != AF_INET6)
		return NULL;
	bytes = ((const struct sockaddr_in6 *)(const void *)address)
	    ->sin6_addr.s6_addr;
	if (!is_mapped(bytes))
		return bytes;
	*family = AF_INET;
	return bytes + MAPPED_BITS / 8;
}

bool
prefix_holds(const struct prefix *prefix, const struct sockaddr *address)
{
	unsigned whole = prefix->bits / 8, rest = prefix->bits % 8;
	unsigned char mask = (unsigned char)(0xff00 >> rest);
	int family;
	const unsigned char *bytes = address_bytes(address, &family);

	if (bytes == NULL || prefix->family != family ||
	    memcmp(bytes, prefix->address, whole) != 0)
		return false;
	return rest == 0 ||
	    ((bytes[whole] ^ prefix->address[whole]) & mask) == 0;
}

/* A list of at most so many, or nothing. */
static int
check_list(const struct node *node, const struct field *field, size_t most,
    struct error *err)
{
	size_t count = 0;

	if (node == NULL)
		return 0;
	if (node->kind != NODE_SEQUENCE)
		return node_error(node, err, "%s: found no list, allowed: %s",
		    field->name, field->help);
	for (const struct node *n = node->children; n != NULL; n = n->next)
		if (count++ == most)
			return node_error(n, err, "%s: found more, allowed: "
			    "at most %zu", field->name, most);
	return 0;
}

static int
read_peers(const struct node *node, const struct field *field, void *base,
    struct error *err)
{
	struct policy *policy = base;
	struct error why;

	policy->peers_count = 0;
	if (check_list(node, field, POLICY_PEERS_MAX, err) == -1)
		return -1;
	for (const struct node *n = node != NULL ? node->children : NULL;
	    n != NULL; n = n->next) {
		if (n->kind != NODE_SCALAR)
			return node_error(n, err, "%s: found no text, allowed: "
			    "an address prefix", field->name);
		if (prefix_parse(n->text,
		    &policy->peers[policy->peers_count], &why) == -1)
			return node_error(n, err, "%s: %s", field->name,
			    why.cause);
		policy->peers_count++;
	}
	return 0;
}

static int
read_controllers(const struct node *node, const struct field *field,
    void *base, struct error *err)
{
	struct policy *policy = base;

	policy->controllers_count = 0;
	if (check_list(node, field, POLICY_CONTROLLERS_MAX, err) == -1)
		return -1;
	for (const struct node *n = node != NULL ? node->children : NULL;
	    n != NULL; n = n->next) {
		if (trust_read(n, &trust_field,
		    &policy->controllers[policy->controllers_count],
		    err) == -1)
			return -1;
		policy->controllers_count++;
	}
	return 0;
}

void
policy_init(struct policy *policy)
{
	struct error err;
	int rc;

	memset(policy, 0, sizeof(*policy));
	rc = fields_read(NULL, policy_fields, "policy", policy, &err);
	assert(rc == 0);
	(void)rc;
	policy->highest_rate_bps = 0;
}

void
policy_init_embedded(struct policy *policy)
{
	struct error err;
	int rc;

	policy_init(policy);
	policy->data_port = 0;
	policy->longest_trial_ns = TRIAL_DURATION_MAX_NS;
	rc = prefix_parse("127.0.0.0/8", &policy->peers[0], &err);
	rc |= prefix_parse("::1", &policy->peers[1], &err);
	assert(rc == 0);
	(void)rc;
	policy->peers_count = 2;
}

int
policy_read_file(const char *path, struct policy *out, struct error *err)
{
	struct policy *policy = calloc(1, sizeof(*policy));
	struct node *root = NULL;
	int rc;

	if (policy == NULL)
		return error_errno(err, ERROR_INTERNAL, "a policy");
	rc = document_read_file(path, &root, err);
	if (rc == 0)
		rc = fields_read(root, policy_fields, "policy", policy, err);
	if (rc == -1 && err->kind == ERROR_INPUT)
		err->kind = ERROR_POLICY;
	if (policy->highest_rate_bps == FIELD_UNSET)
		policy->highest_rate_bps = 0;
	if (rc == 0)
		*out = *policy;
	document_free(root);
	free(policy);
	return rc;
}

bool
policy_allows_peer(const struct policy *policy, const struct sockaddr *address)
{
	for (size_t i = 0; i < policy->peers_count; i++)
		if (prefix_holds(&policy->peers[i], address))
			return true;
	return false;
}

int
policy_check_trial(const struct policy *policy, const struct trial *trial,
    struct error *err)
{
	char found[32], allowed[32];

	if (trial->duration_ns > policy->longest_trial_ns)
		return error_set(err, ERROR_REFUSED, "a trial of %s, this "
		    "agent's policy allows at most %s",
		    units_format_exact(trial->duration_ns, DIMENSION_TIME,
		    found, sizeof(found)),
		    units_format_exact(policy->longest_trial_ns,
		    DIMENSION_TIME, allowed, sizeof(allowed)));
	if (trial->protocol != PROTOCOL_TCP)
		return error_set(err, ERROR_REFUSED,
		    "a trial by %s, this agent knows tcp only",
		    protocol_name(trial->protocol));
	if (trial->duration_ns % trial->row_ns != 0)
		return error_set(err, ERROR_REFUSED, "a duration that is not "
		    "a multiple of the spacing of the rows");
	return 0;
}
