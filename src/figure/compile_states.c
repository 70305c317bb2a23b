/* SPDX-License-Identifier: GPL-3.0-or-later */
/* States: their shares of time or probabilities, and hazards as the mean over them.
 *
 * The hazard in each combination of states is a unit of its own; the mean reads those. The
 * network is in one combination at each time, so that frequencies and risks are weighted by
 * the shares of time, and what is said of one occurrence (a probability, a damage) by how
 * often it occurs in each. Owns nothing beyond the arena of the figures. */
#include <math.h>

#include "figure/horizon.h"
#include "figure/service.h"
#include "figure/states.h"

/* --- shares --- */

static bool is_rest(const struct quantity *q)
{
    return q->shape == SHAPE_EXPRESSION && !q->expr;
}

/* 1 less all other shares. */
static node_id rest_share(struct building *b, size_t n, const node_id *others)
{
    struct graph *g = b->figures->graph;
    return graph_op1(g, OP_COMPLEMENT, n == 1 ? others[0] : graph_op(g, OP_SUM, n, others));
}

static void add_share(struct building *b, const struct object *o, size_t i, node_id n,
                      const char *text)
{
    const struct state *s = o->data;
    compiled_add(b, PROPERTY_SHARE, state_values(s)->keys[i], NULL, n, s->source, text);
}

/* Operating states: the shares of time. */
static void add_shares_of_time(struct building *b, const struct object *o)
{
    const struct state *s = o->data;
    const struct quantity *const *shares = s->varies.at;
    node_id *nodes = NEW_ARRAY(b->figures->arena, s->varies.n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < s->varies.n; i++) {
        if (is_rest(shares[i]))
            continue;
        nodes[n] = compile_quantity(b, shares[i]);
        add_share(b, o, i, nodes[n++], quantity_reads(b->figures, shares[i]));
    }
    for (size_t i = 0; i < s->varies.n; i++)
        if (is_rest(shares[i]))
            add_share(b, o, i, rest_share(b, n, nodes), NULL);
}

/* --- what is unknown --- */

/* An input that is 1 with this probability, and otherwise 0. */
static node_id compile_whether(struct building *b, double p)
{
    static const double values[] = {0, 1};
    struct arena *a = b->figures->arena;
    if (p <= 0 || p >= 1)
        return compile_const(b, p <= 0 ? 0 : 1, dim_number, NULL);
    double *probabilities = NEW_ARRAY(a, 2, double);
    struct quantity *q = NEW(a, struct quantity);
    probabilities[0] = 1 - p;
    probabilities[1] = p;
    *q = (struct quantity){.shape = SHAPE_DISCRETE, .dim = dim_number, .n = 2, .times = 1};
    q->values = arena_copy(a, values, sizeof values);
    q->probabilities = probabilities;
    q->text = arena_printf(a, "true with %s %%", text_double(NEW_ARRAY(a, 32, char), 100 * p));
    return compile_quantity(b, q);
}

static const struct quantity *probability_at(const struct state *s, size_t i)
{
    return ((const struct quantity *const *)s->is.at)[i];
}

/* The state that takes what the others leave: the one that is marked, or the likeliest. */
static size_t remainder_of(const struct state *s)
{
    size_t likeliest = 0;
    for (size_t i = 0; i < s->is.n; i++) {
        if (is_rest(probability_at(s, i)))
            return i;
        if (expr_constant(probability_at(s, i)->expr) >
            expr_constant(probability_at(s, likeliest)->expr))
            likeliest = i;
    }
    return likeliest;
}

/* The asset is in one state for good or ill. Each state but one is an input that is 1 or 0, given
 * that those before it are not the case; so that shares are linear in independent inputs, their
 * means the probabilities, and exactly one of them is 1 in each sample. */
