/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Samples (draw.h): what draws_new prepares, and how draws_fill puts an input's values together.
 *
 * Values are made in the order of their strata, which makes it plain arithmetic along rows of
 * coefficients, and then arranged. Owns nothing but what it puts into the caller's arena; work
 * space is cut from the caller's.
 * Invariant: an input's values are a function of its own key, its table and the plan. */
#include "math/draw.h"

#include <assert.h>
#include <math.h>
#include <string.h>

#include "math/draw_kernels.h"
#include "math/lanes.h"
#include "math/sobol.h"
#include "math/stream.h"

enum { MOST_POINTS = 1 << DRAW_MOST_LOG2 };

static_assert((int)DRAW_MOST_LOG2 <= (int)SOBOL_DIRECTIONS, "a direction for each bit of a point");

struct input {
    const struct quantile_table *table;
    double location, scale; /* x is location + scale times a value of the table */
    struct stream stream;
    /* DRAW_SCRAMBLED: the points of its dimension; and which group it is in, with its key */
    const uint16_t *net;
    unsigned group;
    struct stream together;
};

struct draws {
    enum draw_method method;
    unsigned log2;
    const struct draw_kernels *kernels;
    const struct lanes_functions *lanes;
    struct input *inputs;
    uint16_t *counting; /* 0, 1, 2, ... */
};

static const struct draw_kernels *const kernels[ISA_COUNT] = {
#define X(name, needs) &draw_kernels_##name,
    ISAS(X)
#undef X
};

/* Tables by standardised distribution: open addressing, twice as many places as inputs. */
struct cache {
    bool has_rows;
    size_t mask;
    struct quantile_table **at;
};

/* Only where each cell has its stratum, in order, are columns what is read. */
static bool takes_cells_in_order(enum draw_method method, unsigned log2)
{
    return method != DRAW_PLAIN && log2 == QUANTILE_LOG2_CELLS;
}

static struct cache cache_new(struct arena *a, const struct draw_plan *p, size_t n)
{
    size_t places = 2;
    while (places < 2 * n)
        places *= 2;
    return (struct cache){!takes_cells_in_order(p->method, p->log2_points), places - 1,
                          NEW_ARRAY(a, places, struct quantile_table *)};
}

static bool same(const struct dist *a, const struct dist *b)
{
    return a->shape == b->shape && memcmp(a->p, b->p, sizeof a->p) == 0 && a->n == b->n &&
           a->values == b->values && a->probabilities == b->probabilities;
}

static size_t first_place(const struct cache *c, const struct dist *d)
{
    struct stream s = {(uint64_t)d->shape ^ (uint64_t)(uintptr_t)d->values};
    for (size_t i = 0; i < sizeof d->p / sizeof *d->p; i++) {
        uint64_t bits;
        memcpy(&bits, &d->p[i], sizeof bits);
        s = stream_below(s, bits);
    }
    return (size_t)stream_next(&s) & c->mask;
}

static const struct quantile_table *
table_of(struct arena *a, struct cache *c, const struct quantile_edges *edges, const struct dist *d)
{
    size_t i = first_place(c, d);
    for (; c->at[i]; i = (i + 1) & c->mask)
        if (same(&c->at[i]->dist, d))
            return c->at[i];
    c->at[i] = NEW(a, struct quantile_table);
    quantile_table_new(a, edges, d, c->at[i]);
    if (c->has_rows)
        quantile_table_rows(a, c->at[i]);
    return c->at[i];
}

static bool is_finite(const struct draws *d, const struct input *in)
{
    double least = ldexp(0.5, -32 - (int)d->log2), most = 1 - least;
    return isfinite(in->location + in->scale * quantile_at(in->table, least, most)) &&
           isfinite(in->location + in->scale * quantile_at(in->table, most, least)) &&
           isfinite(quantile_at(in->table, 0.5, 0.5));
}

static uint16_t *counting_row(struct arena *a, size_t n)
{
    uint16_t *row = NEW_ARRAY(a, n, uint16_t);
    for (size_t i = 0; i < n; i++)
        row[i] = (uint16_t)i;
    return row;
}

/* The points of the dimensions that are used, before they are scrambled: strata. */
struct nets {
    uint32_t direction[SOBOL_DIMENSIONS][SOBOL_DIRECTIONS];
    const uint16_t *of[SOBOL_DIMENSIONS]; /* NULL: not made */
};

/* Of the directions the bits that tell strata apart count. */
static const uint16_t *net_of(struct arena *a, struct nets *nets, const struct draw_plan *p,
                              unsigned dimension)
{
    uint16_t direction[DRAW_MOST_LOG2], *net;
    if (nets->of[dimension])
        return nets->of[dimension];
    for (unsigned k = 0; k < p->log2_points; k++)
        direction[k] = (uint16_t)(nets->direction[dimension][k] >> (SOBOL_BITS - p->log2_points));
    net = NEW_ARRAY(a, (size_t)1 << p->log2_points, uint16_t);
    kernels[p->isa]->net(p->log2_points, direction, net);
    return nets->of[dimension] = net;
}

