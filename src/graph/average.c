/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Averages over time of a diagram (average.h).
 *
 * A window is cut at the resets of the courses of variables that occur in the diagram. On a piece
 * everything is a sum of exponentials, which Gauss-Legendre integrates exactly to rounding, in
 * equal parts where the exponents ask for it. An exponential that has died away asks for nothing
 * any more. Courses that differ in `standing` alone are computed once.
 *
 * Points are gathered in lanes, and the diagram is worked through for all lanes of a full set at a
 * time. Each result is a sum over its points in the order of time, whatever set they were in.
 *
 * Owns a child arena for the time of one call. */
#include "graph/average.h"

#include "graph/average_order.h"

#include <assert.h>
#include <math.h>
#include <string.h>

enum { LANES = 32, GROUP = 8 };
static const double MOST_RESETS = 1e6, DEAD = 80;

typedef double lanes[LANES];

/* A variable that changes and occurs. */
struct varying {
    size_t variable, same; /* same: the first with equal changes, itself if there is none */
    const struct course *course;
    const double *x;
    struct stretch now;
};

struct averaging {
    const struct averaged *what;
    struct arena *arena;
    size_t n_varying;
    struct varying *varying;
    const struct course **courses; /* of varying */
    struct reach reach;
    lanes *p, *q;  /* by variable */
    lanes *change; /* by varying: course_change */
    lanes *work;   /* by node of the diagram */
    size_t n;      /* lanes in use */
    lanes weight;  /* of a point in the average of its window */
    size_t window[LANES];
    double *results;
    const double *weights; /* slopes: of results; NULL: values only */
    struct average_slopes *out;
    lanes *slope; /* slopes: by varying and argument, of course_change */
    lanes *back, *dp;
};

/* ---- the pieces of a window ---- */

double average_grain(struct window w)
{
    return 1e-12 * fmax(fabs(w.from), fabs(w.to));
}

double average_piece_end(size_t n, const struct course *const *courses, struct window w, double at)
{
    double grain = average_grain(w), end = w.to;
    for (size_t i = 0; i < n; i++)
        end = fmin(end, course_stretch(courses[i], at + grain).next);
    return end < w.to - grain ? end : w.to;
}

/* ---- the diagram in lanes ---- */

static size_t groups(size_t n)
{
    return (n + GROUP - 1) / GROUP;
}

static void mix_arms(double *restrict to, const double *restrict p, const double *restrict q,
                     const double *restrict high, const double *restrict low)
{
    for (int i = 0; i < GROUP; i++)
        to[i] = p[i] * high[i] + q[i] * low[i];
}

static void evaluate_lanes(struct averaging *v)
{
    const struct diagram *d = v->what->diagram;
    size_t n = groups(v->n) * GROUP;
    for (size_t i = 0; i < d->n_nodes; i++) {
        const struct diagram_node *node = &d->nodes[i];
        const double *p = v->p[node->variable], *q = v->q[node->variable];
        const double *high = v->work[node->high], *low = v->work[node->low];
        double *to = v->work[i + 2];
        for (size_t k = 0; k < n; k += GROUP)
            mix_arms(to + k, p + k, q + k, high + k, low + k);
    }
}

static void add_results(struct averaging *v)
{
    const struct diagram *d = v->what->diagram;
    for (size_t i = 0; i < v->n; i++) {
        double *results = v->results + v->window[i] * d->n_roots;
        for (size_t k = 0; k < d->n_roots; k++)
            results[k] += v->weight[i] * v->work[d->roots[k]][i];
    }
}

/* ---- slopes ---- */

static void set_back(struct averaging *v)
{
    const struct diagram *d = v->what->diagram;
    memset(v->back, 0, (d->n_nodes + 2) * sizeof *v->back);
    memset(v->dp, 0, v->what->n * sizeof *v->dp);
    for (size_t k = 0; k < d->n_roots; k++)
        for (size_t i = 0; i < v->n; i++)
            v->back[d->roots[k]][i] += v->weight[i] * v->weights[v->window[i] * d->n_roots + k];
}

static void back_lanes(struct averaging *v)
{
    const struct diagram *d = v->what->diagram;
    for (size_t i = d->n_nodes; i-- > 0;) {
        const struct diagram_node *node = &d->nodes[i];
        const double *p = v->p[node->variable], *q = v->q[node->variable];
        const double *high = v->work[node->high], *low = v->work[node->low];
        const double *w = v->back[i + 2];
        double *dp = v->dp[node->variable];
        double *back_high = v->back[node->high], *back_low = v->back[node->low];
        for (size_t k = 0; k < v->n; k++) {
            dp[k] += w[k] * (high[k] - low[k]);
            back_high[k] += w[k] * p[k];
            back_low[k] += w[k] * q[k];
        }
    }
}