static void add_probabilities(struct building *b, const struct object *o)
{
    const struct state *s = o->data;
    struct graph *g = b->figures->graph;
    size_t last = remainder_of(s);
    double left = 1;
    node_id none_before = NODE_NONE;
    for (size_t i = 0; i < s->is.n; i++) {
        const struct quantity *q = probability_at(s, i);
        if (i == last)
            continue;
        double p = expr_constant(q->expr);
        node_id whether = compile_whether(b, left > 0 ? fmin(p / left, 1) : 0);
        node_id share =
            none_before == NODE_NONE ? whether : graph_op2(g, OP_MULTIPLY, none_before, whether);
        node_id not = graph_op1(g, OP_COMPLEMENT, whether);
        add_share(b, o, i, share, quantity_reads(b->figures, q));
        none_before = none_before == NODE_NONE ? not : graph_op2(g, OP_MULTIPLY, none_before, not );
        left -= p;
    }
    if (none_before == NODE_NONE)
        none_before = compile_const(b, 1, dim_number, NULL);
    add_share(b, o, last, none_before, NULL);
}

const char *states_reset(const struct figures *f, const struct variant *v, const struct state *s,
                         double *when)
{
    const char *to = NULL;
    for (size_t i = 0; i < v->n; i++) {
        const struct change *c = &v->changes[i];
        const char *option = c->sort == CHANGE_RENEWAL  ? c->option
                             : c->sort == CHANGE_OPTION ? c->name
                                                        : NULL;
        const char *sets = option ? state_renewed(s, option) : NULL;
        double at =
            option ? life_of(f, option).begin + (c->sort == CHANGE_RENEWAL ? c->moved : 0) : 0;
        if (sets && (!to || at >= *when)) {
            to = sets;
            *when = at;
        }
    }
    return to;
}

/* As the option leaves it that renews it. */
static void add_renewed(struct building *b, const struct object *o, const char *to)
{
    const struct rows *states = state_values(o->data);
    for (size_t i = 0; i < states->n; i++) {
        bool is = text_equal(states->keys[i], to);
        node_id n = graph_apart(b->figures->graph, compile_const(b, is, dim_number, NULL),
                                ++b->figures->n_stated);
        add_share(b, o, i, n, is ? "100 %" : "0 %");
    }
}

ohmen_status compile_state(struct figures *f, const struct variant *v, const struct object *o,
                           struct compiled **out, ohmen_error *e)
{
    struct building b;
    (void)e;
    compiled_begin(f, v, o, o->id, &b);
    double when;
    const char *renewed = states_reset(f, v, o->data, &when);
    if (renewed)
        add_renewed(&b, o, renewed);
    else if (((const struct state *)o->data)->is.n)
        add_probabilities(&b, o);
    else
        add_shares_of_time(&b, o);
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}

/* --- the hazard in each combination --- */

struct mixing {
    struct figures *f;
    struct building b;
    const struct object *object;
    const struct hazard *hazard;
    const struct combinations *combined;
    const struct compiled **units; /* NULL: there is no such hazard */
    node_id *weights;
    const node_id **weights_in; /* by combination: of each year; NULL: as its weight in all */
    struct hazard_exports *exports;
};

static const struct compiled *state_unit(const struct mixing *m, const struct object *state)
{
    const struct building under = {.figures = m->f, .variant = m->b.variant->stem};
    return compiled_of(&under, state->id);
}

static figure_id share_of(const struct mixing *m, const struct combination *c, size_t i)
{
    const struct state *s = c->states[i]->data;
    return compiled_figure(m->f, state_unit(m, c->states[i]), PROPERTY_SHARE,
                           state_values(s)->keys[c->values[i]], NULL);
}

/* What is not in the hazard of the register would stand in no list. */
static ohmen_status refuse_new_outcomes(const struct mixing *m, const struct compiled *u,
                                        ohmen_error *e)
{
    const struct hazard *h = u->object->data;
    for (size_t k = 0; k < h->outcomes.n; k++) {
        size_t i = 0;
        while (i < m->hazard->outcomes.n &&
               !text_equal(m->hazard->outcomes.keys[i], h->outcomes.keys[k]))
            i++;
        if (i == m->hazard->outcomes.n)
            return error_set(e, OHMEN_COMPUTE,
                             "\"%s\" has the outcome \"%s\" in some operating states only",
                             m->object->id, h->outcomes.keys[k]);
    }
    return OHMEN_OK;
}

