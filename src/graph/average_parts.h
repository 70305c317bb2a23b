/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of averages share, inside src/graph. */
#ifndef GRAPH_AVERAGE_PARTS_H
#define GRAPH_AVERAGE_PARTS_H

#include "graph/average_order.h"

/* Courses that are equal, however often they occur, are at the same times. */
struct timing {
    const struct course *course;
    struct moments at; /* at the gathered points */
    struct extreme_times extremes;
};

/* A variable that changes and occurs. */
struct moving {
    size_t variable, timing, same; /* same: the first that is equal, itself if there is none */
    struct mixture versions;
    uint64_t edition; /* rises with each change */
    bool sound;
    struct pace pace;
};

/* Exponents that die away before the end of some piece. */
struct fading {
    double exponents[PACES], slowest, born;
    size_t timing;
    bool unreset;
};

/* A part of a window between resets; where each timing is in it. */
struct piece {
    size_t index, window;
    double begin, end;
    const struct stretch *now;
};

/* Points of time, as many as there are lanes or fewer; the lanes behind them hold the last. */
struct gathered {
    size_t n, n_runs;
    lanes t, weight;
    size_t piece[LANES];
    struct run runs[LANES];
};

/* A set of points that was met before, and the probabilities of varying variables at them, as they
 * were in the editions of then. */
struct kept_set {
    size_t n; /* 0: not made */
    lanes t;
    size_t piece[LANES];
    lanes *p, *q;
    uint64_t *edition;
};

struct averages {
    struct arena *arena;
    const struct averaged *what; /* of the last call */
    const struct average_kernels *kernels;
    const struct diagram *diagram;
    struct windows windows;
    bool keeps, begun;
    size_t n_varying, n_timings, n_fading, n_still_rows, n_rows;
    struct moving *varying;
    struct timing *timings;
    const struct course **courses; /* of timings */
    size_t *still;                 /* variables that occur and do not change */
    size_t n_still;
    struct row *rows;         /* of the diagram, those first that no varying variable moves */
    struct extreme *extremes; /* by variable */
    orders *order;            /* by node, as work */
    struct reach reach;
    double lasting[PACES]; /* the sums of the exponents that do not fade */
    struct fading *fading; /* room for two a varying variable */
    struct piece *pieces;  /* from the first on */
    size_t n_pieces;
    struct stretch *passing; /* of the last pieces that are not kept: a ring of LANES + 1 */
    size_t n_passing;
    struct kept_set *sets;
    size_t n_sets, most_sets;
    struct kept_set passing_set;
    lanes *still_p, *still_q; /* by variable: of those that do not change */
    const double **p, **q;    /* by variable: the lanes of now */
    lanes *work;              /* by node of the diagram, behind those of false and true */
    struct gathered points;
    size_t set; /* number of the set that is gathered */
    /* Takes the points of a set, whose nodes are evaluated. */
    void (*take)(struct averages *v, void *ctx);
    void *ctx;
};

/* For one pass: keeps nothing. */
struct averages *averages_once(struct arena *a, const struct averaged *what);

/* Works through all points. False where there is no finite value. */
bool averages_pass(struct averages *v, const struct averaged *what, const bool *changed,
                   void (*take)(struct averages *v, void *ctx), void *ctx);

/* n rows of lanes, which begin where vectors like them to. */
lanes *averages_lanes(struct arena *a, size_t n);

/* ---- average_pieces.c ---- */

/* Makes the pieces that are kept, and room for those that are not. */
void averages_make_pieces(struct averages *v);
/* The piece that follows another one, whose index is one less and which ends in its window. */
struct piece averages_next_piece(struct averages *v, size_t index, size_t window, double begin);

/* ---- average_sets.c ---- */

void averages_make_sets(struct averages *v);
/* Adds a point; a full set is evaluated and taken. */
void averages_add_point(struct averages *v, const struct piece *p, double t, double weight);
/* Takes what is left. */
void averages_flush(struct averages *v);

#endif
