/* SPDX-License-Identifier: GPL-3.0-or-later */
/* netspace_make: what is asked for, the namespaces and their TUN devices. */
#include <arpa/inet.h>
#include <errno.h>
#include <fcntl.h>
#include <linux/if_tun.h>
#include <net/if.h>
#include <sched.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/ioctl.h>
#include <unistd.h>

#include "error.h"
#include "rehearse/netspace_inside.h"

#define TUN_FILE "/dev/net/tun"

/* --- what is asked for ------------------------------------------------- */

static int
check_device(const struct netspace_end *end, struct error *err)
{
	/* The kernel's rule for names, and '%', which it would number. */
	if (end->device[0] == '\0' || strlen(end->device) >= IFNAMSIZ ||
	    strpbrk(end->device, "/:% \t\n\v\f\r") != NULL ||
	    end->device[0] == '.' || strcmp(end->device, "lo") == 0)
		return error_set(err, ERROR_INPUT, "'%.64s' cannot be the name "
		    "of a device: 1 to %d characters, no space, none of "
		    "'/:%%', no leading dot, not 'lo'", end->device,
		    IFNAMSIZ - 1);
	/* RFC 791, RFC 8200; linux/if_tun.h has no more than an IP packet. */
	if (end->mtu_bytes < (end->ipv6 != NULL ? 1280 : 68) ||
	    end->mtu_bytes > 65535)
		return error_set(err, ERROR_INPUT, "an MTU of %u B for '%s': "
		    "%d to 65535 B are possible", end->mtu_bytes, end->device,
		    end->ipv6 != NULL ? 1280 : 68);
	return 0;
}

static int
check_addresses(const struct netspace_end *end, struct error *err)
{
	struct in6_addr six;
	struct in_addr four;

	if (end->ipv4 == NULL && end->ipv6 == NULL)
		return error_set(err, ERROR_INPUT, "'%s' has no address",
		    end->device);
	/* RFC 2544, appendix C.2.2: 198.18.0.0/15 */
	if (end->ipv4 != NULL && (inet_pton(AF_INET, end->ipv4, &four) != 1 ||
	    (ntohl(four.s_addr) & 0xfffe0000) != 0xc6120000))
		return error_set(err, ERROR_INPUT, "address '%.64s' of '%s': "
		    "only 198.18.0.0/15 may be rehearsed with", end->ipv4,
		    end->device);
	/* RFC 5180, section 8: 2001:2::/48 */
	if (end->ipv6 != NULL && (inet_pton(AF_INET6, end->ipv6, &six) != 1 ||
	    memcmp(&six, "\x20\x01\x00\x02\x00\x00", 6) != 0))
		return error_set(err, ERROR_INPUT, "address '%.64s' of '%s': "
		    "only 2001:2::/48 may be rehearsed with", end->ipv6,
		    end->device);
	return 0;
}

/* Are two texts, both checked, the same address? */
static int
same_address(int family, const char *a, const char *b)
{
	struct in6_addr one = { 0 }, two = { 0 };

	return inet_pton(family, a, &one) == 1 &&
	    inet_pton(family, b, &two) == 1 &&
	    memcmp(&one, &two, sizeof(one)) == 0;
}

int
netspace_check(const struct netspace_end ends[NETSPACE_SIDES],
    struct error *err)
{
	const struct netspace_end *a = &ends[NETSPACE_A];
	const struct netspace_end *b = &ends[NETSPACE_B];

	for (int side = 0; side < NETSPACE_SIDES; side++)
		if (check_device(&ends[side], err) == -1 ||
		    check_addresses(&ends[side], err) == -1)
			return -1;
	if ((a->ipv4 == NULL) != (b->ipv4 == NULL) ||
	    (a->ipv6 == NULL) != (b->ipv6 == NULL))
		return error_set(err, ERROR_INPUT, "the two ends have "
		    "addresses of different IP versions");
	if (a->ipv4 != NULL && same_address(AF_INET, a->ipv4, b->ipv4))
		return error_set(err, ERROR_INPUT, "both ends have the "
		    "address %s", a->ipv4);
	if (a->ipv6 != NULL && same_address(AF_INET6, a->ipv6, b->ipv6))
		return error_set(err, ERROR_INPUT, "both ends have the "
		    "address %s", a->ipv6);
	return 0;
}

/* --- why not ----------------------------------------------------------- */

/* Settings by which systems forbid namespaces, and what frees them.  Of
 * namespaces(7), Debian's kernel and Ubuntu's AppArmor. */
static const struct {
	const char *file, *forbids, *frees;
} switches[] = {
	{ "/proc/sys/user/max_user_namespaces", "0",
	    "user.max_user_namespaces=10000" },
	{ "/proc/sys/user/max_net_namespaces", "0",
	    "user.max_net_namespaces=10000" },
	{ "/proc/sys/user/max_pid_namespaces", "0",
	    "user.max_pid_namespaces=10000" },
	{ "/proc/sys/user/max_mnt_namespaces", "0",
	    "user.max_mnt_namespaces=10000" },
	{ "/proc/sys/kernel/unprivileged_userns_clone", "0",
	    "kernel.unprivileged_userns_clone=1" },
	{ "/proc/sys/kernel/apparmor_restrict_unprivileged_userns", "1",
	    "kernel.apparmor_restrict_unprivileged_userns=0" },
};

