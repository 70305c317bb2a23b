/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Following an alternative forward, as numbers. Owns nothing. */
#include "decide/branching_spells.h"

#include <math.h>

struct spelling {
    struct arena *arena;
    const struct branching *b;
    struct spell_paths *out;
    bool too_many; /* paths */
    size_t years;
};

static size_t hidden_in(const struct spelling *s)
{
    return s->b->worlds.hidden.n;
}

/* --- time spent --- */

static double *share_of(struct spelling *s, struct spell_path *p, const struct world *w,
                        size_t hidden)
{
    for (size_t i = 0; i < p->spells.n; i++)
        if (p->spells.at[i].world == w && p->spells.at[i].hidden == hidden)
            return p->spells.at[i].share;
    struct spell *x = array_push(s->arena, &p->spells);
    *x = (struct spell){w, hidden, NEW_ARRAY(s->arena, s->years, double)};
    return x->share;
}

static void spend(struct spelling *s, struct spell_path *p, const struct move *m, size_t hidden,
                  double weight)
{
    double *share = share_of(s, p, m->world, hidden);
    for (size_t y = (size_t)floor(m->at); y < s->years && (double)y < m->to; y++)
        share[y] += weight * (fmin((double)y + 1, m->to) - fmax((double)y, m->at));
}

/* Time that passes by weights of hidden states, which move on. */
static void pass(struct spelling *s, struct spell_path *p, const struct move *m, double *weight)
{
    size_t n = hidden_in(s);
    const struct passage *x =
        m->world->flows.n ? world_passage_known(m->world, m->to - m->at) : NULL;
    double *after = NEW_ARRAY(s->arena, n, double), *spent = NEW_ARRAY(s->arena, n, double);
    for (size_t i = 0; i < n; i++)
        for (size_t k = 0; k < n; k++) {
            spent[k] += weight[i] * (x ? x->spent[i * n + k] : (double)(i == k));
            after[k] += weight[i] * (x ? x->p[i * n + k] : (double)(i == k));
        }
    for (size_t k = 0; k < n; k++) {
        if (spent[k] > 0)
            spend(s, p, m, k, spent[k]);
        weight[k] = after[k];
    }
}

static void reset(struct spelling *s, const struct move *m, double *weight)
{
    size_t n = hidden_in(s);
    double *after = NEW_ARRAY(s->arena, n, double);
    for (size_t k = 0; k < n; k++)
        after[m->map[k]] += weight[k];
    for (size_t k = 0; k < n; k++)
        weight[k] = after[k];
}

static void go_along(struct spelling *s, struct spell_path *p, const struct way *x, double *weight)
{
    for (size_t i = 0; i < x->moves.n; i++) {
        if (x->moves.at[i].kind == MOVE_TIME)
            pass(s, p, &x->moves.at[i], weight);
        if (x->moves.at[i].kind == MOVE_RESET)
            reset(s, &x->moves.at[i], weight);
    }
}

/* What comes to a branch of what is at its point. */
static double *into(struct spelling *s, const struct point *p, const struct way *x,
                    const double *weight)
{
    double *w = NEW_ARRAY(s->arena, hidden_in(s), double);
    for (size_t k = 0; k < hidden_in(s); k++)
        w[k] = weight[k] * (x->likelihood             ? x->likelihood[k]
                            : p->kind == POINT_CHANCE ? x->probability
                                                      : 1);
    return w;
}

/* --- path by path, in one hidden state --- */

static void copy_path(struct spelling *s, const struct spell_path *from, struct spell_path *to)
{
    *to = (struct spell_path){.probability = from->probability};
    for (size_t i = 0; i < from->spells.n; i++) {
        struct spell x = from->spells.at[i];
        x.share = arena_copy(s->arena, x.share, s->years * sizeof *x.share);
        *array_push(s->arena, &to->spells) = x;
    }
}

static void take(struct spelling *s, const struct way *x, struct spell_path path, double *weight);

static void go_on(struct spelling *s, size_t at, const struct spell_path *path, double *weight)
{
    const struct point *p = &s->b->points.at[at];
    if (p->kind == POINT_END) {
        if (s->out->n == SPELL_PATHS)
            s->too_many = true;
        else
            *array_push(s->arena, s->out) = *path;
        return;
    }
    for (size_t k = 0; k < p->n && !s->too_many; k++) {
        struct spell_path copy;
        double probability = 0, *w = into(s, p, &p->branches[k], weight);
        if (p->kind == POINT_CHOOSE && k != p->best)
            continue;
        for (size_t h = 0; h < hidden_in(s); h++)
            probability += w[h];
        if (!(probability > 0))
            continue;
        for (size_t h = 0; h < hidden_in(s); h++)
            w[h] /= probability;
        copy_path(s, path, &copy);
        copy.probability *= probability;
        take(s, &p->branches[k], copy, w);
    }
}

