/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Compound Poisson distributions (aggregate.h). Owns nothing beyond the arena that it is given.
 *
 * Both ends go through one transform: rounded down as the real part, rounded up as the imaginary
 * part. Invariant: a set is worked through by one thread, its samples in their order; sets are
 * summed in theirs. */
#include "math/aggregate.h"

#include <assert.h>
#include <math.h>
#include <string.h>

#include "base/parallel.h"
#include "math/compound_kernels.h"
#include "math/elementary.h"
#include "math/fft.h"
#include "math/lanes.h"

/* exp(-TILT) is left of what wraps around the transform. */
#define TILT 28.
/* Recursion: up to so many points, and while exp(-expected) is a normal double. */
enum { MOST_RECURSION = 256 };
#define MOST_BY_RECURSION 700.
/* Probabilities that differ by less are equal, when a quantile is looked for. */
#define SAME_PROBABILITY 1e-12

static const struct compound_kernels *const kernels[ISA_COUNT] = {
#define X(name, needs) &compound_kernels_##name,
    ISAS(X)
#undef X
};

/* Of one thread. */
struct room {
    struct intensity nu;
    double *x, *work;     /* of the transform: pairs */
    double *size, *angle; /* by frequency */
    double *recursed;
};

/* What a set adds up to: points where the recursion was taken, frequencies where the transform was.
 */
struct sum {
    bool transformed;
    double *p[2];          /* by point: low, high */
    double *re[2], *im[2]; /* by frequency */
};

struct compounding {
    const struct aggregate_plan *plan;
    aggregate_sources *sources;
    void *ctx;
    size_t n, length; /* points; of the transform */
    const struct fft *fft;
    const double *tilt, *back; /* by point: exp(-tilt), exp(tilt) */
    struct room *rooms;
    struct sum *sums;
};

/* ---- recursion ---- */

static void recurse(size_t n, const double *nu, double expected, double *p)
{
    p[0] = math_exp(nu[0] - expected);
    for (size_t j = 1; j < n; j++) {
        double sum = 0;
        for (size_t i = 1; i <= j; i++)
            sum += (double)i * nu[i] * p[j - i];
        p[j] = sum / (double)j;
    }
}

static void add_recursed(struct compounding *c, struct room *r, struct sum *to)
{
    const double *nu[2] = {r->nu.down, r->nu.up};
    for (int end = 0; end < 2; end++) {
        recurse(c->n, nu[end], r->nu.expected, r->recursed);
        for (size_t j = 0; j < c->n; j++)
            to->p[end][j] += r->recursed[j];
    }
}

/* ---- transform ---- */

static size_t frequencies(const struct compounding *c)
{
    return c->length / 2 + 1;
}

static void transform(const struct compounding *c, struct room *r)
{
    for (size_t j = 0; j < c->n; j++) {
        r->x[2 * j] = r->nu.down[j] * c->tilt[j];
        r->x[2 * j + 1] = r->nu.up[j] * c->tilt[j];
    }
    memset(r->x + 2 * c->n, 0, 2 * (c->length - c->n) * sizeof *r->x);
    fft_forward(c->fft, r->x, r->work);
}

/* The transform of one end out of that of both. */
static void part_of(const struct compounding *c, const struct room *r, int end)
{
    size_t last = c->length - 1;
    for (size_t j = 0; j < frequencies(c); j++) {
        const double *p = r->x + 2 * j, *q = r->x + 2 * ((c->length - j) & last);
        r->size[j] = end ? (p[1] + q[1]) / 2 : (p[0] + q[0]) / 2;
        r->angle[j] = end ? (q[0] - p[0]) / 2 : (p[1] - q[1]) / 2;
        r->size[j] -= r->nu.expected;
    }
}

static void add_transformed(struct compounding *c, struct room *r, struct sum *to)
{
    size_t n = frequencies(c);
    transform(c, r);
    for (int end = 0; end < 2; end++) {
        part_of(c, r, end);
        lanes_functions(c->plan->isa)->exp(n, r->size, r->size);
        kernels[c->plan->isa]->add_turned(n, r->size, r->angle, to->re[end], to->im[end]);
    }
    to->transformed = true;
}

