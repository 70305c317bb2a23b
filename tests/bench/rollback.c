/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Rolling back a tree (math/rollback.h) beside a loop that was written for it, and beside copying.
 *
 *     rollback NODES
 *
 * The tree has three children a node, choices and chances by turns, and as many levels as come
 * nearest to NODES. Then RUNS times in turn: the
 * values by each instruction set that runs here, the same by the loop (rollback_model.h) in the
 * same layout, and a copy of as many bytes as these read and write. Told are nanoseconds a node,
 * how many times as long as the loop the kernels take (1.3 is the aim), and the bytes a second as
 * a part of the copy's (60 % is the aim). Fails where the two do not give the same bytes. Last a
 * tree of the same size in which sorts and numbers of children change from node to node. */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "math/rollback.h"
#include "median.h"
#include "random.h"
#include "rollback_model.h"

enum { WAYS = 2 * ISA_COUNT + 1, COPY = 2 * ISA_COUNT, LEAST_NODES = 1000 };

struct bench {
    struct arena *arena;
    const struct rollback *r;
    struct rollback_model m;
    double *value, *expected, *from, *to;
    size_t copied; /* doubles */
    double times[WAYS][RUNS];
};

static rollback_model *const models[ISA_COUNT] = {
#define X(name, needs) rollback_model_##name,
    ISAS(X)
#undef X
};

static _Noreturn void fail(const char *why)
{
    fprintf(stderr, "rollback: %s\n", why);
    exit(EXIT_FAILURE);
}

/* ---- the trees ---- */

/* Levels of 1, 3, 9 ... nodes; the last has what is left, in threes, of which the parents are the
 * whole level before: so it is full, and the number of nodes is the nearest full tree's. */
static void shape(struct rollback_model *m, size_t nodes)
{
    size_t all = 0, size = 1;
    for (m->levels = 0; m->levels < MODEL_MOST_LEVELS; m->levels++, size *= MODEL_ARITY) {
        if (m->levels > 1 && all + size > 2 * nodes)
            break;
        m->start[m->levels] = all;
        m->size[m->levels] = size;
        all += size;
    }
}

static void random_chance(struct random *r, uint32_t n, double *p)
{
    double sum = 0;
    for (uint32_t k = 0; k < n; k++)
        sum += p[k] = random_uniform(r, 0.1, 1);
    for (uint32_t k = 0; k < n; k++)
        p[k] /= sum;
}

enum { MOST_ARITY = 6 };

static void add(struct rollback_builder *b, struct random *r, enum rollback_kind kind,
                uint32_t arity, size_t child)
{
    size_t at[MOST_ARITY] = {0};
    double p[MOST_ARITY] = {0};
    for (uint32_t k = 0; k < arity; k++)
        at[k] = child + k;
    if (kind == ROLLBACK_CHANCE)
        random_chance(r, arity, p);
    rollback_add(b, kind, random_uniform(r, -50, 50), arity, at,
                 kind == ROLLBACK_CHANCE ? p : NULL);
}

static const struct rollback *even_tree(struct arena *a, const struct rollback_model *m)
{
    struct random r = random_seed(81);
    struct rollback_builder *b = rollback_new(a);
    size_t circle = 0;
    for (int l = 0; l < m->levels; l++)
        for (size_t i = 0; i < m->size[l]; i++)
            if (l + 1 == m->levels)
                add(b, &r, ROLLBACK_END, 0, 0);
            else
                add(b, &r, l % 2 ? ROLLBACK_CHANCE : ROLLBACK_CHOOSE, MODEL_ARITY,
                    m->start[l + 1] + MODEL_ARITY * i);
    return rollback_lay_out(b, 0, &circle);
}

/* Nodes in the order of their levels, until `nodes` have been promised; the rest are ends. */
static const struct rollback *uneven_tree(struct arena *a, size_t nodes)
{
    struct random r = random_seed(82);
    struct rollback_builder *b = rollback_new(a);
    size_t promised = 1, circle = 0;
    for (size_t i = 0; i < promised; i++) {
        uint32_t arity = (uint32_t)random_range(&r, 1, MOST_ARITY);
        bool end = promised + arity > nodes || (i > 20 && random_index(&r, 3) == 0);
        enum rollback_kind kind = random_index(&r, 2) ? ROLLBACK_CHOOSE : ROLLBACK_CHANCE;
        add(b, &r, end ? ROLLBACK_END : kind, end ? 0 : arity, promised);
        promised += end ? 0 : arity;
    }
    return rollback_lay_out(b, 0, &circle);
}

