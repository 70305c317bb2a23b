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
    node_id clearance;         /* time of the row that is being compiled */
    const struct window *year; /* rates with a trend are taken in this year, counted from the
                                  start of the horizon; NULL: on the day of evaluation */
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

/* Units beside the main one of an object: the frequency of a hazard, which elements may ask for;
 * what an element does beside its common causes; unwanted operation of elements, types and schemes;
 * schemes whose elements are repaired. NULL: the main one. */
#define PART_FREQUENCY "frequency"
#define PART_ALONE "alone"
#define PART_UNWANTED "unwanted"
#define PART_REPAIRABLE "repairable"
void compiled_begin_part(struct figures *f, const struct variant *projected, const struct object *o,
                         const char *id, const char *part, struct building *b);

/* A unit that was compiled, under the projection of the building's variant. */
const struct compiled *compiled_of(const struct building *b, const char *id);
const struct compiled *compiled_part(const struct building *b, const char *id, const char *part);
node_id compiled_main_node(const struct building *b, const char *id);

/* Compiles everything that an object refers to for computing. */
ohmen_status compile_references(struct figures *f, const struct variant *v, const struct object *o,
                                ohmen_error *e);

ohmen_status compile_references_at(struct figures *f, const struct variant *v,
                                   const struct object *o, const char *path, ohmen_error *e);

/* The frequency of a hazard as a unit of its own: the mean over the horizon, and for each year
 * where it has a trend. */
struct frequency_exports {
    node_id mean;
    const node_id *yearly; /* by year of the horizon; NULL: no trend */
};
/* Is what a name stands for different in b->year? Its node then. */
bool compile_has_year(const struct building *b, const char *id);
node_id compile_in_year(struct building *b, const char *id);
ohmen_status compile_frequency_of(struct figures *f, const struct variant *v,
                                  const struct object *o, ohmen_error *e);
void compile_frequency_unit(struct figures *f, const struct variant *v, const struct object *o);

/* Nodes. */
node_id compile_const(struct building *b, double value, struct dim d, const char *text);
node_id compile_expr(struct building *b, const struct expr *e);
/* x / y of the means of both over what is unknown, and 0 where x is 0: what one case of many costs
 * on average, so that frequency times damage is risk. */
node_id ratio_of_means(struct building *b, node_id x, node_id y);
/* An expression, or the mean of a distribution as an input. */
node_id compile_quantity(struct building *b, const struct quantity *q);
/* What is unknown (`is`), or drawn anew at each occurrence (`varies`): the one that is not NULL. */
node_id compile_drawn(struct building *b, const struct quantity *is, const struct quantity *varies);
/* How a quantity reads: its canonical text, or that of the distribution. */
const char *quantity_reads(struct figures *f, const struct quantity *q);

ohmen_status compile_hazard(struct figures *f, const struct variant *v, const struct object *o,
                            struct compiled **out, ohmen_error *e);
ohmen_status compile_scheme(struct figures *f, const struct variant *v, const struct object *o,
                            struct compiled **out, ohmen_error *e);

/* --- elements in time (element.c), common causes (common_cause.c) --- */

ohmen_status compile_element(struct figures *f, const struct variant *v, const struct object *o,
                             struct compiled **out, ohmen_error *e);
ohmen_status compile_type(struct figures *f, const struct variant *v, const struct object *o,
                          struct compiled **out, ohmen_error *e);
/* The common causes that an element is a member of, in byte order. */
struct groups ARRAY_BODY(const struct object *);
void groups_of(struct figures *f, const struct model *m, const char *element, struct groups *out);
/* What remains of an element beside its common causes, and these. Compiled beside the element
 * wherever something refers to it; without common causes nothing is there. */
ohmen_status compile_alone(struct figures *f, const struct variant *v, const char *element,
                           ohmen_error *e);

/* Makes a behaviour of its parts (any of which may be NODE_NONE) and registers its figures with
 * these qualifiers: standing, course, fails. `when` may be NULL: nothing happens in time. */
