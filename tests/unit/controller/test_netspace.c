/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a namespace has, by what iproute2 says inside. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "netspace_fixture.h"

#include <arpa/inet.h>
#include <jansson.h>
#include <signal.h>
#include <stdlib.h>
#include <string.h>
#include <sys/socket.h>
#include <sys/wait.h>

#define PORT 4444

static const char *
find_ip(void)
{
	static const char *const places[] = { "/usr/sbin/ip", "/sbin/ip",
		"/usr/bin/ip", "/bin/ip" };

	for (size_t i = 0; i < sizeof(places) / sizeof(places[0]); i++)
		if (access(places[i], X_OK) == 0)
			return places[i];
	(void)fprintf(stderr, "SKIPPED: iproute2 is not installed\n");
	skip();
	return NULL;
}

/* What `ip -j WORDS` says inside; owned. */
static json_t *
ask_ip(struct netspace *netspace, enum netspace_side side, char *version,
    char *object)
{
	char text[16384];
	json_t *said;
	int out;
	pid_t pid = START(netspace, side, &out, (char *)(uintptr_t)find_ip(),
	    version, "-j", "-d", object, "show");

	hear(out, false, text, sizeof(text));
	(void)close(out);
	assert_int_equal(finish(netspace, pid), 0);
	said = json_loads(text, 0, NULL);
	assert_non_null(said);
	return said;
}

/* The member of this row as a text, "" where there is none. */
static const char *
text_of(const json_t *row, const char *member)
{
	const char *text = json_string_value(json_object_get(row, member));

	return text == NULL ? "" : text;
}

static bool
has_flag(const json_t *link, const char *flag)
{
	const json_t *flags = json_object_get(link, "flags");
	bool found = false;

	for (size_t i = 0; i < json_array_size(flags); i++)
		found = found || strcmp(json_string_value(
		    json_array_get(flags, i)), flag) == 0;
	return found;
}

/* --- packets ----------------------------------------------------------- */

/* RFC 1071, over what has been summed so far. */
static uint32_t
sum_octets(const unsigned char *at, size_t bytes, uint32_t sum)
{
	for (size_t i = 0; i < bytes; i++)
		sum += (uint32_t)at[i] << (i % 2 == 0 ? 8 : 0);
	return sum;
}

static void
put_checksum(unsigned char *at, uint32_t sum)
{
	while (sum > 0xffff)
		sum = (sum & 0xffff) + (sum >> 16);
	at[0] = (unsigned char)(~sum >> 8);
	at[1] = (unsigned char)~sum;
}

/* RFC 768 over RFC 791 or RFC 8200: a datagram of eight octets; its bytes. */
static size_t
build_datagram(int version, const char *from, const char *to,
    unsigned char *packet)
{
	int family = version == 4 ? AF_INET : AF_INET6;
	size_t head = version == 4 ? 20 : 40, address = version == 4 ? 4 : 16;
	unsigned char *addresses = packet + (version == 4 ? 12 : 8);
	unsigned char *udp = packet + head;

	memset(packet, 0, head + 16);
	packet[0] = version == 4 ? 0x45 : 0x60;
	packet[version == 4 ? 3 : 5] = version == 4 ? 36 : 16;
	packet[version == 4 ? 8 : 7] = 64;	/* TTL, hop limit */
	packet[version == 4 ? 9 : 6] = IPPROTO_UDP;
	assert_int_equal(inet_pton(family, from, addresses), 1);
	assert_int_equal(inet_pton(family, to, addresses + address), 1);
	if (version == 4)
		put_checksum(packet + 10, sum_octets(packet, 20, 0));
	udp[0] = udp[2] = PORT >> 8;
	udp[1] = udp[3] = PORT & 0xff;
	udp[5] = 16;
	memcpy(udp + 8, "mooring\n", 8);
	put_checksum(udp + 6, sum_octets(udp, 16, sum_octets(addresses,
	    2 * address, 16 + IPPROTO_UDP)));
	return head + 16;
}

