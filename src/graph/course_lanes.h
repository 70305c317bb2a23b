/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One course at many times at once, inside src/graph: the hot loop of averages. */
#ifndef GRAPH_COURSE_LANES_H
#define GRAPH_COURSE_LANES_H

#include "graph/course.h"

enum { LANES = 32 };
typedef double lanes[LANES];

/* Several versions of a course, of which one holds with the probability `weight`: means over what
 * is unknown of it. Weights sum up to 1. */
struct mixture {
    size_t n;
    const double *weight;
    const double (*x)[COURSE_ARGS];
};

/* Where the course is at some times. */
struct moments {
    lanes since, age; /* as for course_change; neither negative */
    double latest_since, latest_age;
    lanes left; /* 1 where h starts at `left`, 0 where it is fresh */
};

/* p[k] and q[k] = 1 - p[k] at time k, means over the versions, within 1e-14 relative each while
 * exponents stay below 10 (4e-13 beyond): neither is made of a difference of near numbers. The
 * rates are finite and not negative. */
void course_lanes(const struct mixture *m, const struct moments *at, double *p, double *q);

#endif
