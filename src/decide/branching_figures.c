/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The figures of a tree: what comes behind each point and branch given each hidden state, what is
 * believed, how probable it is to come there, and what the alternatives are worth. The policy is
 * known and stays. */
#include "decide/branching_parts.h"

/* Values of one measure (NULL: cost) behind points, given each hidden state; made when they are
 * first asked for, along the policy. */
struct alphas {
    const struct measure *of;
    struct by_state *at;        /* by point; at NULL: not yet */
    struct by_state *of_branch; /* by number, the same */
};

/* A tree whose figures are being made. */
struct telling {
    struct rolling r;
    struct figures *f;
    struct branching *b;
    struct measure damage;
    struct alphas cost_to_come, damage_to_come;
    node_id **belief; /* by point: of each hidden state; NULL: not yet */
    node_id *reach;   /* by point */
};

static struct graph *graph_of(const struct telling *t)
{
    return t->f->graph;
}

static size_t hidden_in(const struct telling *t)
{
    return t->b->worlds.hidden.n;
}

static struct building *section(struct telling *t)
{
    return &t->r.worth.b;
}

static node_id number(struct telling *t, double x)
{
    return compile_const(section(t), x, dim_number, NULL);
}

static node_id times(struct telling *t, node_id x, node_id y)
{
    return graph_op2(graph_of(t), OP_MULTIPLY, x, y);
}

static node_id sum(struct telling *t, size_t n, const node_id *nodes)
{
    return n == 1 ? nodes[0] : graph_op(graph_of(t), OP_SUM, n, nodes);
}

/* --- what comes behind a point, given each hidden state --- */

static const struct by_state *behind_point(struct telling *t, struct alphas *x, size_t point);

static struct by_state behind_branch(struct telling *t, struct alphas *x, const struct way *b)
{
    struct by_state *made = &x->of_branch[b->number];
    if (!made->at)
        *made = branching_back(&t->r, b, x->of, behind_point(t, x, b->to));
    return *made;
}

/* The probability of a branch of chance, as the document states it. */
static node_id share_node(struct telling *t, const struct point *p, size_t k)
{
    node_id *others = NEW_ARRAY(t->f->arena, p->n, node_id);
    size_t n = 0;
    if (p->branches[k].share)
        return branching_stated(&t->r, p->branches[k].share);
    for (size_t i = 0; i < p->n; i++)
        if (i != k)
            others[n++] = branching_stated(&t->r, p->branches[i].share);
    if (n == 0)
        return number(t, 1);
    return graph_op1(graph_of(t), OP_COMPLEMENT, sum(t, n, others));
}

/* The weight of branch k of a point in a hidden state. */
static node_id weight(struct telling *t, const struct point *p, size_t k, size_t hidden)
{
    const struct way *b = &p->branches[k];
    return b->likelihood ? number(t, b->likelihood[hidden]) : share_node(t, p, k);
}

static node_id mixed(struct telling *t, const struct point *p, const struct by_state *branches,
                     size_t hidden)
{
    node_id *terms = NEW_ARRAY(t->f->arena, p->n, node_id);
    size_t n = 0;
    for (size_t k = 0; k < p->n; k++) {
        const struct way *b = &p->branches[k];
        bool never = b->likelihood && b->likelihood[hidden] == 0;
        bool always = b->likelihood && b->likelihood[hidden] == 1;
        if (never || branches[k].at[hidden] == NODE_NONE)
            continue;
        terms[n++] = always ? branches[k].at[hidden]
                            : times(t, weight(t, p, k, hidden), branches[k].at[hidden]);
    }
    return n ? sum(t, n, terms) : NODE_NONE;
}

static struct by_state make_behind(struct telling *t, struct alphas *x, const struct point *p)
{
    size_t n = hidden_in(t);
    struct by_state result = {NEW_ARRAY(t->f->arena, n, node_id)};
    struct by_state *branches = NEW_ARRAY(t->f->arena, p->n, struct by_state);
    if (p->kind == POINT_CHOOSE)
        return behind_branch(t, x, &p->branches[p->best]);
    for (size_t k = 0; k < p->n; k++)
        branches[k] = behind_branch(t, x, &p->branches[k]);
    for (size_t h = 0; h < n; h++)
        result.at[h] = p->kind == POINT_END ? NODE_NONE : mixed(t, p, branches, h);
    return result;
}

