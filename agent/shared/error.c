/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "error.h"

#include <errno.h>
#include <stdio.h>
#include <string.h>

/* sysexits.h numbers, and 3 for a run that was cut short. */
static const int exit_statuses[ERROR_KINDS] = {
	[ERROR_NONE] = 0,
	[ERROR_USAGE] = 64,
	[ERROR_INPUT] = 65,
	[ERROR_ABSENT] = 66,
	[ERROR_UNREACHABLE] = 69,
	[ERROR_PEER] = 69,
	[ERROR_INTERNAL] = 70,
	[ERROR_WRITE] = 73,
	[ERROR_READ] = 74,
	[ERROR_BUSY] = 75,
	[ERROR_REFUSED] = 77,
	[ERROR_POLICY] = 78,
	[ERROR_INTERRUPTED] = 3,
};

int
error_set(struct error *err, enum error_kind kind, const char *fmt, ...)
{
	va_list ap;

	memset(err, 0, sizeof(*err));
	err->kind = kind;
	va_start(ap, fmt);
	(void)vsnprintf(err->cause, sizeof(err->cause), fmt, ap);
	va_end(ap);
	return -1;
}

int
error_errno(struct error *err, enum error_kind kind, const char *fmt, ...)
{
	int saved = errno;
	va_list ap;
	size_t used;

	memset(err, 0, sizeof(*err));
	err->kind = kind;
	err->sys_errno = saved;
	va_start(ap, fmt);
	(void)vsnprintf(err->cause, sizeof(err->cause), fmt, ap);
	va_end(ap);
	used = strlen(err->cause);
	(void)snprintf(err->cause + used, sizeof(err->cause) - used, ": %s",
	    strerror(saved));
	return -1;
}

void
error_wrap(struct error *err, const char *fmt, ...)
{
	char old[sizeof(err->where)];
	va_list ap;
	size_t used;

	memcpy(old, err->where, sizeof(old));
	va_start(ap, fmt);
	(void)vsnprintf(err->where, sizeof(err->where), fmt, ap);
	va_end(ap);
	used = strlen(err->where);
	if (old[0] != '\0')
		(void)snprintf(err->where + used, sizeof(err->where) - used,
		    ": %s", old);
}

const char *
error_text(const struct error *err, char *buf, unsigned long size)
{
	(void)snprintf(buf, size, "%s%s%s", err->where,
	    err->where[0] != '\0' ? ": " : "", err->cause);
	return buf;
}

int
error_exit_status(enum error_kind kind)
{
	return kind < ERROR_KINDS ? exit_statuses[kind] : 70;
}
