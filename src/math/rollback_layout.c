/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Laying out trees and graphs of choices and chances (rollback.h). Owns the builder and what it
 * lays out, all in the builder's arena.
 *
 * Places are given from the root on, in the order in which their parents got theirs; a node gets
 * one when the last of its parents is at it, so that it comes behind everything that refers to it
 * (A. B. Kahn, "Topological sorting of large networks", CACM 5 (1962) 558-562, from memory). */
#include <assert.h>
#include <string.h>

#include "base/array.h"
#include "math/rollback.h"

struct node {
    enum rollback_kind kind;
    uint32_t arity;
    double amount;
    size_t first; /* of its children in `children` */
};

struct rollback_builder {
    struct arena *arena;
    ARRAY(struct node) nodes;
    ARRAY(size_t) children;
    ARRAY(double) probabilities; /* as `children` */
};

struct rollback_builder *rollback_new(struct arena *a)
{
    struct rollback_builder *b = NEW(a, struct rollback_builder);
    b->arena = a;
    return b;
}

static bool has_arity(enum rollback_kind kind, uint32_t arity)
{
    switch (kind) {
    case ROLLBACK_END: return arity == 0;
    case ROLLBACK_STEP: return arity == 1;
    case ROLLBACK_CHOOSE:
    case ROLLBACK_CHANCE: return arity > 0;
    case ROLLBACK_LINK: break;
    }
    return false;
}

size_t rollback_add(struct rollback_builder *b, enum rollback_kind kind, double amount,
                    uint32_t arity, const size_t *child, const double *probability)
{
    assert(has_arity(kind, arity) && (kind == ROLLBACK_CHANCE) == (probability != NULL));
    size_t first = b->children.n;
    array_reserve(b->arena, &b->children, arity);
    array_reserve(b->arena, &b->probabilities, arity);
    for (uint32_t k = 0; k < arity; k++) {
        b->children.at[first + k] = child[k];
        b->probabilities.at[first + k] = probability ? probability[k] : 0;
    }
    b->children.n = b->probabilities.n = first + arity;
    *array_push(b->arena, &b->nodes) = (struct node){kind, arity, amount, first};
    return b->nodes.n - 1;
}

/* ---- what the root leads to ---- */

enum visit { UNSEEN, OPEN, DONE }; /* OPEN: what is under it is being gone through */

struct walk {
    const struct rollback_builder *b;
    unsigned char *visit;
    size_t *parents; /* how often each node is a child */
    size_t n_reached, n_places;
    size_t depth, *path; /* the open nodes, from the root */
    uint32_t *next;      /* which child of each comes next */
};

static void enter(struct walk *w, size_t node)
{
    w->visit[node] = OPEN;
    w->path[w->depth] = node;
    w->next[w->depth++] = 0;
    w->n_places += w->b->nodes.at[node].arity;
}

/* Depth first, without recursion. The node where a circle closes, NOWHERE when none does. */
static size_t walk_from(struct walk *w, size_t root)
{
    w->n_places = 1;
    enter(w, root);
    while (w->depth) {
        size_t at = w->path[w->depth - 1];
        const struct node *node = &w->b->nodes.at[at];
        if (w->next[w->depth - 1] == node->arity) {
            w->visit[at] = DONE;
            w->depth--;
            continue;
        }
        size_t child = w->b->children.at[node->first + w->next[w->depth - 1]++];
        assert(child < w->b->nodes.n);
        if (w->visit[child] == OPEN)
            return child;
        w->parents[child]++;
        if (w->visit[child] == UNSEEN)
            enter(w, child);
    }
    return ROLLBACK_NOWHERE;
}

static struct walk walk_new(struct arena *scratch, const struct rollback_builder *b)
{
    size_t n = b->nodes.n;
    return (struct walk){
        .b = b,
        .visit = NEW_ARRAY(scratch, n, unsigned char),
        .parents = NEW_ARRAY(scratch, n, size_t),
        .path = NEW_ARRAY(scratch, n, size_t),
        .next = NEW_ARRAY(scratch, n, uint32_t),
    };
}

/* ---- places ---- */

struct layout {
    const struct rollback_builder *b;
    size_t *parents; /* that have not come to it yet */
    struct rollback *to;
    size_t n;              /* places given */
    size_t *node;          /* at each place the builder's node, the one that a LINK stands for */
    unsigned char *linked; /* whether it is a LINK */
    size_t *place, *link;
    ARRAY(struct rollback_run) runs;
};

