/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "channel.h"
#include "error.h"

#include <errno.h>
#include <fcntl.h>
#include <netinet/in.h>
#include <stdio.h>
#include <string.h>
#include <sys/socket.h>
#include <unistd.h>

#define DEFAULT_PORT 61741

static const struct {
	const char *text;
	const char *host;		/* NULL: refused */
	uint16_t port;
	const char *source;
} addresses[] = {
	{ "198.18.0.1:40112", "198.18.0.1", 40112, "RFC 3986, 3.2" },
	{ "198.18.0.1", "198.18.0.1", DEFAULT_PORT, "the default" },
	{ "[2001:2::1]:862", "2001:2::1", 862, "RFC 3986, 3.2.2" },
	{ "[2001:2::1]", "2001:2::1", DEFAULT_PORT, "the default" },
	{ "[fe80::1%eth1]:1", "fe80::1%eth1", 1, "RFC 4007, 11" },
	{ "quay.example:0", "quay.example", 0, "port 0: any" },
	{ "quay:65535", "quay", 65535, "the largest port" },
	{ "quay:65536", NULL, 0, "one too large" },
	{ "quay:", NULL, 0, "no digits" },
	{ "quay:+1", NULL, 0, "a sign" },
	{ "quay:1x", NULL, 0, "text behind" },
	{ "quay: 1", NULL, 0, "a space" },
	{ "quay:000001", NULL, 0, "six digits" },
	{ "quay:99999999999999999999", NULL, 0, "overflow" },
	{ "", NULL, 0, "empty" },
	{ ":61741", NULL, 0, "no host" },
	{ "[]:61741", NULL, 0, "no host" },
	{ "[quay]:1", NULL, 0, "brackets are for IPv6" },
	{ "2001:2::1", NULL, 0, "which part is the port?" },
	{ "2001:2::1:61741", NULL, 0, "which part is the port?" },
	{ "[2001:2::1", NULL, 0, "open bracket" },
	{ "[2001:2::1]61741", NULL, 0, "no colon" },
	{ "a b:1", NULL, 0, "a space in the host" },
	{ "a\nb:1", NULL, 0, "a newline in the host" },
	{ "quay/x:1", NULL, 0, "a path" },
	{ "user@quay:1", NULL, 0, "a user" },
};

static void
an_address_is_split_at_its_port(void **state)
{
	size_t i;

	(void)state;
	for (i = 0; i < sizeof(addresses) / sizeof(addresses[0]); i++) {
		char host[64] = "untouched";
		struct error err = { 0 };
		uint16_t port = 7;
		int rc = address_split(addresses[i].text, DEFAULT_PORT, host,
		    sizeof(host), &port, &err);

		if (addresses[i].host == NULL ?
		    rc != -1 || err.kind != ERROR_INPUT || port != 7 ||
		    strcmp(host, "untouched") != 0 ||
		    strstr(err.cause, "allowed:") == NULL :
		    rc != 0 || port != addresses[i].port ||
		    strcmp(host, addresses[i].host) != 0)
			fail_msg("%s (%s): %d %s %u %s", addresses[i].text,
			    addresses[i].source, rc, host, (unsigned)port,
			    err.cause);
	}
}

static void
a_host_that_does_not_fit_is_refused(void **state)
{
	struct error err;
	char host[5];
	uint16_t port;

	(void)state;
	assert_int_equal(address_split("quay:1", 0, host, sizeof(host), &port,
	    &err), 0);
	assert_int_equal(address_split("quays:1", 0, host, sizeof(host),
	    &port, &err), -1);
	assert_non_null(strstr(err.cause, "too long"));
}

static void
a_listener_tells_the_port_it_got(void **state)
{
	struct sockaddr_in to = { .sin_family = AF_INET };
	struct error err;
	uint16_t port = 0, again;
	char address[32];
	int fd, client;

	(void)state;
	fd = listen_on("127.0.0.1:0", &port, &err);
	assert_int_not_equal(fd, -1);
	assert_int_not_equal(port, 0);
	assert_true((fcntl(fd, F_GETFD) & FD_CLOEXEC) != 0);
	assert_true((fcntl(fd, F_GETFL) & O_NONBLOCK) != 0);
	to.sin_port = htons(port);
	to.sin_addr.s_addr = htonl(INADDR_LOOPBACK);
	client = socket(AF_INET, SOCK_STREAM, 0);
	assert_int_equal(connect(client, (struct sockaddr *)&to, sizeof(to)),
	    0);
	(void)snprintf(address, sizeof(address), "127.0.0.1:%u",
	    (unsigned)port);
	assert_int_equal(listen_on(address, &again, &err), -1);
	assert_int_equal(err.kind, ERROR_BUSY);
	assert_int_equal(err.sys_errno, EADDRINUSE);
	assert_non_null(strstr(err.cause, address));
	(void)close(client);
	(void)close(fd);
	/* The closed connection's last state is in nobody's way. */
	fd = listen_on(address, &again, &err);
	assert_int_not_equal(fd, -1);
	assert_int_equal(again, port);
	(void)close(fd);
}

static void
every_ipv6_address_takes_ipv4_as_well(void **state)
{
	struct sockaddr_in to = { .sin_family = AF_INET };
	struct error err;
	uint16_t port;
	int client, fd = listen_on("[::]:0", &port, &err);

	(void)state;
	if (fd == -1 && err.sys_errno == EAFNOSUPPORT)
		skip();
	assert_int_not_equal(fd, -1);
	to.sin_port = htons(port);
	to.sin_addr.s_addr = htonl(INADDR_LOOPBACK);
	client = socket(AF_INET, SOCK_STREAM, 0);
	assert_int_equal(connect(client, (struct sockaddr *)&to, sizeof(to)),
	    0);
	(void)close(client);
	(void)close(fd);
}

static void
listening_needs_a_numeric_address_of_this_machine(void **state)
{
	static const struct {
		const char *text;
		const char *why;
	} wrong[] = {
		{ "127.0.0.1", "the port is missing" },
		{ "quay.example:61741", "numeric" },
		{ "127.0.0.1:x", "allowed:" },
		{ "198.18.255.254:0", "cannot listen on" },
	};
	struct error err;
	uint16_t port;
	size_t i;

	(void)state;
	for (i = 0; i < sizeof(wrong) / sizeof(wrong[0]); i++) {
		assert_int_equal(listen_on(wrong[i].text, &port, &err), -1);
		assert_int_equal(err.kind, ERROR_INPUT);
		if (strstr(err.cause, wrong[i].why) == NULL)
			fail_msg("%s: %s", wrong[i].text, err.cause);
	}
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(an_address_is_split_at_its_port),
		cmocka_unit_test(a_host_that_does_not_fit_is_refused),
		cmocka_unit_test(a_listener_tells_the_port_it_got),
		cmocka_unit_test(every_ipv6_address_takes_ipv4_as_well),
		cmocka_unit_test(
		    listening_needs_a_numeric_address_of_this_machine),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
