/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Hazards: the rows of the response, their order, shares, and the outcomes they end in. */
#include "model/check.h"

#include <math.h>
#include <stdlib.h>

/* --- shares --- */

/* Shares that sum to 1 within this are taken as they are. */
#define SHARE_TOLERANCE 1e-9

void check_shares(struct checking *c, const struct node *map, const struct rows *shares,
                  const struct quantity *(*share)(const struct rows *, size_t), const char *what)
{
    long double sum = 0; /* so that it rounds as the figure's own sum does */
    size_t rest = 0;
    bool constant = true;
    for (size_t i = 0; i < shares->n; i++) {
        const struct quantity *q = share(shares, i);
        if (!q)
            return; /* reported as missing */
        if (q->shape == SHAPE_EXPRESSION && !q->expr)
            rest++;
        else if (quantity_is_constant(q))
            sum += expr_constant(q->expr);
        else
            constant = false;
    }
    char text[32];
    if (rest > 1)
        diag_add(c->diags, map->place, "only one of the %s can be the rest", what);
    else if (rest == 0 && !constant)
        diag_add(c->diags, map->place,
                 "one of the %s must be the rest, since not all are plain numbers", what);
    else if (rest == 0 && fabsl(sum - 1) > SHARE_TOLERANCE)
        diag_add(c->diags, map->place,
                 "the %s sum to %s %%, expected 100 %%; one of them may be rest", what,
                 text_double(text, round((double)sum * 1e10) / 1e8));
    else if (rest == 1 && (double)sum > 1)
        diag_add(c->diags, map->place,
                 "the %s sum to %s %% already, which leaves nothing for the rest", what,
                 text_double(text, round((double)sum * 1e10) / 1e8));
}

static const struct quantity *share_of_branch(const struct rows *rows, size_t i)
{
    return ROW(struct branch, *rows, i)->share;
}

/* --- branches --- */

struct hazard_check {
    struct checking *c;
    const struct object *object;
    const struct hazard *hazard;
    const struct response_row *row; /* the one that is being looked at */
};

static bool uses_clearance(const struct outcome *o)
{
    for (size_t i = 0; i < o->damage.n; i++) {
        const struct damage_item *item = ROW(struct damage_item, o->damage, i);
        const struct quantity *q = item->is ? item->is : item->varies;
        if (q && q->shape == SHAPE_EXPRESSION && expr_uses(q->expr, EXPR_CLEARANCE))
            return true;
    }
    return false;
}

/* Damage that depends on the clearance time needs one in every row that leads to it. */
static void check_clearance(struct hazard_check *h, const struct outcome *o, const char *name,
                            const struct node *node)
{
    if (!h->row->in && uses_clearance(o))
        diag_add(h->c->diags, node->place,
                 "the damage of \"%s\" depends on clearance-time, but this row has no \"in\"",
                 name);
}

static void check_outcome_name(struct hazard_check *h, const char *name, const struct node *node)
{
    if (text_equal(name, "none"))
        return;
    struct nearest near;
    nearest_init(&near, name);
    for (size_t i = 0; i < h->hazard->outcomes.n; i++) {
        if (text_equal(h->hazard->outcomes.keys[i], name)) {
            check_clearance(h, ROW(struct outcome, h->hazard->outcomes, i), name, node);
            return;
        }
        nearest_offer(&near, h->hazard->outcomes.keys[i]);
    }
    diag_add(h->c->diags, node->place, "this hazard has no outcome \"%s\"%s", name,
             nearest_hint(h->c->arena, &near));
}

static void check_branch(struct hazard_check *h, const struct branch *b, const struct node *node);

static void check_split(struct hazard_check *h, const struct rows *split, const struct node *node)
{
    for (size_t i = 0; i < split->n; i++) {
        const struct branch *b = ROW(struct branch, *split, i);
        const struct node *child = node->pairs[i].value;
        if (!b->share)
            diag_add(h->c->diags, child->place, "this branch lacks its share; one may be rest");
        check_branch(h, b, child);
    }
    check_shares(h->c, node, split, share_of_branch, "shares of this split");
}

