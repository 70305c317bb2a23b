/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The readable kernels of a tape: one lane after the other by the point rules themselves, for any
 * operation. What has a kernel of its own is tested against these. Owns nothing. */
#include "eval/tape_parts.h"

void tape_by_point(const struct tape_call *c, struct tape_work *w, size_t n)
{
    const struct tape_step *s = c->more;
    double *to = w->row[s->to.at[0]];
    (void)n;
    for (size_t lane = 0; lane < w->count; lane++) {
        for (size_t i = 0; i < s->args.n; i++)
            w->x[i] = tape_read(s, w, i, lane);
        to[lane] = graph_node_point(w->tape->g, s->node, w->x);
    }
}

static void gather(const struct tape_step *s, const struct tape_work *w, size_t lane, size_t n,
                   double *p, double *q)
{
    for (size_t i = 0; i < n; i++) {
        p[i] = tape_read(s, w, i, lane);
        q[i] = s->args.at[n + i] == TAPE_NONE ? 1 - p[i] : tape_read(s, w, n + i, lane);
    }
}

void tape_diagram_by_point(const struct tape_call *c, struct tape_work *w, size_t n)
{
    const struct tape_step *s = c->more;
    const struct diagram *d = graph_diagram_of(w->tape->g, s->node);
    double *p = w->x, *q = p + d->n_variables, *work = w->room;
    double *results = work + d->n_nodes + 2;
    (void)n;
    for (size_t lane = 0; lane < w->count; lane++) {
        gather(s, w, lane, d->n_variables, p, q);
        diagram_evaluate(d, p, q, work, results);
        for (size_t k = 0; k < s->to.n; k++)
            w->row[s->to.at[k]][lane] = results[s->picks.at[k]];
    }
}
