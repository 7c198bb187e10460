/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/layer.h"

#include <assert.h>
#include <string.h>

#include "declare/layer_rows.h"

static const char *const level_names[LEVELS] = {
	[LEVEL_LINE] = "line",
	[LEVEL_FRAME] = "frame",
	[LEVEL_FRAME_WITHOUT_FCS] = "frame-without-fcs",
	[LEVEL_PACKET] = "packet",
	[LEVEL_SEGMENT] = "segment",
	[LEVEL_PAYLOAD] = "payload",
};
static const char tunnel_name[] = "tunnel";

const struct choice level_choices[] = {
	{ "line", LEVEL_LINE },
	{ "frame", LEVEL_FRAME },
	{ "frame-without-fcs", LEVEL_FRAME_WITHOUT_FCS },
	{ "packet", LEVEL_PACKET },
	{ "segment", LEVEL_SEGMENT },
	{ "payload", LEVEL_PAYLOAD },
	{ NULL, 0 },
};

const struct layer *const layer_table[] = {
	&layer_ethernet, &layer_ethernet_bare, &layer_ethernet_inner,
	&layer_ethernet_bridged, &layer_vlan, &layer_macsec, &layer_mpls,
	&layer_pseudowire,
	&layer_pppoe, &layer_ppp, &layer_ppp_tunnelled, &layer_hdlc,
	&layer_frame_relay, &layer_aal5, &layer_llc_snap, &layer_llc_ppp,
	&layer_ptm, &layer_gem, &layer_xgem, &layer_docsis, &layer_gfp,
	&layer_wlan, &layer_lte, &layer_nr,
	&layer_ipv4, &layer_ipv6, &layer_gre, &layer_udp, &layer_tcp,
	&layer_vxlan, &layer_geneve, &layer_l2tp, &layer_l2tpv3,
	&layer_l2tpv3_udp, &layer_esp, &layer_wireguard,
	&layer_tls, &layer_dtls, &layer_quic,
	NULL
};

/* What a trial puts on top of IP. */
static const char *const layers_of_protocol[PROTOCOLS][3] = {
	[PROTOCOL_TCP] = { "tcp" },
	[PROTOCOL_UDP] = { "udp" },
	[PROTOCOL_TCP_TLS] = { "tcp", "tls" },
};

const char *
level_name(enum layer_level level)
{
	assert(level <= LEVEL_TUNNEL);
	return level == LEVEL_TUNNEL ? tunnel_name : level_names[level];
}

const struct layer *
layer_find(const char *name)
{
	for (size_t i = 0; layer_table[i] != NULL; i++)
		if (strcmp(layer_table[i]->name, name) == 0)
			return layer_table[i];
	return NULL;
}

const struct layer *
layer_next_variant(const struct layer *layer)
{
	size_t i = 0;

	while (layer_table[i] != layer)
		i++;
	if (layer_table[i + 1] == NULL ||
	    strcmp(layer_table[i + 1]->name, layer->name) != 0)
		return NULL;
	return layer_table[i + 1];
}

static bool
lies_on(const struct layer *layer, const char *below)
{
	const char *const *name;

	for (name = layer->below; *name != NULL; name++)
		if (strcmp(*name, below) == 0)
			return true;
	return false;
}

const struct layer *
layer_find_on(const char *name, const char *below)
{
	const struct layer *layer;

	for (layer = layer_find(name); layer != NULL;
	    layer = layer_next_variant(layer))
		if (lies_on(layer, below))
			return layer;
	return NULL;
}

const char *const *
protocol_layers(enum protocol protocol)
{
	assert(protocol < PROTOCOLS);
	return layers_of_protocol[protocol];
}
