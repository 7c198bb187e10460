/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * tunnel_vectors: what tunnels and encryption leave of a packet, and records
 * of a stream; by hand or published, as octets_vectors.
 */
#ifndef PLAFOND_TEST_TUNNEL_VECTORS_H
#define PLAFOND_TEST_TUNNEL_VECTORS_H

#include "octets_vectors.h"

#define V4 "ethernet, ipv4, "
#define V6 "ethernet, ipv6, "
#define IN_V4 ", ipv4, udp"		/* takes 28 of the inner MTU */
#define IN_V6 ", ipv6, udp"		/* takes 48 of it */

/* The inner MTU is the payload and what the UDP inside takes. */
static const struct octets_vector tunnel_vectors[] = {
	{ V4 "gre" IN_V4, 1500, 1476 - 28, 1538, 1500, "RFC 2784 s2", 0, 0, 0,
	  0, false },
	{ V4 "{ gre: { key: yes } }" IN_V4, 1500, 1472 - 28, 1538, 1500,
	  "RFC 2890 s2", 0, 0, 0, 0, false },
	{ V4 "{ gre: { checksum: yes, key: yes, sequence: yes } }" IN_V4,
	  1499, 1463 - 28, 1537, 1499, "RFC 2784 s2, RFC 2890 s2: 16", 0, 0,
	  0, 0, false },
	{ V4 "{ gre: { key: yes } }" IN_V4, 1499, 1471 - 28, 1537, 1499,
	  "RFC 2890 s2: 8", 0, 0, 0, 0, false },
	{ V4 "gre, ethernet" IN_V4, 1500, 1462 - 28, 1538, 1500,
	  "RFC 2784 s2 and a header of 14", 0, 0, 0, 0, false },
	{ V4 "gre, mpls" IN_V4, 1499, 1471 - 28, 1537, 1499, "RFC 4023 s3.2",
	  0, 0, 0, 0, false },
	{ V4 "ipv4, udp", 1500, 1480 - 28, 1538, 1500, "RFC 2003", 0, 0, 0, 0,
	  false },
	{ V4 "ipv6, udp", 1500, 1480 - 48, 1538, 1500, "RFC 4213", 0, 0, 0, 0,
	  false },
	{ V6 "ipv4, udp", 1500, 1460 - 28, 1538, 1500, "RFC 2473", 0, 0, 0, 0,
	  false },
	{ V6 "ipv6, udp", 1500, 1460 - 48, 1538, 1500, "RFC 2473", 0, 0, 0, 0,
	  false },
	{ "ethernet, { ipv6: { extension-bytes: 8 B } }, ipv6, udp", 1500,
	  1452 - 48, 1538, 1500, "RFC 2473 s4.1.1", 0, 0, 0, 0, false },
	{ V4 "udp, vxlan, ethernet" IN_V4, 1500, 1450 - 28, 1538, 1500,
	  "RFC 7348 s5: 50", 0, 0, 0, 0, false },
	{ V4 "udp, vxlan, ethernet" IN_V4, 1499, 1449 - 28, 1537, 1499,
	  "RFC 7348 s5: 50", 0, 0, 0, 0, false },
	{ V6 "udp, vxlan, ethernet" IN_V4, 1500, 1430 - 28, 1538, 1500,
	  "RFC 7348 s5: 70", 0, 0, 0, 0, false },
	{ V4 "udp, geneve, ethernet" IN_V4, 1500, 1450 - 28, 1538, 1500,
	  "RFC 8926 s3.4: 8", 0, 0, 0, 0, false },
	{ V4 "udp, geneve, ethernet" IN_V4, 1499, 1449 - 28, 1537, 1499,
	  "RFC 8926 s3.4: 8", 0, 0, 0, 0, false },
	{ V4 "udp, { geneve: { options-bytes: 252 B } }, ethernet" IN_V4,
	  1499, 1197 - 28, 1537, 1499, "RFC 8926 s3.4: 260", 0, 0, 0, 0,
	  false },
	{ V4 "udp, l2tp, ppp" IN_V4, 1500, 1462 - 28, 1538, 1500,
	  "RFC 2661 s3.1: 6, and 4 of PPP", 0, 0, 0, 0, false },
	{ V4 "udp, l2tp, ppp" IN_V4, 1499, 1461 - 28, 1537, 1499,
	  "RFC 2661 s3.1: 6, and 4 of PPP", 0, 0, 0, 0, false },
	{ V4 "udp, { l2tp: { length: yes, sequence: yes } }, { ppp: { "
	  "address-control: no } }" IN_V4, 1499, 1457 - 28, 1537, 1499,
	  "RFC 2661 s3.1: 12, and 2 of PPP", 0, 0, 0, 0, false },
	{ V4 "udp, { l2tp: { offset-bytes: 2 B } }, ppp" IN_V4, 1499,
	  1457 - 28, 1537, 1499, "RFC 2661 s3.1: 6 + 2 + 2", 0, 0, 0, 0,
	  false },
	{ V4 "udp, { l2tp: { offset-bytes: 0 B } }, ppp" IN_V4, 1499,
	  1459 - 28, 1537, 1499, "RFC 2661 s3.1: 6 + 2", 0, 0, 0, 0, false },
	{ V4 "l2tpv3, ethernet" IN_V4, 1499, 1457 - 28, 1537, 1499,
	  "RFC 3931 s4.1.1, s4.6: 4 + 4 + 14", 0, 0, 0, 0, false },
	{ V4 "{ l2tpv3: { cookie-bytes: 8 B, sublayer: no } }, ethernet" IN_V4,
	  1499, 1453 - 28, 1537, 1499, "RFC 3931 s4.1.1: 4 + 8 + 14", 0, 0, 0,
	  0, false },
	{ V4 "udp, l2tpv3, ethernet" IN_V4, 1499, 1445 - 28, 1537, 1499,
	  "RFC 3931 s4.1.2: 8 + 8 + 4 + 14", 0, 0, 0, 0, false },
	{ V4 "udp, { l2tpv3: { cookie-bytes: 4 B, sublayer: no } }, ethernet"
	  IN_V4, 1499, 1445 - 28, 1537, 1499,
	  "RFC 3931 s4.1.2: 8 + 8 + 4 + 14", 0, 0, 0, 0, false },

	/* payload over the wire, TCP with timestamps */
	{ V4 "ipv4, tcp", 1500, 1428, 1538, 1500, "RFC 2003", 0, 0, 0, 0,
	  false },
	{ V4 "gre, ipv4, tcp", 1500, 1424, 1538, 1500, "RFC 2784", 0, 0, 0, 0,
	  false },
	{ V4 "{ gre: { key: yes } }, ipv4, tcp", 1500, 1420, 1538, 1500,
	  "RFC 2890", 0, 0, 0, 0, false },
	{ V4 "udp, vxlan, ethernet, ipv4, tcp", 1500, 1398, 1538, 1500,
	  "RFC 7348", 0, 0, 0, 0, false },
	{ V4 "udp, vxlan, ethernet, { ipv4: { mtu: 1500 B } }, tcp", 1550,
	  1448, 1588, 1550, "RFC 7348 over a raised MTU", 0, 0, 0, 0, false },
	{ V4 "udp, vxlan, ethernet, { ipv6: { mtu: 1500 B } }, tcp", 1600,
	  1428, 1588, 1550, "RFC 7348 over a raised MTU", 0, 0, 0, 0, false },
	{ V4 "udp, wireguard, ipv4, tcp", 1500, 1368, 1518, 1480,
	  "Linux wireguard/send.c: 1420 + 60", 0, 0, 0, 0, false },
	{ V4 "udp, { wireguard: { mtu: 1440 B } }, ipv4, tcp", 1500, 1388,
	  1538, 1500, "Linux wireguard/send.c: 1440 + 60", 0, 0, 0, 0, false },
	{ V4 "esp, ipv4, tcp", 1500, 1394, 1538, 1500, "RFC 4106", 0, 0, 0, 0,
	  false },
	{ V4 "udp, esp, ipv4, tcp", 1500, 1386, 1538, 1500, "RFC 3948", 0, 0,
	  0, 0, false },
	{ V4 "{ esp: { cipher: aes-cbc, integrity: hmac-sha1-96 } }, ipv4, "
	  "tcp", 1500, 1386, 1534, 1496, "RFC 3602, RFC 2404", 0, 0, 0, 0,
	  false },
	{ V4 "udp, { esp: { cipher: aes-cbc, integrity: hmac-sha1-96 } }, "
	  "ipv4, tcp", 1500, 1370, 1526, 1488, "RFC 3602, RFC 2404", 0, 0, 0,
	  0, false },
	{ V4 "{ esp: { cipher: aes-cbc, integrity: hmac-sha2-256-128 } }, "
	  "ipv4, tcp", 1500, 1386, 1538, 1500, "RFC 3602, RFC 4868", 0, 0, 0,
	  0, false },
	{ V4 "udp, { esp: { cipher: aes-cbc, integrity: hmac-sha2-256-128 } }"
	  ", ipv4, tcp", 1500, 1370, 1530, 1492, "RFC 3602, RFC 4868", 0, 0,
	  0, 0, false },
	/* transport mode: 1500 - 20 - 8 - 8 - 16 leaves 1448, 2 of trailer */
	{ V4 "esp, tcp", 1500, 1446 - 32, 1538, 1500, "RFC 4303 s3.1.1", 0, 0,
	  0, 0, false },
	{ V4 "esp, gre, ipv4, udp", 1500, 1446 - 24 - 8, 1538, 1500,
	  "RFC 4303 s3.1.1, RFC 2784", 0, 0, 0, 0, false },
};

