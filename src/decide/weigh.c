/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Compiling a decision: present values of damage and cost for each alternative.
 *
 * All hazards are compiled first, under every set of options that is ever in service
 * together; then the decision's own section reads them. */
#include "decide/weigh.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "decide/alternatives.h"
#include "figure/compile.h"

/* --- time --- */

day weigh_start(const struct register_settings *s)
{
    return s->start != DAY_NONE ? s->start : date_of((int)s->prices, 1, 1);
}

double weigh_years(const struct register_settings *s, day d)
{
    day start = weigh_start(s);
    int y0 = date_year(start), y1 = date_year(d);
    int days = (d - date_of(y1, 1, 1)) - (start - date_of(y0, 1, 1));
    return (double)(y1 - y0) + (double)days / 365;
}

/* From when to when an option is in service, within the horizon. */
struct service {
    double from, to;
};

static struct service service_of(const struct figures *f, const char *id, double horizon)
{
    const struct register_settings *s = f->base->settings;
    const struct option *o = model_get(f->base, KIND_OPTION, id);
    double from = o->in_service == DAY_NONE ? 0 : weigh_years(s, o->in_service);
    double to = o->life ? from + expr_constant(o->life->expr) : horizon;
    struct service r = {fmin(fmax(from, 0), horizon), fmin(fmax(to, 0), horizon)};
    return r;
}

/* A stretch of the horizon in which the same options are in service. */
struct stretch {
    double from, to;
    const struct variant *variant;
};
struct stretches ARRAY_BODY(struct stretch);

static int by_number(const void *p, const void *q)
{
    double a = *(const double *)p, b = *(const double *)q;
    return (a > b) - (a < b);
}

static ohmen_status active_variant(struct figures *f, const struct alternative *x, double from,
                                   double horizon, const struct variant **out, ohmen_error *e)
{
    const char **active = NEW_ARRAY(f->arena, x->n, const char *);
    size_t n = 0;
    for (size_t i = 0; i < x->n; i++) {
        struct service s = service_of(f, x->options[i], horizon);
        if (s.from <= from && from < s.to)
            active[n++] = x->options[i];
    }
    return figures_variant(f, n, active, out, e);
}

static ohmen_status cut_horizon(struct figures *f, const struct alternative *x, double horizon,
                                struct stretches *out, ohmen_error *e)
{
    double *cuts = NEW_ARRAY(f->arena, 2 * x->n + 2, double);
    size_t n = 0;
    cuts[n++] = 0;
    cuts[n++] = horizon;
    for (size_t i = 0; i < x->n; i++) {
        struct service s = service_of(f, x->options[i], horizon);
        cuts[n++] = s.from;
        cuts[n++] = s.to;
    }
    qsort(cuts, n, sizeof *cuts, by_number);
    for (size_t i = 0; i + 1 < n; i++) {
        if (cuts[i] == cuts[i + 1])
            continue;
        struct stretch s = {cuts[i], cuts[i + 1], NULL};
        ohmen_status status = active_variant(f, x, s.from, horizon, &s.variant, e);
        if (status != OHMEN_OK)
            return status;
        *array_push(f->arena, out) = s;
    }
    return OHMEN_OK;
}

/* --- hazards first --- */

static bool in_focus(const struct decision *d, const char *id)
{
    for (size_t i = 0; i < d->focus.n; i++)
        if (text_equal(d->focus.at[i], id))
            return true;
    return false;
}

/* Hazards that some option reaches, or that are in focus, in byte order; those that
 * exist now. */
static void find_hazards(struct figures *f, struct weighing *w)
{
    const struct objects *hazards = &f->base->of[KIND_HAZARD];
    for (size_t i = 0; i < hazards->n; i++) {
        const char *id = hazards->at[i]->id;
        bool reached = in_focus(w->decision, id);
        for (size_t k = 0; k < w->alternatives.n && !reached; k++)
            reached = variant_reaches(w->alternatives.at[k].variant, id);
        if (reached)
            *array_push(f->arena, &w->hazards) =
                (struct weighed_hazard){id, in_focus(w->decision, id), NULL};
    }
}

/* A hazard that a variant adds is damage that only it has; one that it removes has none. */
static void find_new_hazards(struct figures *f, struct weighing *w)
{
    for (size_t k = 0; k < w->alternatives.n; k++) {
        const struct model *m = w->alternatives.at[k].variant->model;
        for (size_t i = 0; m->below && i < m->by_id.n; i++) {
            const struct object *o = m->by_id.at[i].value;
            bool known = !o || o->kind != KIND_HAZARD;
            for (size_t h = 0; h < w->hazards.n && !known; h++)
                known = text_equal(w->hazards.at[h].id, o->id);
            if (!known)
                *array_push(f->arena, &w->hazards) = (struct weighed_hazard){o->id, false, NULL};
        }
    }
}

