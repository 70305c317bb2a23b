/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The sources of damage of hazards, as nodes: how often each outcome occurs, and what it costs. A
 * part of the decision or of the register, made when somebody asks. Owns nothing beyond the arena
 * of the figures. */
#include <math.h>

#include "decide/avoided.h"
#include "decide/branching_spells.h"
#include "decide/loss.h"
#include "figure/compile.h"
#include "figure/horizon.h"

#define PART_LOSS "damage over the horizon"

struct collecting {
    struct worth worth; /* without interest */
    struct loss_sources *out;
    /* Of the hazard under its variant, in one operating state: */
    const struct compiled *unit;
    const struct hazard *hazard;
    const struct hazard_exports *of;
    const struct frequency_exports *often;
    const char *state;         /* or NULL */
    node_id weight;            /* share of time of the state; NODE_NONE: all */
    const node_id *weights_in; /* the same by year of the horizon; NULL: `weight` in all */
    double from, to;
};

static node_id node_of(const struct collecting *c, figure_id id)
{
    return figure_at(c->worth.f, id)->node;
}

static node_id product(struct collecting *c, node_id x, node_id y)
{
    return graph_op2(c->worth.f->graph, OP_MULTIPLY, x, y);
}

static node_id weighted(struct collecting *c, node_id often)
{
    return c->weight == NODE_NONE ? often : product(c, c->weight, often);
}

/* --- how often --- */

/* Probabilities of the ends in a slot of hazard_exports.yearly; NULL: over all of the horizon. */
static const figure_id *ends_in(const struct collecting *c, size_t slot)
{
    const struct hazard_exports *x = c->of;
    size_t window = c->often->yearly && x->end_in ? x->span.of_year[slot] : slot;
    return x->end_in ? x->end_in + window * x->n_ends : NULL;
}

/* In one slot: of one end, or (SIZE_MAX) of all ends of the outcome. */
static node_id often_in(struct collecting *c, size_t slot, size_t outcome, size_t end)
{
    const struct hazard_exports *x = c->of;
    const figure_id *ends = x->of_year ? ends_in(c, slot) : NULL;
    node_id *nodes = NEW_ARRAY(c->worth.f->arena, x->n_ends, node_id);
    node_id often = c->often->yearly ? c->often->yearly[slot] : c->often->mean;
    size_t n = 0;
    for (size_t e = 0; e < x->n_ends; e++)
        if (end == SIZE_MAX ? x->ends[e].outcome_index == outcome : e == end)
            nodes[n++] = node_of(c, ends ? ends[e] : x->ends[e].probability);
    return product(c, often, worth_sum(&c->worth, n, nodes, dim_number));
}

static node_id often_always(struct collecting *c, size_t outcome, size_t end)
{
    const struct hazard_exports *x = c->of;
    if (end == SIZE_MAX)
        return node_of(c, x->frequency_of[outcome]);
    return product(c, node_of(c, x->frequency), node_of(c, x->ends[end].probability));
}

/* By year of the horizon, each with its own share. */
static void find_weighted_rates(struct collecting *c, size_t outcome, size_t end,
                                struct loss_source *s)
{
    const struct hazard_exports *x = c->of;
    struct arena *a = c->worth.f->arena;
    uint32_t years = horizon_length(c->worth.f->base->settings);
    node_id *rates = NEW_ARRAY(a, years, node_id);
    uint32_t *of_year = NEW_ARRAY(a, years, uint32_t);
    for (uint32_t y = 0; y < years; y++) {
        node_id often =
            x->of_year ? often_in(c, x->of_year[y], outcome, end) : often_always(c, outcome, end);
        rates[y] = product(c, c->weights_in[y], often);
        of_year[y] = y;
    }
    s->rates = rates;
    s->n_rates = years;
    s->of_year = of_year + (size_t)floor(s->from);
}

/* Slots that no year of the time has are left at the first one's rate. */
static void find_rates(struct collecting *c, size_t outcome, size_t end, struct loss_source *s)
{
    const struct hazard_exports *x = c->of;
    node_id *rates = NEW_ARRAY(c->worth.f->arena, x->n_yearly, node_id);
    s->rates = rates;
    s->n_rates = x->of_year ? x->n_yearly : 1;
    if (c->weights_in) {
        find_weighted_rates(c, outcome, end, s);
        return;
    }
    if (!x->of_year) {
        rates[0] = weighted(c, often_always(c, outcome, end));
        return;
    }
    s->of_year = x->of_year + (size_t)floor(s->from);
    for (size_t i = 0; i < x->n_yearly; i++)
        rates[i] = weighted(c, often_in(c, i, outcome, end));
}

