/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "draft/draft.h"

#include <inttypes.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "declare/circuit.h"
#include "draft/draft_inside.h"
#include "draft/draft_stack.h"
#include "error.h"
#include "log.h"

static void
write_head(const struct interface_facts *facts, FILE *out)
{
	(void)fputs("# A draft, from what the kernel knows of an interface and "
	    "of those below it;\n"
	    "# it says nothing of the line beyond.  A person must confirm the "
	    "lines marked\n"
	    "# `confirm:`, and complete those marked `fill in:`, which are "
	    "commented out.\n"
	    "#\n", out);
	draft_devices(facts, out);
	(void)fputs("#\n", out);
}

/* True where a person must complete them. */
static bool
write_layers(const struct draft_stack *stack, FILE *out)
{
	char text[DRAFT_LAYERS_SIZE];

	(void)draft_stack_text(stack, 0, text, sizeof(text));
	if (stack->open[0] != '\0') {
		(void)fprintf(out, "# layers: %s\n", text);
		draft_comment("#   fill in: ", "#     ", stack->open, out);
		if (stack->confirm[0] != '\0')
			draft_comment("#   confirm: ", "#     ",
			    stack->confirm, out);
		return true;
	}
	(void)fprintf(out, "layers: %s", text);
	if (stack->confirm[0] != '\0')
		(void)fprintf(out, "  # confirm: %s", stack->confirm);
	(void)fputc('\n', out);
	return false;
}

/* Left out it is what the layers allow, which is not what the kernel said. */
static bool
write_mtu(const struct interface_facts *facts, const struct draft_stack *stack,
    FILE *out)
{
	char name[DRAFT_NAME_SIZE];

	(void)draft_name(facts->device[0].name, name);
	if (stack->mtu_bytes == 0) {
		(void)fprintf(out, "# mtu: SIZE  # fill in: the largest packet "
		    "of the lowest IP layer; that of %s\n"
		    "#   is %" PRIu64 " B, and its layers add to it\n", name,
		    stack->inner_mtu_bytes);
		return true;
	}
	(void)fprintf(out, "mtu: %" PRIu64 " B", stack->mtu_bytes);
	if (stack->too_large)
		(void)fprintf(out, "  # confirm: a full packet of %s, %" PRIu64
		    " B, does not fit", name, stack->inner_mtu_bytes +
		    stack->added_bytes);
	else if (stack->added_bytes > 0)
		(void)fprintf(out, "  # %s%" PRIu64 " B of %s and %" PRIu64
		    " B around them", stack->unbounded ? "confirm: " : "",
		    stack->inner_mtu_bytes, name, stack->added_bytes);
	(void)fputc('\n', out);
	return false;
}

/* True where something that a ceiling needs is left open. */
static bool
write_body(const struct interface_facts *facts,
    const struct draft_stack *stack, FILE *out)
{
	char name[DRAFT_NAME_SIZE];
	bool open;

	(void)fputs("circuit: DRAFT  # confirm: the name of the circuit\n",
	    out);
	open = draft_medium(facts, stack, out);
	open = write_layers(stack, out) || open;
	open = write_mtu(facts, stack, out) || open;
	(void)fputs("# service: { committed: RATE }  # fill in: where a "
	    "contract sets a rate\n", out);
	(void)fprintf(out, "# ends:  # fill in: for `plafond ready` and "
	    "`plafond accept`\n"
	    "#   a: { control: \"ADDRESS:PORT\", interface: \"%s\", identity: "
	    "\"sha256:...\" }\n"
	    "#   b: { control: \"ADDRESS:PORT\", identity: \"sha256:...\" }\n",
	    draft_name(facts->device[0].name, name));
	return open;
}

/* What the declaration's own reader says of it. */
static void
write_refusal(const char *body, size_t size, FILE *out)
{
	struct circuit *circuit = NULL;
	struct error err;
	char cause[512];

	if (circuit_read_text(body, size, "draft", NULL, 0, &circuit,
	    &err) == -1)
		draft_comment("# As it stands it is refused: ", "#   ",
		    log_escape(err.cause, cause, sizeof(cause)), out);
	circuit_free(circuit);
}

int
draft_make(const struct interface_facts *facts, char **out, struct error *err)
{
	struct draft_stack stack;
	char *body = NULL, *whole = NULL;
	size_t body_size, whole_size;
	FILE *f;
	bool open;
	int rc = -1;

	draft_stack_make(facts, &stack);
	f = open_memstream(&body, &body_size);
	if (f == NULL)
		return error_errno(err, ERROR_INTERNAL, "draft");
	open = write_body(facts, &stack, f);
	if (fclose(f) != 0) {
		(void)error_errno(err, ERROR_INTERNAL, "draft");
		goto out;
	}
	f = open_memstream(&whole, &whole_size);
	if (f == NULL) {
		(void)error_errno(err, ERROR_INTERNAL, "draft");
		goto out;
	}
	write_head(facts, f);
	if (!open)
		write_refusal(body, body_size, f);
	(void)fputs(body, f);
	if (fclose(f) != 0) {
		(void)error_errno(err, ERROR_INTERNAL, "draft");
		goto out;
	}
	*out = whole;
	whole = NULL;
	rc = 0;
out:
	free(body);
	free(whole);
	return rc;
}
