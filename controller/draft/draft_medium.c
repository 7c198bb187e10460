/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The field `medium` of a draft. */
#include <string.h>

#include "declare/medium.h"
#include "draft/draft_inside.h"
#include "draft/draft_stack.h"
#include "log.h"
#include "units.h"

#define REASON_SIZE 256

/* Drivers of ports that a hypervisor makes: their rate is a name. */
static const char *const virtual_drivers[] = { "ena", "gve", "hv_netvsc",
	"ibmveth", "netvsc", "virtio_net", "vmxnet3", "xen_netfront" };

static bool
is_virtual(const struct interface_device *device)
{
	for (size_t i = 0; i < sizeof(virtual_drivers) /
	    sizeof(virtual_drivers[0]); i++)
		if (strcmp(virtual_drivers[i], device->driver) == 0)
			return true;
	return false;
}

/* The rate of a bond is a sum, known where that of each port is. */
static bool
ports_are_known(const struct interface_device *device)
{
	if (device->ports_count == 0 ||
	    device->ports_count > INTERFACE_PORTS_MAX)
		return false;
	for (size_t i = 0; i < device->ports_count; i++)
		if (!device->ports[i].real ||
		    device->ports[i].line_bps == INTERFACE_UNKNOWN)
			return false;
	return true;
}

static void
write_open_rate(const struct interface_device *device, FILE *out)
{
	char name[DRAFT_NAME_SIZE], rate[64], driver[128];

	(void)draft_name(device->name, name);
	(void)log_escape(device->driver, driver, sizeof(driver));
	(void)units_format_exact(device->line_bps, DIMENSION_RATE, rate,
	    sizeof(rate));
	(void)fputs("  # line-rate: RATE  # fill in: ", out);
	if (device->line_bps == INTERFACE_UNKNOWN && device->kind ==
	    INTERFACE_PORT && !device->carrier)
		(void)fprintf(out, "%s has no link now\n", name);
	else if (device->line_bps == INTERFACE_UNKNOWN)
		(void)fprintf(out, "the kernel does not know that of %s\n",
		    name);
	else if (device->kind == INTERFACE_BOND)
		(void)fprintf(out, "that of a port of %s is not known\n", name);
	else if (device->kind == INTERFACE_VETH)
		(void)fprintf(out, "Linux names %s for %s, but nothing limits "
		    "it to that\n", rate, name);
	else
		(void)fprintf(out, "%s names %s, but the hypervisor may give "
		    "less or more\n", driver, rate);
}

/* True where the rate is left open. */
static bool
write_rate(const struct interface_device *device, FILE *out)
{
	char name[DRAFT_NAME_SIZE], rate[64];

	if (device->line_bps == INTERFACE_UNKNOWN ||
	    (device->kind == INTERFACE_BOND && !ports_are_known(device)) ||
	    device->kind == INTERFACE_VETH || is_virtual(device)) {
		write_open_rate(device, out);
		return true;
	}
	(void)draft_name(device->name, name);
	(void)fprintf(out, "  line-rate: %s  # ", units_format_exact(
	    device->line_bps, DIMENSION_RATE, rate, sizeof(rate)));
	if (device->kind == INTERFACE_BOND)
		(void)fprintf(out, "confirm: the ports of %s together; one "
		    "flow has the rate of one port\n", name);
	else if (device->negotiated)
		(void)fprintf(out, "negotiated by %s\n", name);
	else
		(void)fprintf(out, "confirm: set on %s, not negotiated\n",
		    name);
	return false;
}

static void
write_duplex(const struct interface_device *device, FILE *out)
{
	char name[DRAFT_NAME_SIZE];

	(void)draft_name(device->name, name);
	switch (device->duplex) {
	case INTERFACE_DUPLEX_FULL:
		(void)fputs("  duplex: full\n", out);
		break;
	case INTERFACE_DUPLEX_HALF:
		(void)fprintf(out, "  duplex: half  # confirm: %s says so, "
		    "rarely meant\n", name);
		break;
	case INTERFACE_DUPLEX_UNKNOWN:
		(void)fprintf(out, "  # duplex: DUPLEX  # fill in: half, where "
		    "it is so; %s does not say\n", name);
		break;
	}
}

static bool
write_ethernet(const struct interface_device *device, FILE *out)
{
	char name[DRAFT_NAME_SIZE];
	bool open;

	(void)draft_name(device->name, name);
	(void)fputs("medium:\n  kind: ethernet  # confirm: ", out);
	if (device->kind == INTERFACE_VETH)
		(void)fprintf(out, "%s is virtual, with no line of its own\n",
		    name);
	else
		(void)fprintf(out, "that of %s; beyond it the line may be "
		    "another\n", name);
	open = write_rate(device, out);
	write_duplex(device, out);
	return open;
}