static ohmen_status compile_hazards_under(struct figures *f, struct weighing *w,
                                          const struct variant *v, const struct compiled **out,
                                          ohmen_error *e)
{
    for (size_t i = 0; i < w->hazards.n; i++) {
        const struct compiled *c = NULL;
        ohmen_status status = OHMEN_OK;
        if (model_find(v->model, w->hazards.at[i].id))
            status = figures_compile(f, v, w->hazards.at[i].id, &c, e);
        if (status != OHMEN_OK)
            return status;
        if (out)
            out[i] = c;
    }
    return OHMEN_OK;
}

static ohmen_status compile_alternative_hazards(struct figures *f, struct weighing *w,
                                                struct alternative *x, struct stretches *stretches,
                                                ohmen_error *e)
{
    x->hazards = NEW_ARRAY(f->arena, w->hazards.n, const struct compiled *);
    ohmen_status status = compile_hazards_under(f, w, x->variant, x->hazards, e);
    if (status == OHMEN_OK)
        status = cut_horizon(f, x, w->horizon, stretches, e);
    for (size_t i = 0; status == OHMEN_OK && i < stretches->n; i++)
        status = compile_hazards_under(f, w, stretches->at[i].variant, NULL, e);
    return status;
}

/* --- options --- */

static ohmen_status compile_option(struct figures *f, const char *id, const struct compiled **out,
                                   ohmen_error *e)
{
    const struct variant *base;
    ohmen_status status = figures_variant(f, 0, NULL, &base, e);
    struct building b = {.figures = f, .variant = base};
    const struct object *o = model_find(f->base, id);
    const struct compiled *known = compiled_of(&b, id);
    if (known || status != OHMEN_OK) {
        *out = known;
        return status;
    }
    status = compile_references(f, base, o, e);
    if (status != OHMEN_OK)
        return status;
    const struct option *p = o->data;
    compiled_begin(f, base, o, id, &b);
    if (p->invest)
        compiled_add(&b, PROPERTY_INVEST, NULL, NULL, compile_quantity(&b, p->invest->is),
                     p->invest->source ? p->invest->source : p->source,
                     quantity_reads(f, p->invest->is));
    if (p->running)
        compiled_add(&b, PROPERTY_RUNNING, NULL, NULL, compile_quantity(&b, p->running->is),
                     p->running->source ? p->running->source : p->source,
                     quantity_reads(f, p->running->is));
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}

/* --- the decision's own section --- */

struct worth {
    struct figures *f;
    struct weighing *w;
    struct building b;
    node_id rate;     /* interest per year as a pure number */
    node_id one_year; /* 1 a */
};

static node_id annuity(struct worth *x, double from, double to)
{
    struct graph *g = x->f->graph;
    node_id years = graph_annuity(g, x->rate, compile_const(&x->b, from, dim_number, NULL),
                                  compile_const(&x->b, to, dim_number, NULL));
    return graph_op2(g, OP_MULTIPLY, years, x->one_year);
}

static node_id sum(struct worth *x, size_t n, const node_id *nodes, struct dim d)
{
    if (n == 0)
        return compile_const(&x->b, 0, d, NULL);
    return n == 1 ? nodes[0] : graph_op(x->f->graph, OP_SUM, n, nodes);
}

/* Damage over the horizon as the register is now. */
static node_id damage_now(struct worth *x)
{
    node_id *risks = NEW_ARRAY(x->f->arena, x->w->hazards.n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < x->w->hazards.n; i++)
        if (x->w->hazards.at[i].now)
            risks[n++] = figure_at(x->f, x->w->hazards.at[i].now->main)->node;
    return graph_op2(x->f->graph, OP_MULTIPLY, annuity(x, 0, x->w->horizon),
                     sum(x, n, risks, dim_money_rate));
}

/* The hazard under a variant; NULL where that has no such hazard. */
static const struct compiled *hazard_under(struct worth *x, const struct variant *v, const char *id)
{
    struct building under = {.figures = x->f, .variant = v};
    return model_find(v->model, id) ? compiled_of(&under, id) : NULL;
}

/* Risk before less risk after; a hazard that is not there has none. Never both NULL. */
static node_id risk_avoided(struct worth *x, const struct compiled *before,
                            const struct compiled *after)
{
    if (!after)
        return figure_at(x->f, before->main)->node;
    node_id risk = figure_at(x->f, after->main)->node;
    if (!before)
        return graph_op1(x->f->graph, OP_NEGATE, risk);
    return graph_op2(x->f->graph, OP_SUBTRACT, figure_at(x->f, before->main)->node, risk);
}