/* --- what it costs --- */

/* Is there no damage that counts? */
static bool costs_nothing(const struct collecting *c, figure_id damage)
{
    if (damage == FIGURE_NONE)
        return true;
    const struct graph_node *n = graph_at(c->worth.f->graph, node_of(c, damage));
    return n->op == OP_CONST && n->constant == 0;
}

/* Has each end a damage of its own, since that depends on the clearance time? */
static bool differs_by_end(const struct collecting *c, size_t outcome)
{
    const struct hazard_exports *x = c->of;
    for (size_t e = 0; e < x->n_ends; e++)
        if (x->ends[e].outcome_index == outcome && x->ends[e].damage != FIGURE_NONE &&
            x->ends[e].damage != x->damage_of[outcome])
            return true;
    return false;
}

static const char *where_words(const struct collecting *c, size_t end)
{
    struct arena *a = c->worth.f->arena;
    const char *path = end == SIZE_MAX ? NULL : c->of->ends[end].path;
    if (path && c->state)
        return arena_printf(a, "%s, %s", path, c->state);
    return path ? path : c->state ? c->state : "";
}

static void add_source(struct collecting *c, size_t outcome, size_t end, figure_id damage)
{
    if (costs_nothing(c, damage))
        return;
    struct loss_source s = {.hazard = c->unit->id,
                            .outcome = c->hazard->outcomes.keys[outcome],
                            .where = where_words(c, end),
                            .from = c->from,
                            .to = c->to,
                            .damage = node_of(c, damage)};
    find_rates(c, outcome, end, &s);
    *array_push(c->worth.f->arena, c->out) = s;
}

static void add_outcomes(struct collecting *c)
{
    const struct hazard_exports *x = c->of;
    for (size_t k = 0; k < x->n_outcomes; k++) {
        if (!differs_by_end(c, k)) {
            add_source(c, k, SIZE_MAX, x->damage_of[k]);
            continue;
        }
        for (size_t e = 0; e < x->n_ends; e++)
            if (x->ends[e].outcome_index == k)
                add_source(c, k, e, x->ends[e].damage);
    }
}

/* A hazard without operating states, or in one. */
static void add_unit(struct collecting *c, const struct compiled *unit)
{
    struct building under = {.figures = c->worth.f, .variant = unit->variant};
    c->unit = unit;
    c->hazard = unit->object->data;
    c->of = unit->exports;
    c->often = compiled_part(&under, unit->id, PART_FREQUENCY)->exports;
    add_outcomes(c);
}

static void add_hazard(struct collecting *c, const struct compiled *unit, double from, double to)
{
    const struct hazard_exports *x = unit->exports;
    c->from = from;
    c->to = to;
    c->state = NULL;
    c->weight = NODE_NONE;
    c->weights_in = NULL;
    if (x->n_states == 0)
        add_unit(c, unit);
    for (size_t i = 0; i < x->n_states; i++) {
        if (!x->states[i].unit)
            continue;
        c->state = x->states[i].name;
        c->weight = x->states[i].weight;
        c->weights_in = x->states[i].weight_in;
        add_unit(c, x->states[i].unit);
    }
}

/* --- a case --- */

static const struct loss_path *only_path(struct arena *a, const struct loss_sources *sources)
{
    struct loss_path *path = NEW(a, struct loss_path);
    *path = (struct loss_path){1, sources};
    return path;
}

static struct measure damage_measure(void)
{
    return (struct measure){.property = PROPERTY_RISK, .dim = dim_money_rate, .sum = dim_money};
}

/* The hazard under a variant; NULL where that has no such hazard. */
static const struct compiled *hazard_under(const struct collecting *c, const struct variant *v,
                                           const char *id)
{
    struct building under = {.figures = c->worth.f, .variant = v};
    return model_find(v->model, id) ? compiled_of(&under, id) : NULL;
}

/* One source for each time in which the hazard stays the same. */
static void add_over(struct collecting *c, const char *hazard, const struct stretches *s)
{
    for (size_t i = 0, end; i < s->n; i = end) {
        const struct compiled *unit = hazard_under(c, s->at[i].variant, hazard);
        end = i + 1;
        while (end < s->n && hazard_under(c, s->at[end].variant, hazard) == unit)
            end++;
        if (unit)
            add_hazard(c, unit, s->at[i].from, s->at[end - 1].to);
    }
}

static void begin(struct collecting *c, struct figures *f, struct weighing *w,
                  const struct compiled *owner)
{
    *c = (struct collecting){.worth = {.f = f, .w = w}};
    compiled_begin_part(f, owner->variant, owner->object, owner->id, PART_LOSS, &c->worth.b);
    money_begin(&c->worth.money, f, &c->worth.b, w->horizon);
    c->worth.money.rate = compile_const(&c->worth.b, 0, dim_number, NULL);
}

