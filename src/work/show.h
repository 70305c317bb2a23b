/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The pages of single objects: what the files show_*.c share. Private to src/work. */
#ifndef WORK_SHOW_H
#define WORK_SHOW_H

#include "figure/importance.h"
#include "work/work.h"

/* Columns of what one field says. */
#define SHOW_BRIEF 400

/* The parts that a kind has behind its fields. c: its figures, or NULL where it has none. All
 * that c holds has been evaluated; what is compiled here is evaluated here. */
void show_hazard(struct job *j, const struct object *o, const struct compiled *c);
ohmen_status show_element(struct job *j, const struct object *o, const struct compiled *c,
                          ohmen_error *e);
ohmen_status show_scheme(struct job *j, const struct object *o, const struct compiled *c,
                         ohmen_error *e);

/* --- what all have (show.c) --- */

void show_figures_table(struct job *j, const struct compiled *c);
/* A cell with a figure. */
void show_number(struct job *j, struct row *row, figure_id id);
/* What an object is called; "" where the register has none of that id. */
const char *show_name(struct job *j, const char *id);

/* Everything that a scheme or an element needs, itself included: id -> const struct object *, in
 * the order of its structure. */
void parts_below(struct arena *a, const struct model *m, const char *id, struct strmap *out);

/* The hazards whose response needs an element or a scheme, or which put it out of action, by
 * references in the register as it stands, without options and states; in byte order. */
struct hazard_list ARRAY_BODY(const struct object *);
void hazards_that_use(struct job *j, const char *id, struct hazard_list *out);

/* What a hazard does beside its risk (show_effects.c); its effects have been evaluated. */
void part_effects(struct job *j, const struct compiled *c);

/* --- what it hinges on (show_hinges.c) --- */

/* "VH-51A", "VH-51A, VH-51B together", "VH-BAT put out of action". */
const char *event_words(struct job *j, const struct event *e);
/* Does the event make this element fail? */
bool event_hits(const struct event *e, const char *element);

/* The events with the greatest effect. money: effects are on a risk; else on a probability. */
void part_hinges(struct job *j, const struct compiled *u, const struct effects *effects,
                 bool money);
void part_cut_sets(struct job *j, const struct cut_sets *sets, bool hazard);
/* "VH-BAT 110 V DC supply of Varholm; ...": the members of sets of one. */
const char *single_words(struct job *j, const struct cut_sets *singles);

/* --- years (show_years.c) --- */

/* Years of the horizon as a calendar year and its part: 2027.25. */
double calendar_year(const struct job *j, double years);
/* "2027-04-02": the inverse of horizon_years. */
const char *calendar_date(struct job *j, double years);

/* What differs from year to year, as steps, and its mean: yearly[of_year[y]] in year y. Nothing
 * where all years are alike. */
struct year_steps {
    const char *key, *title, *head, *unit; /* key of the curve: "risk-years" */
    enum number_style style;
    const figure_id *yearly;
    const uint32_t *of_year; /* NULL: yearly[0] holds in all */
    figure_id mean;
};
void part_years(struct job *j, const struct year_steps *s);

#endif
