/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What decides the values, and what does not: instruction sets, other inputs, their order. */
#include "draw_test.h"

#include <math.h>
#include <string.h>

#include "failmem.h"

static const double counts[] = {0, 1, 4}, shares[] = {0.7, 0.238193, 0.061807};

static const struct draw_input all[] = {
    {"a", {DIST_NORMAL, {-3, 2}}, 1},
    {"b", {DIST_LOGNORMAL, {0.01, 10, NAN}}, 2.385},
    {"c", {DIST_LOGNORMAL, {1, 10, 2}}, 1},
    {"d", {DIST_GAMMA, {2.385e-3, 0.5}}, 1},
    {"e", {DIST_GAMMA, {17.1, 0.01}}, 1},
    {"f", {DIST_BETA, {3.24, 189358}}, -1},
    {"g", {DIST_UNIFORM, {2.385, 7.1}}, 1},
    {"h", {DIST_TRIANGULAR, {-1, 2.385, 9}}, 1},
    {"i", {DIST_PERT, {-1, 2.385, 9}}, 0},
    {"j", {DIST_DISCRETE, {0}, 3, counts, shares}, 1},
    {"k", {DIST_COUNTED, {0.01, 10, 2, 238.5}}, 1},
    {"l", {DIST_GAMMA, {1, 1.24}}, 1},
};
enum { INPUTS = sizeof all / sizeof *all, MOST = 1 << DRAW_MOST_LOG2 };

/* Every input of one instruction set beside those of the plain one. */
static void compare_sets(enum draw_method method, unsigned log2, enum isa isa)
{
    struct drawing plain = drawing_new((struct draw_plan){method, log2, 4, ISA_plain}, INPUTS, all);
    struct drawing other = drawing_new((struct draw_plan){method, log2, 4, isa}, INPUTS, all);
    for (size_t i = 0; i < INPUTS; i++)
        for (uint64_t set = 0; set < 3; set++) {
            const double *x = drawing_fill(&plain, i, set), *y = drawing_fill(&other, i, set);
            ck_assert_msg(memcmp(x, y, plain.n * sizeof *x) == 0, "%s of %s", all[i].name,
                          isa_name(isa));
        }
    drawing_free(&plain);
    drawing_free(&other);
}

START_TEST(instruction_sets_agree)
{
    for (int isa = ISA_plain + 1; isa < ISA_COUNT; isa++)
        for (int m = 0; m < METHODS && isa_runs((enum isa)isa); m++)
            for (unsigned log2 = DRAW_LEAST_LOG2; log2 <= DRAW_MOST_LOG2; log2++)
                compare_sets((enum draw_method)m, log2, (enum isa)isa);
}
END_TEST

START_TEST(other_inputs_do_not_matter)
{
    struct draw_input turned[INPUTS];
    for (size_t i = 0; i < INPUTS; i++)
        turned[INPUTS - 1 - i] = all[i];
    for (int m = 0; m < METHODS; m++) {
        struct drawing d = drawing_of((enum draw_method)m, 6, INPUTS, all);
        struct drawing back = drawing_of((enum draw_method)m, 6, INPUTS, turned);
        for (size_t i = 0; i < INPUTS; i++) {
            struct drawing one = drawing_of((enum draw_method)m, 6, 1, &all[i]);
            const double *x = drawing_fill(&d, i, 9);
            ck_assert_mem_eq(x, drawing_fill(&back, INPUTS - 1 - i, 9), d.n * sizeof *x);
            ck_assert_mem_eq(x, drawing_fill(&one, 0, 9), d.n * sizeof *x);
            drawing_free(&one);
        }
        drawing_free(&d);
        drawing_free(&back);
    }
}
END_TEST

/* The values themselves, so that they never change unnoticed: inputs of `all` in set 3 of the seed
 * 20, the first and the last one. Computed. */
