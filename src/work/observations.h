/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Observations from lists. Private to src/work.
 *
 * A list is CSV with a header; its columns, in any order:
 *   date    YYYY-MM-DD, required
 *   kind    fault, trip or test, required
 *   object  id of an object of the register, required
 *   count   how many, a whole number from 1; 1 where it is left out
 *   result  for a test: passed or failed; otherwise free
 *   note    free
 *   key     the source's own key of the row
 * The identity of an observation is its key, or else its content and its ordinal among
 * equal rows of its file: the same file imported twice changes nothing. */
#ifndef WORK_OBSERVATIONS_H
#define WORK_OBSERVATIONS_H

#include "doc/csv.h"
#include "work/work.h"

/* Adds the rows of a list. Diagnostics for what is wrong; `model` may be NULL (then
 * objects are not looked up). */
void observations_read(struct arena *a, const struct model *model, const struct csv *csv,
                       struct store_observations *out, struct diags *d);

/* The observations as such a list, every one with its key. */
void observations_write(struct text *out, const struct store_observations *all);

#endif
