/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "host.h"

#include <arpa/inet.h>
#include <ifaddrs.h>
#include <inttypes.h>
#include <net/if.h>
#include <netinet/in.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/ioctl.h>
#include <sys/utsname.h>
#include <unistd.h>

static int
read_line(const char *path, char *buf, size_t size)
{
	FILE *f = fopen(path, "re");
	char *line;

	if (f == NULL)
		return -1;
	line = fgets(buf, (int)size, f);
	(void)fclose(f);
	if (line == NULL)
		return -1;
	buf[strcspn(buf, "\n")] = '\0';
	return 0;
}

/* The n-th number of a line, from 0. */
static uint64_t
read_number(const char *path, unsigned n)
{
	char line[128], *at = line, *end;
	unsigned long long value = 0;

	if (read_line(path, line, sizeof(line)) == -1)
		return UNKNOWN_U64;
	for (unsigned i = 0; i <= n; i++) {
		value = strtoull(at, &end, 10);
		if (end == at)
			return UNKNOWN_U64;
		at = end;
	}
	return value;
}

void
host_congestion_controls(char *buf, size_t size)
{
	if (read_line("/proc/sys/net/ipv4/tcp_available_congestion_control",
	    buf, size) == -1)
		buf[0] = '\0';
}

static bool
same_address(const struct sockaddr *have, const char *text)
{
	unsigned char want[sizeof(struct in6_addr)];

	if (have == NULL)
		return false;
	if (have->sa_family == AF_INET && inet_pton(AF_INET, text, want) == 1)
		return memcmp(&((const struct sockaddr_in *)
		    (const void *)have)->sin_addr, want, 4) == 0;
	if (have->sa_family == AF_INET6 &&
	    inet_pton(AF_INET6, text, want) == 1)
		return memcmp(&((const struct sockaddr_in6 *)
		    (const void *)have)->sin6_addr, want, 16) == 0;
	return false;
}

static void
find_interface(const char *address, char out[16])
{
	struct ifaddrs *list = NULL;

	if (address[0] == '\0' || getifaddrs(&list) == -1)
		return;
	for (const struct ifaddrs *i = list; i != NULL; i = i->ifa_next)
		if (same_address(i->ifa_addr, address))
			(void)snprintf(out, 16, "%.15s", i->ifa_name);
	freeifaddrs(list);
}

static uint64_t
interface_mtu_bytes(const char *interface)
{
	struct ifreq request;
	int fd = socket(AF_INET, SOCK_DGRAM | SOCK_CLOEXEC, 0);
	uint64_t mtu_bytes = UNKNOWN_U64;

	memset(&request, 0, sizeof(request));
	(void)snprintf(request.ifr_name, sizeof(request.ifr_name), "%s",
	    interface);
	if (fd != -1 && ioctl(fd, SIOCGIFMTU, &request) == 0)
		mtu_bytes = (uint64_t)request.ifr_mtu;
	if (fd != -1)
		(void)close(fd);
	return mtu_bytes;
}

/* Only a link with a device behind it has a speed: a virtual one prints what
 * its driver made up. */
static uint64_t
link_speed_bps(const char *interface)
{
	char path[96];
	uint64_t mbit_per_s;

	(void)snprintf(path, sizeof(path), "/sys/class/net/%s/device",
	    interface);
	if (access(path, F_OK) == -1)
		return UNKNOWN_U64;
	(void)snprintf(path, sizeof(path), "/sys/class/net/%s/speed",
	    interface);
	mbit_per_s = read_number(path, 0);
	/* a link that is down reads -1 */
	return mbit_per_s == 0 || mbit_per_s > 10000000 ? UNKNOWN_U64 :
	    mbit_per_s * 1000000;
}

void
host_read_facts(const char *data_address, const char *interface,
    struct host_facts *out)
{
	struct utsname uts;
	long cpus = sysconf(_SC_NPROCESSORS_ONLN);

	memset(out, 0, sizeof(*out));
	(void)snprintf(out->software, sizeof(out->software),
	    "plafond-agent %s", PLAFOND_VERSION);
	if (uname(&uts) == 0) {
		(void)snprintf(out->hostname, sizeof(out->hostname), "%s",
		    uts.nodename);
		(void)snprintf(out->kernel, sizeof(out->kernel),
		    "%.20s %.30s %.10s", uts.sysname, uts.release,
		    uts.machine);
	}
	out->cpus = cpus > 0 ? (uint64_t)cpus : 1;
	(void)read_line("/proc/sys/net/ipv4/tcp_congestion_control",
	    out->default_congestion_control,
	    sizeof(out->default_congestion_control));
	out->receive_buffer_max_bytes =
	    read_number("/proc/sys/net/core/rmem_max", 0);
	out->send_buffer_max_bytes =
	    read_number("/proc/sys/net/core/wmem_max", 0);
	out->tcp_receive_max_bytes =
	    read_number("/proc/sys/net/ipv4/tcp_rmem", 2);
	out->tcp_send_max_bytes =
	    read_number("/proc/sys/net/ipv4/tcp_wmem", 2);
	out->tcp_timestamps =
	    read_number("/proc/sys/net/ipv4/tcp_timestamps", 0);
	out->interface_mtu_bytes = UNKNOWN_U64;
	out->link_speed_bps = UNKNOWN_U64;
	if (interface[0] != '\0')
		(void)snprintf(out->interface, sizeof(out->interface),
		    "%.15s", interface);
	else
		find_interface(data_address, out->interface);
	if (out->interface[0] == '\0')
		return;
	out->interface_mtu_bytes = interface_mtu_bytes(out->interface);
	out->link_speed_bps = link_speed_bps(out->interface);
}

uint64_t
host_interface_bytes(const char *interface, int sent)
{
	/* proc(5): "name: bytes packets errs drop fifo frame compressed
	 * multicast bytes ..." received first, then sent; this network
	 * namespace's own, which /sys may not be */
	FILE *f = fopen("/proc/self/net/dev", "re");
	char line[512];
	uint64_t received_bytes, sent_bytes, found = UNKNOWN_U64;
	size_t length = strlen(interface);

	if (f == NULL || length == 0) {
		if (f != NULL)
			(void)fclose(f);
		return UNKNOWN_U64;
	}
	while (fgets(line, sizeof(line), f) != NULL) {
		char *name = line + strspn(line, " ");

		if (strncmp(name, interface, length) != 0 ||
		    name[length] != ':')
			continue;
		if (sscanf(name + length + 1, "%" SCNu64 " %*u %*u %*u %*u "
		    "%*u %*u %*u %" SCNu64, &received_bytes, &sent_bytes) == 2)
			found = sent ? sent_bytes : received_bytes;
	}
	(void)fclose(f);
	return found;
}
