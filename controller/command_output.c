/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Where a command's result goes: standard output, or a file that is there
 * whole or not at all. */
#include <sys/stat.h>

#include <errno.h>
#include <fcntl.h>
#include <limits.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "command.h"
#include "error.h"

struct target {
	char path[PATH_MAX];		/* symbolic links followed */
	char temporary[PATH_MAX + 32];	/* beside it */
	bool direct;			/* not a regular file: no renaming */
};

static void
find_target(const struct command_options *options, struct target *target)
{
	struct stat st;

	memset(target, 0, sizeof(*target));
	if (realpath(options->output, target->path) == NULL)
		(void)snprintf(target->path, sizeof(target->path), "%s",
		    options->output);
	target->direct = stat(target->path, &st) == 0 && !S_ISREG(st.st_mode);
	(void)snprintf(target->temporary, sizeof(target->temporary),
	    "%s.part-%ld", target->path, (long)getpid());
}

int
command_output_open(const struct command_options *options, FILE **out,
    struct error *err)
{
	struct target target;
	int fd;

	if (options->output[0] == '\0') {
		*out = stdout;
		return 0;
	}
	find_target(options, &target);
	if (target.direct)
		fd = open(target.path, O_WRONLY | O_CLOEXEC);
	else
		fd = open(target.temporary, O_WRONLY | O_CREAT | O_EXCL |
		    O_CLOEXEC, 0666);
	if (fd == -1)
		return error_errno(err, ERROR_WRITE, "cannot write '%s'",
		    options->output);
	*out = fdopen(fd, "w");
	if (*out != NULL)
		return 0;
	(void)error_errno(err, ERROR_INTERNAL, "'%s'", options->output);
	(void)close(fd);
	if (!target.direct)
		(void)unlink(target.temporary);
	return -1;
}

/* Flushes to the disk; a device or a pipe has none. */
static int
flush(FILE *f, bool to_disk)
{
	if (fflush(f) != 0 || ferror(f))
		return -1;
	return to_disk ? fsync(fileno(f)) : 0;
}

int
command_output_close(const struct command_options *options, FILE *f,
    struct error *err)
{
	struct target target;
	int failed;

	if (f == stdout) {
		if (flush(f, false) == -1)
			return error_errno(err, ERROR_WRITE,
			    "cannot write the result");
		return 0;
	}
	find_target(options, &target);
	failed = flush(f, !target.direct);
	if (fclose(f) != 0)
		failed = -1;
	if (failed == 0 && !target.direct)
		failed = rename(target.temporary, target.path);
	if (failed == 0)
		return 0;
	(void)error_errno(err, ERROR_WRITE, "cannot write '%s'",
	    options->output);
	if (!target.direct)
		(void)unlink(target.temporary);
	return -1;
}

void
command_output_discard(const struct command_options *options, FILE *f)
{
	struct target target;

	if (f == NULL || f == stdout)
		return;
	find_target(options, &target);
	(void)fclose(f);
	if (!target.direct)
		(void)unlink(target.temporary);
}
