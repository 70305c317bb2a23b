/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Times of tapes: a model of 40 operations (tape_model.h) over hazards whose constants differ, for
 * blocks of lanes, beside the same model in one loop written by hand, in turn:
 *
 *     tape HAZARDS LANES [INSTRUCTION-SET]
 *
 * Prints, for each instruction set that runs, the median of 11 in 10^9 operations and lanes a
 * second and the speed as a part of the hand-written loop's: the aims are 40 % for pairs and 70 %
 * with whole programs as one instruction. Last the numbers for tests/bench/numpy_model.py. */
#include "median.h"
#include "tape_graph.h"

#include "eval/tape_parts.h"
#include "random.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { BLOCK = 256, LINE = 8 };

struct world {
    struct arena *arena;
    struct graph *g;
    struct eval *v;
    size_t hazards, lanes;
    double (*c)[MODEL_CONSTANTS];
    node_id *roots;
    double *x[MODEL_INPUTS];
};

static const double means[MODEL_INPUTS] = {0.5, 0.5, 0.5, 0.5, 0.5, 0.5, 0.5};
static const uint32_t inputs[MODEL_INPUTS] = {0, 1, 2, 3, 4, 5, 6};
static const struct tape_inputs all = {MODEL_INPUTS, inputs, 0, NULL};

/* A row that begins with a line of the cache, as it would for a caller who cares. */
static double *aligned(struct world *w, size_t n)
{
    double *at = NEW_ARRAY(w->arena, n + LINE, double);
    return at + (LINE - (uintptr_t)at / sizeof *at % LINE);
}

static void make_world(struct world *w, size_t hazards, size_t n)
{
    struct random r = random_seed(1);
    *w = (struct world){.arena = arena_new(NULL), .hazards = hazards, .lanes = n};
    w->g = graph_new(w->arena);
    w->c = (double(*)[MODEL_CONSTANTS])arena_array(w->arena, hazards, sizeof *w->c);
    w->roots = NEW_ARRAY(w->arena, hazards, node_id);
    for (size_t h = 0; h < hazards; h++) {
        for (int i = 0; i < MODEL_CONSTANTS; i++)
            w->c[h][i] = random_uniform(&r, 0.1, 1.5);
        graph_section_begin(w->g, (uint32_t)h);
        w->roots[h] = tape_graph(w->g, 0, means, w->c[h]);
        graph_section_end(w->g);
    }
    w->v = eval_new(w->arena, w->g);
    if (eval_point(w->v, NULL, NULL) != OHMEN_OK)
        exit(1);
    for (int i = 0; i < MODEL_INPUTS; i++) {
        w->x[i] = aligned(w, n);
        for (size_t k = 0; k < n; k++)
            w->x[i][k] = random_uniform(&r, 0, 1);
    }
}

/* ---- runs ---- */

/* One way to compute it: a tape, or the loop by hand where there is none. */
struct way {
    const char *name;
    struct tape *tape;
    struct tape_work *work;
    size_t block;
    double **out;
    double times[RUNS];
};

static tape_model *model_of(enum isa isa)
{
    static tape_model *const models[ISA_COUNT] = {
#define X(name, needs) tape_model_##name,
        ISAS(X)
#undef X
    };
    return models[isa];
}

static double run(const struct world *w, struct way *way, enum isa isa)
{
    double begin = bench_now();
    for (size_t at = 0; at < w->lanes; at += way->block) {
        size_t n = w->lanes - at < way->block ? w->lanes - at : way->block;
        const double *in[MODEL_INPUTS];
        for (int i = 0; i < MODEL_INPUTS; i++)
            in[i] = w->x[i] + at;
        if (way->tape)
            tape_run(way->tape, way->work, n, in, way->out);
        for (size_t h = 0; !way->tape && h < w->hazards; h++)
            model_of(isa)(n, in, w->c[h], way->out[h]);
    }
    return bench_now() - begin;
}

static void make_way(struct world *w, struct way *way, enum isa isa, const struct tape_how *how)
{
    way->block = BLOCK;
    if (how) {
        way->tape = tape_new_as(w->arena, w->v, isa, &all, w->hazards, w->roots, *how);
        way->block = how->keeps_slots ? BLOCK : tape_block(way->tape);
        way->work = tape_work_new(w->arena, way->tape, way->block);
    }
    way->out = NEW_ARRAY(w->arena, w->hazards, double *);
    for (size_t h = 0; h < w->hazards; h++)
        way->out[h] = aligned(w, way->block);
}

/* The last block of each way, as far as all have it, is the same to the bit. */
static void compare(const struct world *w, const struct way *a, const struct way *b)
{
    size_t n_a = (w->lanes - 1) % a->block + 1, n_b = (w->lanes - 1) % b->block + 1;
    size_t n = n_a < n_b ? n_a : n_b;
    for (size_t h = 0; h < w->hazards; h++)
        if (memcmp(a->out[h] + n_a - n, b->out[h] + n_b - n, n * sizeof **a->out) != 0) {
            fprintf(stderr, "%s differs from %s\n", b->name, a->name);
            exit(1);
        }
}

static void measure(struct world *w, enum isa isa)
{
    static const struct tape_how hows[] = {{.fusing = TAPE_FUSED},
                                           {.fusing = TAPE_PAIRS_ONLY},
                                           {.fusing = TAPE_SINGLE},
                                           {.fusing = TAPE_SINGLE, .keeps_slots = true}};
    enum { WAYS = 5 };
    struct way ways[WAYS] = {{"one loop by hand"},
                             {"tape, programs"},
                             {"tape, pairs"},
                             {"tape, no fusing"},
                             {"tape, no slot twice"}};
    for (int k = 0; k < WAYS; k++)
        make_way(w, &ways[k], isa, k ? &hows[k - 1] : NULL);
    for (int i = 0; i < RUNS; i++)
        for (int k = 0; k < WAYS; k++)
            ways[k].times[i] = run(w, &ways[k], isa);
    double by_hand = 0;
    for (int k = 0; k < WAYS; k++) {
        compare(w, &ways[0], &ways[k]);
        double time = bench_median(ways[k].times);
        double all_operations = (double)(MODEL_OPERATIONS * w->hazards * w->lanes);
        by_hand = k ? by_hand : time;
        struct tape_size size = k ? tape_size(ways[k].tape) : (struct tape_size){0};
        printf("%-8s %-20s %6.2f Gop-lane/s %5.0f %%  block %4zu", isa_name(isa), ways[k].name,
               all_operations / time / 1e6, 100 * by_hand / time, ways[k].block);
        if (k)
            printf("  %zu instructions, %zu slots", size.instructions, size.slots);
        printf("\n");
    }
}

int main(int argc, char **argv)
{
    struct world w;
    enum isa only = ISA_COUNT;
    if (argc < 3 || argc > 4 || (argc == 4 && !isa_of_name(argv[3], &only)))
        return 2;
    make_world(&w, strtoul(argv[1], NULL, 10), strtoul(argv[2], NULL, 10));
    for (enum isa isa = ISA_plain; isa < ISA_COUNT; isa++)
        if (isa_runs(isa) && (only == ISA_COUNT || only == isa))
            measure(&w, isa);
    arena_free(w.arena);
    return 0;
}
