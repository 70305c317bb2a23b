/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Decisions: what stands in trees exists, probabilities sum to 1, nothing contains itself, and no
 * path takes an option twice or waits beyond the horizon. */
#include "model/check.h"

#include <math.h>
#include <string.h>

struct tree_check {
    struct checking *c;
    const struct decision *decision;
    const struct node *node; /* of the decision */
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

static void no_state(struct checking *c, const char *id, struct place at)
{
    struct nearest near;
    nearest_init(&near, id);
    for (size_t i = 0; i < c->model->by_id.n; i++) {
        const struct object *o = c->model->by_id.at[i].value;
        if (o && o->kind == KIND_STATE)
            nearest_offer(&near, o->id);
    }
    diag_add(c->diags, at, "there is no state \"%s\"%s", id, nearest_hint(c->arena, &near));
}

/* Each reading has its branch, and each branch its reading. */
static void check_readings(struct tree_check *t, const struct reading_test *test,
                           const struct step *s, const struct node *node)
{
    const struct node *reads = node_get(node, "reads");
    for (size_t r = 0; r < test->reads.n; r++)
        if (!check_has_row(&s->reads, test->reads.at[r]))
            diag_add(t->c->diags, node->place, "the reading \"%s\" has no branch",
                     test->reads.at[r]);
    for (size_t k = 0; k < s->reads.n; k++) {
        struct nearest near;
        size_t r = 0;
        nearest_init(&near, s->reads.keys[k]);
        for (; r < test->reads.n && !text_equal(test->reads.at[r], s->reads.keys[k]); r++)
            nearest_offer(&near, test->reads.at[r]);
        if (r == test->reads.n)
            diag_add(t->c->diags, reads->pairs[k].place, "this test reads no \"%s\"%s",
                     s->reads.keys[k], nearest_hint(t->c->arena, &near));
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
        no_state(t->c, id, at);
        return;
    }
    if (!state->is.n) {
        diag_add(t->c->diags, at, "\"%s\" is an operating state, which varies and is known", id);
        return;
    }
    check_named(t->c, &state->tests, dot + 1, at, "test of this state");
    for (size_t i = 0; i < state->tests.n; i++) {
        const struct reading_test *test = ROW(struct reading_test, state->tests, i);
        if (!text_equal(state->tests.keys[i], dot + 1))
            continue;
        check_readings(t, test, s, node);
    }
}

static void check_branches(struct tree_check *t, const struct node *node, const char *key)
{
    const struct node *branches = node_get(node, key);
    if (branches && branches->n == 0)
        diag_add(t->c->diags, branches->place, "\"%s\" has no branches: at least one is needed",
                 key);
}

static void check_step(struct tree_check *t, const struct step *s, const struct node *node,
                       bool last)
{
    check_branches(t, node, "choose");
    check_branches(t, node, "chance");
    bool ends = s->choose.n || s->chance.n || s->inspect || s->go;
    if (ends && !last)
        diag_add(t->c->diags, node->place,
                 "a choice, a chance or an inspection is the last step of a branch");
    if (s->reads.n && !s->inspect)
        diag_add(t->c->diags, node_get(node, "reads")->place, "\"reads\" belongs to \"inspect\"");
    if (s->go && !check_has_row(&t->decision->subtrees, s->go))
        check_named(t->c, &t->decision->subtrees, s->go, node_get(node, "go")->place, "subtree");
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

/* --- paths --- */

/* Steps that are followed at most, over all paths; what lies beyond is told when it is weighed. */
#define STEPS_FOLLOWED 100000

/* Options on one path. */
#define APPLIED_MOST 64

struct following {
    struct tree_check *t;
    size_t steps;
    double horizon; /* years; INFINITY where the register says nothing */
};

/* On the way to a step. */
struct way {
    double time;
    size_t n;
    const char *applied[APPLIED_MOST];
};

static void follow_steps(struct following *f, const struct list *steps, const struct node *node,
                         struct way way);

static void follow_rows(struct following *f, const struct rows *rows, const struct node *node,
                        const struct way *way)
{
    for (size_t i = 0; i < rows->n; i++)
        follow_steps(f, &((const struct list *)rows->at)[i], node->pairs[i].value, *way);
}

static void follow_subtree(struct following *f, const char *name, const struct way *way)
{
    const struct decision *d = f->t->decision;
    const struct node *all = node_get(f->t->node, "subtrees");
    size_t k = subtree_named(d, name);
    if (k < d->subtrees.n)
        follow_steps(f, &((const struct list *)d->subtrees.at)[k], all->pairs[k].value, *way);
}

static void follow_option(struct following *f, const struct step *s, const struct node *node,
                          struct way *way)
{
    struct place at = node_get(node, "apply")->place;
    for (size_t i = 0; i < way->n; i++)
        if (text_equal(way->applied[i], s->apply)) {
            diag_add(f->t->c->diags, at, "the option \"%s\" is applied twice on this path",
                     s->apply);
            return;
        }
    if (way->n < APPLIED_MOST)
        way->applied[way->n++] = s->apply;
}

static void follow_wait(struct following *f, const struct step *s, const struct node *node,
                        struct way *way)
{
    double before = way->time;
    char sum[32], limit[32];
    way->time += expr_constant(s->wait->expr);
    if (before < f->horizon && way->time >= f->horizon)
        diag_add(f->t->c->diags, node_get(node, "wait")->place,
                 "the waits of this path come to %s a, and the horizon ends after %s a",
                 text_double(sum, way->time), text_double(limit, f->horizon));
}

static void follow_steps(struct following *f, const struct list *steps, const struct node *node,
                         struct way way)
{
    for (size_t i = 0; i < steps->n && f->steps < STEPS_FOLLOWED; i++) {
        const struct step *s = ((struct step *const *)steps->at)[i];
        const struct node *at = node->items[i];
        f->steps++;
        if (s->apply)
            follow_option(f, s, at, &way);
        if (s->wait)
            follow_wait(f, s, at, &way);
        if (s->go)
            follow_subtree(f, s->go, &way);
        follow_rows(f, &s->choose, node_get(at, "choose"), &way);
        follow_rows(f, &s->reads, node_get(at, "reads"), &way);
        const struct node *chance = node_get(at, "chance");
        for (size_t k = 0; k < s->chance.n; k++) {
            const struct node *then = node_get(chance->pairs[k].value, "then");
            if (then)
                follow_steps(f, &ROW(struct fork, s->chance, k)->then, then, way);
        }
    }
}

static double horizon_of(const struct model *m)
{
    const struct quantity *h = m->settings ? m->settings->horizon : NULL;
    return h && quantity_is_constant(h) ? expr_constant(h->expr) : INFINITY;
}

/* --- choices that come again --- */

/* How often a choice may come within the horizon. */
#define CHOICES_MOST 1000

static void check_every(struct tree_check *t, double horizon)
{
    const struct decision *d = t->decision;
    struct diags *diags = t->c->diags;
    const struct node *every = node_get(t->node, "every"), *sees = node_get(t->node, "sees");
    char often[32], limit[32];
    if (sees && !every)
        diag_add(diags, sees->place,
                 "\"sees\" belongs to a choice that comes again: give \"every\"");
    if (every && !d->choose.n)
        diag_add(diags, every->place, "\"every\" belongs to \"choose\"");
    for (size_t i = 0; sees && i < d->sees.n; i++) {
        const struct state *s = model_get(t->c->model, KIND_STATE, d->sees.at[i]);
        if (s && !s->is.n)
            diag_add(diags, sees->items[i]->place,
                     "\"%s\" is an operating state, which varies and is known", d->sees.at[i]);
    }
    if (!d->every || !quantity_is_constant(d->every))
        return;
    double time = expr_constant(d->every->expr);
    if (time >= horizon)
        diag_add(diags, every->place,
                 "the choice never comes again: the horizon ends after %s a; leave \"every\" out",
                 text_double(limit, horizon));
    else if (horizon / time > CHOICES_MOST)
        diag_add(diags, every->place,
                 "the choice would come %s times within the horizon, at most %d are possible",
                 text_double(often, ceil(horizon / time)), CHOICES_MOST);
}

/* Names that alternatives have anyway. */
static void check_names(struct tree_check *t, const struct node *choose)
{
    const struct decision *d = t->decision;
    for (size_t i = 0; i < d->choose.n; i++) {
        bool nothing = text_equal(d->choose.keys[i], "do-nothing");
        if (nothing && ((const struct list *)d->choose.at)[i].n)
            diag_add(t->c->diags, choose->pairs[i].place,
                     "\"do-nothing\" is the name of doing nothing: it has no steps");
        if (d->every && text_equal(d->choose.keys[i], "policy"))
            diag_add(t->c->diags, choose->pairs[i].place,
                     "\"policy\" is the name of choosing the best each time: give another name");
    }
}

void check_decision(struct checking *c, const struct object *o)
{
    const struct decision *d = o->data;
    struct tree_check t = {c, d, o->node};
    const struct node *choose = node_get(o->node, "choose");
    struct following f = {&t, 0, horizon_of(c->model)};
    size_t errors = c->diags->list.n;
    struct way start = {0};
    check_branches(&t, o->node, "choose");
    check_alternatives(&t, &d->choose, choose);
    check_subtrees(&t, node_get(o->node, "subtrees"));
    check_every(&t, f.horizon);
    if (choose)
        check_names(&t, choose);
    if (choose && c->diags->list.n == errors)
        follow_rows(&f, &d->choose, choose, &start);
}