/* The new unit is found where its owner is. */
static void end(struct collecting *c, const struct compiled *owner, struct loss_case *cases)
{
    struct compiled *unit = c->worth.b.unit;
    unit->exports = cases;
    unit->also = owner->also;
    ((struct compiled *)owner)->also = unit;
    compiled_end(&c->worth.b);
}

static struct loss_sources *new_sources(struct collecting *c)
{
    c->out = NEW(c->worth.f->arena, struct loss_sources);
    return c->out;
}

static node_id expected_of(struct collecting *c, const struct alternative *x,
                           const struct stretches *s)
{
    struct measure m = damage_measure();
    node_id now = measure_now(&c->worth, &m);
    if (x->n == 0)
        return now;
    return graph_op2(c->worth.f->graph, OP_SUBTRACT, now, measure_avoided(&c->worth, &m, s));
}

static void add_alternative(struct collecting *c, const struct alternative *x,
                            const struct stretches *s, struct loss_case *out)
{
    struct figures *f = c->worth.f;
    struct loss_sources *sources = new_sources(c);
    for (size_t i = 0; i < c->worth.w->hazards.n; i++)
        add_over(c, c->worth.w->hazards.at[i].id, s);
    *out = (struct loss_case){x->name, 1, only_path(f->arena, sources), FIGURE_NONE};
    out->expected = compiled_add(&c->worth.b, PROPERTY_HORIZON_DAMAGE, x->name, NULL,
                                 expected_of(c, x, s), NULL, NULL);
}

/* --- trees --- */

/* Shares of years, times those of a state where the hazard is a mean over some. */
static const node_id *shares_in(struct collecting *c, const struct spell *s,
                                const struct hazard_state *state)
{
    uint32_t years = horizon_length(c->worth.f->base->settings);
    node_id *all = NEW_ARRAY(c->worth.f->arena, years, node_id);
    for (uint32_t y = 0; y < years; y++) {
        all[y] = compile_const(&c->worth.b, s->share[y], dim_number, NULL);
        if (state)
            all[y] = product(c, state->weight_in ? state->weight_in[y] : state->weight, all[y]);
    }
    return all;
}

static void add_spell(struct collecting *c, const struct spell *s, const struct compiled *unit)
{
    const struct hazard_exports *x = unit->exports;
    c->from = 0;
    c->to = c->worth.w->horizon;
    c->state = NULL;
    c->weights_in = shares_in(c, s, NULL);
    if (x->n_states == 0)
        add_unit(c, unit);
    for (size_t i = 0; i < x->n_states; i++) {
        if (!x->states[i].unit)
            continue;
        c->state = x->states[i].name;
        c->weights_in = shares_in(c, s, &x->states[i]);
        add_unit(c, x->states[i].unit);
    }
}

/* Expected damage on a path: what its sources cost in all years. */
static node_id expected_on(struct collecting *c, const struct loss_sources *sources)
{
    node_id *terms = NEW_ARRAY(c->worth.f->arena, sources->n, node_id);
    for (size_t i = 0; i < sources->n; i++) {
        const struct loss_source *s = &sources->at[i];
        node_id often = worth_sum(&c->worth, s->n_rates, s->rates, dim_frequency);
        terms[i] = product(c, product(c, often, c->worth.money.one_year), s->damage);
    }
    return worth_sum(&c->worth, sources->n, terms, dim_money);
}

static void add_spell_path(struct collecting *c, const struct spell_path *p)
{
    size_t n = c->worth.w->hazards.n;
    for (size_t i = 0; i < p->spells.n; i++) {
        const struct spell *s = &p->spells.at[i];
        for (size_t h = 0; h < n; h++)
            if (s->world->hazards[s->hidden * n + h])
                add_spell(c, s, s->world->hazards[s->hidden * n + h]);
    }
}

static void add_branching(struct collecting *c, size_t i, struct loss_case *out)
{
    struct figures *f = c->worth.f;
    const struct branching *b = c->worth.w->branching;
    const char *name = c->worth.w->alternatives.at[i].name;
    struct spell_paths all;
    branching_spells(f->arena, b, i, &all);
    struct loss_path *paths = NEW_ARRAY(f->arena, all.n, struct loss_path);
    node_id *terms = NEW_ARRAY(f->arena, all.n, node_id);
    for (size_t k = 0; k < all.n; k++) {
        paths[k] = (struct loss_path){all.at[k].probability, new_sources(c)};
        add_spell_path(c, &all.at[k]);
        terms[k] = product(c, compile_const(&c->worth.b, paths[k].probability, dim_number, NULL),
                           expected_on(c, paths[k].sources));
    }
    *out = (struct loss_case){name, all.n, paths, FIGURE_NONE};
    out->expected = compiled_add(&c->worth.b, PROPERTY_HORIZON_DAMAGE, name, NULL,
                                 worth_sum(&c->worth, all.n, terms, dim_money), NULL, NULL);
}

