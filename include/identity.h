/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * identity: who a program is, and whom it trusts.
 *
 * Every program owns an ECDSA P-256 key and a self-signed certificate, made at
 * first start.  Trust is the pinned SHA-256 digest of a public key
 * (SubjectPublicKeyInfo, DER), or an authority's certificate file with the name
 * that the certificate must carry.  With a pin the key alone counts and dates
 * are ignored; with an authority dates are checked and a wrong clock is named.
 */
#ifndef PLAFOND_IDENTITY_H
#define PLAFOND_IDENTITY_H

#include <stdbool.h>
#include <stdint.h>

struct error;
struct node;
struct field;
struct ssl_ctx_st;
struct x509_st;

#define IDENTITY_DIGEST_SIZE 72		/* "sha256:" + 64 hex digits + NUL */

struct identity;			/* key and certificate */

/* Load identity.pem from `folder` (made with mode 0700 where missing), or make
 * a key and a certificate whose subject is `common_name` and write them there
 * (0600, whole or not at all).  Returns owned. */
int identity_open(const char *folder, const char *common_name,
    struct identity **out, struct error *err);
/* From two PEM files that an organisation's authority has made. */
int identity_open_files(const char *certificate_path, const char *key_path,
    struct identity **out, struct error *err);
void identity_free(struct identity *identity);
/* "sha256:<64 hex>" of the public key; borrowed. */
const char *identity_digest(const struct identity *identity);
const char *identity_path(const struct identity *identity);

struct trust {
	char pin[IDENTITY_DIGEST_SIZE];	/* "" where an authority is used */
	char authority[256];		/* PEM file of CA certificates, or "" */
	char name[128];		/* DNS name (or CN) the peer must have */
};

bool trust_given(const struct trust *trust);
/* Does the peer's certificate satisfy this trust at civil time now_utc_ns?
 * -1 (ERROR_REFUSED): the cause says what was found and what was expected; an
 * expired or not yet valid certificate names the clock of this machine. */
int trust_check(const struct trust *trust, struct x509_st *peer,
    uint64_t now_utc_ns, struct error *err);

/* CUSTOM reader of a field table: "sha256:..." or
 * { authority: FILE, name: NAME }; fills a struct trust at field->offset.
 * Absent leaves it empty, or is an error where field->required. */
int trust_read(const struct node *node, const struct field *field, void *base,
    struct error *err);

/* Digest of any certificate's public key. */
int identity_certificate_digest(struct x509_st *certificate,
    char out[IDENTITY_DIGEST_SIZE], struct error *err);

/* TLS 1.3 only, peer certificate required, chain judged by trust_check after
 * the handshake, no session tickets.  Returns owned (SSL_CTX_free), for either
 * role. */
struct ssl_ctx_st *identity_tls_context(const struct identity *identity,
    struct error *err);

#endif
