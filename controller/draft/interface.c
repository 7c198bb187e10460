/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "draft/interface.h"

#include <assert.h>
#include <errno.h>
#include <linux/ethtool.h>
#include <linux/rtnetlink.h>
#include <linux/sockios.h>
#include <net/if.h>
#include <netlink/errno.h>
#include <netlink/msg.h>
#include <netlink/netlink.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/ioctl.h>
#include <sys/socket.h>
#include <unistd.h>

#include "draft/interface_link.h"
#include "error.h"
#include "field.h"
#include "log.h"

static_assert(INTERFACE_NAME_SIZE == IFNAMSIZ, "a name fits");

#define LINKS_MAX 100000
#define ATTEMPTS_MAX 5		/* where links change while they are listed */
#define NAMES_MAX 8		/* in a message */
#define BPS_PER_MBPS UINT64_C(1000000)

/* What was asked so far. */
struct survey {
	const char *sought;
	struct nl_sock *netlink;	/* owned */
	int control;			/* socket for ethtool, or -1 */
	struct interface_link *links;	/* owned */
	size_t count, room;
	bool no_memory;
	int address_index;		/* the link whose addresses count */
	bool ipv4, ipv6;		/* it has one beyond the link's own */
	int route_index;		/* where a route leaves, 0: nowhere */
};

static int
on_link(struct nl_msg *message, void *base)
{
	struct survey *survey = base;
	struct interface_link *grown;
	size_t room;

	if (survey->count == survey->room) {
		room = survey->room == 0 ? 64 : 2 * survey->room;
		grown = survey->count >= LINKS_MAX ? NULL :
		    realloc(survey->links, room * sizeof(*grown));
		if (grown == NULL) {
			survey->no_memory = true;
			return NL_STOP;
		}
		survey->links = grown;
		survey->room = room;
	}
	if (interface_link_parse(nlmsg_hdr(message), survey->sought,
	    &survey->links[survey->count]) == 0)
		survey->count++;
	return NL_OK;
}

static int
on_address(struct nl_msg *message, void *base)
{
	struct survey *survey = base;
	const struct nlmsghdr *head = nlmsg_hdr(message);
	const struct ifaddrmsg *address = nlmsg_data(head);

	if (head->nlmsg_type != RTM_NEWADDR ||
	    !nlmsg_valid_hdr(head, sizeof(*address)) ||
	    (int)address->ifa_index != survey->address_index ||
	    address->ifa_scope == RT_SCOPE_LINK)
		return NL_OK;
	survey->ipv4 = survey->ipv4 || address->ifa_family == AF_INET;
	survey->ipv6 = survey->ipv6 || address->ifa_family == AF_INET6;
	return NL_OK;
}

static int
on_route(struct nl_msg *message, void *base)
{
	struct survey *survey = base;
	struct nlattr *attributes[RTA_MAX + 1] = { NULL };
	struct nlmsghdr *head = nlmsg_hdr(message);

	if (head->nlmsg_type == RTM_NEWROUTE && nlmsg_parse(head,
	    sizeof(struct rtmsg), attributes, RTA_MAX, NULL) >= 0 &&
	    attributes[RTA_OIF] != NULL && nla_len(attributes[RTA_OIF]) >= 4)
		survey->route_index = (int)nla_get_u32(attributes[RTA_OIF]);
	return NL_OK;
}

/* Takes the message; 0, or an error of the library. */
static int
ask(struct survey *survey, struct nl_msg *message,
    nl_recvmsg_msg_cb_t on_message)
{
	int rc;

	if (message == NULL)
		return -NLE_NOMEM;
	rc = nl_socket_modify_cb(survey->netlink, NL_CB_VALID, NL_CB_CUSTOM,
	    on_message, survey);
	if (rc >= 0)
		rc = nl_send_auto(survey->netlink, message);
	if (rc >= 0)
		rc = nl_recvmsgs_default(survey->netlink);
	nlmsg_free(message);
	return rc < 0 ? rc : 0;
}

/* Owned; NULL: no memory. */
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

