/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * scratch: a folder of a test's own, in the folder it runs in, and its end
 * with all the files in it.
 */
#ifndef PLAFOND_TESTS_SCRATCH_H
#define PLAFOND_TESTS_SCRATCH_H

#include <ftw.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

#define SCRATCH_SIZE 32

static inline void
scratch_make(char folder[SCRATCH_SIZE])
{
	(void)snprintf(folder, SCRATCH_SIZE, "scratch.XXXXXX");
	if (mkdtemp(folder) == NULL)
		abort();
}

static inline int
scratch_remove_one(const char *path, const struct stat *st, int type,
    struct FTW *at)
{
	(void)st;
	(void)type;
	(void)at;
	return remove(path);
}

static inline void
scratch_remove(const char *folder)
{
	(void)nftw(folder, scratch_remove_one, 8, FTW_DEPTH | FTW_PHYS);
}

#endif