#define WIREGUARD(below, inner) \
	below "udp, wireguard, ipv4, { udp: { datagram-bytes: " inner " B } }"

/* 60 or 80 around the packet, padded to 16 but not beyond 1420. */
static const struct octets_vector wireguard_vectors[] = {
	{ WIREGUARD(V4, "12"), 1500, 12, 146, 108, "send.c: 40 -> 48", 0, 0,
	  0, 0, false },
	{ WIREGUARD(V6, "12"), 1500, 12, 166, 128, "send.c: 40 -> 48", 0, 0,
	  0, 0, false },
	{ WIREGUARD(V4, "24"), 1500, 24, 162, 124, "send.c: 52 -> 64", 0, 0,
	  0, 0, false },
	{ WIREGUARD(V6, "24"), 1500, 24, 182, 144, "send.c: 52 -> 64", 0, 0,
	  0, 0, false },
	{ WIREGUARD(V4, "1372"), 1500, 1372, 1506, 1468, "send.c: 1400 -> "
	  "1408", 0, 0, 0, 0, false },
	{ WIREGUARD(V6, "1372"), 1500, 1372, 1526, 1488, "send.c: 1400 -> "
	  "1408", 0, 0, 0, 0, false },
	{ WIREGUARD(V4, "1377"), 1500, 1377, 1506, 1468, "send.c: 1405 -> "
	  "1408", 0, 0, 0, 0, false },
	{ WIREGUARD(V6, "1377"), 1500, 1377, 1526, 1488, "send.c: 1405 -> "
	  "1408", 0, 0, 0, 0, false },
	{ WIREGUARD(V4, "1380"), 1500, 1380, 1506, 1468, "send.c: 1408", 0, 0,
	  0, 0, false },
	{ WIREGUARD(V6, "1380"), 1500, 1380, 1526, 1488, "send.c: 1408", 0, 0,
	  0, 0, false },
	{ WIREGUARD(V4, "1381"), 1500, 1381, 1518, 1480, "send.c: 1409, at "
	  "most 1420", 0, 0, 0, 0, false },
	{ WIREGUARD(V4, "1392"), 1500, 1392, 1518, 1480, "send.c: 1420, no "
	  "padding", 0, 0, 0, 0, false },
	{ WIREGUARD(V6, "1392"), 1500, 1392, 1538, 1500, "send.c: 1420, no "
	  "padding", 0, 0, 0, 0, false },
	{ V4 "udp, { wireguard: { mtu: 1412 B } }, ipv4, udp", 1500, 1384,
	  1510, 1472, "send.c: 1412, no padding", 0, 0, 0, 0, false },
};

