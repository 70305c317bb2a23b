/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Averages over time of a diagram (average.h).
 *
 * A window is cut at the resets of the courses of variables that occur in the diagram. On a piece
 * everything is a sum of exponentials, which Gauss-Legendre integrates exactly to rounding, in
 * equal parts where the exponents ask for it. An exponential that has died away asks for nothing
 * any more.
 *
 * Points are gathered in lanes, and courses and diagram are worked through for all lanes of a full
 * set at a time. Each result is a sum over its points in the order of time, whatever set they were
 * in. Where there will be a next time, pieces and sets are kept; a set counts again when its points
 * are the same, and then only what has changed is computed anew.
 *
 * Owns its arrays in the arena it was given. */
#include "graph/average_parts.h"

#include <assert.h>
#include <math.h>
#include <string.h>

static const double MOST_RESETS = 1e6, DEAD = 80;

/* What is kept at the most: lanes of probabilities, and stretches of courses. */
enum { MOST_LANES = 1 << 13, MOST_STRETCHES = 1 << 16 };

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

/* Room for the stretches of a piece: for good, or until so many more pieces have come that none of
 * them is in the set that is gathered. */
static struct stretch *room_for_stretches(struct averages *v, bool stays)
{
    if (stays)
        return NEW_ARRAY(v->arena, v->n_varying, struct stretch);
    struct stretch **room = &v->passing[v->n_passing++ % (LANES + 1)];
    if (!*room)
        *room = NEW_ARRAY(v->arena, v->n_varying, struct stretch);
    return *room;
}

static struct piece make_piece(struct averages *v, size_t index, size_t window, double begin)
{
    struct window w = v->windows.at[window];
    bool stays = v->keeps && index == v->pieces.n && (index + 1) * v->n_varying <= MOST_STRETCHES;
    struct stretch *now = room_for_stretches(v, stays);
    for (size_t i = 0; i < v->n_varying; i++)
        now[i] = course_stretch(v->courses[i], begin + average_grain(w));
    struct piece p = {window, begin, average_piece_end(v->n_varying, v->courses, w, begin), now};
    if (stays)
        *array_push(v->arena, &v->pieces) = p;
    return p;
}

/* ---- the diagram in lanes ---- */

static void mix_arms(double *restrict to, const double *restrict p, const double *restrict q,
                     const double *restrict high, const double *restrict low)
{
    for (int i = 0; i < LANES; i++)
        to[i] = p[i] * high[i] + q[i] * low[i];
}

static void evaluate_lanes(struct averages *v)
{
    const struct diagram *d = v->diagram;
    for (size_t i = 0; i < d->n_nodes; i++) {
        const struct diagram_node *node = &d->nodes[i];
        mix_arms(v->work[i + 2], v->p[node->variable], v->q[node->variable], v->work[node->high],
                 v->work[node->low]);
    }
}

static void add_results(struct averages *v, void *ctx)
{
    double *to = ctx;
    const struct diagram *d = v->diagram;
    for (size_t i = 0; i < v->points.n; i++) {
        double *results = to + v->points.window[i] * d->n_roots;
        for (size_t k = 0; k < d->n_roots; k++)
            results[k] += v->points.weight[i] * v->work[d->roots[k]][i];
    }
}

/* ---- sets of points ---- */

static double positive(double x)
{
    return x > 0 ? x : 0;
}

static double greater(double x, double y)
{
    return x > y ? x : y;
}

void averages_moments(const struct averages *v, size_t i, struct moments *at)
{
    const struct gathered *points = &v->points;
    double born = v->varying[i].course->born;
    *at = (struct moments){0};
    for (size_t k = 0; k < points->n; k++) {
        const struct stretch *now = &points->now[k][i];
        at->since[k] = positive(points->t[k] - now->origin);
        at->age[k] = positive(points->t[k] - born);
        at->left[k] = !now->fresh;
        at->latest_since = greater(at->latest_since, at->since[k]);
        at->latest_age = greater(at->latest_age, at->age[k]);
    }
}

