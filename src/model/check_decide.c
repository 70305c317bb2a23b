/* SPDX-License-Identifier: GPL-3.0-or-later */
/* States and options: names that refer inside an object, probabilities that sum to 1. Decisions:
 * check_tree.c. */
#include "model/check.h"

#include <math.h>
#include <string.h>

bool check_has_row(const struct rows *rows, const char *key)
{
    for (size_t i = 0; i < rows->n; i++)
        if (text_equal(rows->keys[i], key))
            return true;
    return false;
}

void check_named(struct checking *c, const struct rows *rows, const char *key, struct place at,
                 const char *what)
{
    if (check_has_row(rows, key))
        return;
    struct nearest near;
    nearest_init(&near, key);
    for (size_t i = 0; i < rows->n; i++)
        nearest_offer(&near, rows->keys[i]);
    diag_add(c->diags, at, "there is no %s \"%s\"%s", what, key, nearest_hint(c->arena, &near));
}

/* --- states --- */

static const struct quantity *plain_share(const struct rows *rows, size_t i)
{
    return ((struct quantity *const *)rows->at)[i];
}

static void expect_keys(struct checking *c, const struct rows *states, const struct node *map)
{
    for (size_t i = 0; map && i < map->n; i++)
        check_named(c, states, map->pairs[i].key, map->pairs[i].place, "state");
}

/* One probability for each reading, summing to 1. */
static void check_reliability(struct checking *c, const struct reading_test *t, size_t row,
                              const struct node *node)
{
    const struct list *p = &((const struct list *)t->given.at)[row];
    double sum = 0;
    for (size_t i = 0; i < p->n; i++) {
        const struct quantity *q = ((struct quantity *const *)p->at)[i];
        if (!quantity_is_constant(q)) {
            diag_add(c->diags, node->items[i]->place, "a plain number is needed here");
            return;
        }
        sum += expr_constant(q->expr);
    }
    char text[32];
    if (p->n != t->reads.n)
        diag_add(c->diags, node->place,
                 "expected %zu probabilities, one for each reading, found %zu", t->reads.n, p->n);
    else if (fabs(sum - 1) > 1e-9)
        diag_add(c->diags, node->place,
                 "the probabilities of the readings sum to %s %%, expected 100 %%",
                 text_double(text, round(sum * 1e10) / 1e8));
}

static void check_survey(struct checking *c, const struct rows *states,
                         const struct reading_test *t, const struct node *node)
{
    const struct node *given = node_get(node, "given");
    expect_keys(c, states, given);
    for (size_t i = 0; i < t->given.n; i++)
        check_reliability(c, t, i, given->pairs[i].value);
    for (size_t i = 0; i < states->n; i++)
        if (!check_has_row(&t->given, states->keys[i]))
            diag_add(c->diags, given->place, "the readings in the state \"%s\" are missing",
                     states->keys[i]);
}

/* States are what they are whatever state another is in: their changes leave states alone. */
static void check_when(struct checking *c, const struct rows *states, const struct node *when)
{
    expect_keys(c, states, when);
    for (size_t i = 0; when && i < when->n; i++) {
        const struct node *change = when->pairs[i].value;
        for (size_t s = 0; s < change->n; s++)
            if (text_equal(change->pairs[s].key, kinds[KIND_STATE].section))
                diag_add(c->diags, change->pairs[s].place, "a state cannot change states");
    }
}

/* What is unknown is one of several states, each with a plain probability. */
static void check_probabilities(struct checking *c, const struct state *s, const struct node *is)
{
    for (size_t i = 0; i < s->is.n; i++) {
        const struct quantity *q = plain_share(&s->is, i);
        if (q->expr && !quantity_is_constant(q) && check_is_certain(c, q)) /* else it is told */
            diag_add(c->diags, is->pairs[i].value->place, "a plain number is needed here");
    }
}

/* Transitions lead from one state to another, and only what is unknown makes them. */
static void check_becomes(struct checking *c, const struct state *s, const struct node *becomes)
{
    const struct rows *states = state_values(s);
    expect_keys(c, states, becomes);
    for (size_t i = 0; becomes && i < becomes->n; i++) {
        const struct pair *from = &becomes->pairs[i];
        expect_keys(c, states, from->value);
        for (size_t k = 0; k < from->value->n; k++)
            if (text_equal(from->value->pairs[k].key, from->key))
                diag_add(c->diags, from->value->pairs[k].place,
                         "\"%s\" cannot become \"%s\": it stays what it is", from->key, from->key);
    }
}