#define ESP_CBC(mac) "{ esp: { cipher: aes-cbc, integrity: " mac " } }"
#define ESP_NULL(mac) "{ esp: { cipher: \"null\", integrity: " mac " } }"
#define ESP(cipher) "{ esp: { cipher: " cipher " } }"
#define SHA1 "hmac-sha1-96"
#define SHA256 "hmac-sha2-256-128"
#define SHA384 "hmac-sha2-384-192"
#define SHA512 "hmac-sha2-512-256"

/* The largest packet inside each transform, outer IP of 1500 octets; and the
 * octets outside where they are published. */
#define LARGEST(esp, plain, plain_out, nat, nat_out, v6, v6_out, nat6,	\
	nat6_out, source)						\
	{ V4 esp IN_V4, 1500, (plain) - 28, (plain_out) + 38, plain_out, \
	  source, 0, 0, 0, 0, false },					\
	{ V4 "udp, " esp IN_V4, 1500, (nat) - 28, (nat_out) + 38, nat_out, \
	  source ", RFC 3948", 0, 0, 0, 0, false },			\
	{ V6 esp IN_V4, 1500, (v6) - 28, (v6_out) + 38, v6_out, source,	\
	  0, 0, 0, 0, false },						\
	{ V6 "udp, " esp IN_V4, 1500, (nat6) - 28, (nat6_out) + 38,	\
	  nat6_out, source ", RFC 3948", 0, 0, 0, 0, false }
