/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Compiling hazards: one decision diagram for the whole response, one figure for each
 * end of the event tree, then outcomes, damage and risk. And schemes by themselves.
 *
 * Rows act in the order of their clearance times: a row clears when its scheme works,
 * its function sees the fault, and no earlier row has cleared. What schemes share is
 * exact, since all rows are functions of the same variables. */
#include "figure/compile_hazard.h"

#include <stdlib.h>

#include "base/text.h"

/* --- the event tree --- */

static const struct response_row *row_at(const struct hazard *h, size_t i)
{
    return ROW(struct response_row, h->response, i);
}

/* Indices of rows in the order in which they act; the one without cleared-by is last. */
static size_t *rows_in_order(struct arena *a, const struct hazard *h)
{
    size_t *order = NEW_ARRAY(a, h->response.n, size_t);
    for (size_t i = 0; i < h->response.n; i++) {
        size_t k = i;
        const struct response_row *row = row_at(h, i);
        for (; k > 0; k--) {
            const struct response_row *before = row_at(h, order[k - 1]);
            bool stays = before->cleared_by &&
                         (!row->cleared_by ||
                          expr_constant(before->in->expr) <= expr_constant(row->in->expr));
            if (stays)
                break;
            order[k] = order[k - 1];
        }
        order[k] = i;
    }
    return order;
}

static const struct condition *add_condition(struct tree *t, const struct condition *before,
                                             const char *id, const char *sees_row, bool works)
{
    struct condition *c = NEW(t->arena, struct condition);
    *c = (struct condition){before, id, sees_row, works};
    return c;
}

static size_t outcome_index(const struct hazard *h, const char *name)
{
    for (size_t i = 0; i < h->outcomes.n; i++)
        if (text_equal(h->outcomes.keys[i], name))
            return i;
    return SIZE_MAX;
}

static void add_end(struct tree *t, const struct spot *at, const char *outcome)
{
    *array_push(t->arena, &t->ends) = (struct tree_end){
        .spot = *at, .outcome = outcome, .outcome_index = outcome_index(t->hazard, outcome)};
}

static void grow(struct tree *t, const struct branch *b, struct spot at);

/* Complement of the other shares. */
static node_id rest_share(struct tree *t, const struct rows *split, const node_id *shares)
{
    struct graph *g = t->building->figures->graph;
    node_id *others = NEW_ARRAY(t->arena, split->n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < split->n; i++)
        if (shares[i] != NODE_NONE)
            others[n++] = shares[i];
    return graph_op1(g, OP_COMPLEMENT, n == 1 ? others[0] : graph_op(g, OP_SUM, n, others));
}

static const char *dotted(struct arena *a, const char *path)
{
    char *s = arena_str(a, path);
    for (char *p = s; *p; p++)
        if (*p == '/')
            *p = '.';
    return s;
}

static void grow_split(struct tree *t, const struct rows *split, const struct spot *at)
{
    struct building *b = t->building;
    node_id *shares = NEW_ARRAY(t->arena, split->n, node_id);
    for (size_t i = 0; i < split->n; i++) {
        const struct quantity *q = ROW(struct branch, *split, i)->share;
        bool rest = q->shape == SHAPE_EXPRESSION && !q->expr;
        shares[i] = rest ? NODE_NONE : compile_quantity(b, q);
    }
    for (size_t i = 0; i < split->n; i++) {
        const struct branch *child = ROW(struct branch, *split, i);
        struct spot below = *at;
        bool rest = shares[i] == NODE_NONE;
        below.path = arena_printf(t->arena, "%s/%s", at->path, split->keys[i]);
        node_id share = rest ? rest_share(t, split, shares) : shares[i];
        const char *reads = rest ? NULL : quantity_reads(b->figures, child->share);
        compiled_add(b, PROPERTY_SHARE, dotted(t->arena, below.path), NULL, share,
                     t->hazard->source, reads);
        below.share = at->share == NODE_NONE
                          ? share
                          : graph_op2(b->figures->graph, OP_MULTIPLY, at->share, share);
        grow(t, child, below);
    }
}

