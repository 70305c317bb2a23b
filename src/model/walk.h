/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Walking a canonical node (and its bound struct) along its field table.
 *
 * One visit a field that is given, parents before children, keys in byte order.
 * References, derived tables, the export, and the list of fields that are not yet
 * used all come from here. */
#ifndef MODEL_WALK_H
#define MODEL_WALK_H

#include "model/kinds.h"

struct visit {
    const struct field *field; /* of a row or an item: its part */
    const struct node *node;
    const void *member;     /* the C member in the bound struct; NULL when walking without one */
    const struct field *in; /* for a row or an item: the FIELD_ROWS or FIELD_LIST; else NULL */
    const char *key;        /* key of the field or of the row; NULL for an item of a list */
    size_t index;           /* of a row or an item */
    const char *path;       /* below the object: "response/incomer/in", "of/0"; valid during
                               the visit only */
};

/* What happens below a visited composite. */
enum walk { WALK_INTO, WALK_PAST };

struct walker {
    void *ctx;
    /* Called at every field, row and item. */
    enum walk (*enter)(void *ctx, const struct visit *v);
    /* Called behind the children of those that were entered; may be NULL. */
    void (*leave)(void *ctx, const struct visit *v);
};

/* node: the canonical map; data: its bound struct, or NULL. Scratch memory (paths)
 * comes from `a`. */
void walk_table(struct arena *a, const struct table *t, const struct node *node, const void *data,
                const struct walker *w);

/* What an object refers to: through FIELD_REF, FIELD_REFS, keys of rows with `kinds`,
 * structures, and names in the expressions of quantities. FIELD_CHANGE is not looked
 * into. */
struct reference {
    const char *id;
    unsigned kinds; /* allowed */
    bool trace;     /* computes nothing */
    bool later;     /* stands in a field that this version does not evaluate */
    bool frequency; /* asks only for the frequency of a hazard */
    bool unwanted;  /* asks how often a scheme operates unwantedly */
    struct place place;
    const char *path; /* below the object; lives in the arena */
};
struct references ARRAY_BODY(struct reference);
/* In the order of the walk; repetitions kept. */
void walk_references(struct arena *a, const struct table *t, const struct node *node,
                     const void *data, struct references *out);

#endif
