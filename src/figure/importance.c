/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Importance of events: the backward pass of the evaluation knows what each variable of each
 * diagram does to a figure; here this is gathered by event. Owns nothing. */
#include "figure/importance.h"

#include <math.h>
#include <stdlib.h>

#include "figure/compile.h"
#include "graph/cuts.h"

/* --- gathering --- */

struct gathering {
    struct figures *f;
    struct arena *arena;
    const char *hazard; /* that is being gathered, or NULL */
    ARRAY(struct effect) list;
    ARRAY(const char *) last; /* for each: the last hazard that counted */
    struct strmap index;      /* key of the event -> (void *)(index + 1) */
};

/* Events of rows and disabled elements are each hazard's own. */
static const char *event_key(const struct gathering *g, const struct compiled *u,
                             const struct event *e)
{
    if (e->kind == EVENT_ELEMENT || e->kind == EVENT_SHOCK)
        return e->name;
    return arena_printf(g->arena, "%s/%s", u->id, e->name);
}

static void add_effect(struct gathering *g, const struct compiled *u, const struct event *e,
                       double gain, double share)
{
    const char *key = event_key(g, u, e);
    uintptr_t known = (uintptr_t)strmap_get(&g->index, key);
    if (!known) {
        bool shared = e->kind == EVENT_ELEMENT || e->kind == EVENT_SHOCK;
        *array_push(g->arena, &g->list) =
            (struct effect){.event = *e, .hazard = shared ? NULL : g->hazard};
        *array_push(g->arena, &g->last) = NULL;
        known = g->list.n;
        strmap_set(g->arena, &g->index, key, (void *)known);
    }
    struct effect *x = &g->list.at[known - 1];
    x->gain += gain;
    x->share += share;
    if (gain != 0 && (!g->hazard || g->last.at[known - 1] != g->hazard)) {
        g->last.at[known - 1] = g->hazard;
        x->n_hazards++;
    }
}

/* Effects through one diagram; eval_backward was called. */
static void gather(struct gathering *g, const struct compiled *u, node_id diagram, size_t n,
                   const struct event *events)
{
    double *gain = NEW_ARRAY(g->arena, n, double), *share = NEW_ARRAY(g->arena, n, double);
    if (n == 0)
        return;
    eval_effects(g->f->eval, diagram, gain, share);
    for (size_t i = 0; i < n; i++)
        if (events[i].kind != EVENT_SEES)
            add_effect(g, u, &events[i], gain[i], share[i]);
}

/* One hazard, in whatever operating states. */
static void gather_hazard(struct gathering *g, const struct compiled *u)
{
    const struct hazard_exports *x = u->exports;
    g->hazard = u->id;
    for (size_t i = 0; i < x->n_states; i++) {
        const struct compiled *state = x->states[i].unit;
        const struct hazard_exports *in = state ? state->exports : NULL;
        if (state)
            gather(g, state, in->node, in->n_events, in->events);
    }
    if (x->n_states == 0)
        gather(g, u, x->node, x->n_events, x->events);
}

static void go_back(struct figures *f, struct arena *a, node_id root)
{
    eval_backward(f->eval, root, NEW_ARRAY(a, graph_size(f->graph), double));
}

static int by_share(const void *p, const void *q)
{
    const struct effect *a = p, *b = q;
    if (a->share != b->share)
        return a->share > b->share ? -1 : 1;
    if (a->gain != b->gain)
        return a->gain > b->gain ? -1 : 1;
    return text_compare(a->event.name, b->event.name);
}

static void hand_out(struct gathering *g, double whole, struct effects *out)
{
    if (g->list.n > 1)
        qsort(g->list.at, g->list.n, sizeof *g->list.at, by_share);
    *out = (struct effects){whole, g->list.n, g->list.at};
}

void importance_in_hazard(struct figures *f, struct arena *a, const struct compiled *hazard,
                          struct effects *out)
{
    struct gathering g = {.f = f, .arena = a};
    const struct hazard_exports *x = hazard->exports;
    go_back(f, a, figure_at(f, x->risk)->node);
    gather_hazard(&g, hazard);
    hand_out(&g, figure_at_means(f, x->risk), out);
}

