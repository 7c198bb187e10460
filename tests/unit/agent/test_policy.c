/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <arpa/inet.h>
#include <netinet/in.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/un.h>

#include "error.h"
#include "policy.h"
#include "shared/scratch.h"

#define PIN "sha256:00112233445566778899aabbccddeeff" \
    "00112233445566778899aabbccddeeff"

static struct policy policy;	/* too large for a stack */

static int
read_text(const char *text, struct error *err)
{
	char folder[SCRATCH_SIZE], path[SCRATCH_SIZE + 16];
	FILE *file;
	int rc;

	memset(err, 0, sizeof(*err));
	scratch_make(folder);
	(void)snprintf(path, sizeof(path), "%s/agent.yaml", folder);
	file = fopen(path, "w");
	assert_non_null(file);
	assert_int_equal(fwrite(text, 1, strlen(text), file), strlen(text));
	assert_int_equal(fclose(file), 0);
	rc = policy_read_file(path, &policy, err);
	scratch_remove(folder);
	return rc;
}

/* --- prefixes ---------------------------------------------------------- */

static bool
holds(const char *prefix_text, const char *address)
{
	struct sockaddr_in v4 = { .sin_family = AF_INET };
	struct sockaddr_in6 v6 = { .sin6_family = AF_INET6 };
	struct prefix prefix;
	struct error err;

	assert_int_equal(prefix_parse(prefix_text, &prefix, &err), 0);
	if (inet_pton(AF_INET, address, &v4.sin_addr) == 1)
		return prefix_holds(&prefix, (struct sockaddr *)&v4);
	assert_int_equal(inet_pton(AF_INET6, address, &v6.sin6_addr), 1);
	return prefix_holds(&prefix, (struct sockaddr *)&v6);
}

static void
a_prefix_holds_the_addresses_that_begin_with_its_bits(void **state)
{
	static const char cidr[] = "RFC 4632, 3.1", v6[] = "RFC 4291, 2.3";
	static const char mapped[] = "RFC 4291 section 2.5.5.2";
	static const struct {
		const char *prefix, *address;
		bool holds;
		const char *source;
	} rows[] = {
		{ "198.18.0.0/15", "198.18.0.0", true, cidr },
		{ "198.18.0.0/15", "198.19.255.255", true, cidr },
		{ "198.18.0.0/15", "198.20.0.0", false, cidr },
		{ "198.18.0.0/15", "198.17.255.255", false, cidr },
		{ "198.18.0.77/15", "198.19.0.1", true, cidr },
		{ "0.0.0.0/0", "255.255.255.255", true, cidr },
		{ "198.18.0.0/0", "1.2.3.4", true, cidr },
		{ "128.0.0.0/1", "127.255.255.255", false, cidr },
		{ "128.0.0.0/1", "128.0.0.0", true, cidr },
		{ "198.18.0.1/32", "198.18.0.1", true, cidr },
		{ "198.18.0.1/32", "198.18.0.0", false, cidr },
		{ "198.18.0.1", "198.18.0.1", true, cidr },
		{ "198.18.0.1", "198.18.0.3", false, cidr },
		{ "198.18.0.0/31", "198.18.0.1", true, cidr },
		{ "198.18.0.0/31", "198.18.0.2", false, cidr },
		{ "198.18.8.0/21", "198.18.15.255", true, cidr },
		{ "198.18.8.0/21", "198.18.16.0", false, cidr },
		{ "2001:2::/48", "2001:2:0:ffff::1", true, v6 },
		{ "2001:2::/48", "2001:2:1::1", false, v6 },
		{ "2001:2::/47", "2001:2:1::1", true, v6 },
		{ "2001:2::/47", "2001:2:2::1", false, v6 },
		{ "2001:2::1/128", "2001:2::1", true, v6 },
		{ "2001:2::1/128", "2001:2::", false, v6 },
		{ "2001:2::1", "2001:2::1", true, v6 },
		{ "2001:2::1", "2001:2::2", false, v6 },
		{ "2001:2::/127", "2001:2::1", true, v6 },
		{ "2001:2::/127", "2001:2::2", false, v6 },
		{ "::/0", "2001:2::1", true, v6 },
		{ "::1", "::1", true, v6 },
		/* one family says nothing of the other */
		{ "0.0.0.0/0", "2001:2::1", false, v6 },
		{ "::/0", "198.18.0.1", false, v6 },
		/* an IPv4 peer at a socket that listens on [::] */
		{ "198.18.0.0/15", "::ffff:198.19.0.1", true, mapped },
		{ "198.18.0.0/15", "::ffff:198.20.0.1", false, mapped },
		{ "0.0.0.0/0", "::ffff:1.2.3.4", true, mapped },
		{ "198.18.0.1/32", "::ffff:198.18.0.1", true, mapped },
		{ "::/0", "::ffff:198.18.0.1", false, mapped },
		{ "0.0.0.0/0", "::198.18.0.1", false, mapped },
		/* and an IPv4 prefix written so */
		{ "::ffff:198.18.0.0/111", "198.19.0.1", true, mapped },
		{ "::ffff:198.18.0.0/111", "::ffff:198.19.0.1", true, mapped },
		{ "::ffff:198.18.0.0/111", "198.20.0.1", false, mapped },
		{ "::ffff:0:0/96", "1.2.3.4", true, mapped },
		{ "::ffff:198.18.0.1", "198.18.0.1", true, mapped },
		{ "::ffff:198.18.0.1", "198.18.0.2", false, mapped },
	};

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++)
		if (holds(rows[i].prefix, rows[i].address) != rows[i].holds)
			fail_msg("%s and %s (%s)", rows[i].prefix,
			    rows[i].address, rows[i].source);
}