#define INNER(below, esp, datagram, inner, outer)			\
	{ below esp ", ipv4, { udp: { datagram-bytes: " datagram " B } }", \
	  1500, (inner) - 28, (outer) + 38, outer,			\
	  "Scapy with python-cryptography: octets of a real ESP", 0, 0, 0, 0, \
	  false }

static const struct octets_vector esp_vectors[] = {
	LARGEST("esp", 1446, 1500, 1438, 1500, 1426, 1500, 1418, 1500,
	    "RFC 4106"),
	LARGEST(ESP("chacha20-poly1305"), 1446, 1500, 1438, 1500, 1426, 1500,
	    1418, 1500, "RFC 7634"),
	LARGEST(ESP("aes-gcm-12"), 1450, 1500, 1442, 1500, 1430, 1500, 1422,
	    1500, "RFC 4106 s6"),
	LARGEST(ESP("aes-gcm-8"), 1454, 1500, 1446, 1500, 1434, 1500, 1426,
	    1500, "RFC 4106 s6"),
	LARGEST(ESP_CBC(SHA1), 1438, 1496, 1422, 1488, 1422, 1500, 1406, 1492,
	    "RFC 3602, RFC 2404"),
	LARGEST(ESP_CBC(SHA256), 1438, 1500, 1422, 1492, 1406, 1488, 1406,
	    1496, "RFC 3602, RFC 4868"),
	LARGEST(ESP_CBC(SHA512), 1422, 1500, 1406, 1492, 1390, 1488, 1390,
	    1496, "RFC 3602, RFC 4868"),
	LARGEST(ESP_NULL(SHA1), 1458, 1500, 1450, 1500, 1438, 1500, 1430,
	    1500, "RFC 2410, RFC 2404"),
	/* by hand: 1500 - 20 - 24 - 24 = 1432, 89 blocks, 2 of trailer */
	LARGEST(ESP_CBC(SHA384), 1422, 1492, 1422, 1500, 1406, 1496, 1390,
	    1488, "RFC 3602, RFC 4868"),
	INNER(V4, "esp", "12", 40, 96),
	INNER(V4, "esp", "1372", 1400, 1456),
	INNER(V4, "udp, esp", "12", 40, 104),
	INNER(V4, "udp, esp", "1372", 1400, 1464),
	INNER(V4, ESP_CBC(SHA1), "12", 40, 104),
	INNER(V4, ESP_CBC(SHA1), "1372", 1400, 1464),
	INNER(V4, "udp, " ESP_CBC(SHA256), "12", 40, 116),
	INNER(V4, "udp, " ESP_CBC(SHA256), "1372", 1400, 1476),
	/* both sides of a block: 1438 + 2 is full, 1439 + 2 needs one more */
	{ V4 ESP_CBC(SHA1) ", ipv4, { udp: { datagram-bytes: 1411 B } }",
	  1520, 1411, 1550, 1512, "RFC 3602: 1441 in 91 blocks", 0, 0, 0, 0,
	  false },
	{ V4 ESP("aes-gcm-12") ", ipv4, { udp: { datagram-bytes: 1411 B } }",
	  1520, 1411, 1530, 1492, "RFC 4106: 1441 in 361 words", 0, 0, 0, 0,
	  false },
	{ V6 "esp" IN_V6, 1500, 1426 - 48, 1538, 1500, "RFC 4106", 0, 0, 0, 0,
	  false },
};