static void give_place(struct arena *a, struct input *in, const struct draw_plan *p, unsigned place,
                       struct nets *nets)
{
    in->group = place / SOBOL_DIMENSIONS;
    in->together = stream_below(stream_of("", p->seed), in->group);
    in->net = net_of(a, nets, p, place % SOBOL_DIMENSIONS);
}

static struct input input_of(const struct draw_input *in, const struct draw_plan *p,
                             const struct quantile_table *table,
                             const struct quantile_standard *standard)
{
    return (struct input){.table = table,
                          .location = in->times * standard->location,
                          .scale = in->times * standard->scale,
                          .stream = stream_of(in->name, p->seed)};
}

ohmen_status draws_new(struct arena *a, const struct draw_plan *p, size_t n,
                       const struct draw_input *inputs, struct draws **out, ohmen_error *e)
{
    assert(p->log2_points >= DRAW_LEAST_LOG2 && p->log2_points <= DRAW_MOST_LOG2);
    struct draws *d = NEW(a, struct draws);
    struct quantile_edges *edges = NEW(a, struct quantile_edges);
    struct cache cache = cache_new(a, p, n);
    struct nets nets = {0};
    *d = (struct draws){p->method,
                        p->log2_points,
                        kernels[p->isa],
                        lanes_functions(p->isa),
                        NEW_ARRAY(a, n, struct input),
                        counting_row(a, (size_t)1 << p->log2_points)};
    quantile_edges(edges);
    if (!sobol_directions(nets.direction))
        arena_exhausted(a);
    for (size_t i = 0; i < n; i++) {
        struct quantile_standard standard = quantile_standard(&inputs[i].dist);
        const struct quantile_table *table = table_of(a, &cache, edges, &standard.dist);
        d->inputs[i] = input_of(&inputs[i], p, table, &standard);
        give_place(a, &d->inputs[i], p, inputs[i].place, &nets);
        if (!is_finite(d, &d->inputs[i]))
            return error_set(e, OHMEN_COMPUTE, "%s has no finite quantile", inputs[i].name);
    }
    *out = d;
    return OHMEN_OK;
}

/* Rows of the work space. The arrays of whole numbers share the first ones. */
struct rows {
    uint32_t *jitter;
    uint16_t *stratum, *place, *spare;
    uint16_t *which; /* values that have no polynomial, and their */
    uint16_t *their_stratum;
    uint32_t *their_jitter;
    double *ordered, *u, *v;
};

enum { BYTES_A_POINT = 2 * sizeof(uint32_t) + 5 * sizeof(uint16_t) + 3 * sizeof(double) };

size_t draws_work(const struct draws *d)
{
    size_t n = (size_t)1 << d->log2;
    return n * BYTES_A_POINT / sizeof(double) + 1;
}

static struct rows rows_of(double *work, size_t n)
{
    struct rows r = {.ordered = work, .u = work + n, .v = work + 2 * n};
    r.jitter = (uint32_t *)(void *)(work + 3 * n);
    r.their_jitter = r.jitter + n;
    r.stratum = (uint16_t *)(void *)(r.their_jitter + n);
    r.place = r.stratum + n;
    r.spare = r.place + n;
    r.which = r.spare + n;
    r.their_stratum = r.which + n;
    return r;
}

/* The values that have no polynomial, through their deviates. */
static void fill_ends(const struct draws *d, const struct quantile_steps *s, size_t n,
                      const struct rows *r, double *x)
{
    for (size_t i = 0; i < n; i++) {
        r->their_stratum[i] = r->stratum[r->which[i]];
        r->their_jitter[i] = r->jitter[r->which[i]];
    }
    d->kernels->chances(n, d->log2, r->their_stratum, r->their_jitter, r->u, r->v);
    d->lanes->deviate(n, r->u, r->v, r->u);
    d->kernels->steps(n, s, r->u, r->v);
    if (s->logarithm)
        d->lanes->exp(n, r->v, r->v);
    for (size_t i = 0; i < n; i++)
        x[r->which[i]] = r->v[i];
}

/* Strata that reach into cells without a polynomial, at the lower and the upper end. */
struct ends {
    size_t low, high;
};

static struct ends ends_of(const struct draws *d, const struct quantile_cells *c)
{
    size_t n = (size_t)1 << d->log2, up = QUANTILE_CELLS - 1;
    size_t low = (c->low * n + up) / QUANTILE_CELLS, high = (c->high * n + up) / QUANTILE_CELLS;
    return low + high <= n ? (struct ends){low, high} : (struct ends){n, 0};
}

static size_t find_ends(const struct draws *d, const struct ends *ends, const struct rows *r)
{
    size_t n = (size_t)1 << d->log2, found = 0;
    for (size_t i = 0; i < n; i++)
        if (r->stratum[i] < ends->low || r->stratum[i] >= n - ends->high)
            r->which[found++] = (uint16_t)i;
    return found;
}

/* The same where each stratum has one value, in order. */
static size_t list_ends(const struct draws *d, const struct ends *ends, const struct rows *r)
{
    size_t n = (size_t)1 << d->log2;
    memcpy(r->which, d->counting, ends->low * sizeof *r->which);
    memcpy(r->which + ends->low, d->counting + n - ends->high, ends->high * sizeof *r->which);
    return ends->low + ends->high;
}

