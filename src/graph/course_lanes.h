/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One course at many times at once, inside src/graph: a hot loop of averages. */
#ifndef GRAPH_COURSE_LANES_H
#define GRAPH_COURSE_LANES_H

#include "base/isa.h"
#include "graph/course.h"

/* Rows of lanes begin where widest vectors like them to. */
enum { LANES = 32, LANES_ALIGNED = 64 };
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
    _Alignas(LANES_ALIGNED) lanes since; /* as for course_change; not negative */
    _Alignas(LANES_ALIGNED) lanes age;   /* the same */
    _Alignas(LANES_ALIGNED) lanes left;  /* 1 where h starts at `left`, 0 where it is fresh */
    double latest_since, latest_age;
};

/* p[k] and q[k] = 1 - p[k] at time k, means over the versions, within 1e-14 relative each while
 * exponents stay below 10 (4e-13 beyond): neither is made of a difference of near numbers. The
 * rates are finite and not negative. Any instruction set gives the same bits (base/isa.h); p and q
 * do not overlap. */
typedef void course_kernel(const struct mixture *m, const struct moments *at, double *p, double *q);

#ifdef KERNELS_FOR
course_kernel ISA_NAME(course_lanes);
#endif

#endif