static void
every_length_of_a_prefix_counts_its_bits(void **state)
{
	(void)state;
	for (unsigned bits = 1; bits <= 32; bits++) {
		char prefix[32], address[32];
		uint32_t in = UINT32_C(0xc6123456), out;

		/* the last bit that counts, and the first that does not */
		out = in ^ (UINT32_C(1) << (32 - bits));
		(void)snprintf(prefix, sizeof(prefix), "198.18.52.86/%u",
		    bits);
		(void)snprintf(address, sizeof(address), "%u.%u.%u.%u",
		    out >> 24, out >> 16 & 255, out >> 8 & 255, out & 255);
		assert_false(holds(prefix, address));
		if (bits == 32)
			continue;
		out = in ^ (UINT32_C(1) << (31 - bits));
		(void)snprintf(address, sizeof(address), "%u.%u.%u.%u",
		    out >> 24, out >> 16 & 255, out >> 8 & 255, out & 255);
		assert_true(holds(prefix, address));
	}
}

static void
a_text_that_is_no_prefix_is_refused(void **state)
{
	static const char *const texts[] = { "", "/", "/8", "198.18.0.0/",
		"198.18.0.0/33", "198.18.0.0/-1", "198.18.0.0/+8",
		"198.18.0.0/8 ", "198.18.0.0/ 8", "198.18.0.0/8/8",
		"198.18.0/15", "198.18.0.0.0", "198.18.0.256", "0x7f.0.0.1",
		" 198.18.0.0/15", "2001:2::/129", "2001:2::/0x10", "2001:2:/48",
		"[2001:2::]/48", "fe80::1%eth0/64", "host.example/8", "any",
		"1111111111111111111111111111111111111111111111111111111/8" };
	struct prefix prefix = { .family = 77 };
	struct error err;

	(void)state;
	for (size_t i = 0; i < sizeof(texts) / sizeof(texts[0]); i++) {
		if (prefix_parse(texts[i], &prefix, &err) == 0)
			fail_msg("taken: '%s'", texts[i]);
		assert_int_equal(err.kind, ERROR_INPUT);
		assert_non_null(strstr(err.cause, "allowed: an address "
		    "prefix such as 198.18.0.0/15 or 2001:2::/48"));
		assert_int_equal(prefix.family, 77);
	}
}

static void
an_address_of_another_family_is_in_no_prefix(void **state)
{
	struct sockaddr_un local = { .sun_family = AF_UNIX };
	struct prefix prefix;
	struct error err;

	(void)state;
	assert_int_equal(prefix_parse("0.0.0.0/0", &prefix, &err), 0);
	assert_false(prefix_holds(&prefix, (struct sockaddr *)&local));
	assert_int_equal(prefix_parse("::/0", &prefix, &err), 0);
	assert_false(prefix_holds(&prefix, (struct sockaddr *)&local));
}