static ohmen_status compile_combination(struct mixing *m, size_t i, ohmen_error *e)
{
    const struct combination *c = &m->combined->list.at[i];
    ohmen_status status = OHMEN_OK;
    for (size_t k = 0; status == OHMEN_OK && k < c->n; k++) {
        const struct compiled *unused;
        status = figures_compile(m->f, m->b.variant->stem, c->states[k]->id, &unused, e);
    }
    if (status != OHMEN_OK || !model_find(c->variant->model, m->object->id))
        return status;
    status = figures_compile(m->f, c->variant, m->object->id, &m->units[i], e);
    return status == OHMEN_OK ? refuse_new_outcomes(m, m->units[i], e) : status;
}

static ohmen_status compile_combinations(struct mixing *m, ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    size_t n = m->combined->list.n, present = 0;
    m->units = NEW_ARRAY(m->f->arena, n, const struct compiled *);
    for (size_t i = 0; status == OHMEN_OK && i < n; i++) {
        status = compile_combination(m, i, e);
        present += m->units[i] != NULL;
    }
    if (status == OHMEN_OK && present == 0)
        return error_set(e, OHMEN_COMPUTE, "there is no \"%s\" in any operating state",
                         m->object->id);
    return status;
}

/* --- means --- */

static const struct hazard_exports *exports_at(const struct mixing *m, size_t i)
{
    return m->units[i]->exports;
}

#define ANY_YEAR UINT32_MAX

static node_id weight_in(const struct mixing *m, size_t i, uint32_t year)
{
    return year == ANY_YEAR || !m->weights_in[i] ? m->weights[i] : m->weights_in[i][year];
}

/* Weight times figure over the combinations, in one year or over all; FIGURE_NONE is 0. */
static node_id weighted_in(struct mixing *m, const figure_id *figures, struct dim d, uint32_t year)
{
    struct graph *g = m->f->graph;
    node_id *terms = NEW_ARRAY(m->f->arena, m->combined->list.n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < m->combined->list.n; i++)
        if (figures[i] != FIGURE_NONE)
            terms[n++] =
                graph_op2(g, OP_MULTIPLY, weight_in(m, i, year), figure_at(m->f, figures[i])->node);
    if (n == 0)
        return compile_const(&m->b, 0, d, NULL);
    return n == 1 ? terms[0] : graph_op(g, OP_SUM, n, terms);
}

static node_id weighted(struct mixing *m, const figure_id *figures, struct dim d)
{
    return weighted_in(m, figures, d, ANY_YEAR);
}

/* The share of one state of a combination, in a year. What changes with time has been compiled. */
static node_id share_in(struct mixing *m, const struct combination *c, size_t k, uint32_t year)
{
    const struct state_course *course = NULL;
    if (!state_evolves(c->states[k]->data))
        return figure_at(m->f, share_of(m, c, k))->node;
    compile_state_course(m->f, m->b.variant->stem, c->states[k]->id, &course, NULL);
    size_t n = state_values(c->states[k]->data)->n;
    return course->in_year[year * n + c->values[k]];
}

/* The product of the shares, which are independent of each other. */
static node_id weight_in_year(struct mixing *m, const struct combination *c, uint32_t year)
{
    node_id w = share_in(m, c, 0, year);
    for (size_t k = 1; k < c->n; k++)
        w = graph_op2(m->f->graph, OP_MULTIPLY, w, share_in(m, c, k, year));
    return w;
}

static bool combination_evolves(const struct combination *c)
{
    for (size_t k = 0; k < c->n; k++)
        if (state_evolves(c->states[k]->data))
            return true;
    return false;
}

