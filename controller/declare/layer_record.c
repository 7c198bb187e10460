/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Layers: TLS records in a stream, DTLS and QUIC in datagrams. */
#include "declare/layer_rows.h"
#include "error.h"

/* RFC 5246 section 6.2.1, RFC 8446 section 5.1 */
#define RECORD_MAX_BYTES 16384

enum version { VERSION_12, VERSION_13, VERSIONS };
enum cipher { CIPHER_AES_GCM, CIPHER_CHACHA20_POLY1305, CIPHER_AES_CCM_8,
	CIPHER_AES_CBC, CIPHERS };
enum integrity { INTEGRITY_HMAC_SHA1, INTEGRITY_HMAC_SHA256, INTEGRITIES };

/* What an AEAD adds to a record besides its header. */
static const struct aead {
	uint64_t nonce_bytes;		/* explicit, in version 1.2 */
	uint64_t tag_bytes;
} aeads[CIPHER_AES_CBC] = {
	[CIPHER_AES_GCM] = { 8, 16 },		/* RFC 5288 */
	[CIPHER_CHACHA20_POLY1305] = { 0, 16 },	/* RFC 7905 section 2 */
	[CIPHER_AES_CCM_8] = { 8, 8 },		/* RFC 6655 */
};
/* RFC 8446 section 5.2: the content's type, encrypted with it. */
#define INNER_TYPE_BYTES 1

/* RFC 5246 section 6.2.3.2: explicit IV of a block, then at least the octet of
 * padding length. */
#define CBC_BLOCK_BYTES 16
#define CBC_PADDING_BYTES 1
static const uint64_t mac_bytes[INTEGRITIES] = {
	[INTEGRITY_HMAC_SHA1] = 20,
	[INTEGRITY_HMAC_SHA256] = 32,
};

static const struct choice version_choices[] = {
	{ "1.2", VERSION_12 },
	{ "1.3", VERSION_13 },
	{ NULL, 0 },
};
static const struct choice tls_cipher_choices[] = {
	{ "aes-gcm", CIPHER_AES_GCM },
	{ "chacha20-poly1305", CIPHER_CHACHA20_POLY1305 },
	{ "aes-ccm-8", CIPHER_AES_CCM_8 },
	{ "aes-cbc", CIPHER_AES_CBC },
	{ NULL, 0 },
};
static const struct choice dtls_cipher_choices[] = {
	{ "aes-gcm", CIPHER_AES_GCM },
	{ "chacha20-poly1305", CIPHER_CHACHA20_POLY1305 },
	{ "aes-ccm-8", CIPHER_AES_CCM_8 },
	{ NULL, 0 },
};
static const struct choice integrity_choices[] = {
	{ "hmac-sha1", INTEGRITY_HMAC_SHA1 },
	{ "hmac-sha256", INTEGRITY_HMAC_SHA256 },
	{ NULL, 0 },
};

