/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>

#include "command.h"
#include "error.h"
#include "identity.h"

static const struct field options[] = {
	OPTION_STATE_ROW,
	OPTION_COMMON_ROWS
};

static int
run(const struct command_options *given, int argc, char *const argv[],
    struct error *err)
{
	struct identity *identity;
	char folder[4200];

	(void)argc;
	(void)argv;
	if (command_state_folder(given, folder, sizeof(folder), err) == -1 ||
	    identity_open(folder, "plafond controller", &identity, err) == -1)
		return -1;
	(void)printf("%s\n", identity_digest(identity));
	identity_free(identity);
	return 0;
}

const struct command command_identity = {
	.name = "identity",
	.arguments = "",
	.summary = "print this controller's identity (made at first use)",
	.description =
	    "Agents obey only controllers that their policy names. Copy the "
	    "printed\nsha256: digest into `controllers` of each agent's "
	    "policy file. It is the\nSHA-256 of the public key "
	    "(SubjectPublicKeyInfo, DER); the key itself stays\nin the state "
	    "folder.",
	.options = options,
	.run = run,
};