static ohmen_status loss_of_branching(struct figures *f, struct weighing *w,
                                      const struct loss_case **out)
{
    struct loss_case *cases = NEW_ARRAY(f->arena, w->alternatives.n, struct loss_case);
    struct collecting c;
    begin(&c, f, w, w->unit);
    for (size_t i = 0; i < w->alternatives.n; i++)
        add_branching(&c, i, &cases[i]);
    end(&c, w->unit, cases);
    *out = cases;
    return OHMEN_OK;
}

ohmen_status loss_of_weighing(struct figures *f, struct weighing *w, const struct loss_case **out,
                              ohmen_error *e)
{
    struct building under = {.figures = f, .variant = w->unit->variant};
    const struct compiled *known = compiled_part(&under, w->id, PART_LOSS);
    size_t n = w->alternatives.n;
    if (known) {
        *out = known->exports;
        return OHMEN_OK;
    }
    if (w->branching)
        return loss_of_branching(f, w, out);
    struct stretches *cut = NEW_ARRAY(f->arena, n, struct stretches);
    for (size_t i = 0; i < n; i++) {
        ohmen_status status = timeline_cut(f, &w->alternatives.at[i], w->horizon, &cut[i], e);
        if (status != OHMEN_OK)
            return status;
    }
    struct loss_case *cases = NEW_ARRAY(f->arena, n, struct loss_case);
    struct collecting c;
    begin(&c, f, w, w->unit);
    for (size_t i = 0; i < n; i++)
        add_alternative(&c, &w->alternatives.at[i], &cut[i], &cases[i]);
    end(&c, w->unit, cases);
    *out = cases;
    return OHMEN_OK;
}

/* --- the register --- */

/* A weighing of nothing: what measure_now needs. */
static struct weighing *as_weighing(struct figures *f, size_t n,
                                    const struct compiled *const *hazards)
{
    struct weighing *w = NEW(f->arena, struct weighing);
    w->horizon = horizon_length(f->base->settings);
    for (size_t i = 0; i < n; i++)
        *array_push(f->arena, &w->hazards) =
            (struct weighed_hazard){hazards[i]->id, false, hazards[i]};
    return w;
}

/* What a hazard costs over the horizon is a figure of its own; and their sum. */
static node_id expected_by_hazard(struct figures *f, struct collecting *c, size_t n,
                                  const struct compiled *const *hazards)
{
    struct measure m = damage_measure();
    struct weighing *all = c->worth.w;
    node_id *nodes = NEW_ARRAY(f->arena, n, node_id);
    for (size_t i = 0; i < n; i++) {
        c->worth.w = as_weighing(f, 1, &hazards[i]);
        nodes[i] = measure_now(&c->worth, &m);
        compiled_add(&c->worth.b, PROPERTY_HORIZON_DAMAGE, hazards[i]->id, NULL, nodes[i], NULL,
                     NULL);
    }
    c->worth.w = all;
    return worth_sum(&c->worth, n, nodes, dim_money);
}

ohmen_status loss_of_register(struct figures *f, size_t n, const struct compiled *const *hazards,
                              const struct loss_case **out, ohmen_error *e)
{
    const struct compiled *owner = figures_settings(f);
    struct building under = {.figures = f, .variant = owner->variant};
    const struct compiled *known = compiled_part(&under, owner->id, PART_LOSS);
    (void)e;
    if (known) {
        *out = known->exports;
        return OHMEN_OK;
    }
    struct loss_case *one = NEW(f->arena, struct loss_case);
    struct collecting c;
    begin(&c, f, as_weighing(f, n, hazards), owner);
    struct loss_sources *sources = new_sources(&c);
    for (size_t i = 0; i < n; i++)
        add_hazard(&c, hazards[i], 0, c.worth.w->horizon);
    *one = (struct loss_case){LOSS_TODAY, 1, only_path(f->arena, sources), FIGURE_NONE};
    one->expected = compiled_add(&c.worth.b, PROPERTY_HORIZON_DAMAGE, NULL, NULL,
                                 expected_by_hazard(f, &c, n, hazards), NULL, NULL);
    end(&c, owner, one);
    *out = one;
    return OHMEN_OK;
}
