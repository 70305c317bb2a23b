/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Quantiles of one distribution at many probabilities: what samples are made of.
 *
 * Location and scale are taken off first, so that one table serves all distributions that differ by
 * them alone. Then there are two forms of a table.
 *
 *   By the normal deviate. z is the standard normal deviate of the probability, and log x (x itself
 *   for DIST_NORMAL) a polynomial of degree 5 on each of many equal steps of z: it has the quantile
 *   at both ends, and the first two derivatives that follow from the density. Two longer steps
 *   carry it on to |z| = 7.75, beyond all that a sample asks for.
 *   By the probability u. (0, 1) is cut in 1024 equal cells; in most of them x is a polynomial of
 *   degree 5 in u, made of the first form in the same way. Cells at both ends have none.
 *
 * Accuracy, beside dist_quantile and relative to x (to the standard deviation for DIST_NORMAL):
 * 1e-8 for probabilities in 1e-9 .. 1 - 1e-9, in either form; tests hold it. Beyond that 1e-4, for
 * at most one value in 5e8. It is estimated while a table is made, from how much the third
 * derivatives of neighbours differ: steps are halved until it is reached, and a cell that does not
 * reach it has no polynomial. Where 1024 steps are not enough there is no table, and dist_quantile
 * gives each value.
 *
 * Uniform and triangular distributions are computed from their formulas, discrete ones by
 * dist_quantile: exactly, without a table. */
#ifndef MATH_QUANTILE_TABLE_H
#define MATH_QUANTILE_TABLE_H

#include <stdbool.h>

#include "base/arena.h"
#include "math/dist.h"

/* A value of d is location + scale times a value of `dist`; scale > 0. Arrays are borrowed. */
struct quantile_standard {
    struct dist dist;
    double location, scale;
};
struct quantile_standard quantile_standard(const struct dist *d);

enum {
    QUANTILE_TERMS = 6, /* of a polynomial: powers 0 to 5 */
    QUANTILE_ROW = 8,   /* room for them in a line of the cache */
    QUANTILE_LOG2_CELLS = 10,
    QUANTILE_CELLS = 1 << QUANTILE_LOG2_CELLS
};

enum quantile_way { QUANTILE_TABLE, QUANTILE_UNIFORM, QUANTILE_TRIANGULAR, QUANTILE_EXACT };

/* Step k of z begins at from + k / per_step; the first and the last are longer, but their
 * polynomials are in the same units: t = (z - from) per_step - k. term[j][k] is the coefficient
 * of t^j. */
struct quantile_steps {
    double from, per_step;
    size_t n;
    double *term[QUANTILE_TERMS];
    bool logarithm; /* of x */
};

/* Cell k holds u = (k + t) / 1024, 0 < t < 1; term[j][k] as above, for low <= k < 1024 - high. */
struct quantile_cells {
    double *term[QUANTILE_TERMS];
    /* The same again, term j of cell k in rows[k][j]: one line of the cache each, for those who
     * take single cells. NULL unless quantile_table_rows has been called. */
    const double (*rows)[QUANTILE_ROW];
    size_t low, high;
};

struct quantile_table {
    enum quantile_way way;
    struct dist dist;            /* the standardised one */
    struct quantile_steps steps; /* QUANTILE_TABLE */
    struct quantile_cells cells;
};

/* What all tables have in common: the normal deviates of the edges between cells. */
struct quantile_edges {
    double z[QUANTILE_CELLS + 1];  /* 1 .. 1023 */
    double du[QUANTILE_CELLS + 1]; /* dz / dt there */
};
void quantile_edges(struct quantile_edges *edges);

/* Of a standardised distribution. Lives in `a`. */
void quantile_table_new(struct arena *a, const struct quantile_edges *edges, const struct dist *d,
                        struct quantile_table *out);

/* Makes the rows of the cells, in `a`, if the table has cells. */
void quantile_table_rows(struct arena *a, struct quantile_table *t);

/* The quantile at z by the first form; and at u = 1 - v, the smaller of the two exact, by whatever
 * way the table has, the second form where the cell has a polynomial. One at a time, for tests and
 * for those who need few. */
double quantile_at_deviate(const struct quantile_table *t, double z);
double quantile_at(const struct quantile_table *t, double u, double v);

#endif
