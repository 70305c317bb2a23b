/* SPDX-License-Identifier: GPL-3.0-or-later */
/* DIAGRAMs over windows in a tape: lane by lane, each with what has changed since the lane before.
 * The work space owns an `averages` for each such step, which is warmed up at the values that the
 * evaluation had when the tape was made.
 *
 * A step reads, of each variable of the diagram, the arguments of its COURSE, or p and q. */
#include "eval/tape_parts.h"

#include <string.h>

/* What a step is about; the graph's, or the tape's. */
struct tape_averaged {
    const struct diagram *diagram;
    struct windows windows;
    const struct course **course;
    const double *at; /* the arguments' values when the tape was made */
};

struct tape_average {
    struct averages *averages;
    struct averaged what;
    double *p, *q, *results;
    struct course_values *x;
    bool *changed;
};

/* ---- making ---- */

static void read_at(struct tape_maker *m, struct tape_step *s, double *at, node_id n)
{
    at[s->args.n] = m->v->value.at[n];
    *array_push(m->tape->arena, &s->args) = tape_operand(m, n);
}

static void read_still(struct tape_maker *m, struct tape_step *s, double *at, node_id n)
{
    read_at(m, s, at, n);
    if (graph_at(m->v->g, n)->op == OP_COMPLEMENT && !tape_is_given(m, n)) {
        read_at(m, s, at, *graph_args(m->v->g, n));
        return;
    }
    at[s->args.n] = 1 - m->v->value.at[n];
    *array_push(m->tape->arena, &s->args) = TAPE_NONE;
}

void tape_average_begin(struct tape_maker *m, struct tape_step *s, node_id n)
{
    struct arena *a = m->tape->arena;
    const struct diagram *d = graph_diagram_of(m->v->g, n);
    const node_id *args = graph_args(m->v->g, n);
    struct tape_averaged *t = NEW(a, struct tape_averaged);
    double *at = NEW_ARRAY(a, d->n_variables * (size_t)COURSE_ARGS, double);
    *t = (struct tape_averaged){d, graph_windows_of(m->v->g, n),
                                NEW_ARRAY(a, d->n_variables, const struct course *), at};
    for (uint32_t i = 0; i < d->n_variables; i++) {
        if (graph_at(m->v->g, args[i])->op != OP_COURSE) {
            read_still(m, s, at, args[i]);
            continue;
        }
        t->course[i] = graph_course_of(m->v->g, args[i]);
        for (int k = 0; k < COURSE_ARGS; k++)
            read_at(m, s, at, graph_args(m->v->g, args[i])[k]);
    }
    s->run = tape_average_run;
    s->more = t;
}

/* ---- lanes ---- */

/* Takes the arguments of one lane, and marks the variables whose values are other ones. */
static void take_arguments(const struct tape_averaged *t, struct tape_average *v, const double *at)
{
    for (size_t i = 0; i < v->what.n; i++) {
        if (t->course[i]) {
            v->changed[i] = memcmp(v->x[i].x, at, sizeof v->x[i].x) != 0;
            memcpy(v->x[i].x, at, sizeof v->x[i].x);
            at += COURSE_ARGS;
            continue;
        }
        v->changed[i] =
            memcmp(&v->p[i], at, sizeof *at) != 0 || memcmp(&v->q[i], at + 1, sizeof *at) != 0;
        v->p[i] = at[0];
        v->q[i] = at[1];
        at += 2;
    }
}

struct tape_average *tape_average_new(struct arena *a, const struct tape_step *s, enum isa isa)
{
    const struct tape_averaged *t = s->more;
    size_t n = t->diagram->n_variables;
    struct tape_average *v = NEW(a, struct tape_average);
    v->p = NEW_ARRAY(a, n, double);
    v->q = NEW_ARRAY(a, n, double);
    v->x = NEW_ARRAY(a, n, struct course_values);
    v->changed = NEW_ARRAY(a, n, bool);
    v->results = NEW_ARRAY(a, t->windows.n * t->diagram->n_roots, double);
    v->what = (struct averaged){.diagram = t->diagram,
                                .n = n,
                                .p = v->p,
                                .q = v->q,
                                .course = t->course,
                                .x = (const double(*)[COURSE_ARGS])v->x,
                                .windows = t->windows,
                                .isa = isa};
    take_arguments(t, v, t->at);
    v->averages = averages_new(a, &v->what);
    averages_take(v->averages, &v->what, NULL, v->results);
    return v;
}

static void read_lane(const struct tape_step *s, const struct tape_work *w, size_t lane, double *at)
{
    for (size_t i = 0; i < s->args.n; i++)
        at[i] = s->args.at[i] == TAPE_NONE ? 1 - at[i - 1] : tape_read(s, w, i, lane);
}

void tape_average_run(const struct tape_call *c, struct tape_work *w, size_t n)
{
    const struct tape_step *s = c->more;
    const struct tape_averaged *t = s->more;
    struct tape_average *v = w->averages[s->room];
    (void)n;
    for (size_t lane = 0; lane < w->count; lane++) {
        read_lane(s, w, lane, w->x);
        take_arguments(t, v, w->x);
        averages_take(v->averages, &v->what, v->changed, v->results);
        for (size_t k = 0; k < s->to.n; k++)
            w->row[s->to.at[k]][lane] = v->results[s->picks.at[k]];
    }
}
