/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Short ways to make an emulated line and send packets across it. */
#ifndef PLAFOND_TEST_LINE_FIXTURE_H
#define PLAFOND_TEST_LINE_FIXTURE_H

#include "error.h"
#include "rehearse/line.h"

static inline struct line_settings
line_plain(void)
{
	struct line_settings settings;

	line_settings_init(&settings);
	return settings;
}

static inline struct line *
line_made(const struct line_settings *settings)
{
	struct error err = { .cause = "" };
	struct line *line = line_new(settings, 0, &err);

	assert_string_equal(err.cause, "");
	assert_non_null(line);
	return line;
}

static inline struct line_verdict
line_load(struct line *line, uint64_t now_ns, uint32_t bytes)
{
	struct line_verdict verdict;

	line_offer(line, now_ns, bytes, LINE_CLASS_LOAD, &verdict);
	return verdict;
}

/* Everything that is due by now. */
static inline size_t
line_drain(struct line *line, uint64_t now_ns)
{
	struct line_delivery delivery;
	size_t count = 0;

	while (line_take(line, now_ns, &delivery))
		count++;
	return count;
}

static inline struct truth_counts
line_load_total(const struct line *line)
{
	struct truth_row total;

	truth_total(line_truth(line), &total);
	return total.classes[LINE_CLASS_LOAD];
}

#endif
