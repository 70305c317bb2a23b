/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Common causes: what elements fail of together, and what remains of each by itself.
 *
 * A group of m elements has one shock for each set S of k >= 2 of them. Its rate of undetected
 * failures is share(k, m) times the geometric mean of the members' rates, but at most the least of
 * them; likewise for detected failures (with beta-detected) and for failures on demand. What
 * remains of an element is its rate less the shocks that hit it.
 *
 * share(k, m) with beta: such that the failures of "M of m" that the shocks make are those of IEC
 * 61508-6:2010, table D.5 (from memory): with F(j) the factor of the system that fails when j or
 * more of m fail (j = m: the least), share(m, m) = F(m) beta and
 * share(j, m) = (F(j) - F(j + 1)) beta / C(m, j).
 * With alpha factors (NUREG/CR-5485, 1998, section 5; from memory): alpha_k / C(m-1, k-1) where
 * tests are staggered, else k alpha_k / (alpha_t C(m-1, k-1)), alpha_t = sum of k alpha_k.
 *
 * The test that finds a shock is that of `found-by`, else that of the member with the shortest
 * interval (the first by id among equals); with `settings` and without `found-by` no test finds
 * it. Demands reveal it as they reveal that member. A detected shock is repaired as slowly as the
 * slowest member; where the plant is out of service while a member is repaired, it is no failure
 * to operate. */
#include <math.h>
#include <string.h>

#include "figure/horizon.h"
#include "figure/span.h"

/* --- which groups --- */

static bool has_member(const struct object *group, const char *element)
{
    const struct common_cause *x = group->data;
    for (size_t i = 0; i < x->of.n; i++)
        if (text_equal(x->of.at[i], element))
            return true;
    return false;
}

static void add_sorted(struct arena *a, struct groups *out, const struct object *group)
{
    *array_push(a, out) = group;
    for (size_t i = out->n - 1; i > 0 && text_compare(out->at[i - 1]->id, group->id) > 0; i--) {
        out->at[i] = out->at[i - 1];
        out->at[i - 1] = group;
    }
}

/* Element -> the base groups that it is a member of, made once. */
static const struct groups *base_groups(struct figures *f, const char *element)
{
    const struct objects *all = &f->base->of[KIND_COMMON_CAUSE];
    for (; f->n_indexed < all->n; f->n_indexed++) {
        const struct object *o = all->at[f->n_indexed];
        const struct common_cause *x = o->data;
        for (size_t i = 0; i < x->of.n; i++) {
            struct groups *g = strmap_get(&f->groups, x->of.at[i]);
            if (!g) {
                g = NEW(f->arena, struct groups);
                strmap_set(f->arena, &f->groups, x->of.at[i], g);
            }
            *array_push(f->arena, g) = o;
        }
    }
    return strmap_get(&f->groups, element);
}

void groups_of(struct figures *f, const struct model *m, const char *element, struct groups *out)
{
    const struct groups *base = base_groups(f, element);
    for (size_t i = 0; base && i < base->n; i++)
        if (model_find(m, base->at[i]->id) == base->at[i])
            add_sorted(f->arena, out, base->at[i]);
    for (const struct model *at = m; at->below; at = at->below)
        for (size_t i = 0; i < at->by_id.n; i++) {
            const struct object *o = at->by_id.at[i].value;
            if (o && o->kind == KIND_COMMON_CAUSE && model_find(m, o->id) == o &&
                has_member(o, element))
                add_sorted(f->arena, out, o);
        }
}

/* --- shares --- */

/* IEC 61508-6:2010, table D.5: factors on beta by number of elements m and of those that must
 * fail, from 2 to m. */
static const double beta_factors[COMMON_CAUSE_BETA + 1][COMMON_CAUSE_BETA + 1] = {
    [2] = {[2] = 1},
    [3] = {[2] = 1.5, [3] = 0.5},
    [4] = {[2] = 1.75, [3] = 0.6, [4] = 0.3},
    [5] = {[2] = 2, [3] = 0.8, [4] = 0.4, [5] = 0.2},
};

static double choose(size_t n, size_t k)
{
    double x = 1;
    for (size_t i = 1; i <= k; i++)
        x = x * (double)(n - k + i) / (double)i;
    return round(x);
}

/* The share of one set of k among m, as a multiple of beta. */
static double beta_share(size_t k, size_t m)
{
    double next = k < m ? beta_factors[m][k + 1] : 0;
    return (beta_factors[m][k] - next) / choose(m, k);
}

static double alpha_share(const struct common_cause *x, size_t k)
{
    const struct quantity *const *factors = x->factors.at;
    double total = 0, alpha = expr_constant(factors[k - 1]->expr);
    for (size_t i = 0; i < x->factors.n; i++)
        total += (double)(i + 1) * expr_constant(factors[i]->expr);
    double sets = choose(x->of.n - 1, k - 1);
    return x->staggered ? alpha / sets : (double)k * alpha / (total * sets);
}

