/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How long samples take, beside GSL's generators (with its Mersenne twister, its default), which
 * fill the same arrays in turn:
 *
 *     draws
 *
 * Nanoseconds a value, by method and shape; seven inputs together, by instruction set; the tables
 * of a new shape; and what a net is worth: the error of a mean (tests/lib/smooth.h). All at 1,024
 * points a set. */
#include <assert.h>
#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "math/draw.h"
#include "math/quantile_table.h"
#include "median.h"
#include "smooth.h"

/* Of all inputs together fewer sets are timed than of one, and by GSL fewer yet, so that what else
 * the machine does rarely falls into one time. */
enum {
    LOG2 = 10,
    POINTS = 1 << LOG2,
    SETS = 64,
    SETS_OF_ALL = 8,
    GSL_PART = 8,
    METHODS = 3,
    INPUTS = 7
};

static const char *const method_names[METHODS] = {"scrambled", "hypercube", "plain"};

static const struct draw_input inputs[INPUTS] = {
    {"gamma of shape 0.5", {DIST_GAMMA, {2e-2, 0.5}}, 1, 0},
    {"gamma of shape 1.24", {DIST_GAMMA, {2e-2, 1.24}}, 1, 1},
    {"gamma of shape 3.24", {DIST_GAMMA, {2e-2, 3.24}}, 1, 2},
    {"gamma of shape 20", {DIST_GAMMA, {2e-2, 20}}, 1, 3},
    {"lognormal, error factor 3", {DIST_LOGNORMAL, {1, 3, NAN}}, 1, 4},
    {"lognormal, error factor 5", {DIST_LOGNORMAL, {1, 5, NAN}}, 1, 5},
    {"lognormal, error factor 10", {DIST_LOGNORMAL, {1, 10, NAN}}, 1, 6}};

static double x[INPUTS][POINTS]; /* as many inputs as the smooth function has */
static_assert((int)INPUTS == (int)SMOOTH_INPUTS, "rows for all of them");

struct bench {
    struct arena *a;
    struct draws *draws[METHODS][ISA_COUNT];
    double *work;
    gsl_rng *generator;
    double sum; /* of some values, so that nothing is left out */
};

static struct bench bench_new(void)
{
    struct bench b = {.a = arena_new(NULL), .generator = gsl_rng_alloc(gsl_rng_default)};
    for (int m = 0; m < METHODS; m++)
        for (int isa = 0; isa < ISA_COUNT; isa++) {
            struct draw_plan plan = {(enum draw_method)m, LOG2, 1, (enum isa)isa};
            ohmen_error e = {0};
            if (isa_runs((enum isa)isa) &&
                draws_new(b.a, &plan, INPUTS, inputs, &b.draws[m][isa], &e) != OHMEN_OK)
                exit(EXIT_FAILURE);
        }
    b.work = NEW_ARRAY(b.a, draws_work(b.draws[0][0]), double);
    return b;
}

static double nanoseconds(double begin, int sets)
{
    return (bench_now() - begin) * 1e6 / sets / POINTS;
}

static int sets_of(size_t from, size_t to)
{
    return to - from > 1 ? SETS_OF_ALL : SETS;
}

static double time_fill(struct bench *b, const struct draws *d, size_t from, size_t to)
{
    double begin = bench_now();
    int sets = sets_of(from, to);
    for (int set = 0; set < sets; set++)
        for (size_t i = from; i < to; i++)
            draws_fill(d, i, (uint64_t)set, b->work, x[i]);
    b->sum += x[from][7];
    return nanoseconds(begin, sets);
}

static void gsl_fill(gsl_rng *g, const struct dist *d, double *out)
{
    double mean = log(d->p[0]), s = log(d->p[1]) / DIST_Z95;
    for (size_t i = 0; i < POINTS; i++)
        out[i] = d->shape == DIST_GAMMA ? gsl_ran_gamma(g, d->p[1], d->p[0] / d->p[1])
                                        : gsl_ran_lognormal(g, mean, s);
}

static double time_gsl(struct bench *b, size_t from, size_t to)
{
    double begin = bench_now();
    int sets = sets_of(from, to) / GSL_PART;
    for (int set = 0; set < sets; set++)
        for (size_t i = from; i < to; i++)
            gsl_fill(b->generator, &inputs[i].dist, x[i]);
    b->sum += x[from][7];
    return nanoseconds(begin, sets);
}