/* Gives a place to what stands under a parent. */
static void put(struct layout *l, size_t node, double probability)
{
    size_t at = l->n++;
    bool last = l->parents[node] == 0 || --l->parents[node] == 0;
    l->node[at] = node;
    l->linked[at] = !last;
    l->to->probability[at] = probability;
    if (last) {
        l->place[node] = at;
        l->to->amount[at] = l->b->nodes.at[node].amount;
    }
}

/* The run that the place belongs to, which is behind all others. */
static void extend_runs(struct layout *l, size_t at, enum rollback_kind kind, uint32_t arity)
{
    struct rollback_run *last = l->runs.n ? array_last(&l->runs) : NULL;
    bool parent = last && last->kind != ROLLBACK_LINK && last->arity && at >= last->first_child;
    if (!last || last->kind != kind || last->arity != arity || parent) {
        size_t first_child = kind == ROLLBACK_LINK ? l->to->n_links : l->n;
        last = array_push(l->b->arena, &l->runs);
        *last = (struct rollback_run){kind, arity, 0, at, first_child};
    }
    last->n++;
}

static void lay(struct layout *l, size_t at)
{
    const struct node *node = &l->b->nodes.at[l->node[at]];
    if (l->linked[at]) {
        extend_runs(l, at, ROLLBACK_LINK, 1);
        l->link[l->to->n_links++] = l->node[at];
        return;
    }
    extend_runs(l, at, node->kind, node->arity);
    for (uint32_t k = 0; k < node->arity; k++)
        put(l, l->b->children.at[node->first + k], l->b->probabilities.at[node->first + k]);
}

static struct layout layout_new(struct arena *scratch, const struct walk *w)
{
    struct arena *a = w->b->arena;
    struct rollback *to = NEW(a, struct rollback);
    to->n = w->n_places;
    to->amount = NEW_ARRAY(a, to->n, double);
    to->probability = NEW_ARRAY(a, to->n, double);
    return (struct layout){
        .b = w->b,
        .parents = w->parents,
        .to = to,
        .node = NEW_ARRAY(scratch, to->n, size_t),
        .linked = NEW_ARRAY(scratch, to->n, unsigned char),
        .place = NEW_ARRAY(a, w->b->nodes.n, size_t),
        .link = NEW_ARRAY(scratch, to->n, size_t),
    };
}

static const struct rollback *lay_all(struct layout *l, size_t root)
{
    struct rollback *to = l->to;
    for (size_t i = 0; i < l->b->nodes.n; i++)
        l->place[i] = ROLLBACK_NOWHERE;
    put(l, root, 0);
    for (size_t at = 0; at < l->n; at++)
        lay(l, at);
    for (size_t i = 0; i < to->n_links; i++)
        l->link[i] = l->place[l->link[i]];
    to->link = arena_copy(l->b->arena, l->link, to->n_links * sizeof *l->link);
    to->runs = l->runs.at;
    to->n_runs = l->runs.n;
    to->place = l->place;
    return to;
}

const struct rollback *rollback_lay_out(struct rollback_builder *b, size_t root, size_t *circle)
{
    assert(root < b->nodes.n);
    struct arena *scratch = arena_child(b->arena);
    struct walk w = walk_new(scratch, b);
    size_t closes = walk_from(&w, root);
    const struct rollback *r = NULL;
    if (closes == ROLLBACK_NOWHERE) {
        struct layout l = layout_new(scratch, &w);
        r = lay_all(&l, root);
    } else
        *circle = closes;
    arena_free(scratch);
    return r;
}

/* ---- finding ---- */

static const struct rollback_run *run_of(const struct rollback *r, size_t at)
{
    size_t low = 0, high = r->n_runs;
    assert(at < r->n);
    while (high - low > 1) {
        size_t middle = low + (high - low) / 2;
        if (r->runs[middle].first <= at)
            low = middle;
        else
            high = middle;
    }
    return &r->runs[low];
}

size_t rollback_child(const struct rollback *r, size_t at, uint32_t k)
{
    const struct rollback_run *run = run_of(r, at);
    assert(run->kind != ROLLBACK_LINK && k < run->arity);
    return run->first_child + (at - run->first) * run->arity + k;
}

size_t rollback_meant(const struct rollback *r, size_t at)
{
    const struct rollback_run *run = run_of(r, at);
    return run->kind == ROLLBACK_LINK ? r->link[run->first_child + (at - run->first)] : at;
}