/* Years from which on the variant has its meaning count. */
static node_id mean_weight(struct mixing *m, const node_id *in_year)
{
    struct graph *g = m->f->graph;
    uint32_t years = horizon_length(m->f->base->settings);
    uint32_t first = (uint32_t)floor(variant_begins(m->f, m->b.variant));
    node_id sum =
        years - first == 1 ? in_year[first] : graph_op(g, OP_SUM, years - first, &in_year[first]);
    return graph_op2(g, OP_DIVIDE, sum, compile_const(&m->b, years - first, dim_number, NULL));
}

/* Figures of the same sort, one a combination. */
static const figure_id *gather(struct mixing *m, size_t offset)
{
    figure_id *ids = NEW_ARRAY(m->f->arena, m->combined->list.n, figure_id);
    for (size_t i = 0; i < m->combined->list.n; i++)
        ids[i] = m->units[i] ? *(const figure_id *)((const char *)exports_at(m, i) + offset)
                             : FIGURE_NONE;
    return ids;
}

/* The same of an outcome, by its name. */
static const figure_id *gather_outcome(struct mixing *m, size_t offset, const char *outcome)
{
    figure_id *ids = NEW_ARRAY(m->f->arena, m->combined->list.n, figure_id);
    for (size_t i = 0; i < m->combined->list.n; i++) {
        ids[i] = FIGURE_NONE;
        const struct hazard *h = m->units[i] ? m->units[i]->object->data : NULL;
        for (size_t k = 0; h && k < h->outcomes.n; k++)
            if (text_equal(h->outcomes.keys[k], outcome))
                ids[i] = (*(figure_id *const *)((const char *)exports_at(m, i) + offset))[k];
    }
    return ids;
}

/* --- frequency --- */

static const struct object *object_in(const struct mixing *m, size_t i)
{
    return model_find(m->combined->list.at[i].variant->model, m->object->id);
}

/* Does the frequency of two combinations read the same, and is all that it names the same? */
static bool same_in(const struct mixing *m, size_t i, size_t k)
{
    const struct object *o = object_in(m, i), *other = object_in(m, k);
    const struct building p = {.figures = m->f, .variant = m->combined->list.at[i].variant};
    const struct building q = {.figures = m->f, .variant = m->combined->list.at[k].variant};
    if (!o || !other ||
        !node_equal(node_get(o->node, "frequency"), node_get(other->node, "frequency")) ||
        !node_equal(node_get(o->node, "growth"), node_get(other->node, "growth")))
        return false;
    for (size_t r = 0; r < o->refs.n; r++) {
        const struct reference *ref = &o->refs.at[r];
        const char *part = ref->frequency ? PART_FREQUENCY : NULL;
        if (text_starts(ref->path, "frequency") &&
            compiled_part(&p, ref->id, part) != compiled_part(&q, ref->id, part))
            return false;
    }
    return true;
}

/* Is how often the hazard occurs the same in all combinations? */
static bool same_frequency(const struct mixing *m)
{
    for (size_t i = 0; i < m->combined->list.n; i++)
        if (!same_in(m, 0, i))
            return false;
    return true;
}

static const struct compiled *frequency_in(const struct mixing *m, size_t i)
{
    const struct building under = {.figures = m->f, .variant = m->combined->list.at[i].variant};
    return object_in(m, i) ? compiled_part(&under, m->object->id, PART_FREQUENCY) : NULL;
}

/* The mean over combinations, in one year or at all times. */
static node_id mean_frequency(struct mixing *m, bool one_year, uint32_t year)
{
    struct graph *g = m->f->graph;
    node_id *terms = NEW_ARRAY(m->f->arena, m->combined->list.n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < m->combined->list.n; i++) {
        const struct compiled *u = frequency_in(m, i);
        const struct frequency_exports *x = u ? u->exports : NULL;
        if (x)
            terms[n++] = graph_op2(g, OP_MULTIPLY, weight_in(m, i, one_year ? year : ANY_YEAR),
                                   one_year && x->yearly ? x->yearly[year] : x->mean);
    }
    if (n == 0)
        return compile_const(&m->b, 0, dim_frequency, NULL);
    return n == 1 ? terms[0] : graph_op(g, OP_SUM, n, terms);
}

