/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Messages of rtnetlink put together here, by the names of the kernel's headers
 * and in the order of octets that rtnetlink(7) and they give: for kinds that
 * the kernel at hand may not be able to make. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include <arpa/inet.h>
#include <linux/if.h>
#include <linux/if_arp.h>
#include <linux/if_link.h>
#include <linux/if_tunnel.h>
#include <linux/rtnetlink.h>
#include <netlink/attr.h>
#include <netlink/msg.h>
#include <string.h>

#include "draft/interface_link.h"

#define ADDRESS4 "\xc6\x12\x00\x02"	/* 198.18.0.2 */
#define ADDRESS6 "\x20\x01\x00\x02\0\0\0\0\0\0\0\0\0\0\0\x02"

struct attribute {
	int type, bytes;
	const char *octets;
};

/* A link of this kind with these attributes of the kind. */
static struct nl_msg *
message_of(const char *kind, unsigned type, const struct attribute info[])
{
	struct ifinfomsg head = { .ifi_index = 7,
		.ifi_type = (unsigned short)type, .ifi_flags = IFF_UP };
	struct nl_msg *message = nlmsg_alloc_simple(RTM_NEWLINK, 0);
	struct nlattr *linkinfo, *data;

	assert_non_null(message);
	assert_int_equal(nlmsg_append(message, &head, sizeof(head),
	    NLMSG_ALIGNTO), 0);
	assert_int_equal(nla_put_string(message, IFLA_IFNAME, "top0"), 0);
	assert_int_equal(nla_put_u32(message, IFLA_MTU, 1450), 0);
	if (kind == NULL)
		return message;
	linkinfo = nla_nest_start(message, IFLA_LINKINFO);
	assert_int_equal(nla_put_string(message, IFLA_INFO_KIND, kind), 0);
	data = nla_nest_start(message, IFLA_INFO_DATA);
	for (; info != NULL && info->type != 0; info++)
		assert_int_equal(nla_put(message, info->type, info->bytes,
		    info->octets), 0);
	(void)nla_nest_end(message, data);
	(void)nla_nest_end(message, linkinfo);
	return message;
}

static struct interface_link
parsed(struct nl_msg *message)
{
	struct interface_link link;

	assert_int_equal(interface_link_parse(nlmsg_hdr(message), "other",
	    &link), 0);
	nlmsg_free(message);
	return link;
}

#define PARSED(kind, type, ...)						\
	parsed(message_of(kind, type,					\
	    (const struct attribute[]){ __VA_ARGS__, { 0, 0, NULL } }))

static void
what_every_link_has_is_read(void **state)
{
	struct nl_msg *message = message_of(NULL, ARPHRD_ETHER, NULL);
	struct interface_link link;

	(void)state;
	assert_int_equal(nla_put_u32(message, IFLA_LINK, 3), 0);
	assert_int_equal(nla_put_u32(message, IFLA_MASTER, 9), 0);
	link = parsed(message);
	assert_string_equal(link.device.name, "top0");
	assert_int_equal(link.device.kind, INTERFACE_PORT);
	assert_int_equal(link.device.mtu_bytes, 1450);
	assert_true(link.device.up && link.device.frames);
	assert_false(link.device.carrier || link.named || link.lower_elsewhere);
	assert_int_equal(link.index, 7);
	assert_int_equal(link.lower_index, 3);
	assert_int_equal(link.master_index, 9);
	assert_true(link.device.line_bps == INTERFACE_UNKNOWN);
	message = message_of(NULL, ARPHRD_ETHER, NULL);
	assert_int_equal(nla_put_u32(message, IFLA_LINK_NETNSID, 0), 0);
	assert_true(parsed(message).lower_elsewhere);
}

static void
link_without_a_kind_has_that_of_its_hardware(void **state)
{
	(void)state;
	assert_int_equal(parsed(message_of(NULL, ARPHRD_LOOPBACK, NULL)).
	    device.kind, INTERFACE_LOOPBACK);
	assert_int_equal(parsed(message_of(NULL, ARPHRD_PPP, NULL)).
	    device.kind, INTERFACE_PPP);
	/* linux/if_arp.h: ARPHRD_RAWIP */
	assert_int_equal(parsed(message_of(NULL, 519, NULL)).device.kind,
	    INTERFACE_WWAN);
	assert_int_equal(parsed(message_of(NULL, ARPHRD_INFINIBAND, NULL)).
	    device.kind, INTERFACE_OTHER);
}