static const struct {
    enum draw_method method;
    unsigned log2;
    size_t input;
    double first, last;
} golden[] = {
    {DRAW_SCRAMBLED, 4, 0, -0x1.77bfc6d856767p+1, -0x1.257881cb1fa0ap+0},
    {DRAW_SCRAMBLED, 4, 1, 0x1.066c388711b27p-5, 0x1.a3c9fef019002p-8},
    {DRAW_SCRAMBLED, 4, 3, 0x1.5227a52be6de8p-11, 0x1.fe7b9e1889adbp-9},
    {DRAW_SCRAMBLED, 4, 5, -0x1.68b6c5114f284p-18, -0x1.d0a0b821a8d0bp-16},
    {DRAW_SCRAMBLED, 4, 9, 0x0p+0, 0x1p+0},
    {DRAW_SCRAMBLED, 4, 10, 0x1.d7f2dc9c8c27ap-8, 0x1.33caddb81a917p-6},
    {DRAW_SCRAMBLED, 10, 0, -0x1.6364b9bbb02b1p+1, -0x1.0e42267c45ec6p+2},
    {DRAW_SCRAMBLED, 10, 1, 0x1.0a919ea7fe9f8p-5, 0x1.a91acd299cc48p-8},
    {DRAW_SCRAMBLED, 10, 3, 0x1.7a0b34924e834p-11, 0x1.1b784a644680fp-11},
    {DRAW_SCRAMBLED, 10, 5, -0x1.262c0509b8f32p-18, -0x1.32415c40a8803p-16},
    {DRAW_SCRAMBLED, 10, 9, 0x0p+0, 0x0p+0},
    {DRAW_SCRAMBLED, 10, 10, 0x1.fecb2fd568324p-8, 0x1.550be01c08baep-7},
    {DRAW_SCRAMBLED, 12, 0, -0x1.63a6a3ad0ab62p+1, 0x1.781a9b08b08bp-1},
    {DRAW_SCRAMBLED, 12, 1, 0x1.09fbbe3f27b74p-5, 0x1.ed9a82ec7dfa9p-8},
    {DRAW_SCRAMBLED, 12, 3, 0x1.7902d0d731bbap-11, 0x1.d4ca64dec67adp-13},
    {DRAW_SCRAMBLED, 12, 5, -0x1.23cd4c1464ce8p-18, -0x1.42d145b73505cp-16},
    {DRAW_SCRAMBLED, 12, 9, 0x0p+0, 0x0p+0},
    {DRAW_SCRAMBLED, 12, 10, 0x1.fef423dab467cp-8, 0x1.2c7b14e6569dp-7},
    {DRAW_HYPERCUBE, 10, 0, -0x1.16edab35d7384p+0, 0x1.4e16d5496184p-5},
    {DRAW_HYPERCUBE, 10, 1, 0x1.73f9d97288a22p-7, 0x1.94c6795d35d07p-6},
    {DRAW_HYPERCUBE, 10, 3, 0x1.6e09cda780267p-17, 0x1.6b59383b6bac3p-11},
    {DRAW_HYPERCUBE, 10, 5, -0x1.4cb379c73baffp-17, -0x1.657859bf0b681p-16},
    {DRAW_HYPERCUBE, 10, 9, 0x0p+0, 0x0p+0},
    {DRAW_HYPERCUBE, 10, 10, 0x1.f1ca689f7509p-9, 0x1.96c38de347df7p-8},
    {DRAW_PLAIN, 10, 0, -0x1.c751e2b92dcep+1, -0x1.1eace661e444cp+1},
    {DRAW_PLAIN, 10, 1, 0x1.118a07bd62348p-7, 0x1.33f112565c11ep-3},
    {DRAW_PLAIN, 10, 3, 0x1.81d6ca899cefbp-13, 0x1.8f194d5d36908p-10},
    {DRAW_PLAIN, 10, 5, -0x1.07dac2db818efp-17, -0x1.ab684196900dfp-17},
    {DRAW_PLAIN, 10, 9, 0x1p+0, 0x0p+0},
    {DRAW_PLAIN, 10, 10, 0x1.4cb85cdd419b6p-6, 0x1.00c738302b5fcp-7},
};

START_TEST(values_stay)
{
    for (size_t i = 0; i < sizeof golden / sizeof *golden; i++) {
        struct draw_plan plan = {golden[i].method, golden[i].log2, 20, isa_best()};
        struct drawing d = drawing_new(plan, 1, &all[golden[i].input]);
        const double *x = drawing_fill(&d, 0, 3);
        ck_assert_msg(x[0] == golden[i].first && x[d.n - 1] == golden[i].last,
                      "{%d, %u, %zu, %a, %a},", golden[i].method, golden[i].log2, golden[i].input,
                      x[0], x[d.n - 1]);
        drawing_free(&d);
    }
}
END_TEST

