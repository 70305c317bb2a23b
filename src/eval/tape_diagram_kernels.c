/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A DIAGRAM in tiles of lanes (tape_kernels.h): compiled once for each instruction set. The rows of
 * all its nodes for one tile stay in the cache, or nearly; only what is picked is copied out of it.
 * Rounds as diagram_evaluate does. Owns nothing. */
#include "eval/tape_kernels.h"

#include "eval/tape_vector.h"

#include <string.h>

struct tiles {
    const struct tape_step *s;
    const struct diagram *d;
    struct tape_work *w;
    size_t length;         /* lanes of a tile */
    const double **p, **q; /* rows of the tile, of each variable */
    double *node, *own;    /* rows of nodes; of constants and of 1 - p */
};

static void fill(double *row, size_t n, double x)
{
    for (size_t i = 0; i < n; i += WIDTH)
        store(row + i, all(x));
}

/* Where argument k stands: a row of lanes, or one that is filled once for all tiles. */
static const double *row_of(struct tiles *t, size_t k)
{
    uint32_t at = t->s->args.at[k];
    if (at == TAPE_NONE)
        return NULL;
    if (at < t->s->first_constant)
        return t->w->row[at];
    double *own = t->own + k * t->length;
    fill(own, t->length, t->w->constant[at - t->s->first_constant]);
    return own;
}

static void find_rows(struct tiles *t)
{
    size_t n = t->d->n_variables;
    for (size_t k = 0; k < n; k++) {
        t->p[k] = row_of(t, k);
        t->q[k] = row_of(t, n + k);
    }
    fill(t->node, t->length, 0);
    fill(t->node + t->length, t->length, 1);
}

/* 1 - p of what was not made as a complement, and the other rows where the tile begins. */
static void begin_tile(struct tiles *t, size_t begin, const double **p, const double **q)
{
    size_t n = t->d->n_variables;
    for (size_t k = 0; k < n; k++) {
        bool stands = t->s->args.at[k] >= t->s->first_constant;
        p[k] = t->p[k] + (stands ? 0 : begin);
        uint32_t at = t->s->args.at[n + k];
        if (at != TAPE_NONE) {
            q[k] = t->q[k] + (at >= t->s->first_constant ? 0 : begin);
            continue;
        }
        double *own = t->own + (n + k) * t->length;
        for (size_t i = 0; i < t->length; i += WIDTH)
            store(own + i, 1 - load(p[k] + i));
        q[k] = own;
    }
}

static void mix_arms(size_t length, double *to, const double *p, const double *q,
                     const double *high, const double *low)
{
    for (size_t i = 0; i < length; i += 4 * WIDTH)
        for (size_t k = i; k < i + 4 * WIDTH; k += WIDTH)
            store(to + k, load(p + k) * load(high + k) + load(q + k) * load(low + k));
}

static void mix_nodes(const struct tiles *t, const double *const *p, const double *const *q)
{
    size_t length = t->length;
    for (size_t i = 0; i < t->d->n_nodes; i++) {
        struct diagram_node node = t->d->nodes[i];
        mix_arms(length, t->node + (i + 2) * length, p[node.variable], q[node.variable],
                 t->node + node.high * length, t->node + node.low * length);
    }
}

void ISA_NAME(tape_diagram)(const struct tape_call *c, struct tape_work *w, size_t n)
{
    const struct tape_step *s = c->more;
    const struct diagram *d = s->more;
    struct tiles t = {.s = s, .d = d, .w = w, .length = tape_tile(d)};
    const double **p = w->at, **q = p + d->n_variables;
    t.p = q + d->n_variables;
    t.q = t.p + d->n_variables;
    t.node = w->room;
    t.own = t.node + (d->n_nodes + 2) * t.length;
    find_rows(&t);
    for (size_t begin = 0; begin < n; begin += t.length) {
        begin_tile(&t, begin, p, q);
        mix_nodes(&t, p, q);
        for (size_t k = 0; k < s->to.n; k++)
            memcpy(w->row[s->to.at[k]] + begin, t.node + d->roots[s->picks.at[k]] * t.length,
                   t.length * sizeof(double));
    }
}
