/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "draft/interface_link.h"

#include <arpa/inet.h>
#include <linux/if.h>
#include <linux/if_arp.h>
#include <linux/if_link.h>
#include <linux/if_tunnel.h>
#include <linux/ip6_tunnel.h>
#include <linux/rtnetlink.h>
#include <netlink/attr.h>
#include <netlink/msg.h>

#include <assert.h>
#include <stdio.h>
#include <string.h>

/* linux/if_ether.h, which does not go with net/ethernet.h */
#define ETHERTYPE_8021AD 0x88a8
/* linux/if_tun.h: IFLA_TUN_TYPE */
#define TUN_TYPE_TAP 2
/* linux/if_arp.h, since 5.0: raw IP of a modem */
#define LINK_TYPE_RAWIP 519

#define INFO_MAX 64			/* attributes of any kind of link */
static_assert(IFLA_VXLAN_MAX < INFO_MAX && IFLA_GRE_MAX < INFO_MAX &&
    IFLA_IPTUN_MAX < INFO_MAX && IFLA_MACSEC_MAX < INFO_MAX &&
    IFLA_GENEVE_MAX < INFO_MAX, "room for all attributes");

static bool
has(struct nlattr *const *attributes, int type, int bytes)
{
	return attributes[type] != NULL && nla_len(attributes[type]) >= bytes;
}

static unsigned
get_u8(struct nlattr *const *attributes, int type, unsigned absent)
{
	return has(attributes, type, 1) ? nla_get_u8(attributes[type]) :
	    absent;
}

static unsigned
get_u16(struct nlattr *const *attributes, int type)
{
	return has(attributes, type, 2) ? nla_get_u16(attributes[type]) : 0;
}

static uint32_t
get_u32(struct nlattr *const *attributes, int type)
{
	return has(attributes, type, 4) ? nla_get_u32(attributes[type]) : 0;
}

/* What is too long is cut. */
static void
get_text(struct nlattr *const *attributes, int type, char *buf, size_t size)
{
	if (attributes[type] != NULL)
		(void)nla_strlcpy(buf, attributes[type], size);
}

/* An address that is not all zero. */
static bool
get_address(struct nlattr *const *attributes, int type, unsigned version,
    unsigned char out[16])
{
	static const unsigned char none[16] = { 0 };
	size_t bytes = version == 4 ? 4 : 16;

	if (!has(attributes, type, (int)bytes) ||
	    memcmp(nla_data(attributes[type]), none, bytes) == 0)
		return false;
	memcpy(out, nla_data(attributes[type]), bytes);
	return true;
}

static void
read_remote(struct nlattr *const *info, int type, unsigned version,
    struct interface_link *link)
{
	if (get_address(info, type, version, link->remote))
		link->remote_version = version;
}

static void
read_vlan(struct nlattr *const *info, struct interface_link *link)
{
	link->device.vlan_id = get_u16(info, IFLA_VLAN_ID);
	link->device.service_tag = get_u16(info, IFLA_VLAN_PROTOCOL) ==
	    htons(ETHERTYPE_8021AD);
}

static void
read_macsec(struct nlattr *const *info, struct interface_link *link)
{
	struct interface_device *device = &link->device;

	device->macsec_icv_bytes = get_u8(info, IFLA_MACSEC_ICV_LEN, 16);
	device->macsec_sci = get_u8(info, IFLA_MACSEC_INC_SCI, 1) != 0;
	/* macsec_send_sci of net/macsec.h */
	device->macsec_sci_if_peers = !device->macsec_sci &&
	    get_u8(info, IFLA_MACSEC_ES, 0) == 0 &&
	    get_u8(info, IFLA_MACSEC_SCB, 0) == 0;
}

static void
read_vxlan(struct nlattr *const *info, struct interface_link *link)
{
	struct interface_device *device = &link->device;
	unsigned char local[16];

	read_remote(info, IFLA_VXLAN_GROUP, 4, link);
	read_remote(info, IFLA_VXLAN_GROUP6, 6, link);
	device->outer_version = link->remote_version;
	if (device->outer_version == 0 &&
	    get_address(info, IFLA_VXLAN_LOCAL6, 6, local))
		device->outer_version = 6;
	if (device->outer_version == 0 &&
	    get_address(info, IFLA_VXLAN_LOCAL, 4, local))
		device->outer_version = 4;
	if (get_u8(info, IFLA_VXLAN_COLLECT_METADATA, 0) != 0) {
		device->oddity = INTERFACE_PER_PACKET;
	} else if (device->outer_version == 0) {
		/* vxlan_config_validate of drivers/net/vxlan */
		device->outer_version = 4;
		device->outer_assumed = true;
	}
	if (info[IFLA_VXLAN_GPE] != NULL)
		device->oddity = INTERFACE_GPE;
}