static double dot(size_t n, const double *x, const double *y)
{
    double sum = 0;
    for (size_t i = 0; i < n; i++)
        sum += x[i] * y[i];
    return sum;
}

static void add_course_slopes(struct averaging *v, const struct varying *one)
{
    double *by = v->out->by[one->variable], standing = one->x[COURSE_STANDING];
    const double *dp = v->dp[one->variable];
    for (size_t i = 0; i < v->n; i++)
        by[COURSE_STANDING] += dp[i] * (1 - v->change[one->same][i]);
    for (int k = COURSE_RATE; k < COURSE_ARGS; k++)
        by[k] += (1 - standing) * dot(v->n, dp, v->slope[one->same * COURSE_ARGS + (size_t)k]);
}

static void add_slopes(struct averaging *v)
{
    for (size_t i = 0; i < v->what->diagram->n_variables; i++) {
        for (size_t k = 0; k < v->n && v->out->gain; k++)
            v->out->gain[i] += v->dp[i][k];
        if (v->out->share)
            v->out->share[i] += dot(v->n, v->dp[i], v->p[i]);
    }
    for (size_t i = 0; i < v->n_varying && v->out->by; i++)
        add_course_slopes(v, &v->varying[i]);
}

/* ---- gathering points ---- */

static void flush(struct averaging *v)
{
    if (v->n == 0)
        return;
    evaluate_lanes(v);
    if (v->weights) {
        set_back(v);
        back_lanes(v);
        add_slopes(v);
    } else {
        add_results(v);
    }
    v->n = 0;
}

static void change_at(struct averaging *v, size_t index, size_t lane, double t)
{
    const struct varying *one = &v->varying[index];
    double since = fmax(t - one->now.origin, 0), age = fmax(t - one->course->born, 0);
    if (!v->weights) {
        v->change[index][lane] = course_change(one->x, one->now.fresh, since, age);
        return;
    }
    double slope[COURSE_ARGS];
    v->change[index][lane] = course_change_slopes(one->x, one->now.fresh, since, age, slope);
    for (size_t k = 0; k < COURSE_ARGS; k++)
        v->slope[index * COURSE_ARGS + k][lane] = slope[k];
}

static void add_point(struct averaging *v, size_t window, double t, double weight)
{
    size_t lane = v->n++;
    v->weight[lane] = weight;
    v->window[lane] = window;
    for (size_t i = 0; i < v->n_varying; i++) {
        const struct varying *one = &v->varying[i];
        if (one->same == i)
            change_at(v, i, lane, t);
        double change = v->change[one->same][lane], standing = one->x[COURSE_STANDING];
        v->p[one->variable][lane] = standing + change * (1 - standing);
        v->q[one->variable][lane] = (1 - change) * (1 - standing);
    }
    if (v->n == LANES)
        flush(v);
}

/* ---- parts of a piece ---- */

/* The sum of the exponents that are still alive at time t. */
static double exponents(const struct averaging *v, double t)
{
    double sum = 0;
    for (size_t i = 0; i < v->n_varying; i++) {
        const struct varying *one = &v->varying[i];
        double reset = one->x[COURSE_RATE] + one->x[COURSE_ENDING];
        double unreset = one->x[COURSE_UNRESET] + one->x[COURSE_ENDING];
        if (reset * (t - one->now.origin) < DEAD)
            sum += reset;
        if (one->x[COURSE_UNRESET] > 0 && unreset * (t - one->course->born) < DEAD)
            sum += unreset;
    }
    return sum;
}

static void add_piece(struct averaging *v, size_t window, double begin, double end)
{
    struct window w = v->what->windows.at[window];
    for (double at = begin, next; at < end; at = next) {
        double parts = 1;
        const struct legendre_rule *rule =
            average_rule(&v->reach, exponents(v, at) * (end - at), &parts);
        next = parts > 1 ? at + (end - at) / parts : end;
        next = next > at && next < end ? next : end;
        for (size_t i = 0; i < rule->n; i++)
            add_point(v, window, at + (next - at) * rule->nodes[i].at,
                      rule->nodes[i].weight * (next - at) / (w.to - w.from));
    }
}

static void add_window(struct averaging *v, size_t window)
{
    struct window w = v->what->windows.at[window];
    if (v->n_varying == 0) {
        add_point(v, window, w.from, 1);
        return;
    }
    for (double at = w.from, end; at < w.to; at = end) {
        end = average_piece_end(v->n_varying, v->courses, w, at);
        for (size_t i = 0; i < v->n_varying; i++)
            v->varying[i].now = course_stretch(v->courses[i], at + average_grain(w));
        add_piece(v, window, at, end);
    }
}

