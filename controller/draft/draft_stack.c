/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "draft/draft_stack.h"

#include <inttypes.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "declare/stack.h"
#include "error.h"
#include "field.h"

#define NO_PACKET SIZE_MAX

/* Layers that are not known; no name of one. */
static const char unknown_layers[] = "...";
static const char unknown_ip[] = "ipv4 or ipv6";

static const char *const oddities[] = {
	[INTERFACE_PLAIN] = "",
	[INTERFACE_PER_PACKET] = "far end and options are set packet by packet",
	[INTERFACE_IN_UDP] = "it is itself inside UDP (FOU or GUE)",
	[INTERFACE_GPE] = "it is VXLAN-GPE, which says what it carries",
	[INTERFACE_MPLS] = "it carries MPLS",
};

/* Both may be asked for several times: sentences are joined. */
__attribute__((format(printf, 2, 3)))
static void
note(char buf[DRAFT_TEXT_SIZE], const char *fmt, ...)
{
	size_t used = strlen(buf);
	va_list ap;

	if (used > 0 && used < DRAFT_TEXT_SIZE - 3) {
		memcpy(buf + used, "; ", 3);
		used += 2;
	}
	va_start(ap, fmt);
	(void)vsnprintf(buf + used, DRAFT_TEXT_SIZE - used, fmt, ap);
	va_end(ap);
}

__attribute__((format(printf, 2, 3)))
static void
push(struct draft_stack *stack, const char *fmt, ...)
{
	va_list ap;

	if (stack->count == DRAFT_LAYERS_MAX)
		return;		/* far beyond what a declaration may have */
	va_start(ap, fmt);
	(void)vsnprintf(stack->layers[stack->count],
	    sizeof(stack->layers[0]), fmt, ap);
	va_end(ap);
	stack->count++;
}

static void
push_ip(struct draft_stack *stack, unsigned version)
{
	if (stack->packet == NO_PACKET)
		stack->packet = stack->count;
	if (version == 0) {
		note(stack->open, "%s of the outer packets is not told",
		    unknown_ip);
		push(stack, "%s", unknown_ip);
		stack->octets_unknown = true;
	} else
		push(stack, "ipv%u", version);
}

/* The lower layers of a device that is the last of the chain. */
static void
push_lowest(struct draft_stack *stack, const struct interface_device *device)
{
	switch (device->kind) {
	case INTERFACE_LOOPBACK:
		return;
	case INTERFACE_WLAN:
		push(stack, "wlan");
		return;
	case INTERFACE_PORT:
	case INTERFACE_VETH:
	case INTERFACE_DUMMY:
	case INTERFACE_TAP:
	case INTERFACE_BRIDGE:
	case INTERFACE_BOND:
	case INTERFACE_VLAN:
	case INTERFACE_MACVLAN:
	case INTERFACE_MACSEC:
		push(stack, "ethernet");
		return;
	case INTERFACE_TUN:
	case INTERFACE_VXLAN:
	case INTERFACE_GENEVE:
	case INTERFACE_GRE:
	case INTERFACE_IPIP:
	case INTERFACE_WIREGUARD:
	case INTERFACE_ESP:
	case INTERFACE_PPP:
	case INTERFACE_WWAN:
	case INTERFACE_OTHER:
	case INTERFACE_KINDS:
		break;
	}
	note(stack->open, "the layers at `%s` are not told", unknown_layers);
	push(stack, "%s", unknown_layers);
}

static void
push_outer(struct draft_stack *stack, const struct interface_device *device)
{
	if (device->oddity != INTERFACE_PLAIN) {
		note(stack->open, "%s", oddities[device->oddity]);
		stack->octets_unknown = true;
	}
	if (device->outer_assumed)
		note(stack->confirm, "no far end is told, the kernel then "
		    "takes IPv4");
	if (device->encapsulation_limit && stack->packet == NO_PACKET)
		stack->packet = stack->count;
	/* RFC 2473 section 4.1.1: a destination options header */
	if (device->encapsulation_limit)
		push(stack, "{ ipv6: { extension-bytes: 8 B } }");
	else
		push_ip(stack, device->outer_version);
}

static void
push_gre(struct draft_stack *stack, const struct interface_device *device)
{
	static const char *const no_yes[] = { "no", "yes" };

	push_outer(stack, device);
	if (device->gre_differs)
		note(stack->confirm, "GRE sends other fields than it expects");
	if (!device->gre_checksum && !device->gre_key && !device->gre_sequence)
		push(stack, "gre");
	else
		push(stack, "{ gre: { checksum: %s, key: %s, sequence: %s } }",
		    no_yes[device->gre_checksum], no_yes[device->gre_key],
		    no_yes[device->gre_sequence]);
}

static void
push_macsec(struct draft_stack *stack, const struct interface_device *device)
{
	if (device->macsec_sci_if_peers)
		note(stack->confirm, "MACsec sends its SCI too with two peers "
		    "and more");
	push(stack, "{ macsec: { sci: %s, icv-bytes: %u B } }",
	    device->macsec_sci ? "yes" : "no", device->macsec_icv_bytes);
}