static void
alternative_name_is_a_name(void **state)
{
	struct nl_msg *message = message_of(NULL, ARPHRD_ETHER, NULL);
	struct interface_link link;
	struct nlattr *list;

	(void)state;
	list = nla_nest_start(message, IFLA_PROP_LIST);
	assert_int_equal(nla_put_string(message, IFLA_ALT_IFNAME, "else"), 0);
	assert_int_equal(nla_put_string(message, IFLA_ALT_IFNAME,
	    "a-name-longer-than-fifteen"), 0);
	(void)nla_nest_end(message, list);
	assert_int_equal(interface_link_parse(nlmsg_hdr(message),
	    "a-name-longer-than-fifteen", &link), 0);
	assert_true(link.named);
	assert_int_equal(interface_link_parse(nlmsg_hdr(message), "top0",
	    &link), 0);
	assert_true(link.named);
	assert_int_equal(interface_link_parse(nlmsg_hdr(message), "a-name",
	    &link), 0);
	assert_false(link.named);
	nlmsg_free(message);
}

static void
kinds_are_told_apart(void **state)
{
	static const struct {
		const char *name;
		enum interface_kind kind;
	} rows[] = {
		{ "veth", INTERFACE_VETH }, { "dummy", INTERFACE_DUMMY },
		{ "ifb", INTERFACE_DUMMY }, { "bridge", INTERFACE_BRIDGE },
		{ "bond", INTERFACE_BOND }, { "team", INTERFACE_BOND },
		{ "vlan", INTERFACE_VLAN }, { "macvlan", INTERFACE_MACVLAN },
		{ "macvtap", INTERFACE_MACVLAN },
		{ "ipvlan", INTERFACE_MACVLAN },
		{ "macsec", INTERFACE_MACSEC }, { "vxlan", INTERFACE_VXLAN },
		{ "geneve", INTERFACE_GENEVE }, { "gre", INTERFACE_GRE },
		{ "ip6gretap", INTERFACE_GRE }, { "ipip", INTERFACE_IPIP },
		{ "sit", INTERFACE_IPIP }, { "ip6tnl", INTERFACE_IPIP },
		{ "wireguard", INTERFACE_WIREGUARD },
		{ "vti", INTERFACE_ESP }, { "xfrm", INTERFACE_ESP },
		{ "ppp", INTERFACE_PPP }, { "wwan", INTERFACE_WWAN },
		{ "tun", INTERFACE_TUN }, { "dsa", INTERFACE_PORT },
		{ "vrf", INTERFACE_OTHER }, { "erspan", INTERFACE_OTHER },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++) {
		struct interface_link link = parsed(message_of(rows[i].name,
		    ARPHRD_ETHER, NULL));

		assert_string_equal(link.device.kernel_kind, rows[i].name);
		assert_int_equal(link.device.kind, rows[i].kind);
	}
	/* linux/if_tun.h: IFF_TAP is 2 */
	assert_int_equal(PARSED("tun", ARPHRD_ETHER,
	    { IFLA_TUN_TYPE, 1, "\x02" }).device.kind, INTERFACE_TAP);
}

static void
tags_are_read(void **state)
{
	struct interface_link link = PARSED("vlan", ARPHRD_ETHER,
	    { IFLA_VLAN_ID, 2, (const char *)&(uint16_t){ 100 } },
	    { IFLA_VLAN_PROTOCOL, 2, "\x88\xa8" });

	(void)state;
	assert_int_equal(link.device.vlan_id, 100);
	assert_true(link.device.service_tag);
	link = PARSED("vlan", ARPHRD_ETHER,
	    { IFLA_VLAN_PROTOCOL, 2, "\x81\x00" });
	assert_false(link.device.service_tag);
}

