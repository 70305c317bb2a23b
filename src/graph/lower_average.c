/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Lowering of courses and of averages over time (lower.c): the points of quadrature as scalar
 * operations. How many there are must not depend on the values of inputs, so each piece between
 * resets has two halves with the largest rule each: good for the same 1e-12 while the sum of the
 * exponents over a piece stays below some 28, and for smooth errors beyond.
 *
 * A course is written with exponentials as it is defined, and therefore loses digits of
 * probabilities as small as 1e-8. */
#include "graph/average.h"
#include "graph/legendre.h"
#include "graph/ops.h"

#include <math.h>

static node_id times(struct lowering *l, node_id x, node_id y)
{
    return graph_op2(l->to, OP_MULTIPLY, x, y);
}

/* u at time x where du/dx = rate (1 - u) - ending u:
 * start exp(-s x) + rate (1 - exp(-s x)) / s, where nothing over nothing is nothing. */
static node_id rising(struct lowering *l, node_id start, node_id rate, node_id ending, double x)
{
    struct dim time = dim_divide((struct dim){{0}}, graph_dim(l->to, rate));
    node_id s = graph_op2(l->to, OP_ADD, rate, ending);
    node_id y = times(l, s, graph_const(l->to, -x, time));
    node_id decay = graph_op1(l->to, OP_EXP, y);
    node_id grown = times(l, rate, lowered_complement(l, decay));
    return graph_op2(l->to, OP_ADD, times(l, start, decay), graph_op2(l->to, OP_RATIO, grown, s));
}

/* p at time t, of which `s` is the stretch. */
static node_id course_then(struct lowering *l, const struct course *c, struct stretch s,
                           const node_id *x, double t)
{
    node_id nothing = lowered_number(l, 0), start = s.fresh ? nothing : x[COURSE_LEFT];
    node_id h = rising(l, start, x[COURSE_RATE], x[COURSE_ENDING], fmax(t - s.origin, 0));
    node_id m = rising(l, nothing, x[COURSE_UNRESET], x[COURSE_ENDING], fmax(t - c->born, 0));
    return lowered_either(l, lowered_either(l, x[COURSE_STANDING], h), m);
}

node_id lower_course(struct lowering *l, node_id n)
{
    const struct course *c = graph_course_of(l->from, n);
    return course_then(l, c, course_stretch(c, 0), lowered_args(l, n), 0);
}

/* What is integrated: one DIAGRAM. */
struct integrand {
    struct lowering *l;
    node_id n;
    node_id *p, *q, *roots;
    const struct course **courses; /* of variables that change */
    size_t *variables;             /* which these are */
    size_t n_varying;
    struct window window;
    node_id *sums;
};

static node_id *course_args(struct integrand *f, size_t i)
{
    const node_id *args = graph_args(f->l->from, f->n);
    return lowered_args(f->l, args[f->variables[i]]);
}

static void add_point(struct integrand *f, double origin, double t, double weight)
{
    struct lowering *l = f->l;
    const struct diagram *d = graph_diagram_of(l->from, f->n);
    for (size_t i = 0; i < f->n_varying; i++) {
        struct stretch s = course_stretch(f->courses[i], origin);
        node_id p = course_then(l, f->courses[i], s, course_args(f, i), t);
        f->p[f->variables[i]] = p;
        f->q[f->variables[i]] = lowered_complement(l, p);
    }
    lowered_roots(l, d, f->p, f->q, f->roots);
    node_id w = lowered_number(l, weight);
    for (size_t k = 0; k < d->n_roots; k++)
        f->sums[k] = graph_op2(l->to, OP_ADD, f->sums[k], times(l, w, f->roots[k]));
}

static void add_piece(struct integrand *f, double at, double end)
{
    const struct legendre_rule *rule = &legendre_rules[LEGENDRE_RULES - 1];
    double length = (end - at) / 2, whole = f->window.to - f->window.from;
    for (int half = 0; half < 2; half++)
        for (size_t i = 0; i < rule->n; i++)
            add_point(f, at + average_grain(f->window), at + length * (half + rule->nodes[i].at),
                      rule->nodes[i].weight * length / whole);
}

static void add_window(struct integrand *f, struct window w)
{
    f->window = w;
    for (double at = w.from, end; at < w.to; at = end) {
        end = average_piece_end(f->n_varying, f->courses, w, at);
        add_piece(f, at, end);
    }
}

static void find_varying(struct integrand *f)
{
    const struct graph *g = f->l->from;
    const struct diagram *d = graph_diagram_of(g, f->n);
    const node_id *args = graph_args(g, f->n);
    bool *occurs = NEW_ARRAY(f->l->scratch, d->n_variables, bool);
    for (size_t i = 0; i < d->n_nodes; i++)
        occurs[d->nodes[i].variable] = true;
    for (size_t i = 0; i < d->n_variables; i++)
        if (occurs[i] && graph_at(g, args[i])->op == OP_COURSE) {
            f->courses[f->n_varying] = graph_course_of(g, args[i]);
            f->variables[f->n_varying++] = i;
        }
}

node_id lowered_average(struct lowering *l, node_id n, const node_id *p, const node_id *q)
{
    const struct diagram *d = graph_diagram_of(l->from, n);
    struct windows w = graph_windows_of(l->from, n);
    size_t count = graph_at(l->from, n)->n;
    struct integrand f = {.l = l, .n = n};
    f.p = arena_copy(l->scratch, p, count * sizeof *p);
    f.q = arena_copy(l->scratch, q, count * sizeof *q);
    f.roots = NEW_ARRAY(l->scratch, d->n_roots, node_id);
    f.courses = NEW_ARRAY(l->scratch, count, const struct course *);
    f.variables = NEW_ARRAY(l->scratch, count, size_t);
    find_varying(&f);
    node_id place = (node_id)l->picks.n;
    array_reserve(l->scratch, &l->picks, w.n * d->n_roots);
    l->picks.n += w.n * d->n_roots;
    for (size_t k = 0; k < w.n; k++) {
        f.sums = l->picks.at + place + k * d->n_roots;
        for (size_t r = 0; r < d->n_roots; r++)
            f.sums[r] = lowered_number(l, 0);
        add_window(&f, w.at[k]);
    }
    return place;
}
