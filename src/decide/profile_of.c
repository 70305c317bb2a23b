/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Distributions over the ways of a tree, from the ends to the beginning. */
#include "decide/profile_of.h"

struct profiling {
    struct arena *arena;
    const struct branching *b;
    struct profile *at; /* by point; n = 0: not yet */
};

static struct profile behind(struct profiling *x, size_t point);

static struct profile along(struct profiling *x, const struct way *way)
{
    struct profile then = behind(x, way->to);
    return profile_shift(x->arena, &then, -way->amount);
}

/* One of the branches of a point that chance or a reading takes. */
static struct profile mixed(struct profiling *x, const struct point *p)
{
    struct profile *parts = NEW_ARRAY(x->arena, p->n, struct profile);
    double *weight = NEW_ARRAY(x->arena, p->n, double);
    for (size_t k = 0; k < p->n; k++) {
        parts[k] = along(x, &p->branches[k]);
        weight[k] = p->branches[k].probability;
    }
    return profile_mix(x->arena, p->n, parts, weight, PROFILE_WAYS);
}

static struct profile behind(struct profiling *x, size_t point)
{
    const struct point *p = &x->b->points.at[point];
    if (x->at[point].n)
        return x->at[point];
    struct profile made = p->kind == POINT_END      ? profile_point(x->arena, 0)
                          : p->kind == POINT_CHOOSE ? along(x, &p->branches[p->best])
                                                    : mixed(x, p);
    x->at[point] = made;
    return made;
}

static const struct way *labelled(const struct point *p, const char *label)
{
    for (size_t k = 0; k < p->n; k++)
        if (text_equal(p->branches[k].label, label))
            return &p->branches[k];
    return NULL;
}

/* Begun with this branch, at the first choice or behind what is seen there. */
static struct profile begun_with(struct profiling *x, const char *label)
{
    const struct point *p = &x->b->points.at[0];
    if (p->kind != POINT_SEE)
        return along(x, labelled(p, label));
    struct profile *parts = NEW_ARRAY(x->arena, p->n, struct profile);
    double *weight = NEW_ARRAY(x->arena, p->n, double);
    for (size_t k = 0; k < p->n; k++) {
        parts[k] = along(x, labelled(&x->b->points.at[p->branches[k].to], label));
        parts[k] = profile_shift(x->arena, &parts[k], -p->branches[k].amount);
        weight[k] = p->branches[k].probability;
    }
    return profile_mix(x->arena, p->n, parts, weight, PROFILE_WAYS);
}

struct profile *branching_profiles(struct arena *a, const struct branching *b)
{
    const struct weighing *w = b->weighing;
    struct profiling x = {a, b, NEW_ARRAY(a, b->points.n, struct profile)};
    struct profile *all = NEW_ARRAY(a, w->alternatives.n, struct profile);
    all[0] = profile_point(a, 0 - b->nothing->amount);
    for (size_t i = 1; i < w->alternatives.n; i++) {
        const struct alternative *alt = &w->alternatives.at[i];
        bool policy = b->repeats && text_equal(alt->name, POLICY);
        all[i] = policy ? behind(&x, 0) : begun_with(&x, alt->options[0]);
    }
    return all;
}
