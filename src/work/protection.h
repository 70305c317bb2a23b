/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The chapter on what protection hinges on: which elements carry the risk, where one failure is
 * enough, and what tests leave unseen. Private to src/work.
 *
 * protection_compile adds to the graph what the chapter needs; figures_evaluate; part_protection
 * writes it. A part that has nothing to say is left out. */
#ifndef WORK_PROTECTION_H
#define WORK_PROTECTION_H

#include "figure/importance.h"
#include "figure/upkeep.h"
#include "work/work.h"

struct protection {
    const struct hazards *hazards;           /* those that were computed */
    ARRAY(const struct compiled *) elements; /* that they rest on, in byte order */
    ARRAY(struct upkeep) tested;             /* of these, those with a routine test */
    struct effects all, *each;               /* on the risk of all, and of each hazard */
};

ohmen_status protection_compile(struct job *j, const struct hazards *h, struct protection *p,
                                ohmen_error *e);
/* Parts under headings of this level. */
void part_protection(struct job *j, struct protection *p, int level);

/* --- shared by its files --- */

/* The columns of most tables here, and a cell of one: a mean probability under its figure's
 * name; its id and, where it has one, its name. */
void protection_probability(struct job *j, struct row *row, figure_id id);
/* What an object of the base is called; "" for none. */
const char *protection_name(struct job *j, const char *id);
/* Shares of risk that go through an element by itself, in one hazard. */
double protection_share(const struct effects *in, enum event_kind kind, const char *id);
/* The figure of the probability of an element's failure, or FIGURE_NONE. */
figure_id protection_fails(const struct protection *p, const char *element);
/* "A, B and C". */
const char *protection_list(struct arena *a, size_t n, const char *const *words);

void part_unbacked(struct job *j, struct protection *p, int level);   /* protection_faults.c */
void part_taken_away(struct job *j, struct protection *p, int level); /* protection_faults.c */
void part_unwanted(struct job *j, struct protection *p, int level);   /* protection_faults.c */
void part_tests(struct job *j, struct protection *p, int level);      /* protection_tests.c */

#endif