/* Values do depend on the seed, the name and the set; location and scale go through. */
START_TEST(what_matters)
{
    struct draw_input in[] = {drawn_evenly("a"), drawn_evenly("b"), drawn_evenly("a")};
    in[2].dist = (struct dist){DIST_UNIFORM, {1, 3}, 0, NULL, NULL};
    in[2].times = -3;
    struct drawing d = drawing_of(DRAW_PLAIN, 4, 3, in);
    struct drawing seeded = drawing_new((struct draw_plan){DRAW_PLAIN, 4, 18, isa_best()}, 1, in);
    double first[16];
    memcpy(first, drawing_fill(&d, 0, 0), sizeof first);
    ck_assert(first[0] != drawing_fill(&d, 0, 1)[0] && first[0] != drawing_fill(&d, 1, 0)[0]);
    ck_assert(first[0] != drawing_fill(&seeded, 0, 0)[0]);
    for (int i = 0; i < 16; i++)
        ck_assert_double_eq_tol(drawing_fill(&d, 2, 0)[i], -3 * (1 + 2 * first[i]), 1e-14);
    drawing_free(&d);
    drawing_free(&seeded);
}
END_TEST

/* Shares of a discrete one: of 2^12 strata as many as its probability says, but for its ends. */
START_TEST(discrete_shares)
{
    struct draw_input in = all[9];
    struct drawing d = drawing_of(DRAW_HYPERCUBE, 12, 1, &in);
    const double *x = drawing_fill(&d, 0, 0);
    for (int k = 0; k < 3; k++) {
        double found = 0;
        for (size_t i = 0; i < d.n; i++)
            found += x[i] == counts[k];
        ck_assert(fabs(found - shares[k] * (double)d.n) < 2);
    }
    drawing_free(&d);
}
END_TEST

START_TEST(memory)
{
    struct draw_plan plan = {DRAW_SCRAMBLED, 10, 17, isa_best()};
    for (size_t k = 0;; k++) {
        struct failmem f;
        jmp_buf out_of_memory;
        struct draws *d;
        ohmen_error e = {0};
        failmem_init(&f, k);
        struct arena *volatile a = arena_new(&f.mem);
        if (a && setjmp(out_of_memory) == 0) {
            arena_guard(a, &out_of_memory);
            ck_assert_int_eq(draws_new(a, &plan, INPUTS, all, &d, &e), OHMEN_OK);
            double *work = NEW_ARRAY(a, draws_work(d), double), *x = NEW_ARRAY(a, MOST, double);
            size_t before = f.allocations;
            for (size_t i = 0; i < INPUTS; i++)
                draws_fill(d, i, 3, work, x);
            ck_assert_uint_eq(f.allocations, before);
        }
        arena_free(a);
        failmem_check(&f);
        if (!f.failed)
            break;
    }
}
END_TEST

START_TEST(no_finite_quantile)
{
    static const struct dist bad[] = {{DIST_LOGNORMAL, {1e300, 1e6, NAN}},
                                      {DIST_GAMMA, {1, NAN}},
                                      {DIST_NORMAL, {1, INFINITY}},
                                      {DIST_DISCRETE, {0}, 0, counts, shares}};
    struct arena *a = arena_new(NULL);
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++) {
        struct draw_plan plan = {DRAW_HYPERCUBE, 4, 17, ISA_plain};
        struct draw_input in[] = {drawn_evenly("good"), {"bad.rate", bad[i], 1}};
        struct draws *d = NULL;
        ohmen_error e = {0};
        ck_assert_int_eq(draws_new(a, &plan, 2, in, &d, &e), OHMEN_COMPUTE);
        ck_assert_ptr_null(d);
        ck_assert_ptr_nonnull(strstr(e.text, "bad.rate"));
    }
    arena_free(a);
}
END_TEST

void draw_test_bytes(TCase *t)
{
    tcase_add_test(t, instruction_sets_agree);
    tcase_add_test(t, other_inputs_do_not_matter);
    tcase_add_test(t, values_stay);
    tcase_add_test(t, what_matters);
    tcase_add_test(t, discrete_shares);
    tcase_add_test(t, memory);
    tcase_add_test(t, no_finite_quantile);
}