/* Outcomes exist, and lead to a state. */
static void check_failures(struct checking *c, const struct state *s, const struct node *failures)
{
    for (size_t i = 0; i < s->failures.n; i++) {
        const struct hazard *h = model_get(c->model, KIND_HAZARD, s->failures.keys[i]);
        const struct rows *to = &((const struct rows *)s->failures.at)[i];
        for (size_t k = 0; h && k < to->n; k++) {
            const struct pair *row = &failures->pairs[i].value->pairs[k];
            check_named(c, &h->outcomes, to->keys[k], row->place, "outcome");
            check_named(c, state_values(s), ((const char *const *)to->at)[k], row->value->place,
                        "state");
        }
    }
}

/* What varies from time to time is neither surveyed nor renewed. */
static void check_only_unknown(struct checking *c, const struct object *o)
{
    static const char *const keys[] = {"becomes", "failures", "renewed-by", "tests"};
    const struct state *s = o->data;
    for (size_t i = 0; i < sizeof keys / sizeof *keys && !s->is.n; i++) {
        const struct node *value = node_get(o->node, keys[i]);
        if (value)
            diag_add(c->diags, value->place,
                     "\"%s\" belongs to a state that \"is\" unknown, and this one varies", keys[i]);
    }
}

void check_state(struct checking *c, const struct object *o)
{
    const struct state *s = o->data;
    const struct rows *states = state_values(s);
    const struct node *node = node_get(o->node, s->is.n ? "is" : "varies");
    if (!node) {
        diag_add(c->diags, o->node->place, "this state has no values");
        return;
    }
    check_shares(c, node, states, plain_share, "probabilities of the states");
    check_only_unknown(c, o);
    if (s->is.n)
        check_probabilities(c, s, node);
    check_when(c, states, node_get(o->node, "when"));
    check_becomes(c, s, node_get(o->node, "becomes"));
    check_failures(c, s, node_get(o->node, "failures"));
    const struct node *renewed = node_get(o->node, "renewed-by");
    for (size_t i = 0; i < s->renewed_by.n; i++)
        check_named(c, states, ((const char *const *)s->renewed_by.at)[i],
                    renewed->pairs[i].value->place, "state");
    const struct node *tests = node_get(o->node, "tests");
    for (size_t i = 0; i < s->tests.n; i++)
        check_survey(c, states, ROW(struct reading_test, s->tests, i), tests->pairs[i].value);
}

/* --- options --- */

/* Renewals are told apart by their year. */
#define SHORTEST_RENEWED_LIFE 1.0 /* a */

void check_service(struct checking *c, const struct object *o)
{
    const struct option *p = o->data;
    const struct node *renewed = node_get(o->node, "renewed");
    if (!p->renewed)
        return;
    if (!p->life)
        diag_add(c->diags, renewed->place,
                 "an option that is renewed needs \"life\": after which time?");
    else if (expr_constant(p->life->expr) < SHORTEST_RENEWED_LIFE)
        diag_add(c->diags, node_get(o->node, "life")->place,
                 "an option that is renewed lasts 1 a or more");
    if (!p->invest)
        diag_add(c->diags, renewed->place,
                 "an option that is renewed needs \"invest\": what does it cost each time?");
}

/* An option settles what it and another one say, once: where both do, they say the same. */
void check_combinations(struct checking *c, const struct object *o)
{
    const struct option *p = o->data;
    const struct node *node = node_get(o->node, "combine");
    for (size_t i = 0; i < p->combine.n; i++) {
        const struct pair *row = &node->pairs[i];
        const struct object *other = model_find(c->model, row->key);
        const struct node *theirs = other && other->kind == KIND_OPTION
                                        ? node_get(node_get(other->node, "combine"), o->id)
                                        : NULL;
        if (text_equal(row->key, o->id))
            diag_add(c->diags, row->place, "an option cannot name itself in \"combine\"");
        else if (theirs && text_compare(row->key, o->id) < 0 && !node_equal(theirs, row->value))
            diag_add(c->diags, row->place,
                     "the options \"%s\" and \"%s\" each have a \"combine\" for the other, and "
                     "these differ",
                     o->id, row->key);
    }
}
