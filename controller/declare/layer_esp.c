/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Layer ESP: what each transform adds.  Tunnel mode is IP on it, transport
 * mode a transport; NAT traversal is UDP below it. */
#include "declare/layer_rows.h"
#include "error.h"

enum cipher { CIPHER_AES_GCM_16, CIPHER_AES_GCM_12, CIPHER_AES_GCM_8,
	CIPHER_CHACHA20_POLY1305, CIPHER_AES_CBC, CIPHER_NULL, CIPHERS };
enum integrity { INTEGRITY_SHA1_96, INTEGRITY_SHA2_256_128,
	INTEGRITY_SHA2_384_192, INTEGRITY_SHA2_512_256, INTEGRITIES };

static const struct {
	uint64_t iv_bytes;
	uint64_t block_bytes;		/* 0: a stream, the row's alignment */
	uint64_t icv_bytes;		/* 0: that of an integrity transform */
} ciphers[CIPHERS] = {
	/* RFC 4106 sections 3 and 6 */
	[CIPHER_AES_GCM_16] = { 8, 0, 16 },
	[CIPHER_AES_GCM_12] = { 8, 0, 12 },
	[CIPHER_AES_GCM_8] = { 8, 0, 8 },
	/* RFC 7634 section 2 */
	[CIPHER_CHACHA20_POLY1305] = { 8, 0, 16 },
	/* RFC 3602 sections 2.4 and 3 */
	[CIPHER_AES_CBC] = { 16, 16, 0 },
	/* RFC 2410 */
	[CIPHER_NULL] = { 0, 0, 0 },
};
static const uint64_t integrity_bytes[INTEGRITIES] = {
	[INTEGRITY_SHA1_96] = 12,		/* RFC 2404 */
	/* RFC 4868 section 2.6 */
	[INTEGRITY_SHA2_256_128] = 16,
	[INTEGRITY_SHA2_384_192] = 24,
	[INTEGRITY_SHA2_512_256] = 32,
};

static const struct choice cipher_choices[] = {
	{ "aes-gcm-16", CIPHER_AES_GCM_16 },
	{ "aes-gcm-12", CIPHER_AES_GCM_12 },
	{ "aes-gcm-8", CIPHER_AES_GCM_8 },
	{ "chacha20-poly1305", CIPHER_CHACHA20_POLY1305 },
	{ "aes-cbc", CIPHER_AES_CBC },
	{ "null", CIPHER_NULL },
	{ NULL, 0 },
};
static const struct choice integrity_choices[] = {
	{ "hmac-sha1-96", INTEGRITY_SHA1_96 },
	{ "hmac-sha2-256-128", INTEGRITY_SHA2_256_128 },
	{ "hmac-sha2-384-192", INTEGRITY_SHA2_384_192 },
	{ "hmac-sha2-512-256", INTEGRITY_SHA2_512_256 },
	{ NULL, 0 },
};
static const struct field esp_fields[] = {
	LAYER_CHOICE("cipher", cipher, cipher_choices, "aes-gcm-16",
	    "the number is the ICV in octets"),
	LAYER_CHOICE("integrity", integrity, integrity_choices, NULL,
	    "with aes-cbc and null, and only there"),
	{ .name = NULL },
};

static int
adjust_esp(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	const char *name = cipher_choices[options->cipher].name;
	uint64_t icv_bytes = ciphers[options->cipher].icv_bytes;

	if (icv_bytes != 0 && options->integrity != FIELD_UNSET)
		return error_set(err, ERROR_INPUT, "integrity: found %s, "
		    "allowed with %s: none, it has its own",
		    integrity_choices[options->integrity].name, name);
	if (icv_bytes == 0 && options->integrity == FIELD_UNSET)
		return error_set(err, ERROR_INPUT, "integrity: missing, "
		    "allowed with %s: hmac-sha1-96, hmac-sha2-256-128, "
		    "hmac-sha2-384-192 or hmac-sha2-512-256", name);
	if (icv_bytes == 0)
		icv_bytes = integrity_bytes[options->integrity];
	cost->head_bytes += ciphers[options->cipher].iv_bytes;
	if (ciphers[options->cipher].block_bytes != 0)
		cost->align_bytes = ciphers[options->cipher].block_bytes;
	cost->tail_bytes = icv_bytes;
	return 0;
}

const struct layer layer_esp = {
	.name = "esp",
	.title = "IPsec Encapsulating Security Payload",
	.level = LEVEL_TUNNEL,
	.below = LAYER_NAMES("ipv4", "ipv6", "udp"),
	/* head: SPI 4 and sequence number 4; trail: pad length and next
	 * header, which end on 4 octets (RFC 4303 section 2.4) */
	.cost = { .head_bytes = 8, .trail_bytes = 2, .align_bytes = 4,
	    .num = 1, .den = 1 },
	.adjust = adjust_esp,
	.fields = esp_fields,
	.inside = "header and trailer",
	.inside_with_options = "header, IV, trailer, ICV",
	.formula = "8 + IV + (carried + 2 rounded up to 4, aes-cbc 16) + ICV; "
	    "IV 8, aes-cbc 16, null 0",
	.source = "RFC 4303",
};
