/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The elementary functions over lanes beside a loop over the scalar ones.
 *
 *     lanes COUNT
 *
 * Each function goes over the same block of values again and again, COUNT values in all: by the
 * scalar function, and by each instruction set that runs here; RUNS times, in turn. Told are the
 * nanoseconds a value of the scalar function, and how many times as fast the others are. Owns
 * nothing. */
#include <stdio.h>
#include <stdlib.h>

#include "base/isa.h"
#include "math/dist.h"
#include "math/elementary.h"
#include "math/lanes.h"
#include "median.h"
#include "random.h"

enum { BLOCK = 512, WAYS = ISA_COUNT + 1 };

struct block {
    double x[BLOCK], y[BLOCK], z[BLOCK];
};

typedef void over_block(const struct lanes_functions *f, struct block *b);

#define ONE(name)                                                                                  \
    static void scalar_##name(const struct lanes_functions *f, struct block *b)                    \
    {                                                                                              \
        (void)f;                                                                                   \
        for (size_t i = 0; i < BLOCK; i++)                                                         \
            b->z[i] = math_##name(b->x[i]);                                                        \
    }                                                                                              \
    static void lanes_##name(const struct lanes_functions *f, struct block *b)                     \
    {                                                                                              \
        f->name(BLOCK, b->x, b->z);                                                                \
    }

ONE(exp)
ONE(log)
ONE(log10)
ONE(expm1)
ONE(log1p)

static void scalar_pow(const struct lanes_functions *f, struct block *b)
{
    (void)f;
    for (size_t i = 0; i < BLOCK; i++)
        b->z[i] = math_pow(b->x[i], b->y[i]);
}

static void lanes_pow(const struct lanes_functions *f, struct block *b)
{
    f->pow(BLOCK, b->x, b->y, b->z);
}

static void scalar_deviate(const struct lanes_functions *f, struct block *b)
{
    (void)f;
    for (size_t i = 0; i < BLOCK; i++)
        b->z[i] = b->x[i] <= b->y[i] ? dist_normal_deviate(b->x[i]) : -dist_normal_deviate(b->y[i]);
}

static void lanes_deviate(const struct lanes_functions *f, struct block *b)
{
    f->deviate(BLOCK, b->x, b->y, b->z);
}

static const struct {
    const char *name;
    over_block *scalar, *lanes;
    double lo, hi; /* of x, evenly */
} functions[] = {
    {"exp", scalar_exp, lanes_exp, -20, 20},          {"log", scalar_log, lanes_log, 0, 10},
    {"log10", scalar_log10, lanes_log10, 0, 10},      {"expm1", scalar_expm1, lanes_expm1, -1, 1},
    {"log1p", scalar_log1p, lanes_log1p, -0.5, 1},    {"pow", scalar_pow, lanes_pow, 0, 10},
    {"deviate", scalar_deviate, lanes_deviate, 0, 1},
};
enum { FUNCTIONS = sizeof functions / sizeof *functions };

static double time_of(over_block *over, enum isa i, struct block *b, long blocks)
{
    const struct lanes_functions *f = lanes_functions(i);
    double begin = bench_now();
    for (long k = 0; k < blocks; k++)
        over(f, b);
    return bench_now() - begin;
}

/* y is 1 - x: the rest of a probability, or any power. */
static void fill(struct random *r, int k, struct block *b)
{
    for (size_t i = 0; i < BLOCK; i++) {
        b->x[i] = random_uniform(r, functions[k].lo, functions[k].hi);
        b->y[i] = 1 - b->x[i];
    }
}

static void measure(int k, struct block *b, long blocks)
{
    double times[WAYS][RUNS];
    for (int run = 0; run < RUNS; run++) {
        times[ISA_COUNT][run] = time_of(functions[k].scalar, ISA_plain, b, blocks);
        for (int i = 0; i < ISA_COUNT; i++)
            if (isa_runs((enum isa)i))
                times[i][run] = time_of(functions[k].lanes, (enum isa)i, b, blocks);
    }
    double scalar = bench_median(times[ISA_COUNT]);
    printf("%-8s %6.2f ns", functions[k].name, scalar * 1e6 / ((double)blocks * BLOCK));
    for (int i = 0; i < ISA_COUNT; i++)
        if (isa_runs((enum isa)i))
            printf("  %s %5.2f times", isa_name((enum isa)i), scalar / bench_median(times[i]));
    putchar('\n');
}

int main(int argc, char **argv)
{
    long count = argc == 2 ? strtol(argv[1], NULL, 10) : 0;
    struct random r = random_seed(1);
    struct block b;
    if (count < BLOCK) {
        fprintf(stderr, "usage: lanes COUNT, at least %d\n", BLOCK);
        return EXIT_FAILURE;
    }
    puts("over lanes, beside the scalar function");
    for (int k = 0; k < FUNCTIONS; k++) {
        fill(&r, k, &b);
        measure(k, &b, count / BLOCK);
    }
    return EXIT_SUCCESS;
}
