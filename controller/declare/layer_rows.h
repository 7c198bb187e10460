/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * layer_rows: what the families of layers share, and the rows that layer.c
 * puts into its table.
 */
#ifndef PLAFOND_LAYER_ROWS_H
#define PLAFOND_LAYER_ROWS_H

#include "declare/layer.h"

#define LAYER_NAMES(...) (const char *const[]){ __VA_ARGS__, NULL }
/* Of a cost: no alignment and no coding. */
#define LAYER_PLAIN .align_bytes = 1, .num = 1, .den = 1
/* Options by the type of their member of struct layer_options. */
#define LAYER_YES_NO(option, member, preset, text)			\
	{ .name = option, .kind = FIELD_YES_NO,				\
	  .offset = offsetof(struct layer_options, member),		\
	  .default_text = preset, .help = text }
#define LAYER_BYTES(option, member, least, most, preset, text)		\
	{ .name = option, .kind = FIELD_QUANTITY,			\
	  .dimension = DIMENSION_SIZE,					\
	  .offset = offsetof(struct layer_options, member),		\
	  .min = least, .max = most, .default_text = preset, .help = text }
#define LAYER_COUNT(option, member, least, most, preset, text)		\
	{ .name = option, .kind = FIELD_COUNT,				\
	  .offset = offsetof(struct layer_options, member),		\
	  .min = least, .max = most, .default_text = preset, .help = text }
#define LAYER_CHOICE(option, member, names, preset, text)		\
	{ .name = option, .kind = FIELD_CHOICE,				\
	  .offset = offsetof(struct layer_options, member),		\
	  .choices = names, .default_text = preset, .help = text }

/* layer_link.c: frames and what is pushed into them */
extern const struct layer layer_ethernet, layer_ethernet_bare,
    layer_ethernet_inner, layer_ethernet_bridged, layer_vlan, layer_macsec,
    layer_mpls, layer_pseudowire;
/* layer_serial.c: PPP, HDLC, ATM */
extern const struct layer layer_pppoe, layer_ppp, layer_ppp_tunnelled,
    layer_hdlc, layer_frame_relay, layer_aal5, layer_llc_snap, layer_llc_ppp;
/* layer_access.c: what access networks put around a frame or a packet */
extern const struct layer layer_ptm, layer_gem, layer_xgem, layer_docsis,
    layer_gfp, layer_wlan, layer_lte, layer_nr;
/* layer_ip.c */
extern const struct layer layer_ipv4, layer_ipv6, layer_udp, layer_tcp;
/* layer_tunnel.c */
extern const struct layer layer_gre, layer_vxlan, layer_geneve, layer_l2tp,
    layer_l2tpv3, layer_l2tpv3_udp, layer_wireguard;
/* layer_esp.c */
extern const struct layer layer_esp;
/* layer_record.c */
extern const struct layer layer_tls, layer_dtls, layer_quic;

#endif
