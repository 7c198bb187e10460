/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "certificates.h"
#include "clock.h"
#include "error.h"
#include "field.h"
#include "identity.h"
#include "scratch.h"

#include <stdbool.h>
#include <string.h>

/* 2026-12-01T00:00:00Z: 20788 days after the epoch. */
#define NOW_UTC_NS (UINT64_C(20788) * 86400 * NS_PER_S)

struct fixture {
	char folder[SCRATCH_SIZE];
};

static int
set_up(void **state)
{
	struct fixture *f = calloc(1, sizeof(*f));

	scratch_make(f->folder);
	*state = f;
	return 0;
}

static int
tear_down(void **state)
{
	struct fixture *f = *state;

	scratch_remove(f->folder);
	free(f);
	return 0;
}

static void
a_pin_counts_the_key_alone(void **state)
{
	static const struct request old = { .common_name = "mast",
	    .from = "20000101000000Z", .until = "20000102000000Z" };
	static const struct request asked = { .common_name = "mast" };
	struct holder expired = issue(&old, NULL), other = issue(&asked, NULL);
	struct trust trust = { .pin = "" };
	struct error err;

	(void)state;
	assert_int_equal(identity_certificate_digest(expired.certificate,
	    trust.pin, &err), 0);
	assert_int_equal(trust_check(&trust, expired.certificate, NOW_UTC_NS,
	    &err), 0);
	assert_int_equal(trust_check(&trust, other.certificate, NOW_UTC_NS,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_REFUSED);
	assert_non_null(strstr(err.cause, "the peer's key is sha256:"));
	assert_non_null(strstr(err.cause, trust.pin));
	holder_free(&expired);
	holder_free(&other);
}

static void
without_any_declared_identity_nobody_is_trusted(void **state)
{
	static const struct request asked = { .common_name = "mast" };
	struct holder holder = issue(&asked, NULL);
	struct trust trust = { .name = "mast" };
	struct error err;

	(void)state;
	assert_false(trust_given(&trust));
	assert_int_equal(trust_check(&trust, holder.certificate, NOW_UTC_NS,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_REFUSED);
	assert_string_equal(err.cause,
	    "no identity is declared for this peer");
	holder_free(&holder);
}

/* What the authority has issued, asked for as "mast.example". */
static const struct {
	struct request request;
	bool foreign;			/* by an authority of the same name */
	const char *why;		/* NULL: trusted */
	const char *why_too;
} issued[] = {
	{ { .common_name = "mast.example" }, false, NULL, NULL },
	{ { .common_name = "anything", .dns_name = "mast.example" }, false,
	    NULL, NULL },
	{ { .common_name = "anything", .dns_name = "MAST.example" }, false,
	    NULL, NULL },
	/* RFC 6125, 6.4.4: with a DNS name the common name does not count. */
	{ { .common_name = "mast.example", .dns_name = "quay.example" },
	    false, "is for 'quay.example', expected 'mast.example'", "" },
	{ { .common_name = "quay.example" }, false,
	    "is for 'quay.example', expected 'mast.example'", "" },
	{ { .common_name = "x", .dns_name = "*.example" }, false,
	    "expected 'mast.example'", "" },
	{ { .common_name = "mast.example", .from = "20250101000000Z",
	    .until = "20261130235959Z" }, false,
	    "expired at 2026-11-30T23:59:59Z",
	    "clock says 2026-12-01T00:00:00.000Z: is one of the clocks" },
	{ { .common_name = "mast.example", .from = "20261201000100Z" }, false,
	    "is not valid before 2026-12-01T00:01:00Z", "clocks wrong?" },
	{ { .common_name = "mast.example" }, true,
	    "is issued by 'Harbour authority'", "does not stand" },
};

static void
an_authority_answers_for_names_and_dates(void **state)
{
	static const struct request own = { .common_name = "Harbour authority",
	    .authority = true };
	struct fixture *f = *state;
	struct holder authority = issue(&own, NULL);
	struct holder foreign = issue(&own, NULL);
	struct trust trust = { .name = "mast.example" };
	size_t i;

	(void)snprintf(trust.authority, sizeof(trust.authority), "%s/ca.pem",
	    f->folder);
	write_certificates(trust.authority, authority.certificate, NULL);
	assert_true(trust_given(&trust));
	for (i = 0; i < sizeof(issued) / sizeof(issued[0]); i++) {
		struct holder holder = issue(&issued[i].request,
		    issued[i].foreign ? &foreign : &authority);
		struct error err = { 0 };
		int rc = trust_check(&trust, holder.certificate, NOW_UTC_NS,
		    &err);

		if (issued[i].why == NULL ? rc != 0 : (rc != -1 ||
		    err.kind != ERROR_REFUSED ||
		    strstr(err.cause, issued[i].why) == NULL ||
		    strstr(err.cause, issued[i].why_too) == NULL))
			fail_msg("%zu: %s", i, err.cause);
		holder_free(&holder);
	}
	holder_free(&authority);
	holder_free(&foreign);
}

static void
an_expired_authority_and_a_missing_file_are_named(void **state)
{
	static const struct request old = { .common_name = "Old authority",
	    .authority = true, .until = "20210101000000Z" };
	static const struct request asked = { .common_name = "mast" };
	struct fixture *f = *state;
	struct holder authority = issue(&old, NULL);
	struct holder holder = issue(&asked, &authority);
	struct trust trust = { .name = "mast" };
	struct error err;

	(void)snprintf(trust.authority, sizeof(trust.authority), "%s/ca.pem",
	    f->folder);
	assert_int_equal(trust_check(&trust, holder.certificate, NOW_UTC_NS,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_REFUSED);
	assert_non_null(strstr(err.cause, trust.authority));
	write_certificates(trust.authority, authority.certificate, NULL);
	assert_int_equal(trust_check(&trust, holder.certificate, NOW_UTC_NS,
	    &err), -1);
	assert_non_null(strstr(err.cause, "the authority's certificate 'Old "
	    "authority' expired at 2021-01-01T00:00:00Z"));
	trust.name[0] = '\0';
	assert_int_equal(trust_check(&trust, holder.certificate,
	    UINT64_C(1600000000) * NS_PER_S, &err), -1);
	assert_non_null(strstr(err.cause, "no name is declared"));
	holder_free(&authority);
	holder_free(&holder);
}

static void
a_peers_name_cannot_forge_a_line(void **state)
{
	static const struct request own = { .common_name = "Harbour authority",
	    .authority = true };
	static const struct request asked = { .common_name =
	    "mast\n\x1b[31mtrusted" };
	struct fixture *f = *state;
	struct holder authority = issue(&own, NULL);
	struct holder holder = issue(&asked, &authority);
	struct trust trust = { .name = "mast" };
	struct error err;

	(void)snprintf(trust.authority, sizeof(trust.authority), "%s/ca.pem",
	    f->folder);
	write_certificates(trust.authority, authority.certificate, NULL);
	assert_int_equal(trust_check(&trust, holder.certificate, NOW_UTC_NS,
	    &err), -1);
	assert_null(strpbrk(err.cause, "\n\x1b"));
	holder_free(&authority);
	holder_free(&holder);
}

#define HEX16 "0123456789abcdef"
#define HEX64 HEX16 HEX16 HEX16 HEX16

static const struct {
	const char *text;		/* of a document */
	const char *why;		/* NULL: read */
} declared[] = {
	{ "identity: \"sha256:" HEX64 "\"\n", NULL },
	{ "identity: \"sha256:0123456789ABCDEF" HEX16 HEX16 HEX16 "\"\n",
	    NULL },
	{ "identity: { authority: ca.pem, name: mast.example }\n", NULL },
	{ "identity: \"sha256:" HEX64 "0\"\n", "64 hexadecimal digits" },
	{ "identity: \"sha256:0" HEX16 HEX16 HEX16 "\"\n",
	    "64 hexadecimal digits" },
	{ "identity: \"sha256:g123456789abcdef" HEX16 HEX16 HEX16 "\"\n",
	    "64 hexadecimal digits" },
	{ "identity: \"sha1:" HEX64 "\"\n", "allowed:" },
	{ "identity: \"" HEX64 "\"\n", "allowed:" },
	{ "identity: \"\"\n", "allowed:" },
	{ "identity: { authority: ca.pem }\n", "name" },
	{ "identity: { name: mast.example }\n", "authority" },
	{ "identity: { authority: ca.pem, name: mast, pin: x }\n", "pin" },
	{ "identity: [ a, b ]\n", "list" },
};

static void
a_declared_identity_is_a_digest_or_an_authority(void **state)
{
	static const struct field field = { .name = "identity",
	    .kind = FIELD_CUSTOM, .read = trust_read };
	size_t i;

	(void)state;
	for (i = 0; i < sizeof(declared) / sizeof(declared[0]); i++) {
		struct trust trust = { .pin = "" };
		struct node *root = NULL;
		struct error err = { 0 };
		int rc;

		assert_int_equal(document_read_text(declared[i].text,
		    strlen(declared[i].text), "circuit.yaml", &root, &err),
		    0);
		rc = trust_read(node_child(root, "identity"), &field, &trust,
		    &err);
		if (declared[i].why == NULL ? rc != 0 : (rc != -1 ||
		    strstr(err.cause, declared[i].why) == NULL ||
		    strstr(err.where, "circuit.yaml:1:") == NULL ||
		    err.kind != ERROR_INPUT || trust_given(&trust)))
			fail_msg("%zu: %s: %s", i, err.where, err.cause);
		if (i < 2)
			assert_string_equal(trust.pin, "sha256:" HEX64);
		if (i == 2) {
			assert_string_equal(trust.pin, "");
			assert_string_equal(trust.authority, "ca.pem");
			assert_string_equal(trust.name, "mast.example");
		}
		document_free(root);
	}
}

static void
an_absent_identity_is_empty_unless_it_is_required(void **state)
{
	struct field field = { .name = "identity", .kind = FIELD_CUSTOM,
	    .read = trust_read };
	struct trust trust;
	struct error err;

	(void)state;
	memset(&trust, 'x', sizeof(trust));
	assert_int_equal(trust_read(NULL, &field, &trust, &err), 0);
	assert_false(trust_given(&trust));
	field.required = true;
	assert_int_equal(trust_read(NULL, &field, &trust, &err), -1);
	assert_int_equal(err.kind, ERROR_INPUT);
	assert_non_null(strstr(err.cause, "identity"));
}

#define TEST(name) cmocka_unit_test_setup_teardown(name, set_up, tear_down)

int
main(void)
{
	const struct CMUnitTest tests[] = {
		TEST(a_pin_counts_the_key_alone),
		TEST(without_any_declared_identity_nobody_is_trusted),
		TEST(an_authority_answers_for_names_and_dates),
		TEST(an_expired_authority_and_a_missing_file_are_named),
		TEST(a_peers_name_cannot_forge_a_line),
		TEST(a_declared_identity_is_a_digest_or_an_authority),
		TEST(an_absent_identity_is_empty_unless_it_is_required),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
