/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * identity: the program's own key and certificate.
 *
 * identity.pem holds the key (PKCS #8, RFC 5958) and the certificate
 * (RFC 5280).  It is written to a file beside it and then linked into place:
 * link(2) refuses a name that exists, so that of two first starts one wins
 * and both read the same file.
 */
#include "identity.h"

#include "error.h"
#include "hex.h"
#include "tls.h"

#include <errno.h>
#include <fcntl.h>
#include <limits.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include <openssl/bn.h>
#include <openssl/evp.h>
#include <openssl/pem.h>
#include <openssl/ssl.h>
#include <openssl/x509.h>

#define IDENTITY_FILE "identity.pem"
#define IDENTITY_FILE_BYTES_MAX (64 * 1024)
#define IDENTITY_CHAIN_MAX 8		/* certificates above our own */
#define SERIAL_BITS 128
#define COMMON_NAME_MAX 64		/* RFC 5280, ub-common-name */

/* Dates do not count under a pin; these never get in the way.  The end is
 * RFC 5280, 4.1.2.5: "no well-defined expiration date". */
#define VALID_FROM "20200101000000Z"
#define VALID_UNTIL "99991231235959Z"

struct identity {
	EVP_PKEY *key;			/* owned */
	X509 *certificate;		/* owned */
	STACK_OF(X509) *chain;		/* owned; issuers, may be empty */
	char digest[IDENTITY_DIGEST_SIZE];
	char path[PATH_MAX];		/* of the certificate */
};

int
identity_certificate_digest(X509 *certificate, char out[IDENTITY_DIGEST_SIZE],
    struct error *err)
{
	static const char prefix[] = "sha256:";
	unsigned char hash[EVP_MAX_MD_SIZE], *der = NULL;
	unsigned hash_size = 0;
	int size = i2d_X509_PUBKEY(X509_get_X509_PUBKEY(certificate), &der);

	if (size <= 0 || EVP_Digest(der, (size_t)size, hash, &hash_size,
	    EVP_sha256(), NULL) != 1) {
		OPENSSL_free(der);
		return tls_error(err, ERROR_INTERNAL,
		    "digest of a certificate's key");
	}
	OPENSSL_free(der);
	memcpy(out, prefix, sizeof(prefix) - 1);
	hex_text(hash, hash_size, out + sizeof(prefix) - 1);
	return 0;
}

/* The file as a memory BIO (owned).  A private file must be a regular one
 * that only its owner can open. */
static int
open_file(const char *path, bool private, BIO **out, struct error *err)
{
	/* O_NONBLOCK: opening a FIFO must not wait for its other end. */
	int fd = open(path, O_RDONLY | O_CLOEXEC | O_NONBLOCK);
	char bytes[IDENTITY_FILE_BYTES_MAX];
	struct stat st;
	ssize_t size;

	if (fd == -1)
		return error_errno(err, errno == ENOENT ? ERROR_ABSENT :
		    ERROR_READ, "cannot open '%s'", path);
	if (fstat(fd, &st) == -1 || !S_ISREG(st.st_mode)) {
		(void)close(fd);
		return error_set(err, ERROR_REFUSED,
		    "'%s' is not a regular file", path);
	}
	if (private && (st.st_mode & 077) != 0) {
		(void)close(fd);
		return error_set(err, ERROR_REFUSED, "'%s' holds a private key "
		    "and has mode %04o, so others can read it; make it "
		    "private: chmod 600 '%s'", path,
		    (unsigned)st.st_mode & 07777, path);
	}
	size = read(fd, bytes, sizeof(bytes));
	(void)close(fd);
	if (size == -1)
		return error_errno(err, ERROR_READ, "cannot read '%s'", path);
	if (size == (ssize_t)sizeof(bytes))
		return error_set(err, ERROR_INPUT,
		    "'%s' is larger than %d bytes", path,
		    IDENTITY_FILE_BYTES_MAX);
	*out = BIO_new(BIO_s_mem());
	if (*out != NULL && size > 0)
		(void)BIO_write(*out, bytes, (int)size);
	OPENSSL_cleanse(bytes, sizeof(bytes));
	return *out != NULL ? 0 :
	    error_set(err, ERROR_INTERNAL, "out of memory");
}

/* Nobody is there to type a pass phrase. */
static int
no_pass_phrase(char *buf, int size, int writing, void *arg)
{
	(void)buf;
	(void)size;
	(void)writing;
	(void)arg;
	return -1;
}

static int
read_key(BIO *pem, const char *path, struct identity *identity,
    struct error *err)
{
	identity->key = PEM_read_bio_PrivateKey(pem, NULL, no_pass_phrase,
	    NULL);
	if (identity->key == NULL)
		return tls_error(err, ERROR_INPUT, "'%s' holds no private key "
		    "that can be read (PEM, without a pass phrase)", path);
	if (EVP_PKEY_is_a(identity->key, "EC") != 1 &&
	    EVP_PKEY_is_a(identity->key, "RSA") != 1)
		return error_set(err, ERROR_INPUT,
		    "the key of '%s' is %s; allowed: EC, RSA", path,
		    EVP_PKEY_get0_type_name(identity->key));
	return 0;
}

static int
read_certificates(BIO *pem, const char *path, struct identity *identity,
    struct error *err)
{
	X509 *issuer;

	identity->certificate = PEM_read_bio_X509(pem, NULL, no_pass_phrase,
	    NULL);
	if (identity->certificate == NULL)
		return tls_error(err, ERROR_INPUT,
		    "'%s' holds no certificate that can be read (PEM)", path);
	identity->chain = sk_X509_new_null();
	while (identity->chain != NULL &&
	    sk_X509_num(identity->chain) < IDENTITY_CHAIN_MAX) {
		issuer = PEM_read_bio_X509(pem, NULL, no_pass_phrase, NULL);
		if (issuer == NULL)
			break;
		if (sk_X509_push(identity->chain, issuer) == 0)
			X509_free(issuer);
	}
	tls_forget_errors();		/* the end of the file is one */
	(void)snprintf(identity->path, sizeof(identity->path), "%s", path);
	return identity->chain != NULL ? 0 :
	    error_set(err, ERROR_INTERNAL, "out of memory");
}

static int
check_pair(struct identity *identity, const char *key_path, struct error *err)
{
	if (X509_check_private_key(identity->certificate,
	    identity->key) != 1) {
		tls_forget_errors();
		return error_set(err, ERROR_INPUT, "the key of '%s' does not "
		    "belong to the certificate of '%s'", key_path,
		    identity->path);
	}
	return identity_certificate_digest(identity->certificate,
	    identity->digest, err);
}

int
identity_open_files(const char *certificate_path, const char *key_path,
    struct identity **out, struct error *err)
{
	struct identity *identity = calloc(1, sizeof(*identity));
	BIO *key = NULL, *certificate = NULL;
	int rc = -1;

	if (identity == NULL)
		return error_set(err, ERROR_INTERNAL, "out of memory");
	if (open_file(key_path, true, &key, err) == -1 ||
	    open_file(certificate_path, false, &certificate, err) == -1 ||
	    read_key(key, key_path, identity, err) == -1 ||
	    read_certificates(certificate, certificate_path, identity,
	    err) == -1 || check_pair(identity, key_path, err) == -1)
		goto out;
	*out = identity;
	identity = NULL;
	rc = 0;
out:
	BIO_free(key);
	BIO_free(certificate);
	identity_free(identity);
	return rc;
}

void
identity_free(struct identity *identity)
{
	if (identity == NULL)
		return;
	EVP_PKEY_free(identity->key);
	X509_free(identity->certificate);
	sk_X509_pop_free(identity->chain, X509_free);
	free(identity);
}

const char *
identity_digest(const struct identity *identity)
{
	return identity->digest;
}

const char *
identity_path(const struct identity *identity)
{
	return identity->path;
}

static bool
set_serial(X509 *certificate)
{
	BIGNUM *number = BN_new();
	bool done = number != NULL && BN_rand(number, SERIAL_BITS,
	    BN_RAND_TOP_ANY, BN_RAND_BOTTOM_ANY) == 1 &&
	    BN_to_ASN1_INTEGER(number,
	    X509_get_serialNumber(certificate)) != NULL;

	BN_free(number);
	return done;
}

/* Subject and issuer are the same name: the certificate signs itself. */
static bool
set_name(X509 *certificate, const char *common_name)
{
	size_t length = strnlen(common_name, COMMON_NAME_MAX);
	X509_NAME *name = X509_get_subject_name(certificate);

	return X509_NAME_add_entry_by_NID(name, NID_commonName, MBSTRING_UTF8,
	    (const unsigned char *)common_name, (int)length, -1, 0) == 1 &&
	    X509_set_issuer_name(certificate, name) == 1;
}

static X509 *
make_certificate(EVP_PKEY *key, const char *common_name)
{
	X509 *certificate = X509_new();

	if (certificate == NULL)
		return NULL;
	if (X509_set_version(certificate, X509_VERSION_3) == 1 &&
	    set_serial(certificate) && set_name(certificate, common_name) &&
	    ASN1_TIME_set_string_X509(X509_getm_notBefore(certificate),
	    VALID_FROM) == 1 &&
	    ASN1_TIME_set_string_X509(X509_getm_notAfter(certificate),
	    VALID_UNTIL) == 1 && X509_set_pubkey(certificate, key) == 1 &&
	    X509_sign(certificate, key, EVP_sha256()) > 0)
		return certificate;
	X509_free(certificate);
	return NULL;
}

/* Key and certificate as PEM in a memory BIO (owned). */
static int
make_pem(const char *common_name, BIO **out, struct error *err)
{
	EVP_PKEY *key = EVP_EC_gen("P-256");
	X509 *certificate = NULL;
	BIO *pem = BIO_new(BIO_s_secmem());
	int rc = -1;

	if (key != NULL)
		certificate = make_certificate(key, common_name);
	if (certificate == NULL || pem == NULL ||
	    PEM_write_bio_PKCS8PrivateKey(pem, key, NULL, NULL, 0, NULL,
	    NULL) != 1 || PEM_write_bio_X509(pem, certificate) != 1) {
		(void)tls_error(err, ERROR_INTERNAL,
		    "cannot make an identity for '%s'", common_name);
		goto out;
	}
	*out = pem;
	pem = NULL;
	rc = 0;
out:
	BIO_free(pem);
	X509_free(certificate);
	EVP_PKEY_free(key);
	return rc;
}

static int
make_folder(const char *folder, struct error *err)
{
	char path[PATH_MAX];
	char *slash = path;
	int length = snprintf(path, sizeof(path), "%s", folder);

	if (length < 0 || (size_t)length >= sizeof(path))
		return error_set(err, ERROR_WRITE, "'%.64s...' is too long "
		    "for a folder", folder);
	while ((slash = strchr(slash + 1, '/')) != NULL) {
		*slash = '\0';
		(void)mkdir(path, 0700);	/* the last one tells */
		*slash = '/';
	}
	if (mkdir(path, 0700) == -1 && errno != EEXIST)
		return error_errno(err, ERROR_WRITE,
		    "cannot make the folder '%s'", folder);
	return 0;
}

static int
write_all(int fd, BIO *pem)
{
	char *bytes;
	long size = BIO_get_mem_data(pem, &bytes);

	while (size > 0) {
		ssize_t written = write(fd, bytes, (size_t)size);

		if (written == -1 && errno != EINTR)
			return -1;
		if (written > 0) {
			bytes += written;
			size -= written;
		}
	}
	return fsync(fd);
}

/* The new name itself must survive a power cut too. */
static void
sync_folder(const char *folder)
{
	int fd = open(folder, O_RDONLY | O_DIRECTORY | O_CLOEXEC);

	if (fd == -1)
		return;
	(void)fsync(fd);
	(void)close(fd);
}

/* 0 also where somebody else's first start came before ours. */
static int
write_file(const char *folder, const char *path, BIO *pem, struct error *err)
{
	char draft[PATH_MAX + 32];
	int fd, rc = -1;

	(void)snprintf(draft, sizeof(draft), "%s/.identity.XXXXXX", folder);
	fd = mkostemp(draft, O_CLOEXEC);	/* mode 0600 */
	if (fd == -1)
		return error_errno(err, ERROR_WRITE, "cannot write into '%s'",
		    folder);
	if (write_all(fd, pem) == -1)
		(void)error_errno(err, ERROR_WRITE, "cannot write '%s'", draft);
	else if (link(draft, path) == -1 && errno != EEXIST)
		(void)error_errno(err, ERROR_WRITE, "cannot make '%s'", path);
	else
		rc = 0;
	(void)close(fd);
	(void)unlink(draft);
	sync_folder(folder);
	return rc;
}

int
identity_open(const char *folder, const char *common_name,
    struct identity **out, struct error *err)
{
	char path[PATH_MAX];
	struct stat st;
	BIO *pem = NULL;
	int length = snprintf(path, sizeof(path), "%s/%s", folder,
	    IDENTITY_FILE);
	int rc;

	if (length < 0 || (size_t)length >= sizeof(path))
		return error_set(err, ERROR_WRITE, "'%.64s...' is too long "
		    "for a folder", folder);
	if (lstat(path, &st) == 0 && !S_ISREG(st.st_mode))
		return error_set(err, ERROR_REFUSED,
		    "'%s' is not a regular file", path);
	if (identity_open_files(path, path, out, err) == 0)
		return 0;
	if (err->kind != ERROR_ABSENT)
		return -1;
	if (make_folder(folder, err) == -1 ||
	    make_pem(common_name, &pem, err) == -1)
		return -1;
	rc = write_file(folder, path, pem, err);
	BIO_free(pem);
	return rc == -1 ? -1 : identity_open_files(path, path, out, err);
}

/* Trust is a matter of channel_check_trust, once the peer has proved that it
 * holds the key of its certificate. */
static int
accept_any_chain(X509_STORE_CTX *chain, void *arg)
{
	(void)chain;
	(void)arg;
	return 1;
}

SSL_CTX *
identity_tls_context(const struct identity *identity, struct error *err)
{
	SSL_CTX *tls = SSL_CTX_new(TLS_method());

	if (tls == NULL ||
	    SSL_CTX_set_min_proto_version(tls, TLS1_3_VERSION) != 1 ||
	    SSL_CTX_set_max_proto_version(tls, TLS1_3_VERSION) != 1 ||
	    SSL_CTX_use_certificate(tls, identity->certificate) != 1 ||
	    SSL_CTX_use_PrivateKey(tls, identity->key) != 1 ||
	    SSL_CTX_set1_chain(tls, identity->chain) != 1 ||
	    SSL_CTX_set_num_tickets(tls, 0) != 1) {
		SSL_CTX_free(tls);
		(void)tls_error(err, ERROR_INTERNAL,
		    "cannot use the identity '%s' for TLS",
		    identity->path);
		return NULL;
	}
	SSL_CTX_set_verify(tls, SSL_VERIFY_PEER |
	    SSL_VERIFY_FAIL_IF_NO_PEER_CERT, NULL);
	SSL_CTX_set_cert_verify_callback(tls, accept_any_chain, NULL);
	SSL_CTX_set_session_cache_mode(tls, SSL_SESS_CACHE_OFF);
	SSL_CTX_set_options(tls, SSL_OP_NO_RENEGOTIATION | SSL_OP_NO_TICKET |
	    SSL_OP_NO_COMPRESSION);
	return tls;
}
