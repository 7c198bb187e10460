/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * error: why a function failed, in fixed buffers, ready for one sentence.
 *
 * A fallible function returns 0 or -1 and fills a struct error that the
 * caller owns.  Callers branch on `kind` only.  Nothing is allocated, nothing
 * is printed.  Only the two programs turn an error into an exit status.
 */
#ifndef PLAFOND_ERROR_H
#define PLAFOND_ERROR_H

#include <stdarg.h>

enum error_kind {
	ERROR_NONE,
	ERROR_USAGE,		/* the command line */
	ERROR_INPUT,		/* a declaration, a record */
	ERROR_ABSENT,		/* no such file */
	ERROR_UNREACHABLE,	/* an agent cannot be reached */
	ERROR_PEER,		/* a peer broke the protocol */
	ERROR_INTERNAL,		/* our own fault, or the system's */
	ERROR_WRITE,		/* a file cannot be written */
	ERROR_READ,		/* a file cannot be read */
	ERROR_BUSY,		/* somebody else holds it */
	ERROR_REFUSED,		/* a policy or an identity says no */
	ERROR_POLICY,		/* a policy file is wrong */
	ERROR_INTERRUPTED,	/* a signal asked us to stop */
	ERROR_KINDS
};

struct error {
	enum error_kind kind;
	int sys_errno;		/* 0 where no system call was the cause */
	char where[256];	/* outermost place first */
	char cause[512];	/* found, allowed */
};

/* Fill err; both always return -1, so that a caller can return the call. */
int error_set(struct error *err, enum error_kind kind, const char *fmt, ...)
    __attribute__((format(printf, 3, 4)));
/* As error_set, with errno kept and its text appended to the cause. */
int error_errno(struct error *err, enum error_kind kind, const char *fmt, ...)
    __attribute__((format(printf, 3, 4)));

/* Put a place before `where`.  Can never push out `cause`. */
void error_wrap(struct error *err, const char *fmt, ...)
    __attribute__((format(printf, 2, 3)));

/* "where: cause", never NULL; the buffer is the caller's. */
const char *error_text(const struct error *err, char *buf, unsigned long size);

/* Exit status of the programs: design table, else sysexits. */
int error_exit_status(enum error_kind kind);

#endif