static void take(struct spelling *s, const struct way *x, struct spell_path path, double *weight)
{
    go_along(s, &path, x, weight);
    go_on(s, x->to, &path, weight);
}

/* --- all at once --- */

static void all_at_once(struct spelling *s, double *const *at, struct spell_path *path)
{
    const struct branching *b = s->b;
    for (size_t i = b->points.n; i > 0; i--) {
        size_t point = b->order[i - 1];
        const struct point *p = &b->points.at[point];
        for (size_t k = 0; k < p->n; k++) {
            double sum = 0, *w = into(s, p, &p->branches[k], at[point]);
            if (p->kind == POINT_CHOOSE && k != p->best)
                continue;
            for (size_t h = 0; h < hidden_in(s); h++)
                sum += w[h];
            if (!(sum > 0))
                continue;
            go_along(s, path, &p->branches[k], w);
            for (size_t h = 0; h < hidden_in(s); h++)
                at[p->branches[k].to][h] += w[h];
        }
    }
}

/* --- where an alternative begins --- */

static const struct way *labelled(const struct point *p, const char *label)
{
    for (size_t k = 0; k < p->n; k++)
        if (text_equal(p->branches[k].label, label))
            return &p->branches[k];
    return NULL;
}

/* The branch by which it begins in a hidden state; NULL: at the root, by the policy. */
static const struct way *beginning(const struct branching *b, size_t alternative, size_t hidden)
{
    const struct point *p = &b->points.at[0];
    const char *label;
    if (alternative == 0)
        return b->nothing;
    label = b->weighing->alternatives.at[alternative].options[0];
    if (b->repeats && text_equal(label, POLICY))
        return NULL;
    for (size_t k = 0; p->kind == POINT_SEE && k < p->n; k++)
        if (p->branches[k].likelihood[hidden] > 0)
            return labelled(&b->points.at[p->branches[k].to], label);
    return labelled(p, label);
}

static bool evolves(const struct branching *b)
{
    for (size_t i = 0; i < b->worlds.by_variant.n; i++)
        if (((const struct world *)b->worlds.by_variant.at[i].value)->flows.n)
            return true;
    return false;
}

static void by_paths(struct spelling *s, size_t alternative)
{
    const struct hidden *h = &s->b->worlds.hidden;
    for (size_t k = 0; k < h->n && !s->too_many; k++) {
        struct spell_path path = {.probability = h->start[k]};
        const struct way *x = beginning(s->b, alternative, k);
        double *weight = NEW_ARRAY(s->arena, h->n, double);
        weight[k] = 1;
        if (!(h->start[k] > 0))
            continue;
        if (x)
            take(s, x, path, weight);
        else
            go_on(s, 0, &path, weight);
    }
}

static void on_average(struct spelling *s, size_t alternative)
{
    const struct hidden *h = &s->b->worlds.hidden;
    struct spell_path *path = array_push(s->arena, s->out);
    double **at = NEW_ARRAY(s->arena, s->b->points.n, double *);
    *path = (struct spell_path){.probability = 1};
    for (size_t i = 0; i < s->b->points.n; i++)
        at[i] = NEW_ARRAY(s->arena, h->n, double);
    for (size_t k = 0; k < h->n; k++) {
        const struct way *x = beginning(s->b, alternative, k);
        double *weight = NEW_ARRAY(s->arena, h->n, double);
        weight[k] = h->start[k];
        if (x)
            go_along(s, path, x, weight);
        for (size_t i = 0; i < h->n; i++)
            at[x ? x->to : 0][i] += weight[i];
    }
    all_at_once(s, at, path);
}

void branching_spells(struct arena *a, const struct branching *b, size_t alternative,
                      struct spell_paths *out)
{
    struct spelling s = {a, b, out, evolves(b), (size_t)ceil(b->weighing->horizon)};
    *out = (struct spell_paths){0};
    if (!s.too_many)
        by_paths(&s, alternative);
    if (!s.too_many)
        return;
    out->n = 0;
    on_average(&s, alternative);
}