/* The fields of a medium that the kernel does not tell: those without a
 * default, as the table has them. */
static bool
write_fields(const struct medium *medium, FILE *out)
{
	const struct field *row;
	char first[128];

	(void)fprintf(out, "medium:\n  kind: %s  # confirm: the circuit may "
	    "go on over another medium, which limits it\n", medium->name);
	for (row = medium->fields; row->name != NULL; row++) {
		if (row->default_text != NULL || strcmp(row->name, "kind") == 0)
			continue;
		(void)snprintf(first, sizeof(first), "  # %s: VALUE  # fill "
		    "in: ", row->name);
		draft_comment(first, "  #     ", row->help, out);
	}
	return true;
}

/* Why the medium is not known. */
static const char *
reason(const struct interface_device *device, char buf[REASON_SIZE])
{
	char name[DRAFT_NAME_SIZE];
	const char *why = "";

	(void)draft_name(device->name, name);
	switch (device->below) {
	case INTERFACE_BELOW_ELSEWHERE:
		why = "what it lies on is in another network namespace";
		break;
	case INTERFACE_BELOW_PORTS:
		why = device->ports_count == 0 ? "it has no ports" :
		    "draft the port by which the circuit leaves";
		break;
	case INTERFACE_BELOW_UNTOLD:
		why = device->kind == INTERFACE_WIREGUARD ?
		    "where its peers are is told to root alone" :
		    device->kind == INTERFACE_PPP ?
		    "the kernel does not tell what it runs over" :
		    "no way to its far end is known";
		break;
	case INTERFACE_BELOW_NOTHING:
	case INTERFACE_BELOW_DEVICE:
		why = device->kind == INTERFACE_DUMMY ? "it leads nowhere" :
		    device->kind == INTERFACE_TUN ||
		    device->kind == INTERFACE_TAP ?
		    "what a program does with its packets is not known" :
		    device->kind == INTERFACE_WWAN ?
		    "the kernel does not tell which mobile network" :
		    "the kernel does not tell what it is";
		break;
	}
	(void)snprintf(buf, REASON_SIZE, "%s: %s", name, why);
	return buf;
}

/* Could the chain lie on this medium?  Where nothing is known of its layers,
 * on any. */
static bool
may_be(const struct medium *medium, const struct interface_device *lowest,
    const struct draft_stack *stack)
{
	if (medium_is_reference(medium))
		return false;
	if (lowest->kind == INTERFACE_WWAN)
		return medium_carries(medium, "lte") ||
		    medium_carries(medium, "nr");
	return strcmp(stack->layers[0], "ethernet") != 0 ||
	    medium_carries(medium, "ethernet");
}

static void
write_choice(const struct interface_device *lowest,
    const struct draft_stack *stack, FILE *out)
{
	char text[1024] = "", why[REASON_SIZE];
	size_t i, used;

	(void)fprintf(out, "# medium: { kind: NAME }  # fill in: %s\n",
	    reason(lowest, why));
	for (i = 0; media[i] != NULL; i++) {
		used = strlen(text);
		if (may_be(media[i], lowest, stack))
			(void)snprintf(text + used, sizeof(text) - used,
			    "%s%s", used == 0 ? "" : ", ", media[i]->name);
	}
	if (text[0] == '\0')
		(void)snprintf(text, sizeof(text), "see `plafond media`");
	draft_comment("#   NAME: ", "#     ", text, out);
	(void)fputs("#   `plafond media NAME` shows the fields of one\n", out);
}

bool
draft_medium(const struct interface_facts *facts,
    const struct draft_stack *stack, FILE *out)
{
	const struct interface_device *lowest =
	    &facts->device[facts->count - 1];

	if (lowest->below == INTERFACE_BELOW_NOTHING) {
		if (lowest->kind == INTERFACE_LOOPBACK) {
			(void)fputs("medium: { kind: host }  # a reference, "
			    "which has no ceiling\n", out);
			return false;
		}
		if (lowest->kind == INTERFACE_PORT ||
		    lowest->kind == INTERFACE_VETH ||
		    lowest->kind == INTERFACE_BOND)
			return write_ethernet(lowest, out);
		if (lowest->kind == INTERFACE_WLAN &&
		    medium_find("wlan") != NULL)
			return write_fields(medium_find("wlan"), out);
	}
	write_choice(lowest, stack, out);
	return true;
}
