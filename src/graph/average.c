/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Averages over time of a diagram (average.h).
 *
 * A window is cut at the resets of the courses of variables that occur in the diagram. On a piece
 * everything is a sum of exponentials, which Gauss-Legendre integrates exactly to rounding, in
 * equal parts where the exponents ask for it. An exponential that has died away asks for nothing
 * any more. Each result is a sum over its points in the order of time, whatever set they were in.
 *
 * Owns its arrays in the arena it was given. */
#include "graph/average_parts.h"

#include <assert.h>
#include <math.h>
#include <string.h>

static const double MOST_RESETS = 1e6, DEAD = 80;

/* ---- results ---- */

static void add_results(struct averages *v, void *ctx)
{
    double *results = ctx;
    const struct diagram *d = v->diagram;
    const struct gathered *points = &v->points;
    size_t begin = 0;
    for (size_t i = 0; i < points->n_runs; begin = points->runs[i++].end)
        v->kernels->add(begin, points->runs[i].end, points->weight, d->n_roots, d->roots, v->work,
                        results + points->runs[i].window * d->n_roots);
}

/* ---- parts of a piece ---- */

/* The sums of the exponents that are still alive at time t. */
static void exponents(const struct averages *v, const struct stretch *now, double t,
                      double sum[PACES])
{
    for (int k = 0; k < PACES; k++)
        sum[k] = v->lasting[k];
    for (size_t i = 0; i < v->n_fading; i++) {
        const struct fading *f = &v->fading[i];
        double begin = f->unreset ? f->born : now[f->timing].origin;
        if (f->slowest * (t - begin) < DEAD)
            for (int k = 0; k < PACES; k++)
                sum[k] += f->exponents[k];
    }
}

static void add_piece(struct averages *v, const struct piece *p)
{
    struct window w = v->windows.at[p->window];
    for (double at = p->begin, next; at < p->end; at = next) {
        double parts = 1, sum[PACES];
        exponents(v, p->now, at, sum);
        for (int k = 0; k < PACES; k++)
            sum[k] *= p->end - at;
        const struct legendre_rule *rule = average_rule(&v->reach, sum, &parts);
        next = parts > 1 ? at + (p->end - at) / parts : p->end;
        next = next > at && next < p->end ? next : p->end;
        for (size_t i = 0; i < rule->n; i++)
            averages_add_point(v, p, at + (next - at) * rule->nodes[i].at,
                               rule->nodes[i].weight * (next - at) / (w.to - w.from));
    }
}

static void add_windows(struct averages *v)
{
    size_t index = 0;
    v->set = 0;
    for (size_t k = 0; k < v->windows.n; k++) {
        struct window w = v->windows.at[k];
        struct piece p = {.index = k, .window = k, .begin = w.from, .end = w.from};
        if (v->n_varying == 0)
            averages_add_point(v, &p, w.from, 1);
        for (; v->n_varying && p.end < w.to; index++) {
            p = averages_next_piece(v, index, k, p.end);
            add_piece(v, &p);
        }
    }
    averages_flush(v);
}

/* ---- values ---- */

static const double certainly = 1;

static struct mixture versions_of(const struct averaged *what, size_t i)
{
    if (what->mixture && what->mixture[i].n)
        return what->mixture[i];
    return (struct mixture){1, &certainly, &what->x[i]};
}

static void fill(double *lane, double x)
{
    for (int i = 0; i < LANES; i++)
        lane[i] = x;
}

static void take_still(struct averages *v, size_t i)
{
    fill(v->still_p[i], v->what->p[i]);
    fill(v->still_q[i], v->what->q[i]);
    v->extremes[i] = average_still(v->what->p[i], v->what->q[i]);
}

/* Whether it can be computed: finite, and in not too many pieces. */
static bool is_sound(const struct averages *v, const struct moving *one)
{
    const struct course *c = v->courses[one->timing];
    double longest = 0;
    for (size_t k = 0; k < v->windows.n; k++)
        longest = fmax(longest, v->windows.at[k].to - v->windows.at[k].from);
    if (c->first < INFINITY && !(longest / c->every <= MOST_RESETS))
        return false;
    for (size_t i = 0; i < one->versions.n; i++) {
        const double *x = one->versions.x[i];
        if (!isfinite(x[COURSE_STANDING]))
            return false;
        for (int k = COURSE_RATE; k < COURSE_ARGS; k++)
            if (!(x[k] >= 0 && isfinite(x[k])))
                return false;
    }
    return true;
}

