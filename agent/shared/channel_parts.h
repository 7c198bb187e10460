/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * channel_parts: the inside of a channel, for the files that make it up:
 * channel.c (life and callbacks), channel_open.c (ways to open one),
 * channel_relay.c (two joined into a pipe).
 *
 *   CONNECTING --> HANDSHAKING --> OPENING --> OPEN --> FINISHING --> (freed)
 *    (dial)         (TLS)                       |
 *                                               +--> LENT (to an inner channel
 *   any state but LENT and FINISHING --> ENDED       or to a relay)
 *
 * ENDED is entered just before `closed` is called.  An object that is freed
 * inside its own callback lives until that callback has returned (depth).
 */
#ifndef PLAFOND_SHARED_CHANNEL_PARTS_H
#define PLAFOND_SHARED_CHANNEL_PARTS_H

#include <openssl/ssl.h>
#include <openssl/x509.h>

#include "channel.h"
#include "error.h"

/* state, what it waits for in the words of a message */
#define CHANNEL_STATES(X)					\
	X(CONNECTING, "while connecting")			\
	X(HANDSHAKING, "during the TLS handshake")		\
	X(OPENING, "before it was open")			\
	X(OPEN, "while open")					\
	X(LENT, "while carrying another one")			\
	X(FINISHING, "while finishing")				\
	X(ENDED, "after its end")
#define CHANNEL_ENUM(id, text) CHANNEL_##id,
enum channel_state { CHANNEL_STATES(CHANNEL_ENUM) CHANNEL_STATE_COUNT };
#undef CHANNEL_ENUM

#define CHANNEL_ADDRESS_SIZE 80		/* "[v6%interface]:port" */
#define CHANNEL_FINISH_NS UINT64_C(2000000000)

struct bufferevent;
struct dialer;
struct evbuffer;
struct evbuffer_cb_entry;
struct event;

struct channel {
	struct event_base *base;	/* borrowed: outlives us */
	enum channel_state state;
	struct channel_callbacks callbacks;
	void *arg;

	struct dialer *dialer;		/* owned; CONNECTING only */
	struct bufferevent *bev;	/* owned, with all that lies below */
	struct evbuffer_cb_entry *watch;	/* FINISHING: of what is sent */
	struct channel *outer;		/* owned; a channel inside, or NULL */
	struct evbuffer *early;		/* owned; sent before it was open */
	SSL_CTX *tls;			/* owned reference; NULL: a pair */
	X509 *peer;			/* owned; NULL before OPEN */
	STACK_OF(X509) *chain;		/* owned; what the peer sent with it */
	char peer_digest[IDENTITY_DIGEST_SIZE];
	char peer_address[CHANNEL_ADDRESS_SIZE];
	char local_address[CHANNEL_ADDRESS_SIZE];

	struct event *turn;		/* owned: go on from the loop */
	struct event *deadline;		/* owned: of opening, of finishing */
	uint64_t limit_ns;		/* of opening, for the message */
	bool greeted;			/* the TLS handshake is done */
	bool over;			/* nothing more comes from the peer */
	bool broken;			/* and nothing more can be sent */
	bool shut;			/* FINISHING: TLS ends are announced */
	bool half_closed;		/* FINISHING: and all bytes are sent */
	struct error why;		/* of the end that comes next */

	unsigned depth;			/* of our callbacks on the stack */
	bool doomed;			/* free once depth is 0 again */
};

/* A channel without a transport; NULL with err. */
struct channel *channel_new(struct event_base *base,
    const struct channel_callbacks *callbacks, void *arg, struct error *err);
/* Take a bufferevent as the transport, and hear of what comes. */
void channel_attach(struct channel *channel, struct bufferevent *bev);
/* Stop framing: no more callbacks, no more turns. */
void channel_lend(struct channel *channel);
/* Begin a callback from the loop; end it, which may free the channel. */
void channel_enter(struct channel *channel);
void channel_leave(struct channel *channel);
/* Close the transport and report `why`, unless it was reported. */
void channel_end(struct channel *channel, const struct error *why);
/* Go on in the loop's next turn. */
void channel_wake(struct channel *channel);
void channel_set_deadline(struct channel *channel, uint64_t limit_ns);

/* Bytes written that the kernel has not taken, over all layers. */
size_t channel_unsent(struct bufferevent *bev);
/* The socket's own bufferevent below all layers. */
struct bufferevent *channel_bottom(struct bufferevent *bev);

#endif
