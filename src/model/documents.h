/* SPDX-License-Identifier: GPL-3.0-or-later */
/* From the documents of an import to the set of objects that a register would hold.
 *
 * A document is a map of sections ("hazards:"), each a map of ids; "register:" is the
 * settings themselves, "removed:" a list of ids. An object of a document replaces the
 * stored one whole. `like: ID` starts an object from another of the same kind, stored or
 * in the documents; what follows is merged into it (src/doc/patch.h). */
#ifndef MODEL_DOCUMENTS_H
#define MODEL_DOCUMENTS_H

#include "model/model.h"

/* Objects may be like objects that are like others this deep. */
#define LIKE_DEPTH 20

struct model_sources ARRAY_BODY(struct model_source);

/* Merges the roots of n documents into what is stored (canonical nodes, any order).
 * *out gets every object that is then there; false when there were diagnostics. */
bool documents_merge(struct arena *a, const struct model_sources *stored, size_t n,
                     const struct node *const *roots, struct model_sources *out, struct diags *d);

/* Adds the diagnostics that each object of the documents alone gives, when not all documents
 * could be read and the whole cannot be judged: sections, ids, keys, words, quantities.
 * Objects that are like others are passed over. Nothing where the settings, which decide the
 * units, are neither stored nor among the roots. */
void documents_check_alone(struct arena *a, const struct model_sources *stored, size_t n,
                           const struct node *const *roots, struct diags *d);

#endif