/* What a device puts around what it carries. */
static void
push_own(struct draft_stack *stack, const struct interface_device *device)
{
	switch (device->kind) {
	case INTERFACE_VLAN:
		push(stack, "vlan");
		break;
	case INTERFACE_MACSEC:
		push_macsec(stack, device);
		break;
	case INTERFACE_VXLAN:
		push_outer(stack, device);
		push(stack, "udp");
		push(stack, "vxlan");
		break;
	case INTERFACE_GENEVE:
		push_outer(stack, device);
		push(stack, "udp");
		push(stack, "geneve");
		break;
	case INTERFACE_GRE:
		push_gre(stack, device);
		break;
	case INTERFACE_IPIP:
		push_outer(stack, device);
		break;
	case INTERFACE_WIREGUARD:
		push_outer(stack, device);
		push(stack, "udp");
		push(stack, "{ wireguard: { mtu: %" PRIu64 " B } }",
		    device->mtu_bytes);
		break;
	case INTERFACE_ESP:
		push_outer(stack, device);
		note(stack->open, "the cipher of esp is not told");
		stack->octets_unknown = true;
		push(stack, "esp");
		break;
	case INTERFACE_PPP:
		push(stack, "ppp");
		break;
	case INTERFACE_PORT:
	case INTERFACE_LOOPBACK:
	case INTERFACE_VETH:
	case INTERFACE_DUMMY:
	case INTERFACE_TUN:
	case INTERFACE_TAP:
	case INTERFACE_BRIDGE:
	case INTERFACE_BOND:
	case INTERFACE_MACVLAN:
	case INTERFACE_WLAN:
	case INTERFACE_WWAN:
	case INTERFACE_OTHER:
	case INTERFACE_KINDS:
		break;
	}
}

/* Tunnels that carry Ethernet frames put them on what they are. */
static bool
is_frame_tunnel(const struct interface_device *device)
{
	return device->frames && (device->kind == INTERFACE_VXLAN ||
	    device->kind == INTERFACE_GENEVE || device->kind == INTERFACE_GRE);
}

/* IP of the load, by what the first device carries and has addresses of. */
static unsigned
version_of(const struct interface_device *device, struct draft_stack *stack)
{
	if (device->kind == INTERFACE_IPIP && device->inner_version != 0)
		return device->inner_version;
	if (device->ipv4 && device->ipv6)
		note(stack->confirm, "IPv6 is configured too");
	else if (!device->ipv4 && !device->ipv6)
		note(stack->confirm, "no address is configured");
	return !device->ipv4 && device->ipv6 ? 6 : 4;
}

const char *
draft_stack_text(const struct draft_stack *stack, size_t from, char *buf,
    size_t size)
{
	size_t i, used;

	(void)snprintf(buf, size, "[ ");
	for (i = from; i < stack->count; i++) {
		used = strlen(buf);
		(void)snprintf(buf + used, size - used, "%s%s",
		    stack->layers[i], i + 1 < stack->count ? ", " : " ]");
	}
	return buf;
}

static int
read_layers(const struct draft_stack *stack, size_t from,
    struct layer_stack *out, struct error *err)
{
	static const struct field row = { .name = "layers", .offset = 0 };
	char text[DRAFT_LAYERS_SIZE];
	struct node *root;
	int rc;

	(void)draft_stack_text(stack, from, text, sizeof(text));
	if (document_read_text(text, strlen(text), "draft", &root, err) == -1)
		return -1;
	rc = layers_read(root, &row, out, err);
	document_free(root);
	return rc;
}

/* Octets that a full packet of a device has more at the lowest IP layer. */
static uint64_t
added_below(const struct layer_stack *upper, size_t count)
{
	uint64_t bytes = 0;

	for (size_t i = 0; i < count; i++)
		bytes += upper->use[i].cost.head_bytes +
		    upper->use[i].cost.trail_bytes +
		    upper->use[i].cost.tail_bytes;
	return bytes;
}

/* The MTU of a declaration is that of the lowest IP layer: the least of what
 * the devices that carry it let through, and of what those above fill. */
static void
find_mtu(const struct interface_facts *facts, struct draft_stack *stack)
{
	struct layer_stack upper;
	struct error err;
	uint64_t bytes, room_bytes = UINT64_MAX;
	bool read = !stack->octets_unknown &&
	    read_layers(stack, stack->packet, &upper, &err) == 0;
	size_t i;

	stack->inner_mtu_bytes = facts->device[0].mtu_bytes;
	stack->unbounded = true;
	if (stack->carries[0] > stack->packet && read)
		stack->added_bytes = added_below(&upper,
		    stack->carries[0] - stack->packet);
	for (i = facts->count; i-- > 0; ) {
		if (stack->carries[i] < stack->packet)
			continue;
		if (facts->device[i].mtu_bytes == 0 ||
		    (stack->carries[i] > stack->packet && !read)) {
			stack->mtu_bytes = 0;
			return;
		}
		bytes = facts->device[i].mtu_bytes;
		if (stack->carries[i] == stack->packet)
			stack->unbounded = false;
		else
			bytes += added_below(&upper, stack->carries[i] -
			    stack->packet);
		stack->too_large = bytes > room_bytes;
		if (bytes < room_bytes)
			room_bytes = bytes;
	}
	if (room_bytes != UINT64_MAX)
		stack->mtu_bytes = room_bytes;
}

void
draft_stack_make(const struct interface_facts *facts, struct draft_stack *out)
{
	const struct interface_device *device;
	struct layer_stack whole;
	struct error err;
	size_t i;

	memset(out, 0, sizeof(*out));
	out->packet = NO_PACKET;
	for (i = facts->count; i-- > 0; ) {
		device = &facts->device[i];
		if (i + 1 == facts->count)
			push_lowest(out, device);
		push_own(out, device);
		if (is_frame_tunnel(device))
			push(out, "ethernet");
		out->carries[i] = out->count;
	}
	push_ip(out, version_of(&facts->device[0], out));
	push(out, "tcp");
	find_mtu(facts, out);
	if (out->open[0] == '\0' &&
	    read_layers(out, 0, &whole, &err) == -1)
		note(out->open, "%s", err.cause);
}
