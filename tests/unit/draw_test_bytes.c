/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What decides the values, and what does not: instruction sets, other inputs, their order. */
#include "draw_test.h"

#include <math.h>
#include <string.h>

#include "failmem.h"

static const double counts[] = {0, 1, 4}, shares[] = {0.7, 0.238193, 0.061807};

static const struct draw_input all[] = {
    {"a", {DIST_NORMAL, {-3, 2}}, 1, 1},
    {"b", {DIST_LOGNORMAL, {0.01, 10, NAN}}, 2.385, 2},
    {"c", {DIST_LOGNORMAL, {1, 10, 2}}, 1, 3},
    {"d", {DIST_GAMMA, {2.385e-3, 0.5}}, 1, 7},
    {"e", {DIST_GAMMA, {17.1, 0.01}}, 1, 39},
    {"f", {DIST_BETA, {3.24, 189358}}, -1, 40},
    {"g", {DIST_UNIFORM, {2.385, 7.1}}, 1, 41},
    {"h", {DIST_TRIANGULAR, {-1, 2.385, 9}}, 1, 79},
    {"i", {DIST_PERT, {-1, 2.385, 9}}, 0, 80},
    {"j", {DIST_DISCRETE, {0}, 3, counts, shares}, 1, 85},
    {"k", {DIST_COUNTED, {0.01, 10, 2, 238.5}}, 1, 119},
    {"l", {DIST_GAMMA, {1, 1.24}}, 1, 4},
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
    {DRAW_SCRAMBLED, 4, 0, -0x1.b5200ad39f9f8p-2, 0x1.01cc74981edcp-2},
    {DRAW_SCRAMBLED, 4, 1, 0x1.33cd3fa694c71p-8, 0x1.bee17fdf81dfep-2},
    {DRAW_SCRAMBLED, 4, 3, 0x1.4c0b0cf826daep-17, 0x1.7851423e112bep-8},
    {DRAW_SCRAMBLED, 4, 5, -0x1.70bcc114add7fp-17, -0x1.91372e41dc115p-17},
    {DRAW_SCRAMBLED, 4, 9, 0x0p+0, 0x0p+0},
    {DRAW_SCRAMBLED, 4, 10, 0x1.a24561d66af23p-7, 0x1.13d5e49db2501p-6},
    {DRAW_SCRAMBLED, 10, 0, -0x1.bddb9b6fc998p-5, -0x1.0f90e24f80f7p+1},
    {DRAW_SCRAMBLED, 10, 1, 0x1.f7a969f862d39p-9, 0x1.23ac2bf405f09p-2},
    {DRAW_SCRAMBLED, 10, 3, 0x1.c27442581f24bp-18, 0x1.145b108d786fep-22},
    {DRAW_SCRAMBLED, 10, 5, -0x1.cae6eea02ac79p-17, -0x1.f186aef59edfbp-17},
    {DRAW_SCRAMBLED, 10, 9, 0x0p+0, 0x1p+0},
    {DRAW_SCRAMBLED, 10, 10, 0x1.658e1a9318d6p-7, 0x1.9e34eaa2bd4f1p-8},
    {DRAW_SCRAMBLED, 12, 0, -0x1.ff643c7a0d14p-5, 0x1.1da06136fc3acp+0},
    {DRAW_SCRAMBLED, 12, 1, 0x1.f954c68f3d1cdp-9, 0x1.ee3fddaee7ef1p-9},
    {DRAW_SCRAMBLED, 12, 3, 0x1.bd5c7b96d34fcp-18, 0x1.48da54ff82385p-9},
    {DRAW_SCRAMBLED, 12, 5, -0x1.6fb092b3360a5p-16, -0x1.424a78f7aac8bp-15},
    {DRAW_SCRAMBLED, 12, 9, 0x0p+0, 0x0p+0},
    {DRAW_SCRAMBLED, 12, 10, 0x1.016b490e0eb8dp-8, 0x1.64c4073e634e7p-6},
    {DRAW_HYPERCUBE, 10, 0, -0x1.44208c578f44p+2, -0x1.13309dcc078a7p+1},
    {DRAW_HYPERCUBE, 10, 1, 0x1.000ff34c76926p-6, 0x1.a4c52ff88e8a1p-5},
    {DRAW_HYPERCUBE, 10, 3, 0x1.1baf0b90881e5p-8, 0x1.1c4859188c7eap-9},
    {DRAW_HYPERCUBE, 10, 5, -0x1.4a82bcb276cd5p-16, -0x1.f9ff256366007p-17},
    {DRAW_HYPERCUBE, 10, 9, 0x0p+0, 0x1p+0},
    {DRAW_HYPERCUBE, 10, 10, 0x1.8f6df08b3bc9ap-8, 0x1.f1170e062c263p-8},
    {DRAW_PLAIN, 10, 0, -0x1.f79bb703e6471p+0, -0x1.3f33a65432a43p+0},
    {DRAW_PLAIN, 10, 1, 0x1.adbefc930b11dp-7, 0x1.ac85eacf70c32p-5},
    {DRAW_PLAIN, 10, 3, 0x1.13849ff57ad08p-9, 0x1.b445a9704bf39p-11},
    {DRAW_PLAIN, 10, 5, -0x1.98029a60f5089p-16, -0x1.80a0b1ff4c32fp-17},
    {DRAW_PLAIN, 10, 9, 0x0p+0, 0x1p+0},
    {DRAW_PLAIN, 10, 10, 0x1.641af806165a9p-7, 0x1.e62801cbb5dd1p-8},
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
