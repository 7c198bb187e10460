/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ceiling/both.h"

#include <math.h>
#include <stdlib.h>

#include "ceiling/ceiling.h"
#include "error.h"

#define THOUSANDTHS 1000
#define HALVINGS 24		/* of the logarithm, 10^-3 to 10^3 */

/* Packets a second of the ceiling under a load. */
static int
packets_per_s(const struct circuit *circuit, const struct load *load,
    struct ceiling *room, double *out, struct error *err)
{
	if (ceiling_of_load(circuit, load, room, err) == -1)
		return -1;
	*out = ((double)room->payload.whole +
	    fraction_double(room->payload.rest)) / 8 *
	    (double)room->level_bytes_den /
	    (double)room->level_bytes_num[LEVEL_PAYLOAD];
	return 0;
}

static struct fraction
thousandths(double value)
{
	double whole = round(value * THOUSANDTHS);

	return fraction_make(whole < 1 ? 1 : (uint128)whole, THOUSANDTHS);
}

/* Packets of the other direction for one of this, were `other` of them sent
 * for one: more where the guess is too low. */
static int
answer(const struct circuit *circuit, const struct load *load, double other,
    struct ceiling *room, double *out, struct error *err)
{
	struct load own = *load, back = *load;
	double own_packets, back_packets;

	own.other_packets = thousandths(other);
	back.direction = load->direction == DIRECTION_A_TO_B ?
	    DIRECTION_B_TO_A : DIRECTION_A_TO_B;
	back.other_packets = thousandths(1 / other);
	if (packets_per_s(circuit, &own, room, &own_packets, err) == -1 ||
	    packets_per_s(circuit, &back, room, &back_packets, err) == -1)
		return -1;
	*out = back_packets / own_packets;
	return 0;
}

static int
search(const struct circuit *circuit, struct load *load,
    struct ceiling *room, struct error *err)
{
	double low = -log(BOTH_PACKETS_MOST), high = -low, found;
	int i;

	if (answer(circuit, load, 1, room, &found, err) == -1)
		return -1;
	if (fabs(found - 1) < 1e-12) {
		load->other_packets = fraction_whole(1);
		return 0;
	}
	/* x w + y a / d is either line's rate: y(x) / x falls where a guess of
	 * it rises, as long as an acknowledgement is shorter than d packets. */
	for (i = 0; i < HALVINGS; i++) {
		double guess = (low + high) / 2;

		if (answer(circuit, load, exp(guess), room, &found, err) == -1)
			return -1;
		if (found > exp(guess))
			low = guess;
		else
			high = guess;
	}
	load->other_packets = thousandths(exp((low + high) / 2));
	return 0;
}

int
both_settle(const struct circuit *circuit, struct load *load,
    struct error *err)
{
	struct layer_stack stack;
	struct ceiling *room;
	int rc;

	path_stack(circuit, 0, load, &stack);
	load->other_packets = fraction_whole(1);
	if (circuit_is_reference(circuit) ||
	    !stack.use[layers_transport(&stack)].layer->acknowledged)
		return 0;
	room = malloc(sizeof(*room));
	if (room == NULL)
		return error_errno(err, ERROR_INTERNAL, "ceiling");
	rc = search(circuit, load, room, err);
	free(room);
	return rc;
}