/* --- files ------------------------------------------------------------- */

static void
without_a_file_nobody_commands_and_nobody_is_a_peer(void **state)
{
	(void)state;
	memset(&policy, 0xff, sizeof(policy));
	policy_init(&policy);
	assert_string_equal(policy.name, "agent");
	assert_string_equal(policy.listen, "[::]:61741");
	assert_int_equal(policy.data_port, 61742);
	assert_int_equal(policy.controllers_count, 0);
	assert_int_equal(policy.peers_count, 0);
	assert_int_equal(policy.callers_count, 0);
	assert_int_equal(policy.calls_count, 0);
	assert_int_equal(policy.longest_trial_ns, UINT64_C(60000000000));
	assert_int_equal(policy.highest_rate_bps, 0);
	assert_int_equal(policy.trials_at_once, 1);
}

static bool
allows(const char *address)
{
	struct sockaddr_in v4 = { .sin_family = AF_INET };
	struct sockaddr_in6 v6 = { .sin6_family = AF_INET6 };

	if (inet_pton(AF_INET, address, &v4.sin_addr) == 1)
		return policy_allows_peer(&policy, (struct sockaddr *)&v4);
	assert_int_equal(inet_pton(AF_INET6, address, &v6.sin6_addr), 1);
	return policy_allows_peer(&policy, (struct sockaddr *)&v6);
}

static void
an_embedded_agent_loads_the_loopback_only(void **state)
{
	(void)state;
	policy_init_embedded(&policy);
	assert_true(allows("127.0.0.1"));
	assert_true(allows("127.255.0.9"));
	assert_true(allows("::1"));
	assert_true(allows("::ffff:127.0.0.1"));
	assert_false(allows("128.0.0.1"));
	assert_false(allows("126.255.255.255"));
	assert_false(allows("198.18.0.1"));
	assert_false(allows("::"));
	assert_false(allows("::2"));
	assert_false(allows("fe80::1"));
	assert_false(allows("::ffff:198.18.0.1"));
	assert_int_equal(policy.controllers_count, 0);
	assert_int_equal(policy.data_port, 0);
	assert_int_equal(policy.trials_at_once, 1);
}

static void
a_whole_policy_is_read(void **state)
{
	struct error err;
	char text[1024];

	(void)state;
	if (read_text(
	    "name: quay\n"
	    "listen: \"198.18.0.1:5000\"\n"
	    "data-port: 5001\n"
	    "controllers:\n"
	    "  - " PIN "\n"
	    "  - { authority: /etc/ca.pem, name: desk.example }\n"
	    "peers: [ 198.18.0.0/15, \"2001:2::/48\" ]\n"
	    "callers: [ { name: mast, identity: \"" PIN "\" } ]\n"
	    "calls:\n"
	    "  - address: \"desk.example:61741\"\n"
	    "    identity: " PIN "\n"
	    "longest-trial: 2 h\n"
	    "highest-rate: 500 Mbit/s\n"
	    "trials-at-once: 8\n", &err) == -1)
		fail_msg("%s", error_text(&err, text, sizeof(text)));
	assert_string_equal(policy.name, "quay");
	assert_string_equal(policy.listen, "198.18.0.1:5000");
	assert_int_equal(policy.data_port, 5001);
	assert_int_equal(policy.controllers_count, 2);
	assert_string_equal(policy.controllers[0].trust.pin, PIN);
	assert_string_equal(policy.controllers[1].trust.authority,
	    "/etc/ca.pem");
	assert_string_equal(policy.controllers[1].trust.name, "desk.example");
	assert_int_equal(policy.peers_count, 2);
	assert_true(allows("198.19.0.1"));
	assert_true(allows("2001:2::9"));
	assert_false(allows("198.20.0.1"));
	assert_int_equal(policy.callers_count, 1);
	assert_string_equal(policy.callers[0].name, "mast");
	assert_string_equal(policy.callers[0].trust.pin, PIN);
	assert_int_equal(policy.calls_count, 1);
	assert_string_equal(policy.calls[0].address, "desk.example:61741");
	assert_string_equal(policy.calls[0].trust.pin, PIN);
	assert_int_equal(policy.longest_trial_ns, UINT64_C(7200000000000));
	assert_int_equal(policy.highest_rate_bps, 500000000);
	assert_int_equal(policy.trials_at_once, 8);
}