static const struct field tls_fields[] = {
	LAYER_CHOICE("version", version, version_choices, "1.3",
	    "1.2 or 1.3 (RFC 5246, RFC 8446)"),
	LAYER_CHOICE("cipher", cipher, tls_cipher_choices, "aes-gcm",
	    "aes-cbc in 1.2 only"),
	LAYER_CHOICE("integrity", integrity, integrity_choices, NULL,
	    "MAC of 20 B or 32 B; with aes-cbc, and only there"),
	LAYER_YES_NO("encrypt-then-mac", encrypt_then_mac, NULL,
	    "with aes-cbc: yes unless given, as OpenSSL negotiates "
	    "(RFC 7366)"),
	LAYER_BYTES("record-bytes", record_bytes, 1, RECORD_MAX_BYTES,
	    "16384 B", "plaintext in one record (RFC 8446 section 5.1)"),
	{ .name = NULL },
};
static const struct field dtls_fields[] = {
	LAYER_CHOICE("version", version, version_choices, "1.2",
	    "1.2 or 1.3 (RFC 6347, RFC 9147)"),
	LAYER_CHOICE("cipher", cipher, dtls_cipher_choices, "aes-gcm",
	    "in 1.2 aes-gcm and aes-ccm-8 add a nonce of 8 B"),
	LAYER_BYTES("connection-id-bytes", connection_id_bytes, 0, 255, "0 B",
	    "connection ID; in 1.2 also 1 B of inner type (RFC 9146)"),
	LAYER_BYTES("sequence-bytes", sequence_bytes, 1, 2, NULL,
	    "in 1.3: 2 B unless given (RFC 9147 section 4)"),
	LAYER_YES_NO("length", length, NULL,
	    "in 1.3: 2 B of length, yes unless given"),
	{ .name = NULL },
};
static const struct field quic_fields[] = {
	LAYER_BYTES("connection-id-bytes", connection_id_bytes, 0, 20, "8 B",
	    "destination connection ID"),
	LAYER_BYTES("packet-number-bytes", sequence_bytes, 1, 4, "2 B",
	    "packet number"),
	LAYER_BYTES("stream-id-bytes", stream_id_bytes, 1, 8, "2 B",
	    "stream ID: 1, 2, 4 or 8 B"),
	LAYER_BYTES("offset-bytes", offset_bytes, 0, 8, "4 B",
	    "offset in the stream: 0, 1, 2, 4 or 8 B"),
	LAYER_BYTES("length-bytes", length_bytes, 0, 8, "0 B",
	    "length of the stream frame: 0 (to the packet's end), 1, 2, 4 or "
	    "8 B"),
	{ .name = NULL },
};

static int
adjust_cbc(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	uint64_t mac;

	if (options->version != VERSION_12)
		return error_set(err, ERROR_INPUT, "cipher: found aes-cbc, "
		    "allowed in 1.3: aes-gcm, chacha20-poly1305 or aes-ccm-8");
	if (options->integrity == FIELD_UNSET)
		return error_set(err, ERROR_INPUT, "integrity: missing, "
		    "allowed with aes-cbc: hmac-sha1 or hmac-sha256");
	mac = mac_bytes[options->integrity];
	cost->head_bytes += CBC_BLOCK_BYTES;
	cost->align_bytes = CBC_BLOCK_BYTES;
	cost->trail_bytes += CBC_PADDING_BYTES;
	if (options->encrypt_then_mac == 0)
		cost->trail_bytes += mac;
	else
		cost->tail_bytes += mac;
	return 0;
}

static int
adjust_tls(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	const struct aead *aead;

	cost->record_bytes = options->record_bytes;
	if (options->cipher == CIPHER_AES_CBC)
		return adjust_cbc(options, cost, err);
	if (options->integrity != FIELD_UNSET ||
	    options->encrypt_then_mac != FIELD_UNSET)
		return error_set(err, ERROR_INPUT, "integrity and "
		    "encrypt-then-mac: allowed with aes-cbc, %s has its own",
		    tls_cipher_choices[options->cipher].name);
	aead = &aeads[options->cipher];
	if (options->version == VERSION_12)
		cost->head_bytes += aead->nonce_bytes;
	else
		cost->trail_bytes += INNER_TYPE_BYTES;
	cost->tail_bytes += aead->tag_bytes;
	return 0;
}

static int
adjust_dtls_12(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	if (options->sequence_bytes != FIELD_UNSET ||
	    options->length != FIELD_UNSET)
		return error_set(err, ERROR_INPUT, "sequence-bytes and "
		    "length: allowed in 1.3, version 1.2 has them fixed");
	/* RFC 6347 section 4.1: type 1, version 2, epoch 2, sequence 6,
	 * length 2 */
	cost->head_bytes = 13 + aeads[options->cipher].nonce_bytes;
	if (options->connection_id_bytes != 0)
		cost->trail_bytes += INNER_TYPE_BYTES;
	return 0;
}

