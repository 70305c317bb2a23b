/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Money over time against published values (money.txt, which explains its rows,
 * named on the command line). Everything is made of graph operations on constants;
 * the figure is the value of the node that comes out. */
#include "eval/eval.h"
#include "rows.h"

#include <check.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char *data_file;

static const struct dim number = {{0}};

static node_id con(struct graph *g, double x)
{
    return graph_const(g, x, number);
}

/* (1 + rate)^-t */
static node_id discount(struct graph *g, double rate, double t)
{
    return graph_op2(g, OP_POWER, graph_op2(g, OP_ADD, con(g, 1), con(g, rate)), con(g, -t));
}

/* Paid at the ends of n years: half a year later than ANNUITY. */
static node_id series(struct graph *g, double rate, double n)
{
    return graph_op2(g, OP_MULTIPLY, graph_annuity(g, con(g, rate), con(g, 0), con(g, n)),
                     discount(g, rate, 0.5));
}

static node_id times(struct graph *g, double factor, node_id x)
{
    return graph_op2(g, OP_MULTIPLY, con(g, factor), x);
}

static node_id pa(struct graph *g, const double *x)
{
    return series(g, x[0], x[1]);
}

static node_id ap(struct graph *g, const double *x)
{
    return graph_op2(g, OP_DIVIDE, con(g, 1), series(g, x[0], x[1]));
}

static node_id pf(struct graph *g, const double *x)
{
    return discount(g, x[0], x[1]);
}

static node_id payment(struct graph *g, const double *x)
{
    return times(g, x[2], ap(g, x));
}

static node_id present(struct graph *g, const double *x)
{
    return graph_op2(g, OP_ADD, times(g, x[2], pa(g, x)), times(g, x[3], pf(g, x)));
}

static node_id net(struct graph *g, const double *x)
{
    return graph_op(g, OP_SUM, 2, (node_id[]){times(g, x[1], discount(g, x[0], 1)),
                                              times(g, x[2], discount(g, x[0], 2))});
}

static const struct {
    const char *name;
    int n;
    node_id (*make)(struct graph *g, const double *x);
} kinds[] = {{"P/A", 2, pa},         {"A/P", 2, ap},         {"P/F", 2, pf},
             {"payment", 3, payment}, {"present", 4, present}, {"net", 3, net}};

enum { N_KINDS = sizeof kinds / sizeof *kinds };

static double figure(char *inputs)
{
    const char *kind = strtok(inputs, " ");
    double x[4];
    int n = 0, k = 0;
    for (const char *word; (word = strtok(NULL, " ")) && n < 4;)
        x[n++] = strtod(word, NULL);
    while (k < N_KINDS && strcmp(kinds[k].name, kind) != 0)
        k++;
    ck_assert_msg(k < N_KINDS && kinds[k].n == n, "unknown: %s with %d", kind, n);
    struct arena *arena = arena_new(NULL);
    struct graph *g = graph_new(arena);
    graph_section_begin(g, 0);
    node_id node = kinds[k].make(g, x);
    graph_section_end(g);
    struct eval *v = eval_new(arena, g);
    ck_assert_int_eq(eval_point(v, NULL, NULL), OHMEN_OK);
    double y = eval_value(v, node);
    arena_free(arena);
    return y;
}

START_TEST(published_values)
{
    ck_assert_int_eq(rows_check(data_file, figure), 9);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2) {
        fprintf(stderr, "usage: %s money.txt\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    Suite *s = suite_create("published money");
    TCase *t = tcase_create("money");
    tcase_add_test(t, published_values);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
