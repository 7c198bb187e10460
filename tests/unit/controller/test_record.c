/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>
#include <stddef.h>
#include <setjmp.h>
#include <stdint.h>
#include <cmocka.h>

#include <dirent.h>
#include <errno.h>
#include <signal.h>
#include <spawn.h>
#include <sys/resource.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include "record_fixture.h"

/* RFC 9562 appendix A.6: 2022-02-22T14:22:22-05:00, rand_a 0xCC3, rand_b
 * 0x18C4DC0C0C07398F. */
static void
an_id_is_the_one_of_the_rfc(void **state)
{
	static const unsigned char random[10] = { 0x0c, 0xc3, 0x18, 0xc4, 0xdc,
		0x0c, 0x0c, 0x07, 0x39, 0x8f };
	char id[RECORD_ID_SIZE];

	(void)state;
	record_make_id(UINT64_C(1645557742000) * NS_PER_MS, random, id);
	assert_string_equal(id, "017f22e2-79b0-7cc3-98c4-dc0c0c07398f");
}

static void
an_id_has_version_and_variant_whatever_the_rest(void **state)
{
	unsigned char random[10];
	char id[RECORD_ID_SIZE];

	(void)state;
	memset(random, 0xff, sizeof(random));
	record_make_id(0, random, id);
	assert_string_equal(id, "00000000-0000-7fff-bfff-ffffffffffff");
	memset(random, 0, sizeof(random));
	record_make_id(UINT64_MAX, random, id);
	assert_int_equal(id[14], '7');
	assert_int_equal(id[19], '8');
}

static json_t *
sample_json(const char *name)
{
	struct fixture *f = fixture_new();
	struct record record;
	json_t *json = NULL;

	for (size_t i = 0; i < SAMPLES; i++) {
		if (strcmp(samples[i].name, name) != 0)
			continue;
		samples[i].make(f);
		record = fixture_record(f);
		json = record_to_json(&record);
	}
	free(f);
	assert_non_null(json);
	return json;
}

/* "trials.0.payload_bps" */
static const json_t *
at(const json_t *value, const char *path)
{
	char copy[128];
	char *rest = copy, *step;

	(void)snprintf(copy, sizeof(copy), "%s", path);
	while (value != NULL && (step = strsep(&rest, ".")) != NULL)
		value = json_is_array(value)
		    ? json_array_get(value, strtoul(step, NULL, 10))
		    : json_object_get(value, step);
	if (value == NULL)
		fail_msg("no %s", path);
	return value;
}

static void
names_and_figures_are_those_of_the_design(void **state)
{
	json_t *json = sample_json("meets");

	(void)state;
	assert_string_equal(json_string_value(at(json, "format")),
	    "plafond-record/1");
	assert_string_equal(json_string_value(at(json, "circuit.name")),
	    "HARBOUR-04");
	assert_string_equal(json_string_value(at(json, "started_utc")),
	    "2026-12-01T10:00:00.000Z");
	assert_int_equal(json_integer_value(at(json,
	    "ceilings.0.payload_bps")), FIXTURE_PAYLOAD_BPS);
	assert_string_equal(json_string_value(at(json,
	    "ceilings.1.bounds.0.class")), "medium");
	assert_true(json_is_true(at(json, "ceilings.1.bounds.0.binding")));
	assert_int_equal(json_integer_value(at(json, "trials.0.number")), 1);
	assert_string_equal(json_string_value(at(json, "trials.1.direction")),
	    "b-to-a");
	assert_string_equal(json_string_value(at(json,
	    "trials.0.encryption")), "none");
	assert_int_equal(json_integer_value(at(json,
	    "trials.0.ceiling_payload_bps")), FIXTURE_PAYLOAD_BPS);
	assert_int_equal(json_integer_value(at(json, "trials.0.series.rows")),
	    30);
	assert_int_equal(json_array_size(at(json, "trials.0.series.buckets")),
	    30);
	assert_string_equal(json_string_value(at(json, "ledger.0.name")),
	    "unexplained");
	assert_string_equal(json_string_value(at(json, "criteria.0.outcome")),
	    "meets");
	assert_string_equal(json_string_value(at(json, "verdict.outcome")),
	    "meets");
	json_decref(json);
}

static void
the_ledger_of_a_record_adds_up(void **state)
{
	json_t *json = sample_json("falls-short");
	json_int_t sum = 0;

	(void)state;
	for (size_t i = 0; i < json_array_size(at(json, "ledger")); i++) {
		const json_t *entry = json_array_get(at(json, "ledger"), i);

		if (strcmp(json_string_value(at(entry, "direction")),
		    "a-to-b") == 0)
			sum += json_integer_value(at(entry, "bps"));
	}
	assert_int_equal(sum,
	    json_integer_value(at(json, "ceilings.0.payload_bps")) -
	    json_integer_value(at(json, "results.0.median_bps")));
	json_decref(json);
}

