/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The text form of packet_sizes: a table a direction, or one for both. */
#include <inttypes.h>
#include <string.h>

#include "columns.h"
#include "report/packet_sizes.h"
#include "report/rate_unit.h"

struct table {
	const struct packet_sizes *sizes;
	const struct packet_sizes_direction *direction;
	const struct rate_unit *unit;
	struct columns *columns;
	bool udp_apart;			/* the declared transport is not udp */
	bool binding;			/* a column for it */
};

static const enum layer_level levels[] = { LEVEL_LINE, LEVEL_FRAME,
	LEVEL_PACKET };
#define SHOWN_LEVELS (sizeof(levels) / sizeof(levels[0]))

static bool
shown(const struct table *table, enum layer_level level)
{
	return level != LEVEL_FRAME || table->direction->frames;
}

static void
add_head(const struct table *table)
{
	char declared[96];
	const char *cells[COLUMNS_MAX] = { NULL };
	size_t n = 0;

	if (table->direction->frames)
		cells[n++] = "frame B";
	cells[n++] = "packet B";
	cells[n++] = table->direction->frames ? "frames/s" : "packets/s";
	for (size_t i = 0; i < SHOWN_LEVELS; i++)
		if (shown(table, levels[i]))
			cells[n++] = level_name(levels[i]);
	(void)snprintf(declared, sizeof(declared), "over %s",
	    table->sizes->top);
	cells[n++] = declared;
	if (table->udp_apart)
		cells[n++] = "over udp";
	if (table->binding)
		cells[n++] = "set by";
	columns_row(table->columns, cells);
	columns_rule(table->columns);
}

static const char *
payload_text(const struct table *table, uint64_t bps,
    char buf[RATE_CELL_SIZE])
{
	return bps == FIELD_UNSET ? "-" : rate_unit_text(table->unit, bps,
	    buf);
}

static void
add_size(const struct table *table, const struct packet_size *size)
{
	char frame[RATE_CELL_SIZE], packet[RATE_CELL_SIZE];
	char packets[RATE_CELL_SIZE], rates[SHOWN_LEVELS][RATE_CELL_SIZE];
	char declared[RATE_CELL_SIZE], udp[RATE_CELL_SIZE];
	const char *cells[COLUMNS_MAX] = { NULL };
	size_t n = 0;

	if (table->direction->frames)
		cells[n++] = rate_digits(size->bytes, 0, "", frame);
	cells[n++] = rate_digits(size->rate.packet_bytes, 0, "", packet);
	cells[n++] = rate_digits(fraction_floor(size->rate.packets_per_s), 0,
	    "", packets);
	for (size_t i = 0; i < SHOWN_LEVELS; i++)
		if (shown(table, levels[i]))
			cells[n++] = rate_unit_text(table->unit,
			    size->rate.rate_bps[levels[i]], rates[i]);
	cells[n++] = payload_text(table, size->declared_bps, declared);
	if (table->udp_apart)
		cells[n++] = payload_text(table, size->udp_bps, udp);
	if (table->binding)
		cells[n++] = size->rate.binding;
	columns_row(table->columns, cells);
}

static void
print_notes(const struct table *table, FILE *out)
{
	const struct packet_sizes_direction *d = table->direction;

	for (size_t i = 0; i < d->left_count; i++)
		(void)fprintf(out, "%s%s of %" PRIu64 " B is left out: %s\n",
		    i == 0 ? "\n" : "", d->frames ? "a frame" : "a packet",
		    d->left[i].bytes, d->left[i].why);
	if (d->contract_ignored)
		(void)fputs("\nThe contract counts above the packet: it "
		    "limits the payload only, not the frames.\n", out);
}

static bool
one_binding(const struct packet_sizes_direction *d)
{
	for (size_t i = 1; i < d->count; i++)
		if (strcmp(d->sizes[i].rate.binding,
		    d->sizes[0].rate.binding) != 0)
			return false;
	return true;
}

static uint64_t
largest_bps(const struct packet_sizes_direction *d)
{
	uint64_t largest = 0;

	for (size_t i = 0; i < d->count; i++)
		if (d->sizes[i].rate.rate_bps[LEVEL_LINE] > largest)
			largest = d->sizes[i].rate.rate_bps[LEVEL_LINE];
	return largest;
}

static void
print_direction(const struct packet_sizes *sizes, enum direction direction,
    const char *title, FILE *out)
{
	const struct packet_sizes_direction *d =
	    &sizes->directions[direction];
	struct table table = { .sizes = sizes, .direction = d,
		.unit = rate_unit_for(largest_bps(d), 0),
		.udp_apart = strcmp(sizes->top, "udp") != 0,
		.binding = !one_binding(d) };
	char alignment[COLUMNS_MAX + 1];

	(void)snprintf(alignment, sizeof(alignment), "rrrrr%s%s%s",
	    d->frames ? "rr" : "", table.udp_apart ? "r" : "",
	    table.binding ? "l" : "");
	(void)fprintf(out, "\n%s, in %s", title, table.unit->symbol);
	if (!table.binding)
		(void)fprintf(out, "; set by %s", d->sizes[0].rate.binding);
	(void)fputs("\n\n", out);
	table.columns = columns_new(alignment);
	add_head(&table);
	for (size_t i = 0; i < d->count; i++)
		add_size(&table, &d->sizes[i]);
	columns_print(table.columns, 0, out);
	columns_free(table.columns);
	print_notes(&table, out);
}

static bool
same_size(const struct packet_size *left, const struct packet_size *right)
{
	return left->bytes == right->bytes &&
	    memcmp(left->rate.rate_bps, right->rate.rate_bps,
	    sizeof(left->rate.rate_bps)) == 0 &&
	    left->declared_bps == right->declared_bps &&
	    left->udp_bps == right->udp_bps &&
	    strcmp(left->rate.binding, right->rate.binding) == 0;
}

static bool
directions_alike(const struct packet_sizes *sizes)
{
	const struct packet_sizes_direction *left = &sizes->directions[0];
	const struct packet_sizes_direction *right = &sizes->directions[1];

	if (left->count != right->count ||
	    left->left_count != right->left_count)
		return false;
	for (size_t i = 0; i < left->count; i++)
		if (!same_size(&left->sizes[i], &right->sizes[i]))
			return false;
	return true;
}

void
packet_sizes_text(const struct packet_sizes *sizes, FILE *out)
{
	enum direction d;

	(void)fprintf(out, "%s: %s of the sizes of RFC 2544 section 9.1 and "
	    "the largest\n", sizes->circuit,
	    sizes->directions[DIRECTION_A_TO_B].frames ? "frames" :
	    "packets");
	if (sizes->reference) {
		(void)fputs("its medium is a reference and has no ceiling\n",
		    out);
		return;
	}
	if (directions_alike(sizes))
		print_direction(sizes, DIRECTION_A_TO_B,
		    "both directions alike", out);
	else
		for (d = 0; d < DIRECTIONS_SINGLE; d++)
			print_direction(sizes, d, direction_name(d), out);
	(void)fputs("\nOne direction, nothing in the other.  \"over\": the "
	    "payload of packets of that\nsize, \"-\" where they have no room "
	    "for it or the layers make none of that size.\n", out);
}
