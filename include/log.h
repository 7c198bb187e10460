/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * log: one line an event on standard error: level, event word, key=value.
 *
 * The sink and the level are the only mutable globals of the project.  Text
 * that a peer supplied goes through log_escape first.  Keys, tokens and
 * payload are never logged.
 */
#ifndef PLAFOND_LOG_H
#define PLAFOND_LOG_H

enum log_level { LOG_LEVEL_ERROR, LOG_LEVEL_WARNING, LOG_LEVEL_INFO,
	LOG_LEVEL_DEBUG };

/* What is printed; the default is LOG_LEVEL_WARNING. */
void log_set_level(enum log_level level);

void log_error(const char *event, const char *fmt, ...)
    __attribute__((format(printf, 2, 3)));
void log_warning(const char *event, const char *fmt, ...)
    __attribute__((format(printf, 2, 3)));
void log_info(const char *event, const char *fmt, ...)
    __attribute__((format(printf, 2, 3)));
void log_debug(const char *event, const char *fmt, ...)
    __attribute__((format(printf, 2, 3)));

/* Copy text to buf with quotes, backslashes and all that is not printable
 * ASCII written as \xNN; always ends in NUL; too long is cut. */
const char *log_escape(const char *text, char *buf, unsigned long size);

#endif