static void make_set(struct averages *v, struct kept_set *s)
{
    s->p = NEW_ARRAY(v->arena, v->n_varying, lanes);
    s->q = NEW_ARRAY(v->arena, v->n_varying, lanes);
    s->at = NEW_ARRAY(v->arena, v->n_varying, struct moments);
    s->edition = NEW_ARRAY(v->arena, v->n_varying, uint64_t);
}

static struct kept_set *set_of(struct averages *v)
{
    if (v->set < v->sets.n)
        return &v->sets.at[v->set];
    if (v->keeps && (v->set + 1) * v->n_varying <= MOST_LANES) {
        make_set(v, array_push(v->arena, &v->sets));
        return array_last(&v->sets);
    }
    v->passing_set.n = 0;
    return &v->passing_set;
}

static bool has_points(const struct kept_set *s, const struct gathered *points)
{
    size_t size = points->n * sizeof *points->t;
    return s->n == points->n && memcmp(s->t, points->t, size) == 0 &&
           memcmp(s->begin, points->begin, size) == 0;
}

/* Makes the set one of the points that are gathered: nothing in it counts any more. */
static void begin_set(struct averages *v, struct kept_set *s)
{
    s->n = v->points.n;
    memcpy(s->t, v->points.t, sizeof s->t);
    memcpy(s->begin, v->points.begin, sizeof s->begin);
    for (size_t i = 0; i < v->n_varying; i++) {
        s->edition[i] = 0;
        averages_moments(v, i, &s->at[i]);
    }
}

/* The probabilities of varying variables at the points, of which those that stay are there where
 * the set was met before. */
static void place_courses(struct averages *v)
{
    struct kept_set *s = set_of(v);
    if (!has_points(s, &v->points))
        begin_set(v, s);
    for (size_t i = 0; i < v->n_varying; i++) {
        const struct varying *one = &v->varying[i];
        v->p[one->variable] = s->p[one->same];
        v->q[one->variable] = s->q[one->same];
        if (one->same != i || s->edition[i] == one->edition)
            continue;
        s->edition[i] = one->edition;
        course_lanes(&one->versions, &s->at[i], s->p[i], s->q[i]);
    }
}

static void flush(struct averages *v)
{
    if (v->points.n == 0)
        return;
    place_courses(v);
    evaluate_lanes(v);
    v->take(v, v->ctx);
    v->points.n = 0;
    v->set++;
}

static void add_point(struct averages *v, const struct piece *p, double t, double weight)
{
    struct gathered *points = &v->points;
    size_t k = points->n++;
    points->t[k] = t;
    points->begin[k] = p->begin;
    points->weight[k] = weight;
    points->window[k] = p->window;
    points->now[k] = p->now;
    if (points->n == LANES)
        flush(v);
}

/* ---- parts of a piece ---- */

/* The sums of the exponents that are still alive at time t. */
static void exponents(const struct averages *v, const struct stretch *now, double t,
                      double sum[PACES])
{
    for (int k = 0; k < PACES; k++)
        sum[k] = 0;
    for (size_t i = 0; i < v->n_varying; i++) {
        const struct pace *pace = &v->varying[i].pace;
        bool resets = pace->slowest_reset * (t - now[i].origin) < DEAD;
        bool ages =
            pace->unreset[0] > 0 && pace->slowest_unreset * (t - v->varying[i].course->born) < DEAD;
        for (int k = 0; k < PACES; k++)
            sum[k] += (resets ? pace->reset[k] : 0) + (ages ? pace->unreset[k] : 0);
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
            add_point(v, p, at + (next - at) * rule->nodes[i].at,
                      rule->nodes[i].weight * (next - at) / (w.to - w.from));
    }
}