struct nodes ARRAY_BODY(node_id);

/* Appends what is avoided of one hazard: one term for each time in which the same options
 * change it. Times of options that do not reach it do not cut it, so that options on
 * different hazards are worth together what they are worth alone. */
static void add_avoided(struct worth *x, const struct weighed_hazard *h, const struct stretches *s,
                        struct nodes *parts)
{
    for (size_t i = 0, end; i < s->n; i = end) {
        const struct compiled *then = hazard_under(x, s->at[i].variant, h->id);
        end = i + 1;
        while (end < s->n && hazard_under(x, s->at[end].variant, h->id) == then)
            end++;
        if (then != h->now)
            *array_push(x->f->arena, parts) =
                graph_op2(x->f->graph, OP_MULTIPLY, annuity(x, s->at[i].from, s->at[end - 1].to),
                          risk_avoided(x, h->now, then));
    }
}

static node_id avoided_damage(struct worth *x, const struct stretches *s)
{
    struct nodes parts = {0};
    for (size_t i = 0; i < x->w->hazards.n; i++)
        add_avoided(x, &x->w->hazards.at[i], s, &parts);
    return sum(x, parts.n, parts.at, dim_money);
}

/* (1 + rate)^-years */
static node_id discount_factor(struct worth *x, double years)
{
    struct graph *g = x->f->graph;
    node_id base = graph_op2(g, OP_ADD, compile_const(&x->b, 1, dim_number, NULL), x->rate);
    return graph_op2(g, OP_POWER, base, compile_const(&x->b, -years, dim_number, NULL));
}

/* The year of the horizon in which a day lies, from 0; what is paid before is paid at its
 * start. By the calendar: the last day of a leap year lies in that year. */
static double year_of(const struct register_settings *s, day d)
{
    double year = date_year(d) - date_year(weigh_start(s));
    return fmax(weigh_years(s, d) < year ? year - 1 : year, 0);
}

/* The year in which an option's investment is paid; the horizon's end or later: not within
 * it. */
static double year_of_investment(const struct worth *x, const struct option *o)
{
    return o->invest->on == DAY_NONE ? 0 : year_of(x->f->base->settings, o->invest->on);
}

/* Appends the present values of an option's investment and running cost. */
static void add_cost(struct worth *x, const char *id, node_id *parts, size_t *n)
{
    struct graph *g = x->f->graph;
    const struct option *o = model_get(x->f->base, KIND_OPTION, id);
    const struct compiled *c = compiled_of(&x->b, id);
    figure_id invest = compiled_figure(x->f, c, PROPERTY_INVEST, NULL, NULL);
    figure_id running = compiled_figure(x->f, c, PROPERTY_RUNNING, NULL, NULL);
    if (invest != FIGURE_NONE && year_of_investment(x, o) < x->w->horizon) {
        double year = year_of_investment(x, o);
        node_id node = figure_at(x->f, invest)->node;
        parts[(*n)++] =
            year == 0 ? node : graph_op2(g, OP_MULTIPLY, node, discount_factor(x, year));
    }
    struct service s = service_of(x->f, id, x->w->horizon);
    if (running != FIGURE_NONE && s.from < s.to)
        parts[(*n)++] =
            graph_op2(g, OP_MULTIPLY, figure_at(x->f, running)->node, annuity(x, s.from, s.to));
}

/* Does it cost anything within the horizon? The options' own figures have values already. */
static bool costs_something(const struct worth *x, const struct alternative *alt)
{
    const struct figures *f = x->f;
    for (size_t i = 0; i < alt->n; i++) {
        const struct option *o = model_get(f->base, KIND_OPTION, alt->options[i]);
        const struct compiled *c = compiled_of(&x->b, alt->options[i]);
        figure_id invest = compiled_figure(f, c, PROPERTY_INVEST, NULL, NULL);
        figure_id running = compiled_figure(f, c, PROPERTY_RUNNING, NULL, NULL);
        struct service s = service_of(f, alt->options[i], x->w->horizon);
        if (invest != FIGURE_NONE && year_of_investment(x, o) < x->w->horizon &&
            figure_value(f, invest) != 0)
            return true;
        if (running != FIGURE_NONE && s.from < s.to && figure_value(f, running) != 0)
            return true;
    }
    return false;
}

