/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Merge patches on trees, and the difference of two trees.
 *
 * RFC 7396 with two changes of letter, not of sense: what is removed is written
 * `no` (FORM_NO) instead of null, and a scalar that uses `was` is combined with
 * the value before by a callback. */
#ifndef DOC_PATCH_H
#define DOC_PATCH_H

#include "base/error.h"
#include "doc/node.h"

struct patch_rules {
    void *ctx;
    /* Is this scalar of a patch a change of the value before (it uses `was`)? */
    bool (*uses_was)(void *ctx, const struct node *scalar);
    /* The value that `patch` (which uses `was`) makes of `before`, which may be a
     * scalar or a map (a distribution) and is NULL where nothing was. Adds a
     * diagnostic and returns NULL when it cannot be. */
    struct node *(*combine)(void *ctx, const struct node *before, const struct node *patch);
    /* Is FORM_NO at this path the value `no` of a yes-or-no field (then it
     * replaces) rather than a removal? `path` is as in struct place. NULL: never. */
    bool (*no_is_value)(void *ctx, const char *path);
    /* Is the node at this path a set of names (a list of text scalars)? There a
     * map in a patch adds the names with `yes` and takes away those with `no`;
     * a list replaces. NULL: never. */
    bool (*is_set)(void *ctx, const char *path);
};

/* The target under the patch; neither is changed; the result may share with both.
 * `target` may be NULL. `path` is the path of target, such as "hazards/H-BUS1".
 * Returns NULL when a combination failed (diagnostics were added by the rule) or
 * when the patch removes the target itself. Removing what is not there is no
 * error. A set of names stays sorted and without repetition. Maps that the patch
 * changes come out with their keys in byte order. */
struct node *patch_apply(struct arena *a, const struct patch_rules *rules,
                         const struct node *target, const struct node *patch, const char *path);

/* One difference between two trees. */
struct difference {
    const char *path;          /* below the root, as "response/incomer/in"; "" is the root */
    const struct node *before; /* NULL: added */
    const struct node *after;  /* NULL: removed */
};
struct differences ARRAY_BODY(struct difference);

/* Where two trees differ: descends into maps that both have; lists and scalars
 * are compared whole. In byte order of paths. Either root may be NULL. `out` is
 * empty before. */
void patch_differences(struct arena *a, const struct node *before, const struct node *after,
                       struct differences *out);

/* The patch without what `settled`, another patch of the same target, says outright: at each path
 * where that has a scalar (which does not use `was`), a removal or a list, the patch says nothing
 * any more. Maps that this leaves empty go too. NULL when nothing is left; what is not touched is
 * shared. A scalar or list where `settled` has a map stays. */
const struct node *patch_without(struct arena *a, const struct patch_rules *rules,
                                 const struct node *patch, const struct node *settled);

/* A place where two patches contradict: both set a path to different values,
 * one removes what the other touches, or one uses `was` where the other sets.
 * Both using `was` is no contradiction (they are products). Returns the path, or
 * NULL where they can be combined in any order. */
const char *patch_contradiction(struct arena *a, const struct patch_rules *rules,
                                const struct node *p, const struct node *q);

#endif
