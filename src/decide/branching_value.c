/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What happens on branches as nodes, and rolling back as numbers: amounts of cost and damage,
 * values, the policy, and how probable it is to come to each point. */
#include "decide/branching_parts.h"

#include <math.h>

#include "figure/service.h"

/* --- along a branch, from its end to its beginning --- */

static struct graph *graph_in(const struct rolling *r)
{
    return r->worth.f->graph;
}

static node_id plus(const struct rolling *r, node_id x, node_id y)
{
    if (x == NODE_NONE || y == NODE_NONE)
        return x == NODE_NONE ? y : x;
    return graph_op2(graph_in(r), OP_ADD, x, y);
}

node_id branching_stated(struct rolling *r, const struct quantity *q)
{
    struct figures *f = r->worth.f;
    const char *key = arena_printf(f->arena, "%p", (const void *)q);
    node_id *known = strmap_get(&r->stated, key);
    if (!known) {
        known = NEW(f->arena, node_id);
        *known = compile_quantity(&r->worth.b, q);
        strmap_set(f->arena, &r->stated, key, known);
    }
    return *known;
}

/* Times closer than this are one, in years. */
static const double SAME_INSTANT = 1e-9;

static node_id payment(struct rolling *r, const struct move *m)
{
    struct payment p = {floor(m->at + SAME_INSTANT), branching_stated(r, m->paid)};
    return cost_paid(&r->worth.money, &p);
}

static node_id sum_of(struct rolling *r, size_t n, const node_id *nodes)
{
    return n ? money_sum(&r->worth.money, n, nodes) : NODE_NONE;
}

/* What an option costs that is applied for the first time. */
static node_id cost_first(struct rolling *r, const struct move *m)
{
    const struct money *money = &r->worth.money;
    struct payments once = cost_once_later(money, m->what, m->at);
    node_id *parts = NEW_ARRAY(r->worth.f->arena, once.n + 1, node_id);
    size_t n = 0;
    for (size_t i = 0; i < once.n; i++)
        parts[n++] = cost_paid(money, &once.at[i]);
    node_id running = cost_running_later(money, m->what, m->at, 0, money->horizon);
    if (running != NODE_NONE)
        parts[n++] = running;
    return sum_of(r, n, parts);
}

/* Applied again: paid again; it runs on beyond the end of what it replaces, and only the new one is
 * worth something at the end of the horizon. */
static node_id cost_again(struct rolling *r, const struct move *m)
{
    const struct money *money = &r->worth.money;
    struct graph *g = graph_in(r);
    struct payments now = cost_once_later(money, m->what, m->at);
    struct payments before = cost_once_later(money, m->what, m->before);
    struct life old = life_later(r->worth.f, m->what, m->before);
    node_id *parts = NEW_ARRAY(r->worth.f->arena, now.n + before.n + 1, node_id);
    size_t n = 0;
    for (size_t i = 0; i < now.n; i++)
        parts[n++] = cost_paid(money, &now.at[i]);
    for (size_t i = 0; i < before.n; i++)
        if (before.at[i].year >= money->horizon)
            parts[n++] = graph_op1(g, OP_NEGATE, cost_paid(money, &before.at[i]));
    node_id running =
        cost_running_later(money, m->what, m->at, fmax(life_end(&old), 0), money->horizon);
    if (running != NODE_NONE)
        parts[n++] = running;
    return sum_of(r, n, parts);
}

static struct measured *measured_of(struct rolling *r, const struct measure *of)
{
    for (size_t i = 0; i < r->measured.n; i++)
        if (r->measured.at[i].of.property == of->property &&
            text_equal(r->measured.at[i].of.of ? r->measured.at[i].of.of : "",
                       of->of ? of->of : ""))
            return &r->measured.at[i];
    struct measured *x = array_push(r->worth.f->arena, &r->measured);
    *x = (struct measured){*of, NEW_ARRAY(r->worth.f->arena, r->b->n_spans, node_id *)};
    return x;
}

/* A measure in each hidden state of a world, while it is the case. */
static const node_id *measured_in(struct rolling *r, const struct move *m, const struct measure *of)
{
    struct measured *x = measured_of(r, of);
    size_t n = r->b->worlds.hidden.n;
    if (!x->in_span[m->span]) {
        node_id *nodes = NEW_ARRAY(r->worth.f->arena, n, node_id);
        for (size_t k = 0; k < n; k++)
            nodes[k] = world_measure(&r->worth, &r->b->worlds, m->world, k, of, m->at, m->to);
        x->in_span[m->span] = nodes;
    }
    return x->in_span[m->span];
}

