/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Samples of the risks of hazards (hazards.h), by the whole engine.
 *
 *     sampling HAZARDS
 *
 * RUNS times in turn, in time that the thread has worked: all hazards at once and in groups, beside
 * GSL's generators filling rows that the same tape reads (some of the sets only, and times as
 * many); what drawing alone takes, and a hazard's mean and three quantiles. Two threads beside one
 * are by the clock, which tells of both only where nobody else works. Then the error of the mean of
 * a set beside that of independent values. Owns the arena. */
#include "hazards.h"
#include "median.h"

#include "eval/tape.h"
#include "math/statistics.h"

#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

enum {
    LOG2 = 10,
    POINTS = 1 << LOG2,
    SETS = SAMPLING_BATCH,
    GSL_PART = 8,
    GROUP = 5, /* hazards whose inputs have good places together */
    MOST_JUDGED = 20,
    QUANTILES = 3
};
static const double probability[QUANTILES] = {0.05, 0.5, 0.95};

struct bench {
    struct hazards *h;
    struct sampler *one, *two; /* threads */
    struct sampling values;    /* of the last run */
    gsl_rng *generator;
    double sum; /* of some values, so that nothing is left out */
};

/* ---- the engine ---- */

static struct sampling_plan plan_of(size_t threads)
{
    struct sampling_plan p = sampling_defaults();
    p.log2_points = LOG2;
    p.threads = threads;
    return p;
}

/* All hazards, `group` of them at a time. */
static double time_engine(struct bench *b, struct sampler *s, size_t group, double clock(void))
{
    double begin = clock();
    for (size_t k = 0; k < b->h->n; k += group) {
        struct arena *a = arena_new(NULL);
        size_t n = b->h->n - k < group ? b->h->n - k : group;
        struct sampling got = hazards_sample(b->h, a, s, k, n);
        b->sum += got.values[n - 1][POINTS];
        arena_free(a);
    }
    return clock() - begin;
}

/* ---- GSL ---- */

/* Rows, and the tape of a group of hazards that reads them. */
struct rows {
    struct tape *tape;
    struct tape_work *work;
    size_t first, n, block;
    double *in[GROUP * MODEL_INPUTS], *out[GROUP];
};

static void gsl_fill(gsl_rng *g, double times, const struct dist *d, double *x)
{
    double mean = log(times * d->p[0]), s = log(d->p[1]) / DIST_Z95;
    for (size_t i = 0; i < POINTS; i++)
        x[i] = d->shape == DIST_GAMMA ? gsl_ran_gamma(g, d->p[1], times * d->p[0] / d->p[1])
                                      : gsl_ran_lognormal(g, mean, s);
}

static void run_tape(const struct rows *r)
{
    const double *in[GROUP * MODEL_INPUTS];
    double *out[GROUP];
    for (size_t at = 0; at < POINTS; at += r->block) {
        for (size_t i = 0; i < r->n * MODEL_INPUTS; i++)
            in[i] = r->in[i] + at;
        for (size_t k = 0; k < r->n; k++)
            out[k] = r->out[k] + at;
        tape_run(r->tape, r->work, r->block, in, out);
    }
}

static struct rows rows_new(struct arena *a, const struct hazards *h, size_t first)
{
    struct rows r = {.first = first, .n = h->n - first < GROUP ? h->n - first : GROUP};
    uint32_t inputs[GROUP * MODEL_INPUTS];
    for (size_t i = 0; i < r.n * MODEL_INPUTS; i++) {
        inputs[i] = (uint32_t)(first * MODEL_INPUTS + i);
        r.in[i] = NEW_ARRAY(a, POINTS, double);
    }
    for (size_t k = 0; k < r.n; k++)
        r.out[k] = NEW_ARRAY(a, POINTS, double);
    struct tape_inputs in = {.n = r.n * MODEL_INPUTS, .inputs = inputs};
    r.tape = tape_new(a, h->v, isa_best(), &in, r.n, h->risk + first);
    r.block = POINTS;
    while (r.block > tape_block(r.tape))
        r.block /= 2;
    r.work = tape_work_new(a, r.tape, r.block);
    return r;
}

static double time_gsl(struct bench *b)
{
    double took = 0;
    for (size_t k = 0; k < b->h->n; k += GROUP) {
        struct arena *a = arena_new(NULL);
        struct rows r = rows_new(a, b->h, k);
        double begin = bench_worked();
        for (int set = 0; set < SETS / GSL_PART; set++) {
            for (size_t i = 0; i < r.n * MODEL_INPUTS; i++) {
                struct dist d;
                double times = hazards_dist(b->h, k * MODEL_INPUTS + i, &d);
                gsl_fill(b->generator, times, &d, r.in[i]);
            }
            run_tape(&r);
            b->sum += r.out[0][7];
        }
        took += bench_worked() - begin;
        arena_free(a);
    }
    return took * GSL_PART;
}

/* ---- parts ---- */

/* The inputs of each group drawn, and nothing else. */
static double time_draws(struct bench *b)
{
    static double x[POINTS];
    double took = 0;
    struct draw_plan plan = {DRAW_SCRAMBLED, LOG2, 1, isa_best()};
    struct arena *a = arena_new(NULL);
    struct draws *d;
    size_t n = b->h->n * MODEL_INPUTS;
    if (draws_new(a, &plan, n, hazards_draws(b->h, a, 0, b->h->n), &d, NULL) != OHMEN_OK)
        exit(EXIT_FAILURE);
    double *work = NEW_ARRAY(a, draws_work(d), double), begin = bench_worked();
    for (size_t i = 0; i < n; i++)
        for (uint64_t set = 0; set < SETS; set++)
            draws_fill(d, i, set, work, x);
    took = bench_worked() - begin;
    b->sum += x[7];
    arena_free(a);
    return took;
}

