/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Compound sums against published values (aggregate.txt, which explains its rows, named on the
 * command line). */
#include "math/aggregate.h"
#include "math/severity.h"
#include "rows.h"

#include <check.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char *data_file;

enum { MOST_SEVERITIES = 8, LOG2_SMALL = 7, LOG2_FINE = 14 };

struct source {
    struct lattice lattice;
    struct severity severity;
    double expected;
};

static void add(void *ctx, size_t worker, size_t sample, struct intensity *to)
{
    const struct source *s = ctx;
    (void)worker;
    (void)sample;
    to->expected = s->expected;
    severity_add(&s->lattice, &s->severity, s->expected, (struct severity_place){0, 0}, to->down,
                 to->up);
}

/* The moments of both ends, whose middle they are of: an even one of the lattice is a step wide. */
struct moments {
    double mean, square;
};

static struct moments moments_of(const struct aggregate *x, const struct aggregate_end *end,
                                 double step)
{
    struct moments m = {0, 0};
    for (size_t j = 0; j < x->n; j++) {
        double s = (double)j * step;
        m.mean += end->p[j] * s;
        m.square += end->p[j] * s * s;
    }
    return m;
}

static double moment(const struct aggregate *x, double step, const char *kind)
{
    struct moments low = moments_of(x, &x->low, step), high = moments_of(x, &x->high, step);
    if (strncmp(kind, "mean", 4) == 0)
        return (low.mean + high.mean) / 2;
    return (low.square - low.mean * low.mean + high.square - high.mean * high.mean) / 2;
}

static enum aggregate_method method_named(const char *name)
{
    ck_assert(strcmp(name, "transform") == 0 || strcmp(name, "recursion") == 0);
    return strcmp(name, "transform") == 0 ? AGGREGATE_TRANSFORM : AGGREGATE_RECURSION;
}

static double figure(char *inputs)
{
    const char *kind = strtok(inputs, " "), *word;
    bool is_at = strcmp(kind, "at") == 0, uniform = strstr(kind, "uniform") != NULL;
    size_t at = is_at ? strtoul(strtok(NULL, " "), NULL, 10) : 0, n = 1;
    struct aggregate_plan plan = {uniform ? LOG2_FINE : LOG2_SMALL,
                                  1,
                                  1,
                                  1,
                                  isa_best(),
                                  is_at ? method_named(strtok(NULL, " ")) : AGGREGATE_TRANSFORM};
    double values[MOST_SEVERITIES] = {0}, points[] = {0, 1, 2, 3, 4, 5, 6, 7};
    struct source s = {.expected = strtod(strtok(NULL, " "), NULL)};
    struct arena *arena = arena_new(NULL);
    struct aggregate x;
    while ((word = strtok(NULL, " ")) && n < MOST_SEVERITIES)
        values[n++] = strtod(word, NULL);
    s.lattice = (struct lattice){uniform ? 0.25 : 1, (size_t)1 << plan.log2_points};
    struct dist d = {.shape = DIST_DISCRETE, .n = n, .values = points, .probabilities = values};
    if (uniform)
        d = (struct dist){.shape = DIST_UNIFORM, .p = {values[1], values[2]}};
    s.severity = severity_of_dist(arena, &s.lattice, &d, 1, 0);
    aggregate_find(arena, &plan, add, &s, &x, NULL);
    double y = is_at ? x.low.p[at] : moment(&x, s.lattice.step, kind);
    arena_free(arena);
    return y;
}

START_TEST(published_values)
{
    ck_assert_int_eq(rows_check(data_file, figure), 14);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2) {
        fprintf(stderr, "usage: %s aggregate.txt\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    Suite *s = suite_create("published aggregate damage");
    TCase *t = tcase_create("aggregate");
    tcase_add_test(t, published_values);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