/* Inside, as a program: send one datagram back to where it came from. */
static int
echo_once(const char *version)
{
	struct sockaddr_in6 six = { .sin6_family = AF_INET6,
		.sin6_port = htons(PORT) };
	struct sockaddr_in four = { .sin_family = AF_INET,
		.sin_port = htons(PORT) };
	bool is_four = strcmp(version, "4") == 0;
	struct sockaddr_storage from;
	socklen_t size = sizeof(from);
	char text[64];
	int fd = socket(is_four ? AF_INET : AF_INET6,
	    SOCK_DGRAM | SOCK_CLOEXEC, 0);
	ssize_t got;

	if (bind(fd, is_four ? (struct sockaddr *)&four :
	    (struct sockaddr *)&six, is_four ? sizeof(four) : sizeof(six)) ==
	    -1 || write(STDOUT_FILENO, "bound\n", 6) != 6)
		return 1;
	got = recvfrom(fd, text, sizeof(text), 0, (struct sockaddr *)&from,
	    &size);
	if (got <= 0 || write(STDOUT_FILENO, text, (size_t)got) != got ||
	    sendto(fd, text, (size_t)got, 0, (struct sockaddr *)&from,
	    size) != got)
		return 1;
	return 0;
}

static void
exchange(struct netspace *netspace, int version)
{
	enum netspace_side side = version == 4 ? NETSPACE_A : NETSPACE_B;
	const struct netspace_end *own = &ends[side], *other = &ends[1 - side];
	struct pollfd tun = { .fd = netspace_tun(netspace, side),
		.events = POLLIN };
	unsigned char sent[80], wanted[80], got[2000];
	char text[64];
	int out;
	pid_t pid = START(netspace, side, &out, "/proc/self/exe", "echo",
	    version == 4 ? "4" : "6");
	size_t bytes = build_datagram(version, version == 4 ? other->ipv4 :
	    other->ipv6, version == 4 ? own->ipv4 : own->ipv6, sent);

	hear(out, true, text, sizeof(text));
	assert_string_equal(text, "bound\n");
	assert_int_equal(write(tun.fd, sent, bytes), bytes);
	hear(out, true, text, sizeof(text));
	assert_string_equal(text, "mooring\n");
	(void)close(out);
	assert_int_equal(poll(&tun, 1, LONG_MS), 1);
	assert_int_equal(read(tun.fd, got, sizeof(got)), bytes);
	(void)build_datagram(version, version == 4 ? own->ipv4 : own->ipv6,
	    version == 4 ? other->ipv4 : other->ipv6, wanted);
	/* addresses, ports, length and payload; the rest is the kernel's */
	assert_memory_equal(got + (version == 4 ? 12 : 8),
	    wanted + (version == 4 ? 12 : 8), version == 4 ? 14 : 38);
	assert_memory_equal(got + bytes - 8, wanted + bytes - 8, 8);
	assert_int_equal(finish(netspace, pid), 0);
}

/* --- tests ------------------------------------------------------------- */

static void
what_no_namespace_may_have_is_refused(void **state)
{
	static const struct netspace_end wrong[] = {
		{ "quay0", "198.20.0.1", NULL, 1500, 0 },
		{ "quay0", "198.17.255.255", NULL, 1500, 0 },
		{ "quay0", "quay", NULL, 1500, 0 },
		{ "quay0", "198.18.0.1", "2001:db8::1", 1500, 0 },
		{ "quay0", "198.18.0.1", "2001:2:1::1", 1500, 0 },
		{ "quay0", NULL, NULL, 1500, 0 },
		{ "quay0", "198.18.0.1", "2001:2::1", 1279, 0 },
		{ "quay0", "198.18.0.1", NULL, 67, 0 },
		{ "quay0", "198.18.0.1", NULL, 65536, 0 },
		{ "quay0", NULL, "2001:2::1", 1500, 0 },
		{ "quay0", "198.19.255.2", "2001:2::1", 1500, 0 },
		{ "quay0", "198.18.0.1", "2001:2::ffff:2", 1500, 0 },
		{ "", "198.18.0.1", "2001:2::1", 1500, 0 },
		{ "lo", "198.18.0.1", "2001:2::1", 1500, 0 },
		{ "quay%d", "198.18.0.1", "2001:2::1", 1500, 0 },
		{ "quay/0", "198.18.0.1", "2001:2::1", 1500, 0 },
		{ "a-name-of-16-ch.", "198.18.0.1", "2001:2::1", 1500, 0 },
	};
	struct netspace_end both[NETSPACE_SIDES] = { ends[0], ends[1] };
	struct netspace *netspace = NULL;
	struct error err;

	(void)state;
	for (size_t i = 0; i < sizeof(wrong) / sizeof(wrong[0]); i++) {
		both[0] = wrong[i];
		err.kind = ERROR_NONE;
		assert_int_equal(netspace_open(both, &netspace, &err), -1);
		assert_int_equal(err.kind, ERROR_INPUT);
		assert_null(netspace);
	}
}

