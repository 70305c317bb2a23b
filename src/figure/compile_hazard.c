/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Compiling hazards: one decision diagram for the whole response, one figure for each
 * end of the event tree, then outcomes, damage and risk. And schemes by themselves.
 *
 * Rows act in the order of their clearance times: a row clears when its scheme works,
 * its function sees the fault, and no earlier row has cleared. What schemes share is
 * exact, since all rows are functions of the same variables. */
#include "figure/compile_hazard.h"
#include "figure/likeness.h"
#include "figure/span.h"

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
                                             struct condition like, bool works)
{
    struct condition *c = NEW(t->arena, struct condition);
    *c = like;
    c->before = before;
    c->works = works;
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
    struct condition asked = {.id = b->if_works};
    yes.condition = add_condition(t, at->condition, asked, true);
    yes.path = arena_printf(t->arena, "%s/yes", at->path);
    no.reached = diagram_ite(d, works, BFUN_FALSE, at->reached);
    no.condition = add_condition(t, at->condition, asked, false);
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

/* --- rows --- */

static const struct response_row *row_named(const struct hazard *h, const char *key)
{
    size_t i = 0;
    while (!text_equal(h->response.keys[i], key))
        i++;
    return row_at(h, i);
}

/* The function of the row whose breaker is backed up has operated: what it needs but the
 * breakers works, and it sees the fault. */
static bfun has_tripped(struct tree *t, const struct response_row *row)
{
    const struct response_row *first = row_named(t->hazard, row->breaker_failure_of);
    bfun trips = wiring_trips(&t->wiring, first->cleared_by);
    if (!first->sees)
        return trips;
    return diagram_and(t->wiring.builder, trips, wiring_sees(&t->wiring, row->breaker_failure_of));
}

/* The row's scheme works and sees the fault; as breaker failure protection, it is also called. */
static bfun row_clears(struct tree *t, const struct response_row *row, const char *key)
{
    struct building *b = t->building;
    bfun works = wiring_works(&t->wiring, row->cleared_by);
    if (row->breaker_failure_of)
        works = diagram_and(t->wiring.builder, works, has_tripped(t, row));
    if (!row->sees)
        return works;
    node_id share = compile_quantity(b, row->sees->is);
    compiled_add(b, PROPERTY_SHARE, key, "sees", share, row->sees->source,
                 quantity_reads(b->figures, row->sees->is));
    return diagram_and(t->wiring.builder, works, wiring_sees(&t->wiring, key));
}

static struct condition row_condition(const struct tree *t, const struct response_row *row,
                                      const char *key)
{
    struct condition c = {.id = row->cleared_by, .sees_row = row->sees ? key : NULL};
    if (row->breaker_failure_of) {
        const struct response_row *first = row_named(t->hazard, row->breaker_failure_of);
        c.tripped_by = first->cleared_by;
        c.tripped_row = first->sees ? row->breaker_failure_of : NULL;
    }
    return c;
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
            struct condition c = row_condition(t, row, key);
            bfun clears = row_clears(t, row, key);
            at.reached = diagram_and(d, uncleared, clears);
            at.condition = add_condition(t, before, c, true);
            uncleared = diagram_ite(d, clears, BFUN_FALSE, uncleared);
            before = add_condition(t, before, c, false);
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

/* Probabilities that the hazard itself puts elements out of action. */
static void add_disabled(struct tree *t)
{
    struct building *b = t->building;
    const struct rows *disables = &t->hazard->disables;
    for (size_t i = 0; i < disables->n; i++) {
        const struct estimate *e = ROW(struct estimate, *disables, i);
        compiled_add(b, PROPERTY_SHARE, disables->keys[i], "disabled", compile_quantity(b, e->is),
                     e->source ? e->source : t->hazard->source, quantity_reads(b->figures, e->is));
    }
}

/* The same response, averaged over the same time, is there already where a change reaches only
 * what it costs or how often it is called on. */
static node_id response_node(struct tree *t, const struct diagram *d, const node_id *args)
{
    struct hazard_exports *x = t->exports;
    struct figures *f = t->building->figures;
    const struct compiled *unit = t->building->unit;
    node_id known = likeness_find(f, unit->id, d, x->n_events, args, &x->span.windows);
    if (known != NODE_NONE)
        return known;
    node_id made = graph_diagram_over(f->graph, d, x->n_events, args, &x->span.windows);
    likeness_keep(f, unit->id, made);
    return made;
}

static void add_diagram(struct tree *t, const struct diagram *d)
{
    struct hazard_exports *x = t->exports;
    struct figures *f = t->building->figures;
    node_id *args = wiring_arguments(t->building, &t->wiring);
    x->n_events = t->wiring.events.n;
    x->events = t->wiring.events.at;
    x->diagram = d;
    x->span = span_of(f, x->n_events, wiring_behaviours(t->arena, &t->wiring));
    x->node = response_node(t, d, args);
}

/* The probability of an end in one window, or at all times. */
static node_id end_in(struct tree *t, size_t end, uint32_t window)
{
    struct graph *g = t->building->figures->graph;
    const struct tree_end *from = &t->ends.at[end];
    node_id p = graph_pick_in(g, t->exports->node, window, from->root);
    return from->spot.share == NODE_NONE ? p : graph_op2(g, OP_MULTIPLY, p, from->spot.share);
}

/* Ends in each year, as figures. */
static void add_windows(struct tree *t)
{
    struct figures *f = t->building->figures;
    const struct span *s = &t->exports->span;
    size_t n = t->ends.n;
    if (s->windows.n == 0)
        return;
    t->in_window = NEW_ARRAY(t->arena, s->windows.n * n, node_id);
    figure_id *figures = NEW_ARRAY(t->arena, s->windows.n * n, figure_id);
    for (uint32_t w = 0; w < s->windows.n; w++)
        for (size_t e = 0; e < n; e++) {
            node_id p = t->in_window[w * n + e] = end_in(t, e, w);
            const char *label = span_label(f, s, w);
            if (label)
                figures[w * n + e] =
                    compiled_add(t->building, PROPERTY_END,
                                 dotted(t->arena, t->ends.at[e].spot.path), label, p, NULL, NULL);
        }
    t->exports->end_in = s->yearly ? figures : NULL;
}

static void add_ends(struct tree *t)
{
    struct building *b = t->building;
    struct hazard_exports *x = t->exports;
    x->n_ends = t->ends.n;
    x->ends = NEW_ARRAY(t->arena, x->n_ends, struct end);
    add_windows(t);
    for (size_t i = 0; i < x->n_ends; i++) {
        struct tree_end *from = &t->ends.at[i];
        node_id p = t->in_window ? yearly_mean_end(t, i) : end_in(t, i, 0);
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
}

/* --- the hazard --- */

static ohmen_status too_intertwined(struct building *b, const char *what, const char *id,
                                    const char *needs, ohmen_error *e)
{
    compiled_give_up(b);
    return error_set(e, OHMEN_COMPUTE, "%s \"%s\" is too intertwined: %s", what, id,
                     arena_printf(b->figures->arena, needs, DIAGRAM_NODES));
}

ohmen_status compile_hazard(struct figures *f, const struct variant *v, const struct object *o,
                            struct compiled **out, ohmen_error *e)
{
    struct building b;
    struct hazard_exports *x = NEW(f->arena, struct hazard_exports);
    compiled_begin(f, v, o, o->id, &b);
    b.unit->exports = x;
    b.unit->also = compiled_part(&b, o->id, PART_FREQUENCY);
    struct tree t = {.arena = f->arena, .building = &b, .hazard = o->data, .exports = x};
    t.frequency = b.unit->also->exports;
    x->frequency = b.unit->also->main;
    wiring_init(&t.wiring, f, v, &t.hazard->disables);
    add_disabled(&t);
    order_rows(&t);
    grow_rows(&t);
    const struct diagram *d = t.wiring.too_deep ? NULL : freeze(&t);
    if (d)
        add_diagram(&t, d);
    wiring_end(&t.wiring);
    if (!d)
        return too_intertwined(&b, "the response of", o->id,
                               "its schemes need more than %u diagram nodes, or nest too deep", e);
    add_ends(&t);
    compile_outcomes(&t);
    yearly_risks(&t);
    b.unit->main = x->risk;
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}

/* --- failures alone --- */

const struct diagram *hazard_uncleared(struct figures *f, const struct compiled *hazard,
                                       struct wiring *w)
{
    const struct hazard *h = hazard->object->data;
    wiring_init(w, f, hazard->variant, &h->disables);
    bfun uncleared = BFUN_TRUE;
    size_t *order = rows_in_order(f->arena, h);
    for (size_t i = 0; i < h->response.n; i++) {
        const struct response_row *row = row_at(h, order[i]);
        if (!row->cleared_by)
            continue;
        wiring_order(w, row->cleared_by);
        bfun clears = wiring_works(w, row->cleared_by);
        if (row->breaker_failure_of)
            clears =
                diagram_and(w->builder, clears,
                            wiring_trips(w, row_named(h, row->breaker_failure_of)->cleared_by));
        uncleared = diagram_ite(w->builder, clears, BFUN_FALSE, uncleared);
    }
    return diagram_freeze(f->arena, w->builder, 1, &uncleared);
}

/* --- schemes by themselves --- */

static void add_scheme(struct building *b, struct scheme_exports *x, struct wiring *w)
{
    struct figures *f = b->figures;
    node_id *args = wiring_arguments(b, w);
    x->n_events = w->events.n;
    x->events = w->events.at;
    x->span = span_of(f, x->n_events, wiring_behaviours(f->arena, w));
    x->node = graph_diagram_over(f->graph, x->diagram, x->n_events, args, &x->span.windows);
    node_id *values = NEW_ARRAY(f->arena, x->span.windows.n + 1, node_id);
    values[0] = graph_pick(f->graph, x->node, 0);
    for (uint32_t i = 0; i < x->span.windows.n; i++) {
        const char *label = span_label(f, &x->span, i);
        values[i] = graph_pick_in(f->graph, x->node, i, 0);
        if (label)
            compiled_add(b, PROPERTY_FAILS, label, NULL, values[i], NULL, NULL);
    }
    b->unit->main =
        compiled_add(b, PROPERTY_FAILS, NULL, NULL, span_mean(b, &x->span, values), NULL, NULL);
}

ohmen_status compile_scheme(struct figures *f, const struct variant *v, const struct object *o,
                            struct compiled **out, ohmen_error *e)
{
    struct building b;
    struct wiring w;
    struct scheme_exports *x = NEW(f->arena, struct scheme_exports);
    compiled_begin(f, v, o, o->id, &b);
    wiring_init(&w, f, v, NULL);
    wiring_order(&w, o->id);
    bfun fails = diagram_not(w.builder, wiring_works(&w, o->id));
    x->diagram = w.too_deep ? NULL : diagram_freeze(f->arena, w.builder, 1, &fails);
    b.unit->exports = x;
    if (x->diagram)
        add_scheme(&b, x, &w);
    wiring_end(&w);
    if (!x->diagram)
        return too_intertwined(&b, "the scheme", o->id,
                               "it needs more than %u diagram nodes, or nests too deep", e);
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}
