/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * trust: does a certificate belong to the peer that was declared?
 */
#include "trust.h"

#include "clock.h"
#include "error.h"
#include "field.h"
#include "log.h"
#include "tls.h"

#include <ctype.h>
#include <stdio.h>
#include <string.h>
#include <time.h>

#include <openssl/crypto.h>
#include <openssl/x509_vfy.h>
#include <openssl/x509v3.h>

#define PIN_PREFIX "sha256:"
#define PIN_DIGITS 64
#define TRUST_FORMS "\"" PIN_PREFIX "\" and 64 hexadecimal digits, or " \
	"{ authority: FILE, name: NAME }"

bool
trust_given(const struct trust *trust)
{
	return trust->pin[0] != '\0' || trust->authority[0] != '\0';
}

static int
check_pin(const struct trust *trust, X509 *peer, struct error *err)
{
	char found[IDENTITY_DIGEST_SIZE];

	if (identity_certificate_digest(peer, found, err) == -1)
		return -1;
	if (strlen(trust->pin) == strlen(found) &&
	    CRYPTO_memcmp(trust->pin, found, strlen(found)) == 0)
		return 0;
	return error_set(err, ERROR_REFUSED,
	    "the peer's key is %s, expected %s", found, trust->pin);
}

/* A peer's name as printable text. */
static void
name_text(const X509_NAME *name, char *buf, size_t size)
{
	char raw[256];
	int length = X509_NAME_get_text_by_NID((X509_NAME *)(uintptr_t)name,
	    NID_commonName, raw, sizeof(raw));

	if (length <= 0)
		(void)X509_NAME_oneline(name, raw, sizeof(raw));
	(void)log_escape(raw, buf, size);
}

static void
time_text(const ASN1_TIME *time, char *buf, size_t size)
{
	struct tm tm;

	if (ASN1_TIME_to_tm(time, &tm) != 1 ||
	    strftime(buf, size, "%Y-%m-%dT%H:%M:%SZ", &tm) == 0)
		(void)snprintf(buf, size, "an unreadable time");
}

static int
refuse_date(X509 *certificate, int depth, bool expired, uint64_t now_utc_ns,
    struct error *err)
{
	char date[32], now[25], name[128];

	time_text(expired ? X509_get0_notAfter(certificate) :
	    X509_get0_notBefore(certificate), date, sizeof(date));
	clock_utc_text(now_utc_ns, now);
	name_text(X509_get_subject_name(certificate), name, sizeof(name));
	return error_set(err, ERROR_REFUSED, "the %s certificate '%s' %s "
	    "%s; this machine's clock says %s: is one of the clocks wrong?",
	    depth == 0 ? "peer's" : "authority's", name,
	    expired ? "expired at" : "is not valid before", date, now);
}

static int
refuse_chain(const struct trust *trust, X509_STORE_CTX *verify, X509 *peer,
    uint64_t now_utc_ns, struct error *err)
{
	int why = X509_STORE_CTX_get_error(verify);
	X509 *at = X509_STORE_CTX_get_current_cert(verify);
	char issuer[128];

	if (at != NULL && (why == X509_V_ERR_CERT_HAS_EXPIRED ||
	    why == X509_V_ERR_CERT_NOT_YET_VALID))
		return refuse_date(at, X509_STORE_CTX_get_error_depth(verify),
		    why == X509_V_ERR_CERT_HAS_EXPIRED, now_utc_ns, err);
	name_text(X509_get_issuer_name(peer), issuer, sizeof(issuer));
	return error_set(err, ERROR_REFUSED, "the peer's certificate is issued "
	    "by '%s', for which the authority '%s' does not stand: %s",
	    issuer, trust->authority, X509_verify_cert_error_string(why));
}

/* The name the peer's certificate carries, for the message alone. */
static void
carried_name(X509 *peer, char *buf, size_t size)
{
	GENERAL_NAMES *names = X509_get_ext_d2i(peer, NID_subject_alt_name,
	    NULL, NULL);
	char raw[256];
	int i;

	name_text(X509_get_subject_name(peer), buf, size);
	for (i = 0; i < sk_GENERAL_NAME_num(names); i++) {
		const GENERAL_NAME *name = sk_GENERAL_NAME_value(names, i);

		if (name->type != GEN_DNS)
			continue;
		(void)snprintf(raw, sizeof(raw), "%.*s",
		    ASN1_STRING_length(name->d.dNSName),
		    (const char *)ASN1_STRING_get0_data(name->d.dNSName));
		(void)log_escape(raw, buf, size);
		break;
	}
	GENERAL_NAMES_free(names);
}

/* The common name counts only where no DNS name is given (RFC 6125, 6.4.4).
 * No wildcards: a name stands for one program. */
static int
check_name(const struct trust *trust, X509 *peer, struct error *err)
{
	char found[128];

	if (trust->name[0] == '\0')
		return error_set(err, ERROR_REFUSED, "no name is declared that "
		    "the certificate from '%s' must carry", trust->authority);
	if (X509_check_host(peer, trust->name, 0,
	    X509_CHECK_FLAG_NO_WILDCARDS, NULL) == 1)
		return 0;
	tls_forget_errors();
	carried_name(peer, found, sizeof(found));
	return error_set(err, ERROR_REFUSED,
	    "the peer's certificate is for '%s', expected '%s'", found,
	    trust->name);
}