static const struct by_state *behind_point(struct telling *t, struct alphas *x, size_t point)
{
    if (!x->at[point].at) {
        const struct point *p = &t->b->points.at[point];
        struct by_state made = make_behind(t, x, p);
        x->at[point] = made;
        if (p->kind != POINT_END)
            branching_tell(&t->r, *p->path ? p->path : "start", x->of, -1, &made);
    }
    return &x->at[point];
}

static struct alphas alphas_of(struct telling *t, const struct measure *m)
{
    return (struct alphas){m, NEW_ARRAY(t->f->arena, t->b->points.n, struct by_state),
                           NEW_ARRAY(t->f->arena, branching_count(t->b) + 1, struct by_state)};
}

/* --- what is believed --- */

/* What is believed on the way, as branching_tell. */
static void tell_belief(struct telling *t, const char *path, double at, const node_id *belief)
{
    for (size_t k = 0; k < hidden_in(t); k++) {
        if (belief[k] == NODE_NONE)
            continue;
        const char *what =
            arena_printf(t->f->arena, "%s at %.6g a", t->b->worlds.hidden.names[k], at);
        const char *name = arena_printf(t->f->arena, "%s.belief %s", path, what);
        if (strmap_has(t->r.told, name))
            continue;
        strmap_set(t->f->arena, t->r.told, name, NULL);
        compiled_add(section(t), PROPERTY_BELIEF, path, what, belief[k], NULL, NULL);
    }
}

/* Beliefs behind the moves of a branch. */
static node_id *move_on(struct telling *t, const struct way *b, node_id *belief)
{
    size_t n = hidden_in(t);
    for (size_t i = 0; i < b->moves.n; i++) {
        const struct move *m = &b->moves.at[i];
        bool changes = m->kind == MOVE_RESET || (m->kind == MOVE_TIME && m->world->flows.n);
        const struct passage *p = NULL;
        node_id *after = NEW_ARRAY(t->f->arena, n, node_id);
        if (!changes)
            continue;
        if (m->kind == MOVE_TIME)
            p = world_passage_known(m->world, m->to - m->at);
        for (size_t k = 0; k < n; k++) {
            node_id *terms = NEW_ARRAY(t->f->arena, n, node_id);
            size_t count = 0;
            for (size_t h = 0; h < n; h++)
                if (p && belief[h] != NODE_NONE)
                    terms[count++] = times(t, belief[h], p->to[h * n + k]);
                else if (!p && m->map[h] == k && belief[h] != NODE_NONE)
                    terms[count++] = belief[h];
            after[k] = count ? sum(t, count, terms) : NODE_NONE;
        }
        tell_belief(t, b->path, m->to, after);
        belief = after;
    }
    return belief;
}

/* Bayes' rule: what is believed at the beginning of a branch; its probability in *probability. */
static node_id *told(struct telling *t, const struct point *p, const struct way *b, node_id *belief,
                     node_id *probability)
{
    size_t n = hidden_in(t), count = 0;
    node_id *joint = NEW_ARRAY(t->f->arena, n, node_id),
            *terms = NEW_ARRAY(t->f->arena, n, node_id);
    (void)p;
    for (size_t h = 0; h < n; h++) {
        joint[h] = NODE_NONE;
        if (belief[h] == NODE_NONE || b->likelihood[h] == 0)
            continue;
        joint[h] =
            b->likelihood[h] == 1 ? belief[h] : times(t, belief[h], number(t, b->likelihood[h]));
        terms[count++] = joint[h];
    }
    *probability = sum(t, count, terms);
    for (size_t h = 0; h < n; h++)
        if (joint[h] != NODE_NONE)
            joint[h] = count == 1 ? number(t, 1)
                                  : graph_op2(graph_of(t), OP_RATIO, joint[h], *probability);
    return joint;
}