/* The setting that forbids, or NULL. */
static const char *
find_switch(void)
{
	char line[32];
	FILE *f;
	bool found;

	for (size_t i = 0; i < sizeof(switches) / sizeof(switches[0]); i++) {
		f = fopen(switches[i].file, "re");
		if (f == NULL)
			continue;
		found = fgets(line, sizeof(line), f) != NULL;
		(void)fclose(f);
		line[found ? strcspn(line, "\n") : 0] = '\0';
		if (found && strcmp(line, switches[i].forbids) == 0)
			return switches[i].frees;
	}
	return NULL;
}

int
netspace_refuse(struct error *err)
{
	int saved = errno;
	const char *frees = find_switch();

	errno = saved;
	if (frees != NULL)
		return error_errno(err, ERROR_UNREACHABLE, "private network "
		    "namespaces are forbidden here: run as root, and where "
		    "that is not enough 'sysctl -w %s' first", frees);
	if (saved == ENOSPC || saved == EUSERS)
		return error_errno(err, ERROR_UNREACHABLE, "there are too many "
		    "namespaces already: end what holds them, or raise "
		    "user.max_net_namespaces and user.max_user_namespaces "
		    "with sysctl");
	if (saved == EINVAL || saved == ENOSYS)
		return error_errno(err, ERROR_UNREACHABLE, "this kernel has no "
		    "private network namespaces: use one of Linux 5.9 or "
		    "later with NET_NS, USER_NS and PID_NS");
	return error_errno(err, ERROR_UNREACHABLE, "no permission for private "
	    "network namespaces: run as root, in a container with the "
	    "capability SYS_ADMIN");
}

static int
refuse_tun(struct error *err)
{
	switch (errno) {
	case ENOENT:
		return error_errno(err, ERROR_UNREACHABLE, "there is no "
		    TUN_FILE ": 'modprobe tun' as root, or give the container "
		    "that device");
	case ENODEV:
	case ENXIO:
		return error_errno(err, ERROR_UNREACHABLE, "this kernel has no "
		    "TUN devices: 'modprobe tun' as root, or use a kernel "
		    "with the option TUN");
	case EACCES:
	case EPERM:
		return error_errno(err, ERROR_UNREACHABLE, "no permission for "
		    TUN_FILE ": run as root, or 'chmod 0666 " TUN_FILE "' as "
		    "root, in a container let it use that device");
	default:
		return error_errno(err, ERROR_INTERNAL, "cannot open "
		    TUN_FILE);
	}
}

/* --- make -------------------------------------------------------------- */

static int
write_text(const char *path, const char *text)
{
	size_t length = strlen(text);
	ssize_t written;
	int fd = open(path, O_WRONLY | O_CLOEXEC);

	if (fd == -1)
		return -1;
	written = write(fd, text, length);
	if (close(fd) == -1)
		return -1;
	return written == (ssize_t)length ? 0 : -1;
}

/* user_namespaces(7): a user without privilege maps itself alone, and its group
 * only once setgroups is denied. */
static int
map_self(uid_t user, gid_t group)
{
	char line[64];

	(void)snprintf(line, sizeof(line), "%u %u 1\n", user, user);
	if (write_text("/proc/self/uid_map", line) == -1 ||
	    write_text("/proc/self/setgroups", "deny") == -1)
		return -1;
	(void)snprintf(line, sizeof(line), "%u %u 1\n", group, group);
	return write_text("/proc/self/gid_map", line);
}

static int
keep(const char *file, int *fd, struct error *err)
{
	*fd = open(file, O_RDONLY | O_CLOEXEC);
	if (*fd == -1)
		return error_errno(err, ERROR_UNREACHABLE, "cannot open '%s', "
		    "mount /proc", file);
	return 0;
}

/* The network namespace of the first side, with the user namespace that it
 * needs where this process has no right to make it. */
static int
enter_first(struct netspace *made, struct error *err)
{
	uid_t user = geteuid();
	gid_t group = getegid();

	if (unshare(CLONE_NEWNET) == 0)
		return 0;
	if (errno != EPERM)
		return netspace_refuse(err);
	if (unshare(CLONE_NEWUSER | CLONE_NEWNET) == -1 ||
	    map_self(user, group) == -1)
		return netspace_refuse(err);
	return keep("/proc/self/ns/user", &made->user, err);
}

/* TUN: packets without an Ethernet header; NO_PI: nor another one. */
static int
make_tun(const char *name, int *tun, struct error *err)
{
	struct ifreq request = { .ifr_flags = IFF_TUN | IFF_NO_PI };

	*tun = open(TUN_FILE, O_RDWR | O_NONBLOCK | O_CLOEXEC);
	if (*tun == -1)
		return refuse_tun(err);
	memcpy(request.ifr_name, name, strlen(name));
	if (ioctl(*tun, TUNSETIFF, &request) == 0)
		return 0;
	/* What AppArmor leaves of a user namespace has no rights. */
	if (errno == EPERM || errno == EACCES)
		return netspace_refuse(err);
	return error_errno(err, ERROR_INTERNAL, "cannot make TUN device '%s'",
	    name);
}

int
netspace_make(const struct netspace_end ends[NETSPACE_SIDES],
    struct netspace *made, struct error *err)
{
	for (int side = 0; side < NETSPACE_SIDES; side++) {
		if (side == 0) {
			if (enter_first(made, err) == -1)
				return -1;
		} else if (unshare(CLONE_NEWNET) == -1)
			return netspace_refuse(err);
		if (keep("/proc/self/ns/net", &made->net[side], err) == -1 ||
		    make_tun(ends[side].device, &made->tun[side], err) == -1 ||
		    netspace_link_set_up(&ends[side],
		    &ends[NETSPACE_SIDES - 1 - side], err) == -1)
			return -1;
	}
	return 0;
}
