/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "log.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>

static enum log_level threshold = LOG_LEVEL_WARNING;

static const char *const level_names[] = {
	[LOG_LEVEL_ERROR] = "error",
	[LOG_LEVEL_WARNING] = "warning",
	[LOG_LEVEL_INFO] = "info",
	[LOG_LEVEL_DEBUG] = "debug",
};

void
log_set_level(enum log_level level)
{
	threshold = level;
}

__attribute__((format(printf, 3, 0)))
static void
write_line(enum log_level level, const char *event, const char *fmt,
    va_list ap)
{
	char line[1024];
	size_t used;

	if (level > threshold)
		return;
	(void)snprintf(line, sizeof(line), "%s %s ", level_names[level], event);
	used = strlen(line);
	(void)vsnprintf(line + used, sizeof(line) - used, fmt, ap);
	(void)fprintf(stderr, "%s\n", line);
}

#define LOG_FUNCTION(name, level)			\
	void						\
	name(const char *event, const char *fmt, ...)	\
	{						\
		va_list ap;				\
							\
		va_start(ap, fmt);			\
		write_line(level, event, fmt, ap);	\
		va_end(ap);				\
	}

LOG_FUNCTION(log_error, LOG_LEVEL_ERROR)
LOG_FUNCTION(log_warning, LOG_LEVEL_WARNING)
LOG_FUNCTION(log_info, LOG_LEVEL_INFO)
LOG_FUNCTION(log_debug, LOG_LEVEL_DEBUG)

const char *
log_escape(const char *text, char *buf, unsigned long size)
{
	unsigned long used = 0;

	for (; *text != '\0' && used + 5 <= size; text++) {
		unsigned char c = (unsigned char)*text;

		if (c >= 0x20 && c < 0x7f && c != '"' && c != '\\')
			buf[used++] = (char)c;
		else
			used += (unsigned long)snprintf(buf + used,
			    size - used, "\\x%02x", c);
	}
	buf[used] = '\0';
	return buf;
}