/* --- figures of points and branches --- */

static figure_id add(struct telling *t, enum property p, const char *q1, const char *q2, node_id n)
{
    return n == NODE_NONE ? FIGURE_NONE : compiled_add(section(t), p, q1, q2, n, NULL, NULL);
}

static const char *path_name(const struct telling *t, const char *path)
{
    return *path ? path : t->b->repeats ? POLICY : "start";
}

/* The mean over what is believed of cost and damage to come; a figure for each hidden state too. */
static figure_id add_to_come(struct telling *t, const char *path, const struct by_state *cost,
                             const struct by_state *damage, const node_id *belief)
{
    size_t n = hidden_in(t), count = 0;
    node_id *terms = NEW_ARRAY(t->f->arena, n, node_id);
    for (size_t h = 0; h < n; h++) {
        node_id c = cost->at[h], d = damage->at[h], both;
        if (n > 1 && belief[h] == NODE_NONE)
            continue;
        if (c == NODE_NONE && d == NODE_NONE)
            both = compile_const(section(t), 0, dim_money, NULL);
        else
            both = c == NODE_NONE ? d : d == NODE_NONE ? c : graph_op2(graph_of(t), OP_ADD, c, d);
        if (n > 1)
            add(t, PROPERTY_TO_COME, path_name(t, path), t->b->worlds.hidden.names[h], both);
        terms[count++] = n > 1 ? times(t, belief[h], both) : both;
    }
    return add(t, PROPERTY_TO_COME, path_name(t, path), NULL, sum(t, count, terms));
}

static void add_beliefs(struct telling *t, const char *path, const node_id *belief)
{
    for (size_t h = 0; h < hidden_in(t) && hidden_in(t) > 1; h++)
        add(t, PROPERTY_BELIEF, path_name(t, path), t->b->worlds.hidden.names[h], belief[h]);
}

static void tell_branch(struct telling *t, size_t point, size_t k)
{
    struct point *p = &t->b->points.at[point];
    struct way *b = &p->branches[k];
    node_id probability = NODE_NONE, *belief = t->belief[point];
    if (b->likelihood)
        belief = told(t, p, b, belief, &probability);
    else if (p->kind == POINT_CHANCE)
        probability = share_node(t, p, k);
    if (probability != NODE_NONE)
        b->probability_figure = add(t, PROPERTY_PROBABILITY, b->path, NULL, probability);
    if (b->likelihood)
        add_beliefs(t, b->path, belief);
    bool taken = p->kind != POINT_CHOOSE || p->best == k;
    if (t->reach[point] != NODE_NONE && taken) {
        node_id reach =
            probability == NODE_NONE ? t->reach[point] : times(t, t->reach[point], probability);
        node_id *to = &t->reach[b->to];
        *to = *to == NODE_NONE ? reach : graph_op2(graph_of(t), OP_ADD, *to, reach);
        if (p->kind != POINT_SEE) /* the choice behind it has one */
            b->reach_figure = add(t, PROPERTY_REACH, b->path, NULL, reach);
    }
    if (p->kind != POINT_SEE) {
        struct by_state cost = behind_branch(t, &t->cost_to_come, b);
        struct by_state damage = behind_branch(t, &t->damage_to_come, b);
        b->value_figure = add_to_come(t, b->path, &cost, &damage, belief);
    }
    if (!t->belief[b->to])
        t->belief[b->to] = move_on(t, b, belief);
}

static void tell_point(struct telling *t, size_t point)
{
    struct point *p = &t->b->points.at[point];
    if (p->kind == POINT_END)
        return;
    if (p->is_stage || point == 0) {
        p->value_figure = add_to_come(t, p->path, behind_point(t, &t->cost_to_come, point),
                                      behind_point(t, &t->damage_to_come, point), t->belief[point]);
        p->reach_figure = add(t, PROPERTY_REACH, path_name(t, p->path), NULL, t->reach[point]);
    }
    for (size_t k = 0; k < p->n; k++)
        tell_branch(t, point, k);
}