void importance_in_scheme(struct figures *f, struct arena *a, const struct compiled *scheme,
                          struct effects *out)
{
    struct gathering g = {.f = f, .arena = a};
    const struct scheme_exports *x = scheme->exports;
    go_back(f, a, figure_at(f, scheme->main)->node);
    gather(&g, scheme, x->node, x->n_events, x->events);
    hand_out(&g, figure_at_means(f, scheme->main), out);
}

/* The total is a plain sum of the risks: what a diagram does to it, it does to its hazard's. */
void importance_in_each(struct figures *f, struct arena *a, size_t n,
                        const struct compiled *const *hazards, struct effects *out,
                        struct effects *each)
{
    struct gathering all = {.f = f, .arena = a};
    figure_id total = figures_total(f, n, hazards);
    go_back(f, a, figure_at(f, total)->node);
    for (size_t i = 0; i < n; i++) {
        struct gathering one = {.f = f, .arena = a};
        gather_hazard(&all, hazards[i]);
        gather_hazard(&one, hazards[i]);
        hand_out(&one, figure_at_means(f, hazards[i]->main), &each[i]);
    }
    hand_out(&all, figure_at_means(f, total), out);
}

ohmen_status importance_in_all(struct figures *f, struct arena *a, size_t n,
                               const struct compiled *const *hazards, struct effects *out,
                               ohmen_error *e)
{
    struct gathering g = {.f = f, .arena = a};
    figure_id total = figures_total(f, n, hazards);
    ohmen_status status = figures_evaluate(f, e);
    if (status != OHMEN_OK)
        return status;
    go_back(f, a, figure_at(f, total)->node);
    for (size_t i = 0; i < n; i++)
        gather_hazard(&g, hazards[i]);
    hand_out(&g, figure_at_means(f, total), out);
    return OHMEN_OK;
}

double effect_fussell_vesely(const struct effects *all, const struct effect *x)
{
    return all->whole == 0 ? 0 : x->share / all->whole;
}

double effect_achievement(const struct effects *all, const struct effect *x)
{
    return all->whole == 0 ? 1 : 1 + (x->gain - x->share) / all->whole;
}

double effect_reduction(const struct effects *all, const struct effect *x)
{
    double without = all->whole - x->share;
    return all->whole == 0 ? 1 : without <= 0 ? INFINITY : all->whole / without;
}

/* --- the whole register --- */

figure_id figures_total(struct figures *f, size_t n, const struct compiled *const *hazards)
{
    const struct variant *base;
    struct building b;
    if (figures_variant(f, 0, NULL, &base, NULL) != OHMEN_OK)
        return FIGURE_NONE;
    b = (struct building){.figures = f, .variant = base};
    const struct compiled *known = compiled_part(&b, REGISTER_ID, PART_TOTAL);
    if (known)
        return known->main;
    compiled_begin_part(f, base, model_find(f->base, REGISTER_ID), REGISTER_ID, PART_TOTAL, &b);
    node_id *risks = NEW_ARRAY(f->arena, n, node_id);
    for (size_t i = 0; i < n; i++)
        risks[i] = figure_at(f, hazards[i]->main)->node;
    node_id sum =
        n == 0 ? compile_const(&b, 0, dim_money_rate, NULL) : graph_op(f->graph, OP_SUM, n, risks);
    b.unit->main = compiled_add(&b, PROPERTY_RISK, NULL, NULL, sum, NULL, NULL);
    compiled_end(&b);
    return b.unit->main;
}

/* --- minimal cut sets --- */

/* The mean probability of an event; of one that the hazard disables, its share. */
static double event_probability(const struct figures *f, const struct compiled *u,
                                const struct event *e)
{
    if (e->kind == EVENT_DISABLED)
        return figure_value(f, compiled_figure(f, u, PROPERTY_SHARE, e->id, "disabled"));
    return figure_value(f, e->fails.fails);
}

