/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The digest over the rows of a measurement, alike at both ends. */
#include <openssl/evp.h>
#include <stdlib.h>
#include <string.h>

#include "hex.h"
#include "wire.h"

#define SHA256_BYTES 32		/* FIPS 180-4 */

struct wire_rows_digest {
	EVP_MD_CTX *context;	/* owned */
};

struct wire_rows_digest *
wire_rows_digest_new(void)
{
	struct wire_rows_digest *digest = calloc(1, sizeof(*digest));

	if (digest == NULL)
		return NULL;
	digest->context = EVP_MD_CTX_new();
	if (digest->context == NULL ||
	    EVP_DigestInit_ex(digest->context, EVP_sha256(), NULL) != 1) {
		wire_rows_digest_free(digest);
		return NULL;
	}
	return digest;
}

void
wire_rows_digest_add(struct wire_rows_digest *digest, const json_t *message)
{
	char *text = wire_rows_text(message);

	if (text != NULL) {
		(void)EVP_DigestUpdate(digest->context, text, strlen(text));
		(void)EVP_DigestUpdate(digest->context, "\n", 1);
	}
	free(text);
}

void
wire_rows_digest_end(struct wire_rows_digest *digest,
    char out[SHA256_HEX_SIZE])
{
	unsigned char octets[SHA256_BYTES] = { 0 };

	(void)EVP_DigestFinal_ex(digest->context, octets, NULL);
	hex_text(octets, sizeof(octets), out);
}

void
wire_rows_digest_free(struct wire_rows_digest *digest)
{
	if (digest == NULL)
		return;
	EVP_MD_CTX_free(digest->context);
	free(digest);
}
