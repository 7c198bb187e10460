/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * octets_subjects: every vector of octets as a stack that was read, with what
 * is expected of it.
 */
#ifndef PLAFOND_TEST_OCTETS_SUBJECTS_H
#define PLAFOND_TEST_OCTETS_SUBJECTS_H

#include <stdlib.h>

#include "ceiling/overhead.h"
#include "stack_text.h"
#include "tunnel_vectors.h"

struct subject {
	struct octets_vector v;
	struct layer_stack stack;
	struct fraction payload;
	char layers[256];	/* where v.layers was made up here */
};
#define SUBJECTS_MAX 400
struct subjects {
	struct subject subject[SUBJECTS_MAX];
	size_t count;
};

static inline struct subject *
subjects_add(struct subjects *subjects, const struct octets_vector *v)
{
	struct subject *subject = &subjects->subject[subjects->count++];

	assert_true(subjects->count <= SUBJECTS_MAX);
	subject->v = *v;
	subject->payload = fraction_whole(v->payload);
	stack_accepted(v->layers, &subject->stack);
	return subject;
}

/* A stream of TLS records over GbE's usual packet. */
static inline void
subjects_add_record(struct subjects *subjects, const struct record_vector *r)
{
	struct octets_vector v = { .mtu_bytes = 1500, .line = 1538,
		.packet = 1500, .segment = 1480, .source = r->source };
	struct subject *subject = &subjects->subject[subjects->count];

	(void)snprintf(subject->layers, sizeof(subject->layers), "ethernet, "
	    "ipv4, tcp, { tls: { %srecord-bytes: %lu B } }", r->options,
	    (unsigned long)r->record_bytes);
	v.layers = subject->layers;
	subject = subjects_add(subjects, &v);
	subject->payload = fraction_make((uint128)1448 * r->record_bytes,
	    r->record_bytes + r->added_bytes);
}

static inline int
subjects_set_up(void **state)
{
	static const struct {
		const struct octets_vector *vectors;
		size_t count;
	} tables[] = {
#define TABLE(name) { name, sizeof(name) / sizeof(name[0]) }
		TABLE(frame_vectors), TABLE(access_vectors),
		TABLE(tunnel_vectors), TABLE(wireguard_vectors),
		TABLE(esp_vectors), TABLE(datagram_vectors),
#undef TABLE
	};
	struct subjects *subjects = calloc(1, sizeof(*subjects));
	size_t t, i;

	if (subjects == NULL)
		return -1;
	for (t = 0; t < sizeof(tables) / sizeof(tables[0]); t++)
		for (i = 0; i < tables[t].count; i++)
			(void)subjects_add(subjects, &tables[t].vectors[i]);
	for (i = 0; i < sizeof(record_vectors) / sizeof(record_vectors[0]);
	    i++)
		subjects_add_record(subjects, &record_vectors[i]);
	*state = subjects;
	return 0;
}

static inline int
subjects_tear_down(void **state)
{
	free(*state);
	return 0;
}

static inline bool
octets_are(struct fraction found, uint64_t expected)
{
	return expected == 0 ||
	    fraction_compare(found, fraction_whole(expected)) == 0;
}

/* Is this what was published? */
static inline bool
subject_agrees(const struct subject *subject, const struct overhead *o)
{
	const struct octets_vector *v = &subject->v;

	return fraction_compare(o->octets[LEVEL_LINE], fraction_make(v->line,
	    v->line_den == 0 ? 1 : v->line_den)) == 0 &&
	    fraction_compare(o->octets[LEVEL_PAYLOAD],
	    subject->payload) == 0 &&
	    octets_are(o->octets[LEVEL_PACKET], v->packet) &&
	    o->packet_bytes == v->packet &&
	    octets_are(o->octets[LEVEL_FRAME], v->frame) &&
	    octets_are(o->octets[LEVEL_FRAME_WITHOUT_FCS],
	    v->frame_without_fcs) &&
	    octets_are(o->octets[LEVEL_SEGMENT], v->segment);
}

#endif