static void
macsec_says_what_costs_octets(void **state)
{
	struct interface_link link = PARSED("macsec", ARPHRD_ETHER,
	    { IFLA_MACSEC_ICV_LEN, 1, "\x0c" },
	    { IFLA_MACSEC_INC_SCI, 1, "\x01" });

	(void)state;
	assert_int_equal(link.device.macsec_icv_bytes, 12);
	assert_true(link.device.macsec_sci);
	link = PARSED("macsec", ARPHRD_ETHER,
	    { IFLA_MACSEC_ICV_LEN, 1, "\x10" },
	    { IFLA_MACSEC_INC_SCI, 1, "\0" }, { IFLA_MACSEC_ES, 1, "\0" },
	    { IFLA_MACSEC_SCB, 1, "\0" });
	assert_false(link.device.macsec_sci);
	assert_true(link.device.macsec_sci_if_peers);
	link = PARSED("macsec", ARPHRD_ETHER,
	    { IFLA_MACSEC_INC_SCI, 1, "\0" }, { IFLA_MACSEC_ES, 1, "\x01" });
	assert_false(link.device.macsec_sci_if_peers);
}

static void
vxlan_has_the_version_of_its_addresses(void **state)
{
	struct interface_link link = PARSED("vxlan", ARPHRD_ETHER,
	    { IFLA_VXLAN_GROUP, 4, ADDRESS4 });

	(void)state;
	assert_int_equal(link.device.outer_version, 4);
	assert_int_equal(link.remote_version, 4);
	assert_memory_equal(link.remote, ADDRESS4, 4);
	link = PARSED("vxlan", ARPHRD_ETHER,
	    { IFLA_VXLAN_GROUP6, 16, ADDRESS6 });
	assert_int_equal(link.device.outer_version, 6);
	assert_memory_equal(link.remote, ADDRESS6, 16);
	link = PARSED("vxlan", ARPHRD_ETHER,
	    { IFLA_VXLAN_LOCAL6, 16, ADDRESS6 });
	assert_int_equal(link.device.outer_version, 6);
	assert_int_equal(link.remote_version, 0);
	link = parsed(message_of("vxlan", ARPHRD_ETHER, NULL));
	assert_int_equal(link.device.outer_version, 4);
	assert_true(link.device.outer_assumed);
	link = PARSED("vxlan", ARPHRD_ETHER,
	    { IFLA_VXLAN_COLLECT_METADATA, 1, "\x01" });
	assert_int_equal(link.device.outer_version, 0);
	assert_int_equal(link.device.oddity, INTERFACE_PER_PACKET);
	link = PARSED("vxlan", ARPHRD_NONE, { IFLA_VXLAN_GPE, 0, "" });
	assert_int_equal(link.device.oddity, INTERFACE_GPE);
	assert_false(link.device.frames);
}

static void
gre_says_what_costs_octets(void **state)
{
	/* RFC 2784, RFC 2890: checksum 0x8000, key 0x2000, sequence 0x1000 */
	struct interface_link link = PARSED("gre", ARPHRD_IPGRE,
	    { IFLA_GRE_OFLAGS, 2, "\xb0\0" },
	    { IFLA_GRE_IFLAGS, 2, "\xb0\0" },
	    { IFLA_GRE_REMOTE, 4, ADDRESS4 });

	(void)state;
	assert_true(link.device.gre_checksum && link.device.gre_key &&
	    link.device.gre_sequence);
	assert_false(link.device.gre_differs || link.device.frames ||
	    link.device.encapsulation_limit);
	assert_int_equal(link.device.outer_version, 4);
	assert_int_equal(link.remote_version, 4);
	link = PARSED("gretap", ARPHRD_ETHER,
	    { IFLA_GRE_OFLAGS, 2, "\x20\0" }, { IFLA_GRE_IFLAGS, 2, "\0\0" },
	    { IFLA_GRE_ENCAP_TYPE, 2,
	      (const char *)&(uint16_t){ TUNNEL_ENCAP_FOU } });
	assert_true(link.device.gre_key && link.device.gre_differs &&
	    link.device.frames);
	assert_int_equal(link.device.oddity, INTERFACE_IN_UDP);
	link = PARSED("ip6gre", ARPHRD_IP6GRE,
	    { IFLA_GRE_REMOTE, 16, ADDRESS6 });
	assert_true(link.device.encapsulation_limit);
	assert_int_equal(link.remote_version, 6);
	/* linux/ip6_tunnel.h: IP6_TNL_F_IGN_ENCAP_LIMIT */
	link = PARSED("ip6gre", ARPHRD_IP6GRE,
	    { IFLA_GRE_FLAGS, 4, (const char *)&(uint32_t){ 1 } });
	assert_false(link.device.encapsulation_limit);
	link = PARSED("gre", ARPHRD_IPGRE,
	    { IFLA_GRE_COLLECT_METADATA, 0, "" });
	assert_int_equal(link.device.oddity, INTERFACE_PER_PACKET);
}

