/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Averages over time of what a diagram says, where probabilities change by courses (graph.h,
 * graph_diagram_over), and their slopes. The same input gives the same bytes. */
#ifndef GRAPH_AVERAGE_H
#define GRAPH_AVERAGE_H

#include "graph/course.h"
#include "graph/course_lanes.h"
#include "graph/diagram.h"

struct averaged {
    const struct diagram *diagram;
    size_t n;                           /* variables, at least the diagram's */
    const double *p, *q;                /* of true and false, for what does not change */
    const struct course *const *course; /* NULL: does not change */
    const double (*x)[COURSE_ARGS];     /* the arguments of each course */
    /* NULL, or of each variable: versions of the course's arguments, in place of x. At each time
     * its probability is the mean over them. n = 0: x. */
    const struct mixture *mixture;
    struct windows windows;
    enum isa isa; /* that runs: all give the same bytes */
};

/* results[w * n_roots + k] = average of root k over window w, exact to 1e-11 relative; NaN where
 * a course has more than 1e6 resets in a window or is not finite. Scratch memory of `a` is given
 * back. */
void average_values(struct arena *a, const struct averaged *what, double *results);

/* The same again and again, with other values of the variables i where changed[i] (all of them the
 * first time, and where `changed` is NULL); what the others ask for is kept, as far as there is
 * room. The diagram, the courses and the windows are those of the first time. The same bytes as
 * those of average_values, whatever was asked for before. Lives in `a`, where only averages_new and
 * the first call of averages_take ask for memory: at the most AVERAGES_KEEP bytes for what is kept,
 * 420 a node of the diagram and 4096 a variable. Different ones may be used by several threads at
 * once. */
#define AVERAGES_KEEP (400 * 1024)
struct averages;
struct averages *averages_new(struct arena *a, const struct averaged *what);
void averages_take(struct averages *v, const struct averaged *what, const bool *changed,
                   double *results);

/* With R = sum of weight[r] * results[r]; all are added to, and may be NULL. No mixtures.
 * gain[i] = R(i true at all times) - R(i false at all times) = dR/dp for what does not change;
 * share[i] = R - R(i false at all times); by[i] = dR/dx[i], for courses only. */
struct average_slopes {
    double *gain, *share;
    double (*by)[COURSE_ARGS];
};
void average_slopes(struct arena *a, const struct averaged *what, const double *weight,
                    struct average_slopes *out);

/* Cutting a window at the resets of n courses: the end of the piece that begins at `at`, which is
 * the beginning of the window or the end of a piece. What lies closer together than 1e-12 of the
 * window's greatest time is one cut. course_stretch at `at` + average_grain tells where each
 * course is in the piece. */
double average_grain(struct window w);
double average_piece_end(size_t n, const struct course *const *courses, struct window w, double at);

#endif
