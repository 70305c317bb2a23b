/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Slopes of averages (average.h): downwards through the diagram, set by set of points. Owns a child
 * arena for the time of one call. */
#include "graph/average_parts.h"

#include <assert.h>
#include <string.h>

struct slopes {
    const double *weight; /* of results */
    struct average_slopes *out;
    lanes *back; /* by node */
    lanes *dp;   /* by variable */
};

static void set_back(const struct averages *v, struct slopes *s)
{
    const struct diagram *d = v->diagram;
    memset(s->back, 0, (d->n_nodes + 2) * sizeof *s->back);
    memset(s->dp, 0, d->n_variables * sizeof *s->dp);
    size_t i = 0;
    for (const struct run *run = v->points.runs; i < v->points.n; run++)
        for (; i < run->end; i++)
            for (size_t k = 0; k < d->n_roots; k++)
                s->back[d->roots[k]][i] +=
                    v->points.weight[i] * s->weight[run->window * d->n_roots + k];
}

static void back_lanes(const struct averages *v, struct slopes *s)
{
    const struct diagram *d = v->diagram;
    for (size_t i = d->n_nodes; i-- > 0;) {
        const struct diagram_node *node = &d->nodes[i];
        const double *p = v->p[node->variable], *q = v->q[node->variable];
        const double *high = v->work[node->high], *low = v->work[node->low];
        const double *w = s->back[i + 2];
        double *dp = s->dp[node->variable];
        double *back_high = s->back[node->high], *back_low = s->back[node->low];
        for (size_t k = 0; k < v->points.n; k++) {
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

static void add_course_slopes(const struct averages *v, const struct slopes *s, size_t i)
{
    const struct moving *one = &v->varying[i];
    const double *x = one->versions.x[0], *dp = s->dp[one->variable];
    double *by = s->out->by[one->variable], slope[COURSE_ARGS];
    const struct moments *at = &v->timings[one->timing].at;
    for (size_t k = 0; k < v->points.n; k++) {
        double change = course_change_slopes(x, at->left[k] == 0, at->since[k], at->age[k], slope);
        by[COURSE_STANDING] += dp[k] * (1 - change);
        for (int a = COURSE_RATE; a < COURSE_ARGS; a++)
            by[a] += (1 - x[COURSE_STANDING]) * dp[k] * slope[a];
    }
}

static void add_slopes(struct averages *v, void *ctx)
{
    struct slopes *s = ctx;
    set_back(v, s);
    back_lanes(v, s);
    for (size_t i = 0; i < v->diagram->n_variables; i++) {
        for (size_t k = 0; k < v->points.n && s->out->gain; k++)
            s->out->gain[i] += s->dp[i][k];
        if (s->out->share)
            s->out->share[i] += dot(v->points.n, s->dp[i], v->p[i]);
    }
    for (size_t i = 0; i < v->n_varying && s->out->by; i++)
        add_course_slopes(v, s, i);
}

void average_slopes(struct arena *a, const struct averaged *what, const double *weight,
                    struct average_slopes *out)
{
    struct arena *scratch = arena_child(a);
    struct slopes s = {.weight = weight, .out = out};
    s.back = NEW_ARRAY(scratch, what->diagram->n_nodes + 2, lanes);
    s.dp = NEW_ARRAY(scratch, what->diagram->n_variables, lanes);
    assert(!what->mixture);
    bool sound = averages_pass(averages_once(scratch, what), what, NULL, add_slopes, &s);
    assert(sound);
    (void)sound;
    arena_free(scratch);
}