static void cut_sets(struct figures *f, struct arena *a, const struct compiled *u,
                     const struct diagram *d, const struct wiring *w, size_t limit,
                     struct cut_sets *out)
{
    double *p = NEW_ARRAY(a, w->events.n + 1, double);
    for (size_t i = 0; i < w->events.n; i++)
        p[i] = event_probability(f, u, &w->events.at[i]);
    struct cuts cuts = cuts_find(a, d, 0, p, limit);
    *out =
        (struct cut_sets){cuts.too_many, cuts.n_all, cuts.n, NEW_ARRAY(a, cuts.n, struct cut_set)};
    for (size_t i = 0; i < cuts.n; i++) {
        const struct cut *c = &cuts.sets[i];
        const struct event **events = NEW_ARRAY(a, c->n_members, const struct event *);
        for (uint32_t k = 0; k < c->n_members; k++)
            events[k] = &w->events.at[c->members[k]];
        out->at[i] = (struct cut_set){c->product, c->n_members, events};
    }
}

static const struct hazard_exports *exports_of(const struct compiled *hazard)
{
    return hazard->exports;
}

/* The hazard whose event tree stands for all operating states. */
static const struct compiled *in_one_state(const struct compiled *hazard)
{
    const struct hazard_exports *x = hazard->exports;
    for (size_t i = 0; i < x->n_states; i++)
        if (x->states[i].unit && exports_of(x->states[i].unit)->node == x->node)
            return x->states[i].unit;
    return hazard;
}

void cut_sets_of_hazard(struct figures *f, struct arena *a, const struct compiled *hazard,
                        size_t limit, struct cut_sets *out)
{
    struct wiring w;
    hazard = in_one_state(hazard);
    const struct diagram *d = hazard_uncleared(f, hazard, &w);
    cut_sets(f, a, hazard, d, &w, limit, out);
    wiring_end(&w);
}

static void scheme_wiring(struct figures *f, const struct compiled *scheme, struct wiring *w)
{
    wiring_init(w, f, scheme->variant, NULL);
    wiring_order(w, scheme->id);
}

static const struct diagram *scheme_diagram(const struct compiled *scheme)
{
    return ((const struct scheme_exports *)scheme->exports)->diagram;
}

void cut_sets_of_scheme(struct figures *f, struct arena *a, const struct compiled *scheme,
                        size_t limit, struct cut_sets *out)
{
    struct wiring w;
    scheme_wiring(f, scheme, &w);
    cut_sets(f, a, scheme, scheme_diagram(scheme), &w, limit, out);
    wiring_end(&w);
}

/* --- single failures --- */

/* Is the first root true when this variable alone is? None is, with UINT32_MAX. */
static bool is_enough(const struct diagram *d, uint32_t variable)
{
    uint32_t at = d->roots[0];
    while (at >= 2) {
        const struct diagram_node *n = &d->nodes[at - 2];
        at = n->variable == variable ? n->high : n->low;
    }
    return at == 1;
}

static int by_probability(const void *p, const void *q)
{
    const struct cut_set *a = p, *b = q;
    if (a->probability != b->probability)
        return a->probability > b->probability ? -1 : 1;
    return text_compare(a->events[0]->name, b->events[0]->name);
}

static void single_failures(struct figures *f, struct arena *a, const struct compiled *u,
                            const struct diagram *d, const struct wiring *w, struct cut_sets *out)
{
    *out = (struct cut_sets){.at = NEW_ARRAY(a, w->events.n + 1, struct cut_set)};
    if (is_enough(d, UINT32_MAX))
        return; /* nothing need fail */
    for (uint32_t i = 0; i < w->events.n; i++) {
        if (!is_enough(d, i))
            continue;
        const struct event **events = NEW(a, const struct event *);
        events[0] = &w->events.at[i];
        out->at[out->n++] = (struct cut_set){event_probability(f, u, events[0]), 1, events};
    }
    if (out->n > 1)
        qsort(out->at, out->n, sizeof *out->at, by_probability);
    out->n_all = out->n;
}

void single_failures_of_hazard(struct figures *f, struct arena *a, const struct compiled *hazard,
                               struct cut_sets *out)
{
    struct wiring w;
    hazard = in_one_state(hazard);
    const struct diagram *d = hazard_uncleared(f, hazard, &w);
    single_failures(f, a, hazard, d, &w, out);
    wiring_end(&w);
}

void single_failures_of_scheme(struct figures *f, struct arena *a, const struct compiled *scheme,
                               struct cut_sets *out)
{
    struct wiring w;
    scheme_wiring(f, scheme, &w);
    single_failures(f, a, scheme, scheme_diagram(scheme), &w, out);
    wiring_end(&w);
}