static int
verify_in(X509_STORE *store, const struct trust *trust, X509 *peer,
    STACK_OF(X509) *chain, uint64_t now_utc_ns, struct error *err)
{
	X509_STORE_CTX *verify = X509_STORE_CTX_new();
	X509_VERIFY_PARAM *param;
	int rc = -1;

	if (verify == NULL ||
	    X509_STORE_CTX_init(verify, store, peer, chain) != 1) {
		(void)tls_error(err, ERROR_INTERNAL, "certificate check");
		goto out;
	}
	param = X509_STORE_CTX_get0_param(verify);
	X509_VERIFY_PARAM_set_time(param, (time_t)(now_utc_ns / NS_PER_S));
	/* An organisation may hand out an intermediate as its authority. */
	(void)X509_VERIFY_PARAM_set_flags(param, X509_V_FLAG_PARTIAL_CHAIN);
	if (X509_verify_cert(verify) == 1)
		rc = check_name(trust, peer, err);
	else
		(void)refuse_chain(trust, verify, peer, now_utc_ns, err);
	tls_forget_errors();
out:
	X509_STORE_CTX_free(verify);
	return rc;
}

static int
check_authority(const struct trust *trust, X509 *peer, STACK_OF(X509) *chain,
    uint64_t now_utc_ns, struct error *err)
{
	X509_STORE *store = X509_STORE_new();
	int rc = -1;

	if (store == NULL || X509_STORE_load_file(store, trust->authority) != 1)
		(void)tls_error(err, ERROR_REFUSED,
		    "cannot read the authority's certificates in '%s'",
		    trust->authority);
	else
		rc = verify_in(store, trust, peer, chain, now_utc_ns, err);
	X509_STORE_free(store);
	return rc;
}

int
trust_check_chain(const struct trust *trust, X509 *peer, STACK_OF(X509) *chain,
    uint64_t now_utc_ns, struct error *err)
{
	if (trust->pin[0] != '\0')
		return check_pin(trust, peer, err);
	if (trust->authority[0] != '\0')
		return check_authority(trust, peer, chain, now_utc_ns, err);
	return error_set(err, ERROR_REFUSED,
	    "no identity is declared for this peer");
}

int
trust_check(const struct trust *trust, X509 *peer, uint64_t now_utc_ns,
    struct error *err)
{
	return trust_check_chain(trust, peer, NULL, now_utc_ns, err);
}

static const struct field authority_fields[] = {
	{ .name = "authority", .kind = FIELD_TEXT,
	    .offset = offsetof(struct trust, authority),
	    .size = sizeof(((struct trust *)0)->authority), .required = true,
	    .help = "PEM file of the authority's certificates" },
	{ .name = "name", .kind = FIELD_TEXT,
	    .offset = offsetof(struct trust, name),
	    .size = sizeof(((struct trust *)0)->name), .required = true,
	    .help = "DNS name (or common name) of the peer's certificate" },
	{ .name = NULL }
};

/* Digits are kept in lower case, as identity_digest writes them. */
static int
read_pin(const struct node *node, struct trust *trust, struct error *err)
{
	static const size_t prefix = sizeof(PIN_PREFIX) - 1;
	const char *digits = "";
	char escaped[128];
	size_t i;

	if (strncmp(node->text, PIN_PREFIX, prefix) == 0)
		digits = node->text + prefix;
	if (strlen(digits) != PIN_DIGITS ||
	    strspn(digits, "0123456789abcdefABCDEF") != PIN_DIGITS)
		return node_error(node, err, "'%s' is not the digest of a "
		    "public key; allowed: %s", log_escape(node->text, escaped,
		    sizeof(escaped)), TRUST_FORMS);
	(void)snprintf(trust->pin, sizeof(trust->pin), PIN_PREFIX);
	for (i = 0; i < PIN_DIGITS; i++)
		trust->pin[prefix + i] =
		    (char)tolower((unsigned char)digits[i]);
	return 0;
}

int
trust_read(const struct node *node, const struct field *field, void *base,
    struct error *err)
{
	struct trust read = { .pin = "" };
	int rc = 0;

	if (node == NULL && field->required)
		return error_set(err, ERROR_INPUT,
		    "'%s' is missing; allowed: %s", field->name, TRUST_FORMS);
	if (node != NULL && node->kind == NODE_SEQUENCE)
		return node_error(node, err, "'%s' is a list; allowed: %s",
		    field->name, TRUST_FORMS);
	if (node != NULL && node->kind == NODE_SCALAR)
		rc = read_pin(node, &read, err);
	else if (node != NULL)
		rc = fields_read(node, authority_fields, field->name, &read,
		    err);
	if (rc == 0)
		memcpy((char *)base + field->offset, &read, sizeof(read));
	return rc;
}