static bool take_varying(struct averages *v, struct moving *one, bool changed)
{
    one->versions = versions_of(v->what, one->variable);
    if (!changed)
        return one->sound;
    one->edition++;
    one->sound = is_sound(v, one);
    if (!one->sound)
        return false;
    one->pace = average_pace(&one->versions);
    v->extremes[one->variable] =
        average_extreme(v->kernels, &v->timings[one->timing].extremes, &one->versions);
    return true;
}

static bool are_equal(const struct moving *a, const struct moving *b)
{
    return a->timing == b->timing && a->versions.n == 1 && b->versions.n == 1 &&
           memcmp(a->versions.x, b->versions.x, sizeof *a->versions.x) == 0;
}

static void find_equals(struct averages *v)
{
    for (size_t i = 0; i < v->n_varying; i++) {
        struct moving *one = &v->varying[i];
        one->same = i;
        for (size_t k = 0; k < i && one->same == i; k++)
            if (are_equal(&v->varying[k], one))
                one->same = v->varying[k].same;
    }
}

/* Exponents that are alive at the end of every piece count for all of them. */
static void add_fading(struct averages *v, const struct moving *one, bool unreset)
{
    const struct pace *pace = &one->pace;
    const struct moments *at = &v->timings[one->timing].extremes.at;
    const double *x = unreset ? pace->unreset : pace->reset;
    double slowest = unreset ? pace->slowest_unreset : pace->slowest_reset;
    if (slowest * (unreset ? at->latest_age : at->latest_since) < DEAD)
        for (int k = 0; k < PACES; k++)
            v->lasting[k] += x[k];
    else
        v->fading[v->n_fading++] = (struct fading){
            {x[0], x[1], x[2]}, slowest, v->courses[one->timing]->born, one->timing, unreset};
}

static void find_fading(struct averages *v)
{
    v->n_fading = 0;
    for (int k = 0; k < PACES; k++)
        v->lasting[k] = 0;
    for (size_t i = 0; i < v->n_varying; i++) {
        const struct moving *one = &v->varying[i];
        add_fading(v, one, false);
        if (one->pace.unreset[0] > 0)
            add_fading(v, one, true);
    }
}

static bool take_values(struct averages *v, const bool *changed)
{
    bool sound = true;
    for (size_t i = 0; i < v->n_still; i++)
        if (!changed || changed[v->still[i]])
            take_still(v, v->still[i]);
    for (size_t i = 0; i < v->n_varying; i++) {
        bool is_new = !changed || changed[v->varying[i].variable];
        sound = take_varying(v, &v->varying[i], is_new) && sound;
    }
    return sound;
}

bool averages_pass(struct averages *v, const struct averaged *what, const bool *changed,
                   void (*take)(struct averages *v, void *ctx), void *ctx)
{
    v->what = what;
    v->kernels = average_kernels(what->isa);
    v->take = take;
    v->ctx = ctx;
    bool sound = take_values(v, changed);
    if (sound) {
        find_equals(v);
        find_fading(v);
        v->kernels->orders(v->n_rows, v->rows, v->extremes, v->order);
        v->reach = average_reach(v->diagram->n_roots, v->diagram->roots, v->order);
        v->kernels->rows(v->n_still_rows, v->rows, v->p, v->q, v->work);
        add_windows(v);
    }
    v->begun = true;
    return sound;
}

/* ---- beginning ---- */

static bool are_same(const struct course *a, const struct course *b)
{
    return a->from == b->from && a->first == b->first && a->every == b->every &&
           a->born == b->born && a->fresh == b->fresh;
}

static size_t timing_of(struct averages *v, const struct course *c)
{
    for (size_t i = 0; i < v->n_timings; i++)
        if (are_same(v->courses[i], c))
            return i;
    v->courses[v->n_timings] = c;
    return v->n_timings++;
}