static void add_windows(struct averages *v)
{
    size_t index = 0;
    v->set = 0;
    for (size_t k = 0; k < v->windows.n; k++) {
        struct window w = v->windows.at[k];
        struct piece p = {k, w.from, w.from, NULL};
        if (v->n_varying == 0)
            add_point(v, &p, w.from, 1);
        for (; v->n_varying && p.end < w.to; index++) {
            p = index < v->pieces.n ? v->pieces.at[index] : make_piece(v, index, k, p.end);
            add_piece(v, &p);
        }
    }
    flush(v);
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
static bool is_sound(const struct averages *v, const struct varying *one)
{
    double longest = 0;
    for (size_t k = 0; k < v->windows.n; k++)
        longest = fmax(longest, v->windows.at[k].to - v->windows.at[k].from);
    if (one->course->first < INFINITY && !(longest / one->course->every <= MOST_RESETS))
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

static bool take_varying(struct averages *v, struct varying *one, bool changed)
{
    one->versions = versions_of(v->what, one->variable);
    if (!changed)
        return one->sound;
    one->edition++;
    one->sound = is_sound(v, one);
    if (!one->sound)
        return false;
    one->pace = average_pace(&one->versions);
    v->extremes[one->variable] = average_extreme(one->course, &one->versions, &v->windows);
    return true;
}

static bool are_equal(const struct varying *a, const struct varying *b)
{
    return a->course == b->course && a->versions.n == 1 && b->versions.n == 1 &&
           memcmp(a->versions.x, b->versions.x, sizeof *a->versions.x) == 0;
}

static void find_equals(struct averages *v)
{
    for (size_t i = 0; i < v->n_varying; i++) {
        struct varying *one = &v->varying[i];
        one->same = i;
        for (size_t k = 0; k < i && one->same == i; k++)
            if (are_equal(&v->varying[k], one))
                one->same = v->varying[k].same;
    }
}

bool averages_pass(struct averages *v, const struct averaged *what, const bool *changed,
                   void (*take)(struct averages *v, void *ctx), void *ctx)
{
    bool sound = true;
    v->what = what;
    v->take = take;
    v->ctx = ctx;
    for (size_t i = 0; i < v->diagram->n_variables; i++)
        if (v->occurs[i] && !what->course[i] && (!changed || changed[i]))
            take_still(v, i);
    for (size_t i = 0; i < v->n_varying; i++) {
        bool is_new = !changed || changed[v->varying[i].variable];
        sound = take_varying(v, &v->varying[i], is_new) && sound;
    }
    if (!sound)
        return false;
    find_equals(v);
    v->reach = average_reach(v->diagram, v->extremes, v->order);
    add_windows(v);
    return true;
}

/* ---- beginning ---- */

/* In the order of variables, those that occur. */
static void find_varying(struct averages *v, const struct averaged *what)
{
    const struct diagram *d = v->diagram;
    v->occurs = NEW_ARRAY(v->arena, d->n_variables, bool);
    v->varying = NEW_ARRAY(v->arena, d->n_variables, struct varying);
    v->courses = NEW_ARRAY(v->arena, d->n_variables, const struct course *);
    for (size_t i = 0; i < d->n_nodes; i++)
        v->occurs[d->nodes[i].variable] = true;
    for (size_t i = 0; i < d->n_variables; i++) {
        if (!v->occurs[i] || !what->course[i])
            continue;
        v->courses[v->n_varying] = what->course[i];
        v->varying[v->n_varying++] = (struct varying){.variable = i, .course = what->course[i]};
    }
}

static void make_room(struct averages *v)
{
    size_t n = v->diagram->n_variables, n_nodes = v->diagram->n_nodes + 2;
    v->extremes = NEW_ARRAY(v->arena, n, struct extreme);
    v->order = arena_array(v->arena, n_nodes, sizeof *v->order);
    v->still_p = NEW_ARRAY(v->arena, n, lanes);
    v->still_q = NEW_ARRAY(v->arena, n, lanes);
    v->p = NEW_ARRAY(v->arena, n, const double *);
    v->q = NEW_ARRAY(v->arena, n, const double *);
    v->work = NEW_ARRAY(v->arena, n_nodes, lanes);
    fill(v->work[1], 1);
    for (size_t i = 0; i < n; i++)
        v->p[i] = v->still_p[i], v->q[i] = v->still_q[i];
    make_set(v, &v->passing_set);
}

static struct averages *begin(struct arena *a, const struct averaged *what, bool keeps)
{
    struct averages *v = NEW(a, struct averages);
    v->arena = a;
    v->diagram = what->diagram;
    v->windows = what->windows;
    v->keeps = keeps;
    find_varying(v, what);
    make_room(v);
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
