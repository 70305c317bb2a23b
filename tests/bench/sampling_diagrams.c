/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Samples of the risks of a register whose elements fail at uncertain rates, so that diagrams over
 * time are averaged anew in each sample.
 *
 *     sampling_diagrams REGISTER
 *
 * RUNS times in turn, in time that the thread has worked: the risks of all hazards by the whole
 * engine; the same inputs drawn and nothing else; the averages of all diagrams over time below the
 * risks that an uncertain input moves, at the arguments which they have in these samples; and the
 * bare diagrams with given probabilities at as many sets of points. What the engine takes beyond
 * drawing and averaging is everything else: other operations, what varies, making tapes. Two
 * threads beside one are by the clock. Owns the arena. */
#include "median.h"
#include "register_figures.h"

#include "eval/sampling.h"
#include "graph/average_parts.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { LOG2 = 5, LANES_IN_ALL = SAMPLING_BATCH << LOG2 };

typedef double course_arguments[COURSE_ARGS];

/* A diagram: its arguments as roots of a sample, and room for those of one lane. */
struct one {
    struct averaged what;
    struct averages *averages;
    size_t *root; /* of each variable: p and q, or the arguments of its course */
    double *p, *q, *results;
    course_arguments *x;
    bool *changed;
    size_t sets; /* of points, in one call */
};

struct nodes ARRAY_BODY(node_id);

struct bench {
    struct arena *arena;
    struct figures *figures;
    struct nodes risks, inputs, diagrams, arguments;
    struct one *at;
    struct sampling values; /* of the arguments */
    struct sampler *one, *two;
    double sum; /* so that nothing can be left out */
};

static _Noreturn void fail(const char *why)
{
    fprintf(stderr, "sampling_diagrams: %s\n", why);
    exit(EXIT_FAILURE);
}

/* ---- what is below the risks ---- */

static bool is_unknown(const struct bench *b, node_id n)
{
    size_t count;
    const uint32_t *inputs = graph_uncertain(b->figures->graph, n, &count);
    for (size_t i = 0; i < count; i++)
        if (!b->figures->input_varies.at[inputs[i]])
            return true;
    return false;
}

static void take_node(struct bench *b, node_id n)
{
    const struct graph *g = b->figures->graph;
    if (!is_unknown(b, n))
        return;
    if (graph_at(g, n)->op == OP_INPUT)
        *array_push(b->arena, &b->inputs) = n;
    if (graph_at(g, n)->op == OP_DIAGRAM && graph_windows_of(g, n).n > 0 &&
        graph_diagram_of(g, n)->n_nodes > 1)
        *array_push(b->arena, &b->diagrams) = n;
}

static void find_nodes(struct bench *b)
{
    const struct graph *g = b->figures->graph;
    bool *is_met = NEW_ARRAY(b->arena, graph_size(g), bool);
    for (size_t i = 0; i < b->figures->base->of[KIND_HAZARD].n; i++) {
        node_id n = figure_at(b->figures, bench_hazard(b->figures, i)->main)->node;
        *array_push(b->arena, &b->risks) = n;
        is_met[n] = true;
    }
    for (node_id n = (node_id)graph_size(g); n-- > 0;) {
        if (!is_met[n])
            continue;
        take_node(b, n);
        for (uint32_t k = 0; graph_at(g, n)->op != OP_HELD && k < graph_at(g, n)->n; k++)
            is_met[graph_args(g, n)[k]] = true;
    }
    if (b->diagrams.n == 0)
        fail("no diagram over time is uncertain");
}

/* ---- averages ---- */

static size_t root_of(struct bench *b, node_id n)
{
    *array_push(b->arena, &b->arguments) = n;
    return b->arguments.n - 1;
}

/* The roots of variable i: of a course its arguments, else p, and q where p is a complement. */
static void take_variable(struct bench *b, struct one *one, size_t i, node_id arg)
{
    const struct graph *g = b->figures->graph;
    if (graph_at(g, arg)->op == OP_COURSE) {
        ((const struct course **)one->what.course)[i] = graph_course_of(g, arg);
        one->root[i] = root_of(b, graph_args(g, arg)[0]);
        for (int k = 1; k < COURSE_ARGS; k++)
            root_of(b, graph_args(g, arg)[k]);
        return;
    }
    bool is_complement = graph_at(g, arg)->op == OP_COMPLEMENT;
    one->root[i] = root_of(b, arg);
    root_of(b, is_complement ? graph_args(g, arg)[0] : arg);
}

static void make_one(struct bench *b, struct one *one, node_id node)
{
    const struct graph *g = b->figures->graph;
    const struct diagram *d = graph_diagram_of(g, node);
    size_t n = d->n_variables;
    one->root = NEW_ARRAY(b->arena, n, size_t);
    one->p = NEW_ARRAY(b->arena, n, double);
    one->q = NEW_ARRAY(b->arena, n, double);
    one->x = NEW_ARRAY(b->arena, n, course_arguments);
    one->changed = NEW_ARRAY(b->arena, n, bool);
    one->what = (struct averaged){.diagram = d,
                                  .n = n,
                                  .p = one->p,
                                  .q = one->q,
                                  .course = NEW_ARRAY(b->arena, n, const struct course *),
                                  .x = (const course_arguments *)one->x,
                                  .windows = graph_windows_of(g, node),
                                  .isa = isa_best()};
    one->results = NEW_ARRAY(b->arena, one->what.windows.n * d->n_roots, double);
    for (size_t i = 0; i < n; i++)
        take_variable(b, one, i, graph_args(g, node)[i]);
}