/* RFC 9147 section 4, figure 3: the row's flags octet, then these. */
static void
adjust_dtls_13(const struct layer_options *options, struct layer_cost *cost)
{
	cost->head_bytes += options->sequence_bytes == FIELD_UNSET ? 2 :
	    options->sequence_bytes;
	if (options->length != 0)
		cost->head_bytes += 2;
	cost->trail_bytes += INNER_TYPE_BYTES;
}

static int
adjust_dtls(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	if (options->version == VERSION_13)
		adjust_dtls_13(options, cost);
	else if (adjust_dtls_12(options, cost, err) == -1)
		return -1;
	cost->head_bytes += options->connection_id_bytes;
	cost->tail_bytes += aeads[options->cipher].tag_bytes;
	return 0;
}

/* RFC 9000 section 16: lengths that a variable-length integer can have. */
static bool
is_integer_length(uint64_t bytes)
{
	return bytes == 1 || bytes == 2 || bytes == 4 || bytes == 8;
}

static int
adjust_quic(const struct layer_options *options, struct layer_cost *cost,
    struct error *err)
{
	if (!is_integer_length(options->stream_id_bytes) ||
	    (options->offset_bytes != 0 &&
	    !is_integer_length(options->offset_bytes)) ||
	    (options->length_bytes != 0 &&
	    !is_integer_length(options->length_bytes)))
		return error_set(err, ERROR_INPUT, "stream-id-bytes, "
		    "offset-bytes, length-bytes: allowed: 1 B, 2 B, 4 B or "
		    "8 B, the last two also 0 B");
	cost->head_bytes += options->connection_id_bytes +
	    options->sequence_bytes + options->stream_id_bytes +
	    options->offset_bytes + options->length_bytes;
	return 0;
}

const struct layer layer_tls = {
	.name = "tls",
	.title = "Transport Layer Security records",
	.level = LEVEL_PAYLOAD,
	.below = LAYER_NAMES("tcp"),
	/* head: type 1, version 2, length 2 */
	.cost = { .head_bytes = 5, LAYER_PLAIN },
	.adjust = adjust_tls,
	.fields = tls_fields,
	.inside = "record headers and tags",
	.formula = "carried * (record-bytes + X) / record-bytes, the average "
	    "over a long stream, whose records straddle segments; X = 22 "
	    "(1.3), 29 (1.2 aes-gcm), 21 (1.2 chacha20-poly1305), 8 less with "
	    "aes-ccm-8; 1.2 aes-cbc: 21 + padding to 16 + MAC",
	.source = "RFC 8446, 5246",
};

const struct layer layer_dtls = {
	.name = "dtls",
	.title = "Datagram Transport Layer Security, a record a datagram",
	.level = LEVEL_PAYLOAD,
	.below = LAYER_NAMES("udp"),
	.cost = { .head_bytes = 1, LAYER_PLAIN },
	.adjust = adjust_dtls,
	.fields = dtls_fields,
	.inside = "record header and tag",
	.formula = "1.2: carried + 13 + nonce 8 (chacha20-poly1305 0) + 16; "
	    "1.3: carried + 1 + sequence-bytes + 2 with length + 1 + 16; "
	    "+ connection-id-bytes; aes-ccm-8 has 8 for 16",
	.source = "RFC 6347, 9147",
};

const struct layer layer_quic = {
	.name = "quic",
	.title = "QUIC version 1, a packet with one stream frame a datagram",
	.level = LEVEL_PAYLOAD,
	.below = LAYER_NAMES("udp"),
	/* head: first octet and type of the frame; tail: tag, RFC 9001 s5.3 */
	.cost = { .head_bytes = 2, .tail_bytes = 16, LAYER_PLAIN },
	.adjust = adjust_quic,
	.fields = quic_fields,
	.inside = "packet and frame header, tag",
	.inside_with_options = "packet and frame header, tag",
	.formula = "carried + 1 + connection-id-bytes + packet-number-bytes + "
	    "1 + stream-id-bytes + offset-bytes + length-bytes + 16; its "
	    "acknowledgements are not counted",
	.source = "RFC 9000, 9001",
};