static double time_statistics(struct bench *b)
{
    struct sampled q[QUANTILES];
    double begin = bench_worked();
    for (size_t k = 0; k < b->h->n; k++) {
        const double *x = b->values.values[k];
        b->sum += statistics_mean(SETS, POINTS, x).value;
        statistics_quantiles(b->h->arena, SETS, POINTS, x, QUANTILES, probability, q);
        b->sum += q[1].value;
    }
    return bench_worked() - begin;
}

/* ---- what is told ---- */

static void tell(const struct bench *b, const char *what, double times[RUNS], double beside)
{
    double time = bench_median(times);
    printf("  %-44s %7.1f ns a hazard's sample", what,
           time * 1e6 / (double)b->h->n / SETS / POINTS);
    if (beside > 0)
        printf(", 1 / %.1f of GSL's", beside / time);
    puts("");
}

static void measure(struct bench *b)
{
    double gsl[RUNS], all[RUNS], groups[RUNS], draws[RUNS], statistics[RUNS], one[RUNS], two[RUNS];
    b->values = hazards_sample(b->h, b->h->arena, b->one, 0, b->h->n);
    for (int run = 0; run < RUNS; run++) {
        gsl[run] = time_gsl(b);
        all[run] = time_engine(b, b->one, b->h->n, bench_worked);
        groups[run] = time_engine(b, b->one, GROUP, bench_worked);
        one[run] = time_engine(b, b->one, b->h->n, bench_now);
        two[run] = time_engine(b, b->two, b->h->n, bench_now);
        draws[run] = time_draws(b);
        statistics[run] = time_statistics(b);
    }
    double whole = bench_median(gsl);
    printf("%zu hazards of 7 uncertain inputs and 40 operations, %d sets of %d samples\n", b->h->n,
           SETS, POINTS);
    tell(b, "GSL's generators, rows and the tape", gsl, 0);
    tell(b, "all hazards at once", all, whole);
    tell(b, "groups of 5", groups, whole);
    tell(b, "of that drawing", draws, whole);
    tell(b, "mean and three quantiles of a risk", statistics, 0);
    bench_tell_threads(one, two);
}

/* ---- errors ---- */

static int by_size(const void *p, const void *q)
{
    double a = *(const double *)p, b = *(const double *)q;
    return (a > b) - (a < b);
}

/* The standard deviation of the mean of one set, as a part of the mean: of each of `n` risks. */
static void add_errors(const struct sampling *s, size_t n, double *errors)
{
    for (size_t k = 0; k < n; k++) {
        struct sampled mean = statistics_mean(s->sets, s->points, s->values[k]);
        errors[k] = mean.error * sqrt((double)s->sets) / mean.value;
    }
}

/* The median over risks and RUNS seeds. */
static double error_of(const struct bench *b, enum draw_method method, size_t company)
{
    static double errors[RUNS * MOST_JUDGED];
    struct hazards h = *b->h;
    struct sampling_plan plan = plan_of(1);
    size_t n = h.n < MOST_JUDGED ? h.n : MOST_JUDGED, found = 0;
    plan.method = method;
    for (plan.seed = 1; plan.seed <= RUNS; plan.seed++)
        for (size_t k = 0; k < n; k += company) {
            struct arena *a = arena_new(NULL);
            h.risk = b->h->risk + k;
            h.n = company;
            size_t judged = company < n ? company : n;
            struct sampling got = hazards_sample(&h, a, hazards_sampler(&h, a, &plan), 0, judged);
            add_errors(&got, judged, errors + found);
            found += judged;
            arena_free(a);
        }
    qsort(errors, found, sizeof *errors, by_size);
    return errors[found / 2];
}

static void tell_errors(const struct bench *b)
{
    double plain = error_of(b, DRAW_PLAIN, 1);
    double cube = error_of(b, DRAW_HYPERCUBE, 1);
    double alone = error_of(b, DRAW_SCRAMBLED, 1);
    double group = error_of(b, DRAW_SCRAMBLED, GROUP);
    double all = error_of(b, DRAW_SCRAMBLED, b->h->n);
    printf("error of the mean of %d samples of a risk, relative, the median of %d hazards\n",
           POINTS, MOST_JUDGED);
    printf("  independent values                       %.4f\n", plain);
    printf("  hypercubes                               %.4f  1 / %.1f\n", cube, plain / cube);
    printf("  scrambled, the hazard's inputs alone     %.4f  1 / %.1f\n", alone, plain / alone);
    printf("  scrambled, those of %d hazards together   %.4f  1 / %.1f\n", GROUP, group,
           plain / group);
    printf("  scrambled, those of all hazards together %.4f  1 / %.1f\n", all, plain / all);
}

int main(int argc, char **argv)
{
    struct bench b = {.generator = gsl_rng_alloc(gsl_rng_default)};
    size_t n = argc == 2 ? strtoul(argv[1], NULL, 10) : 0;
    if (n < MOST_JUDGED)
        return 2;
    mem_system_keep();
    struct sampling_plan one = plan_of(1), two = plan_of(2);
    b.h = hazards_new(n);
    b.one = hazards_sampler(b.h, b.h->arena, &one);
    b.two = hazards_sampler(b.h, b.h->arena, &two);
    measure(&b);
    tell_errors(&b);
    gsl_rng_free(b.generator);
    arena_free(b.h->arena);
    return b.sum > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