static void grow_question(struct tree *t, const struct branch *b, const struct spot *at)
{
    struct diagram_builder *d = t->wiring.builder;
    bfun works = wiring_works(&t->wiring, b->if_works);
    struct spot yes = *at, no = *at;
    yes.reached = diagram_and(d, at->reached, works);
    yes.condition = add_condition(t, at->condition, b->if_works, NULL, true);
    yes.path = arena_printf(t->arena, "%s/yes", at->path);
    no.reached = diagram_and(d, at->reached, diagram_not(d, works));
    no.condition = add_condition(t, at->condition, b->if_works, NULL, false);
    no.path = arena_printf(t->arena, "%s/no", at->path);
    grow(t, b->yes, yes);
    grow(t, b->no, no);
}

static void grow(struct tree *t, const struct branch *b, struct spot at)
{
    if (b->outcome)
        add_end(t, &at, b->outcome);
    else if (b->if_works)
        grow_question(t, b, &at);
    else
        grow_split(t, &b->split, &at);
}

/* The row's scheme works and sees the fault. */
static bfun row_clears(struct tree *t, const struct response_row *row, const char *key)
{
    struct building *b = t->building;
    bfun works = wiring_works(&t->wiring, row->cleared_by);
    if (!row->sees)
        return works;
    node_id share = compile_quantity(b, row->sees->is);
    compiled_add(b, PROPERTY_SHARE, key, "sees", share, row->sees->source,
                 quantity_reads(b->figures, row->sees->is));
    return diagram_and(t->wiring.builder, works, wiring_sees(&t->wiring, key));
}

static void grow_rows(struct tree *t)
{
    const struct hazard *h = t->hazard;
    struct diagram_builder *d = t->wiring.builder;
    size_t *order = rows_in_order(t->arena, h);
    bfun uncleared = BFUN_TRUE;
    const struct condition *before = NULL;
    for (size_t i = 0; i < h->response.n; i++) {
        const struct response_row *row = row_at(h, order[i]);
        const char *key = h->response.keys[order[i]];
        struct spot at = {.path = key,
                          .row = key,
                          .in = row->in,
                          .share = NODE_NONE,
                          .condition = before,
                          .reached = uncleared};
        if (row->cleared_by) {
            const char *sees = row->sees ? key : NULL;
            bfun clears = row_clears(t, row, key);
            at.reached = diagram_and(d, uncleared, clears);
            at.condition = add_condition(t, before, row->cleared_by, sees, true);
            uncleared = diagram_and(d, uncleared, diagram_not(d, clears));
            before = add_condition(t, before, row->cleared_by, sees, false);
        }
        grow(t, &row->then, at);
    }
}

static void order_branch(struct tree *t, const struct branch *b)
{
    if (b->if_works) {
        wiring_order(&t->wiring, b->if_works);
        order_branch(t, b->yes);
        order_branch(t, b->no);
    }
    for (size_t i = 0; i < b->split.n; i++)
        order_branch(t, ROW(struct branch, b->split, i));
}

static void order_rows(struct tree *t)
{
    const struct hazard *h = t->hazard;
    size_t *order = rows_in_order(t->arena, h);
    for (size_t i = 0; i < h->response.n; i++) {
        const struct response_row *row = row_at(h, order[i]);
        if (row->cleared_by)
            wiring_order(&t->wiring, row->cleared_by);
        order_branch(t, &row->then);
    }
}

/* --- the diagram --- */

/* One root for each different condition; ends know theirs. */
static const struct diagram *freeze(struct tree *t)
{
    bfun *roots = NEW_ARRAY(t->arena, t->ends.n, bfun);
    size_t n = 0;
    for (size_t i = 0; i < t->ends.n; i++) {
        struct tree_end *end = &t->ends.at[i];
        size_t k = 0;
        while (k < n && roots[k] != end->spot.reached)
            k++;
        if (k == n)
            roots[n++] = end->spot.reached;
        end->root = (uint32_t)k;
    }
    return diagram_freeze(t->arena, t->wiring.builder, n, roots);
}

static node_id add_diagram(struct tree *t, const struct diagram *d)
{
    size_t n = t->wiring.variables.n;
    node_id *args = NEW_ARRAY(t->arena, n, node_id);
    for (size_t i = 0; i < n; i++)
        args[i] = wiring_argument(t->building, &t->wiring, i);
    return graph_diagram(t->building->figures->graph, d, n, args);
}

