/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdio.h>

#include "command.h"
#include "conduct/pair.h"
#include "conduct/preflight.h"
#include "declare/circuit.h"
#include "error.h"

#define READY_EXCHANGES 32	/* before a test; the least delay is used */
#define READY_EXCHANGE_NS UINT64_C(9000000000)

static const struct field options[] = {
	OPTION_FORMAT_ROW(format_text_json),
	OPTION_OUTPUT_ROW,
	OPTION_SET_ROW,
	OPTION_STATE_ROW,
	OPTION_LISTEN_ROW,
	OPTION_AGENT_ROW,
	OPTION_COMMON_ROWS
};

static int
print(const struct command_options *given, const struct preflight *preflight,
    const struct circuit *circuit, struct error *err)
{
	FILE *out;
	json_t *json;

	if (command_output_open(given, &out, err) == -1)
		return -1;
	if (given->format == FORMAT_JSON) {
		json = preflight_to_json(preflight);
		(void)json_dumpf(json, out, JSON_INDENT(2));
		(void)fputc('\n', out);
		json_decref(json);
	} else
		preflight_print(preflight, circuit, out);
	return command_output_close(given, out, err);
}

static int
look(const struct command_options *given, const struct circuit *circuit,
    struct error *err)
{
	struct pair_config config = { .circuit = circuit };
	struct preflight preflight;
	struct pair *pair;
	char folder[4200];
	int rc;

	if (command_state_folder(given, folder, sizeof(folder), err) == -1)
		return -1;
	config.state_folder = folder;
	config.listen = given->listen;
	config.agent_program = given->agent_program;
	if (pair_open(&config, &pair, err) == -1)
		return -1;
	rc = pair_exchange(pair, READY_EXCHANGES, READY_EXCHANGE_NS, err);
	if (rc == 0) {
		preflight_look(pair, circuit, &preflight);
		rc = preflight_reference(pair, &preflight, err);
	}
	if (rc == 0)
		rc = print(given, &preflight, circuit, err);
	pair_close(pair);
	return rc;
}

static int
run(const struct command_options *given, int argc, char *const argv[],
    struct error *err)
{
	struct circuit *circuit;
	int rc;

	(void)argc;
	if (command_read_circuit(given, argv[0], &circuit, err) == -1)
		return -1;
	rc = look(given, circuit, err);
	circuit_free(circuit);
	return rc;
}

const struct command command_ready = {
	.name = "ready",
	.arguments = "FILE",
	.arguments_min = 1,
	.arguments_max = 1,
	.summary = "reach both agents and say what they and their hosts are",
	.description =
	    "Reaches both agents of the circuit declared in FILE, without any "
	    "load on the\ncircuit, and prints versions, clock offset with its "
	    "bound (RFC 5905), interface,\nMTU, link speed, kernel limits and "
	    "the host's own limit: the rate of a bare copy\nloop through its "
	    "loopback for one second.",
	.options = options,
	.run = run,
};
