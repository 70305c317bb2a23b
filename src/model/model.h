/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The register in memory: bound objects, found by id.
 *
 * Ids are unique over all kinds. A model is immutable once loaded. A variant is a
 * model that lies over another one: it holds only the objects that its changes
 * touch, and finds all others below. */
#ifndef MODEL_MODEL_H
#define MODEL_MODEL_H

#include "model/kinds.h"
#include "model/walk.h"

struct object {
    enum kind kind;
    const char *id;
    const void *data;        /* the struct of its kind */
    const struct node *node; /* canonical */
    struct references refs;  /* what it refers to, in order of path */
    bool changed;            /* differs from the object below (variants only) */
};

struct objects ARRAY_BODY(struct object *);

struct model {
    struct arena *arena;
    struct units units;
    struct strmap by_id;           /* id -> struct object *; NULL: removed here */
    struct objects of[KIND_COUNT]; /* live, in byte order of ids (base models only) */
    const struct model *below;     /* NULL for a base model */
    const struct register_settings *settings;
};

/* The object, or NULL. */
const struct object *model_find(const struct model *m, const char *id);
/* The same with a kind that is known; its struct, or NULL. */
const void *model_get(const struct model *m, enum kind kind, const char *id);

/* An empty base model. */
struct model *model_new(struct arena *a);

/* One object to load. */
struct model_source {
    enum kind kind;
    const char *id;
    const struct node *node; /* a document node or a canonical one */
};

/* Binds and checks a whole register: everything that docs/documents.md calls an
 * error is found here, for all objects at once. Options are applied and what they
 * make of the register is checked too. NULL when there were diagnostics.
 * `sources` in any order; ids are unique. */
struct model *model_load(struct arena *a, const struct model_source *sources, size_t n,
                         struct diags *d);

/* The units of a register's settings node (currency and counts), before binding. */
struct units model_units(struct arena *a, const struct node *settings);

/* --- variants --- */

/* What is laid over a register: the change of an option, what a state changes, or any other. */
struct model_change {
    const char *word;        /* what it is, for messages: "option", "state", "change" */
    const char *name;        /* "FIT-87B", "T2-OUT=a-out" */
    const struct node *node; /* bound; NULL: changes nothing */
    struct place place;      /* of contradictions with a change that stands before it */
    const char *option;      /* of an option: its id; else NULL */
    const char *pair[2];     /* of what two options settle: their ids; else NULL */
};

/* A model over `base` with the changes applied, in this order (which has no meaning: changes
 * that contradict each other are refused). What two options of them settle with each other by
 * `combine` stands instead of what they say there, and is applied too. An element that options
 * add, and that has no `since`, is new on the day on which the first of them comes into service.
 * Adds diagnostics (at the places in the changes) and returns NULL when a result is wrong or two
 * changes contradict. n may be 0: `base` itself. */
const struct model *model_change(struct arena *a, const struct model *base, size_t n,
                                 const struct model_change *changes, struct diags *d);

/* The change of an option of `base`. */
struct model_change model_option_change(const struct model *base, const char *option);

/* What a state changes: of row `value` of the operating states of `state`, an object of this
 * kind; a node of NULL where it changes nothing. The name "STATE=VALUE" lives in `a`. */
struct model_change model_state_change(struct arena *a, const struct object *state, size_t value);

/* A change as a user writes it in an option, bound: what model_change takes. NULL, with
 * diagnostics, when it cannot be read. A bound change stays as it is. */
const struct node *model_bind_change(struct arena *a, const struct model *base,
                                     const struct node *change, struct diags *d);

/* The states of a model that vary and change something, in byte order. */
struct object_list ARRAY_BODY(const struct object *);
void model_varying(struct arena *a, const struct model *m, struct object_list *out);

/* model_change with the changes of `options` (ids in byte order). */
const struct model *model_variant(struct arena *a, const struct model *base, size_t n,
                                  const char *const *options, struct diags *d);

/* What settles the contradictions of two options, and what holds only with both: the `combine` of
 * either for the other, or NULL. */
const struct node *model_combination(const struct model *base, const char *option_p,
                                     const char *option_q);

/* The change of the commissioning period of an option, to be laid over what all options make of
 * the register; named "FIT-87B:early". A node of NULL where it has none. */
struct model_change model_early_change(struct arena *a, const struct model *base,
                                       const char *option);

/* Do two options contradict, also when what settles them is taken into account? The path
 * ("hazards/H-1/response/x/in"), or NULL. */
const char *model_contradiction(struct arena *a, const struct model *base, const char *option_p,
                                const char *option_q);

#endif