static void tell_points(struct telling *t)
{
    size_t n = t->b->points.n;
    const struct hidden *h = &t->b->worlds.hidden;
    t->belief = NEW_ARRAY(t->f->arena, n, node_id *);
    t->reach = NEW_ARRAY(t->f->arena, n, node_id);
    for (size_t i = 0; i < n; i++)
        t->reach[i] = NODE_NONE;
    t->reach[0] = number(t, 1);
    t->belief[0] = NEW_ARRAY(t->f->arena, h->n, node_id);
    for (size_t k = 0; k < h->n; k++)
        t->belief[0][k] =
            h->start[k] > 0 ? graph_op1(graph_of(t), OP_HELD, h->share[k]) : NODE_NONE;
    add_beliefs(t, "", t->belief[0]);
    for (size_t i = n; i > 0; i--) {
        size_t point = t->b->order[i - 1];
        if (t->belief[point])
            tell_point(t, point);
    }
}

/* --- alternatives --- */

/* The branch of a point with this label, or NULL. */
static const struct way *labelled(const struct point *p, const char *label)
{
    for (size_t k = 0; k < p->n; k++)
        if (text_equal(p->branches[k].label, label))
            return &p->branches[k];
    return NULL;
}

/* The choice at the start in a hidden state: behind what is seen, if anything is. */
static const struct point *first_choice(const struct branching *b, size_t hidden)
{
    const struct point *p = &b->points.at[0];
    if (p->kind != POINT_SEE)
        return p;
    for (size_t k = 0; k < p->n; k++)
        if (p->branches[k].likelihood[hidden] > 0)
            return &b->points.at[p->branches[k].to];
    return NULL;
}

/* What comes behind the beginning of an alternative, given each hidden state. */
static struct by_state behind_alternative(struct telling *t, struct alphas *x,
                                          const struct alternative *alt, size_t i)
{
    size_t n = hidden_in(t);
    struct by_state all = {NEW_ARRAY(t->f->arena, n, node_id)};
    if (i == 0)
        return branching_back(&t->r, t->b->nothing, x->of, NULL);
    if (t->b->repeats && text_equal(alt->name, POLICY))
        return *behind_point(t, x, 0);
    for (size_t h = 0; h < n; h++) {
        const struct point *p = first_choice(t->b, h);
        const struct way *b = p ? labelled(p, alt->options[0]) : NULL;
        all.at[h] = b ? behind_branch(t, x, b).at[h] : NODE_NONE;
    }
    return all;
}

/* Over the hidden states: by their shares themselves, so that what is unknown of them stays. */
static node_id over_hidden(struct telling *t, const struct by_state *x, struct dim d)
{
    const struct hidden *h = &t->b->worlds.hidden;
    node_id *terms = NEW_ARRAY(t->f->arena, h->n, node_id);
    size_t n = 0;
    for (size_t k = 0; k < h->n; k++)
        if (x->at[k] != NODE_NONE)
            terms[n++] = h->n > 1 ? times(t, h->share[k], x->at[k]) : x->at[k];
    return n ? sum(t, n, terms) : compile_const(section(t), 0, d, NULL);
}

static node_id alternative_node(struct telling *t, struct alphas *x, size_t i)
{
    const struct alternative *alt = &t->b->weighing->alternatives.at[i];
    struct by_state behind = behind_alternative(t, x, alt, i);
    return over_hidden(t, &behind, x->of ? x->of->sum : dim_money);
}

/* What an alternative costs, as a number. */
static double cost_number(const struct branching *b, const struct alternative *alt)
{
    const struct point *root = &b->points.at[0];
    double sum = 0;
    if (b->repeats && text_equal(alt->name, POLICY))
        return root->whole_cost;
    if (root->kind != POINT_SEE)
        return labelled(root, alt->options[0])->whole_cost;
    for (size_t k = 0; k < root->n; k++) {
        const struct way *seen = &root->branches[k];
        sum += seen->probability * labelled(&b->points.at[seen->to], alt->options[0])->whole_cost;
    }
    return sum;
}

