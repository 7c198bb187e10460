/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * accuracy: how far a row of the tables can be relied on.
 */
#ifndef PLAFOND_ACCURACY_H
#define PLAFOND_ACCURACY_H

/* From the best to the worst: what several rows make is the worst of them. */
enum accuracy {
	ACCURACY_EXACT,		/* exact arithmetic from the standard */
	ACCURACY_NOMINAL,	/* the standard's nominal value */
	ACCURACY_MODEL,		/* a model, with a typical error */
	ACCURACY_REFERENCE	/* measured, never a ceiling */
};
const char *accuracy_name(enum accuracy accuracy);

#endif