/* The sum over states of a share times what is there. */
static node_id mixed(struct rolling *r, const node_id *shares, const node_id *amounts)
{
    size_t n = r->b->worlds.hidden.n, k = 0;
    node_id *terms = NEW_ARRAY(r->worth.f->arena, n, node_id);
    for (size_t i = 0; i < n; i++)
        if (amounts[i] != NODE_NONE)
            terms[k++] = graph_op2(graph_in(r), OP_MULTIPLY, shares[i], amounts[i]);
    if (k == 0)
        return NODE_NONE;
    return k == 1 ? terms[0] : graph_op(graph_in(r), OP_SUM, k, terms);
}

/* Which hidden states are possible behind a move, of those that are before it. */
static bool *possible_behind(struct rolling *r, const struct move *m, const bool *before)
{
    size_t n = r->b->worlds.hidden.n;
    bool *after = NEW_ARRAY(r->worth.f->arena, n, bool);
    const struct passage *p = NULL;
    if (m->kind == MOVE_TIME && m->world->flows.n)
        p = world_passage_known(m->world, m->to - m->at);
    for (size_t k = 0; k < n; k++) {
        if (!before[k])
            continue;
        for (size_t i = 0; p && i < n; i++)
            after[i] = after[i] || p->p[k * n + i] > 0;
        if (!p)
            after[m->kind == MOVE_RESET ? m->map[k] : k] = true;
    }
    return after;
}

static void back_over_time(struct rolling *r, const struct move *m, const struct measure *of,
                           const bool *possible, struct by_state *x)
{
    size_t n = r->b->worlds.hidden.n;
    node_id *before = NEW_ARRAY(r->worth.f->arena, n, node_id);
    const struct passage *p =
        m->world->flows.n ? world_passage_known(m->world, m->to - m->at) : NULL;
    const node_id *inside = of ? measured_in(r, m, of) : NULL;
    for (size_t k = 0; k < n; k++) {
        before[k] = NODE_NONE;
        if (!possible[k])
            continue;
        node_id then = p ? mixed(r, &p->to[k * n], x->at) : x->at[k];
        node_id now = !inside ? NODE_NONE : p ? mixed(r, &p->time[k * n], inside) : inside[k];
        before[k] = plus(r, now, then);
    }
    x->at = before;
}

static void back_over(struct rolling *r, const struct move *m, const struct measure *of,
                      const bool *possible, struct by_state *x)
{
    size_t n = r->b->worlds.hidden.n;
    node_id *before = NEW_ARRAY(r->worth.f->arena, n, node_id);
    node_id paid = NODE_NONE;
    if (m->kind == MOVE_TIME) {
        back_over_time(r, m, of, possible, x);
        return;
    }
    if (m->kind == MOVE_PAY && !of)
        paid = payment(r, m);
    if (m->kind == MOVE_APPLY && !of)
        paid = m->before < 0 ? cost_first(r, m) : cost_again(r, m);
    for (size_t k = 0; k < n; k++)
        before[k] = !possible[k]            ? NODE_NONE
                    : m->kind == MOVE_RESET ? x->at[m->map[k]]
                                            : plus(r, paid, x->at[k]);
    x->at = before;
}

static const char *measure_words(const struct rolling *r, const struct measure *m)
{
    if (!m)
        return "cost";
    switch (m->property) {
    case PROPERTY_BORNE: return arena_printf(r->worth.f->arena, "damage to %s", m->of);
    case PROPERTY_FATALITIES: return arena_printf(r->worth.f->arena, "deaths of %s", m->of);
    case PROPERTY_CUSTOMER_TIME: return "customer time";
    default: return "damage";
    }
}

void branching_tell(struct rolling *r, const char *path, const struct measure *m, double at,
                    const struct by_state *x)
{
    const struct hidden *h = &r->b->worlds.hidden;
    struct arena *a = r->worth.f->arena;
    for (size_t k = 0; r->told && h->n > 1 && k < h->n; k++) {
        if (x->at[k] == NODE_NONE)
            continue;
        const char *what = arena_printf(a, "%s, %s", measure_words(r, m), h->names[k]);
        if (at >= 0)
            what = arena_printf(a, "%s at %.6g a", what, at);
        const char *name = arena_printf(a, "%s.%s", path, what);
        if (strmap_has(r->told, name))
            continue;
        strmap_set(a, r->told, name, NULL);
        compiled_add(&r->worth.b, PROPERTY_TO_COME, path, what, x->at[k], NULL, NULL);
    }
}