/* A record or a packet in each datagram. */
static const struct octets_vector datagram_vectors[] = {
	{ V4 "udp, dtls", 1499, 1471 - 37, 1537, 1499,
	  "RFC 6347 s4.1, RFC 5288: 13 + 8 + 16", 0, 0, 0, 0, false },
	{ V4 "udp, { dtls: { cipher: chacha20-poly1305 } }", 1499, 1471 - 29,
	  1537, 1499, "RFC 6347, RFC 7905: 13 + 16", 0, 0, 0, 0, false },
	{ V4 "udp, { dtls: { cipher: aes-ccm-8 } }", 1499, 1471 - 29, 1537,
	  1499, "RFC 6347, RFC 6655: 13 + 8 + 8", 0, 0, 0, 0, false },
	{ V4 "udp, { dtls: { connection-id-bytes: 8 B } }", 1499, 1471 - 46,
	  1537, 1499, "RFC 9146 s4: 13 + 8 + 8 + 1 + 16", 0, 0, 0, 0, false },
	{ V4 "udp, { dtls: { version: 1.3 } }", 1499, 1471 - 22, 1537, 1499,
	  "RFC 9147 s4: 1 + 2 + 2 + 1 + 16", 0, 0, 0, 0, false },
	{ V4 "udp, { dtls: { version: 1.3, sequence-bytes: 1 B, length: no } "
	  "}", 1499, 1471 - 19, 1537, 1499, "RFC 9147 s4: 1 + 1 + 1 + 16", 0,
	  0, 0, 0, false },
	{ V4 "udp, { dtls: { version: 1.3, cipher: aes-ccm-8, length: yes, "
	  "connection-id-bytes: 4 B } }", 1499, 1471 - 18, 1537, 1499,
	  "RFC 9147 s4, RFC 6655: 1 + 4 + 2 + 2 + 1 + 8", 0, 0, 0, 0, false },
	{ V4 "udp, quic", 1500, 1438, 1538, 1500,
	  "RFC 9000 s17.3.1, s19.8: 1472 - 11 - 16 - 7", 0, 0, 0, 0, false },
	{ V4 "udp, quic", 1499, 1437, 1537, 1499,
	  "RFC 9000 s17.3.1, s19.8: 1471 - 11 - 16 - 7", 0, 0, 0, 0, false },
	{ V4 "udp, { quic: { offset-bytes: 0 B } }", 1499, 1471 - 30, 1537,
	  1499, "RFC 9000 s17.3.1, s19.8: 1 + 8 + 2, 1 + 2, 16", 0, 0, 0, 0,
	  false },
	{ V4 "udp, { quic: { connection-id-bytes: 0 B, packet-number-bytes: "
	  "4 B, stream-id-bytes: 1 B, offset-bytes: 8 B, length-bytes: 2 B "
	  "} }", 1499, 1471 - 33, 1537, 1499,
	  "RFC 9000 s17.3.1, s19.8: 1 + 0 + 4, 1 + 1 + 8 + 2, 16", 0, 0, 0, 0,
	  false },
};

