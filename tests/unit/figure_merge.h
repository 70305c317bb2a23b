/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Options applied to a register by a merge of our own: the oracle of variants.
 *
 * Follows docs/documents.md, "Changes", and nothing of src/doc/patch.c: maps merge, `no`
 * removes, a map over a set adds and takes away, `was` is put into the text, and what two options
 * settle between them is laid over both. */
#ifndef TESTS_FIGURE_MERGE_H
#define TESTS_FIGURE_MERGE_H

#include "model/documents.h"

/* The objects of `base` with the options' changes, without options, decisions and plans. */
void merge_options(struct arena *a, const struct model *base, size_t n, const char *const *options,
                   struct model_sources *out);

/* Does the change of one of n options name this id, or what it settles with another of them? */
bool merge_touches(const struct model *base, size_t n, const char *const *options, size_t option,
                   const char *id);

#endif
