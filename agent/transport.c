/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "transport.h"

#include "error.h"

static const struct transport *const transports[] = {
	&transport_tcp,
};

int
transport_find(enum protocol protocol, const struct transport **out,
    struct error *err)
{
	for (size_t i = 0; i < sizeof(transports) / sizeof(*transports); i++) {
		if (transports[i]->protocol == protocol) {
			*out = transports[i];
			return 0;
		}
	}
	return error_set(err, ERROR_REFUSED,
	    "this agent carries no %s trials", protocol_name(protocol));
}
