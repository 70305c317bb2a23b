/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Samples: what the files draw_test_*.c share, and the program. */
#include "draw_test.h"

#include <math.h>

struct drawing drawing_new(struct draw_plan plan, size_t inputs, const struct draw_input *in)
{
    struct drawing d = {.a = arena_new(NULL), .n = (size_t)1 << plan.log2_points};
    ohmen_error e = {0};
    struct draw_input *placed = arena_copy(d.a, in, inputs * sizeof *in);
    for (size_t i = 0; i < inputs; i++) /* that have none of their own */
        placed[i].place = in[i].place ? in[i].place : (unsigned)i;
    ck_assert_int_eq(draws_new(d.a, &plan, inputs, placed, &d.draws, &e), OHMEN_OK);
    d.work = NEW_ARRAY(d.a, draws_work(d.draws), double);
    d.x = NEW_ARRAY(d.a, inputs, double *);
    for (size_t i = 0; i < inputs; i++)
        d.x[i] = NEW_ARRAY(d.a, d.n, double);
    return d;
}

struct drawing drawing_of(enum draw_method method, unsigned log2, size_t inputs,
                          const struct draw_input *in)
{
    return drawing_new((struct draw_plan){method, log2, 17, isa_best()}, inputs, in);
}

const double *drawing_fill(const struct drawing *d, size_t input, uint64_t set)
{
    draws_fill(d->draws, input, set, d->work, d->x[input]);
    return d->x[input];
}

void drawing_free(struct drawing *d)
{
    arena_free(d->a);
}

struct draw_input drawn_evenly(const char *name)
{
    return (struct draw_input){name, {DIST_UNIFORM, {0, 1}, 0, NULL, NULL}, 1};
}

struct draw_input drawn_lognormal(const char *name, double median, double error_factor)
{
    return (struct draw_input){
        name, {DIST_LOGNORMAL, {median, error_factor, NAN}, 0, NULL, NULL}, 1};
}

struct draw_input drawn_gamma(const char *name, double mean, double shape)
{
    return (struct draw_input){name, {DIST_GAMMA, {mean, shape}, 0, NULL, NULL}, 1};
}

/* The chi-square distribution with n degrees of freedom is a gamma of shape n / 2, scale 2. */
void drawing_check_counts(const char *what, const double *count, size_t cells, double expected)
{
    double chi = 0;
    for (size_t i = 0; i < cells; i++)
        chi += (count[i] - expected) * (count[i] - expected) / expected;
    double p = dist_gamma_cdf((double)(cells - 1) / 2, chi / 2);
    ck_assert_msg(p > 0.001 && p < 0.999, "%s: chi-square %g of %zu cells: %g", what, chi, cells,
                  p);
}

struct estimate drawing_estimate(size_t n, const double *results)
{
    double sum = 0, squares = 0;
    for (size_t i = 0; i < n; i++)
        sum += results[i];
    double mean = sum / (double)n;
    for (size_t i = 0; i < n; i++)
        squares += (results[i] - mean) * (results[i] - mean);
    return (struct estimate){mean, sqrt(squares / (double)(n - 1) / (double)n)};
}

int main(void)
{
    Suite *suite = suite_create("samples");
    TCase *t = tcase_create("draws");
    tcase_set_timeout(t, 0);
    draw_test_order(t);
    draw_test_figures(t);
    draw_test_bytes(t);
    suite_add_tcase(suite, t);
    SRunner *runner = srunner_create(suite);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), ran = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed == 0 && ran > 0 ? 0 : 1;
}