static void check_arm(struct hazard_check *h, const struct branch *arm, const struct node *node,
                      const char *key)
{
    const struct node *child = node_get(node, key);
    if (!arm) {
        diag_add(h->c->diags, node->place,
                 "\"if-works\" needs \"yes\" and \"no\"; \"%s\" is missing", key);
        return;
    }
    if (arm->share)
        diag_add(h->c->diags, node_get(child, "share")->place,
                 "only branches of a split have a share");
    check_branch(h, arm, child);
}

static void check_branch(struct hazard_check *h, const struct branch *b, const struct node *node)
{
    if (b->outcome)
        check_outcome_name(h, b->outcome, node_get(node, "outcome"));
    if (b->split.n)
        check_split(h, &b->split, node_get(node, "split"));
    else if (node_get(node, "split"))
        diag_add(h->c->diags, node_get(node, "split")->place, "this split has no branches");
    if (b->if_works) {
        check_arm(h, b->yes, node, "yes");
        check_arm(h, b->no, node, "no");
    } else if (b->yes || b->no) {
        const char *key = b->yes ? "yes" : "no";
        diag_add(h->c->diags, node_get(node, key)->place,
                 "\"%s\" belongs to \"if-works\", which is missing", key);
    }
}

/* --- rows --- */

static double clearance(const struct response_row *row)
{
    return row->in ? expr_constant(row->in->expr) : INFINITY;
}

/* The row whose breaker is backed up: another one that clears, and earlier. */
static void check_breaker_failure(struct hazard_check *h, const struct response_row *row,
                                  const struct node *node)
{
    const struct rows *rows = &h->hazard->response;
    const struct node *at = node_get(node, "breaker-failure-of");
    struct nearest near;
    if (!row->breaker_failure_of)
        return;
    if (!row->cleared_by)
        diag_add(h->c->diags, at->place,
                 "\"breaker-failure-of\" belongs to \"cleared-by\", which is missing");
    nearest_init(&near, row->breaker_failure_of);
    for (size_t i = 0; i < rows->n; i++) {
        const struct response_row *first = ROW(struct response_row, *rows, i);
        nearest_offer(&near, rows->keys[i]);
        if (!text_equal(rows->keys[i], row->breaker_failure_of))
            continue;
        if (first == row || !first->cleared_by || clearance(first) >= clearance(row))
            diag_add(h->c->diags, at->place,
                     "the row \"%s\" does not clear before this one: breaker failure protection "
                     "acts after the protection whose breaker it backs up",
                     rows->keys[i]);
        return;
    }
    diag_add(h->c->diags, at->place, "this hazard has no row \"%s\"%s", row->breaker_failure_of,
             nearest_hint(h->c->arena, &near));
}

static void check_row(struct hazard_check *h, const struct response_row *row,
                      const struct node *node)
{
    h->row = row;
    check_branch(h, &row->then, node);
    check_breaker_failure(h, row, node);
    if (row->cleared_by && !row->in)
        diag_add(h->c->diags, node->place,
                 "this row lacks \"in\", the clearance time: rows act in its order");
    if (!row->cleared_by && row->sees)
        diag_add(h->c->diags, node_get(node, "sees")->place,
                 "\"sees\" belongs to \"cleared-by\", which is missing");
}

/* 1100 ms and 1.1 s are the same time, whatever the last bit says. */
static bool same_time(const struct response_row *p, const struct response_row *q)
{
    double t = clearance(p), u = clearance(q);
    return fabs(t - u) <= 1e-12 * fmax(t, u);
}

static void check_equal_times(struct hazard_check *h, const struct node *rows_node)
{
    const struct rows *rows = &h->hazard->response;
    for (size_t i = 0; i < rows->n; i++)
        for (size_t j = 0; j < i; j++) {
            const struct response_row *p = ROW(struct response_row, *rows, i);
            const struct response_row *q = ROW(struct response_row, *rows, j);
            if (!p->cleared_by || !q->cleared_by || !p->in || !q->in || !same_time(p, q))
                continue;
            diag_add(h->c->diags, node_get(rows_node->pairs[i].value, "in")->place,
                     "the rows \"%s\" and \"%s\" have the same clearance time; which acts first?",
                     rows->keys[j], rows->keys[i]);
        }
}

