/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Figures by name of registers that stand as documents in a folder. */
#ifndef TESTS_NAMED_H
#define TESTS_NAMED_H

#include "loaded.h"

/* FILE.yaml of a folder for each of n names, loaded together. */
void named_load(struct loaded *l, struct arena *a, const char *folder, size_t n,
                const char *const *files, const char *perspective);

/* inputs: FILE[+FILE...][@PERSPECTIVE] FIGURE UNIT, which may be written to. Loads FILE.yaml of
 * the folder, all together, and gives the figure, once all of it is evaluated, in that unit
 * (named.c has the list; `1` for what has none, `per-a`, the currency for money), over a number
 * where one stands behind a stroke: h/1000. Fails the Check test
 * when anything is wrong. */
double named_figure(const char *folder, char *inputs);

#endif