static int
list_links(struct survey *survey)
{
	struct ifinfomsg head = { .ifi_family = AF_UNSPEC };
	struct nl_msg *message;
	int attempt, rc = -NLE_DUMP_INTR;

	for (attempt = 0; attempt < ATTEMPTS_MAX && rc == -NLE_DUMP_INTR;
	    attempt++) {
		survey->count = 0;
		message = request(RTM_GETLINK, NLM_F_DUMP, &head,
		    sizeof(head));
		if (message != NULL && nla_put_u32(message, IFLA_EXT_MASK,
		    RTEXT_FILTER_SKIP_STATS) < 0) {
			nlmsg_free(message);
			message = NULL;
		}
		rc = ask(survey, message, on_link);
	}
	return survey->no_memory ? -NLE_NOMEM : rc;
}

static int
list_addresses(struct survey *survey, int index)
{
	struct ifaddrmsg head = { .ifa_family = AF_UNSPEC };
	int attempt, rc = -NLE_DUMP_INTR;

	survey->address_index = index;
	for (attempt = 0; attempt < ATTEMPTS_MAX && rc == -NLE_DUMP_INTR;
	    attempt++) {
		survey->ipv4 = survey->ipv6 = false;
		rc = ask(survey, request(RTM_GETADDR, NLM_F_DUMP, &head,
		    sizeof(head)), on_address);
	}
	return rc;
}

/* Index of the link by which packets to the tunnel's far end leave; 0: there
 * is no route. */
static int
route_to(struct survey *survey, const struct interface_link *link)
{
	int bytes = link->remote_version == 4 ? 4 : 16;
	struct rtmsg head = {
		.rtm_family = link->remote_version == 4 ? AF_INET : AF_INET6,
		.rtm_dst_len = (unsigned char)(8 * bytes),
	};
	struct nl_msg *message = request(RTM_GETROUTE, 0, &head, sizeof(head));

	survey->route_index = 0;
	if (message != NULL &&
	    nla_put(message, RTA_DST, bytes, link->remote) < 0) {
		nlmsg_free(message);
		message = NULL;
	}
	return ask(survey, message, on_route) < 0 ? 0 : survey->route_index;
}

static const struct interface_link *
link_of(const struct survey *survey, int index)
{
	for (size_t i = 0; i < survey->count; i++)
		if (survey->links[i].index == index)
			return &survey->links[i];
	return NULL;
}

static void
read_rate(const struct survey *survey, struct interface_device *device)
{
	union {
		struct ethtool_link_settings head;
		unsigned char bytes[sizeof(struct ethtool_link_settings) +
		    3 * 4 * INT8_MAX];	/* three masks of that many words */
	} settings = { .head = { .cmd = ETHTOOL_GLINKSETTINGS } };
	struct ifreq request = { .ifr_data = (char *)&settings };

	memcpy(request.ifr_name, device->name, sizeof(request.ifr_name));
	/* linux/ethtool.h: the first call tells how long the masks are. */
	if (ioctl(survey->control, SIOCETHTOOL, &request) == -1 ||
	    settings.head.link_mode_masks_nwords >= 0)
		return;
	settings.head.cmd = ETHTOOL_GLINKSETTINGS;
	settings.head.link_mode_masks_nwords =
	    (__s8)-settings.head.link_mode_masks_nwords;
	if (ioctl(survey->control, SIOCETHTOOL, &request) == -1)
		return;
	if (settings.head.speed != 0 &&
	    settings.head.speed != (__u32)SPEED_UNKNOWN)
		device->line_bps = settings.head.speed * BPS_PER_MBPS;
	device->negotiated = settings.head.autoneg == AUTONEG_ENABLE;
	if (settings.head.duplex == DUPLEX_FULL)
		device->duplex = INTERFACE_DUPLEX_FULL;
	else if (settings.head.duplex == DUPLEX_HALF)
		device->duplex = INTERFACE_DUPLEX_HALF;
}

static void
read_driver(const struct survey *survey, struct interface_device *device)
{
	struct ethtool_drvinfo info = { .cmd = ETHTOOL_GDRVINFO };
	struct ifreq request = { .ifr_data = (char *)&info };

	memcpy(request.ifr_name, device->name, sizeof(request.ifr_name));
	if (ioctl(survey->control, SIOCETHTOOL, &request) == 0)
		(void)snprintf(device->driver, sizeof(device->driver), "%.*s",
		    (int)sizeof(device->driver) - 1, info.driver);
}

