/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * trust: the check of identity.h with the certificates that the peer sent
 * above its own, for authorities that sign through an intermediate.
 */
#ifndef PLAFOND_SHARED_TRUST_H
#define PLAFOND_SHARED_TRUST_H

#include <openssl/x509.h>

#include "identity.h"

/* As trust_check; chain is borrowed, may be NULL, and is not trusted. */
int trust_check_chain(const struct trust *trust, X509 *peer,
    STACK_OF(X509) *chain, uint64_t now_utc_ns, struct error *err);

#endif