struct by_state branching_back(struct rolling *r, const struct way *b, const struct measure *m,
                               const struct by_state *end)
{
    size_t n = r->b->worlds.hidden.n;
    struct by_state x = {NEW_ARRAY(r->worth.f->arena, n, node_id)};
    for (size_t k = 0; k < n; k++)
        x.at[k] = end ? end->at[k] : NODE_NONE;
    const bool **possible = NEW_ARRAY(r->worth.f->arena, b->moves.n + 1, const bool *);
    bool *first = NEW_ARRAY(r->worth.f->arena, n, bool);
    for (size_t k = 0; k < n; k++)
        first[k] = b->belief[k] > 0;
    possible[0] = first;
    for (size_t i = 0; i < b->moves.n; i++)
        possible[i + 1] = possible_behind(r, &b->moves.at[i], possible[i]);
    for (size_t i = b->moves.n; i > 0; i--) {
        const struct move *over = &b->moves.at[i - 1];
        back_over(r, over, m, possible[i - 1], &x);
        if (over->kind == MOVE_TIME && over->world->flows.n)
            branching_tell(r, b->path, m, over->at, &x);
    }
    return x;
}

/* --- amounts --- */

static double value_of(const struct figures *f, node_id n)
{
    return n == NODE_NONE ? 0 : means_value(f->means, n);
}

/* Cost and damage on a branch, in each hidden state at its beginning. */
static void compile_amounts(struct rolling *r, struct way *b, const struct measure *m)
{
    size_t n = r->b->worlds.hidden.n;
    node_id *amounts = NEW_ARRAY(r->worth.f->arena, n, node_id);
    struct by_state cost = branching_back(r, b, NULL, NULL);
    struct by_state damage = branching_back(r, b, m, NULL);
    for (size_t k = 0; k < n; k++)
        amounts[k] = plus(r, cost.at[k], damage.at[k]);
    b->amounts = amounts;
    b->costs = cost.at;
}

static void take_amount(const struct figures *f, struct way *b, size_t n)
{
    b->amount = b->cost = 0;
    for (size_t k = 0; k < n; k++) {
        if (!(b->belief[k] > 0))
            continue;
        b->amount += b->belief[k] * value_of(f, b->amounts[k]);
        b->cost += b->belief[k] * value_of(f, b->costs[k]);
    }
}

size_t branching_count(const struct branching *b)
{
    size_t n = 0;
    for (size_t i = 0; i < b->points.n; i++)
        n += b->points.at[i].n;
    return n;
}

static ohmen_status find_amounts(struct rolling *r, ohmen_error *e)
{
    struct branching *b = r->b;
    struct figures *f = r->worth.f;
    const struct measure m = {PROPERTY_RISK, NULL, dim_money_rate, dim_money};
    size_t n = b->worlds.hidden.n;
    compiled_begin_part(f, b->weighing->alternatives.at[0].variant,
                        model_find(f->base, b->weighing->id), b->weighing->id, "amounts",
                        &r->worth.b);
    money_begin(&r->worth.money, f, &r->worth.b, b->weighing->horizon);
    for (size_t i = 0; i < b->points.n; i++)
        for (size_t k = 0; k < b->points.at[i].n; k++)
            compile_amounts(r, &b->points.at[i].branches[k], &m);
    compile_amounts(r, b->nothing, &m);
    compiled_end(&r->worth.b);
    ohmen_status status = figures_evaluate(f, e);
    if (status != OHMEN_OK)
        return status;
    for (size_t i = 0; i < b->points.n; i++)
        for (size_t k = 0; k < b->points.at[i].n; k++)
            take_amount(f, &b->points.at[i].branches[k], n);
    take_amount(f, b->nothing, n);
    return OHMEN_OK;
}

/* --- rolling back --- */

