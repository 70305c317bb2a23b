/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The sum of random amounts that occur a random number of times.
 *
 * Sources are independent; each occurs as often as a Poisson number says, and each occurrence has
 * an amount of the source's own distribution (its severity), independent of all else. Their sum is
 * compound Poisson with the intensity
 *     nu(x) = sum over the sources of expected number * P(amount = x),
 * so that sources enter by nu alone. Where expected numbers or severities hang on what is unknown,
 * nu is given for samples of that, and the result is the mean of the distributions over them.
 *
 * Amounts stand on a lattice 0, 1, ..., N - 1 of equal steps, N = 2^k. Each intensity comes twice:
 * with the amounts rounded down to the lattice, and up. As a sum can only grow with its parts, the
 * results are a lower and an upper end, between which the distribution lies: for every x
 *     P(S_low > x) <= P(S > x) <= P(S_high > x).
 * What lies beyond the lattice is in the expected number, but at no point; the distribution is
 * exact below N all the same, since a sum below N has no part beyond.
 *
 * Methods, which agree to 1e-10:
 *   transform   exp(Fourier transform of nu - expected number), with exponential tilting against
 *               what wraps around (Gruebel & Hermesmeier, Computation of compound distributions I,
 *               ASTIN Bulletin 29 (1999) 197-214; Embrechts & Frei, Panjer recursion versus FFT
 *               for compound distributions, Math. Meth. Oper. Res. 69 (2009) 497-508). Over twice
 *               the points, tilted by exp(-28) over all: of what wraps around less than 1e-12
 *               is left, and rounding errors grow to 1e-10 at the last point, less before
 *   recursion   p_0 = exp(nu_0 - expected number), p_j = sum over i = 1 .. j of i/j nu_i p_(j-i)
 *               (Panjer, ASTIN Bulletin 12 (1981) 22-26); needs p_0 to be a normal double
 * Citations are from memory.
 *
 * Invariant: the same bits with any number of threads and any instruction set. */
#ifndef MATH_AGGREGATE_H
#define MATH_AGGREGATE_H

#include "base/arena.h"
#include "base/isa.h"

enum { AGGREGATE_LEAST_LOG2 = 2, AGGREGATE_MOST_LOG2 = 20 };

/* The greatest expected number that can be worked with. */
#define AGGREGATE_MOST_EXPECTED 1e5

enum aggregate_method {
    AGGREGATE_USUAL, /* recursion for up to 256 points where it can be, else the transform */
    AGGREGATE_TRANSFORM,
    AGGREGATE_RECURSION
};

/* Of one sample. */
struct intensity {
    double expected;   /* number of occurrences, at most AGGREGATE_MOST_EXPECTED; those beyond the
                          lattice and at 0 are in it */
    double *down, *up; /* by point; 0 before */
};

/* Adds the sources of a sample; called from several threads, `worker` as in base/parallel.h. */
typedef void aggregate_sources(void *ctx, size_t worker, size_t sample, struct intensity *to);

struct aggregate_plan {
    unsigned log2_points; /* AGGREGATE_LEAST_LOG2 .. AGGREGATE_MOST_LOG2 */
    size_t sets, points;  /* samples: sets of as many; 1 and 1 where nothing is unknown */
    size_t threads;
    enum isa isa; /* that runs */
    enum aggregate_method method;
};

/* A distribution on the lattice. */
struct aggregate_end {
    double *p;     /* probability of each point */
    double *below; /* P(S <= point) */
    double beyond; /* P(S is beyond the lattice) */
};
struct aggregate {
    size_t n; /* points */
    struct aggregate_end low, high;
};

/* The mean over all samples; `of_sets`, where it is not NULL, has room for the mean of each set.
 * Lives in `a`. */
void aggregate_find(struct arena *a, const struct aggregate_plan *plan, aggregate_sources *sources,
                    void *ctx, struct aggregate *all, struct aggregate *of_sets);

/* One of several sums on the same points, by their probabilities, which add up to 1. */
void aggregate_mix(struct arena *a, size_t n, const double *probability, const struct aggregate *of,
                   struct aggregate *out);

/* The least point j with P(S <= j) >= p; n where there is none. */
size_t aggregate_quantile(const struct aggregate *x, const struct aggregate_end *end, double p);

/* P(S > j). */
double aggregate_exceedance(const struct aggregate_end *end, size_t j);

/* Expected shortfall: the mean of the worst 1 - p, in steps, `mean` being that of the whole
 * distribution, what is beyond the lattice included (Acerbi & Tasche, On the coherence of expected
 * shortfall, J. Banking & Finance 26 (2002) 1487-1503; as the least over q of
 * q + E[(S - q)+] / (1 - p), Rockafellar & Uryasev, J. Risk 2 (2000) 21-41; from memory). */
double aggregate_shortfall(const struct aggregate *x, const struct aggregate_end *end, double mean,
                           double p);

#endif
