/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Harm to each group of people over hazards: the mean over the horizon, and the individual risk in
 * each year where some hazard differs. Owns nothing. */
#include "figure/horizon.h"
#include "figure/over_hazards.h"

/* --- years --- */

/* What kills people of a group in the years of the horizon. */
struct deadly {
    const struct over *over;
    size_t n;
    const struct consequence **effects;
    const struct hazard_exports **hazards;
};

static struct deadly deadly_to(const struct over *o, const char *group)
{
    struct deadly d = {.over = o};
    d.effects = NEW_ARRAY(o->f->arena, o->n, const struct consequence *);
    d.hazards = NEW_ARRAY(o->f->arena, o->n, const struct hazard_exports *);
    for (size_t i = 0; i < o->n; i++) {
        const struct consequence *x = consequence_of(o->parts[i], PROPERTY_DEATH, group);
        if (!x)
            continue;
        d.effects[d.n] = x;
        d.hazards[d.n++] = o->hazards[i]->exports;
    }
    return d;
}

static figure_id in_year(const struct deadly *d, size_t i, uint32_t year)
{
    const uint32_t *of_year = d->hazards[i]->of_year;
    return d->effects[i]->yearly[of_year ? of_year[year] : 0];
}

static bool same_years(const struct deadly *d, uint32_t p, uint32_t q)
{
    for (size_t i = 0; i < d->n; i++)
        if (in_year(d, i, p) != in_year(d, i, q))
            return false;
    return true;
}

static bool differs(const struct deadly *d)
{
    for (size_t i = 0; i < d->n; i++)
        if (d->hazards[i]->of_year)
            return true;
    return false;
}

static figure_id add_year(struct building *b, const struct deadly *d, uint32_t year)
{
    struct figures *f = b->figures;
    node_id *nodes = NEW_ARRAY(f->arena, d->n, node_id);
    for (size_t i = 0; i < d->n; i++)
        nodes[i] = figure_at(f, in_year(d, i, year))->node;
    node_id sum = d->n == 1 ? nodes[0] : graph_op(f->graph, OP_SUM, d->n, nodes);
    const char *label = horizon_label(f->arena, f->base->settings, year);
    return compiled_add(b, PROPERTY_DEATH, label, NULL, sum, NULL, NULL);
}

/* A year that repeats an earlier one has its figure. */
static void add_years(struct building *b, const struct deadly *d, struct harm_to *x)
{
    uint32_t years = horizon_length(b->figures->base->settings);
    figure_id *yearly = NEW_ARRAY(b->figures->arena, years, figure_id);
    uint32_t *of_year = NEW_ARRAY(b->figures->arena, years, uint32_t);
    for (uint32_t y = 0; y < years; y++) {
        uint32_t like = 0;
        while (like < y && !same_years(d, like, y))
            like++;
        of_year[y] = like;
        yearly[y] = like < y ? yearly[like] : add_year(b, d, y);
    }
    x->yearly = yearly;
    x->of_year = of_year;
}

/* --- groups --- */

static node_id times_persons(struct building *b, node_id risk, const char *group)
{
    const struct group_of_people *g = model_get(b->variant->model, KIND_GROUP, group);
    char number[32];
    const char *text = text_double(number, (double)g->persons);
    node_id persons =
        compile_const(b, (double)g->persons, dim_number, arena_str(b->figures->arena, text));
    return graph_op2(b->figures->graph, OP_MULTIPLY, risk, persons);
}

static struct harm_to compile_people(const struct over *o, const struct object *group)
{
    struct building b;
    struct harm_to *x = NEW(o->f->arena, struct harm_to);
    struct deadly d = deadly_to(o, group->id);
    compiled_begin(o->f, o->base, group, group->id, &b);
    node_id death = over_sum(&b, o, PROPERTY_DEATH, group->id);
    node_id injury = over_sum(&b, o, PROPERTY_INJURY, group->id);
    x->group = group->id;
    x->death = compiled_add(&b, PROPERTY_DEATH, NULL, NULL, death, NULL, NULL);
    x->injury = compiled_add(&b, PROPERTY_INJURY, NULL, NULL, injury, NULL, NULL);
    x->fatalities = compiled_add(&b, PROPERTY_FATALITIES, NULL, NULL,
                                 times_persons(&b, death, group->id), NULL, NULL);
    x->yearly = &x->death;
    if (differs(&d))
        add_years(&b, &d, x);
    b.unit->exports = x;
    b.unit->main = x->death;
    compiled_end(&b);
    return *x;
}

ohmen_status figures_people(struct figures *f, size_t n, const struct compiled *const *hazards,
                            struct harm_to **out, ohmen_error *e)
{
    const struct objects *groups = &f->base->of[KIND_GROUP];
    struct over o;
    ohmen_status status = over_hazards(f, n, hazards, &o, e);
    if (status != OHMEN_OK)
        return status;
    struct building under = {.figures = f, .variant = o.base};
    struct harm_to *all = NEW_ARRAY(f->arena, groups->n, struct harm_to);
    for (size_t i = 0; i < groups->n; i++) {
        const struct compiled *known = compiled_of(&under, groups->at[i]->id);
        all[i] =
            known ? *(const struct harm_to *)known->exports : compile_people(&o, groups->at[i]);
    }
    *out = all;
    return OHMEN_OK;
}
