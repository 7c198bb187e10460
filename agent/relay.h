/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * relay: pipes between a controller and an agent that called this agent.
 * This agent cannot read what passes: TLS runs end to end inside.
 */
#ifndef PLAFOND_RELAY_H
#define PLAFOND_RELAY_H

struct channel;
struct error;
struct relay;

/* Join two channels, which are taken over; the pipe removes itself from the
 * list when either side ends. */
int relay_start(struct relay **list, struct channel *left,
    struct channel *right, struct error *err);
void relay_free_all(struct relay **list);

#endif
