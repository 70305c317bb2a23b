/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Courses in lanes (course_lanes.h), for one instruction set (base/isa.h). Owns nothing.
 *
 * What is lost of 1 by time x, 1 - exp(-y) with y = s x, is a series for y <= 1/4, and beyond it
 * is the series at y / 2^k, doubled k times: lost(2 y) = lost(y) (2 - lost(y)), left(2 y) =
 * left(y)^2. With r = rate / s and its complement ending / s,
 *     h = start left + r lost,    1 - h = (1 - start) left + (ending / s) lost,
 * all of them sums of what is not negative. Lanes are taken a block of vectors at a time, which
 * stay in registers from the time to the probability. Lanes that are not in use are computed with
 * the others. */
#include "graph/course_lanes.h"

#include <string.h>

/* Doubles of a vector, and vectors of a block: their chains of operations overlap. */
#if defined __AVX512F__
enum { WIDTH = 8 };
#elif defined __AVX2__
enum { WIDTH = 4 };
#else
enum { WIDTH = 2 };
#endif
enum { VECTORS = 4, BLOCK = VECTORS * WIDTH };
typedef double vector __attribute__((vector_size(sizeof(double) * WIDTH)));
typedef vector vector_of_row __attribute__((aligned(8), may_alias)); /* rows are of any alignment */

struct block {
    vector at[VECTORS];
};

#define EACH for (int j = 0; j < VECTORS; j++)

static inline struct block load(const double *x)
{
    struct block b;
    EACH b.at[j] = *(const vector_of_row *)(x + j * WIDTH);
    return b;
}

static inline void store(double *x, const struct block *b)
{
    EACH *(vector_of_row *)(x + j * WIDTH) = b->at[j];
}

/* ---- what is lost by some time ---- */

/* Beyond it nothing is left: exp(-700) is 1e-304. */
static const double GONE = 700;

/* y (1 - y (1/2! - y (1/3! - ...))), from the last term on: within 1e-17 of it, relative, where y
 * is below 1/4, 1/64 and 1/1024. */
static const double terms[] = {
    1.0 / 479001600, 1.0 / 39916800, 1.0 / 3628800, 1.0 / 362880, 1.0 / 40320, 1.0 / 5040,
    1.0 / 720,       1.0 / 120,      1.0 / 24,      1.0 / 6,      0.5};
enum { TERMS = sizeof terms / sizeof *terms, FEW = TERMS - 6, FEWEST = TERMS - 4 };

/* lost = the series at s part x, from a term on, doubled; x where it is needed clamped. */
struct decay {
    const double *x;
    double s, part;
    int first, doublings;
    _Alignas(LANES_ALIGNED) lanes clamped;
};

static void clamp(struct decay *d)
{
    for (int i = 0; i < LANES; i++) {
        double z = d->s * d->x[i];
        d->clamped[i] = z < GONE ? z : GONE;
    }
    d->x = d->clamped;
    d->s = 1;
}

enum { MANTISSA = 52, ONE = 1023, QUARTER = ONE - 2 }; /* of a double's bits; exponents */

/* How often `most` is to be halved until it is 1/4 or less: from its exponent, and whether it is
 * more than that power of 2. */
static int halvings(double most)
{
    uint64_t bits;
    memcpy(&bits, &most, sizeof bits);
    int above = (int)(bits >> MANTISSA) - QUARTER;
    above += (bits << (64 - MANTISSA)) != 0;
    return above > 0 ? above : 0;
}

static double halved(int times)
{
    uint64_t bits = (uint64_t)(ONE - times) << MANTISSA;
    double part;
    memcpy(&part, &bits, sizeof part);
    return part;
}

/* `latest` is the greatest x. */
static void decay_of(struct decay *d, double s, const double *x, double latest)
{
    double most = s * latest;
    d->x = x;
    d->s = s;
    if (!(most < GONE)) {
        most = GONE;
        clamp(d);
    }
    d->doublings = halvings(most);
    d->part = halved(d->doublings);
    d->first = most <= 0x1p-10 ? FEWEST : most <= 0x1p-6 ? FEW : 0;
}