static void
addresses_and_routes_are_those_asked_for(void **state)
{
	struct netspace *netspace = open_or_fail();
	const struct netspace_end *own, *other;
	char *version;
	json_t *said, *row;
	const char *to;
	size_t defaults, peers;

	(void)state;
	for (int side = 0; side < NETSPACE_SIDES * 2; side++) {
		own = &ends[side / 2];
		other = &ends[1 - side / 2];
		version = side % 2 == 0 ? "-4" : "-6";
		said = ask_ip(netspace, (enum netspace_side)(side / 2),
		    version, "address");
		assert_int_equal(json_array_size(said), 2);
		row = json_array_get(json_object_get(json_array_get(said, 1),
		    "addr_info"), 0);
		assert_int_equal(json_array_size(json_object_get(
		    json_array_get(said, 1), "addr_info")), 1);
		assert_string_equal(text_of(row, "local"),
		    side % 2 == 0 ? own->ipv4 : own->ipv6);
		assert_null(json_object_get(row, "tentative"));
		json_decref(said);
		said = ask_ip(netspace, (enum netspace_side)(side / 2),
		    version, "route");
		defaults = peers = 0;
		for (size_t i = 0; i < json_array_size(said); i++) {
			row = json_array_get(said, i);
			to = text_of(row, "dst");
			if (strcmp(text_of(row, "dev"), own->device) != 0)
				continue;
			defaults += strcmp(to, "default") == 0;
			peers += strcmp(to, side % 2 == 0 ? other->ipv4 :
			    other->ipv6) == 0;
		}
		assert_int_equal(defaults, 1);
		assert_int_equal(peers, 1);
		json_decref(said);
	}
	netspace_close(netspace);
}

static void
only_loopback_and_the_device_are_seen_inside(void **state)
{
	struct netspace *netspace = open_or_fail();
	json_t *said, *link;

	(void)state;
	for (int side = 0; side < NETSPACE_SIDES; side++) {
		said = ask_ip(netspace, (enum netspace_side)side, "-0",
		    "link");
		assert_int_equal(json_array_size(said), 2);
		link = json_array_get(said, 0);
		assert_string_equal(text_of(link, "ifname"), "lo");
		assert_true(has_flag(link, "UP"));
		link = json_array_get(said, 1);
		assert_string_equal(text_of(link, "ifname"),
		    ends[side].device);
		assert_true(has_flag(link, "UP") &&
		    has_flag(link, "LOWER_UP"));
		assert_int_equal(json_integer_value(
		    json_object_get(link, "mtu")), ends[side].mtu_bytes);
		if (ends[side].queue_packets > 0)
			assert_int_equal(json_integer_value(json_object_get(
			    link, "txqlen")), ends[side].queue_packets);
		assert_string_equal(text_of(json_object_get(link, "linkinfo"),
		    "info_kind"), "tun");
		json_decref(said);
	}
	netspace_close(netspace);
}

static void
nothing_is_sent_by_itself(void **state)
{
	struct netspace *netspace = open_or_fail();
	struct pollfd tuns[NETSPACE_SIDES];

	(void)state;
	for (int side = 0; side < NETSPACE_SIDES; side++) {
		tuns[side].fd = netspace_tun(netspace,
		    (enum netspace_side)side);
		tuns[side].events = POLLIN;
		assert_true((fcntl(tuns[side].fd, F_GETFL) & O_NONBLOCK) != 0);
		assert_true((fcntl(tuns[side].fd, F_GETFD) & FD_CLOEXEC) != 0);
	}
	/* RFC 4861, 6.3.7: a host would ask for routers within 1 s. */
	assert_int_equal(poll(tuns, NETSPACE_SIDES, 1500), 0);
	netspace_close(netspace);
}

