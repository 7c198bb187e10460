/* SPDX-License-Identifier: GPL-3.0-or-later */
/* netspace_link: rtnetlink(7) in a new namespace, before anybody else is in. */
#include <arpa/inet.h>
#include <linux/if_addr.h>
#include <linux/if_link.h>
#include <linux/rtnetlink.h>
#include <net/if.h>
#include <netlink/attr.h>
#include <netlink/errno.h>
#include <netlink/msg.h>
#include <netlink/netlink.h>
#include <stdbool.h>
#include <string.h>

#include "error.h"
#include "rehearse/netspace_inside.h"

#define LOOPBACK_INDEX 1	/* of a new namespace: linux net/core/dev.c */

static struct nl_msg *
request(int type, int flags, void *head, size_t head_bytes)
{
	struct nl_msg *message = nlmsg_alloc_simple(type, flags);

	if (message != NULL &&
	    nlmsg_append(message, head, head_bytes, NLMSG_ALIGNTO) < 0) {
		nlmsg_free(message);
		return NULL;
	}
	return message;
}

/* Takes the message; a message that is not whole is not sent.  0, or an error
 * of the library. */
static int
command(struct nl_sock *netlink, struct nl_msg *message, int whole)
{
	if (message == NULL)
		return -NLE_NOMEM;
	if (whole < 0) {
		nlmsg_free(message);
		return -NLE_NOMEM;
	}
	return nl_send_sync(netlink, message);
}

static int
raise_link(struct nl_sock *netlink, int index)
{
	struct ifinfomsg head = { .ifi_index = index, .ifi_flags = IFF_UP,
		.ifi_change = IFF_UP };

	return command(netlink,
	    request(RTM_NEWLINK, 0, &head, sizeof(head)), 0);
}

/* No link-local address of its own making: with it the kernel would ask for
 * routers and for the address itself, in packets nobody sent. */
static int
quieten_link(struct nl_sock *netlink, int index)
{
	struct ifinfomsg head = { .ifi_index = index };
	struct nl_msg *message = request(RTM_NEWLINK, 0, &head, sizeof(head));
	struct nlattr *families, *family;
	int whole = -1;

	if (message == NULL)
		return -NLE_NOMEM;
	families = nla_nest_start(message, IFLA_AF_SPEC);
	family = families == NULL ? NULL : nla_nest_start(message, AF_INET6);
	if (family != NULL && nla_put_u8(message, IFLA_INET6_ADDR_GEN_MODE,
	    IN6_ADDR_GEN_MODE_NONE) == 0) {
		(void)nla_nest_end(message, family);
		(void)nla_nest_end(message, families);
		whole = 0;
	}
	return command(netlink, message, whole);
}

static int
size_link(struct nl_sock *netlink, int index, const struct netspace_end *end)
{
	struct ifinfomsg head = { .ifi_index = index };
	struct nl_msg *message = request(RTM_NEWLINK, 0, &head, sizeof(head));
	int whole;

	if (message == NULL)
		return -NLE_NOMEM;
	whole = nla_put_u32(message, IFLA_MTU, end->mtu_bytes);
	if (whole == 0 && end->queue_packets > 0)
		whole = nla_put_u32(message, IFLA_TXQLEN, end->queue_packets);
	return command(netlink, message, whole);
}

/* One address on either side makes the route to the other.  Duplicate address
 * detection has nobody to ask (RFC 4862, 5.4: it may be off). */
static int
add_address(struct nl_sock *netlink, int index, int family, const char *own,
    const char *other)
{
	int bytes = family == AF_INET ? 4 : 16, whole = -1;
	struct ifaddrmsg head = { .ifa_family = (unsigned char)family,
		.ifa_prefixlen = (unsigned char)(8 * bytes),
		.ifa_index = (unsigned)index };
	unsigned char address[16];
	struct nl_msg *message = request(RTM_NEWADDR,
	    NLM_F_CREATE | NLM_F_EXCL, &head, sizeof(head));

	if (message == NULL)
		return -NLE_NOMEM;
	if (inet_pton(family, own, address) == 1 &&
	    nla_put(message, IFA_LOCAL, bytes, address) == 0 &&
	    inet_pton(family, other, address) == 1 &&
	    nla_put(message, IFA_ADDRESS, bytes, address) == 0)
		whole = nla_put_u32(message, IFA_FLAGS, IFA_F_NODAD);
	return command(netlink, message, whole);
}

static int
add_default_route(struct nl_sock *netlink, int index, int family)
{
	struct rtmsg head = { .rtm_family = (unsigned char)family,
		.rtm_table = RT_TABLE_MAIN, .rtm_protocol = RTPROT_STATIC,
		.rtm_scope = family == AF_INET ? RT_SCOPE_LINK :
		    RT_SCOPE_UNIVERSE, .rtm_type = RTN_UNICAST };
	struct nl_msg *message = request(RTM_NEWROUTE,
	    NLM_F_CREATE | NLM_F_EXCL, &head, sizeof(head));
	int whole = message == NULL ? -1 :
	    nla_put_u32(message, RTA_OIF, (uint32_t)index);

	return command(netlink, message, whole);
}

static int
set_up_device(struct nl_sock *netlink, const struct netspace_end *end,
    struct error *err)
{
	int index = (int)if_nametoindex(end->device);
	int rc = raise_link(netlink, LOOPBACK_INDEX);

	if (rc < 0)
		return error_set(err, ERROR_INTERNAL, "cannot raise the "
		    "loopback: %s", nl_geterror(rc));
	rc = quieten_link(netlink, index);
	/* Without IPv6 in the kernel there is nothing to silence. */
	if (rc < 0 && end->ipv6 != NULL)
		return error_set(err, ERROR_UNREACHABLE, "this kernel has no "
		    "IPv6 (%s): start it without ipv6.disable=1, or rehearse "
		    "with IPv4", nl_geterror(rc));
	rc = size_link(netlink, index, end);
	if (rc >= 0)
		rc = raise_link(netlink, index);
	if (rc < 0)
		return error_set(err, ERROR_INTERNAL, "cannot give '%s' an MTU "
		    "of %u B and a queue of %u packets: %s", end->device,
		    end->mtu_bytes, end->queue_packets, nl_geterror(rc));
	return index;
}

static int
set_up_address(struct nl_sock *netlink, int index, int family,
    const char *own, const char *other, struct error *err)
{
	int rc;

	if (own == NULL)
		return 0;
	rc = add_address(netlink, index, family, own, other);
	if (rc >= 0)
		rc = add_default_route(netlink, index, family);
	if (rc < 0)
		return error_set(err, ERROR_UNREACHABLE, "this kernel gives no "
		    "address %s (%s): enable IPv%d in it, or rehearse "
		    "without", own, nl_geterror(rc), family == AF_INET ? 4 : 6);
	return 0;
}

int
netspace_link_set_up(const struct netspace_end *end,
    const struct netspace_end *other, struct error *err)
{
	struct nl_sock *netlink = nl_socket_alloc();
	int index, rc = -1;

	if (netlink == NULL || nl_connect(netlink, NETLINK_ROUTE) < 0)
		(void)error_set(err, ERROR_INTERNAL, "no rtnetlink socket");
	else {
		index = set_up_device(netlink, end, err);
		if (index > 0 && set_up_address(netlink, index, AF_INET,
		    end->ipv4, other->ipv4, err) == 0)
			rc = set_up_address(netlink, index, AF_INET6,
			    end->ipv6, other->ipv6, err);
	}
	nl_socket_free(netlink);
	return rc;
}
