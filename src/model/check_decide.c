/* SPDX-License-Identifier: GPL-3.0-or-later */
/* States and decisions: names that refer inside an object, probabilities that sum to 1. */
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

static void expect_row(struct checking *c, const struct rows *rows, const char *key,
                       struct place at, const char *what)
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
        expect_row(c, states, map->pairs[i].key, map->pairs[i].place, "state");
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
        if (q->expr && !quantity_is_constant(q))
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
            expect_row(c, &h->outcomes, to->keys[k], row->place, "outcome");
            expect_row(c, state_values(s), ((const char *const *)to->at)[k], row->value->place,
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
        expect_row(c, states, ((const char *const *)s->renewed_by.at)[i],
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

/* --- decisions --- */

struct tree_check {
    struct checking *c;
    const struct decision *decision;
};

static void check_steps(struct tree_check *t, const struct list *steps, const struct node *node);

static void check_alternatives(struct tree_check *t, const struct rows *rows,
                               const struct node *node)
{
    for (size_t i = 0; i < rows->n; i++)
        check_steps(t, &((const struct list *)rows->at)[i], node->pairs[i].value);
}

static const struct quantity *share_of_fork(const struct rows *rows, size_t i)
{
    return ROW(struct fork, *rows, i)->p;
}

static void check_chance(struct tree_check *t, const struct rows *forks, const struct node *node)
{
    check_shares(t->c, node, forks, share_of_fork, "probabilities of these branches");
    for (size_t i = 0; i < forks->n; i++) {
        const struct node *then = node_get(node->pairs[i].value, "then");
        if (then)
            check_steps(t, &ROW(struct fork, *forks, i)->then, then);
    }
}

/* "STATE.TEST": both exist, and each reading has its branch. */
static void check_inspect(struct tree_check *t, const struct step *s, const struct node *node)
{
    struct place at = node_get(node, "inspect")->place;
    const char *dot = strchr(s->inspect, '.');
    if (!dot) {
        diag_add(t->c->diags, at,
                 "expected the state and its test, such as T2-WINDING.OIL, found \"%s\"",
                 s->inspect);
        return;
    }
    const char *id = arena_strn(t->c->arena, s->inspect, (size_t)(dot - s->inspect));
    const struct state *state = model_get(t->c->model, KIND_STATE, id);
    if (!state) {
        diag_add(t->c->diags, at, "there is no state \"%s\"", id);
        return;
    }
    expect_row(t->c, &state->tests, dot + 1, at, "test of this state");
    for (size_t i = 0; i < state->tests.n; i++) {
        const struct reading_test *test = ROW(struct reading_test, state->tests, i);
        if (!text_equal(state->tests.keys[i], dot + 1))
            continue;
        for (size_t r = 0; r < test->reads.n; r++)
            if (!check_has_row(&s->reads, test->reads.at[r]))
                diag_add(t->c->diags, node->place, "the reading \"%s\" has no branch",
                         test->reads.at[r]);
    }
}

static void check_step(struct tree_check *t, const struct step *s, const struct node *node,
                       bool last)
{
    bool ends = s->choose.n || s->chance.n || s->inspect || s->go;
    if (ends && !last)
        diag_add(t->c->diags, node->place,
                 "a choice, a chance or an inspection is the last step of a branch");
    if (s->reads.n && !s->inspect)
        diag_add(t->c->diags, node_get(node, "reads")->place, "\"reads\" belongs to \"inspect\"");
    if (s->go && !check_has_row(&t->decision->subtrees, s->go))
        expect_row(t->c, &t->decision->subtrees, s->go, node_get(node, "go")->place, "subtree");
    if (s->inspect)
        check_inspect(t, s, node);
    check_alternatives(t, &s->reads, node_get(node, "reads"));
    check_alternatives(t, &s->choose, node_get(node, "choose"));
    if (s->chance.n)
        check_chance(t, &s->chance, node_get(node, "chance"));
}

static void check_steps(struct tree_check *t, const struct list *steps, const struct node *node)
{
    for (size_t i = 0; i < steps->n; i++)
        check_step(t, ((struct step *const *)steps->at)[i], node->items[i], i + 1 == steps->n);
}

/* Subtrees in one decision; each is visited once, one level of recursion a subtree. */
#define SUBTREES 200

enum { UNSEEN, OPEN, DONE };

static bool contains_itself(const struct decision *d, size_t k, char *state);

static size_t subtree_named(const struct decision *d, const char *name)
{
    size_t k = 0;
    while (k < d->subtrees.n && !text_equal(d->subtrees.keys[k], name))
        k++;
    return k;
}

static bool steps_lead_back(const struct decision *d, const struct list *steps, char *state)
{
    bool back = false;
    for (size_t i = 0; i < steps->n; i++) {
        const struct step *s = ((struct step *const *)steps->at)[i];
        size_t k = s->go ? subtree_named(d, s->go) : d->subtrees.n;
        back = back || (k < d->subtrees.n && contains_itself(d, k, state));
        for (size_t j = 0; j < s->reads.n; j++)
            back = back || steps_lead_back(d, &((const struct list *)s->reads.at)[j], state);
        for (size_t j = 0; j < s->choose.n; j++)
            back = back || steps_lead_back(d, &((const struct list *)s->choose.at)[j], state);
        for (size_t j = 0; j < s->chance.n; j++)
            back = back || steps_lead_back(d, &ROW(struct fork, s->chance, j)->then, state);
    }
    return back;
}

/* Depth-first over subtrees: meeting an open one again closes a circle. */
static bool contains_itself(const struct decision *d, size_t k, char *state)
{
    if (state[k] != UNSEEN)
        return state[k] == OPEN;
    state[k] = OPEN;
    bool back = steps_lead_back(d, &((const struct list *)d->subtrees.at)[k], state);
    state[k] = DONE;
    return back;
}

static void check_subtrees(struct tree_check *t, const struct node *node)
{
    const struct decision *d = t->decision;
    if (d->subtrees.n > SUBTREES) {
        diag_add(t->c->diags, node->place, "a decision may have %d subtrees, found %zu", SUBTREES,
                 d->subtrees.n);
        return;
    }
    check_alternatives(t, &d->subtrees, node);
    char *state = arena_alloc(t->c->arena, d->subtrees.n);
    for (size_t k = 0; k < d->subtrees.n; k++)
        if (contains_itself(d, k, state)) {
            diag_add(t->c->diags, node->pairs[k].place, "the subtree \"%s\" contains itself",
                     d->subtrees.keys[k]);
            return;
        }
}

void check_decision(struct checking *c, const struct object *o)
{
    const struct decision *d = o->data;
    struct tree_check t = {c, d};
    check_alternatives(&t, &d->choose, node_get(o->node, "choose"));
    check_subtrees(&t, node_get(o->node, "subtrees"));
}
