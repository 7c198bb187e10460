/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * tls: OpenSSL's error queue in plain words.
 */
#ifndef PLAFOND_SHARED_TLS_H
#define PLAFOND_SHARED_TLS_H

#include <stddef.h>

#include "error.h"

/* error_set, with OpenSSL's first reason appended; empties its queue. */
int tls_error(struct error *err, enum error_kind kind, const char *fmt, ...)
    __attribute__((format(printf, 3, 4)));
/* What an error code of a handshake says about the peer. */
const char *tls_reason(unsigned long code, char *buf, size_t size);
void tls_forget_errors(void);

#endif
