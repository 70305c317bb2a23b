/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A compound distribution beside the bare Fourier transforms that it needs.
 *
 *     aggregate LOG2
 *
 * Both ends of a sum on 2^LOG2 points, of one sample: by aggregate_find whole, and by 64 samples in
 * 16 sets, a sample. Beside it one transform forward and one back of twice as many points, alone
 * and with their table of sines, which a sum over samples needs once. RUNS times, in turn, in time
 * that the thread has worked. Owns nothing. */
#include <stdio.h>
#include <stdlib.h>

#include "math/aggregate.h"
#include "math/fft.h"
#include "math/severity.h"
#include "median.h"

enum { SETS = 16, POINTS = 4 };

struct source {
    struct lattice lattice;
    struct severity severity;
};

static void add(void *ctx, size_t worker, size_t sample, struct intensity *to)
{
    const struct source *s = ctx;
    (void)worker;
    to->expected = 2.385 + 0.1 * (double)sample;
    severity_add(&s->lattice, &s->severity, to->expected, (struct severity_place){0, 0}, to->down,
                 to->up);
}

static double time_of(const struct source *s, unsigned log2, size_t sets, size_t points)
{
    struct arena *a = arena_new(NULL);
    struct aggregate_plan plan = {log2, sets, points, 1, isa_best(), AGGREGATE_TRANSFORM};
    struct aggregate x;
    double begin = bench_worked();
    aggregate_find(a, &plan, add, (void *)s, &x, NULL);
    double time = bench_worked() - begin;
    arena_free(a);
    return time;
}

struct bare {
    const struct fft *fft;
    double *x, *work;
};

static double time_of_bare(const struct bare *b)
{
    double begin = bench_worked();
    fft_forward(b->fft, b->x, b->work);
    fft_inverse(b->fft, b->x, b->work);
    return bench_worked() - begin;
}

static double time_of_table(unsigned log2)
{
    struct arena *a = arena_new(NULL);
    double begin = bench_worked();
    fft_new(a, log2 + 1);
    double time = bench_worked() - begin;
    arena_free(a);
    return time;
}

static double time_of_forward(const struct bare *b)
{
    double begin = bench_worked();
    fft_forward(b->fft, b->x, b->work);
    return bench_worked() - begin;
}

static void measure(struct arena *a, unsigned log2)
{
    size_t n = (size_t)1 << log2;
    struct dist gamma = {.shape = DIST_GAMMA, .p = {1, 2}};
    struct source s = {.lattice = {30. / (double)n, n}};
    struct bare b = {fft_new(a, log2 + 1), NEW_ARRAY(a, 4 * n, double),
                     NEW_ARRAY(a, 4 * n, double)};
    double whole[RUNS], many[RUNS], bare[RUNS], forward[RUNS], table[RUNS];
    s.severity = severity_of_dist(a, &s.lattice, &gamma, 1, 0);
    b.x[2] = 1;
    for (int run = 0; run < RUNS; run++) {
        whole[run] = time_of(&s, log2, 1, 1);
        many[run] = time_of(&s, log2, SETS, POINTS) / (SETS * POINTS);
        bare[run] = time_of_bare(&b);
        table[run] = time_of_table(log2);
        forward[run] = time_of_forward(&b);
    }
    double both = bench_median(bare), one = bench_median(forward);
    double once = bench_median(whole), each = bench_median(many);
    double tables = bench_median(table);
    printf("%zu points: %.2f ms; bare transforms %.2f ms: %.2f times; with their table %.2f ms: "
           "%.2f times\n",
           n, once, both, once / both, both + tables, once / (both + tables));
    printf("a sample of %d: %.2f ms; bare transform %.2f ms: %.2f times\n", SETS * POINTS, each,
           one, each / one);
}

int main(int argc, char **argv)
{
    unsigned long log2 = argc == 2 ? strtoul(argv[1], NULL, 10) : 0;
    if (log2 < AGGREGATE_LEAST_LOG2 || log2 > AGGREGATE_MOST_LOG2) {
        fprintf(stderr, "usage: aggregate LOG2, %d to %d\n", AGGREGATE_LEAST_LOG2,
                AGGREGATE_MOST_LOG2);
        return EXIT_FAILURE;
    }
    struct arena *a = arena_new(NULL);
    measure(a, (unsigned)log2);
    arena_free(a);
    return EXIT_SUCCESS;
}