/* A radio looks like a port to rtnetlink; sysfs knows the type of a device. */
static void
read_type(struct interface_device *device, int index)
{
	char path[64], line[256], wanted[32];
	bool wlan = false, wwan = false, same = false;
	FILE *f;

	if (device->kind != INTERFACE_PORT && device->kind != INTERFACE_OTHER)
		return;
	(void)snprintf(path, sizeof(path), "/sys/class/net/%s/uevent",
	    device->name);
	f = fopen(path, "re");
	if (f == NULL)
		return;
	/* /sys may be that of another network namespace. */
	(void)snprintf(wanted, sizeof(wanted), "IFINDEX=%d\n", index);
	while (fgets(line, sizeof(line), f) != NULL) {
		same = same || strcmp(line, wanted) == 0;
		wlan = wlan || strcmp(line, "DEVTYPE=wlan\n") == 0;
		wwan = wwan || strcmp(line, "DEVTYPE=wwan\n") == 0;
	}
	(void)fclose(f);
	if (same && (wlan || wwan))
		device->kind = wlan ? INTERFACE_WLAN : INTERFACE_WWAN;
}

static void
read_device(const struct survey *survey, const struct interface_link *link,
    struct interface_device *device)
{
	const struct interface_link *master;

	*device = link->device;
	read_type(device, link->index);
	read_rate(survey, device);
	read_driver(survey, device);
	if (link->master_index == 0)
		return;
	master = link_of(survey, link->master_index);
	if (master != NULL)
		memcpy(device->master, master->device.name,
		    sizeof(device->master));
}

/* Returns the last of them. */
static const struct interface_link *
read_ports(const struct survey *survey, const struct interface_link *link,
    struct interface_device *device)
{
	const struct interface_link *last = NULL;
	struct interface_device port;
	struct interface_port *kept;

	for (size_t i = 0; i < survey->count; i++) {
		if (survey->links[i].master_index != link->index ||
		    &survey->links[i] == link)
			continue;
		last = &survey->links[i];
		if (device->ports_count++ >= INTERFACE_PORTS_MAX)
			continue;
		read_device(survey, last, &port);
		kept = &device->ports[device->ports_count - 1];
		memcpy(kept->name, port.name, sizeof(kept->name));
		kept->real = port.kind == INTERFACE_PORT;
		kept->line_bps = port.line_bps;
	}
	return last;
}

/* The link below one that lies on another, NULL where it is not to be had. */
static const struct interface_link *
link_below(struct survey *survey, const struct interface_link *link,
    struct interface_device *device)
{
	const struct interface_link *below = NULL;

	device->below = INTERFACE_BELOW_UNTOLD;
	if (link->lower_elsewhere) {
		device->below = INTERFACE_BELOW_ELSEWHERE;
		return NULL;
	}
	if (link->lower_index != 0)
		below = link_of(survey, link->lower_index);
	else if (link->remote_version != 0) {
		below = link_of(survey, route_to(survey, link));
		device->by_route = below != NULL;
	}
	return below;
}

static const struct interface_link *
next_link(struct survey *survey, const struct interface_link *link,
    struct interface_device *device)
{
	const struct interface_link *port;

	switch (device->kind) {
	case INTERFACE_VLAN:
	case INTERFACE_MACVLAN:
	case INTERFACE_MACSEC:
	case INTERFACE_VXLAN:
	case INTERFACE_GENEVE:
	case INTERFACE_GRE:
	case INTERFACE_IPIP:
	case INTERFACE_ESP:
		return link_below(survey, link, device);
	case INTERFACE_BRIDGE:
		port = read_ports(survey, link, device);
		device->below = INTERFACE_BELOW_PORTS;
		return device->ports_count == 1 ? port : NULL;
	case INTERFACE_BOND:
		(void)read_ports(survey, link, device);
		return NULL;
	case INTERFACE_WIREGUARD:
	case INTERFACE_PPP:
		device->below = INTERFACE_BELOW_UNTOLD;
		return NULL;
	case INTERFACE_PORT:
	case INTERFACE_LOOPBACK:
	case INTERFACE_VETH:
	case INTERFACE_DUMMY:
	case INTERFACE_TUN:
	case INTERFACE_TAP:
	case INTERFACE_WLAN:
	case INTERFACE_WWAN:
	case INTERFACE_OTHER:
	case INTERFACE_KINDS:
		break;
	}
	return NULL;
}

