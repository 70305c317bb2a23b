/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which alternative is best where two inputs have other values: a map of points over both.
 *
 * Axes: an input that is not known for certain goes from its 1 % to its 99 % point, any other one
 * (and one of which both points are the same) from half to double of what it is; neither beyond
 * the range that it has (turn_input: a probability at most 1, a clearance time between its
 * neighbours). Points are equally far apart in log where the axis begins above 0 and ends at
 * MAP_LOGS of its beginning or more, otherwise in value. The ends are points.
 *
 * Worth at a point: both inputs certain there, everything else as for swings (decide/swing.h), of
 * which map.is_exact is told in the same way. Where the structure makes every worth a straight line
 * in x (prober_is_linear), the points of a row come from that line through its ends; where only in
 * y, so do those of a column. */
#ifndef DECIDE_MAP_H
#define DECIDE_MAP_H

#include "decide/weigh.h"

#define MAP_COLUMNS 25 /* points in x, and in y, of reports */
#define MAP_ROWS 13
#define MAP_LOW 0.01 /* the points of what is not known at which an axis begins and ends */
#define MAP_HIGH 0.99
#define MAP_LOGS 10.

/* As point.best: a probability would be none there, or something not finite. */
#define MAP_NONE SIZE_MAX

struct map_axis {
    figure_id input;
    const char *name; /* of that figure */
    double now;       /* its mean, in base units */
    bool is_uncertain, in_logs;
    size_t n;
    const double *at; /* rising, in base units */
};

struct map_point {
    size_t best;         /* index of the best alternative, ties by name; or MAP_NONE */
    double margin;       /* its worth less that of the next best, >= 0; 0 where there is none */
    const double *worth; /* money, by alternative; 0 of doing nothing */
};

/* Where the best alternative changes between a point and the next one of its row, or the one of
 * the next row: `from` + `along` of the way, with 0 <= along <= 1, by the straight line of the
 * difference of the worths of both. Points that are not possible have no lines. */
struct map_line {
    size_t from, to; /* points */
    double along;
};

struct choice_map {
    const char *name; /* DECISION.map[INPUT][INPUT], first x */
    struct map_axis x, y;
    struct map_point *points;     /* row by row from the least y: points[row * x.n + column] */
    struct map_point today;       /* both at their means, mostly none of the points */
    ARRAY(struct map_line) lines; /* by `from`, then `to` */
    bool is_exact;
};

/* weigh_rank has been called. Inputs by name of their figures; where one or both are NULL: those
 * with the widest swings, and behind these, where too few swing, those on which the decision leans
 * most. columns, rows >= 2. OHMEN_UNKNOWN with the nearest name for one that moves nothing here or
 * stands twice, OHMEN_COMPUTE where there are no two inputs, or a percentile or today's point
 * cannot be computed. Lives in the arena of the figures. */
ohmen_status map_find(struct figures *f, const struct weighing *w, const char *x, const char *y,
                      size_t columns, size_t rows, struct choice_map *out, ohmen_error *e);

#endif
