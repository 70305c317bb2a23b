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
    tcase_add_test(t, what_matters);
    tcase_add_test(t, discrete_shares);
    tcase_add_test(t, memory);
    tcase_add_test(t, no_finite_quantile);
}