/* From the link that was named down. */
static void
walk(struct survey *survey, const struct interface_link *link,
    struct interface_facts *out)
{
	const struct interface_link *passed[INTERFACE_DEPTH_MAX] = { NULL };
	struct interface_device *device;
	size_t i;

	while (link != NULL && out->count < INTERFACE_DEPTH_MAX) {
		for (i = 0; i < out->count; i++)
			if (passed[i] == link)
				return;		/* a route through itself */
		if (out->count > 0)
			out->device[out->count - 1].below =
			    INTERFACE_BELOW_DEVICE;
		device = &out->device[out->count];
		passed[out->count++] = link;
		read_device(survey, link, device);
		link = next_link(survey, link, device);
	}
}

static int
refuse_absent(const struct survey *survey, struct error *err)
{
	const char *names[64], *nearest;
	char sought[64], name[64], text[256] = "";
	size_t i, used;

	for (i = 0; i < survey->count && i < 64; i++)
		names[i] = survey->links[i].device.name;
	nearest = nearest_name(survey->sought, names, i);
	for (i = 0; i < survey->count && i < NAMES_MAX; i++) {
		used = strlen(text);
		(void)snprintf(text + used, sizeof(text) - used, "%s%s",
		    i == 0 ? "" : ", ", log_escape(
		    survey->links[i].device.name, name, sizeof(name)));
	}
	(void)log_escape(survey->sought, sought, sizeof(sought));
	if (nearest != NULL)
		return error_set(err, ERROR_ABSENT, "no interface '%s', did "
		    "you mean '%s'? there are: %s%s", sought,
		    log_escape(nearest, name, sizeof(name)), text,
		    survey->count > NAMES_MAX ? ", ..." : "");
	return error_set(err, ERROR_ABSENT, "no interface '%s', there are: "
	    "%s%s", sought, text, survey->count > NAMES_MAX ? ", ..." : "");
}

static int
survey_read(struct survey *survey, struct interface_facts *out,
    struct error *err)
{
	int rc = list_links(survey);
	size_t i;

	if (rc < 0)
		return error_set(err, ERROR_INTERNAL, "cannot ask the kernel "
		    "for its interfaces: %s", nl_geterror(rc));
	for (i = 0; i < survey->count && !survey->links[i].named; i++)
		continue;
	if (i == survey->count)
		return refuse_absent(survey, err);
	rc = list_addresses(survey, survey->links[i].index);
	if (rc < 0)
		return error_set(err, ERROR_INTERNAL, "cannot ask the kernel "
		    "for its addresses: %s", nl_geterror(rc));
	walk(survey, &survey->links[i], out);
	out->device[0].ipv4 = survey->ipv4;
	out->device[0].ipv6 = survey->ipv6;
	return 0;
}

int
interface_read(const char *name, struct interface_facts *out,
    struct error *err)
{
	struct survey survey = { .sought = name, .control = -1 };
	int connected, rc = -1;

	memset(out, 0, sizeof(*out));
	survey.netlink = nl_socket_alloc();
	if (survey.netlink == NULL) {
		(void)error_set(err, ERROR_INTERNAL, "no memory");
		goto out;
	}
	nl_socket_disable_auto_ack(survey.netlink);
	connected = nl_connect(survey.netlink, NETLINK_ROUTE);
	if (connected < 0) {
		(void)error_set(err, ERROR_INTERNAL, "cannot ask the kernel "
		    "for its interfaces: %s", nl_geterror(connected));
		goto out;
	}
	survey.control = socket(AF_INET, SOCK_DGRAM | SOCK_CLOEXEC, 0);
	if (survey.control == -1) {
		(void)error_errno(err, ERROR_INTERNAL, "ethtool");
		goto out;
	}
	rc = survey_read(&survey, out, err);
out:
	if (survey.control != -1)
		(void)close(survey.control);
	nl_socket_free(survey.netlink);
	free(survey.links);
	return rc;
}
