/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * policy: what this agent's owner allows, from a YAML file.
 *
 * Its limits always win over what a controller asks for.  Without a file the
 * agent listens and commands nobody: no controller is trusted.
 */
#ifndef PLAFOND_POLICY_H
#define PLAFOND_POLICY_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <sys/socket.h>

#include "field.h"
#include "identity.h"
#include "trial.h"

struct error;

#define POLICY_CONTROLLERS_MAX 64
#define POLICY_PEERS_MAX 64
#define POLICY_CALLERS_MAX 64
#define POLICY_CALLS_MAX 16
#define POLICY_TRIALS_AT_ONCE_MAX 8

struct prefix {
	int family;			/* AF_INET, AF_INET6 */
	unsigned char address[16];
	unsigned bits;
};
struct policy_controller {
	struct trust trust;
};
struct policy_caller {
	char name[64];
	struct trust trust;
};
struct policy_call {
	char address[256];
	struct trust trust;
};

struct policy {
	char name[64];
	char listen[256];		/* control, "address:port" */
	uint64_t data_port;		/* first of trials_at_once ports; 0:
					 * any free one (embedded) */
	struct policy_controller controllers[POLICY_CONTROLLERS_MAX];
	size_t controllers_count;
	struct prefix peers[POLICY_PEERS_MAX];
	size_t peers_count;
	struct policy_caller callers[POLICY_CALLERS_MAX];
	size_t callers_count;
	struct policy_call calls[POLICY_CALLS_MAX];
	size_t calls_count;
	uint64_t longest_trial_ns;
	uint64_t highest_rate_bps;	/* 0: no limit */
	uint64_t trials_at_once;
};

extern const struct field policy_fields[];

/* All defaults: no controllers, no peers. */
void policy_init(struct policy *policy);
/* For an embedded agent: load within 127.0.0.0/8 and ::1 only. */
void policy_init_embedded(struct policy *policy);
/* -1: ERROR_ABSENT, ERROR_READ, ERROR_POLICY with file:line:column. */
int policy_read_file(const char *path, struct policy *out, struct error *err);

bool policy_allows_peer(const struct policy *policy,
    const struct sockaddr *address);
/* -1 (ERROR_REFUSED): which limit, found, allowed. */
int policy_check_trial(const struct policy *policy, const struct trial *trial,
    struct error *err);
int prefix_parse(const char *text, struct prefix *out, struct error *err);
bool prefix_holds(const struct prefix *prefix, const struct sockaddr *address);

#endif
