/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What is known of each device, in words. */
#include <inttypes.h>
#include <stdarg.h>
#include <string.h>

#include "draft/draft_inside.h"
#include "log.h"
#include "units.h"

#define COLUMNS_MAX 79
#define WORDS_SIZE 1024

static const char *const titles[INTERFACE_KINDS] = {
	[INTERFACE_PORT] = "Ethernet port",
	[INTERFACE_LOOPBACK] = "loopback",
	[INTERFACE_VETH] = "virtual Ethernet, one of a pair",
	[INTERFACE_DUMMY] = "leads nowhere",
	[INTERFACE_TUN] = "packets to and from a program",
	[INTERFACE_TAP] = "frames to and from a program",
	[INTERFACE_BRIDGE] = "bridge",
	[INTERFACE_BOND] = "several ports as one",
	[INTERFACE_VLAN] = "VLAN",
	[INTERFACE_MACVLAN] = "a further address of the next",
	[INTERFACE_MACSEC] = "MACsec",
	[INTERFACE_VXLAN] = "VXLAN",
	[INTERFACE_GENEVE] = "Geneve",
	[INTERFACE_GRE] = "GRE",
	[INTERFACE_IPIP] = "IP in IP",
	[INTERFACE_WIREGUARD] = "WireGuard",
	[INTERFACE_ESP] = "IPsec ESP",
	[INTERFACE_PPP] = "PPP",
	[INTERFACE_WLAN] = "Wi-Fi",
	[INTERFACE_WWAN] = "modem of a mobile network",
	[INTERFACE_OTHER] = "unknown",
};

void
draft_comment(const char *first, const char *next, const char *text,
    FILE *out)
{
	size_t column = strlen(first), start = column, length;
	bool begun = false;

	(void)fputs(first, out);
	for (; *text != '\0'; text += length, text += strspn(text, " ")) {
		length = strcspn(text, " ");
		if (begun && column + 1 + length > COLUMNS_MAX) {
			(void)fprintf(out, "\n%s", next);
			column = start = strlen(next);
		}
		if (column > start) {
			(void)fputc(' ', out);
			column++;
		}
		(void)fprintf(out, "%.*s", (int)length, text);
		column += length;
		begun = true;
	}
	(void)fputc('\n', out);
}

const char *
draft_name(const char *name, char *buf)
{
	return log_escape(name, buf, DRAFT_NAME_SIZE);
}

__attribute__((format(printf, 2, 3)))
static void
say(char words[WORDS_SIZE], const char *fmt, ...)
{
	size_t used = strlen(words);
	va_list ap;

	va_start(ap, fmt);
	(void)vsnprintf(words + used, WORDS_SIZE - used, fmt, ap);
	va_end(ap);
}

static void
say_rate(const struct interface_device *device, char words[WORDS_SIZE])
{
	char rate[64];

	if (device->kind != INTERFACE_PORT && device->kind != INTERFACE_BOND)
		return;
	if (device->driver[0] != '\0')
		say(words, ", driver %s", log_escape(device->driver, rate,
		    sizeof(rate)));
	if (!device->carrier)
		say(words, ", no link");
	if (device->line_bps == INTERFACE_UNKNOWN)
		say(words, ", rate unknown");
	else
		say(words, ", %s%s", units_format_exact(device->line_bps,
		    DIMENSION_RATE, rate, sizeof(rate)),
		    device->negotiated ? " negotiated" : "");
	if (device->duplex != INTERFACE_DUPLEX_UNKNOWN)
		say(words, ", %s duplex", device->duplex ==
		    INTERFACE_DUPLEX_FULL ? "full" : "half");
}

static void
say_options(const struct interface_device *device, char words[WORDS_SIZE])
{
	if (device->kind == INTERFACE_VLAN)
		say(words, " %u (%s)", device->vlan_id, device->service_tag ?
		    "802.1ad" : "802.1Q");
	if (device->kind == INTERFACE_MACSEC)
		say(words, ", ICV of %u B, %s SCI", device->macsec_icv_bytes,
		    device->macsec_sci ? "with" : "without");
	if (device->outer_version != 0)
		say(words, " over IPv%u", device->outer_version);
	if (device->gre_checksum)
		say(words, ", checksum");
	if (device->gre_key)
		say(words, ", key");
	if (device->gre_sequence)
		say(words, ", sequence number");
	if (device->encapsulation_limit)
		say(words, ", encapsulation limit");
	if (device->by_route)
		say(words, ", leaves by the next as the route is now");
}

static void
say_ports(const struct interface_device *device, char words[WORDS_SIZE])
{
	const struct interface_port *port;
	char name[DRAFT_NAME_SIZE], rate[64];
	size_t i;

	for (i = 0; i < device->ports_count && i < INTERFACE_PORTS_MAX; i++) {
		port = &device->ports[i];
		say(words, "%s %s", i == 0 ? ", ports" : ",",
		    draft_name(port->name, name));
		if (!port->real)
			say(words, " (virtual)");
		else if (port->line_bps != INTERFACE_UNKNOWN)
			say(words, " (%s)", units_format_exact(port->line_bps,
			    DIMENSION_RATE, rate, sizeof(rate)));
	}
	if (device->ports_count > INTERFACE_PORTS_MAX)
		say(words, " and %zu more",
		    device->ports_count - INTERFACE_PORTS_MAX);
}

static void
say_addresses(const struct interface_device *device, char words[WORDS_SIZE])
{
	if (device->ipv4 && device->ipv6)
		say(words, ", IPv4 and IPv6 addresses");
	else if (device->ipv4 || device->ipv6)
		say(words, ", IPv%c addresses", device->ipv4 ? '4' : '6');
	else
		say(words, ", no addresses");
}

void
draft_devices(const struct interface_facts *facts, FILE *out)
{
	const struct interface_device *device;
	char first[DRAFT_NAME_SIZE + 8], name[DRAFT_NAME_SIZE];
	char words[WORDS_SIZE], kind[4 * sizeof(device->kernel_kind)];

	for (size_t i = 0; i < facts->count; i++) {
		device = &facts->device[i];
		words[0] = '\0';
		say(words, "%s", titles[device->kind]);
		say_options(device, words);
		if (device->kernel_kind[0] != '\0')
			say(words, ", kind %s", log_escape(
			    device->kernel_kind, kind, sizeof(kind)));
		say_rate(device, words);
		say(words, ", MTU %" PRIu64 " B", device->mtu_bytes);
		if (!device->up)
			say(words, ", down");
		if (device->master[0] != '\0')
			say(words, ", a port of %s",
			    draft_name(device->master, name));
		if (i == 0)
			say_addresses(device, words);
		say_ports(device, words);
		(void)snprintf(first, sizeof(first), "#   %s: ",
		    draft_name(device->name, name));
		draft_comment(first, "#     ", words, out);
	}
}
