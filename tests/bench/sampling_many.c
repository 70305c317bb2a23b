/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Samples of very many hazards (hazards.h) in bounded memory.
 *
 *     sampling_many HAZARDS
 *
 * One sampler has the inputs of all hazards, so that the same sample is the same world for all of
 * them, and takes the risks of GROUP hazards at a time: mean and three quantiles of each, and what
 * all risks are together in each sample. Prints the most memory that was resident, beside that of
 * the graph alone; and, RUNS times in turn, the time of the whole beside the sum of its parts, each
 * alone: drawing the inputs, running the tapes, and the statistics. Owns the arena. */
#include "hazards.h"
#include "median.h"

#include "eval/tape.h"
#include "math/statistics.h"

#include <stdio.h>
#include <stdlib.h>
#include <sys/resource.h>

enum {
    POINTS = 64,
    SETS = SAMPLING_BATCH,
    SAMPLES = SETS * POINTS,
    GROUP = 32,
    QUANTILES = 3,
    INPUTS = GROUP * MODEL_INPUTS
};
static const double probability[QUANTILES] = {0.05, 0.5, 0.95};

struct of_hazard {
    struct sampled mean, quantile[QUANTILES];
};

struct bench {
    struct hazards *h;
    struct sampler *sampler;
    struct of_hazard *result;
    double total[SAMPLES];
    struct draws *draws;
    double *work;
    double rows[INPUTS][SAMPLES], risks[GROUP][SAMPLES];
};

static double megabytes(void)
{
    struct rusage u;
    getrusage(RUSAGE_SELF, &u);
    return (double)u.ru_maxrss / 1024;
}

static size_t group_at(const struct bench *b, size_t first)
{
    return b->h->n - first < GROUP ? b->h->n - first : GROUP;
}

/* ---- the whole ---- */

static void judge(struct bench *b, struct arena *a, size_t hazard, const double *x)
{
    struct of_hazard *to = &b->result[hazard];
    to->mean = statistics_mean(SETS, POINTS, x);
    statistics_quantiles(a, SETS, POINTS, x, QUANTILES, probability, to->quantile);
    for (size_t i = 0; i < SAMPLES; i++)
        b->total[i] += x[i];
}

static double time_whole(struct bench *b)
{
    double begin = bench_worked();
    for (size_t i = 0; i < SAMPLES; i++)
        b->total[i] = 0;
    for (size_t first = 0; first < b->h->n; first += GROUP) {
        struct arena *a = arena_new(NULL);
        size_t n = group_at(b, first);
        struct sampling got = hazards_sample(b->h, a, b->sampler, first, n);
        for (size_t k = 0; k < n; k++)
            judge(b, a, first + k, got.values[k]);
        arena_free(a);
    }
    return bench_worked() - begin;
}

/* ---- the parts ---- */

static double time_draws(struct bench *b)
{
    double begin = bench_worked();
    for (size_t first = 0; first < b->h->n; first += GROUP)
        for (size_t i = 0; i < group_at(b, first) * MODEL_INPUTS; i++)
            for (uint64_t set = 0; set < SETS; set++)
                draws_fill(b->draws, first * MODEL_INPUTS + i, set, b->work,
                           b->rows[i] + set * POINTS);
    return bench_worked() - begin;
}

static double run_tape(struct bench *b, const struct tape *t, struct tape_work *w, size_t n)
{
    const double *in[INPUTS];
    double *out[GROUP], begin = bench_worked();
    for (size_t at = 0; at < SAMPLES; at += POINTS) {
        for (size_t i = 0; i < n * MODEL_INPUTS; i++)
            in[i] = b->rows[i] + at;
        for (size_t k = 0; k < n; k++)
            out[k] = b->risks[k] + at;
        tape_run(t, w, POINTS, in, out);
    }
    return bench_worked() - begin;
}

/* Without the time in which tapes are made. */
static double time_tapes(struct bench *b)
{
    double took = 0;
    for (size_t first = 0; first < b->h->n; first += GROUP) {
        struct arena *a = arena_new(NULL);
        size_t n = group_at(b, first);
        uint32_t inputs[INPUTS];
        for (size_t i = 0; i < n * MODEL_INPUTS; i++)
            inputs[i] = (uint32_t)(first * MODEL_INPUTS + i);
        struct tape_inputs in = {.n = n * MODEL_INPUTS, .inputs = inputs};
        struct tape *t = tape_new(a, b->h->v, isa_best(), &in, n, b->h->risk + first);
        took += run_tape(b, t, tape_work_new(a, t, POINTS), n);
        arena_free(a);
    }
    return took;
}

static double time_statistics(struct bench *b)
{
    struct arena *a = arena_new(NULL);
    double begin = bench_worked();
    for (size_t k = 0; k < b->h->n; k++)
        judge(b, a, k, b->risks[k % group_at(b, 0)]);
    arena_free(a);
    return bench_worked() - begin;
}

static void make_draws(struct bench *b)
{
    struct sampling_plan p = sampling_defaults();
    struct draw_plan plan = {p.method, p.log2_points, p.seed, p.isa};
    struct draw_input *inputs = hazards_draws(b->h, b->h->arena, 0, b->h->n);
    if (draws_new(b->h->arena, &plan, b->h->n * MODEL_INPUTS, inputs, &b->draws, NULL) != OHMEN_OK)
        exit(EXIT_FAILURE);
    b->work = NEW_ARRAY(b->h->arena, draws_work(b->draws), double);
}

/* ---- what is told ---- */

static void tell(const struct bench *b, const char *what, double time)
{
    printf("  %-30s %8.0f ms, %6.1f ns a hazard's sample\n", what, time,
           time * 1e6 / (double)b->h->n / SAMPLES);
}

static void measure(struct bench *b)
{
    double whole[RUNS], draws[RUNS], tapes[RUNS], statistics[RUNS];
    for (int run = 0; run < RUNS; run++) {
        whole[run] = time_whole(b);
        draws[run] = time_draws(b);
        tapes[run] = time_tapes(b);
        statistics[run] = time_statistics(b);
    }
    double sum = bench_median(draws) + bench_median(tapes) + bench_median(statistics);
    tell(b, "the whole", bench_median(whole));
    tell(b, "drawing alone", bench_median(draws));
    tell(b, "tapes alone", bench_median(tapes));
    tell(b, "statistics alone", bench_median(statistics));
    printf("  the whole is %.2f times the sum of its parts\n", bench_median(whole) / sum);
}

int main(int argc, char **argv)
{
    static struct bench b;
    size_t n = argc == 2 ? strtoul(argv[1], NULL, 10) : 0;
    if (n == 0)
        return 2;
    mem_system_keep();
    b.h = hazards_new(n);
    b.result = NEW_ARRAY(b.h->arena, n, struct of_hazard);
    double graph = megabytes(), begin = bench_worked();
    struct sampling_plan plan = sampling_defaults();
    b.sampler = hazards_sampler(b.h, b.h->arena, &plan);
    double making = bench_worked() - begin;
    time_whole(&b);
    double sampled = megabytes();
    printf(
        "%zu hazards of 7 uncertain inputs and 40 operations, %d samples, %d hazards at a time\n",
        n, SAMPLES, GROUP);
    printf("  resident: the graph and its evaluation %.0f MB, with all samples %.0f MB\n", graph,
           sampled);
    tell(&b, "making the sampler, once", making);
    fflush(stdout); /* with very many hazards the rest takes long */
    make_draws(&b);
    measure(&b);
    arena_free(b.h->arena);
    return EXIT_SUCCESS;
}