static void
an_omitted_field_has_its_default(void **state)
{
	struct error err;

	(void)state;
	assert_int_equal(read_text("name: quay\n", &err), 0);
	assert_int_equal(policy.highest_rate_bps, 0);
	assert_int_equal(policy.data_port, 61742);
	assert_int_equal(policy.peers_count, 0);
	assert_int_equal(read_text("peers: []\ncontrollers: []\n", &err), 0);
	assert_int_equal(policy.peers_count, 0);
	assert_int_equal(policy.controllers_count, 0);
}

static void
what_is_wrong_is_named_with_its_place(void **state)
{
	static const struct {
		const char *text, *place, *says;
	} rows[] = {
		{ "nmae: quay\n", ":1:1", "'name'" },
		{ "name: quay\nname: mast\n", ":2:1", "name" },
		{ "name: \"" "0123456789012345678901234567890123456789"
		    "0123456789012345678901234" "\"\n", ":1:7", "name" },
		{ "data-port: 0\n", ":1:12", "data-port" },
		{ "data-port: 65529\n", ":1:12", "65528" },
		{ "data-port: 80 \n\npeers: 198.18.0.0/15\n", ":3:8",
		    "peers" },
		{ "peers:\n  - 198.18.0.0/15\n  - 198.18.0.0/33\n", ":3:5",
		    "'198.18.0.0/33'" },
		{ "peers:\n  - [ 198.18.0.0/15 ]\n", ":2:5", "peers" },
		{ "peers: { a: b }\n", ":1:8", "peers" },
		{ "controllers: " PIN "\n", ":1:14", "controllers" },
		{ "controllers:\n - sha256:00\n", ":2:4", "sha256" },
		{ "controllers:\n - [ x ]\n", ":2:4", "identity" },
		{ "controllers:\n - { authority: /ca.pem }\n", ":2:4",
		    "name" },
		{ "callers: [ { name: mast } ]\n", ":1:12", "identity" },
		{ "callers: [ { identity: \"" PIN "\" } ]\n", ":1:12",
		    "name" },
		{ "calls: [ { addres: x, identity: \"" PIN "\" } ]\n",
		    ":1:12", "'address'" },
		{ "longest-trial: 999 ms\n", ":1:16", "longest-trial" },
		{ "longest-trial: 25 h\n", ":1:16", "longest-trial" },
		{ "longest-trial: 60\n", ":1:16", "longest-trial" },
		{ "highest-rate: 0 bit/s\n", ":1:15", "highest-rate" },
		{ "highest-rate: 5 MHz\n", ":1:15", "highest-rate" },
		{ "trials-at-once: 0\n", ":1:17", "trials-at-once" },
		{ "trials-at-once: 9\n", ":1:17", "trials-at-once" },
		{ "- quay\n", ":1:1", "policy" },
		{ "name: &a quay\n", ":1:7", "" },
		{ "name: [\n", ":", "" },
	};
	char text[1024];
	struct error err;

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++) {
		policy_init(&policy);
		if (read_text(rows[i].text, &err) == 0)
			fail_msg("taken: %s", rows[i].text);
		(void)error_text(&err, text, sizeof(text));
		if (err.kind != ERROR_POLICY ||
		    strstr(text, "agent.yaml:") == NULL ||
		    strstr(text, rows[i].place) == NULL ||
		    strstr(text, rows[i].says) == NULL)
			fail_msg("%s\nis: %s", rows[i].text, text);
		/* outputs are written on success only */
		assert_string_equal(policy.name, "agent");
		assert_int_equal(policy.peers_count, 0);
	}
}