static node_id present_cost(struct worth *x, const struct alternative *alt)
{
    node_id *parts = NEW_ARRAY(x->f->arena, 2 * alt->n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < alt->n; i++)
        add_cost(x, alt->options[i], parts, &n);
    return sum(x, n, parts, dim_money);
}

static void add_alternative(struct worth *x, struct alternative *alt, const struct stretches *s)
{
    struct graph *g = x->f->graph;
    struct building *b = &x->b;
    const struct alternative *nothing = &x->w->alternatives.at[0];
    node_id benefit = avoided_damage(x, s), cost = present_cost(x, alt), damage;
    if (alt->n == 0)
        damage = damage_now(x);
    else
        damage = graph_op2(g, OP_SUBTRACT, figure_at(x->f, nothing->present_damage)->node, benefit);
    node_id total = graph_op2(g, OP_ADD, damage, cost);
    alt->present_damage =
        compiled_add(b, PROPERTY_PRESENT_DAMAGE, alt->name, NULL, damage, NULL, NULL);
    alt->present_cost = compiled_add(b, PROPERTY_PRESENT_COST, alt->name, NULL, cost, NULL, NULL);
    alt->total = compiled_add(b, PROPERTY_TOTAL, alt->name, NULL, total, NULL, NULL);
    alt->net = alt->benefit = alt->ratio = FIGURE_NONE;
    if (alt->n == 0)
        return;
    node_id net = graph_op2(g, OP_SUBTRACT, benefit, cost);
    alt->benefit = compiled_add(b, PROPERTY_BENEFIT, alt->name, NULL, benefit, NULL, NULL);
    alt->net = compiled_add(b, PROPERTY_NET, alt->name, NULL, net, NULL, NULL);
    if (costs_something(x, alt))
        alt->ratio = compiled_add(b, PROPERTY_RATIO, alt->name, NULL,
                                  graph_op2(g, OP_RATIO, benefit, cost), NULL, NULL);
}

static void compile_worth(struct figures *f, struct weighing *w, const struct variant *base,
                          const struct stretches *stretches)
{
    struct worth x = {.f = f, .w = w};
    const struct compiled *settings = figures_settings(f);
    figure_id discount = compiled_figure(f, settings, PROPERTY_DISCOUNT, NULL, NULL);
    compiled_begin(f, base, model_find(f->base, w->id), w->id, &x.b);
    x.one_year = compile_const(&x.b, 1, dim_time, "1 a");
    x.rate = graph_op2(f->graph, OP_MULTIPLY, figure_at(f, discount)->node, x.one_year);
    for (size_t i = 0; i < w->alternatives.n; i++)
        add_alternative(&x, &w->alternatives.at[i], &stretches[i]);
    x.b.unit->exports = w;
    compiled_end(&x.b);
    w->unit = x.b.unit;
}

/* --- the whole --- */

static ohmen_status compile_options(struct figures *f, const struct decision *d, ohmen_error *e)
{
    for (size_t i = 0; i < d->options.n; i++) {
        const struct compiled *unused;
        ohmen_status status = compile_option(f, d->options.at[i], &unused, e);
        if (status != OHMEN_OK)
            return status;
    }
    return OHMEN_OK;
}

static bool is_left_out(const struct weighing *w, const char *name)
{
    for (size_t i = 0; i < w->left_out.n; i++)
        if (text_equal(w->left_out.at[i].options, name))
            return true;
    return false;
}

/* Larger sets fail with the pairs in them. */
static bool has_pair_left_out(struct figures *f, const struct weighing *w,
                              const struct alternative *x)
{
    for (size_t i = 0; i < x->n; i++)
        for (size_t k = 0; k < i; k++) {
            const char *pair[] = {x->options[k], x->options[i]};
            if (is_left_out(w, alternative_name(f->arena, 2, pair)))
                return true;
        }
    return false;
}

/* Makes the variants. Options that are right alone may leave the register wrong together,
 * such as two that add a row of the same clearance time: then they are no alternative. */
static ohmen_status find_variants(struct figures *f, struct weighing *w, ohmen_error *e)
{
    size_t kept = 0;
    for (size_t i = 0; i < w->alternatives.n; i++) {
        struct alternative x = w->alternatives.at[i];
        ohmen_error why = OHMEN_ERROR_INIT;
        if (has_pair_left_out(f, w, &x))
            continue;
        ohmen_status status = figures_variant(f, x.n, x.options, &x.variant, &why);
        if (status == OHMEN_OK)
            w->alternatives.at[kept++] = x;
        else if (status == OHMEN_COMPUTE && x.n > 1)
            *array_push(f->arena, &w->left_out) = (struct not_possible){
                x.name,
                arena_printf(f->arena, "together they leave the register wrong: %s", why.text)};
        else
            return error_set(e, status, "%s", why.text);
    }
    w->alternatives.n = kept;
    return OHMEN_OK;
}