struct making {
    size_t n_standing;
    node_id standing[4];
    node_id undetected, finds, revealed, left;
    bool tested;
    struct course when;
    bool dated;
    const char *q1, *q2;
};
/* Its own kind, else that of its type: index into element_kinds, or -1. */
int element_kind(const struct model *m, const struct element *x);
bool element_is_breaker(const struct model *m, const struct element *x);
/* Does it only carry out the trip command: a breaker or its trip circuit? */
bool element_is_tripped(const struct model *m, const struct element *x);
/* Sets tested, when and dated of a making as the element's documents say. */
void element_instants(const struct building *b, const struct element *x, struct making *m);
/* A common cause and its members. */
ohmen_status compile_group(struct figures *f, const struct variant *v, const struct object *o,
                           struct compiled **out, ohmen_error *e);
/* The diagram of one variable, which is its root. */
const struct diagram *variable_itself(struct figures *f);
struct behaviour compile_behaviour(struct building *b, const struct making *m, struct span *span);

struct wiring;
/* "No row clears the fault" as a function of failures alone: every function sees it. The wiring
 * is begun here. */
const struct diagram *hazard_uncleared(struct figures *f, const struct compiled *hazard,
                                       struct wiring *w);

/* --- unwanted operation (unwanted.c), repairs (repairable.c) --- */

/* The part "unwanted" of an element, a type or a scheme, and all that it needs. Of an element or
 * a type: what it refers to has been compiled. */
ohmen_status compile_unwanted(struct figures *f, const struct variant *v, const struct object *o,
                              ohmen_error *e);
/* unwanted(SCHEME; class frequency; ...): the part of the scheme has been compiled. */
node_id compile_unwanted_expr(struct building *b, const struct expr *e);
/* The part "repairable" of a scheme. OHMEN_UNKNOWN when no element of it is repaired. */
ohmen_status compile_repairable(struct figures *f, const struct variant *v, const struct object *o,
                                ohmen_error *e);

/* --- consequences beside money (consequences.c) --- */

#define PART_CONSEQUENCES "consequences"
#define PART_SUPPLY "supply"
#define PART_TOTAL "total"
/* A site: what it supplies. Its figures are those that it states. */
ohmen_status compile_site(struct figures *f, const struct variant *v, const struct object *o,
                          struct compiled **out, ohmen_error *e);
ohmen_status compile_consequences(struct figures *f, const struct variant *v,
                                  const struct object *o, ohmen_error *e);

/* --- schemes as Boolean functions (structure.c) --- */

struct wiring {
    struct building under; /* where elements and common causes are looked up */
    struct arena *scratch; /* of the builder and of all below that is no event */
    struct diagram_builder *builder;
    const struct rows *disables; /* of the hazard, or NULL */
    ARRAY(struct event) events;  /* by variable, in order */
    struct strmap index;         /* name of the event -> (void *)(variable + 1) */
    struct strmap works;         /* scheme -> (void *)(bfun + 1) */
    struct strmap trips;         /* the same with sound breakers */
    unsigned depth;
    bool too_deep;
};
/* To be ended: then its functions are gone; events and frozen diagrams live with the figures. */
void wiring_init(struct wiring *w, struct figures *f, const struct variant *v,
                 const struct rows *disables);
void wiring_end(struct wiring *w);
/* Gives every element below `id` its variable, depth first along the chain. */
void wiring_order(struct wiring *w, const char *id);
/* "works" as a function of the elements' failures. */
bfun wiring_works(struct wiring *w, const char *id);
/* The same with breakers and trip circuits taken as sound: the protection operates. */
bfun wiring_trips(struct wiring *w, const char *id);
bfun wiring_sees(struct wiring *w, const char *row);
/* The variable of an event, which is made when it is first met. */
uint32_t wiring_variable(struct wiring *w, const struct event *event);
/* All events of which any one makes the element fail: itself first. */
struct events ARRAY_BODY(struct event);
void wiring_events(struct wiring *w, const char *element, struct events *out);
/* The arguments of the diagram, in order of variables; those of `sees` and of what the hazard
 * disables are figures of the unit under construction, and get their behaviour here. */
node_id *wiring_arguments(struct building *b, struct wiring *w);
/* The behaviours of all events, for span_of. */
const struct behaviour *const *wiring_behaviours(struct arena *a, const struct wiring *w);

/* "NH-CT1 and (NH-51A or NH-51B)": a scheme in the names of events, as hazard `h` (or NULL) sees
 * it; in parentheses when it is composite and not `bare`; with sound breakers where `trips`. */
struct wording {
    struct figures *figures;
    const struct variant *variant;
    const struct hazard *hazard; /* or NULL */
    bool trips;
};
void wiring_text(struct text *t, const struct wording *w, const char *id, bool bare);

#endif