static void
read_geneve(struct nlattr *const *info, struct interface_link *link)
{
	read_remote(info, IFLA_GENEVE_REMOTE, 4, link);
	read_remote(info, IFLA_GENEVE_REMOTE6, 6, link);
	link->device.outer_version = link->remote_version;
	if (info[IFLA_GENEVE_COLLECT_METADATA] != NULL)
		link->device.oddity = INTERFACE_PER_PACKET;
}

static void
read_gre(struct nlattr *const *info, struct interface_link *link)
{
	struct interface_device *device = &link->device;
	unsigned sent = get_u16(info, IFLA_GRE_OFLAGS);
	unsigned received = get_u16(info, IFLA_GRE_IFLAGS);
	const unsigned counted = GRE_CSUM | GRE_KEY | GRE_SEQ;

	device->gre_checksum = (sent & GRE_CSUM) != 0;
	device->gre_key = (sent & GRE_KEY) != 0;
	device->gre_sequence = (sent & GRE_SEQ) != 0;
	device->gre_differs = ((sent ^ received) & counted) != 0;
	device->encapsulation_limit = device->outer_version == 6 &&
	    (get_u32(info, IFLA_GRE_FLAGS) & IP6_TNL_F_IGN_ENCAP_LIMIT) == 0;
	read_remote(info, IFLA_GRE_REMOTE, device->outer_version, link);
	if (info[IFLA_GRE_COLLECT_METADATA] != NULL)
		device->oddity = INTERFACE_PER_PACKET;
	else if (get_u16(info, IFLA_GRE_ENCAP_TYPE) != TUNNEL_ENCAP_NONE)
		device->oddity = INTERFACE_IN_UDP;
}

static void
read_iptunnel(struct nlattr *const *info, struct interface_link *link)
{
	struct interface_device *device = &link->device;

	if (info[IFLA_IPTUN_PROTO] != NULL) {
		unsigned protocol = get_u8(info, IFLA_IPTUN_PROTO, 0);

		device->inner_version = protocol == IPPROTO_IPIP ? 4 :
		    protocol == IPPROTO_IPV6 ? 6 : 0;
		if (protocol == IPPROTO_MPLS)
			device->oddity = INTERFACE_MPLS;
	}
	/* Of sit, whose flags are others, the outer version is 4. */
	device->encapsulation_limit = device->outer_version == 6 &&
	    (get_u32(info, IFLA_IPTUN_FLAGS) & IP6_TNL_F_IGN_ENCAP_LIMIT) == 0;
	read_remote(info, IFLA_IPTUN_REMOTE, device->outer_version, link);
	if (info[IFLA_IPTUN_COLLECT_METADATA] != NULL)
		device->oddity = INTERFACE_PER_PACKET;
	else if (get_u16(info, IFLA_IPTUN_ENCAP_TYPE) != TUNNEL_ENCAP_NONE)
		device->oddity = INTERFACE_IN_UDP;
}

static void
read_tun(struct nlattr *const *info, struct interface_link *link)
{
	if (get_u8(info, IFLA_TUN_TYPE, 0) == TUN_TYPE_TAP)
		link->device.kind = INTERFACE_TAP;
}

/* Kinds as the kernel names them. */
static const struct kind {
	const char *name;
	enum interface_kind kind;
	unsigned outer_version, inner_version;
	void (*read)(struct nlattr *const *info, struct interface_link *link);
} kinds[] = {
	{ "bond", INTERFACE_BOND, 0, 0, NULL },
	{ "bridge", INTERFACE_BRIDGE, 0, 0, NULL },
	{ "dsa", INTERFACE_PORT, 0, 0, NULL },
	{ "dummy", INTERFACE_DUMMY, 0, 0, NULL },
	{ "geneve", INTERFACE_GENEVE, 0, 0, read_geneve },
	{ "gre", INTERFACE_GRE, 4, 0, read_gre },
	{ "gretap", INTERFACE_GRE, 4, 0, read_gre },
	{ "ifb", INTERFACE_DUMMY, 0, 0, NULL },
	{ "ip6gre", INTERFACE_GRE, 6, 0, read_gre },
	{ "ip6gretap", INTERFACE_GRE, 6, 0, read_gre },
	{ "ip6tnl", INTERFACE_IPIP, 6, 0, read_iptunnel },
	{ "ipip", INTERFACE_IPIP, 4, 4, read_iptunnel },
	{ "ipvlan", INTERFACE_MACVLAN, 0, 0, NULL },
	{ "ipvtap", INTERFACE_MACVLAN, 0, 0, NULL },
	{ "macsec", INTERFACE_MACSEC, 0, 0, read_macsec },
	{ "macvlan", INTERFACE_MACVLAN, 0, 0, NULL },
	{ "macvtap", INTERFACE_MACVLAN, 0, 0, NULL },
	{ "ppp", INTERFACE_PPP, 0, 0, NULL },
	{ "rmnet", INTERFACE_WWAN, 0, 0, NULL },
	{ "sit", INTERFACE_IPIP, 4, 6, read_iptunnel },
	{ "team", INTERFACE_BOND, 0, 0, NULL },
	{ "tun", INTERFACE_TUN, 0, 0, read_tun },
	{ "veth", INTERFACE_VETH, 0, 0, NULL },
	{ "vlan", INTERFACE_VLAN, 0, 0, read_vlan },
	{ "vti", INTERFACE_ESP, 4, 0, NULL },
	{ "vti6", INTERFACE_ESP, 6, 0, NULL },
	{ "vxlan", INTERFACE_VXLAN, 0, 0, read_vxlan },
	{ "wireguard", INTERFACE_WIREGUARD, 0, 0, NULL },
	{ "wwan", INTERFACE_WWAN, 0, 0, NULL },
	{ "xfrm", INTERFACE_ESP, 0, 0, NULL },
};

