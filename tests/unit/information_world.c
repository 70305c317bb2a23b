/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Choices between straight lines (information_world.h). */
#include "information_world.h"

static double worth(void *ctx, const double *values, size_t which)
{
    const struct lines *lines = ctx;
    return lines->base[which] + lines->slope[which] * values[0];
}

static double best(void *ctx, const double *values, size_t *which)
{
    const struct lines *lines = ctx;
    *which = 0;
    for (size_t k = 1; k < lines->n; k++)
        if (worth(ctx, values, k) > worth(ctx, values, *which))
            *which = k;
    return worth(ctx, values, *which);
}

struct choice lines_choice(struct loaded *l, struct arena *a, const struct lines *lines,
                           const char *values)
{
    node_id *target = NEW(a, node_id);
    loaded_text(l, a,
                arena_printf(a,
                             "register: {title: T, currency: EUR, prices: 2026, horizon: 1 a, "
                             "discount: 0 %% per a}\nvalues: {%s}\n",
                             values),
                NULL);
    *target = figure_at(l->figures, loaded_find(l, "V.value"))->node;
    loaded_evaluate(l);
    return (struct choice){.ctx = (void *)lines,
                           .n_targets = 1,
                           .targets = target,
                           .best = best,
                           .worth = lines->tells ? worth : NULL};
}

void lines_look(struct loaded *l, struct arena *a, const struct lines *lines, const char *values,
                struct information *out)
{
    struct choice *c = NEW(a, struct choice);
    *c = lines_choice(l, a, lines, values);
    information_find(l->figures, c, NULL, 0, NULL, NULL, out);
}

const struct information_input *lines_input(const struct information *x, const char *name)
{
    for (size_t i = 0; i < x->list.n; i++)
        if (text_equal(x->list.at[i].name, name))
            return &x->list.at[i];
    return NULL;
}