/* The row without cleared-by is what happens when nothing clears. */
static void check_last_row(struct hazard_check *h, const struct node *rows_node)
{
    const struct rows *rows = &h->hazard->response;
    const char *last = NULL;
    for (size_t i = 0; i < rows->n; i++) {
        const struct response_row *row = ROW(struct response_row, *rows, i);
        if (row->cleared_by)
            continue;
        if (last)
            diag_add(h->c->diags, rows_node->pairs[i].place,
                     "the rows \"%s\" and \"%s\" both lack \"cleared-by\": exactly one row says "
                     "what happens "
                     "when nothing clears the fault",
                     last, rows->keys[i]);
        last = rows->keys[i];
    }
    if (!last)
        diag_add(
            h->c->diags, rows_node->place,
            "no row without \"cleared-by\": one row must say what happens when nothing clears the "
            "fault");
}

static void check_last_time(struct hazard_check *h, const struct node *rows_node)
{
    const struct rows *rows = &h->hazard->response;
    for (size_t i = 0; i < rows->n; i++) {
        const struct response_row *last = ROW(struct response_row, *rows, i);
        if (last->cleared_by || !last->in)
            continue;
        for (size_t j = 0; j < rows->n; j++) {
            const struct response_row *row = ROW(struct response_row, *rows, j);
            if (row->cleared_by && row->in && clearance(row) >= clearance(last)) {
                diag_add(h->c->diags, node_get(rows_node->pairs[i].value, "in")->place,
                         "the last row ends before the row \"%s\" acts", rows->keys[j]);
                return;
            }
        }
    }
}

/* --- categories --- */

static bool is_category(const struct register_settings *s, const char *category)
{
    for (size_t p = 0; p < s->perspectives.n; p++) {
        const struct names *names = &((const struct names *)s->perspectives.at)[p];
        for (size_t i = 0; i < names->n; i++)
            if (text_equal(names->at[i], category))
                return true;
    }
    return s->perspectives.n == 0;
}

static void unknown_category(struct checking *c, const char *category, struct place at)
{
    const struct register_settings *s = c->model->settings;
    struct nearest near;
    nearest_init(&near, category);
    for (size_t p = 0; p < s->perspectives.n; p++) {
        const struct names *names = &((const struct names *)s->perspectives.at)[p];
        for (size_t i = 0; i < names->n; i++)
            nearest_offer(&near, names->at[i]);
    }
    diag_add(c->diags, at, "no perspective of the register bears the category \"%s\"%s", category,
             nearest_hint(c->arena, &near));
}

static void check_categories(struct hazard_check *h)
{
    const struct node *outcomes = node_get(h->object->node, "outcomes");
    for (size_t i = 0; i < h->hazard->outcomes.n; i++) {
        const struct outcome *o = ROW(struct outcome, h->hazard->outcomes, i);
        const struct node *damage = node_get(outcomes->pairs[i].value, "damage");
        for (size_t k = 0; k < o->damage.n; k++) {
            const char *category = ROW(struct damage_item, o->damage, k)->category;
            if (!is_category(h->c->model->settings, category))
                unknown_category(h->c, category,
                                 node_get(damage->pairs[k].value, "category")->place);
        }
    }
}

void check_hazard(struct checking *c, const struct object *o)
{
    struct hazard_check h = {c, o, o->data, NULL};
    const struct node *rows_node = node_get(o->node, "response");
    for (size_t i = 0; i < h.hazard->response.n; i++)
        check_row(&h, ROW(struct response_row, h.hazard->response, i), rows_node->pairs[i].value);
    check_last_row(&h, rows_node);
    check_equal_times(&h, rows_node);
    check_last_time(&h, rows_node);
    check_categories(&h);
    check_supply(c, o);
}