/* ---- beginning ---- */

static bool has_equal_change(const struct varying *a, const struct varying *b)
{
    return a->course == b->course && memcmp(a->x + COURSE_RATE, b->x + COURSE_RATE,
                                            (COURSE_ARGS - COURSE_RATE) * sizeof *a->x) == 0;
}

static void add_varying(struct averaging *v, size_t variable)
{
    size_t at = v->n_varying++;
    struct varying *one = &v->varying[at];
    v->courses[at] = v->what->course[variable];
    *one = (struct varying){variable, at, v->courses[at], v->what->x[variable], {0}};
    for (size_t i = 0; i < at && one->same == at; i++)
        if (has_equal_change(&v->varying[i], one))
            one->same = v->varying[i].same;
}

/* In the order of variables, those that occur. */
static void find_varying(struct averaging *v)
{
    const struct diagram *d = v->what->diagram;
    bool *occurs = NEW_ARRAY(v->arena, v->what->n, bool);
    for (size_t i = 0; i < d->n_nodes; i++)
        occurs[d->nodes[i].variable] = true;
    v->varying = NEW_ARRAY(v->arena, v->what->n, struct varying);
    v->courses = NEW_ARRAY(v->arena, v->what->n, const struct course *);
    for (size_t i = 0; i < d->n_variables; i++)
        if (occurs[i] && v->what->course[i])
            add_varying(v, i);
}

static void fill(double *lane, double x)
{
    for (int i = 0; i < LANES; i++)
        lane[i] = x;
}

static void make_room(struct averaging *v)
{
    const struct averaged *what = v->what;
    size_t n_nodes = what->diagram->n_nodes + 2;
    v->p = NEW_ARRAY(v->arena, what->n, lanes);
    v->q = NEW_ARRAY(v->arena, what->n, lanes);
    v->change = NEW_ARRAY(v->arena, v->n_varying, lanes);
    v->work = NEW_ARRAY(v->arena, n_nodes, lanes);
    fill(v->work[1], 1);
    for (size_t i = 0; i < what->n; i++)
        if (!what->course[i]) {
            fill(v->p[i], what->p[i]);
            fill(v->q[i], what->q[i]);
        }
    if (v->weights) {
        v->back = NEW_ARRAY(v->arena, n_nodes, lanes);
        v->dp = NEW_ARRAY(v->arena, what->n, lanes);
        v->slope = NEW_ARRAY(v->arena, v->n_varying * COURSE_ARGS, lanes);
    }
}

/* Whether it can be computed: finite, and in not too many pieces. */
static bool is_sound(const struct averaging *v)
{
    double t = 0;
    for (size_t k = 0; k < v->what->windows.n; k++)
        t = fmax(t, v->what->windows.at[k].to - v->what->windows.at[k].from);
    for (size_t i = 0; i < v->n_varying; i++) {
        const struct varying *one = &v->varying[i];
        bool is_reset = one->course->first < INFINITY;
        if (is_reset && !(t / one->course->every <= MOST_RESETS))
            return false;
        if (!isfinite(one->x[COURSE_STANDING]))
            return false;
        for (int k = COURSE_RATE; k < COURSE_ARGS; k++)
            if (!(one->x[k] >= 0 && isfinite(one->x[k])))
                return false;
    }
    return true;
}

static bool prepare(struct averaging *v, struct arena *a)
{
    v->arena = arena_child(a);
    find_varying(v);
    if (!is_sound(v))
        return false;
    make_room(v);
    v->reach = average_reach(v->arena, v->what);
    return true;
}

static void add_windows(struct averaging *v)
{
    for (size_t k = 0; k < v->what->windows.n; k++)
        add_window(v, k);
    flush(v);
}

void average_values(struct arena *a, const struct averaged *what, double *results)
{
    struct averaging v = {.what = what, .results = results};
    bool sound = prepare(&v, a);
    for (size_t i = 0; i < what->windows.n * what->diagram->n_roots; i++)
        results[i] = sound ? 0 : NAN;
    if (sound)
        add_windows(&v);
    arena_free(v.arena);
}

void average_slopes(struct arena *a, const struct averaged *what, const double *weight,
                    struct average_slopes *out)
{
    struct averaging v = {.what = what, .weights = weight, .out = out};
    bool sound = prepare(&v, a);
    assert(sound);
    (void)sound;
    add_windows(&v);
    arena_free(v.arena);
}
