/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include "certificates.h"
#include "error.h"
#include "identity.h"
#include "scratch.h"

#include <fcntl.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#include <openssl/ssl.h>

struct fixture {
	char folder[SCRATCH_SIZE];
	char state[64];			/* folder/a/b, not made yet */
	char file[96];			/* state/identity.pem */
};

static int
set_up(void **state)
{
	struct fixture *f = calloc(1, sizeof(*f));

	scratch_make(f->folder);
	(void)snprintf(f->state, sizeof(f->state), "%s/a/b", f->folder);
	(void)snprintf(f->file, sizeof(f->file), "%s/identity.pem", f->state);
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

static struct identity *
open_or_fail(const char *folder)
{
	struct identity *identity = NULL;
	struct error err = { 0 };

	if (identity_open(folder, "quay", &identity, &err) == -1)
		fail_msg("%s", err.cause);
	return identity;
}

static mode_t
mode_of(const char *path)
{
	struct stat st;

	assert_int_equal(stat(path, &st), 0);
	return st.st_mode & 07777;
}

/* The first line that the command prints. */
static bool
output_of(const char *command, char *buf, size_t size)
{
	FILE *f = popen(command, "r");
	bool found = f != NULL && fgets(buf, (int)size, f) != NULL;

	if (f == NULL || pclose(f) != 0 || !found)
		return false;
	buf[strcspn(buf, "\n")] = '\0';
	return true;
}

static void
the_first_start_makes_an_identity_and_the_second_finds_it(void **state)
{
	struct fixture *f = *state;
	struct identity *first = open_or_fail(f->state);
	struct identity *second = open_or_fail(f->state);
	char path[80];

	assert_string_equal(identity_digest(first), identity_digest(second));
	assert_string_equal(identity_path(first), f->file);
	assert_int_equal(mode_of(f->file), 0600);
	assert_int_equal(mode_of(f->state), 0700);
	(void)snprintf(path, sizeof(path), "%s/a", f->folder);
	assert_int_equal(mode_of(path), 0700);
	/* No draft is left behind. */
	assert_int_equal(unlink(f->file), 0);
	assert_int_equal(rmdir(f->state), 0);
	identity_free(first);
	identity_free(second);
}

/* source: the openssl program, as its own implementation of RFC 5280 */
static void
the_digest_is_what_openssl_computes(void **state)
{
	struct fixture *f = *state;
	struct identity *identity = open_or_fail(f->state);
	char command[300], output[128], expected[80];
	size_t i;

	for (i = 0; i < 2; i++) {
		(void)snprintf(command, sizeof(command), i == 0 ?
		    "openssl pkey -in %s -pubout -outform DER | "
		    "openssl dgst -sha256 -r" :
		    "openssl x509 -in %s -noout -pubkey | "
		    "openssl pkey -pubin -outform DER | "
		    "openssl dgst -sha256 -r", f->file);
		if (!output_of(command, output, sizeof(output))) {
			identity_free(identity);
			skip();
		}
		(void)snprintf(expected, sizeof(expected), "sha256:%.64s",
		    output);
		assert_string_equal(identity_digest(identity), expected);
	}
	identity_free(identity);
}

static void
the_certificate_holds_a_name_and_nothing_else(void **state)
{
	struct fixture *f = *state;
	struct identity *identity = open_or_fail(f->state);
	FILE *file = fopen(f->file, "r");
	X509 *certificate = PEM_read_X509(file, NULL, NULL, NULL);
	X509_NAME *name = X509_get_subject_name(certificate);
	char common_name[65], group[32], digest[IDENTITY_DIGEST_SIZE];
	EVP_PKEY *key = X509_get0_pubkey(certificate);
	struct error err;
	struct tm tm;

	(void)fclose(file);
	assert_int_equal(X509_NAME_entry_count(name), 1);
	assert_int_equal(X509_NAME_get_text_by_NID(name, NID_commonName,
	    common_name, sizeof(common_name)), 4);
	assert_string_equal(common_name, "quay");
	assert_int_equal(X509_get_ext_count(certificate), 0);
	assert_int_equal(X509_verify(certificate, key), 1);
	assert_int_equal(EVP_PKEY_get_group_name(key, group, sizeof(group),
	    NULL), 1);
	assert_string_equal(group, "prime256v1");
	assert_int_equal(ASN1_TIME_to_tm(X509_get0_notAfter(certificate),
	    &tm), 1);
	assert_int_equal(tm.tm_year, 9999 - 1900);
	assert_int_equal(identity_certificate_digest(certificate, digest,
	    &err), 0);
	assert_string_equal(digest, identity_digest(identity));
	X509_free(certificate);
	identity_free(identity);
}

static void
two_programs_have_two_identities(void **state)
{
	struct fixture *f = *state;
	struct identity *one = open_or_fail(f->state), *other;

	(void)strcat(f->state, "-other");
	other = open_or_fail(f->state);
	assert_string_not_equal(identity_digest(one), identity_digest(other));
	identity_free(one);
	identity_free(other);
}

#define RACERS 6

static void
first_starts_at_the_same_time_end_with_one_identity(void **state)
{
	struct fixture *f = *state;
	char digests[RACERS][IDENTITY_DIGEST_SIZE];
	int go[2], result[2], i, status;
	struct identity *identity;
	struct error err;
	char byte;

	assert_int_equal(pipe(go), 0);
	assert_int_equal(pipe(result), 0);
	for (i = 0; i < RACERS; i++) {
		if (fork() != 0)
			continue;
		(void)close(go[1]);
		(void)!read(go[0], &byte, 1);	/* all start at its end */
		if (identity_open(f->state, "quay", &identity, &err) == -1)
			_exit(1);
		(void)!write(result[1], identity_digest(identity),
		    IDENTITY_DIGEST_SIZE);
		_exit(0);
	}
	(void)close(go[0]);
	(void)close(go[1]);
	for (i = 0; i < RACERS; i++) {
		assert_true(wait(&status) > 0);
		assert_int_equal(status, 0);
	}
	for (i = 0; i < RACERS; i++) {
		assert_int_equal(read(result[0], digests[i],
		    IDENTITY_DIGEST_SIZE), IDENTITY_DIGEST_SIZE);
		assert_string_equal(digests[i], digests[0]);
	}
	(void)close(result[0]);
	(void)close(result[1]);
	identity = open_or_fail(f->state);
	assert_string_equal(identity_digest(identity), digests[0]);
	identity_free(identity);
}

static void
expect_refusal(const char *folder, enum error_kind kind, const char *what)
{
	struct identity *identity = NULL;
	struct error err = { 0 };

	assert_int_equal(identity_open(folder, "quay", &identity, &err), -1);
	assert_null(identity);
	if (err.kind != kind || strstr(err.cause, what) == NULL)
		fail_msg("kind %d: %s", (int)err.kind, err.cause);
}

static void
a_key_that_others_can_read_is_refused(void **state)
{
	static const mode_t modes[] = { 0640, 0604, 0620, 0644, 0601 };
	struct fixture *f = *state;
	size_t i;

	identity_free(open_or_fail(f->state));
	for (i = 0; i < sizeof(modes) / sizeof(modes[0]); i++) {
		assert_int_equal(chmod(f->file, modes[i]), 0);
		expect_refusal(f->state, ERROR_REFUSED, "chmod 600");
	}
	assert_int_equal(chmod(f->file, 0400), 0);
	identity_free(open_or_fail(f->state));
}

static void
only_a_regular_file_is_an_identity(void **state)
{
	struct fixture *f = *state;
	char moved[128];

	identity_free(open_or_fail(f->state));
	(void)snprintf(moved, sizeof(moved), "%s.moved", f->file);
	assert_int_equal(rename(f->file, moved), 0);
	assert_int_equal(symlink("identity.pem.moved", f->file), 0);
	expect_refusal(f->state, ERROR_REFUSED, "regular file");
	assert_int_equal(unlink(f->file), 0);
	assert_int_equal(mkdir(f->file, 0700), 0);
	expect_refusal(f->state, ERROR_REFUSED, "regular file");
	assert_int_equal(rmdir(f->file), 0);
	assert_int_equal(mkfifo(f->file, 0600), 0);
	expect_refusal(f->state, ERROR_REFUSED, "regular file");
}

static void
a_folder_that_cannot_be_made_is_named(void **state)
{
	struct fixture *f = *state;
	char path[96];
	FILE *file;

	(void)snprintf(path, sizeof(path), "%s/file", f->folder);
	file = fopen(path, "w");
	assert_non_null(file);
	(void)fclose(file);
	(void)strcat(path, "/under");
	expect_refusal(path, ERROR_READ, path);
	/* proc(5) lets nobody make a folder. */
	expect_refusal("/proc/plafond", ERROR_WRITE, "/proc/plafond");
}

static void
every_truncation_is_refused_and_nothing_is_overwritten(void **state)
{
	struct fixture *f = *state;
	struct identity *whole = open_or_fail(f->state), *cut;
	struct error err;
	struct stat st;
	off_t size;

	assert_int_equal(stat(f->file, &st), 0);
	/* The last byte is a newline that nobody needs. */
	for (size = st.st_size - 2; size >= 0; size -= 7) {
		cut = NULL;
		assert_int_equal(truncate(f->file, size), 0);
		assert_int_equal(identity_open(f->state, "quay", &cut, &err),
		    -1);
		assert_int_equal(err.kind, ERROR_INPUT);
		assert_int_equal(stat(f->file, &st), 0);
		assert_int_equal(st.st_size, size);
	}
	identity_free(whole);
}

static void
files_of_an_authority_must_belong_together(void **state)
{
	static const struct request asked = { .common_name = "quay" };
	struct fixture *f = *state;
	struct holder one = issue(&asked, NULL), other = issue(&asked, NULL);
	struct identity *identity = NULL;
	char certificate[64], key[64];
	struct error err;

	(void)snprintf(certificate, sizeof(certificate), "%s/c", f->folder);
	(void)snprintf(key, sizeof(key), "%s/k", f->folder);
	write_certificates(certificate, one.certificate, NULL);
	write_key(key, other.key, NULL);
	assert_int_equal(identity_open_files(certificate, key, &identity,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_INPUT);
	assert_non_null(strstr(err.cause, "does not belong"));
	write_key(key, one.key, NULL);
	assert_int_equal(identity_open_files(certificate, key, &identity,
	    &err), 0);
	assert_string_equal(identity_path(identity), certificate);
	identity_free(identity);
	assert_int_equal(chmod(key, 0644), 0);
	assert_int_equal(identity_open_files(certificate, key, &identity,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_REFUSED);
	assert_int_equal(unlink(key), 0);
	assert_int_equal(identity_open_files(certificate, key, &identity,
	    &err), -1);
	assert_int_equal(err.kind, ERROR_ABSENT);
	holder_free(&one);
	holder_free(&other);
}

static void
other_keys_and_pass_phrases_are_refused(void **state)
{
	static const struct request asked = { .common_name = "quay" };
	struct fixture *f = *state;
	struct holder holder = issue(&asked, NULL);
	EVP_PKEY *edwards = EVP_PKEY_Q_keygen(NULL, NULL, "ED25519");
	struct identity *identity = NULL;
	char certificate[64], key[64];
	struct error err;

	(void)snprintf(certificate, sizeof(certificate), "%s/c", f->folder);
	(void)snprintf(key, sizeof(key), "%s/k", f->folder);
	write_certificates(certificate, holder.certificate, NULL);
	write_key(key, edwards, NULL);
	assert_int_equal(identity_open_files(certificate, key, &identity,
	    &err), -1);
	assert_non_null(strstr(err.cause, "allowed: EC, RSA"));
	write_key(key, holder.key, "secret");
	assert_int_equal(identity_open_files(certificate, key, &identity,
	    &err), -1);
	assert_non_null(strstr(err.cause, "pass phrase"));
	write_certificates(key, holder.certificate, NULL);
	assert_int_equal(chmod(key, 0600), 0);
	assert_int_equal(identity_open_files(certificate, key, &identity,
	    &err), -1);
	assert_non_null(strstr(err.cause, "no private key"));
	EVP_PKEY_free(edwards);
	holder_free(&holder);
}

static void
an_rsa_key_of_an_authority_works(void **state)
{
	static const struct request asked = { .common_name = "quay" };
	struct fixture *f = *state;
	struct holder holder = issue(&asked, NULL);
	struct identity *identity = NULL;
	char certificate[64], key[64];
	struct error err;
	SSL_CTX *tls;

	EVP_PKEY_free(holder.key);
	holder.key = EVP_RSA_gen(2048);
	(void)X509_set_pubkey(holder.certificate, holder.key);
	(void)X509_sign(holder.certificate, holder.key, EVP_sha256());
	(void)snprintf(certificate, sizeof(certificate), "%s/c", f->folder);
	(void)snprintf(key, sizeof(key), "%s/k", f->folder);
	write_certificates(certificate, holder.certificate, NULL);
	write_key(key, holder.key, NULL);
	assert_int_equal(identity_open_files(certificate, key, &identity,
	    &err), 0);
	tls = identity_tls_context(identity, &err);
	assert_non_null(tls);
	assert_int_equal(SSL_CTX_get_min_proto_version(tls), TLS1_3_VERSION);
	assert_int_equal(SSL_CTX_get_max_proto_version(tls), TLS1_3_VERSION);
	SSL_CTX_free(tls);
	identity_free(identity);
	holder_free(&holder);
}

#define TEST(name) cmocka_unit_test_setup_teardown(name, set_up, tear_down)

int
main(void)
{
	const struct CMUnitTest tests[] = {
		TEST(the_first_start_makes_an_identity_and_the_second_finds_it),
		TEST(the_digest_is_what_openssl_computes),
		TEST(the_certificate_holds_a_name_and_nothing_else),
		TEST(two_programs_have_two_identities),
		TEST(first_starts_at_the_same_time_end_with_one_identity),
		TEST(a_key_that_others_can_read_is_refused),
		TEST(only_a_regular_file_is_an_identity),
		TEST(a_folder_that_cannot_be_made_is_named),
		TEST(every_truncation_is_refused_and_nothing_is_overwritten),
		TEST(files_of_an_authority_must_belong_together),
		TEST(other_keys_and_pass_phrases_are_refused),
		TEST(an_rsa_key_of_an_authority_works),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
