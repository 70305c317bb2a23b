/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Binding: from a document node to its canonical node and its struct.
 *
 * Reports everything that can be seen in one object alone: unknown keys with the
 * nearest key, missing keys, wrong words, dates, counts, syntax of quantities, shapes
 * of distributions, ranges of constants, groups of keys, depth. What needs other
 * objects (references, dimensions of names, cycles) is src/model/check.h. */
#ifndef MODEL_BIND_H
#define MODEL_BIND_H

#include "model/kinds.h"

struct binding {
    struct arena *arena;
    const struct units *units;
    struct diags *diags;
    bool change; /* set while the inside of a change is bound; false for callers */
};

/* Binds a map (or a short form) by its table. *canonical gets the canonical node,
 * *data the struct (allocated). false when there were diagnostics; then both are
 * untouched. */
bool bind_object(struct binding *b, const struct table *t, const struct node *node,
                 struct node **canonical, void **data);

/* The canonical node of a change: a map of sections, each a map of ids, each a part of
 * an object: required keys may be missing, `no` removes, quantities may use `was`,
 * sets may be maps of yes and no. NULL when there were diagnostics. */
struct node *bind_change(struct binding *b, const struct node *change);

/* Rules for patch_apply and patch_contradiction on one kind of object (see
 * src/doc/patch.h): `was`, sets of names, yes-or-no fields. `path` begins with
 * section/id. ctx is the binding, whose diags receive `was` where nothing was. */
struct patch_rules;
struct patch_rules bind_patch_rules(struct binding *b);

/* The document form of a canonical node: short forms where they say the same,
 * structures as maps. Binding it gives the same canonical node. */
struct node *bind_document(struct arena *a, const struct table *t, const struct node *canonical);

#endif