static void find_variables(struct averages *v, const struct averaged *what)
{
    const struct diagram *d = v->diagram;
    bool *occurs = NEW_ARRAY(v->arena, d->n_variables, bool);
    v->still = NEW_ARRAY(v->arena, d->n_variables, size_t);
    v->varying = NEW_ARRAY(v->arena, d->n_variables, struct moving);
    v->courses = NEW_ARRAY(v->arena, d->n_variables, const struct course *);
    for (size_t i = 0; i < d->n_nodes; i++)
        occurs[d->nodes[i].variable] = true;
    for (size_t i = 0; i < d->n_variables; i++) {
        if (occurs[i] && what->course[i])
            v->varying[v->n_varying++] =
                (struct moving){.variable = i, .timing = timing_of(v, what->course[i])};
        else if (occurs[i])
            v->still[v->n_still++] = i;
    }
}

/* Their extremes, and that they start at `left` until a fresh one says otherwise. */
static void make_timings(struct averages *v)
{
    size_t size = v->n_timings * sizeof *v->timings;
    char *at = arena_alloc(v->arena, size + LANES_ALIGNED);
    v->timings = (void *)(at + (-(uintptr_t)at & (LANES_ALIGNED - 1)));
    for (size_t i = 0; i < v->n_timings; i++) {
        struct timing *one = &v->timings[i];
        one->course = v->courses[i];
        fill(one->at.left, 1);
        average_times(one->course, &v->windows, &one->extremes);
    }
}

/* Rows that something varying moves come behind the others. */
static void make_rows(struct averages *v, const struct averaged *what)
{
    const struct diagram *d = v->diagram;
    bool *moves = NEW_ARRAY(v->arena, d->n_nodes + 2, bool);
    v->rows = NEW_ARRAY(v->arena, d->n_nodes, struct row);
    for (size_t i = 0; i < d->n_nodes; i++) {
        const struct diagram_node *n = &d->nodes[i];
        moves[i + 2] = what->course[n->variable] || moves[n->high] || moves[n->low];
    }
    for (int moving = 0; moving < 2; moving++) {
        v->n_still_rows = v->n_rows;
        for (size_t i = 0; i < d->n_nodes; i++) {
            const struct diagram_node *n = &d->nodes[i];
            if (moves[i + 2] == moving)
                v->rows[v->n_rows++] = (struct row){(uint32_t)i + 2, n->variable, n->high, n->low};
        }
    }
}

static void make_room(struct averages *v)
{
    size_t n = v->diagram->n_variables, n_nodes = v->diagram->n_nodes + 2;
    v->extremes = NEW_ARRAY(v->arena, n, struct extreme);
    v->order = NEW_ARRAY(v->arena, n_nodes, orders);
    v->fading = NEW_ARRAY(v->arena, 2 * v->n_varying, struct fading);
    v->still_p = averages_lanes(v->arena, n);
    v->still_q = averages_lanes(v->arena, n);
    v->p = NEW_ARRAY(v->arena, n, const double *);
    v->q = NEW_ARRAY(v->arena, n, const double *);
    v->work = averages_lanes(v->arena, n_nodes);
    fill(v->work[1], 1);
    v->order[1][0] = 1;
    for (size_t i = 0; i < n; i++)
        v->p[i] = v->still_p[i], v->q[i] = v->still_q[i];
}

static struct averages *begin(struct arena *a, const struct averaged *what, bool keeps)
{
    struct averages *v = NEW(a, struct averages);
    v->arena = a;
    v->diagram = what->diagram;
    v->windows = what->windows;
    v->keeps = keeps;
    find_variables(v, what);
    make_timings(v);
    make_rows(v, what);
    make_room(v);
    averages_make_pieces(v);
    averages_make_sets(v);
    return v;
}

struct averages *averages_new(struct arena *a, const struct averaged *what)
{
    return begin(a, what, true);
}

struct averages *averages_once(struct arena *a, const struct averaged *what)
{
    return begin(a, what, false);
}

void averages_take(struct averages *v, const struct averaged *what, const bool *changed,
                   double *results)
{
    size_t n_results = what->windows.n * what->diagram->n_roots;
    for (size_t k = 0; k < n_results; k++)
        results[k] = 0;
    bool sound = averages_pass(v, what, changed, add_results, results);
    for (size_t k = 0; k < n_results; k++) /* weights and probabilities are rounded */
        results[k] = !sound ? NAN : results[k] > 1 ? 1 : results[k];
}

void average_values(struct arena *a, const struct averaged *what, double *results)
{
    struct arena *scratch = arena_child(a);
    averages_take(averages_once(scratch, what), what, NULL, results);
    arena_free(scratch);
}