static void
what_nobody_knows_is_null(void **state)
{
	json_t *json = sample_json("host");

	(void)state;
	assert_true(json_is_null(at(json, "ceilings.0.payload_bps")));
	assert_true(json_is_true(at(json, "ceilings.0.reference")));
	assert_true(json_is_null(at(json, "hosts.0.link_speed_bps")));
	assert_true(json_is_null(at(json, "plan.streams")));
	assert_true(json_is_null(at(json,
	    "trials.0.sender.tcp.rcv_rtt_us")));
	json_decref(json);
	json = sample_json("void");
	assert_true(json_is_null(at(json, "trials.5.payload_bps")));
	assert_true(json_is_null(at(json, "trials.5.sender")));
	assert_true(json_is_true(at(json, "trials.5.failed")));
	assert_int_equal(json_array_size(at(json, "trials.14.directions")), 2);
	json_decref(json);
}

/* 400 ms of processor for 4/3 of what the receiver counted in 3 s. */
static void
processor_time_is_stated_a_gigabyte(void **state)
{
	struct fixture *f = fixture_new();
	struct record record;
	json_t *json;

	(void)state;
	fixture_add(f, DIRECTION_A_TO_B, UINT64_C(800000000));
	record = fixture_record(f);
	json = record_to_json(&record);
	/* 800 Mbit/s for 4 s are 0.4 GB: 0.4 s / 0.4 GB, by hand. */
	assert_true(fabs(json_real_value(at(json,
	    "trials.0.sender.cpu_seconds_per_gigabyte")) - 1) < 1e-6);
	assert_true(fabs(json_real_value(at(json,
	    "trials.0.receiver.cpu_seconds_per_gigabyte")) - 1) < 1e-6);
	json_decref(json);
	free(f);
}

static void
text_that_is_not_utf8_becomes_text_that_is(void **state)
{
	struct fixture *f = fixture_new();
	struct record record;
	json_t *json;

	(void)state;
	sample_undecided(f);
	(void)snprintf(f->hosts[0].kernel, sizeof(f->hosts[0].kernel),
	    "ok\xff\xc3\xa9\xc3");
	f->verdict.attained[0] = NAN;
	record = fixture_record(f);
	json = record_to_json(&record);
	assert_string_equal(json_string_value(at(json, "hosts.0.kernel")),
	    "ok\xef\xbf\xbd\xc3\xa9\xef\xbf\xbd");
	json_decref(json);
	free(f);
}

/* A folder for one test, and what is in it afterwards. */
static size_t
count_files(const char *folder)
{
	DIR *dir = opendir(folder);
	struct dirent *entry;
	size_t count = 0;

	if (dir == NULL)
		return 0;
	while ((entry = readdir(dir)) != NULL)
		count += entry->d_name[0] != '.';
	closedir(dir);
	return count;
}

static void
remove_records(const char *folder)
{
	char path[512], records[256];
	struct dirent *entry;
	DIR *dir;

	(void)snprintf(records, sizeof(records), "%s/records", folder);
	dir = opendir(records);
	while (dir != NULL && (entry = readdir(dir)) != NULL) {
		(void)snprintf(path, sizeof(path), "%s/%s", records,
		    entry->d_name);
		if (entry->d_name[0] != '.')
			(void)unlink(path);
	}
	if (dir != NULL)
		closedir(dir);
	(void)rmdir(records);
	(void)rmdir(folder);
}

static void
a_record_is_kept_whole_and_for_its_owner_only(void **state)
{
	char folder[] = "/tmp/plafond-record-XXXXXX";
	char path[256], wanted[256];
	json_t *json = sample_json("undecided"), *back;
	struct stat st;
	struct error err;

	(void)state;
	assert_non_null(mkdtemp(folder));
	assert_int_equal(record_keep(json, folder, "some-id", path,
	    sizeof(path), &err), 0);
	(void)snprintf(wanted, sizeof(wanted), "%s/records/some-id.json",
	    folder);
	assert_string_equal(path, wanted);
	assert_int_equal(stat(path, &st), 0);
	assert_int_equal(st.st_mode & 0777, 0600);
	back = json_load_file(path, JSON_REJECT_DUPLICATES, NULL);
	assert_true(json_equal(at(back, "trials.0.series"),
	    at(json, "trials.0.series")));
	json_decref(back);
	(void)snprintf(wanted, sizeof(wanted), "%s/records", folder);
	assert_int_equal(stat(wanted, &st), 0);
	assert_int_equal(st.st_mode & 0777, 0700);
	/* A second one beside it. */
	assert_int_equal(record_keep(json, folder, "other-id", path,
	    sizeof(path), &err), 0);
	assert_int_equal(count_files(wanted), 2);
	json_decref(json);
	remove_records(folder);
}

