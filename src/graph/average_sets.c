/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sets of points of time (average.h): points are gathered in lanes, and courses and diagram are
 * worked through for all lanes of a full set at a time.
 *
 * Where there will be a next time, the first sets are kept. A set counts again when its points are
 * the same, and then only what has changed is computed anew. Which sets are kept is settled by the
 * first pass. Owns them in the arena of the averages. */
#include "graph/average_parts.h"

#include <string.h>

/* Lanes of probabilities that are kept at the most. */
enum { MOST_LANES = 1 << 10, MOST_SETS = 1 << 6 };

lanes *averages_lanes(struct arena *a, size_t n)
{
    char *at = arena_alloc(a, n * sizeof(lanes) + LANES_ALIGNED);
    return (lanes *)(void *)(at + (-(uintptr_t)at & (LANES_ALIGNED - 1)));
}

static void make_set(const struct averages *v, struct kept_set *s)
{
    s->p = averages_lanes(v->arena, v->n_varying);
    s->q = averages_lanes(v->arena, v->n_varying);
    s->edition = NEW_ARRAY(v->arena, v->n_varying, uint64_t);
}

void averages_make_sets(struct averages *v)
{
    make_set(v, &v->passing_set);
    if (!v->keeps || v->n_varying == 0)
        return;
    v->most_sets = MOST_LANES / 2 / v->n_varying;
    v->most_sets = v->most_sets < MOST_SETS ? v->most_sets : MOST_SETS;
    v->sets = NEW_ARRAY(v->arena, v->most_sets, struct kept_set);
}

static struct kept_set *set_of(struct averages *v)
{
    if (v->set < v->n_sets)
        return &v->sets[v->set];
    if (!v->begun && v->n_sets < v->most_sets) {
        make_set(v, &v->sets[v->n_sets]);
        return &v->sets[v->n_sets++];
    }
    v->passing_set.n = 0;
    return &v->passing_set;
}

static bool has_points(const struct kept_set *s, const struct gathered *points)
{
    return s->n == points->n && memcmp(s->t, points->t, sizeof s->t) == 0 &&
           memcmp(s->piece, points->piece, points->n * sizeof *s->piece) == 0;
}

/* Makes the set one of the points that are gathered: nothing in it counts any more. */
static void begin_set(const struct averages *v, struct kept_set *s)
{
    s->n = v->points.n;
    memcpy(s->t, v->points.t, sizeof s->t);
    memcpy(s->piece, v->points.piece, sizeof s->piece);
    for (size_t i = 0; i < v->n_varying; i++)
        s->edition[i] = 0;
}

static void place_timings(struct averages *v)
{
    for (size_t i = 0; i < v->n_timings; i++) {
        struct timing *one = &v->timings[i];
        v->kernels->moments(v->points.t, v->points.runs, i, one->course->born, one->course->fresh,
                            &one->at);
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
        const struct moving *one = &v->varying[i];
        v->p[one->variable] = s->p[one->same];
        v->q[one->variable] = s->q[one->same];
        if (one->same != i || s->edition[i] == one->edition)
            continue;
        s->edition[i] = one->edition;
        v->kernels->course(&one->versions, &v->timings[one->timing].at, s->p[i], s->q[i]);
    }
}

/* Lanes that are not in use become copies of the last point. */
static void fill_lanes(struct gathered *points)
{
    for (size_t k = points->n; k < LANES; k++)
        points->t[k] = points->t[points->n - 1];
    points->runs[points->n_runs - 1].end = LANES;
}

void averages_flush(struct averages *v)
{
    struct gathered *points = &v->points;
    if (points->n == 0)
        return;
    if (v->n_varying) {
        fill_lanes(points);
        place_timings(v);
        place_courses(v);
        points->runs[points->n_runs - 1].end = points->n;
    }
    v->kernels->rows(v->n_rows - v->n_still_rows, v->rows + v->n_still_rows, v->p, v->q, v->work);
    v->take(v, v->ctx);
    points->n = points->n_runs = 0;
    v->set++;
}

void averages_add_point(struct averages *v, const struct piece *p, double t, double weight)
{
    struct gathered *points = &v->points;
    size_t k = points->n++;
    points->t[k] = t;
    points->weight[k] = weight;
    points->piece[k] = p->index;
    if (k == 0 || points->piece[k - 1] != p->index)
        points->runs[points->n_runs++] = (struct run){k, p->window, p->now};
    points->runs[points->n_runs - 1].end = k + 1;
    if (points->n == LANES)
        averages_flush(v);
}