static void find_weights(struct mixing *m)
{
    size_t n = m->combined->list.n;
    uint32_t years = horizon_length(m->f->base->settings);
    m->weights = NEW_ARRAY(m->f->arena, n, node_id);
    m->weights_in = NEW_ARRAY(m->f->arena, n, const node_id *);
    for (size_t i = 0; i < n; i++) {
        const struct combination *c = &m->combined->list.at[i];
        if (!combination_evolves(c)) {
            m->weights[i] = weight_in_year(m, c, 0);
            continue;
        }
        node_id *in_year = NEW_ARRAY(m->f->arena, years, node_id);
        for (uint32_t y = 0; y < years; y++)
            in_year[y] = weight_in_year(m, c, y);
        m->weights_in[i] = in_year;
        m->weights[i] = mean_weight(m, in_year);
    }
}

/* Courses of what changes with time, before the section of the mean is opened. */
static ohmen_status compile_courses(struct mixing *m, ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; i < m->combined->list.n; i++) {
        const struct combination *c = &m->combined->list.at[i];
        for (size_t k = 0; status == OHMEN_OK && k < c->n; k++) {
            const struct state_course *unused;
            if (state_evolves(c->states[k]->data))
                status =
                    compile_state_course(m->f, m->b.variant->stem, c->states[k]->id, &unused, e);
        }
    }
    return status;
}

static const node_id *mean_frequencies(struct mixing *m)
{
    const struct register_settings *s = m->f->base->settings;
    uint32_t years = horizon_length(s);
    bool yearly = false;
    for (size_t i = 0; i < m->combined->list.n; i++) {
        const struct compiled *u = frequency_in(m, i);
        yearly = yearly || (u && ((const struct frequency_exports *)u->exports)->yearly) ||
                 m->weights_in[i];
    }
    if (!yearly)
        return NULL;
    node_id *all = NEW_ARRAY(m->f->arena, years, node_id);
    for (uint32_t y = 0; y < years; y++) {
        all[y] = mean_frequency(m, true, y);
        compiled_add(&m->b, PROPERTY_FREQUENCY, horizon_label(m->f->arena, s, y), NULL, all[y],
                     NULL, NULL);
    }
    return all;
}

static ohmen_status compile_frequencies(struct mixing *m, ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < m->combined->list.n; i++) {
        const struct combination *c = &m->combined->list.at[i];
        const struct compiled *unused;
        for (size_t k = 0; status == OHMEN_OK && k < c->n; k++)
            status = figures_compile(m->f, m->b.variant->stem, c->states[k]->id, &unused, e);
        if (status == OHMEN_OK && object_in(m, i))
            status = compile_frequency_of(m->f, c->variant, object_in(m, i), e);
    }
    return status;
}

ohmen_status compile_mean_frequency(struct figures *f, const struct variant *v,
                                    const struct object *o, const struct combinations *c,
                                    ohmen_error *e)
{
    struct mixing m = {.f = f, .object = o, .hazard = o->data, .combined = c};
    struct frequency_exports *x = NEW(f->arena, struct frequency_exports);
    m.b = (struct building){.figures = f, .variant = v};
    ohmen_status status = compile_frequencies(&m, e);
    if (status != OHMEN_OK)
        return status;
    bool same = same_frequency(&m);
    if (!same)
        status = compile_courses(&m, e);
    if (status != OHMEN_OK)
        return status;
    const struct compiled *first = same ? frequency_in(&m, 0) : NULL;
    compiled_begin_part(f, v, o, o->id, PART_FREQUENCY, &m.b);
    m.b.unit->exports = x;
    if (same) {
        *x = *(const struct frequency_exports *)first->exports;
    } else {
        find_weights(&m);
        x->yearly = mean_frequencies(&m);
        x->mean = mean_frequency(&m, false, 0);
    }
    m.b.unit->main =
        compiled_add(&m.b, PROPERTY_FREQUENCY, NULL, NULL, x->mean, m.hazard->source, NULL);
    compiled_end(&m.b);
    return OHMEN_OK;
}

