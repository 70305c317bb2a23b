/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of the compiler share. Private to src/figure and src/decide. */
#ifndef FIGURE_COMPILE_H
#define FIGURE_COMPILE_H

#include "figure/figure.h"

/* A section under construction. */
struct building {
    struct figures *figures;
    const struct variant *variant; /* projected */
    struct compiled *unit;
    node_id clearance; /* time of the row that is being compiled */
};

/* Opens the section of a new unit and registers it under its key; close with
 * compiled_end. All that the unit reads must have been compiled before. */
void compiled_begin(struct figures *f, const struct variant *projected, const struct object *o,
                    const char *id, struct building *b);
void compiled_end(struct building *b);
/* Closes the section of a unit that could not be compiled: nobody will find it. */
void compiled_give_up(struct building *b);

/* Registers a figure of the unit under construction. */
figure_id compiled_add(struct building *b, enum property p, const char *q1, const char *q2,
                       node_id node, const char *source, const char *text);

/* The options of a variant that reach an object, as a variant. */
ohmen_status variant_project(struct figures *f, const struct variant *v, const char *id,
                             const struct variant **out, ohmen_error *e);

/* A unit that was compiled, under the projection of the building's variant. */
const struct compiled *compiled_of(const struct building *b, const char *id);
node_id compiled_main_node(const struct building *b, const char *id);

/* Compiles everything that an object refers to for computing. OHMEN_COMPUTE when one of its
 * quantities is of a sort that this version stores but does not evaluate. */
ohmen_status compile_references(struct figures *f, const struct variant *v, const struct object *o,
                                ohmen_error *e);

/* Nodes. */
node_id compile_const(struct building *b, double value, struct dim d, const char *text);
node_id compile_expr(struct building *b, const struct expr *e);
/* An expression, or the mean of a distribution as an input. */
node_id compile_quantity(struct building *b, const struct quantity *q);
/* How a quantity reads: its canonical text, or that of the distribution. */
const char *quantity_reads(struct figures *f, const struct quantity *q);

ohmen_status compile_hazard(struct figures *f, const struct variant *v, const struct object *o,
                            struct compiled **out, ohmen_error *e);
ohmen_status compile_scheme(struct figures *f, const struct variant *v, const struct object *o,
                            struct compiled **out, ohmen_error *e);

/* --- schemes as Boolean functions (structure.c) --- */

struct wiring {
    struct figures *figures;
    const struct model *model;
    struct diagram_builder *builder;
    ARRAY(const char *) variables; /* element ids and rows of `sees`, in order */
    ARRAY(bool) is_sees;
    struct strmap index; /* id -> (void *)(index + 1) */
    struct strmap works; /* scheme or element id -> (void *)(bfun + 1) */
    unsigned depth;
    bool too_deep;
};
void wiring_init(struct wiring *w, struct figures *f, const struct model *m);
/* Gives every element below `id` its variable, depth first along the chain. */
void wiring_order(struct wiring *w, const char *id);
/* "works" as a function of the elements' failures. */
bfun wiring_works(struct wiring *w, const char *id);
bfun wiring_sees(struct wiring *w, const char *row);
/* "NH-CT1 and (NH-51A or NH-51B)": a scheme in the names of its elements; in parentheses
 * when it is composite and not `bare`. */
void wiring_text(struct text *t, const struct model *m, const char *id, bool bare);
/* Nodes of the variables' probabilities: failures of elements, shares of `sees`. */
node_id wiring_argument(struct building *b, const struct wiring *w, size_t variable);

#endif
