/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Quantities: what a field holds, an expression or a distribution.
 *
 * Written as a scalar:
 *     180 kEUR                                 an expression
 *     90 % within 14 MW .. 22 MW               by its 5 and 95 % points: lognormal
 *     80 % within -2 .. 3 as normal            any level between 1 and 99.9 %; the shape
 *                                              (lognormal or normal) may be named and must
 *                                              be where the range is not positive
 * or as a map, whose keys the table quantity_shapes lists:
 *     {median: 0.01 per a, error-factor: 3}
 *     {shape: triangular, from: 1 h, most-likely: 2 h, to: 9 h}
 * Parameters are certain: expressions of literals without names. `times` is a
 * pure factor in front of the whole (what the change `0.5 * was` makes of a map).
 *
 * Whether the quantity is unknown (`is`) or drawn anew at each occurrence
 * (`varies`) is said by the field that holds it. */
#ifndef QUANTITY_QUANTITY_H
#define QUANTITY_QUANTITY_H

#include "base/error.h"
#include "math/dist.h"
#include "quantity/expr.h"

enum shape {
    SHAPE_EXPRESSION, /* no distribution: `expr` */
    SHAPE_NORMAL,     /* p[0] mean, p[1] standard deviation */
    SHAPE_LOGNORMAL,  /* p[0] median, p[1] error factor p95/p50 with z =
                         1.6448536269514722; p[2] at-most or NAN: no value exceeds it and the
                         rest is scaled up to 1 (truncated, not piled up at the cap) */
    SHAPE_GAMMA,      /* p[0] mean, p[1] shape parameter 1e-6..1e4 */
    SHAPE_BETA,       /* p[0] a, p[1] b, both 1e-6..1e9 */
    SHAPE_UNIFORM,    /* p[0] from, p[1] to */
    SHAPE_TRIANGULAR, /* p[0] from, p[1] most likely, p[2] to */
    SHAPE_PERT,       /* the same, lambda 4 */
    SHAPE_DISCRETE,   /* values[] (rising), probabilities[] */
    SHAPE_COUNTED,    /* a lognormal prior learnt from events: p[0] median, p[1] error factor,
                         p[2] events, p[3] exposure. Made from evidence, never written */
    SHAPE_COUNT
};

/* A distribution in base units, free of how it was written. */
struct quantity {
    enum shape shape;
    struct dim dim;          /* known after quantity_check */
    struct expr *expr;       /* SHAPE_EXPRESSION */
    double p[4];             /* parameters, in base units; see enum shape */
    size_t n;                /* SHAPE_DISCRETE */
    double *values, *probabilities;
    double times;            /* factor in front, 1 where there is none */
    const char *text;        /* how it reads in a formula or a table:
                                "90 % within 14 MW .. 22 MW", "median 0.01 per a, error factor 3" */
};

/* One parameter as it was written. */
struct quantity_part {
    const char *key;  /* "median" */
    struct expr *expr;
    struct place place;
};

/* Which keys make which shape. The loops of docs, schema and tests use it. */
struct quantity_shape {
    enum shape shape;
    const char *name;    /* "lognormal", as in `shape:` and `as` */
    const char *keys[3]; /* required, in order; NULL-filled. Of discrete they hold lists:
                            quantity_discrete takes them, quantity_build refuses them */
    const char *also;    /* an optional key ("at-most"), or NULL */
    bool unnamed;        /* `shape:` may be left out: the keys tell */
    const char *help;
};
extern const struct quantity_shape quantity_shapes[];
extern const size_t quantity_n_shapes;

/* Parses a scalar: a range with its level, or an expression. NULL and a
 * diagnostic when wrong. */
struct quantity *quantity_parse(struct arena *a, const struct units *u, const char *s,
                                struct place at, struct diags *d);

/* Canonical text of a scalar quantity (expr_write, or "90 % within A .. B", with "as S"
 * where it was written). NULL when s is wrong. */
const char *quantity_canonical(struct arena *a, const struct units *u, const char *s);

/* Makes a distribution from the parts of a map. `shape` is the text of `shape:`
 * or NULL. Checks that the keys make exactly one shape (nearest name for a wrong
 * key), that parameters are free of names, agree in dimension, and are in range
 * (order of from, most-likely, to; factors above 1; positive where they must be).
 * at: the map. NULL and diagnostics when wrong. */
struct quantity *quantity_build(struct arena *a, const struct units *u, const char *shape,
                                struct place shape_at, const struct quantity_part *parts, size_t n,
                                struct place at, struct diags *d);

/* A discrete distribution: n values with probabilities that sum to 1 within 1e-9
 * (they are then normalised); at least one value. */
struct quantity *quantity_discrete(struct arena *a, const struct units *u, size_t n,
                                   const struct quantity_part *values,
                                   const double *probabilities, struct place at,
                                   struct diags *d);

/* Sets dim (through expr_check for an expression; `names` may be NULL for a
 * distribution). false with diagnostics when
 * the expression does not agree with itself. */
bool quantity_check(struct arena *a, const struct units *u, struct quantity *q,
                    const struct expr_names *names, struct place at, struct diags *d);

/* Is it a single number, known without names: an expression of literals only? */
bool quantity_is_constant(const struct quantity *q);

/* The value of an expression of literals, in base units. Not finite when it
 * divides by zero or overflows: callers test. */
double expr_constant(const struct expr *e);

/* Least and greatest possible value (may be infinite). */
void quantity_range(const struct quantity *q, double *low, double *high);

/* Mean, variance, quantile (0 < p < 1) of a distribution in base units, times
 * included. Not for SHAPE_EXPRESSION. Formulas in math/dist.c with their sources.
 * Variance may be infinite. A quantile that cannot be computed, or p outside 0..1,
 * is OHMEN_COMPUTE. */
double quantity_mean(const struct quantity *q);
double quantity_variance(const struct quantity *q);
ohmen_status quantity_quantile(const struct quantity *q, double p, double *out, ohmen_error *e);
/* The distribution itself, without `times`; its arrays are those of q. Not for SHAPE_EXPRESSION. */
struct dist quantity_dist(const struct quantity *q);
/* The same with q = 1 - p, the smaller of the two exact, as in dist_quantile. */
ohmen_status quantity_tail(const struct quantity *x, double p, double q, double *out,
                           ohmen_error *e);

#endif
