/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which sets of options are alternatives. Private to src/decide. */
#ifndef DECIDE_ALTERNATIVES_H
#define DECIDE_ALTERNATIVES_H

#include "decide/weigh.h"

#define DO_NOTHING "do-nothing"

/* Fills weighing.alternatives (doing nothing first, then by size, then by name: the
 * options are in byte order), left_out and only_pairs. */
void alternatives_find(struct figures *f, const struct names *options, struct weighing *w);

/* "A+B", or do-nothing for an empty set. */
const char *alternative_name(struct arena *a, size_t n, const char *const *options);

#endif