static void add_ends(struct tree *t, struct hazard_exports *x, const struct diagram *d)
{
    struct building *b = t->building;
    struct graph *g = b->figures->graph;
    node_id diagram = add_diagram(t, d);
    x->n_ends = t->ends.n;
    x->ends = NEW_ARRAY(t->arena, x->n_ends, struct end);
    for (size_t i = 0; i < x->n_ends; i++) {
        struct tree_end *from = &t->ends.at[i];
        node_id p = graph_pick(g, diagram, from->root);
        if (from->spot.share != NODE_NONE)
            p = graph_op2(g, OP_MULTIPLY, p, from->spot.share);
        x->ends[i] = (struct end){.condition = from->spot.condition,
                                  .path = from->spot.path,
                                  .row = from->spot.row,
                                  .outcome = from->outcome,
                                  .outcome_index = from->outcome_index,
                                  .damage = FIGURE_NONE,
                                  .root = from->root};
        x->ends[i].probability =
            compiled_add(b, PROPERTY_END, dotted(t->arena, from->spot.path), NULL, p, NULL, NULL);
    }
    x->n_variables = t->wiring.variables.n;
    x->variables = t->wiring.variables.at;
    x->is_sees = t->wiring.is_sees.at;
    x->diagram = d;
}

/* --- the hazard --- */

ohmen_status compile_hazard(struct figures *f, const struct variant *v, const struct object *o,
                            struct compiled **out, ohmen_error *e)
{
    struct building b;
    struct hazard_exports *x = NEW(f->arena, struct hazard_exports);
    compiled_begin(f, v, o, o->id, &b);
    b.unit->exports = x;
    struct tree t = {.arena = f->arena, .building = &b, .hazard = o->data};
    const struct quantity *q = t.hazard->frequency;
    x->frequency = compiled_add(&b, PROPERTY_FREQUENCY, NULL, NULL, compile_quantity(&b, q),
                                t.hazard->source, quantity_reads(f, q));
    wiring_init(&t.wiring, f, v->model);
    order_rows(&t);
    grow_rows(&t);
    const struct diagram *d = t.wiring.too_deep ? NULL : freeze(&t);
    if (!d) {
        compiled_give_up(&b);
        return error_set(
            e, OHMEN_COMPUTE,
            "the response of \"%s\" is too intertwined: its schemes need more than %u diagram "
            "nodes, or nest too deep",
            o->id, DIAGRAM_NODES);
    }
    add_ends(&t, x, d);
    t.exports = x;
    compile_outcomes(&t);
    b.unit->main = x->risk;
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}

/* --- schemes by themselves --- */

ohmen_status compile_scheme(struct figures *f, const struct variant *v, const struct object *o,
                            struct compiled **out, ohmen_error *e)
{
    struct building b;
    struct wiring w;
    compiled_begin(f, v, o, o->id, &b);
    wiring_init(&w, f, v->model);
    wiring_order(&w, o->id);
    bfun fails = diagram_not(w.builder, wiring_works(&w, o->id));
    const struct diagram *d = w.too_deep ? NULL : diagram_freeze(f->arena, w.builder, 1, &fails);
    if (!d) {
        compiled_give_up(&b);
        return error_set(
            e, OHMEN_COMPUTE,
            "the scheme \"%s\" is too intertwined: it needs more than %u diagram nodes, or "
            "nests too deep",
            o->id, DIAGRAM_NODES);
    }
    node_id *args = NEW_ARRAY(f->arena, w.variables.n, node_id);
    for (size_t i = 0; i < w.variables.n; i++)
        args[i] = wiring_argument(&b, &w, i);
    node_id n = graph_pick(f->graph, graph_diagram(f->graph, d, w.variables.n, args), 0);
    struct scheme_exports *x = NEW(f->arena, struct scheme_exports);
    *x = (struct scheme_exports){d, w.variables.n, w.variables.at};
    b.unit->exports = x;
    b.unit->main = compiled_add(&b, PROPERTY_FAILS, NULL, NULL, n, NULL, NULL);
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}
