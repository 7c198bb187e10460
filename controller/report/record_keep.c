/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "report/record.h"

#include <errno.h>
#include <fcntl.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "error.h"

static int
write_all(int fd, const char *text, size_t size)
{
	while (size > 0) {
		ssize_t n = write(fd, text, size);

		if (n == -1 && errno == EINTR)
			continue;
		if (n == -1)
			return -1;
		text += n;
		size -= (size_t)n;
	}
	return 0;
}

/* So that the name itself survives a power cut. */
static int
sync_folder(const char *folder)
{
	int fd = open(folder, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
	int rc;

	if (fd == -1)
		return -1;
	rc = fsync(fd);
	close(fd);
	return rc;
}

/* Close in any case; a file system may report a full disk only here. */
static int
write_and_close(int fd, const char *text)
{
	int rc = 0, saved = 0;

	if (write_all(fd, text, strlen(text)) == -1 ||
	    write_all(fd, "\n", 1) == -1 || fsync(fd) == -1) {
		rc = -1;
		saved = errno;
	}
	if (close(fd) == -1 && rc == 0) {
		rc = -1;
		saved = errno;
	}
	errno = saved;
	return rc;
}

static int
write_file(const char *folder, const char *path, const char *text,
    struct error *err)
{
	char temporary[4096 + 32];
	int fd;

	if ((size_t)snprintf(temporary, sizeof(temporary), "%s.XXXXXX",
	    path) >= sizeof(temporary))
		return error_set(err, ERROR_WRITE, "the path is too long");
	fd = mkstemp(temporary);	/* mode 0600 */
	if (fd == -1)
		return error_errno(err, ERROR_WRITE, "make a file in '%s'",
		    folder);
	if (write_and_close(fd, text) == -1) {
		(void)error_errno(err, ERROR_WRITE, "write the record");
		(void)unlink(temporary);
		return -1;
	}
	if (rename(temporary, path) == -1) {
		(void)error_errno(err, ERROR_WRITE, "put the record in place");
		(void)unlink(temporary);
		return -1;
	}
	if (sync_folder(folder) == -1)
		return error_errno(err, ERROR_WRITE, "make the name durable");
	return 0;
}

int
record_keep(const json_t *record, const char *folder, const char *id,
    char *path_out, size_t path_size, struct error *err)
{
	char records[4096];
	char *text;
	int rc;

	(void)snprintf(path_out, path_size, "%s/records/%s.json", folder, id);
	if ((size_t)snprintf(records, sizeof(records), "%s/records",
	    folder) >= sizeof(records))
		return error_set(err, ERROR_WRITE, "the path is too long");
	if (mkdir(records, 0700) == -1 && errno != EEXIST)
		return error_errno(err, ERROR_WRITE, "make folder '%s'",
		    records);
	text = json_dumps(record, RECORD_DUMP_FLAGS);
	if (text == NULL)
		return error_set(err, ERROR_INTERNAL, "out of memory");
	rc = write_file(records, path_out, text, err);
	free(text);
	if (rc == -1)
		error_wrap(err, "record '%s'", path_out);
	return rc;
}
