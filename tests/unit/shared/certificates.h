/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * certificates: what an organisation's authority would hand out, made with
 * OpenSSL's own calls for the tests.
 */
#ifndef PLAFOND_TESTS_CERTIFICATES_H
#define PLAFOND_TESTS_CERTIFICATES_H

#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <sys/stat.h>

#include <openssl/evp.h>
#include <openssl/pem.h>
#include <openssl/x509.h>
#include <openssl/x509v3.h>

struct holder {
	EVP_PKEY *key;
	X509 *certificate;
};

struct request {
	const char *common_name;
	const char *dns_name;		/* NULL: no subjectAltName */
	const char *from, *until;	/* "20260101000000Z"; NULL: wide */
	bool authority;
};

static inline void
extend(X509 *certificate, X509 *issuer, int nid, const char *value)
{
	X509V3_CTX context;
	X509_EXTENSION *extension;

	X509V3_set_ctx(&context, issuer, certificate, NULL, NULL, 0);
	extension = X509V3_EXT_conf_nid(NULL, &context, nid, value);
	if (extension == NULL ||
	    X509_add_ext(certificate, extension, -1) != 1)
		abort();
	X509_EXTENSION_free(extension);
}

/* issuer NULL: signs itself. */
static inline struct holder
issue(const struct request *request, const struct holder *issuer)
{
	static long serial;
	struct holder made = { EVP_EC_gen("P-256"), X509_new() };
	X509_NAME *name = X509_get_subject_name(made.certificate);
	char text[128];

	if (issuer == NULL)
		issuer = &made;
	(void)X509_set_version(made.certificate, X509_VERSION_3);
	(void)ASN1_INTEGER_set(X509_get_serialNumber(made.certificate),
	    ++serial);
	(void)X509_NAME_add_entry_by_txt(name, "CN", MBSTRING_UTF8,
	    (const unsigned char *)request->common_name, -1, -1, 0);
	(void)X509_set_issuer_name(made.certificate,
	    X509_get_subject_name(issuer->certificate));
	(void)ASN1_TIME_set_string_X509(
	    X509_getm_notBefore(made.certificate),
	    request->from != NULL ? request->from : "20200101000000Z");
	(void)ASN1_TIME_set_string_X509(
	    X509_getm_notAfter(made.certificate),
	    request->until != NULL ? request->until : "20990101000000Z");
	(void)X509_set_pubkey(made.certificate, made.key);
	extend(made.certificate, issuer->certificate, NID_basic_constraints,
	    request->authority ? "critical,CA:TRUE" : "critical,CA:FALSE");
	if (request->dns_name != NULL) {
		(void)snprintf(text, sizeof(text), "DNS:%s",
		    request->dns_name);
		extend(made.certificate, issuer->certificate,
		    NID_subject_alt_name, text);
	}
	if (X509_sign(made.certificate, issuer->key, EVP_sha256()) <= 0)
		abort();
	return made;
}

static inline void
holder_free(struct holder *holder)
{
	EVP_PKEY_free(holder->key);
	X509_free(holder->certificate);
}

/* The certificate, and where it is not NULL another one behind it. */
static inline void
write_certificates(const char *path, X509 *first, X509 *second)
{
	FILE *f = fopen(path, "w");

	if (f == NULL || PEM_write_X509(f, first) != 1 ||
	    (second != NULL && PEM_write_X509(f, second) != 1) ||
	    fclose(f) != 0)
		abort();
}

static inline void
write_key(const char *path, EVP_PKEY *key, const char *pass_phrase)
{
	FILE *f = fopen(path, "w");

	if (f == NULL || PEM_write_PKCS8PrivateKey(f, key,
	    pass_phrase != NULL ? EVP_aes_128_cbc() : NULL, NULL, 0, NULL,
	    (void *)(uintptr_t)pass_phrase) != 1 || fclose(f) != 0 ||
	    chmod(path, 0600) != 0)
		abort();
}

#endif
