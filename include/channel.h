/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * channel: one control connection that carries framed JSON.
 *
 * A frame is a 4-byte big-endian length and one UTF-8 JSON object (RFC 8259),
 * at most CHANNEL_FRAME_MAX bytes; duplicate members are refused.  The
 * transport is TLS 1.3 over TCP, TLS inside another channel's raw bytes (a
 * relayed channel), or a bare socket pair between a program and its child.
 * Owns its bufferevent.  Never looks inside a message.
 *
 * Callbacks come from the event loop only, never from inside a call that the
 * user made.  `closed` comes exactly once unless the user frees the channel
 * first; either callback may free the channel.
 */
#ifndef PLAFOND_CHANNEL_H
#define PLAFOND_CHANNEL_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include <jansson.h>

#include "identity.h"

struct bufferevent;
struct channel;
struct error;
struct event_base;
struct ssl_ctx_st;

#define CHANNEL_FRAME_MAX (1024 * 1024)
#define CHANNEL_OUTPUT_MAX (8 * 1024 * 1024)	/* unsent bytes, then closed */

struct channel_callbacks {
	/* Connected and, with TLS, the peer's certificate is known. */
	void (*open)(struct channel *channel, void *arg);
	/* One message; borrowed for the call. */
	void (*message)(struct channel *channel, const json_t *message,
	    void *arg);
	/* Gone: why->kind is ERROR_NONE for an orderly end by the peer. */
	void (*closed)(struct channel *channel, const struct error *why,
	    void *arg);
};

/* Dial "host:port" or "[v6]:port" (a literal address or a name, looked up
 * without blocking).  Starts at once; `open` or `closed` follows within
 * open_limit_ns.  Returns owned, NULL with err. */
struct channel *channel_dial(struct event_base *base, const char *address,
    struct ssl_ctx_st *tls, uint64_t open_limit_ns,
    const struct channel_callbacks *callbacks, void *arg, struct error *err);
/* Take an accepted socket (closed on failure too) as TLS server. */
struct channel *channel_accept(struct event_base *base, int fd,
    struct ssl_ctx_st *tls, uint64_t open_limit_ns,
    const struct channel_callbacks *callbacks, void *arg, struct error *err);
/* Take one end of a socket pair, without TLS. */
struct channel *channel_pair(struct event_base *base, int fd,
    const struct channel_callbacks *callbacks, void *arg, struct error *err);
/* TLS inside `outer`, which must be open and is taken over: it stops framing
 * and carries raw bytes.  as_server says which side of the inner handshake.
 * What follows the message being delivered is raw already: call this (and
 * channel_join) from its callback.  NULL: the outer one is still the caller's.
 */
struct channel *channel_inside(struct event_base *base, struct channel *outer,
    struct ssl_ctx_st *tls, bool as_server, uint64_t open_limit_ns,
    const struct channel_callbacks *callbacks, void *arg, struct error *err);
/* Join two open channels into a pipe of raw bytes and take both over.  When
 * either ends, or takes no byte for 10 s, both end and `ended` is called once,
 * from the loop.  NULL: both are still the caller's. */
struct channel_relay;
struct channel_relay *channel_join(struct channel *left, struct channel *right,
    void (*ended)(struct channel_relay *relay, void *arg), void *arg,
    struct error *err);
void channel_relay_free(struct channel_relay *relay);	/* closes both */

/* Free, closing at once.  NULL is fine. */
void channel_free(struct channel *channel);
/* Send what is queued, then close; `closed` is not called.  Frees itself once
 * the peer has closed too, at the latest after 2 s; the loop must go on until
 * then.  Before `open` it is channel_free. */
void channel_finish(struct channel *channel);

/* Queue one message, before `open` too; takes the reference of `message` (NULL
 * is our bug).
 * -1: too large (ERROR_INTERNAL), or the peer does not read and
 * CHANNEL_OUTPUT_MAX is reached (ERROR_PEER). */
int channel_send(struct channel *channel, json_t *message, struct error *err);

/* Peer certificate against one trust; a socket pair is always trusted. */
int channel_check_trust(const struct channel *channel,
    const struct trust *trust, struct error *err);
/* "sha256:...", or "" on a socket pair; borrowed. */
const char *channel_peer_digest(const struct channel *channel);
/* "198.18.0.1:40112", or "socket pair"; borrowed. */
const char *channel_peer_address(const struct channel *channel);
/* The local address of the connection without port; "" on a socket pair. */
const char *channel_local_address(const struct channel *channel);
/* Replace the callbacks, e.g. when a conversation is handed on. */
void channel_set_callbacks(struct channel *channel,
    const struct channel_callbacks *callbacks, void *arg);

/* Pure: length of the frame that starts here.  1: complete, *length set to the
 * JSON bytes; 0: more bytes needed; -1 (ERROR_PEER): zero or too long. */
int frame_length(const unsigned char *bytes, size_t size, size_t *length,
    struct error *err);
/* Pure: JSON text of a frame to an owned object.  -1 (ERROR_PEER): not UTF-8,
 * not JSON, not an object, duplicate member, deeper than 32, integer outside
 * +-(2^53 - 1). */
int frame_decode(const char *text, size_t size, json_t **out,
    struct error *err);

/* Listen on "address:port" or "[v6]:port" (port 0: any); returns the fd. */
int listen_on(const char *address, uint16_t *port, struct error *err);
/* Split "host:port", "[v6]:port", "host" (default_port); -1: ERROR_INPUT. */
int address_split(const char *text, uint16_t default_port, char *host,
    size_t host_size, uint16_t *port, struct error *err);

#endif