static void add_money(struct telling *t, size_t i)
{
    struct graph *g = graph_of(t);
    struct alternative *alt = &t->b->weighing->alternatives.at[i];
    const struct alternative *nothing = &t->b->weighing->alternatives.at[0];
    const char *name = alt->name;
    node_id damage = alternative_node(t, &t->damage_to_come, i);
    node_id cost = alternative_node(t, &t->cost_to_come, i);
    alt->present_damage = add(t, PROPERTY_PRESENT_DAMAGE, name, NULL, damage);
    alt->present_cost = add(t, PROPERTY_PRESENT_COST, name, NULL, cost);
    node_id years = money_annuity(&t->r.worth.money, 0, t->b->weighing->horizon);
    alt->annual_cost =
        add(t, PROPERTY_ANNUAL_COST, name, NULL, graph_op2(g, OP_DIVIDE, cost, years));
    alt->total = add(t, PROPERTY_TOTAL, name, NULL, graph_op2(g, OP_ADD, damage, cost));
    if (i == 0)
        return;
    node_id now = figure_at(t->f, nothing->present_damage)->node;
    node_id benefit = graph_op2(g, OP_SUBTRACT, now, damage);
    alt->benefit = add(t, PROPERTY_BENEFIT, name, NULL, benefit);
    alt->net = add(t, PROPERTY_NET, name, NULL, graph_op2(g, OP_SUBTRACT, benefit, cost));
    if (cost_number(t->b, alt) > 0)
        alt->ratio = add(t, PROPERTY_RATIO, name, NULL, ratio_of_means(section(t), benefit, cost));
}

/* What is avoided of a measure, beside the money of the chosen perspective. */
static node_id avoided(struct telling *t, struct alphas *x, size_t i)
{
    return graph_op2(graph_of(t), OP_SUBTRACT, alternative_node(t, x, 0),
                     alternative_node(t, x, i));
}

static void add_perspectives(struct telling *t)
{
    const struct rows *rows = &t->f->base->settings->perspectives;
    struct weighing *w = t->b->weighing;
    for (size_t k = 0; k < rows->n; k++) {
        struct measure m = {PROPERTY_BORNE, rows->keys[k], dim_money_rate, dim_money};
        struct alphas x = alphas_of(t, &m);
        for (size_t i = 1; i < w->alternatives.n; i++) {
            struct alternative *alt = &w->alternatives.at[i];
            node_id benefit = avoided(t, &x, i), cost = figure_at(t->f, alt->present_cost)->node;
            alt->of[k].benefit = add(t, PROPERTY_BENEFIT, alt->name, m.of, benefit);
            alt->of[k].net = add(t, PROPERTY_NET, alt->name, m.of,
                                 graph_op2(graph_of(t), OP_SUBTRACT, benefit, cost));
        }
    }
}

static void add_supply_and_people(struct telling *t)
{
    struct weighing *w = t->b->weighing;
    const struct objects *groups = &t->f->base->of[KIND_GROUP];
    struct measure time = {PROPERTY_CUSTOMER_TIME, NULL, dim_time, dim_time};
    struct alphas of_time = alphas_of(t, &time);
    node_id **deaths = NEW_ARRAY(t->f->arena, w->alternatives.n, node_id *);
    for (size_t i = 1; i < w->alternatives.n; i++) {
        w->alternatives.at[i].present_time = add(
            t, PROPERTY_PRESENT_TIME, w->alternatives.at[i].name, NULL, avoided(t, &of_time, i));
        deaths[i] = NEW_ARRAY(t->f->arena, groups->n + 1, node_id);
    }
    for (size_t k = 0; k < groups->n; k++) {
        struct measure m = {PROPERTY_FATALITIES, groups->at[k]->id, dim_frequency, dim_number};
        struct alphas x = alphas_of(t, &m);
        for (size_t i = 1; i < w->alternatives.n; i++)
            deaths[i][k] = avoided(t, &x, i);
    }
    for (size_t i = 1; i < w->alternatives.n && groups->n; i++)
        w->alternatives.at[i].present_fatalities =
            add(t, PROPERTY_PRESENT_FATALITIES, w->alternatives.at[i].name, NULL,
                sum(t, groups->n, deaths[i]));
}

