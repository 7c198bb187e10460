/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * address: "host:port" in text, and a listening socket on one.
 */
#include "address.h"

#include "channel.h"
#include "error.h"
#include "log.h"

#include <errno.h>
#include <netdb.h>
#include <netinet/in.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

#define LISTEN_BACKLOG 128
#define ADDRESS_FORMS "HOST:PORT, [IPv6]:PORT"

static int
refuse(const char *text, const char *what, struct error *err)
{
	char escaped[128];

	return error_set(err, ERROR_INPUT, "'%s': %s; allowed: %s",
	    log_escape(text, escaped, sizeof(escaped)), what, ADDRESS_FORMS);
}

/* Decimal digits up to 65535; -1 where it is anything else. */
static long
port_of(const char *digits)
{
	size_t length = strlen(digits);
	long number;

	if (length == 0 || length > 5 ||
	    strspn(digits, "0123456789") != length)
		return -1;
	number = strtol(digits, NULL, 10);
	return number <= UINT16_MAX ? number : -1;
}

/* Where the host lies in the text, and the digits behind it or NULL. */
static int
find_parts(const char *text, const char **start, size_t *length,
    const char **digits, struct error *err)
{
	const char *end;

	if (text[0] == '[') {
		*start = text + 1;
		end = strchr(text, ']');
		if (end == NULL || (end[1] != ':' && end[1] != '\0'))
			return refuse(text, "the bracket does not close before "
			    "the port", err);
		*digits = end[1] == ':' ? end + 2 : NULL;
	} else {
		*start = text;
		end = strchr(text, ':');
		if (end != NULL && strchr(end + 1, ':') != NULL)
			return refuse(text, "an IPv6 address stands in "
			    "brackets", err);
		*digits = end != NULL ? end + 1 : NULL;
		if (end == NULL)
			end = text + strlen(text);
	}
	*length = (size_t)(end - *start);
	return 0;
}

static bool
host_is_plain(const char *host, size_t length, bool bracketed)
{
	size_t i;

	for (i = 0; i < length; i++) {
		char c = host[i];

		if (c <= ' ' || c > '~' || strchr("[]/@?#\\\"'", c) != NULL)
			return false;
	}
	return length > 0 && (!bracketed || memchr(host, ':', length) != NULL);
}

/* *has_port tells a stated port from the default. */
static int
split(const char *text, uint16_t default_port, char *host, size_t host_size,
    uint16_t *port, bool *has_port, struct error *err)
{
	const char *start = text, *digits = NULL;
	size_t length = 0;
	long number = default_port;

	if (find_parts(text, &start, &length, &digits, err) == -1)
		return -1;
	if (!host_is_plain(start, length, text[0] == '['))
		return refuse(text, length == 0 ? "the host is missing" :
		    "this is no host", err);
	if (length >= host_size)
		return refuse(text, "the host is too long", err);
	if (digits != NULL)
		number = port_of(digits);
	if (number == -1)
		return refuse(text, "a port is a number from 0 to 65535", err);
	memcpy(host, start, length);
	host[length] = '\0';
	*port = (uint16_t)number;
	*has_port = digits != NULL;
	return 0;
}

int
address_split(const char *text, uint16_t default_port, char *host,
    size_t host_size, uint16_t *port, struct error *err)
{
	bool has_port;

	return split(text, default_port, host, host_size, port, &has_port, err);
}

void
address_text(const struct sockaddr *address, socklen_t size, bool with_port,
    char *buf, size_t buf_size)
{
	static const char mapped[] = "::ffff:";	/* RFC 4291, 2.5.5.2 */
	char host[NI_MAXHOST], port[NI_MAXSERV];
	const char *text = host;

	if (getnameinfo(address, size, host, sizeof(host), port, sizeof(port),
	    NI_NUMERICHOST | NI_NUMERICSERV) != 0) {
		(void)snprintf(buf, buf_size, "unknown address");
		return;
	}
	if (strncmp(host, mapped, sizeof(mapped) - 1) == 0 &&
	    strchr(host, '.') != NULL)
		text = host + sizeof(mapped) - 1;
	if (!with_port)
		(void)snprintf(buf, buf_size, "%s", text);
	else if (strchr(text, ':') != NULL)
		(void)snprintf(buf, buf_size, "[%s]:%s", text, port);
	else
		(void)snprintf(buf, buf_size, "%s:%s", text, port);
}

static enum error_kind
kind_of_bind(int number)
{
	if (number == EADDRINUSE)
		return ERROR_BUSY;
	if (number == EACCES)
		return ERROR_REFUSED;
	return number == EADDRNOTAVAIL ? ERROR_INPUT : ERROR_INTERNAL;
}

static int
bind_and_listen(int fd, const struct addrinfo *at, const char *address,
    uint16_t *port, struct error *err)
{
	static const int yes = 1, no = 0;
	struct sockaddr_in6 bound;	/* holds an IPv4 address too */
	socklen_t size = sizeof(bound);

	(void)setsockopt(fd, SOL_SOCKET, SO_REUSEADDR, &yes, sizeof(yes));
	/* "[::]" takes IPv4 as well, whatever the system's default is. */
	if (at->ai_family == AF_INET6)
		(void)setsockopt(fd, IPPROTO_IPV6, IPV6_V6ONLY, &no,
		    sizeof(no));
	if (bind(fd, at->ai_addr, at->ai_addrlen) == -1 ||
	    listen(fd, LISTEN_BACKLOG) == -1)
		return error_errno(err, kind_of_bind(errno),
		    "cannot listen on %s", address);
	memset(&bound, 0, sizeof(bound));
	if (getsockname(fd, (struct sockaddr *)&bound, &size) == -1)
		return error_errno(err, ERROR_INTERNAL, "getsockname of %s",
		    address);
	/* sin_port and sin6_port lie at the same place. */
	if (port != NULL)
		*port = ntohs(bound.sin6_port);
	return 0;
}

int
listen_on(const char *address, uint16_t *port, struct error *err)
{
	struct addrinfo hints = { .ai_socktype = SOCK_STREAM,
	    .ai_flags = AI_NUMERICHOST | AI_NUMERICSERV | AI_PASSIVE };
	struct addrinfo *found = NULL;
	char host[128], digits[8], any[24];
	uint16_t wanted = 0;
	bool has_port = false;
	int fd;

	if (split(address, 0, host, sizeof(host), &wanted, &has_port,
	    err) == -1)
		return -1;
	if (!has_port)
		return refuse(address, "the port is missing", err);
	(void)snprintf(digits, sizeof(digits), "%u", (unsigned)wanted);
	if (getaddrinfo(host, digits, &hints, &found) != 0)
		return refuse(address, "listening needs a numeric address",
		    err);
	fd = socket(found->ai_family, SOCK_STREAM | SOCK_CLOEXEC |
	    SOCK_NONBLOCK, 0);
	if (fd == -1)
		(void)error_errno(err, ERROR_INTERNAL, "socket for %s",
		    address);
	else if (bind_and_listen(fd, found, address, port, err) == -1) {
		(void)close(fd);
		fd = -1;
	}
	freeaddrinfo(found);
	/* "any address" on a machine without IPv6 is any of IPv4 */
	if (fd == -1 && strcmp(host, "::") == 0 &&
	    (err->sys_errno == EAFNOSUPPORT ||
	    err->sys_errno == EADDRNOTAVAIL)) {
		(void)snprintf(any, sizeof(any), "0.0.0.0:%u",
		    (unsigned)wanted);
		return listen_on(any, port, err);
	}
	return fd;
}
