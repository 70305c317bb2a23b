/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The years of an alternative as figures: a part of its decision, made when somebody asks. Owns
 * nothing beyond the arena of the figures. */
#include "decide/flow.h"

#include <math.h>
#include <string.h>

#include "decide/avoided.h"
#include "decide/cost.h"
#include "figure/horizon.h"

static const struct measure damage = {.property = PROPERTY_RISK};

struct flowing {
    struct worth discounted, plain; /* the same section; plain: without interest */
    const struct alternative *of;
    const struct stretches *stretches;
    struct flow *out;
    node_id cumulated; /* so far; NODE_NONE: before the first year */
};

static struct measure damage_measure(void)
{
    struct measure m = damage;
    m.dim = dim_money_rate;
    m.sum = dim_money;
    return m;
}

/* What lies in one year of the stretches. */
static struct stretches in_year(struct flowing *x, size_t year)
{
    struct stretches in = {0};
    for (size_t i = 0; i < x->stretches->n; i++) {
        struct stretch s = x->stretches->at[i];
        s.from = fmax(s.from, (double)year);
        s.to = fmin(s.to, (double)year + 1);
        if (s.from < s.to)
            *array_push(x->plain.f->arena, &in) = s;
    }
    return in;
}

struct parts ARRAY_BODY(node_id);

static node_id running_in(struct worth *x, const struct alternative *of, size_t year)
{
    struct parts parts = {0};
    for (size_t i = 0; i < of->n; i++) {
        node_id n = cost_running(&x->money, of->options[i], (double)year, (double)year + 1);
        if (n != NODE_NONE)
            *array_push(x->f->arena, &parts) = n;
    }
    return money_sum(&x->money, parts.n, parts.at);
}

/* What is paid at the end of the horizon belongs to its last year. */
static node_id invested_in(struct worth *x, const struct alternative *of, size_t year)
{
    struct parts parts = {0};
    for (size_t i = 0; i < of->n; i++) {
        struct payments once = cost_once(&x->money, of->options[i]);
        for (size_t k = 0; k < once.n; k++)
            if (fmin(once.at[k].year, x->w->horizon - 1) == (double)year)
                *array_push(x->f->arena, &parts) = cost_paid(&x->money, &once.at[k]);
    }
    return money_sum(&x->money, parts.n, parts.at);
}

static node_id cumulate(struct flowing *x, const struct stretches *s, size_t year)
{
    struct graph *g = x->plain.f->graph;
    struct measure m = damage_measure();
    node_id avoided = measure_avoided(&x->discounted, &m, s);
    node_id paid = graph_op2(g, OP_ADD, invested_in(&x->discounted, x->of, year),
                             running_in(&x->discounted, x->of, year));
    node_id net = graph_op2(g, OP_SUBTRACT, avoided, paid);
    return x->cumulated == NODE_NONE ? net : graph_op2(g, OP_ADD, x->cumulated, net);
}

static figure_id add(struct flowing *x, enum property p, const char *label, node_id n)
{
    return compiled_add(&x->plain.b, p, x->of->name, label, n, NULL, NULL);
}

static void add_year(struct flowing *x, size_t year)
{
    struct figures *f = x->plain.f;
    struct flow_year *y = &x->out->years[year];
    struct stretches s = in_year(x, year);
    struct measure m = damage_measure();
    y->label = horizon_label(f->arena, f->base->settings, (uint32_t)year);
    y->avoided = add(x, PROPERTY_AVOIDED, y->label, measure_avoided(&x->plain, &m, &s));
    y->invested = add(x, PROPERTY_INVESTED, y->label, invested_in(&x->plain, x->of, year));
    y->running = add(x, PROPERTY_RUNNING, y->label, running_in(&x->plain, x->of, year));
    x->cumulated = cumulate(x, &s, year);
    y->cumulated = add(x, PROPERTY_CUMULATED, y->label, x->cumulated);
}

static const char *part_name(const struct figures *f, const struct alternative *x)
{
    return arena_printf(f->arena, "flow of %s", x->name);
}

static void compile_years(struct figures *f, struct weighing *w, const struct alternative *of,
                          const struct stretches *s)
{
    struct flowing x = {.of = of, .stretches = s, .cumulated = NODE_NONE};
    x.out = NEW(f->arena, struct flow);
    *x.out = (struct flow){of, (size_t)w->horizon,
                           NEW_ARRAY(f->arena, (size_t)w->horizon, struct flow_year)};
    x.plain = (struct worth){.f = f, .w = w};
    compiled_begin_part(f, w->unit->variant, w->unit->object, w->id, part_name(f, of), &x.plain.b);
    x.discounted = x.plain;
    money_begin(&x.plain.money, f, &x.plain.b, w->horizon);
    x.discounted.money = x.plain.money;
    x.plain.money.rate = compile_const(&x.plain.b, 0, dim_number, NULL);
    for (size_t y = 0; y < x.out->n; y++)
        add_year(&x, y);
    x.plain.b.unit->exports = x.out;
    x.plain.b.unit->also = w->unit->also;
    ((struct compiled *)w->unit)->also = x.plain.b.unit;
    compiled_end(&x.plain.b);
}

ohmen_status flow_compile(struct figures *f, struct weighing *w, const struct alternative *x,
                          const struct flow **out, ohmen_error *e)
{
    struct building under = {.figures = f, .variant = w->unit->variant};
    const struct compiled *known = compiled_part(&under, w->id, part_name(f, x));
    if (!known) {
        struct stretches s = {0};
        ohmen_status status = timeline_cut(f, x, w->horizon, &s, e);
        if (status != OHMEN_OK)
            return status;
        compile_years(f, w, x, &s);
        known = compiled_part(&under, w->id, part_name(f, x));
    }
    *out = known->exports;
    return OHMEN_OK;
}

size_t flow_payback(const struct figures *f, const struct flow *x)
{
    size_t first = x->n;
    while (first > 0 && figure_value(f, x->years[first - 1].cumulated) >= 0)
        first--;
    return first;
}

const struct alternative *flow_alternative(const struct figures *f, const struct weighing *w,
                                           const char *rest)
{
    static const enum property of_years[] = {PROPERTY_AVOIDED, PROPERTY_INVESTED, PROPERTY_RUNNING,
                                             PROPERTY_CUMULATED};
    const char *dot = strchr(rest, '.'), *last = strrchr(rest, '.');
    bool is_one = false;
    for (size_t i = 0; dot && i < sizeof of_years / sizeof *of_years; i++)
        is_one = is_one || text_equal(arena_strn(f->arena, rest, (size_t)(dot - rest)),
                                      properties[of_years[i]].word);
    if (!is_one || last == dot)
        return NULL;
    const char *name = arena_strn(f->arena, dot + 1, (size_t)(last - dot - 1));
    for (size_t i = 1; i < w->alternatives.n; i++)
        if (text_equal(w->alternatives.at[i].name, name))
            return &w->alternatives.at[i];
    return NULL;
}