static void
a_record_that_cannot_be_written_leaves_nothing_behind(void **state)
{
	char folder[] = "/tmp/plafond-record-XXXXXX";
	char path[256], records[256];
	struct rlimit limit, old;
	json_t *json = sample_json("undecided");
	struct error err;
	int rc;

	(void)state;
	assert_non_null(mkdtemp(folder));
	/* As on a full disk: after 4 KiB write() fails, here with EFBIG. */
	(void)signal(SIGXFSZ, SIG_IGN);
	assert_int_equal(getrlimit(RLIMIT_FSIZE, &old), 0);
	limit = old;
	limit.rlim_cur = 4096;
	assert_int_equal(setrlimit(RLIMIT_FSIZE, &limit), 0);
	rc = record_keep(json, folder, "some-id", path, sizeof(path), &err);
	assert_int_equal(setrlimit(RLIMIT_FSIZE, &old), 0);
	assert_int_equal(rc, -1);
	assert_int_equal(err.kind, ERROR_WRITE);
	assert_int_equal(err.sys_errno, EFBIG);
	assert_non_null(strstr(err.where, "some-id.json"));
	(void)snprintf(records, sizeof(records), "%s/records", folder);
	assert_int_equal(count_files(records), 0);
	json_decref(json);
	remove_records(folder);
}

static void
a_folder_that_is_not_there_is_named(void **state)
{
	json_t *json = sample_json("undecided");
	char path[256];
	struct error err;

	(void)state;
	assert_int_equal(record_keep(json, "/nonexistent/plafond", "some-id",
	    path, sizeof(path), &err), -1);
	assert_int_equal(err.kind, ERROR_WRITE);
	assert_string_equal(path, "/nonexistent/plafond/records/some-id.json");
	assert_non_null(strstr(err.cause, "/nonexistent/plafond/records"));
	json_decref(json);
}

static int
run_validator(char paths[SAMPLES][256])
{
	char program[] = "/usr/bin/python3";
	char script[] = SOURCE_FOLDER "/tests/unit/controller/record_schema.py";
	char schema[] = SOURCE_FOLDER "/controller/report/record.schema.json";
	char *argv[SAMPLES + 4] = { program, script, schema };
	/* Our preloaded sanitizer is no business of the interpreter's. */
	char *envp[] = { NULL };
	int status;
	pid_t pid;

	for (size_t i = 0; i < SAMPLES; i++)
		argv[3 + i] = paths[i];
	if (posix_spawn(&pid, program, NULL, NULL, argv, envp) != 0)
		return 77;
	if (waitpid(pid, &status, 0) == -1 || !WIFEXITED(status))
		return -1;
	return WEXITSTATUS(status);
}

static void
every_record_is_held_to_the_schema(void **state)
{
	char folder[] = "/tmp/plafond-record-XXXXXX";
	char paths[SAMPLES][256];
	struct error err;
	int status;

	(void)state;
	assert_non_null(mkdtemp(folder));
	for (size_t i = 0; i < SAMPLES; i++) {
		json_t *json = sample_json(samples[i].name);

		assert_int_equal(record_keep(json, folder, samples[i].name,
		    paths[i], sizeof(paths[i]), &err), 0);
		json_decref(json);
	}
	status = run_validator(paths);
	remove_records(folder);
	if (status == 77) {
		print_message("skipped: no python3 with jsonschema\n");
		skip();
	}
	assert_int_equal(status, 0);
}

int
main(void)
{
	const struct CMUnitTest tests[] = {
		cmocka_unit_test(an_id_is_the_one_of_the_rfc),
		cmocka_unit_test(
		    an_id_has_version_and_variant_whatever_the_rest),
		cmocka_unit_test(names_and_figures_are_those_of_the_design),
		cmocka_unit_test(the_ledger_of_a_record_adds_up),
		cmocka_unit_test(what_nobody_knows_is_null),
		cmocka_unit_test(processor_time_is_stated_a_gigabyte),
		cmocka_unit_test(text_that_is_not_utf8_becomes_text_that_is),
		cmocka_unit_test(a_record_is_kept_whole_and_for_its_owner_only),
		cmocka_unit_test(
		    a_record_that_cannot_be_written_leaves_nothing_behind),
		cmocka_unit_test(a_folder_that_is_not_there_is_named),
		cmocka_unit_test(every_record_is_held_to_the_schema),
	};

	return cmocka_run_group_tests(tests, NULL, NULL);
}