/* Octets that one TLS record adds to its content. */
struct record_vector {
	const char *options;
	uint64_t record_bytes, added_bytes;
	const char *source;
};
#define TLS_CBC "version: 1.2, cipher: aes-cbc, integrity: "
#define THEN_ENCRYPT ", encrypt-then-mac: no, "
static const struct record_vector record_vectors[] = {
	{ "", 16384, 22, "RFC 8446 s5.2: 5 + 1 + 16" },
	{ "", 4096, 22, "RFC 8446 s5.2" },
	{ "", 1448, 22, "RFC 8446 s5.2, OpenSSL 3.0" },
	{ "", 1400, 22, "RFC 8446 s5.2" },
	{ "", 1, 22, "RFC 8446 s5.2, OpenSSL 3.0" },
	{ "version: 1.3, cipher: chacha20-poly1305, ", 16384, 22,
	  "RFC 8446 s5.2: 5 + 1 + 16" },
	{ "cipher: aes-ccm-8, ", 16384, 14, "RFC 6655: 5 + 1 + 8" },
	{ "version: 1.2, ", 16384, 29, "RFC 5288: 5 + 8 + 16" },
	{ "version: 1.2, cipher: aes-gcm, ", 1448, 29, "RFC 5288: 5 + 8 + 16" },
	{ "version: 1.2, cipher: chacha20-poly1305, ", 16384, 21,
	  "RFC 7905 s2: 5 + 0 + 16" },
	{ "version: 1.2, cipher: aes-ccm-8, ", 16384, 21,
	  "RFC 6655: 5 + 8 + 8" },
	{ TLS_CBC "hmac-sha1, ", 16384, 57, "RFC 7366, OpenSSL 3.0" },
	{ TLS_CBC "hmac-sha256, ", 16384, 69, "RFC 7366, OpenSSL 3.0" },
	{ TLS_CBC "hmac-sha1, encrypt-then-mac: yes, ", 1448, 49,
	  "RFC 7366, OpenSSL 3.0" },
	{ TLS_CBC "hmac-sha256, ", 1448, 61, "RFC 7366, OpenSSL 3.0" },
	/* the octet of padding length is all the padding */
	{ TLS_CBC "hmac-sha1, ", 16383, 42, "RFC 7366: 5 + 16 + 1 + 20" },
	{ TLS_CBC "hmac-sha256, ", 16383, 54, "RFC 7366: 5 + 16 + 1 + 32" },
	{ TLS_CBC "hmac-sha1" THEN_ENCRYPT, 16384, 53,
	  "RFC 5246 s6.2.3.2: 5 + 16 + 32" },
	{ TLS_CBC "hmac-sha1" THEN_ENCRYPT, 16363, 42,
	  "RFC 5246 s6.2.3.2: 5 + 16 + 21" },
	{ TLS_CBC "hmac-sha1" THEN_ENCRYPT, 16364, 57,
	  "RFC 5246 s6.2.3.2: 5 + 16 + 36" },
	{ TLS_CBC "hmac-sha256" THEN_ENCRYPT, 16351, 54,
	  "RFC 5246 s6.2.3.2: 5 + 16 + 33" },
	{ TLS_CBC "hmac-sha256" THEN_ENCRYPT, 16352, 69,
	  "RFC 5246 s6.2.3.2: 5 + 16 + 48" },
};

/* An acknowledgement, on the line. */
static const struct {
	const char *layers;
	uint64_t line;
	const char *source;
} ack_vectors[] = {
	{ V4 TCP_PLAIN, 84, "W. R. Stevens, TCP/IP Illustrated 1, ch. 24.8" },
	{ V4 "tcp", 90, "RFC 7323: 52 in a frame of 70" },
	{ "aal5, ppp, ipv4, tcp", 106, "RFC 2364: 62 octets in 2 cells" },
	{ "{ wlan: { qos: no, encryption: none } }, ipv4, " TCP_PLAIN, 76,
	  "M. Gast, When is 54 not equal to 54?, 2003" },
	{ V4 "udp", 0, "RFC 768: none" },
};

#endif
