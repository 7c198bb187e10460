/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * link_inside: what link.c (machine, reaching, requests, life) and
 * link_message.c (what the agent says) need of each other.
 */
#ifndef PLAFOND_LINK_INSIDE_H
#define PLAFOND_LINK_INSIDE_H

#include "channel.h"
#include "conduct/link.h"

extern const struct channel_callbacks link_channel_callbacks;

void link_step(struct link *link, enum link_event event);
/* The connection is of no use any more. */
void link_lose(struct link *link, const struct error *why);
void link_send(struct link *link, json_t *message);
void link_watch_silence(struct link *link);
void link_say_hello(struct link *link);

#endif