/* Rolled back is what is worth: cost and damage are negative. */
static void add_point(const struct branching *b, struct rollback_builder *to, struct arena *a,
                      size_t i, size_t first)
{
    const struct point *p = &b->points.at[i];
    size_t *child = NEW_ARRAY(a, p->n, size_t);
    double *probability = NEW_ARRAY(a, p->n, double);
    bool chance = p->kind != POINT_CHOOSE && p->kind != POINT_END;
    for (size_t k = 0; k < p->n; k++) {
        child[k] = first + k;
        probability[k] = p->branches[k].probability;
    }
    enum rollback_kind kind = p->kind == POINT_END      ? ROLLBACK_END
                              : p->kind == POINT_CHOOSE ? ROLLBACK_CHOOSE
                                                        : ROLLBACK_CHANCE;
    rollback_add(to, kind, 0, (uint32_t)p->n, child, chance ? probability : NULL);
}

static void lay_out(struct branching *b, struct arena *a)
{
    struct rollback_builder *to = rollback_new(a);
    size_t first = b->points.n;
    for (size_t i = 0; i < b->points.n; i++) {
        b->points.at[i].first_branch = first - b->points.n;
        for (size_t k = 0; k < b->points.at[i].n; k++)
            b->points.at[i].branches[k].number = first - b->points.n + k;
        add_point(b, to, a, i, first);
        first += b->points.at[i].n;
    }
    for (size_t i = 0; i < b->points.n; i++)
        for (size_t k = 0; k < b->points.at[i].n; k++) {
            const struct way *x = &b->points.at[i].branches[k];
            rollback_add(to, ROLLBACK_STEP, -x->amount, 1, &x->to, NULL);
        }
    b->nothing->number = first - b->points.n;
    b->laid_out = rollback_lay_out(to, 0, &first);
}

size_t branching_number(const struct branching *b, size_t point, size_t branch)
{
    return b->points.n + b->points.at[point].first_branch + branch;
}

static void read_results(struct branching *b, const double *value, const uint32_t *chosen,
                         const double *reach)
{
    const size_t *place = b->laid_out->place;
    size_t at = b->points.n;
    for (size_t i = 0; i < b->points.n; i++) {
        struct point *p = &b->points.at[i];
        bool reached = place[i] != ROLLBACK_NOWHERE; /* the end of doing nothing may not be */
        p->value = reached ? 0 - value[place[i]] : 0;
        p->reach = reached ? reach[place[i]] : 0;
        p->best = reached && p->kind == POINT_CHOOSE ? chosen[place[i]] : 0;
        for (size_t k = 0; k < p->n; k++, at++) {
            struct way *x = &p->branches[k];
            x->value = place[at] == ROLLBACK_NOWHERE ? 0 : 0 - value[place[at]];
            x->reach = p->reach * (p->kind != POINT_CHOOSE ? x->probability : p->best == k);
        }
    }
}

/* What is paid from the beginning of each branch on: points come behind all that they lead to. */
static void add_up_costs(struct branching *b, struct arena *a)
{
    double *paid = NEW_ARRAY(a, b->points.n, double);
    for (size_t i = 0; i < b->points.n; i++) {
        struct point *p = &b->points.at[b->order[i]];
        double *sum = &paid[b->order[i]];
        for (size_t k = 0; k < p->n; k++) {
            struct way *x = &p->branches[k];
            x->whole_cost = x->cost + paid[x->to];
            *sum += p->kind != POINT_CHOOSE ? x->probability * x->whole_cost
                    : p->best == k          ? x->whole_cost
                                            : 0;
        }
        p->whole_cost = *sum;
    }
}

ohmen_status branching_roll_back(struct branching *b, struct figures *f, ohmen_error *e)
{
    struct rolling r = {.b = b};
    r.worth = (struct worth){.f = f, .w = b->weighing};
    ohmen_status status = find_amounts(&r, e);
    if (status != OHMEN_OK)
        return status;
    lay_out(b, f->arena);
    double *value = NEW_ARRAY(f->arena, b->laid_out->n, double);
    double *reach = NEW_ARRAY(f->arena, b->laid_out->n, double);
    uint32_t *chosen = NEW_ARRAY(f->arena, b->laid_out->n, uint32_t);
    rollback_values(b->laid_out, isa_best(), value);
    rollback_policy(b->laid_out, isa_best(), value, chosen);
    rollback_reach(b->laid_out, chosen, reach);
    read_results(b, value, chosen, reach);
    add_up_costs(b, f->arena);
    b->nothing->value = b->nothing->amount;
    return OHMEN_OK;
}