static void
a_policy_that_is_not_there_is_absent(void **state)
{
	struct error err;

	(void)state;
	assert_int_equal(policy_read_file("scratch.no/agent.yaml", &policy,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_ABSENT);
}

/* A list of so many of the same, below one key. */
static char *
list_text(const char *key, const char *item, size_t count)
{
	size_t size = 64 + count * (strlen(item) + 8), used;
	char *text = malloc(size);

	assert_non_null(text);
	used = (size_t)snprintf(text, size, "%s:\n", key);
	for (size_t i = 0; i < count; i++)
		used += (size_t)snprintf(text + used, size - used, "  - %s\n",
		    item);
	return text;
}

static void
every_list_has_a_tested_limit(void **state)
{
	static const struct {
		const char *key, *item;
		size_t most;
	} rows[] = {
		{ "controllers", PIN, POLICY_CONTROLLERS_MAX },
		{ "peers", "198.18.0.1", POLICY_PEERS_MAX },
		{ "callers", "{ name: m, identity: \"" PIN "\" }",
		    POLICY_CALLERS_MAX },
		{ "calls", "{ address: m, identity: \"" PIN "\" }",
		    POLICY_CALLS_MAX },
	};
	struct error err;

	(void)state;
	for (size_t i = 0; i < sizeof(rows) / sizeof(rows[0]); i++) {
		char *text = list_text(rows[i].key, rows[i].item,
		    rows[i].most);
		char *longer = list_text(rows[i].key, rows[i].item,
		    rows[i].most + 1);

		assert_int_equal(read_text(text, &err), 0);
		assert_int_equal(read_text(longer, &err), -1);
		assert_int_equal(err.kind, ERROR_POLICY);
		assert_non_null(strstr(err.cause, rows[i].key));
		free(longer);
		free(text);
	}
}

/* --- trials ------------------------------------------------------------ */

static void
a_trial_beyond_the_policy_is_refused_by_its_limit(void **state)
{
	struct trial trial = { .duration_ns = UINT64_C(60000000000),
		.row_ns = 100000000, .protocol = PROTOCOL_TCP };
	struct error err;

	(void)state;
	policy_init(&policy);
	assert_int_equal(policy_check_trial(&policy, &trial, &err), 0);
	trial.duration_ns += trial.row_ns;
	assert_int_equal(policy_check_trial(&policy, &trial, &err), -1);
	assert_int_equal(err.kind, ERROR_REFUSED);
	assert_non_null(strstr(err.cause, "60.1 s"));
	assert_non_null(strstr(err.cause, "at most 60 s"));
	trial.duration_ns = UINT64_C(1000000000);
	trial.row_ns = UINT64_C(300000000);
	assert_int_equal(policy_check_trial(&policy, &trial, &err), -1);
	assert_int_equal(err.kind, ERROR_REFUSED);
	trial.row_ns = UINT64_C(250000000);
	assert_int_equal(policy_check_trial(&policy, &trial, &err), 0);
	trial.protocol = PROTOCOL_UDP;
	assert_int_equal(policy_check_trial(&policy, &trial, &err), -1);
	assert_non_null(strstr(err.cause, "udp"));
	trial.protocol = PROTOCOL_TCP_TLS;
	assert_int_equal(policy_check_trial(&policy, &trial, &err), -1);
	assert_non_null(strstr(err.cause, "tcp+tls"));
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(
		    a_prefix_holds_the_addresses_that_begin_with_its_bits),
		cmocka_unit_test(every_length_of_a_prefix_counts_its_bits),
		cmocka_unit_test(a_text_that_is_no_prefix_is_refused),
		cmocka_unit_test(an_address_of_another_family_is_in_no_prefix),
		cmocka_unit_test(
		    without_a_file_nobody_commands_and_nobody_is_a_peer),
		cmocka_unit_test(an_embedded_agent_loads_the_loopback_only),
		cmocka_unit_test(a_whole_policy_is_read),
		cmocka_unit_test(an_omitted_field_has_its_default),
		cmocka_unit_test(what_is_wrong_is_named_with_its_place),
		cmocka_unit_test(a_policy_that_is_not_there_is_absent),
		cmocka_unit_test(every_list_has_a_tested_limit),
		cmocka_unit_test(
		    a_trial_beyond_the_policy_is_refused_by_its_limit),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
