/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * session: one control connection of this agent, whoever dialled it.
 *
 * The machine is in session_state.c; here are the messages.  A session is in
 * its agent's list and removes itself from there when it ends.  Silence of the
 * controller for longer than the limit of design (wire_limit_ns) stops the
 * load.
 */
#ifndef PLAFOND_SESSION_H
#define PLAFOND_SESSION_H

struct agent;
struct call;
struct error;
struct session;

/* Take an accepted socket. */
int session_accept(struct agent *agent, int fd, struct error *err);
/* Call somebody; the call is told (call_ended) when the session is over. */
int session_dial(struct agent *agent, struct call *call, struct error *err);
/* Take the socket pair of an embedded agent. */
int session_embed(struct agent *agent, int fd, struct error *err);
void session_free(struct session *session);

/* In agent.c: a call's session is over; it is made again after a while. */
void call_ended(struct call *call);

#endif