static void by_shape(struct bench *b)
{
    puts("nanoseconds a value           GSL  scrambled       hypercube       plain");
    for (size_t i = 0; i < INPUTS; i++) {
        double gsl[RUNS], own[METHODS][RUNS];
        for (int run = 0; run < RUNS; run++) {
            gsl[run] = time_gsl(b, i, i + 1);
            for (int m = 0; m < METHODS; m++)
                own[m][run] = time_fill(b, b->draws[m][isa_best()], i, i + 1);
        }
        double whole = bench_median(gsl);
        printf("%-27s %5.1f", inputs[i].name, whole);
        for (int m = 0; m < METHODS; m++) {
            double time = bench_median(own[m]);
            printf("  %4.1f (1 / %4.1f)", time, whole / time);
        }
        puts("");
    }
}

static void together(struct bench *b)
{
    double gsl[RUNS], own[METHODS][ISA_COUNT][RUNS];
    for (int run = 0; run < RUNS; run++) {
        gsl[run] = time_gsl(b, 0, INPUTS);
        for (int m = 0; m < METHODS; m++)
            for (int isa = 0; isa < ISA_COUNT; isa++)
                if (isa_runs((enum isa)isa))
                    own[m][isa][run] = time_fill(b, b->draws[m][isa], 0, INPUTS);
    }
    double whole = bench_median(gsl);
    printf("seven inputs, nanoseconds a sample: GSL %.1f\n", whole);
    for (int m = 0; m < METHODS; m++)
        for (int isa = 0; isa < ISA_COUNT; isa++)
            if (isa_runs((enum isa)isa)) {
                double time = bench_median(own[m][isa]);
                printf("  %-9s %-6s %6.1f  1 / %.1f of that\n", method_names[m],
                       isa_name((enum isa)isa), time, whole / time);
            }
}

static void tables(void)
{
    double own[INPUTS][RUNS], quantiles[INPUTS][RUNS];
    struct quantile_edges edges;
    quantile_edges(&edges);
    for (int run = 0; run < RUNS; run++)
        for (size_t i = 0; i < INPUTS; i++) {
            struct arena *a = arena_new(NULL);
            struct quantile_table t;
            double begin = bench_now(), sum = 0;
            quantile_table_new(a, &edges, &inputs[i].dist, &t);
            own[i][run] = bench_now() - begin;
            begin = bench_now();
            for (int k = 0; k < 64; k++)
                sum += dist_quantile(&inputs[i].dist, (k + 0.5) / 64, 1 - (k + 0.5) / 64);
            quantiles[i][run] = bench_now() - begin + 0 * sum;
            arena_free(a);
        }
    puts("microseconds for the tables of a shape, and for 64 single quantiles");
    for (size_t i = 0; i < INPUTS; i++)
        printf("%-27s %5.0f %5.0f\n", inputs[i].name, bench_median(own[i]) * 1e3,
               bench_median(quantiles[i]) * 1e3);
}

/* The mean of the squares of the errors of sets. */
static double mean_square(struct bench *b, const struct draws *d)
{
    const double *rows[SMOOTH_INPUTS];
    double squares = 0;
    for (uint64_t set = 0; set < SETS; set++) {
        for (size_t i = 0; i < SMOOTH_INPUTS; i++) {
            draws_fill(d, i, set, b->work, x[i]);
            rows[i] = x[i];
        }
        double error = smooth_error(POINTS, rows);
        squares += error * error / SETS;
    }
    return squares;
}

/* Over RUNS seeds, of which the median is told. */
static void errors(struct bench *b)
{
    double roots[METHODS][RUNS], plain;
    for (int m = 0; m < METHODS; m++)
        for (uint64_t seed = 0; seed < RUNS; seed++) {
            struct draw_plan plan = {(enum draw_method)m, LOG2, seed, isa_best()};
            struct draws *d;
            if (draws_new(b->a, &plan, SMOOTH_INPUTS, smooth_inputs, &d, NULL) != OHMEN_OK)
                exit(EXIT_FAILURE);
            roots[m][seed] = sqrt(mean_square(b, d));
        }
    plain = bench_median(roots[DRAW_PLAIN]);
    puts("error of a set's mean of a smooth function of seven inputs, the median of 11 seeds");
    for (int m = 0; m < METHODS; m++)
        printf("  %-9s %.5f  1 / %.1f of plain\n", method_names[m], bench_median(roots[m]),
               plain / bench_median(roots[m]));
}

int main(void)
{
    struct bench b = bench_new();
    by_shape(&b);
    together(&b);
    tables();
    errors(&b);
    gsl_rng_free(b.generator);
    arena_free(b.a);
    return b.sum > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