/* --- the mean hazard --- */

static void add_outcome(struct mixing *m, size_t k, bool same)
{
    struct hazard_exports *x = m->exports;
    const char *key = m->hazard->outcomes.keys[k];
    const figure_id *p = gather_outcome(m, offsetof(struct hazard_exports, probability), key);
    const figure_id *f = gather_outcome(m, offsetof(struct hazard_exports, frequency_of), key);
    const figure_id *r = gather_outcome(m, offsetof(struct hazard_exports, risk_of), key);
    node_id often = weighted(m, f, dim_frequency), risk = weighted(m, r, dim_money_rate);
    node_id all = figure_at(m->f, x->frequency)->node;
    node_id share = same ? weighted(m, p, dim_number) : ratio_of_means(&m->b, often, all);
    x->probability[k] = compiled_add(&m->b, PROPERTY_PROBABILITY, key, NULL, share, NULL, NULL);
    x->frequency_of[k] = compiled_add(&m->b, PROPERTY_FREQUENCY, key, NULL, often, NULL, NULL);
    x->damage_of[k] = compiled_add(&m->b, PROPERTY_DAMAGE, key, NULL,
                                   ratio_of_means(&m->b, risk, often), NULL, NULL);
    x->risk_of[k] = compiled_add(&m->b, PROPERTY_RISK, key, NULL, risk, NULL, NULL);
}

static void add_sums(struct mixing *m)
{
    struct hazard_exports *x = m->exports;
    const figure_id *f = gather(m, offsetof(struct hazard_exports, damaging));
    const figure_id *r = gather(m, offsetof(struct hazard_exports, risk));
    node_id damaging = weighted(m, f, dim_frequency), risk = weighted(m, r, dim_money_rate);
    x->damaging = compiled_add(&m->b, PROPERTY_DAMAGING, NULL, NULL, damaging, NULL, NULL);
    x->risk = compiled_add(&m->b, PROPERTY_RISK, NULL, NULL, risk, NULL, NULL);
    x->damage = compiled_add(&m->b, PROPERTY_DAMAGE, NULL, NULL,
                             ratio_of_means(&m->b, risk, damaging), NULL, NULL);
}

/* Risk by year, where it is one of each year in some combination. */
static void add_years(struct mixing *m)
{
    struct hazard_exports *x = m->exports;
    struct figures *f = m->f;
    const struct register_settings *s = f->base->settings;
    uint32_t years = horizon_length(s);
    bool yearly = false;
    for (size_t i = 0; i < m->combined->list.n; i++)
        yearly = yearly || m->weights_in[i] || (m->units[i] && exports_at(m, i)->of_year);
    x->n_yearly = yearly ? years : 1;
    x->yearly = &x->risk;
    if (!yearly)
        return;
    figure_id *risks = NEW_ARRAY(f->arena, years, figure_id);
    uint32_t *of_year = NEW_ARRAY(f->arena, years, uint32_t);
    figure_id *parts = NEW_ARRAY(f->arena, m->combined->list.n, figure_id);
    for (uint32_t y = 0; y < years; y++) {
        for (size_t i = 0; i < m->combined->list.n; i++) {
            const struct hazard_exports *in = m->units[i] ? exports_at(m, i) : NULL;
            parts[i] = in ? in->yearly[in->of_year ? in->of_year[y] : 0] : FIGURE_NONE;
        }
        of_year[y] = y;
        risks[y] = compiled_add(&m->b, PROPERTY_RISK, horizon_label(f->arena, s, y), NULL,
                                weighted_in(m, parts, dim_money_rate, y), NULL, NULL);
    }
    x->yearly = risks;
    x->of_year = of_year;
}