static void
read_kind(struct nlattr *const *linkinfo, struct interface_link *link)
{
	struct interface_device *device = &link->device;
	struct nlattr *info[INFO_MAX] = { NULL };
	const struct kind *kind;
	size_t i;

	get_text(linkinfo, IFLA_INFO_KIND, device->kernel_kind,
	    sizeof(device->kernel_kind));
	device->kind = INTERFACE_OTHER;
	for (i = 0; i < sizeof(kinds) / sizeof(kinds[0]); i++)
		if (strcmp(kinds[i].name, device->kernel_kind) == 0)
			break;
	if (i == sizeof(kinds) / sizeof(kinds[0]))
		return;
	kind = &kinds[i];
	device->kind = kind->kind;
	device->outer_version = kind->outer_version;
	device->inner_version = kind->inner_version;
	if (kind->read == NULL)
		return;
	if (linkinfo[IFLA_INFO_DATA] != NULL)
		(void)nla_parse_nested(info, INFO_MAX - 1,
		    linkinfo[IFLA_INFO_DATA], NULL);
	kind->read(info, link);
}

/* Of a link without a kind: its hardware type. */
static enum interface_kind
kind_of_type(unsigned type)
{
	switch (type) {
	case ARPHRD_ETHER:
		return INTERFACE_PORT;
	case ARPHRD_LOOPBACK:
		return INTERFACE_LOOPBACK;
	case ARPHRD_PPP:
		return INTERFACE_PPP;
	case LINK_TYPE_RAWIP:
		return INTERFACE_WWAN;
	default:
		return INTERFACE_OTHER;
	}
}

static bool
has_alternative(struct nlattr *list, const char *sought)
{
	struct nlattr *item;
	int left;

	if (list == NULL)
		return false;
	nla_for_each_nested(item, list, left)
		if (nla_type(item) == IFLA_ALT_IFNAME &&
		    nla_strcmp(item, sought) == 0)
			return true;
	return false;
}

int
interface_link_parse(struct nlmsghdr *message, const char *sought,
    struct interface_link *out)
{
	struct nlattr *attributes[IFLA_MAX + 1] = { NULL };
	struct nlattr *linkinfo[IFLA_INFO_MAX + 1] = { NULL };
	struct interface_device *device = &out->device;
	const struct ifinfomsg *head;

	memset(out, 0, sizeof(*out));
	if (message->nlmsg_type != RTM_NEWLINK || nlmsg_parse(message,
	    sizeof(*head), attributes, IFLA_MAX, NULL) < 0 ||
	    attributes[IFLA_IFNAME] == NULL)
		return -1;
	head = nlmsg_data(message);
	out->index = head->ifi_index;
	get_text(attributes, IFLA_IFNAME, device->name, sizeof(device->name));
	device->up = (head->ifi_flags & IFF_UP) != 0;
	device->carrier = (head->ifi_flags & IFF_RUNNING) != 0;
	device->frames = head->ifi_type == ARPHRD_ETHER;
	device->mtu_bytes = get_u32(attributes, IFLA_MTU);
	device->line_bps = INTERFACE_UNKNOWN;
	device->kind = kind_of_type(head->ifi_type);
	out->named = strcmp(device->name, sought) == 0 ||
	    has_alternative(attributes[IFLA_PROP_LIST], sought);
	out->lower_index = (int)get_u32(attributes, IFLA_LINK);
	out->lower_elsewhere = attributes[IFLA_LINK_NETNSID] != NULL;
	out->master_index = (int)get_u32(attributes, IFLA_MASTER);
	if (attributes[IFLA_LINKINFO] != NULL && nla_parse_nested(linkinfo,
	    IFLA_INFO_MAX, attributes[IFLA_LINKINFO], NULL) < 0)
		return -1;
	if (linkinfo[IFLA_INFO_KIND] != NULL)
		read_kind(linkinfo, out);
	return 0;
}
