/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Averages over time of the diagrams of a register, with other rates at each call.
 *
 *     averages REGISTER
 *
 * The hazards of a register become figures; of each diagram over LEAST_WINDOWS windows or more all
 * rates of all elements change from call to call, by up to SPREAD either way. RUNS times in turn,
 * by each instruction set that runs: CALLS calls for each diagram; and the bare diagrams, with
 * probabilities that are given, at as many points of time in as many sets. The ratio of the two is
 * what courses, quadrature and bookkeeping cost. All instruction sets must give the same bytes.
 * Owns the arena. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "graph/average_parts.h"
#include "median.h"
#include "random.h"
#include "register_figures.h"

enum { LEAST_WINDOWS = 20, MOST_DIAGRAMS = 200, CALLS = 16 };
static const double SPREAD = 3;

/* One diagram, and its arguments at each call. */
struct one {
    struct averaged what;
    double (*x[CALLS])[COURSE_ARGS];
    struct averages *averages[ISA_COUNT];
    size_t sets, points; /* of one call, on average */
    double *results[ISA_COUNT];
};

struct bench {
    struct arena *arena;
    struct figures *figures;
    size_t n;
    struct one at[MOST_DIAGRAMS];
    double sum; /* so that nothing can be left out */
};

static _Noreturn void fail(const char *why)
{
    fprintf(stderr, "averages: %s\n", why);
    exit(EXIT_FAILURE);
}

/* ---- what is averaged ---- */

typedef double course_arguments[COURSE_ARGS];

static struct averaged averaged_of(struct bench *b, node_id node)
{
    const struct graph *g = b->figures->graph;
    const struct eval *v = b->figures->eval;
    size_t n = graph_at(g, node)->n;
    const node_id *args = graph_args(g, node);
    double *p = NEW_ARRAY(b->arena, n, double), *q = NEW_ARRAY(b->arena, n, double);
    const struct course **course = NEW_ARRAY(b->arena, n, const struct course *);
    course_arguments *x = NEW_ARRAY(b->arena, n, course_arguments);
    for (size_t i = 0; i < n; i++) {
        bool changes = graph_at(g, args[i])->op == OP_COURSE;
        p[i] = eval_value(v, args[i]);
        q[i] = 1 - p[i];
        course[i] = changes ? graph_course_of(g, args[i]) : NULL;
        for (int k = 0; changes && k < COURSE_ARGS; k++)
            x[i][k] = eval_value(v, graph_args(g, args[i])[k]);
    }
    return (struct averaged){.diagram = graph_diagram_of(g, node),
                             .n = n,
                             .p = p,
                             .q = q,
                             .course = course,
                             .x = (const course_arguments *)x,
                             .windows = graph_windows_of(g, node)};
}

static void draw_arguments(struct bench *b, struct random *r, struct one *one)
{
    for (int call = 0; call < CALLS; call++) {
        course_arguments *x = NEW_ARRAY(b->arena, one->what.n, course_arguments);
        for (size_t i = 0; i < one->what.n; i++) {
            double times = random_log_uniform(r, 1 / SPREAD, SPREAD);
            memcpy(x[i], one->what.x[i], sizeof x[i]);
            x[i][COURSE_RATE] *= times;
            x[i][COURSE_UNRESET] *= times;
        }
        one->x[call] = x;
    }
}

static void count_set(struct averages *v, void *ctx)
{
    struct one *one = ctx;
    one->sets++;
    one->points += v->points.n;
}

static void make_one(struct bench *b, struct random *r, node_id node)
{
    struct one *one = &b->at[b->n++];
    one->what = averaged_of(b, node);
    draw_arguments(b, r, one);
    size_t n_results = one->what.windows.n * one->what.diagram->n_roots;
    for (int i = 0; i < ISA_COUNT; i++) {
        one->averages[i] = averages_new(b->arena, &one->what);
        one->results[i] = NEW_ARRAY(b->arena, n_results, double);
    }
    for (int call = 0; call < CALLS; call++) {
        one->what.x = (const course_arguments *)one->x[call];
        averages_pass(one->averages[0], &one->what, NULL, count_set, one);
    }
    one->sets /= CALLS;
    one->points /= CALLS;
}

