/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Decision diagrams beside a packaged library.
 *
 *     diagrams COUNT
 *
 * That many different structures of two main schemes and a backup over 12 to 60 elements are
 * drawn first. Then, RUNS times in turn: all of them are built, frozen and evaluated with
 * src/graph/diagram, a builder each; and the same functions are built with BuDDy, with the same
 * order of variables, in one table of a size that suits it, started once outside of the times. The
 * two must have the same number of nodes. Owns the arenas and BuDDy's tables. */
#include <bdd.h>
#include <stdio.h>
#include <stdlib.h>

#include "chains.h"
#include "median.h"

enum { LEAST_ELEMENTS = 12, VECTORS = 64, BUDDY_NODES = 20000, BUDDY_CACHE = 5000 };

struct bench {
    struct arena *arena;
    size_t n;
    struct chains *chains;
    const struct diagram **diagrams;
    double p[MOST_ELEMENTS], q[MOST_ELEMENTS], *work;
    double sum; /* so that nothing can be left out */
};

static _Noreturn void fail(const char *why)
{
    fprintf(stderr, "diagrams: %s\n", why);
    exit(EXIT_FAILURE);
}

/* ---- ours ---- */

static void evaluate(struct bench *b, const struct diagram *d)
{
    double results[MOST_SCHEMES + 1];
    diagram_evaluate(d, b->p, b->q, b->work, results);
    b->sum += results[MOST_SCHEMES];
}

static double ours(struct bench *b)
{
    double begin = bench_now();
    struct arena *a = arena_child(b->arena);
    for (size_t i = 0; i < b->n; i++)
        evaluate(b, chains_diagram(a, &b->chains[i]));
    arena_free(a);
    return bench_now() - begin;
}

static double ours_alone(struct bench *b)
{
    double begin = bench_now();
    for (size_t i = 0; i < b->n; i++)
        for (int k = 0; k < VECTORS; k++)
            evaluate(b, b->diagrams[i]);
    return bench_now() - begin;
}

/* ---- theirs ---- */

/* What is referred to until the function is done. */
struct held {
    size_t n;
    BDD at[MOST_GATES * MOST_PARTS * MOST_PARTS];
};

static BDD hold(struct held *h, BDD f)
{
    return h->at[h->n++] = bdd_addref(f);
}

/* As diagram_at_least does it. */
static BDD buddy_gate(struct held *h, const struct gate *g, const BDD *works)
{
    BDD enough[MOST_PARTS + 1] = {bddtrue};
    if (g->n == 0)
        return bdd_nithvar(g->variable);
    for (unsigned j = 1; j <= g->k; j++)
        enough[j] = bddfalse;
    for (unsigned i = g->n; i-- > 0;) {
        unsigned least = g->k > i ? g->k - i : 1;
        for (unsigned j = g->k; j >= least && j > 0; j--)
            enough[j] = hold(h, bdd_ite(works[g->part[i]], enough[j - 1], enough[j]));
    }
    return enough[g->k];
}

static void buddy_build(struct held *h, const struct chains *c, BDD ends[])
{
    BDD works[MOST_GATES], none = bddtrue;
    for (unsigned i = 0; i < c->n_gates; i++)
        works[i] = buddy_gate(h, &c->gate[i], works);
    for (unsigned i = 0; i < c->n_schemes; i++) {
        ends[i] = hold(h, bdd_apply(none, works[c->scheme[i]], bddop_and));
        none = hold(h, bdd_apply(none, works[c->scheme[i]], bddop_diff));
    }
    ends[c->n_schemes] = none;
}

static void let_go(struct held *h)
{
    while (h->n)
        bdd_delref(h->at[--h->n]);
}

static double theirs(struct bench *b)
{
    struct held held = {0};
    BDD ends[MOST_SCHEMES + 1];
    double begin = bench_now();
    for (size_t i = 0; i < b->n; i++) {
        buddy_build(&held, &b->chains[i], ends);
        let_go(&held);
    }
    return bench_now() - begin;
}

/* ---- what is built ---- */

/* A structure whose diagram is none of those before; `seen` is of open addressing. */
static void draw_another(struct bench *b, size_t i, struct random *r, const struct diagram **seen,
                         size_t n_seen)
{
    for (;;) {
        unsigned elements = (unsigned)random_range(r, LEAST_ELEMENTS, MOST_ELEMENTS);
        b->chains[i] = chains_draw(r, elements, MOST_SCHEMES);
        const struct diagram *d = b->diagrams[i] = chains_diagram(b->arena, &b->chains[i]);
        size_t at = d->hash % n_seen;
        while (seen[at] && !diagram_equal(seen[at], d))
            at = (at + 1) % n_seen;
        if (!seen[at]) {
            seen[at] = d;
            return;
        }
    }
}

static void draw_all(struct bench *b)
{
    struct random r = random_seed(2385);
    size_t n_seen = 2 * b->n + 1;
    const struct diagram **seen = NEW_ARRAY(b->arena, n_seen, const struct diagram *);
    b->chains = NEW_ARRAY(b->arena, b->n, struct chains);
    b->diagrams = NEW_ARRAY(b->arena, b->n, const struct diagram *);
    for (size_t i = 0; i < b->n; i++)
        draw_another(b, i, &r, seen, n_seen);
    for (int v = 0; v < MOST_ELEMENTS; v++) {
        b->p[v] = random_log_uniform(&r, 1e-5, 0.05);
        b->q[v] = 1 - b->p[v];
    }
}

/* Each diagram must have as many nodes as BuDDy has for it. */
static void compare_all(struct bench *b)
{
    struct held held = {0};
    BDD ends[MOST_SCHEMES + 1];
    size_t largest = 0, nodes = 0;
    for (size_t i = 0; i < b->n; i++) {
        size_t n = b->diagrams[i]->n_nodes;
        buddy_build(&held, &b->chains[i], ends);
        if ((size_t)bdd_anodecount(ends, MOST_SCHEMES + 1) != n)
            fail("the two libraries differ");
        let_go(&held);
        nodes += n;
        largest = n > largest ? n : largest;
    }
    b->work = NEW_ARRAY(b->arena, largest + 2, double);
    printf("%zu different diagrams of %d to %d elements, %.0f nodes on average, at most %zu\n",
           b->n, LEAST_ELEMENTS, MOST_ELEMENTS, (double)nodes / (double)b->n, largest);
}

int main(int argc, char **argv)
{
    struct bench b = {.arena = arena_new(NULL), .n = argc == 2 ? strtoul(argv[1], NULL, 10) : 0};
    double own[RUNS], other[RUNS], alone[RUNS];
    if (b.n == 0 || !b.arena)
        fail("usage: diagrams COUNT");
    bdd_init(BUDDY_NODES, BUDDY_CACHE);
    bdd_gbc_hook(NULL);
    bdd_resize_hook(NULL);
    bdd_setvarnum(MOST_ELEMENTS);
    draw_all(&b);
    compare_all(&b);
    for (int i = 0; i < RUNS; i++) {
        own[i] = ours(&b);
        other[i] = theirs(&b);
        alone[i] = ours_alone(&b);
    }
    double us = 1e3 / (double)b.n, mine = bench_median(own), buddy = bench_median(other);
    printf("  built, frozen, evaluated %8.2f us each\n", mine * us);
    printf("  BuDDy, built             %8.2f us each\n", buddy * us);
    printf("  ratio                    %8.2f\n", mine / buddy);
    printf("  evaluated alone          %8.3f us a vector\n", bench_median(alone) * us / VECTORS);
    bdd_done();
    arena_free(b.arena);
    return b.sum > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