/* Both sums back to points: z_j = low_j + i high_j, and for the frequency -j that of the
 * conjugates. */
static void put_back(const struct compounding *c, const struct room *r, const struct sum *s)
{
    size_t last = c->length - 1;
    for (size_t j = 0; j < frequencies(c); j++) {
        double *p = r->x + 2 * j, *q = r->x + 2 * ((c->length - j) & last);
        q[0] = s->re[0][j] + s->im[1][j];
        q[1] = s->re[1][j] - s->im[0][j];
        p[0] = s->re[0][j] - s->im[1][j];
        p[1] = s->re[1][j] + s->im[0][j];
    }
    fft_inverse(c->fft, r->x, r->work);
}

/* ---- sets ---- */

static bool by_recursion(const struct compounding *c, const struct room *r)
{
    if (c->plan->method != AGGREGATE_USUAL)
        return c->plan->method == AGGREGATE_RECURSION;
    return c->n <= MOST_RECURSION && r->nu.expected < MOST_BY_RECURSION;
}

static void add_sample(struct compounding *c, size_t worker, size_t sample, struct sum *to)
{
    struct room *r = &c->rooms[worker];
    memset(r->nu.down, 0, c->n * sizeof *r->nu.down);
    memset(r->nu.up, 0, c->n * sizeof *r->nu.up);
    r->nu.expected = 0;
    c->sources(c->ctx, worker, sample, &r->nu);
    assert(r->nu.expected <= AGGREGATE_MOST_EXPECTED);
    if (by_recursion(c, r))
        add_recursed(c, r, to);
    else
        add_transformed(c, r, to);
}

/* Rounding may leave a little below 0. */
static void finish(const struct compounding *c, const struct room *r, struct sum *s)
{
    double each = 1 / (double)c->plan->points;
    if (s->transformed)
        put_back(c, r, s);
    for (int end = 0; end < 2; end++)
        for (size_t j = 0; j < c->n; j++) {
            double p = s->p[end][j];
            if (s->transformed)
                p += r->x[2 * j + (size_t)end] * c->back[j];
            s->p[end][j] = p > 0 ? p * each : 0;
        }
}

static void do_set(void *ctx, size_t worker, size_t set)
{
    struct compounding *c = ctx;
    for (size_t i = 0; i < c->plan->points; i++)
        add_sample(c, worker, set * c->plan->points + i, &c->sums[set]);
    finish(c, &c->rooms[worker], &c->sums[set]);
}

/* ---- distributions ---- */

static void end_of(struct arena *a, size_t n, double *p, struct aggregate_end *out)
{
    double sum = 0, lost = 0;
    out->p = p;
    out->below = NEW_ARRAY(a, n, double);
    for (size_t j = 0; j < n; j++) {
        double more = p[j] - lost, next = sum + more;
        lost = (next - sum) - more;
        sum = next;
        out->below[j] = fmin(sum, 1);
    }
    out->beyond = 1 - out->below[n - 1];
}

static void aggregate_of(struct arena *a, size_t n, double *const p[2], struct aggregate *out)
{
    out->n = n;
    end_of(a, n, p[0], &out->low);
    end_of(a, n, p[1], &out->high);
}

static void collect(struct arena *a, const struct compounding *c, struct aggregate *all,
                    struct aggregate *of_sets)
{
    double *p[2] = {NEW_ARRAY(a, c->n, double), NEW_ARRAY(a, c->n, double)};
    for (int end = 0; end < 2; end++)
        for (size_t j = 0; j < c->n; j++) {
            for (size_t s = 0; s < c->plan->sets; s++)
                p[end][j] += c->sums[s].p[end][j];
            p[end][j] /= (double)c->plan->sets;
        }
    aggregate_of(a, c->n, p, all);
    for (size_t s = 0; of_sets && s < c->plan->sets; s++) {
        double *copy[2] = {arena_copy(a, c->sums[s].p[0], c->n * sizeof(double)),
                           arena_copy(a, c->sums[s].p[1], c->n * sizeof(double))};
        aggregate_of(a, c->n, copy, &of_sets[s]);
    }
}

static void add_weighted(size_t n, double weight, const double *p, double *to)
{
    for (size_t j = 0; j < n; j++)
        to[j] += weight * p[j];
}