static void make_all(struct bench *b, const char *path)
{
    struct random r = random_seed(2385);
    b->figures = bench_figures(b->arena, path);
    const struct graph *g = b->figures->graph;
    for (node_id n = 0; n < graph_size(g) && b->n < MOST_DIAGRAMS; n++)
        if (graph_at(g, n)->op == OP_DIAGRAM && graph_windows_of(g, n).n >= LEAST_WINDOWS &&
            graph_diagram_of(g, n)->n_nodes > 1)
            make_one(b, &r, n);
    if (b->n == 0)
        fail("no diagram over time");
}

/* ---- what is timed ---- */

static double average_all(struct bench *b, enum isa isa)
{
    double begin = bench_worked();
    for (size_t i = 0; i < b->n; i++)
        for (int call = 0; call < CALLS; call++) {
            struct one *one = &b->at[i];
            one->what.isa = isa;
            one->what.x = (const course_arguments *)one->x[call];
            averages_take(one->averages[isa], &one->what, NULL, one->results[isa]);
        }
    return bench_worked() - begin;
}

/* Every node at as many sets of points, from the probabilities of the last set. */
static double bare_all(struct bench *b, enum isa isa)
{
    double begin = bench_worked();
    for (size_t i = 0; i < b->n; i++) {
        const struct averages *v = b->at[i].averages[isa];
        for (size_t k = 0; k < CALLS * b->at[i].sets; k++)
            v->kernels->rows(v->n_rows, v->rows, v->p, v->q, v->work);
        b->sum += v->work[v->diagram->n_nodes + 1][0];
    }
    return bench_worked() - begin;
}

static void compare(const struct bench *b, enum isa isa)
{
    for (size_t i = 0; i < b->n; i++) {
        const struct one *one = &b->at[i];
        size_t n_results = one->what.windows.n * one->what.diagram->n_roots;
        if (memcmp(one->results[isa], one->results[0], n_results * sizeof(double)) != 0)
            fail("two instruction sets differ");
    }
}

static void tell(const struct bench *b, enum isa isa, double *take, double *bare)
{
    double ns = 1e6 / CALLS / (double)b->n, whole = bench_median(take), alone = bench_median(bare);
    printf("  %-7s %8.0f ns a call, %8.0f ns the bare diagram, ratio %5.2f\n", isa_name(isa),
           whole * ns, alone * ns, whole / alone);
}

static void tell_what(const struct bench *b)
{
    double nodes = 0, points = 0, windows = 0, n = (double)b->n;
    for (size_t i = 0; i < b->n; i++) {
        nodes += (double)b->at[i].what.diagram->n_nodes;
        points += (double)b->at[i].points;
        windows += (double)b->at[i].what.windows.n;
    }
    printf("averages of %zu diagrams over time: %.0f nodes, %.0f windows, %.0f points on average\n",
           b->n, nodes / n, windows / n, points / n);
}

int main(int argc, char **argv)
{
    static struct bench b;
    double take[ISA_COUNT][RUNS], bare[ISA_COUNT][RUNS];
    b.arena = arena_new(NULL);
    if (argc != 2 || !b.arena)
        fail("usage: averages REGISTER");
    make_all(&b, argv[1]);
    tell_what(&b);
    for (int run = 0; run < RUNS; run++)
        for (int i = 0; i < ISA_COUNT; i++)
            if (isa_runs((enum isa)i)) {
                take[i][run] = average_all(&b, (enum isa)i);
                bare[i][run] = bare_all(&b, (enum isa)i);
                compare(&b, (enum isa)i);
            }
    for (int i = 0; i < ISA_COUNT; i++)
        if (isa_runs((enum isa)i))
            tell(&b, (enum isa)i, take[i], bare[i]);
    arena_free(b.arena);
    return b.sum > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
