/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Fault trees and protection structures against published values (fault_trees.txt,
 * which explains its rows, named on the command line). Every importance is had from
 * the diagram's own derivative or from a second evaluation. */
#include "graph/diagram.h"
#include "rows.h"

#include <check.h>
#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { MOST_EVENTS = 32, NAME = 8 };

static const char *data_file;

struct tree {
    struct arena *arena;
    struct diagram_builder *b;
    const struct diagram *d;
    uint32_t n;
    char name[MOST_EVENTS][NAME];
    double p[MOST_EVENTS], q[MOST_EVENTS], dp[MOST_EVENTS];
};

static void read_events(struct tree *t, char *text)
{
    for (char *word = strtok(text, " "); word; word = strtok(NULL, " ")) {
        char *equals = strchr(word, '=');
        ck_assert_msg(equals && equals - word < NAME && t->n < MOST_EVENTS, "bad event: %s", word);
        memcpy(t->name[t->n], word, (size_t)(equals - word));
        t->p[t->n] = strtod(equals + 1, NULL);
        t->q[t->n] = 1 - t->p[t->n];
        t->n++;
    }
}

static uint32_t event(const struct tree *t, const char *name)
{
    for (uint32_t i = 0; i < t->n; i++)
        if (strcmp(t->name[i], name) == 0)
            return i;
    ck_abort_msg("no event: %s", name);
    return 0;
}

static bfun read_function(struct tree *t, const char **at);

/* The arguments up to the closing parenthesis. */
static bfun read_gate(struct tree *t, const char *gate, const char **at)
{
    bfun f[MOST_EVENTS];
    size_t n = 0;
    while (**at != ')') {
        ck_assert_msg(**at && n < MOST_EVENTS, "no end of %s", gate);
        f[n++] = read_function(t, at);
    }
    ++*at;
    uint32_t k = strcmp(gate, "and") == 0 ? (uint32_t)n : 1;
    if (strncmp(gate, "least", 5) == 0)
        k = (uint32_t)strtoul(gate + 5, NULL, 10);
    else
        ck_assert_msg(k > 1 || strcmp(gate, "or") == 0, "no gate: %s", gate);
    return diagram_at_least(t->b, k, n, f);
}

static bfun read_function(struct tree *t, const char **at)
{
    char word[NAME] = "";
    *at += strspn(*at, " ");
    size_t n = 0;
    while (n + 1 < NAME && isalnum((unsigned char)**at))
        word[n++] = *(*at)++;
    bfun f;
    if (**at == '(') {
        ++*at;
        f = read_gate(t, word, at);
    } else {
        f = diagram_variable(t->b, event(t, word));
    }
    *at += strspn(*at, " ");
    return f;
}

static double *room(const struct tree *t)
{
    return NEW_ARRAY(t->arena, t->d->n_nodes + 2, double);
}

/* The top event; the derivatives go to t->dp. */
static double top(struct tree *t)
{
    double q, *work = room(t), weight = 1;
    memset(t->dp, 0, sizeof t->dp);
    diagram_evaluate(t->d, t->p, t->q, work, &q);
    diagram_backward(t->d, t->p, t->q, work, &weight, room(t), t->dp);
    return q;
}

static double top_with(struct tree *t, uint32_t e, double p)
{
    double p_before = t->p[e], q_before = t->q[e];
    t->p[e] = p;
    t->q[e] = 1 - p;
    double q = top(t);
    t->p[e] = p_before;
    t->q[e] = q_before;
    return q;
}

static bool fails(struct tree *t, unsigned set)
{
    for (uint32_t i = 0; i < t->n; i++) {
        t->p[i] = set >> i & 1;
        t->q[i] = 1 - t->p[i];
    }
    return top(t) == 1;
}

/* Sets of events that fail the tree and of which none can be left out. */
static double count_cuts(struct tree *t)
{
    int n = 0;
    for (unsigned set = 0; set < 1u << t->n; set++) {
        bool minimal = fails(t, set);
        for (uint32_t i = 0; i < t->n; i++)
            minimal = minimal && (!(set >> i & 1) || !fails(t, set & ~(1u << i)));
        n += minimal;
    }
    return n;
}

static double answer(struct tree *t, char *asked)
{
    char *what = strtok(asked, " "), *name = strtok(NULL, " ");
    if (strcmp(what, "q") == 0)
        return top(t);
    if (strcmp(what, "cuts") == 0)
        return count_cuts(t);
    ck_assert_msg(name != NULL, "%s of what?", what);
    uint32_t e = event(t, name);
    double sure = top_with(t, e, 1), impossible = top_with(t, e, 0), q = top(t);
    ck_assert_msg(fabs(t->dp[e] - (sure - impossible)) <= 1e-15, "two ways to dq / d%s", name);
    if (strcmp(what, "birnbaum") == 0)
        return t->dp[e];
    if (strcmp(what, "worth-up") == 0)
        return sure / q;
    if (strcmp(what, "worth-down") == 0)
        return q / impossible;
    ck_assert_str_eq(what, "fussell");
    return (q - impossible) / q;
}

static double figure(char *inputs)
{
    char *function = strchr(inputs, ';'), *asked = strrchr(inputs, ';');
    ck_assert_msg(function && asked != function, "three parts expected: %s", inputs);
    *function++ = *asked++ = 0;
    struct tree t = {.arena = arena_new(NULL)};
    t.b = diagram_builder_new(t.arena);
    read_events(&t, inputs);
    const char *at = function;
    bfun f = read_function(&t, &at);
    ck_assert_msg(*at == 0, "what is %s?", at);
    t.d = diagram_freeze(t.arena, t.b, 1, &f);
    double y = answer(&t, asked);
    arena_free(t.arena);
    return y;
}

START_TEST(published_values)
{
    ck_assert_int_gt(rows_check(data_file, figure), 20);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2) {
        fprintf(stderr, "usage: %s fault_trees.txt\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    Suite *s = suite_create("published fault trees");
    TCase *t = tcase_create("fault trees");
    tcase_add_test(t, published_values);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
