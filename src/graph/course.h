/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Courses, inside src/graph: where a time lies between the resets, and what has changed by then. */
#ifndef GRAPH_COURSE_H
#define GRAPH_COURSE_H

#include "graph/graph.h"

#include <stdbool.h>

/* The arguments of a COURSE. */
enum { COURSE_STANDING, COURSE_RATE, COURSE_ENDING, COURSE_LEFT, COURSE_UNRESET, COURSE_ARGS };

/* From a reset (or the beginning) to the next one: origin <= t < next. */
struct stretch {
    double origin, next; /* INFINITY: none */
    bool fresh;          /* h starts at 0, not at `left` */
};
struct stretch course_stretch(const struct course *c, double t);

/* h or m: the probability but for `standing`, at time `since` behind the origin of the stretch and
 * `age` behind `born`, neither negative. */
double course_change(const double x[COURSE_ARGS], bool fresh, double since, double age);
/* The same, and slope[i] = d course_change / d x[i]; 0 for the first. */
double course_change_slopes(const double x[COURSE_ARGS], bool fresh, double since, double age,
                            double slope[COURSE_ARGS]);

/* The rules of the node, which stands for time 0. */
void course_backward(const struct course *c, const double x[COURSE_ARGS], double w, double *back);

#endif