static void
ip_in_ip_has_both_versions(void **state)
{
	/* IANA protocol numbers: 4 IPv4, 41 IPv6, 137 MPLS */
	static const struct {
		const char *kind, *protocol;
		unsigned outer, inner;
	} rows[] = {
		{ "ipip", "\x04", 4, 4 }, { "ipip", NULL, 4, 4 },
		{ "sit", "\x29", 4, 6 }, { "sit", NULL, 4, 6 },
		{ "ip6tnl", "\x04", 6, 4 }, { "ip6tnl", "\x29", 6, 6 },
		{ "ip6tnl", "\0", 6, 0 }, { "ipip", "\x89", 4, 0 },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++) {
		struct interface_link link = PARSED(rows[i].kind, ARPHRD_TUNNEL,
		    { rows[i].protocol != NULL ? IFLA_IPTUN_PROTO : 0, 1,
		      rows[i].protocol });

		assert_int_equal(link.device.outer_version, rows[i].outer);
		assert_int_equal(link.device.inner_version, rows[i].inner);
		assert_int_equal(link.device.encapsulation_limit,
		    rows[i].outer == 6);
		assert_int_equal(link.device.oddity, rows[i].protocol != NULL
		    && rows[i].protocol[0] == '\x89' ? INTERFACE_MPLS :
		    INTERFACE_PLAIN);
	}
}

static void
geneve_may_be_set_packet_by_packet(void **state)
{
	struct interface_link link = PARSED("geneve", ARPHRD_ETHER,
	    { IFLA_GENEVE_REMOTE6, 16, ADDRESS6 });

	(void)state;
	assert_int_equal(link.device.outer_version, 6);
	link = PARSED("geneve", ARPHRD_ETHER,
	    { IFLA_GENEVE_COLLECT_METADATA, 0, "" });
	assert_int_equal(link.device.outer_version, 0);
	assert_int_equal(link.device.oddity, INTERFACE_PER_PACKET);
}

/* No attribute is believed to be as long as it should be. */
static void
short_attributes_are_as_if_absent(void **state)
{
	static const char *const kinds[] = { "vlan", "macsec", "vxlan",
		"geneve", "gre", "ip6gre", "ipip", "ip6tnl", "tun" };

	(void)state;
	for (size_t i = 0; i < sizeof(kinds) / sizeof(kinds[0]); i++) {
		struct attribute info[64] = { { 0, 0, NULL } };

		for (int type = 1; type < 63; type++)
			info[type - 1] = (struct attribute){ type, 0, "" };
		(void)parsed(message_of(kinds[i], ARPHRD_ETHER, info));
	}
}

static void
other_and_cut_messages_are_refused(void **state)
{
	struct nl_msg *message = message_of("gre", ARPHRD_IPGRE, NULL);
	struct nlmsghdr *head = nlmsg_hdr(message);
	struct interface_link link;
	uint32_t whole = head->nlmsg_len;

	(void)state;
	for (uint32_t length = NLMSG_HDRLEN; length < whole; length++) {
		head->nlmsg_len = length;
		(void)interface_link_parse(head, "top0", &link);
	}
	head->nlmsg_len = NLMSG_HDRLEN;
	assert_int_equal(interface_link_parse(head, "top0", &link), -1);
	head->nlmsg_len = whole;
	head->nlmsg_type = RTM_DELLINK;
	assert_int_equal(interface_link_parse(head, "top0", &link), -1);
	nlmsg_free(message);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(what_every_link_has_is_read),
		cmocka_unit_test(link_without_a_kind_has_that_of_its_hardware),
		cmocka_unit_test(alternative_name_is_a_name),
		cmocka_unit_test(kinds_are_told_apart),
		cmocka_unit_test(tags_are_read),
		cmocka_unit_test(macsec_says_what_costs_octets),
		cmocka_unit_test(vxlan_has_the_version_of_its_addresses),
		cmocka_unit_test(gre_says_what_costs_octets),
		cmocka_unit_test(ip_in_ip_has_both_versions),
		cmocka_unit_test(geneve_may_be_set_packet_by_packet),
		cmocka_unit_test(short_attributes_are_as_if_absent),
		cmocka_unit_test(other_and_cut_messages_are_refused),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