static void
packets_pass_between_descriptor_and_socket(void **state)
{
	struct netspace *netspace = open_or_fail();

	(void)state;
	exchange(netspace, 4);
	exchange(netspace, 6);
	netspace_close(netspace);
}

static void
program_has_its_descriptors_and_no_others(void **state)
{
	struct netspace *netspace = open_or_fail();
	struct netspace_program program = { .path = "/bin/sh",
		.argv = (char *[]){ "sh", "-c",
		    "echo /proc/self/fd/*; read x <&3; echo $x; exit 7",
		    NULL }, .fds = { -1, -1, -1, -1 } };
	struct error err = { .kind = ERROR_NONE };
	int out[2], in[2], stray = open("/dev/null", O_RDONLY);
	char text[256];
	pid_t pid;

	(void)state;
	assert_int_equal(pipe2(out, O_CLOEXEC), 0);
	assert_int_equal(pipe2(in, O_CLOEXEC), 0);
	program.fds[1] = out[1];
	program.fds[3] = in[0];
	assert_int_equal(netspace_start(netspace, NETSPACE_B, &program, &pid,
	    NULL, &err), 0);
	(void)close(out[1]);
	assert_int_equal(write(in[1], "ahoy\n", 5), 5);
	hear(out[0], false, text, sizeof(text));
	/* The shell's own look into the folder may be one more. */
	assert_non_null(strstr(text, "/proc/self/fd/0 /proc/self/fd/1 "
	    "/proc/self/fd/2 /proc/self/fd/3"));
	assert_null(strstr(text, "/proc/self/fd/5"));
	assert_non_null(strstr(text, "ahoy\n"));
	assert_int_equal(finish(netspace, pid), 7);
	(void)close(out[0]);
	(void)close(in[0]);
	(void)close(in[1]);
	(void)close(stray);
	netspace_close(netspace);
}

static void
signals_reach_the_program(void **state)
{
	struct netspace *netspace = open_or_fail();
	int out, status = 0;
	pid_t pid = START(netspace, NETSPACE_A, &out, "/bin/sleep", "600");

	(void)state;
	assert_int_equal(netspace_wait(netspace, pid, 0, &status), -1);
	assert_int_equal(kill(pid, SIGTERM), 0);
	assert_int_equal(finish(netspace, pid), 128 + SIGTERM);
	assert_int_equal(netspace_wait(netspace, pid, 0, &status), -1);
	(void)close(out);
	netspace_close(netspace);
}

static void
absent_program_is_named(void **state)
{
	struct netspace *netspace = open_or_fail();
	struct netspace_program program = { .path = "/nonexistent/program",
		.argv = (char *[]){ "program", NULL },
		.fds = { -1, -1, -1, -1 } };
	struct error err = { .kind = ERROR_NONE };
	pid_t pid;

	(void)state;
	assert_int_equal(netspace_start(netspace, NETSPACE_A, &program, &pid,
	    NULL, &err), -1);
	assert_int_equal(err.kind, ERROR_ABSENT);
	assert_non_null(strstr(err.cause, "/nonexistent/program"));
	assert_int_equal(waitpid(-1, NULL, WNOHANG), -1);
	netspace_close(netspace);
}

int
main(int argc, char *argv[])
{
	const struct CMUnitTest everywhere[] = {
		cmocka_unit_test(what_no_namespace_may_have_is_refused),
	};
	const struct CMUnitTest where_permitted[] = {
		cmocka_unit_test(addresses_and_routes_are_those_asked_for),
		cmocka_unit_test(only_loopback_and_the_device_are_seen_inside),
		cmocka_unit_test(nothing_is_sent_by_itself),
		cmocka_unit_test(packets_pass_between_descriptor_and_socket),
		cmocka_unit_test(program_has_its_descriptors_and_no_others),
		cmocka_unit_test(signals_reach_the_program),
		cmocka_unit_test(absent_program_is_named),
	};
	int failed;

	if (argc == 3 && strcmp(argv[1], "echo") == 0)
		return echo_once(argv[2]);
	failed = cmocka_run_group_tests(everywhere, NULL, NULL);
	if (permitted())
		failed += cmocka_run_group_tests(where_permitted, NULL, NULL);
	return failed;
}