static void take_arguments(const struct bench *b, struct one *one, size_t lane)
{
    double *const *values = b->values.values;
    for (size_t i = 0; i < one->what.n; i++) {
        size_t root = one->root[i];
        double had[COURSE_ARGS];
        memcpy(had, one->x[i], sizeof had);
        for (int k = 0; one->what.course[i] && k < COURSE_ARGS; k++)
            one->x[i][k] = values[root + (size_t)k][lane];
        double p = one->p[i];
        if (!one->what.course[i]) {
            one->p[i] = values[root][lane];
            one->q[i] = b->arguments.at[root] == b->arguments.at[root + 1] ? 1 - one->p[i]
                                                                           : values[root + 1][lane];
        }
        one->changed[i] = memcmp(had, one->x[i], sizeof had) != 0 || p != one->p[i];
    }
}

static void count_set(struct averages *v, void *ctx)
{
    (void)v;
    ((struct one *)ctx)->sets++;
}

static double time_averages(struct bench *b)
{
    double begin = bench_worked();
    for (size_t k = 0; k < b->diagrams.n; k++)
        for (size_t lane = 0; lane < LANES_IN_ALL; lane++) {
            struct one *one = &b->at[k];
            take_arguments(b, one, lane);
            averages_take(one->averages, &one->what, one->changed, one->results);
            b->sum += one->results[0];
        }
    return bench_worked() - begin;
}

/* Every node at as many sets of points, from the probabilities of the last set. */
static double time_bare(struct bench *b)
{
    double begin = bench_worked();
    for (size_t k = 0; k < b->diagrams.n; k++) {
        const struct averages *v = b->at[k].averages;
        for (size_t i = 0; i < LANES_IN_ALL * b->at[k].sets; i++)
            v->kernels->rows(v->n_rows, v->rows, v->p, v->q, v->work);
        b->sum += v->work[v->diagram->n_nodes + 1][0];
    }
    return bench_worked() - begin;
}

/* ---- the engine ---- */

static struct sampler *sampler_of(struct bench *b, const struct nodes *roots, size_t threads)
{
    struct sampling_plan p = sampling_defaults();
    struct sampler *s;
    p.log2_points = LOG2;
    p.threads = threads;
    if (sampler_new(b->arena, b->figures->means, &p, roots->n, roots->at, &s, NULL) != OHMEN_OK)
        fail("the inputs cannot be drawn");
    return s;
}

static struct sampling run(struct arena *a, struct sampler *s, const struct nodes *roots)
{
    struct sampling got;
    if (sampler_run(a, s, roots->n, roots->at, &got, NULL, NULL) != OHMEN_OK)
        fail("a sample is not finite");
    return got;
}

static double time_engine(struct bench *b, struct sampler *s, const struct nodes *roots,
                          double clock(void))
{
    double begin = clock();
    struct arena *a = arena_new(NULL);
    b->sum += run(a, s, roots).values[0][0];
    arena_free(a);
    return clock() - begin;
}

static void make_all(struct bench *b, const char *path)
{
    b->figures = bench_figures(b->arena, path);
    find_nodes(b);
    b->at = NEW_ARRAY(b->arena, b->diagrams.n, struct one);
    for (size_t k = 0; k < b->diagrams.n; k++)
        make_one(b, &b->at[k], b->diagrams.at[k]);
    b->one = sampler_of(b, &b->risks, 1);
    b->two = sampler_of(b, &b->risks, 2);
    b->values = run(b->arena, b->one, &b->arguments);
    for (size_t k = 0; k < b->diagrams.n; k++) {
        struct one *one = &b->at[k];
        take_arguments(b, one, 0);
        one->averages = averages_new(b->arena, &one->what);
        averages_pass(one->averages, &one->what, NULL, count_set, one);
    }
}

/* ---- what is told ---- */

static void tell(const char *what, double time, double whole)
{
    printf("  %-32s %9.1f us a sample, %5.1f %%\n", what, time * 1e3 / LANES_IN_ALL,
           100 * time / whole);
}

static void measure(struct bench *b)
{
    double all[RUNS], draws[RUNS], averages[RUNS], bare[RUNS], one[RUNS], two[RUNS];
    for (int run = 0; run < RUNS; run++) {
        all[run] = time_engine(b, b->one, &b->risks, bench_worked);
        draws[run] = time_engine(b, b->one, &b->inputs, bench_worked);
        averages[run] = time_averages(b);
        bare[run] = time_bare(b);
        one[run] = time_engine(b, b->one, &b->risks, bench_now);
        two[run] = time_engine(b, b->two, &b->risks, bench_now);
    }
    double whole = bench_median(all), drawing = bench_median(draws);
    double averaging = bench_median(averages), alone = bench_median(bare);
    printf("%zu risks of %zu uncertain inputs over %zu diagrams over time, %d samples\n",
           b->risks.n, b->inputs.n, b->diagrams.n, LANES_IN_ALL);
    tell("the whole", whole, whole);
    tell("drawing the inputs", drawing, whole);
    tell("averages over time", averaging, whole);
    tell("all else", whole - drawing - averaging, whole);
    tell("the bare diagrams", alone, whole);
    printf("  the whole is %.2f times the bare diagrams, averages are %.2f times\n", whole / alone,
           averaging / alone);
    bench_tell_threads(one, two);
}

int main(int argc, char **argv)
{
    static struct bench b;
    mem_system_keep();
    b.arena = arena_new(NULL);
    if (argc != 2 || !b.arena)
        fail("usage: sampling_diagrams REGISTER");
    make_all(&b, argv[1]);
    measure(&b);
    arena_free(b.arena);
    return b.sum > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