static void fill_table(const struct draws *d, const struct quantile_table *t, const struct rows *r,
                       double *x)
{
    size_t n = (size_t)1 << d->log2;
    struct ends ends = ends_of(d, &t->cells);
    bool ordered = r->stratum == d->counting;
    if (takes_cells_in_order(d->method, d->log2))
        d->kernels->cells(ends.low, n - ends.high, &t->cells, r->jitter, x);
    else
        d->kernels->cells_at(n, d->log2, &t->cells, r->stratum, r->jitter, x);
    size_t found = ordered ? list_ends(d, &ends, r) : find_ends(d, &ends, r);
    fill_ends(d, &t->steps, found, r, x);
}

/* Between 0 and 1 with the most likely value `top` (dist.c has the formula). */
static void fill_triangular(size_t n, double top, const struct rows *r, double *x)
{
    for (size_t i = 0; i < n; i++)
        x[i] = r->u[i] <= top ? sqrt(r->u[i] * top) : 1 - sqrt(r->v[i] * (1 - top));
}

static void fill_strata(const struct draws *d, const struct quantile_table *t, const struct rows *r,
                        double *x)
{
    size_t n = (size_t)1 << d->log2;
    if (t->way == QUANTILE_TABLE) {
        fill_table(d, t, r, x);
        return;
    }
    d->kernels->chances(n, d->log2, r->stratum, r->jitter, r->u, r->v);
    if (t->way == QUANTILE_UNIFORM)
        memcpy(x, r->u, n * sizeof *x);
    else if (t->way == QUANTILE_TRIANGULAR)
        fill_triangular(n, t->dist.p[1], r, x);
    else
        for (size_t i = 0; i < n; i++)
            x[i] = dist_quantile(&t->dist, r->u[i], r->v[i]);
}

/* A random stratum for each value. */
static void any_strata(const struct draws *d, struct stream s, struct rows *r)
{
    size_t n = (size_t)1 << d->log2;
    d->kernels->jitter(n, stream_next(&s), r->their_jitter);
    for (size_t i = 0; i < n; i++)
        r->stratum[i] = (uint16_t)(r->their_jitter[i] >> (32 - d->log2));
}

static void any_order(size_t n, struct stream s, uint16_t *place)
{
    for (size_t i = 0; i < n; i++) {
        size_t k = (size_t)((stream_next(&s) >> 32) * (i + 1) >> 32);
        place[i] = (uint16_t)i;
        place[i] = place[k];
        place[k] = (uint16_t)i;
    }
}

static void nested_order(const struct draws *d, struct stream s, const struct rows *r)
{
    uint64_t bits[MOST_POINTS / 64];
    size_t words = ((size_t)1 << d->log2) / 64;
    bits[0] = stream_next(&s);
    for (size_t i = 1; i < words; i++)
        bits[i] = stream_next(&s);
    d->kernels->nest(d->log2, bits, r->spare, r->place);
}

/* The strata of an input's points before they are scrambled. Groups behind the first one take
 * the points in another order in each set, which is nested, too, so that any 2^k of them that lie
 * evenly still do. */
static const uint16_t *cells_of(const struct draws *d, const struct input *in, uint64_t set,
                                const struct rows *r)
{
    size_t n = (size_t)1 << d->log2;
    if (in->group == 0)
        return in->net;
    nested_order(d, stream_below(in->together, set), r);
    for (size_t i = 0; i < n; i++)
        r->which[i] = in->net[r->place[i]];
    return r->which;
}

/* One number after the other: the loads, which no instruction set does faster, are all there is. */
static void arrange(size_t n, const uint16_t *cell, const uint16_t *place, const double *ordered,
                    double *x)
{
    for (size_t i = 0; i < n; i++)
        x[i] = ordered[place[cell[i]]];
}

void draws_fill(const struct draws *d, size_t i, uint64_t set, double *work, double *x)
{
    const struct input *in = &d->inputs[i];
    size_t n = (size_t)1 << d->log2;
    struct rows r = rows_of(work, n);
    struct stream own = stream_below(in->stream, set), inside = stream_below(own, 0),
                  order = stream_below(own, 1);
    const uint16_t *cell = d->counting, *place = d->counting;
    if (d->method == DRAW_PLAIN)
        any_strata(d, order, &r);
    else
        r.stratum = d->counting;
    d->kernels->jitter(n, stream_next(&inside), r.jitter);
    fill_strata(d, in->table, &r, r.ordered);
    if (d->method == DRAW_HYPERCUBE) {
        any_order(n, order, r.place);
        place = r.place;
    } else if (d->method == DRAW_SCRAMBLED) {
        cell = cells_of(d, in, set, &r);
        nested_order(d, order, &r);
        place = r.place;
    }
    d->kernels->shift(n, in->location, in->scale, r.ordered);
    arrange(n, cell, place, r.ordered, x);
}

uintptr_t draws_table(const struct draws *d, size_t i)
{
    return (uintptr_t)d->inputs[i].table;
}