/* --- one group under construction --- */

struct group_building {
    struct building *b;
    const struct object *object;
    const struct common_cause *x;
    const struct element_exports **members; /* by x->of */
    const struct element_exports *finder;   /* or NULL */
    const struct element *finder_data;
    node_id beta, beta_detected; /* NODE_NONE with alpha factors */
};

/* The share of a set of k as a node. */
static node_id share_node(struct group_building *g, size_t k, node_id beta)
{
    struct graph *graph = g->b->figures->graph;
    if (beta == NODE_NONE)
        return compile_const(g->b, alpha_share(g->x, k), dim_number, NULL);
    double share = beta_share(k, g->x->of.n);
    if (share == 1)
        return beta;
    return graph_op2(graph, OP_MULTIPLY, compile_const(g->b, share, dim_number, NULL), beta);
}

/* The geometric mean; itself where all are one node. */
static node_id geometric_mean(struct building *b, size_t n, const node_id *x)
{
    struct graph *g = b->figures->graph;
    bool same = true;
    for (size_t i = 1; i < n; i++)
        same = same && x[i] == x[0];
    if (same)
        return x[0];
    if (n == 2)
        return graph_op1(g, OP_SQRT, graph_op2(g, OP_MULTIPLY, x[0], x[1]));
    node_id unit = compile_const(b, 1, graph_dim(g, x[0]), NULL);
    node_id product = graph_op2(g, OP_DIVIDE, x[0], unit);
    for (size_t i = 1; i < n; i++)
        product = graph_op2(g, OP_MULTIPLY, product, graph_op2(g, OP_DIVIDE, x[i], unit));
    node_id root =
        graph_op2(g, OP_POWER, product, compile_const(b, 1.0 / (double)n, dim_number, NULL));
    return graph_op2(g, OP_MULTIPLY, root, unit);
}

/* share times the geometric mean, at most the least; NODE_NONE where one member has none. */
static node_id shock_part(struct group_building *g, size_t n, const node_id *x, node_id share)
{
    struct graph *graph = g->b->figures->graph;
    for (size_t i = 0; i < n; i++)
        if (x[i] == NODE_NONE)
            return NODE_NONE;
    node_id mean = geometric_mean(g->b, n, x);
    node_id part = graph_op2(graph, OP_MULTIPLY, share, mean);
    if (mean == x[0])
        return part;
    node_id *args = NEW_ARRAY(g->b->figures->arena, n + 1, node_id);
    args[0] = part;
    for (size_t i = 0; i < n; i++)
        args[i + 1] = x[i];
    return graph_op(graph, OP_MIN, n + 1, args);
}

enum part { ON_DEMAND, UNDETECTED, DETECTED, PARTS };

static node_id part_of(const struct element_exports *x, enum part p)
{
    if (p == DETECTED && x->repair == NODE_NONE)
        return NODE_NONE;
    return p == ON_DEMAND ? x->on_demand : p == UNDETECTED ? x->undetected : x->detected;
}

static node_id slowest_repair(struct group_building *g, size_t n, const size_t *set)
{
    struct figures *f = g->b->figures;
    node_id *args = NEW_ARRAY(f->arena, n, node_id);
    bool same = true;
    for (size_t i = 0; i < n; i++) {
        args[i] = g->members[set[i]]->repair;
        same = same && args[i] == args[0];
    }
    return same ? args[0] : graph_op(f->graph, OP_MAX, n, args);
}

/* A repair for which the plant is out of service is no failure to operate. */
static bool out_while_repaired(const struct group_building *g, size_t n, const size_t *set)
{
    for (size_t i = 0; i < n; i++) {
        const char *id = g->x->of.at[set[i]];
        const struct element *x = model_get(g->b->variant->model, KIND_ELEMENT, id);
        if (x->out_while_repaired)
            return true;
    }
    return false;
}

static const char *joined(struct arena *a, const struct names *of, size_t n, const size_t *set)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < n; i++)
        text_printf(&t, "%s%s", i ? "." : "", of->at[set[i]]);
    return text_str(&t);
}

/* When the shock is found: as the failures of the finder. */
static void set_found(const struct group_building *g, struct making *k)
{
    const struct element_exports *x = g->finder;
    if (!x)
        return;
    k->finds = x->finds;
    k->revealed = x->revealed;
    k->tested = x->tested;
    element_instants(g->b, g->finder_data, k);
    if (g->x->settings && !g->x->found_by && k->tested) {
        k->tested = false;
        k->finds = NODE_NONE;
        k->when.first = INFINITY;
        k->when.every = 0;
    }
}

