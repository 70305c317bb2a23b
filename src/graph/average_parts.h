/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What average.c and average_slopes.c share, inside src/graph. */
#ifndef GRAPH_AVERAGE_PARTS_H
#define GRAPH_AVERAGE_PARTS_H

#include "graph/average_order.h"

/* A variable that changes and occurs. */
struct varying {
    size_t variable, same; /* same: the first that is equal, itself if there is none */
    const struct course *course;
    struct mixture versions;
    uint64_t edition; /* rises with each change */
    bool sound;
    struct pace pace;
};

/* A part of a window between resets; where each varying variable is in it. */
struct piece {
    size_t window;
    double begin, end;
    const struct stretch *now;
};

/* Points of time, as many as there are lanes or fewer; `begin` is that of their pieces. */
struct gathered {
    size_t n;
    lanes t, begin, weight;
    size_t window[LANES];
    const struct stretch *now[LANES];
};

/* A set of points that was met before, and the probabilities of varying variables at them, as they
 * were in the editions of then. */
struct kept_set {
    size_t n; /* 0: not made */
    lanes t, begin;
    lanes *p, *q;
    struct moments *at;
    uint64_t *edition;
};

struct averages {
    struct arena *arena;
    const struct averaged *what; /* of the last call */
    const struct diagram *diagram;
    struct windows windows;
    bool keeps;
    bool *occurs;
    size_t n_varying;
    struct varying *varying;
    const struct course **courses; /* of varying */
    struct extreme *extremes;      /* by variable */
    double (*order)[LEGENDRE_ORDERS];
    struct reach reach;
    ARRAY(struct piece) pieces;         /* from the first on */
    struct stretch *passing[LANES + 1]; /* of the last pieces that are not kept */
    size_t n_passing;
    ARRAY(struct kept_set) sets;
    struct kept_set passing_set;
    lanes *still_p, *still_q; /* by variable: of those that do not change */
    const double **p, **q;    /* by variable: the lanes of now */
    lanes *work;              /* by node of the diagram */
    struct gathered points;
    size_t set; /* number of the set that is gathered */
    /* Takes the points of a set, whose nodes are evaluated. */
    void (*take)(struct averages *v, void *ctx);
    void *ctx;
};

/* For one pass: keeps nothing. */
struct averages *averages_once(struct arena *a, const struct averaged *what);

/* The times of the gathered points as varying variable i meets them. */
void averages_moments(const struct averages *v, size_t i, struct moments *at);

/* Works through all points. False where there is no finite value. */
bool averages_pass(struct averages *v, const struct averaged *what, const bool *changed,
                   void (*take)(struct averages *v, void *ctx), void *ctx);

#endif