void aggregate_mix(struct arena *a, size_t n, const double *probability, const struct aggregate *of,
                   struct aggregate *out)
{
    size_t points = of[0].n;
    double *p[2] = {NEW_ARRAY(a, points, double), NEW_ARRAY(a, points, double)};
    for (size_t i = 0; i < n; i++) {
        add_weighted(points, probability[i], of[i].low.p, p[0]);
        add_weighted(points, probability[i], of[i].high.p, p[1]);
    }
    aggregate_of(a, points, p, out);
}

/* ---- room ---- */

static void find_tilts(struct arena *a, struct compounding *c)
{
    double *tilt = NEW_ARRAY(a, c->n, double), *back = NEW_ARRAY(a, c->n, double);
    const struct lanes_functions *lanes = lanes_functions(c->plan->isa);
    for (size_t j = 0; j < c->n; j++) {
        back[j] = TILT * (double)j / (double)c->length;
        tilt[j] = -back[j];
    }
    lanes->exp(c->n, tilt, tilt);
    lanes->exp(c->n, back, back);
    c->tilt = tilt;
    c->back = back;
}

static void make_room(struct arena *a, const struct compounding *c, struct room *r)
{
    r->nu.down = NEW_ARRAY(a, c->n, double);
    r->nu.up = NEW_ARRAY(a, c->n, double);
    r->recursed = NEW_ARRAY(a, c->n, double);
    r->x = NEW_ARRAY(a, 2 * c->length, double);
    r->work = NEW_ARRAY(a, 2 * c->length, double);
    r->size = NEW_ARRAY(a, frequencies(c), double);
    r->angle = NEW_ARRAY(a, frequencies(c), double);
}

static void make_sum(struct arena *a, const struct compounding *c, struct sum *s)
{
    for (int end = 0; end < 2; end++) {
        s->p[end] = NEW_ARRAY(a, c->n, double);
        s->re[end] = NEW_ARRAY(a, frequencies(c), double);
        s->im[end] = NEW_ARRAY(a, frequencies(c), double);
    }
}

void aggregate_find(struct arena *a, const struct aggregate_plan *plan, aggregate_sources *sources,
                    void *ctx, struct aggregate *all, struct aggregate *of_sets)
{
    struct arena *scratch = arena_child(a);
    struct compounding c = {.plan = plan, .sources = sources, .ctx = ctx};
    size_t threads = plan->threads < plan->sets ? plan->threads : plan->sets;
    c.n = (size_t)1 << plan->log2_points;
    c.length = 2 * c.n;
    c.fft = fft_new(scratch, plan->log2_points + 1);
    find_tilts(scratch, &c);
    c.rooms = NEW_ARRAY(scratch, threads, struct room);
    c.sums = NEW_ARRAY(scratch, plan->sets, struct sum);
    for (size_t i = 0; i < threads; i++)
        make_room(scratch, &c, &c.rooms[i]);
    for (size_t s = 0; s < plan->sets; s++)
        make_sum(scratch, &c, &c.sums[s]);
    parallel_do(threads, plan->sets, do_set, &c);
    collect(a, &c, all, of_sets);
    arena_free(scratch);
}

/* ---- what is read off ---- */

size_t aggregate_quantile(const struct aggregate *x, const struct aggregate_end *end, double p)
{
    size_t from = 0, to = x->n;
    while (from < to) {
        size_t middle = from + (to - from) / 2;
        if (end->below[middle] >= p - SAME_PROBABILITY)
            to = middle;
        else
            from = middle + 1;
    }
    return from;
}

double aggregate_exceedance(const struct aggregate_end *end, size_t j)
{
    return 1 - end->below[j];
}

/* E[min(S, q)] is the sum of P(S > j) over j < q. */
double aggregate_shortfall(const struct aggregate *x, const struct aggregate_end *end, double mean,
                           double p)
{
    size_t q = aggregate_quantile(x, end, p);
    double within = 0;
    q = q < x->n ? q : x->n - 1;
    for (size_t j = 0; j < q; j++)
        within += 1 - end->below[j];
    return (double)q + fmax(mean - within, 0) / (1 - p);
}