/* --- what a reading is worth --- */

static double total_of(const struct branching *b, size_t i)
{
    if (i == 0)
        return b->nothing->value;
    const struct way *begins =
        labelled(&b->points.at[0], b->weighing->alternatives.at[i].options[0]);
    return begins ? begins->value : b->points.at[0].value;
}

static size_t best_but(const struct branching *b, size_t but)
{
    size_t best = but == 0 ? 1 : 0;
    for (size_t i = 0; i < b->weighing->alternatives.n; i++)
        if (i != but && total_of(b, i) < total_of(b, best))
            best = i;
    return best;
}

/* What is paid on the branch before its reading. */
static node_id price_of(struct telling *t, const struct way *b)
{
    struct way only = *b;
    only.moves.at = NEW_ARRAY(t->f->arena, b->moves.n, struct move);
    only.moves.n = 0;
    for (size_t i = 0; i < b->moves.n; i++)
        if (b->moves.at[i].kind == MOVE_PAY)
            only.moves.at[only.moves.n++] = b->moves.at[i];
    struct by_state paid = branching_back(&t->r, &only, NULL, NULL); /* the same in all of them */
    size_t k = 0;
    while (k + 1 < hidden_in(t) && !(b->belief[k] > 0))
        k++;
    return paid.at[k];
}

/* An alternative that begins with an inspection: against the best of the others. */
static void add_survey(struct telling *t, size_t i)
{
    struct weighing *w = t->b->weighing;
    const struct alternative *alt = &w->alternatives.at[i];
    const struct way *b = labelled(&t->b->points.at[0], alt->options[0]);
    if (!b || t->b->repeats || t->b->points.at[b->to].kind != POINT_READ)
        return;
    struct graph *g = graph_of(t);
    node_id price = price_of(t, b);
    if (price == NODE_NONE)
        price = compile_const(section(t), 0, dim_money, NULL);
    node_id other = figure_at(t->f, w->alternatives.at[best_but(t->b, i)].total)->node;
    node_id lead = graph_op2(g, OP_SUBTRACT, other, figure_at(t->f, alt->total)->node);
    struct survey_worth *s = array_push(t->f->arena, &t->b->surveys);
    s->of = alt;
    s->other = &w->alternatives.at[best_but(t->b, i)];
    s->test = t->b->points.at[b->to].test;
    s->price = add(t, PROPERTY_READING_PRICE, alt->name, NULL, price);
    s->worth = add(t, PROPERTY_READING_WORTH, alt->name, NULL, graph_op2(g, OP_ADD, lead, price));
}

/* --- the whole --- */

ohmen_status branching_figures(struct branching *b, struct figures *f, ohmen_error *e)
{
    struct weighing *w = b->weighing;
    struct telling t = {.f = f, .b = b};
    t.damage = (struct measure){PROPERTY_RISK, NULL, dim_money_rate, dim_money};
    struct strmap told = {0};
    t.r = (struct rolling){.b = b, .worth = {.f = f, .w = w}, .told = &told};
    compiled_begin(f, w->alternatives.at[0].variant, model_find(f->base, w->id), w->id,
                   section(&t));
    money_begin(&t.r.worth.money, f, section(&t), w->horizon);
    t.cost_to_come = alphas_of(&t, NULL);
    t.damage_to_come = alphas_of(&t, &t.damage);
    tell_points(&t);
    for (size_t i = 0; i < w->alternatives.n; i++)
        add_money(&t, i);
    add_perspectives(&t);
    add_supply_and_people(&t);
    for (size_t i = 1; i < w->alternatives.n; i++)
        add_survey(&t, i);
    section(&t)->unit->exports = w;
    w->unit = section(&t)->unit;
    compiled_end(section(&t));
    return figures_evaluate(f, e);
}
