/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "tls.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include <openssl/err.h>
#include <openssl/ssl.h>
#include <openssl/sslerr.h>

/* Reasons that a user meets, said so that he knows what to do. */
static const struct {
	int reason;
	const char *text;
} plain_words[] = {
	{ SSL_R_WRONG_VERSION_NUMBER, "it does not speak TLS" },
	{ SSL_R_HTTP_REQUEST, "it speaks HTTP, not TLS" },
	{ SSL_R_HTTPS_PROXY_REQUEST, "it speaks HTTP, not TLS" },
	{ SSL_R_PACKET_LENGTH_TOO_LONG, "it does not speak TLS" },
	{ SSL_R_RECORD_LENGTH_MISMATCH, "it does not speak TLS" },
	{ SSL_R_BAD_RECORD_TYPE, "it does not speak TLS" },
	{ SSL_R_UNSUPPORTED_PROTOCOL, "it does not speak TLS 1.3" },
	{ SSL_R_TLSV1_ALERT_PROTOCOL_VERSION, "it does not speak TLS 1.3" },
	{ SSL_R_PEER_DID_NOT_RETURN_A_CERTIFICATE,
	    "it has shown no certificate" },
	{ SSL_R_TLSV13_ALERT_CERTIFICATE_REQUIRED,
	    "it asks for a certificate and got none" },
};

const char *
tls_reason(unsigned long code, char *buf, size_t size)
{
	const char *text = ERR_reason_error_string(code);
	size_t i;

	if (ERR_GET_LIB(code) == ERR_LIB_SSL)
		for (i = 0; i < sizeof(plain_words) / sizeof(plain_words[0]);
		    i++)
			if (plain_words[i].reason == ERR_GET_REASON(code))
				text = plain_words[i].text;
	(void)snprintf(buf, size, "%s",
	    text != NULL ? text : "no reason given");
	return buf;
}

int
tls_error(struct error *err, enum error_kind kind, const char *fmt, ...)
{
	unsigned long code = ERR_get_error();
	char what[400], why[200];
	va_list ap;

	va_start(ap, fmt);
	(void)vsnprintf(what, sizeof(what), fmt, ap);
	va_end(ap);
	ERR_clear_error();
	if (code == 0)
		return error_set(err, kind, "%s", what);
	return error_set(err, kind, "%s: %s", what,
	    tls_reason(code, why, sizeof(why)));
}

void
tls_forget_errors(void)
{
	ERR_clear_error();
}
