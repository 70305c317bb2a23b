/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which sets of options are alternatives. */
#include "decide/alternatives.h"

#include <string.h>

static const struct option *option_at(const struct figures *f, const struct names *options,
                                      size_t i)
{
    return model_get(f->base, KIND_OPTION, options->at[i]);
}

static bool contains(const struct names *names, const char *name)
{
    for (size_t i = 0; i < names->n; i++)
        if (text_equal(names->at[i], name))
            return true;
    return false;
}

static size_t index_in(const struct names *options, const char *name)
{
    size_t i = 0;
    while (i < options->n && !text_equal(options->at[i], name))
        i++;
    return i;
}

const char *alternative_name(struct arena *a, size_t n, const char *const *options)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < n; i++)
        text_printf(&t, "%s%s", i ? "+" : "", options[i]);
    return n ? text_str(&t) : DO_NOTHING;
}

/* What keeps two options apart, worked out once for each pair. */
struct pairs {
    size_t n;
    const char **why; /* n * n; NULL: they go together */
};

static const char *why_not_both(struct figures *f, const struct names *options, size_t i, size_t k)
{
    const struct option *p = option_at(f, options, i), *q = option_at(f, options, k);
    if (contains(&p->excludes, options->at[k]) || contains(&q->excludes, options->at[i]))
        return arena_printf(f->arena, "%s and %s exclude each other", options->at[k],
                            options->at[i]);
    const char *path = model_contradiction(f->arena, f->base, options->at[k], options->at[i]);
    return path ? arena_printf(f->arena, "%s and %s contradict each other at %s", options->at[k],
                               options->at[i], path)
                : NULL;
}

static struct pairs work_out_pairs(struct figures *f, const struct names *options)
{
    struct pairs p = {options->n, NEW_ARRAY(f->arena, options->n * options->n, const char *)};
    for (size_t i = 0; i < options->n; i++)
        for (size_t k = 0; k < i; k++)
            p.why[i * p.n + k] = p.why[k * p.n + i] = why_not_both(f, options, i, k);
    return p;
}

/* Why this set is no alternative, or NULL. */
static const char *why_not(struct figures *f, const struct names *options, const struct pairs *p,
                           size_t n, const size_t *set)
{
    for (size_t i = 0; i < n; i++)
        for (size_t k = 0; k < i; k++)
            if (p->why[set[i] * p->n + set[k]])
                return p->why[set[i] * p->n + set[k]];
    for (size_t i = 0; i < n; i++) {
        const struct option *o = option_at(f, options, set[i]);
        for (size_t r = 0; r < o->requires.n; r++) {
            size_t want = index_in(options, o->requires.at[r]), k = 0;
            while (k < n && set[k] != want)
                k++;
            if (k == n)
                return arena_printf(f->arena, "%s requires %s", options->at[set[i]],
                                    o->requires.at[r]);
        }
    }
    return NULL;
}

static void consider(struct figures *f, const struct names *options, const struct pairs *p,
                     size_t n, const size_t *set, struct weighing *w)
{
    const char **ids = NEW_ARRAY(f->arena, n, const char *);
    for (size_t i = 0; i < n; i++)
        ids[i] = options->at[set[i]];
    const char *name = alternative_name(f->arena, n, ids);
    const char *why = why_not(f, options, p, n, set);
    if (!why)
        *array_push(f->arena, &w->alternatives) =
            (struct alternative){.name = name, .n = n, .options = ids};
    else if (n == 1 || (n == 2 && p->why[set[0] * p->n + set[1]])) /* larger sets: the same */
        *array_push(f->arena, &w->left_out) = (struct not_possible){name, why};
}

/* The next set of n out of `of` in lexical order; false behind the last. */
static bool next_set(size_t *set, size_t n, size_t of)
{
    size_t i = n;
    while (i > 0 && set[i - 1] == of - n + i - 1)
        i--;
    if (i == 0)
        return false;
    set[i - 1]++;
    for (; i < n; i++)
        set[i] = set[i - 1] + 1;
    return true;
}

void alternatives_find(struct figures *f, const struct names *options, struct weighing *w)
{
    struct pairs p = work_out_pairs(f, options);
    size_t largest = options->n;
    w->only_pairs = options->n > WEIGH_ALL;
    if (w->only_pairs)
        largest = 2;
    size_t *set = NEW_ARRAY(f->arena, options->n + 1, size_t);
    for (size_t n = 0; n <= largest; n++) {
        for (size_t i = 0; i < n; i++)
            set[i] = i;
        do
            consider(f, options, &p, n, set, w);
        while (n > 0 && next_set(set, n, options->n));
    }
}