static void add_figures(struct mixing *m)
{
    struct hazard_exports *x = m->exports;
    struct arena *a = m->f->arena;
    bool same = same_frequency(m);
    find_weights(m);
    x->n_outcomes = m->hazard->outcomes.n;
    x->probability = NEW_ARRAY(a, x->n_outcomes, figure_id);
    x->frequency_of = NEW_ARRAY(a, x->n_outcomes, figure_id);
    x->damage_of = NEW_ARRAY(a, x->n_outcomes, figure_id);
    x->risk_of = NEW_ARRAY(a, x->n_outcomes, figure_id);
    for (size_t k = 0; k < x->n_outcomes; k++)
        add_outcome(m, k, same);
    add_sums(m);
    add_years(m);
}

/* --- the states, for those who show them --- */

static const char *combination_name(struct arena *a, const struct combination *c)
{
    struct text t;
    text_init(&t, a);
    for (size_t k = 0; k < c->n; k++) {
        const struct state *s = c->states[k]->data;
        text_printf(&t, "%s%s=%s", k ? "+" : "", c->states[k]->id,
                    state_values(s)->keys[c->values[k]]);
    }
    return text_str(&t);
}

/* Shares are certain: what they are worth now they are worth for good. 0 where something that
 * was compiled so far is no number, which figures_evaluate tells. */
static void list_states(struct mixing *m)
{
    struct hazard_exports *x = m->exports;
    node_id culprit;
    bool fine = eval_point(m->f->eval, &culprit, NULL) == OHMEN_OK;
    x->n_states = m->combined->list.n;
    x->states = NEW_ARRAY(m->f->arena, x->n_states, struct hazard_state);
    for (size_t i = 0; i < x->n_states; i++) {
        const struct combination *c = &m->combined->list.at[i];
        double share = fine ? 1 : 0;
        for (size_t k = 0; k < c->n && fine; k++)
            share *= figure_at_means(m->f, share_of(m, c, k));
        x->states[i] = (struct hazard_state){
            .name = combination_name(m->f->arena, c), .share = share, .unit = m->units[i]};
    }
}

/* The event tree that stands for all: of the state that holds most of the time. */
static void show_most(struct mixing *m)
{
    struct hazard_exports *x = m->exports;
    const struct hazard_state *most = NULL;
    for (size_t i = 0; i < x->n_states; i++)
        if (x->states[i].unit && (!most || x->states[i].share > most->share))
            most = &x->states[i];
    const struct hazard_exports *shown = most->unit->exports;
    x->diagram = shown->diagram;
    x->node = shown->node;
    x->n_events = shown->n_events;
    x->events = shown->events;
    x->span = shown->span;
    x->ends = shown->ends;
    x->n_ends = shown->n_ends;
    x->end_in = shown->end_in;
}

ohmen_status compile_mean_hazard(struct figures *f, const struct variant *v, const struct object *o,
                                 const struct combinations *c, struct compiled **out,
                                 ohmen_error *e)
{
    struct mixing m = {.f = f, .object = o, .hazard = o->data, .combined = c};
    m.b.variant = v;
    ohmen_status status = compile_combinations(&m, e);
    if (status == OHMEN_OK)
        status = compile_courses(&m, e);
    if (status != OHMEN_OK)
        return status;
    m.exports = NEW(f->arena, struct hazard_exports);
    list_states(&m);
    show_most(&m);
    compiled_begin(f, v, o, o->id, &m.b);
    m.b.unit->exports = m.exports;
    m.b.unit->also = compiled_part(&m.b, o->id, PART_FREQUENCY);
    m.exports->frequency = m.b.unit->also->main;
    add_figures(&m);
    for (size_t i = 0; i < m.exports->n_states; i++) {
        m.exports->states[i].weight = m.weights[i];
        m.exports->states[i].weight_in = m.weights_in[i];
    }
    m.b.unit->main = m.exports->risk;
    compiled_end(&m.b);
    *out = m.b.unit;
    return OHMEN_OK;
}