static ohmen_status compile_all(struct figures *f, struct weighing *w, ohmen_error *e)
{
    const struct variant *base = w->alternatives.at[0].variant;
    struct stretches *stretches = NEW_ARRAY(f->arena, w->alternatives.n, struct stretches);
    ohmen_status status = compile_options(f, w->decision, e);
    for (size_t i = 0; status == OHMEN_OK && i < w->alternatives.n; i++)
        status = compile_alternative_hazards(f, w, &w->alternatives.at[i], &stretches[i], e);
    if (status != OHMEN_OK)
        return status;
    for (size_t i = 0; i < w->hazards.n; i++)
        w->hazards.at[i].now = w->alternatives.at[0].hazards[i];
    status = figures_evaluate(f, e);
    if (status == OHMEN_OK)
        compile_worth(f, w, base, stretches);
    return status;
}

static ohmen_status unknown_decision(struct figures *f, const char *id, ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, id);
    const struct objects *all = &f->base->of[KIND_DECISION];
    for (size_t i = 0; i < all->n; i++)
        nearest_offer(&near, all->at[i]->id);
    const char *best = nearest_take(&near);
    return error_set(e, OHMEN_UNKNOWN, "there is no decision \"%s\"%s%s%s", id,
                     best ? "; did you mean \"" : "", best ? best : "", best ? "\"?" : "");
}

ohmen_status weigh_compile(struct figures *f, const char *decision, struct weighing **out,
                           ohmen_error *e)
{
    const struct decision *d = model_get(f->base, KIND_DECISION, decision);
    const struct compiled *known = strmap_get(&f->compiled_by_key, decision);
    if (!d)
        return unknown_decision(f, decision, e);
    if (known) {
        *out = known->exports;
        return OHMEN_OK;
    }
    if (d->choose.n)
        return error_set(
            e, OHMEN_COMPUTE,
            "\"%s\" is a decision tree, which this version stores but does not evaluate", decision);
    struct weighing *w = NEW(f->arena, struct weighing);
    w->id = model_find(f->base, decision)->id;
    w->decision = d;
    w->horizon = expr_constant(f->base->settings->horizon->expr);
    alternatives_find(f, &d->options, w);
    ohmen_status status = find_variants(f, w, e);
    if (status != OHMEN_OK)
        return status;
    find_hazards(f, w);
    find_new_hazards(f, w);
    status = compile_all(f, w, e);
    if (status == OHMEN_OK)
        *out = w;
    return status;
}

static double net_of(const struct figures *f, const struct alternative *x)
{
    return x->net == FIGURE_NONE ? 0 : figure_value(f, x->net);
}

/* Is alternative i better than k? */
static bool is_better(struct figures *f, const struct weighing *w, size_t i, size_t k)
{
    double p = net_of(f, &w->alternatives.at[i]), q = net_of(f, &w->alternatives.at[k]);
    if (p != q)
        return p > q;
    return text_compare(w->alternatives.at[i].name, w->alternatives.at[k].name) < 0;
}

void weigh_rank(struct figures *f, struct weighing *w)
{
    w->order = NEW_ARRAY(f->arena, w->alternatives.n, size_t);
    for (size_t i = 0; i < w->alternatives.n; i++) {
        size_t k = i;
        for (; k > 0 && is_better(f, w, i, w->order[k - 1]); k--)
            w->order[k] = w->order[k - 1];
        w->order[k] = i;
    }
    for (size_t i = 0; i < w->alternatives.n; i++)
        w->alternatives.at[w->order[i]].rank = i + 1;
}

ohmen_status weigh_find(struct figures *f, const char *name, figure_id *out, ohmen_error *e)
{
    const char *dot = strchr(name, '.');
    const char *id = dot ? arena_strn(f->arena, name, (size_t)(dot - name)) : name;
    const struct object *o = model_find(f->base, id);
    const struct compiled *c = NULL;
    struct weighing *w;
    ohmen_status status = OHMEN_OK;
    if (o && o->kind == KIND_DECISION) {
        status = weigh_compile(f, id, &w, e);
        c = status == OHMEN_OK ? w->unit : NULL;
    } else if (o && o->kind == KIND_OPTION) {
        status = compile_option(f, o->id, &c, e);
    } else {
        return figures_find(f, name, out, e);
    }
    return status == OHMEN_OK ? compiled_find(f, c, dot ? dot + 1 : "", out, e) : status;
}