static node_id in_repair(struct building *b, node_id detected, node_id repair, const char *q)
{
    node_id n = graph_op2(b->figures->graph, OP_MULTIPLY, detected, repair);
    compiled_add(b, PROPERTY_IN_REPAIR, q, NULL, n, NULL, NULL);
    return n;
}

static bool compile_shock(struct group_building *g, size_t n, const size_t *set, struct shock *out)
{
    struct figures *f = g->b->figures;
    node_id parts[PARTS], x[COMMON_CAUSE_MOST];
    bool any = false;
    for (enum part p = 0; p < PARTS; p++) {
        for (size_t i = 0; i < n; i++)
            x[i] = part_of(g->members[set[i]], p);
        node_id beta = p == DETECTED ? g->beta_detected : g->beta;
        bool known = g->x->factors.n > 0 || beta != NODE_NONE;
        parts[p] = known ? shock_part(g, n, x, share_node(g, n, beta)) : NODE_NONE;
        any = any || parts[p] != NODE_NONE;
    }
    if (!any)
        return false;
    const char **members = NEW_ARRAY(f->arena, n, const char *);
    for (size_t i = 0; i < n; i++)
        members[i] = g->x->of.at[set[i]];
    const char *q = joined(f->arena, &g->x->of, n, set);
    *out = (struct shock){.name = arena_printf(f->arena, "%s.%s", g->object->id, q),
                          .n = n,
                          .members = members,
                          .detected = parts[DETECTED],
                          .in_repair = NODE_NONE};
    struct making k = {.undetected = parts[UNDETECTED],
                       .finds = NODE_NONE,
                       .revealed = NODE_NONE,
                       .left = NODE_NONE,
                       .q1 = q,
                       .when = {.first = INFINITY, .fresh = true}};
    static const enum property names[] = {PROPERTY_ON_DEMAND, PROPERTY_UNDETECTED,
                                          PROPERTY_DETECTED};
    for (enum part p = 0; p < PARTS; p++)
        if (parts[p] != NODE_NONE)
            compiled_add(g->b, names[p], q, NULL, parts[p], NULL, NULL);
    if (parts[ON_DEMAND] != NODE_NONE)
        k.standing[k.n_standing++] = parts[ON_DEMAND];
    if (parts[DETECTED] != NODE_NONE && !out_while_repaired(g, n, set))
        k.standing[k.n_standing++] = out->in_repair =
            in_repair(g->b, parts[DETECTED], slowest_repair(g, n, set), q);
    set_found(g, &k);
    struct span span;
    out->fails = compile_behaviour(g->b, &k, &span);
    return true;
}

/* --- all sets --- */

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

static void compile_shocks(struct group_building *g, struct group_exports *out)
{
    ARRAY(struct shock) shocks = {0};
    size_t m = g->x->of.n;
    for (size_t n = 2; n <= m; n++) {
        size_t set[COMMON_CAUSE_MOST];
        for (size_t i = 0; i < n; i++)
            set[i] = i;
        do {
            struct shock s;
            if (compile_shock(g, n, set, &s))
                *array_push(g->b->figures->arena, &shocks) = s;
        } while (next_set(set, n, m));
    }
    *out = (struct group_exports){shocks.n, shocks.at};
}

/* The member whose test finds the shocks. */
static void find_finder(struct group_building *g)
{
    const struct model *m = g->b->variant->model;
    for (size_t i = 0; i < g->x->of.n; i++) {
        const struct element_exports *x = g->members[i];
        bool named = g->x->found_by && text_equal(g->x->found_by, g->x->of.at[i]);
        bool sooner =
            !g->x->found_by &&
            (!g->finder || (x->tested && (!g->finder->tested || x->every < g->finder->every)));
        if (named || sooner) {
            g->finder = x;
            g->finder_data = model_get(m, KIND_ELEMENT, g->x->of.at[i]);
        }
    }
}

static node_id stated_beta(struct building *b, const struct quantity *q, const char *q1,
                           const char *source)
{
    if (!q)
        return NODE_NONE;
    node_id n = compile_quantity(b, q);
    compiled_add(b, PROPERTY_BETA, q1, NULL, n, source, quantity_reads(b->figures, q));
    return n;
}

/* Its members have been compiled, as what it refers to. */
ohmen_status compile_group(struct figures *f, const struct variant *v, const struct object *o,
                           struct compiled **out, ohmen_error *e)
{
    struct building b;
    struct group_exports *x = NEW(f->arena, struct group_exports);
    struct group_building g = {.b = &b, .object = o, .x = o->data};
    (void)e;
    compiled_begin(f, v, o, o->id, &b);
    g.members = NEW_ARRAY(f->arena, g.x->of.n, const struct element_exports *);
    for (size_t i = 0; i < g.x->of.n; i++)
        g.members[i] = compiled_of(&b, g.x->of.at[i])->exports;
    find_finder(&g);
    g.beta = stated_beta(&b, g.x->beta, NULL, g.x->source);
    g.beta_detected = stated_beta(&b, g.x->beta_detected, "detected", g.x->source);
    compile_shocks(&g, x);
    b.unit->exports = x;
    if (b.unit->n)
        b.unit->main = b.unit->first;
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}

