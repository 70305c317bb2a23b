/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Checks that need more than one object, or more than one field. Private to src/model.
 *
 * Each adds its diagnostics and goes on. An object is checked as part of `model`,
 * which may be a variant: names are looked up there. */
#ifndef MODEL_CHECK_H
#define MODEL_CHECK_H

#include "model/model.h"

struct checking {
    struct arena *arena;
    const struct model *model;
    struct diags *diags;
    struct strmap dims; /* id of a value or rate -> struct known_dim */
    struct strmap stress_classes; /* of elements and types; empty: not collected yet */
    bool collected;
    unsigned depth;     /* of values that use values */
};

/* Values may use values this deep. */
#define VALUE_DEPTH 200

/* All checks of one object. */
void check_object(struct checking *c, const struct object *o);

/* References exist and are of the right kind. */
void check_references(struct checking *c, const struct object *o);

/* No value, rate, type, element, scheme, hazard or site is defined by itself; all objects of the
 * model at once (of a variant: those that it changed). */
void check_cycles(struct checking *c);

/* Quantities agree in dimension with themselves and with their fields. */
void check_quantities(struct checking *c, const struct object *o);

/* Exactly one last row, times, shares, outcomes. */
void check_hazard(struct checking *c, const struct object *o);

/* Interruptions with neither customers nor load have a site that states them. */
void check_supply(struct checking *c, const struct object *o);
/* The same of the hazards that a change left alone while it changed sites; told at `at`. */
void check_supply_left(struct checking *c, struct place at);

/* Settings, rates, options, states, decisions, plans. */
void check_settings(struct checking *c, const struct object *o);
void check_rate(struct checking *c, const struct object *o);
void check_element(struct checking *c, const struct object *o);
void check_common_cause(struct checking *c, const struct object *o);
void check_option(struct checking *c, const struct object *o);
void check_service(struct checking *c, const struct object *o);      /* life and renewals */
void check_combinations(struct checking *c, const struct object *o); /* `combine` */
void check_state(struct checking *c, const struct object *o);
void check_decision(struct checking *c, const struct object *o);

/* What the states that vary make of a register: of `under`, which is `base` with the change of
 * `option`, or `base` itself where that is NULL. */
void check_states(struct arena *a, const struct model *base, const struct model *under,
                  const char *option, struct diags *d);

bool check_has_row(const struct rows *rows, const char *key);
/* There is such a row; `what` it would be. */
void check_named(struct checking *c, const struct rows *rows, const char *key, struct place at,
               const char *what);

/* The place of a node of this object (its own, or the register with its path). */
struct place check_place(const struct object *o, const struct node *node);

/* Shares of rows sum to 1 or exactly one is the rest; `what` names them. */
void check_shares(struct checking *c, const struct node *map, const struct rows *shares,
                  const struct quantity *(*share)(const struct rows *, size_t), const char *what);

/* The dimension of a value or a rate by its id; false where it has none (reported
 * elsewhere). */
bool check_dim_of(struct checking *c, const char *id, struct dim *out);

/* Is the quantity a certain number, through all names that it uses? */
bool check_is_certain(struct checking *c, const struct quantity *q);

#endif
