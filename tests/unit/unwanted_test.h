/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of the test of unwanted operation and of repairs share. */
#ifndef UNWANTED_TEST_H
#define UNWANTED_TEST_H

#include <check.h>

#include "loaded.h"

/* The settings and `text` as a register; horizon 20 a. */
void unwanted_load(struct loaded *l, struct arena *a, const char *text);
/* The value of a figure by its name, within `relative` of the expected one. */
void unwanted_expect(struct loaded *l, const char *name, double expected, double relative);
/* Its formula, word by word. */
void unwanted_reads(struct loaded *l, const char *name, const char *formula);
/* The formula of a figure, evaluated in the values of the figures that it names, is its value. */
void unwanted_explains(struct loaded *l, const char *name);

TCase *unwanted_random_case(void);
TCase *repairs_case(void);

#endif