/* ---- measuring ---- */

/* Amounts are read and values written of all nodes; values are read of all but the root, and
 * probabilities of the children of chances. A copy reads and writes each double. */
static size_t doubles_moved(const struct rollback *r)
{
    size_t moved = 2 * r->n;
    for (size_t i = 0; i < r->n_runs; i++) {
        size_t children = r->runs[i].n * r->runs[i].arity;
        moved += r->runs[i].kind == ROLLBACK_CHANCE ? 2 * children : children;
    }
    return moved;
}

static double kernel_time(struct bench *b, enum isa i)
{
    double begin = bench_now();
    rollback_values(b->r, i, b->value);
    double time = bench_now() - begin;
    if (memcmp(b->value, b->expected, b->r->n * sizeof *b->value) != 0)
        fail("kernels and loop differ");
    return time;
}

static double model_time(struct bench *b, enum isa i)
{
    double begin = bench_now();
    models[i](&b->m, b->r->amount, b->r->probability, b->expected);
    return bench_now() - begin;
}

static double copy_time(struct bench *b)
{
    double begin = bench_now();
    memcpy(b->to, b->from, b->copied * sizeof *b->to);
    return bench_now() - begin;
}

static void measure(struct bench *b)
{
    for (int run = 0; run < RUNS; run++) {
        for (int i = 0; i < ISA_COUNT; i++)
            if (isa_runs((enum isa)i)) {
                b->times[ISA_COUNT + i][run] = model_time(b, (enum isa)i);
                b->times[i][run] = kernel_time(b, (enum isa)i);
            }
        b->times[COPY][run] = copy_time(b);
        b->from[run] += 1;
    }
}

static void tell(struct bench *b)
{
    double copy = bench_median(b->times[COPY]), nodes = (double)b->r->n;
    printf("%zu nodes in %zu runs, rolled back; a copy of as many bytes %.2f ns a node\n", b->r->n,
           b->r->n_runs, copy * 1e6 / nodes);
    for (int i = 0; i < ISA_COUNT; i++) {
        if (!isa_runs((enum isa)i))
            continue;
        double ours = bench_median(b->times[i]), loop = bench_median(b->times[ISA_COUNT + i]);
        printf("%-8s %5.2f ns a node, %.2f times the loop by hand, %3.0f %% of copying\n",
               isa_name((enum isa)i), ours * 1e6 / nodes, ours / loop, 100 * copy / ours);
    }
}

static double time_of(const struct rollback *r, double tolerance, double *value)
{
    double times[RUNS];
    for (int run = 0; run < RUNS; run++) {
        double begin = bench_now();
        rollback_equivalents(r, isa_best(), tolerance, value);
        times[run] = bench_now() - begin;
    }
    return bench_median(times) * 1e6 / (double)r->n;
}

static void tell_others(struct bench *b, size_t nodes)
{
    printf("certainty equivalents %.2f ns a node\n", time_of(b->r, 40, b->value));
    const struct rollback *r = uneven_tree(b->arena, nodes);
    double *value = NEW_ARRAY(b->arena, r->n, double);
    printf("uneven tree of %zu nodes in %zu runs: %.2f ns a node\n", r->n, r->n_runs,
           time_of(r, INFINITY, value));
}

int main(int argc, char **argv)
{
    size_t nodes = argc == 2 ? strtoul(argv[1], NULL, 10) : 0;
    struct bench b = {.arena = arena_new(NULL)};
    if (nodes < LEAST_NODES) {
        fprintf(stderr, "usage: rollback NODES, at least %d\n", LEAST_NODES);
        return EXIT_FAILURE;
    }
    shape(&b.m, nodes);
    b.r = even_tree(b.arena, &b.m);
    b.copied = doubles_moved(b.r) / 2;
    b.value = NEW_ARRAY(b.arena, b.r->n, double);
    b.expected = NEW_ARRAY(b.arena, b.r->n, double);
    b.from = NEW_ARRAY(b.arena, b.copied, double);
    b.to = NEW_ARRAY(b.arena, b.copied, double);
    memset(b.from, 1, b.copied * sizeof *b.from);
    memset(b.to, 1, b.copied * sizeof *b.to);
    measure(&b);
    tell(&b);
    tell_others(&b, nodes);
    arena_free(b.arena);
    return EXIT_SUCCESS;
}