static inline struct block lose(const struct decay *d, int begin, struct block *left)
{
    struct block z = load(d->x + begin), sum, lost;
    EACH z.at[j] = d->part * (d->s * z.at[j]);
    EACH sum.at[j] = (vector){0} + terms[d->first];
    for (int k = d->first + 1; k < TERMS; k++)
        EACH sum.at[j] = terms[k] - z.at[j] * sum.at[j];
    EACH lost.at[j] = z.at[j] * (1 - z.at[j] * sum.at[j]);
    EACH left->at[j] = 1 - lost.at[j];
    for (int i = 0; i < d->doublings; i++) {
        EACH lost.at[j] = lost.at[j] * (2 - lost.at[j]);
        EACH left->at[j] = left->at[j] * left->at[j];
    }
    return lost;
}

/* ---- one version ---- */

/* A part that holds at a time: its probability, and that of the contrary. */
struct part {
    struct block is, is_not;
};

/* What follows du/dx = rate (1 - u) - ending u, from `start` where `on` is 1 and else from 0. */
struct rise {
    struct decay decay;
    double grown, ended, start;
    bool exists;
};

static double share(double x, double y)
{
    return x == 0 ? 0 : x / y;
}

static void rise_of(struct rise *r, double rate, double ending, double start, const double *x,
                    double latest)
{
    r->exists = rate != 0 || start != 0;
    if (!r->exists)
        return;
    r->start = start;
    r->grown = share(rate, rate + ending);
    r->ended = share(ending, rate + ending);
    decay_of(&r->decay, rate + ending, x, latest);
}

/* From 0. */
static inline void rise_from_nothing(const struct rise *r, int begin, struct part *to)
{
    struct block left, lost = lose(&r->decay, begin, &left);
    EACH to->is.at[j] = r->grown * lost.at[j];
    EACH to->is_not.at[j] = left.at[j] + r->ended * lost.at[j];
}

static inline void rise_from(const struct rise *r, int begin, const double *on, struct part *to)
{
    struct block left, lost = lose(&r->decay, begin, &left), start = load(on + begin);
    EACH start.at[j] = r->start * start.at[j];
    EACH to->is.at[j] = start.at[j] * left.at[j] + r->grown * lost.at[j];
    EACH to->is_not.at[j] = (1 - start.at[j]) * left.at[j] + r->ended * lost.at[j];
}

static inline void rise_at(const struct rise *r, int begin, const double *on, struct part *to)
{
    if (r->exists && r->start == 0)
        rise_from_nothing(r, begin, to);
    else if (r->exists)
        rise_from(r, begin, on, to);
    else {
        EACH to->is.at[j] = (vector){0};
        EACH to->is_not.at[j] = to->is.at[j] + 1;
    }
}

static inline void add_unreset(const struct rise *r, int begin, struct part *h)
{
    struct part m;
    if (!r->exists)
        return;
    rise_from_nothing(r, begin, &m);
    EACH h->is.at[j] = h->is.at[j] + m.is.at[j] * h->is_not.at[j];
    EACH h->is_not.at[j] = h->is_not.at[j] * m.is_not.at[j];
}

/* Adds a version that holds with the probability `weight`. */
static void add_version(double weight, const double x[COURSE_ARGS], const struct moments *at,
                        double *p, double *q)
{
    double fixed = weight * x[COURSE_STANDING], rest = weight * (1 - x[COURSE_STANDING]);
    struct rise reset, unreset;
    rise_of(&reset, x[COURSE_RATE], x[COURSE_ENDING], x[COURSE_LEFT], at->since, at->latest_since);
    rise_of(&unreset, x[COURSE_UNRESET], x[COURSE_ENDING], 0, at->age, at->latest_age);
    for (int begin = 0; begin < LANES; begin += BLOCK) {
        struct part h;
        struct block is = load(p + begin), is_not = load(q + begin);
        rise_at(&reset, begin, at->left, &h);
        add_unreset(&unreset, begin, &h);
        EACH is.at[j] = is.at[j] + (fixed + rest * h.is.at[j]);
        EACH is_not.at[j] = is_not.at[j] + rest * h.is_not.at[j];
        store(p + begin, &is);
        store(q + begin, &is_not);
    }
}

void ISA_NAME(course_lanes)(const struct mixture *m, const struct moments *at, double *restrict p,
                            double *restrict q)
{
    for (int k = 0; k < LANES; k++)
        p[k] = q[k] = 0;
    for (size_t i = 0; i < m->n; i++)
        add_version(m->weight[i], m->x[i], at, p, q);
}
