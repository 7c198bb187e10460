/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A fuzz target goes once through the files of its corpus, without a fuzzer and
 * with any compiler: fuzz_NAME FOLDER... */
#include <dirent.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define INPUT_MAX (2 * 1024 * 1024)	/* twice the largest frame */

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

/* In memory of just its size, so that a sanitizer sees the first byte beyond;
 * the buffer is owned (free), NULL where the file cannot be read. */
static uint8_t *
read_whole(const char *path, size_t *size)
{
	uint8_t *buffer = malloc(INPUT_MAX), *fitting;
	FILE *f = fopen(path, "rbe");

	*size = 0;
	if (f == NULL || buffer == NULL)
		goto fail;
	*size = fread(buffer, 1, INPUT_MAX, f);
	if (ferror(f) || !feof(f))
		goto fail;
	(void)fclose(f);
	fitting = realloc(buffer, *size > 0 ? *size : 1);
	return fitting != NULL ? fitting : buffer;
fail:
	if (f != NULL)
		(void)fclose(f);
	free(buffer);
	return NULL;
}

static int
replay(const char *folder, const char *name)
{
	char path[4096];
	uint8_t *data;
	size_t size;

	(void)snprintf(path, sizeof(path), "%s/%s", folder, name);
	data = read_whole(path, &size);
	if (data == NULL) {
		(void)fprintf(stderr, "%s cannot be read\n", path);
		return -1;
	}
	(void)LLVMFuzzerTestOneInput(data, size);
	free(data);
	return 0;
}

/* Number of its files, -1: one cannot be read. */
static int
replay_folder(const char *path)
{
	struct dirent *entry;
	DIR *folder = opendir(path);
	int count = 0;

	if (folder == NULL)
		return -1;
	while (count != -1 && (entry = readdir(folder)) != NULL) {
		if (entry->d_name[0] == '.')
			continue;
		count = replay(path, entry->d_name) == -1 ? -1 : count + 1;
	}
	(void)closedir(folder);
	return count;
}

int
main(int argc, char *argv[])
{
	int i, count;

	if (argc < 2) {
		(void)fprintf(stderr, "usage: %s FOLDER...\n", argv[0]);
		return 64;
	}
	for (i = 1; i < argc; i++) {
		count = replay_folder(argv[i]);
		if (count <= 0) {
			(void)fprintf(stderr, "nothing in %s\n", argv[i]);
			return 1;
		}
		(void)printf("%s: %d files\n", argv[i], count);
	}
	return 0;
}