/* --- what remains of an element --- */

/* Part p of the element less the shocks that hit it. */
static node_id remaining(struct building *b, const struct groups *groups, const char *element,
                         enum part p, node_id whole)
{
    static const enum property names[] = {PROPERTY_ON_DEMAND, PROPERTY_UNDETECTED,
                                          PROPERTY_DETECTED};
    struct figures *f = b->figures;
    ARRAY(node_id) less = {0};
    bool alike = true; /* all shocks are shares of this very rate */
    for (size_t i = 0; i < groups->n; i++) {
        const struct compiled *u = compiled_of(b, groups->at[i]->id);
        const struct group_exports *x = u->exports;
        for (size_t k = 0; k < x->n; k++) {
            bool hit = false;
            for (size_t j = 0; j < x->shocks[k].n; j++)
                hit = hit || text_equal(x->shocks[k].members[j], element);
            const char *q = x->shocks[k].name + strlen(groups->at[i]->id) + 1;
            figure_id id = hit ? compiled_figure(f, u, names[p], q, NULL) : FIGURE_NONE;
            if (id == FIGURE_NONE)
                continue;
            node_id n = figure_at(f, id)->node;
            alike = alike && graph_at(f->graph, n)->op == OP_MULTIPLY;
            *array_push(f->arena, &less) = n;
        }
    }
    if (less.n == 0)
        return whole;
    node_id sum = less.n == 1 ? less.at[0] : graph_op(f->graph, OP_SUM, less.n, less.at);
    node_id rest = graph_op2(f->graph, OP_SUBTRACT, whole, sum);
    if (!alike)
        rest = graph_op2(f->graph, OP_MAX, compile_const(b, 0, graph_dim(f->graph, whole), NULL),
                         rest);
    compiled_add(b, names[p], "alone", NULL, rest, NULL, NULL);
    return rest;
}

static void compile_alone_unit(struct figures *f, const struct variant *v, const struct object *o,
                               const struct groups *groups)
{
    struct building b;
    struct element_exports *x = NEW(f->arena, struct element_exports);
    compiled_begin_part(f, v, o, o->id, PART_ALONE, &b);
    struct compiled *whole_unit = (struct compiled *)compiled_of(&b, o->id);
    const struct element_exports *whole = whole_unit->exports;
    *x = *whole;
    struct making k = {
        .finds = whole->finds, .revealed = whole->revealed, .left = whole->left, .q1 = "alone"};
    node_id parts[PARTS];
    for (enum part p = 0; p < PARTS; p++) {
        node_id n = part_of(whole, p);
        parts[p] = n == NODE_NONE ? n : remaining(&b, groups, o->id, p, n);
    }
    k.undetected = parts[UNDETECTED];
    x->detected = parts[DETECTED];
    x->in_repair = NODE_NONE;
    if (parts[ON_DEMAND] != NODE_NONE)
        k.standing[k.n_standing++] = parts[ON_DEMAND];
    if (parts[DETECTED] != NODE_NONE && !((const struct element *)o->data)->out_while_repaired)
        k.standing[k.n_standing++] = x->in_repair =
            in_repair(&b, parts[DETECTED], whole->repair, "alone");
    if (whole->other != NODE_NONE)
        k.standing[k.n_standing++] = whole->other;
    element_instants(&b, o->data, &k);
    x->whole = compile_behaviour(&b, &k, &x->span);
    b.unit->exports = x;
    b.unit->main = x->whole.fails;
    b.unit->also = whole_unit->also;
    whole_unit->also = b.unit;
    compiled_end(&b);
}

ohmen_status compile_alone(struct figures *f, const struct variant *v, const char *element,
                           ohmen_error *e)
{
    const struct variant *projected;
    struct groups groups = {0};
    const struct compiled *unused;
    ohmen_status status = variant_project(f, v, element, &projected, e);
    struct building under = {.figures = f, .variant = projected};
    if (status != OHMEN_OK || compiled_part(&under, element, PART_ALONE))
        return status;
    groups_of(f, projected->model, element, &groups);
    for (size_t i = 0; status == OHMEN_OK && i < groups.n; i++)
        status = figures_compile(f, projected, groups.at[i]->id, &unused, e);
    if (status == OHMEN_OK && groups.n)
        compile_alone_unit(f, projected, model_find(projected->model, element), &groups);
    return status;
}
