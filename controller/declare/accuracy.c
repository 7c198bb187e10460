/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "declare/accuracy.h"

#include <assert.h>

static const char *const accuracy_names[] = {
	[ACCURACY_EXACT] = "exact",
	[ACCURACY_NOMINAL] = "nominal",
	[ACCURACY_MODEL] = "model",
	[ACCURACY_REFERENCE] = "reference",
};

const char *
accuracy_name(enum accuracy accuracy)
{
	assert(accuracy <= ACCURACY_REFERENCE);
	return accuracy_names[accuracy];
}
